"""A form being covered in a child process: the window stays alive, and whatever befalls the child stays with it."""

import json
import pickle
import subprocess
import sys
import tempfile
from pathlib import Path

import bpy
import numpy as np

from . import worker


class JobError(Exception):
    """Why a form could not be covered, as a sentence for the maker."""


class Job:
    """Covers `reading` (a read.Reading) to the wishes `asked`; starts at once.

    `save` are keyword arguments of Pattern.save, or None. Ask `running()` now and then; `share` (0 to 1) and `words` say how
    far it is. When it has ended `pattern()` gives the answer and `path` its file, kept as long as the host's session.
    """

    def __init__(self, reading, asked, save=None):
        self.reading, self.asked = reading, asked
        self.share, self.words, self.error, self.done = 0.0, "starting", None, False
        self.stop_wanted = False
        folder = Path(tempfile.mkdtemp(prefix="seamwright-", dir=bpy.app.tempdir))
        self.path, self._errors = folder / "pattern.pickle", folder / "errors.txt"
        request = {"path": sys.path, "name": reading.name, "wishes": asked, "save": save}
        (folder / "request.json").write_text(json.dumps(request), encoding="utf-8")
        np.savez(folder / "form.npz", points=reading.points, corners=reading.corners, sizes=reading.sizes,
                 **{name: getattr(reading, name) for name in worker.DRAWN})
        command = [sys.executable, *bpy.app.python_args, worker.__file__, str(folder)]
        # messages go through a file, which every system can read without waiting
        with open(folder / "messages.txt", "wb") as out, open(self._errors, "wb") as errors:
            self._process = subprocess.Popen(
                command, stdin=subprocess.PIPE, stdout=out, stderr=errors,
                creationflags=getattr(subprocess, "CREATE_NO_WINDOW", 0))
        self._messages = open(folder / "messages.txt", encoding="utf-8")
        self._rest = ""

    def running(self):
        """True until the child has ended; takes in what it said meanwhile."""
        if self._messages.closed:
            return False
        ended = self._process.poll() is not None
        *lines, self._rest = (self._rest + self._messages.read()).split("\n")
        for line in lines:
            message = json.loads(line)
            self.share, self.words = message.get("share", self.share), message.get("words", self.words)
            self.error, self.done = message.get("error", self.error), message.get("done", self.done)
        if ended:
            self._close()
        return not ended

    def stop(self):
        """End the child now."""
        self._process.kill()
        self._process.wait()
        self._close()
        self.error = "stopped."

    def pattern(self):
        """The Pattern of a job that has ended. Raises JobError."""
        if self.error:
            raise JobError(self.error if self.reading.name in self.error else f"{self.reading.name}: {self.error}")
        if not self.done:
            told = self._errors.read_text(encoding="utf-8", errors="replace").strip()
            print(told, file=sys.stderr)
            lines = told.splitlines() or ["it said nothing"]
            raise JobError(f"{self.reading.name}: the solver broke off, and that is a fault of the program ({lines[-1]}). "
                           "Please report it together with the form.")
        return load(self.path)

    def _close(self):
        self._messages.close()
        self._process.stdin.close()


def load(path):
    """The Pattern that a worker of this session left at `path`."""
    with open(path, "rb") as file:
        return pickle.load(file)
