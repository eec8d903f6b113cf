"""Builds the demo scene, covers it, prints the table, and leaves out/ with sheets, pictures and a page.

    python3 scripts/demo.py

Open out/index.html afterwards. Exit status as the command line's: 0 all fits, 1 a piece is strained, 3 a form failed.
"""

import subprocess
import sys

import setup

WORKERS = 2


def main():
    """The whole demo; returns its exit status."""
    from harbour import covering, page, pictures

    out = setup.ROOT / "out"
    out.mkdir(exist_ok=True)
    scene_file = out / pictures.SCENE_FILE
    print("Modelling the harbour's props ...", file=sys.stderr, flush=True)
    subprocess.run([sys.executable, "-m", "harbour.scene", str(scene_file)], cwd=pictures.HERE, stdout=subprocess.DEVNULL,
                   check=True)
    status, rows = covering.cover(scene_file, out, WORKERS)
    print("Drawing the pictures ...", file=sys.stderr, flush=True)
    pictures.draw(out, [row.folder for row in rows if not row.error], WORKERS)
    page.write(out, rows)
    print(covering.table(rows))
    print(f"Look at {out / 'index.html'}")
    return status


if __name__ == "__main__":
    setup.enter(__file__)
    sys.exit(main())
