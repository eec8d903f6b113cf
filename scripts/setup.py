"""Makes .venv at the root, once: the host as a Python module, the solver's libraries, the tests' tools, all pinned.

    python3 scripts/setup.py

Needs nothing but Python's standard library. The other scripts call `enter`, so nobody has to run this by hand.
"""

import hashlib
import os
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
VENV = ROOT / ".venv"
STAMP = "seamwright-ready"  # written last, inside .venv: without it, or with another text in it, .venv is made anew

HOST_PINS = {
    (3, 11): ["bpy==4.5.15", "numpy==1.26.4", "scipy==1.15.3"],
    (3, 13): ["bpy==5.2.3", "numpy==2.4.6", "scipy==1.15.3"],
}
PINS = [
    "fpdf2==2.8.9", "shapely==2.2.0", "fonttools==4.68.0", "defusedxml==0.7.1",  # what the solver writes sheets with
    "threadpoolctl==3.8.0",  # one thread for small systems
    "pytest==9.2.0", "ruff==0.17.6", "pdfplumber==0.11.10", "svgelements==1.9.6",  # what the tests need
    "libigl==2.6.3",  # what the bench compares with
]
SYSTEM_LIBRARIES = "libx11-6 libxi6 libxxf86vm1 libxfixes3 libxrender1 libxkbcommon0 libsm6 libgl1"


class SetupError(Exception):
    """Why the set-up cannot go on, in one line."""


def pins(version):
    """Packages for Python `version`, a (major, minor) pair. Raises SetupError where the host has no module for it."""
    if version not in HOST_PINS:
        raise SetupError(
            "This needs Python 3.11 or 3.13 and was started with {}.{}: install one of them and run it with that, "
            "say python3.11 {}.".format(*version, Path(sys.argv[0]).name)
        )
    return HOST_PINS[version] + PINS


def stamp(packages, python=sys.version, root=ROOT):
    """Fingerprint of everything that makes a finished .venv unusable when it changes (a moved .venv does not work)."""
    return hashlib.sha256("\n".join([python, str(root), *packages]).encode()).hexdigest()


def is_ready(venv, wanted):
    """True where `venv` was finished with the fingerprint `wanted`."""
    try:
        return (venv / STAMP).read_text() == wanted and python_of(venv).exists()
    except OSError:
        return False


def python_of(venv):
    """Path of the interpreter in `venv`."""
    return venv / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def check_tools():
    """Raise SetupError where this Python cannot make virtual environments."""
    try:
        import ensurepip  # noqa: F401
        import venv  # noqa: F401
    except ImportError:
        name = "python{}.{}-venv".format(*sys.version_info[:2])
        raise SetupError(
            f"This Python lacks the modules venv and ensurepip: install them (Debian, Ubuntu: apt-get install {name})."
        ) from None


def run(words, failure):
    """Run a command quietly; on failure show its last lines and raise SetupError(failure)."""
    done = subprocess.run(words, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True, cwd=ROOT)
    if done.returncode:
        print("\n".join(done.stdout.splitlines()[-15:]), file=sys.stderr)
        raise SetupError(failure)


def make(venv, packages, wanted):
    """Make `venv` from nothing and stamp it; whatever stops this, no half-made folder is left behind."""
    shutil.rmtree(venv, ignore_errors=True)
    base = getattr(sys, "_base_executable", sys.executable)
    python = str(python_of(venv))
    finished = False
    try:
        run([base, "-m", "venv", str(venv)], f"Python could not make {venv}: see the lines above.")
        run([python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check", *packages],
            "The packages could not be installed (lines above): check the network and the disk, then run this again.")
        run([python, "-c", "import bpy"],
            "The host's module does not load (lines above): it needs the system's graphics libraries "
            f"(Debian, Ubuntu: apt-get install {SYSTEM_LIBRARIES}).")
        install_own(venv)
        (venv / STAMP).write_text(wanted)
        finished = True
    finally:
        if not finished:
            shutil.rmtree(venv, ignore_errors=True)


def install_own(venv):
    """Let .venv's Python find the solver and the add-on where they lie, and add the command `seamwright`."""
    python = python_of(venv)
    site = subprocess.run([str(python), "-c", "import sysconfig; print(sysconfig.get_path('purelib'))"],
                          stdout=subprocess.PIPE, text=True, check=True).stdout.strip()
    (Path(site) / "seamwright-source.pth").write_text(f"{ROOT / 'solver'}\n{ROOT}\n")
    start = "import sys; from addon.cli import main; sys.exit(main(sys.argv[1:]))"
    if os.name == "nt":
        (python.parent / "seamwright.cmd").write_text(f'@"%~dp0python.exe" -c "{start}" %*\n')
        return
    command = python.parent / "seamwright"
    command.write_text(f'#!/bin/sh\nexec "$(dirname "$(readlink -f "$0")")/python" -c "{start}" "$@"\n')
    command.chmod(0o755)


def ready():
    """Path of .venv's Python, after making .venv where it is missing or out of date. Raises SetupError."""
    packages = pins(sys.version_info[:2])
    wanted = stamp(packages)
    if not is_ready(VENV, wanted):
        check_tools()
        print("Setting up .venv, once; it downloads some 400 MB ...", file=sys.stderr, flush=True)
        make(VENV, packages, wanted)
    return python_of(VENV)


def enter(script):
    """Make sure .venv stands and that `script` runs in it: returns inside .venv, restarts the script otherwise."""
    try:
        python = ready()
    except SetupError as error:
        sys.exit(str(error))
    if Path(sys.prefix).resolve() != VENV:
        sys.exit(subprocess.call([str(python), str(script), *sys.argv[1:]]))


if __name__ == "__main__":
    try:
        print(f"ready: {ready()}")
    except SetupError as problem:
        sys.exit(str(problem))
