"""Covers the demo scene with the project's own command line, and gathers the figures of every form from the sheets."""

import json
import subprocess
import sys
import time
from dataclasses import dataclass

import numpy as np
from seamwright.sheets.figures import farthest, quantiles

from . import covered


@dataclass(frozen=True)
class Row:
    """One line of the demo's table; `error` says why a form has no pattern, and then the figures are None.

    stretch: 5th percentile over the form's area of the smaller and 95th of the larger of two: along warp and weft in cloth
    that shears, else the principal ones; worst: the one farthest from none; all are shares. shear: largest, degrees, None
    where the goods have no such limit. seconds: from the first to the last message about this form.
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
    shear: float | None = None


def cover(scene_file, out, workers):
    """(exit status, rows): run `seamwright cover` on a .blend, its messages passing through to standard error.

    Raises RuntimeError where the command ends without a summary.
    """
    command = [sys.executable, "-c", "import sys; from addon.cli import main; sys.exit(main(sys.argv[1:]))",
               "cover", str(scene_file), "--out", str(out), "--workers", str(workers),
               "--save", str(out / "harbour covered.blend")]
    summary = out / "summary.json"
    summary.unlink(missing_ok=True)
    run = subprocess.Popen(command, stdout=subprocess.DEVNULL, stderr=subprocess.PIPE, text=True, encoding="utf-8")
    first, last = {}, {}
    for line in run.stderr:
        print(line, end="", file=sys.stderr, flush=True)
        name = line.split(":")[0]
        first.setdefault(name, time.monotonic())
        last[name] = time.monotonic()
    status = run.wait()
    if not summary.exists():
        raise RuntimeError(f"The command ended with status {status} and no summary; its messages are above.")
    seconds = {name: last[name] - first[name] for name in first}
    return status, [_row(form, out, seconds) for form in json.loads(summary.read_text(encoding="utf-8"))["forms"]]


def _row(form, out, seconds):
    name = form["object"]
    known = {"form": name, "folder": form["folder"], "seconds": seconds.get(name, 0.0)}
    if "error" in form:
        return Row(**known, error=form["error"])
    document = covered.read(out / form["folder"] / "pattern.json")
    summary, stretch, areas, shear = document["summary"], [], [], None
    for piece in document["pieces"]:
        a, b, c = (piece["points"][piece["triangles"][:, k]] for k in range(3))
        areas.append(np.linalg.norm(np.cross(b - a, c - a), axis=1) / 2)
        stretch.append(np.array(piece["stretch"]))
        if summary["goods"]["shear_degrees"]:
            bent = np.array(piece["warp_weft_shear_degrees"])
            stretch[-1] = -np.sort(-bent[:, :2], axis=1)
            shear = max(shear or 0.0, np.abs(bent[:, 2]).max())
    stretch, areas = np.concatenate(stretch), np.concatenate(areas)
    ends = quantiles(stretch[:, 1], areas, 0.05), quantiles(stretch[:, 0], areas, 0.95)
    return Row(**known, goods=summary["goods"]["name"], fits=summary["fits"], pieces=len(document["pieces"]),
               seam_metres=summary["seam_metres"], stretch=ends, worst=farthest(stretch), shear=shear)


HEAD = ("form", "goods", "pieces", "seam, m", "stretch 5..95 %", "worst %", "shear", "fits", "seconds")


def table(rows):
    """The table as text, one line a form."""
    lines = [HEAD]
    for row in rows:
        if row.error:
            continue
        low, high, worst = (f"{100 * share:+.1f}" for share in (*row.stretch, row.worst))
        shear = "" if row.shear is None else f"{row.shear:.0f} deg"
        lines.append((row.form, row.goods, str(row.pieces), f"{row.seam_metres:.2f}", f"{low} .. {high}", worst, shear,
                      "yes" if row.fits else "no", f"{row.seconds:.0f}"))
    widths = [max(map(len, column)) for column in zip(*lines, strict=True)]
    text = ["  ".join(word.ljust(width) if k < 2 else word.rjust(width)
                      for k, (word, width) in enumerate(zip(line, widths, strict=True))) for line in lines]
    return "\n".join([*text, *(f"{row.form}: {row.error}" for row in rows if row.error)])
