"""Covers the demo scene with the project's own command line, and gathers the figures of every form from the sheets."""

import json
import subprocess
import sys
import time
from dataclasses import dataclass

import numpy as np
from seamwright.sheets.report import farthest, quantiles

from . import covered


@dataclass(frozen=True)
class Row:
    """One line of the demo's table; `error` says why a form has no pattern, and then the figures are None.

    stretch: 5th and 95th percentile over the form's area, of the smaller and the larger principal one; worst: the one
    farthest from none. All are shares. seconds: from the first to the last message about this form.
    """

    form: str
    folder: str
    seconds: float
    error: str | None = None
    goods: str | None = None
    fits: bool = False
    pieces: int | None = None
    seam_metres: float | None = None
    stretch: tuple | None = None
    worst: float | None = None


def cover(scene_file, out, workers):
    """(exit status, rows): run `seamwright cover` on a .blend, its messages passing through to standard error.

    Raises RuntimeError where the command ends without a summary.
    """
    command = [sys.executable, "-c", "import sys; from addon.cli import main; sys.exit(main(sys.argv[1:]))",
               "cover", str(scene_file), "--out", str(out), "--workers", str(workers), "--json",
               "--save", str(out / "harbour covered.blend")]
    run = subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, encoding="utf-8")
    first, last = {}, {}
    for line in run.stderr:
        print(line, end="", file=sys.stderr, flush=True)
        name = line.split(":")[0]
        first.setdefault(name, time.monotonic())
        last[name] = time.monotonic()
    summary = run.stdout.read()
    status = run.wait()
    if not summary:
        raise RuntimeError(f"The command ended with status {status} and no summary; its messages are above.")
    seconds = {name: last[name] - first[name] for name in first}
    return status, [_row(form, out, seconds) for form in json.loads(summary)["forms"]]


def _row(form, out, seconds):
    name = form["object"]
    known = {"form": name, "folder": form["folder"], "seconds": seconds.get(name, 0.0)}
    if "error" in form:
        return Row(**known, error=form["error"])
    document = covered.read(out / form["folder"] / "pattern.json")
    summary, stretch, areas = document["summary"], [], []
    for piece in document["pieces"]:
        a, b, c = (piece["points"][piece["triangles"][:, k]] for k in range(3))
        areas.append(np.linalg.norm(np.cross(b - a, c - a), axis=1) / 2)
        stretch.append(piece["stretch"])
    stretch, areas = np.concatenate(stretch), np.concatenate(areas)
    ends = quantiles(stretch[:, 1], areas, 0.05), quantiles(stretch[:, 0], areas, 0.95)
    return Row(**known, goods=summary["goods"]["name"], fits=summary["fits"], pieces=len(document["pieces"]),
               seam_metres=summary["seam_metres"], stretch=ends, worst=farthest(stretch))


def table(rows):
    """The table as text, one line a form."""
    lines = [f"{'form':15}{'goods':18}{'pieces':>7}{'seam, m':>9}{'stretch 5..95 %':>18}{'worst':>8}  {'fits':5}"
             f"{'seconds':>8}"]
    for row in rows:
        if row.error:
            lines.append(f"{row.form:15}{row.error}")
            continue
        ends = f"{100 * row.stretch[0]:+.1f} .. {100 * row.stretch[1]:+.1f}"
        lines.append(f"{row.form:15}{row.goods:18}{row.pieces:7}{row.seam_metres:9.2f}{ends:>18}{100 * row.worst:+8.1f}"
                     f"  {'yes' if row.fits else 'no':5}{row.seconds:8.0f}")
    return "\n".join(lines)
