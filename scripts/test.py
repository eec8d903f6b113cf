"""Runs every check of the project: the linter, then the tests. Extra arguments go to pytest.

    python3 scripts/test.py
    python3 scripts/test.py tests/form -k mend
"""

import os
import subprocess
import sys

import setup


def main(arguments):
    """Exit status of the first check that fails, after all have run; 0 where none does."""
    # small systems: more threads than cores cost time and make sums depend on the machine
    env = {**os.environ, "OPENBLAS_NUM_THREADS": "1"}
    here = {"cwd": setup.ROOT, "env": env}
    lint = subprocess.call([sys.executable, "-m", "ruff", "check", "."], **here)
    # a path among the arguments is relative to the root; without one, all of tests/
    named = any(not word.startswith("-") and (setup.ROOT / word.split("::")[0]).exists() for word in arguments)
    where = [] if named else ["tests"]
    # a test that takes minutes shows where it is; -rs says what was skipped and why
    options = ["-rs", "-o", "faulthandler_timeout=300"]
    tests = subprocess.call([sys.executable, "-m", "pytest", *options, *where, *arguments], **here)
    return lint or tests


if __name__ == "__main__":
    setup.enter(__file__)
    sys.exit(main(sys.argv[1:]))
