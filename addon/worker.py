"""The child process that covers one form. Started by `job.Job` as a script; knows the solver, never the host.

    python worker.py FOLDER

FOLDER holds request.json and form.npz; the worker writes pattern.pickle there, and messages, one JSON object a line, on
standard output: {"share": 0 to 1, "words": ...} on the way, {"error": sentence} or {"done": true} at the end.
It ends with its parent: standard input is kept open by the parent alone.
"""

import json
import os
import pickle
import sys
import threading
from pathlib import Path

DRAWN = ("keep_clear", "held", "shut", "only", "start")
"""Wishes that are drawn on the mesh; they come as arrays, empty where there is none."""


def wishes_of(asked, drawn=None):
    """The solver's Wishes from plain data as `WishesGroup.asked` gives it, and those DRAWN by name. Raises WishError."""
    import seamwright as sw

    plain = dict(asked)
    own = plain.pop("own_goods", None)
    plain.pop("cut_itself", None)  # where the answer goes is the host's affair
    if own:
        plain["goods"] = sw.read_goods(own)
    return sw.Wishes(**plain, **{name: values for name, values in (drawn or {}).items() if len(values)})


def say(**message):
    """One message to the parent."""
    print(json.dumps(message), flush=True)


def work(folder):
    """Cover the form in `folder`, save its sheets where asked, leave pattern.pickle."""
    request = json.loads((folder / "request.json").read_text(encoding="utf-8"))
    sys.path[:] = request["path"]
    import numpy as np
    import seamwright as sw

    try:
        with np.load(folder / "form.npz") as arrays:
            points, corners, sizes = (arrays[key] for key in ("points", "corners", "sizes"))
            drawn = {name: arrays[name] for name in DRAWN}
        faces = corners.reshape(-1, 3) if (sizes == 3).all() else np.split(corners, np.cumsum(sizes)[:-1])
        form = sw.Form(points, faces, name=request["name"])
        wishes = wishes_of(request["wishes"], drawn)
        pattern = sw.cover(form, wishes, lambda share, words: say(share=float(share), words=words))
        if request["save"]:
            pattern.save(**request["save"])
    except (sw.SeamwrightError, OSError, MemoryError) as error:
        say(error=str(error) or "The memory was used up: cover a coarser form.")
        return
    with open(folder / "pattern.pickle", "wb") as out:
        pickle.dump(pattern, out)
    say(done=True)


def _end_with_parent():
    os.read(0, 1)  # nothing is ever written there: this returns when the parent is gone
    os._exit(1)


if __name__ == "__main__":
    threading.Thread(target=_end_with_parent, daemon=True).start()
    work(Path(sys.argv[1]))
