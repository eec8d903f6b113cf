"""The fit table: the whole cover of every form in every goods, and how the pieces came out."""

import time
from dataclasses import dataclass

import numpy as np
import seamwright as sw
from seamwright.seams.refuse import measured
from seamwright.sheets.figures import quantiles

from .unit import form_of, one_factorisation, refusals

MOST = 0.995  # share of a piece's area whose largest use of the hard limits is the piece's


@dataclass
class Row:
    """One cover. utilisation: of the hard limits, the worst piece's; beyond: share of the form's area beyond them;
    mismatch: the largest share by which one side of a seam is longer; metres on a form of 1 m2."""

    form: str
    points: int
    goods: str
    comfort: float
    seconds: float
    factorisations: float
    pieces: int
    metres: float
    utilisation: float
    beyond: float
    mismatch: float
    fits: bool
    refused: list
    measures: dict


def measured_row(name, count, goods, comfort, route="through"):
    """(Row, Pattern) of one form of the gallery covered with goods."""
    form = form_of(name, count)
    unit = one_factorisation(form.surface)
    begin = time.process_time()
    pattern = sw.cover(form, sw.Wishes(goods=goods, comfort=comfort, route=route))
    seconds = time.process_time() - begin
    sewn = [seam for seam in pattern.seams if not seam.open]
    area = np.array([piece.areas.sum() for piece in pattern.pieces])
    refused, values = refusals(measured(pattern))
    row = Row(
        name, len(form.points), pattern.goods.name, comfort, seconds, seconds / unit, len(pattern.pieces),
        float(sum(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum() for seam in sewn) / np.sqrt(area.sum())),
        max(float(quantiles(piece.utilisation, piece.areas, [MOST])[0]) for piece in pattern.pieces),
        float(area @ [piece.beyond for piece in pattern.pieces] / area.sum()),
        float(max((abs(seam.ease) for seam in sewn), default=0.0)), pattern.fits, refused, values)
    return row, pattern


def rows(names, counts, goods, comfort, route="through"):
    """Yield (Row, Pattern) for every goods, number of points and form."""
    for one in goods:
        for count in counts:
            for name in names:
                yield measured_row(name, count, one, comfort, route)


HEAD = (f"{'form':12} {'points':>7} {'goods':18} {'seconds':>8} {'factor.':>8} {'pieces':>6} {'metres':>7} {'use %':>6} "
        f"{'beyond %':>8} {'uneven %':>8} {'fits':4} refused")


def line(row):
    """The Row as printed."""
    return (f"{row.form:12} {row.points:7d} {row.goods:18} {row.seconds:8.2f} {row.factorisations:8.1f} {row.pieces:6d} "
            f"{row.metres:7.2f} {100 * row.utilisation:6.0f} {100 * row.beyond:8.2f} {100 * row.mismatch:8.2f} "
            f"{'yes' if row.fits else 'NO':4} {', '.join(row.refused)}")


def summary(measured):
    """Lines on many Rows, one for each goods."""
    lines = []
    for goods in dict.fromkeys(row.goods for row in measured):
        ours = [row for row in measured if row.goods == goods]
        taken = [row.factorisations for row in ours]
        lines.append(f"{goods}: {sum(row.fits for row in ours)} of {len(ours)} fit, "
                     f"{sum(row.metres for row in ours):.1f} m in all; median {np.median(taken):.0f} factorisations, most "
                     f"{max(taken):.0f}; {sum(bool(row.refused) for row in ours)} with something to refuse")
    return lines
