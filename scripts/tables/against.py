"""Our networks against the rivals at equal seam length: the same smoothed curvature, the same integral of u^2.

A rival's distortion at our length is read off its family, between the nearest shorter and longer network in logarithms.
Trees hold many darts, which the distortion alone does not charge for; how many is told beside. The direct flow is the seam
stage without its ladder and with one start: the same descent on the form itself from six round cells, then neighbours
merged while that pays. It is compared by score and time at the same thrift.
"""

from dataclasses import dataclass
from itertools import tee

import numpy as np
from seamwright.seams.fields import from_labels
from seamwright.seams.flow import flow
from seamwright.seams.ladder import Ladder
from seamwright.seams.seek import simplify
from seamwright.seams.study import network_cost
from seamwright.seams.topology import voronoi

from . import rivals
from .drawn import network_of
from .stage import spent, stage
from .unit import form_of

DIRECT_CELLS, DIRECT_STEPS = 6, 300
NOTHING = 1e-6  # distortion under which a form is developable and there is nothing to compare
FAMILIES = ("partition", "tipped", "tree")


@dataclass
class Row:
    """length and distortion of ours, on the form scaled to area 4 pi; partition, tipped and tree: our distortion over that
    rival's at our length, None where it has none so short or the form is developable; ends: darts of the tree of our length;
    direct: our score over the direct flow's; taken: its time over ours."""

    form: str
    points: int
    thrift: float
    length: float
    distortion: float
    partition: float | None
    tipped: float | None
    tree: float | None
    ends: int | None
    direct: float
    taken: float


def rows(names, counts, thrifts):
    """Yield (Row, None) for every number of points, form and thrift."""
    for count in counts:
        for name in names:
            form = form_of(name, count)
            ours = [_ours(form, thrift) for thrift in thrifts]
            longest = max(length for length, *_ in ours)
            families = _families(form.surface, longest)
            for thrift, (length, distortion, score, seconds) in zip(thrifts, ours, strict=True):
                ratios = {name: _over(distortion, family, length) for name, family in families.items()}
                ends = [rival.ends for rival in families["tree"] if rival.length <= length]
                direct, taken = _direct(form, thrift)
                yield Row(name, len(form.points), thrift, length, distortion, **ratios, ends=max(ends, default=None),
                          direct=score / direct, taken=taken / seconds), None


def at_length(family, length):
    """Distortion of a family of Rivals at a length, None where that is under their shortest.

    Only networks that no shorter one beats count, as whoever made them would choose.
    """
    best = []
    for rival in sorted(family, key=lambda rival: rival.length):
        if not best or rival.distortion < best[-1].distortion:
            best.append(rival)
    if length < best[0].length:
        return None
    lengths, distortions = np.log([(rival.length, max(rival.distortion, 1e-12)) for rival in best]).T
    return float(np.exp(np.interp(np.log(length), lengths, distortions)))


def _ours(form, thrift):
    """(length drawn tight, distortion, score, seconds) of our network for a thrift."""
    begin = spent()[0]
    ladder, found, _ = stage(form, thrift)
    seconds = spent()[0] - begin
    network = network_of(ladder, found.cut)
    return rivals.tight(ladder, network), network_cost(ladder, network, 0.0).distortion, found.score, seconds


def _direct(form, thrift):
    """(score, seconds) of the direct flow."""
    begin = spent()[0]
    level = Ladder(form.surface, rungs=()).levels[-1]
    found = flow(level, from_labels(level, voronoi(level, DIRECT_CELLS)), thrift, steps=DIRECT_STEPS)
    found = simplify(level, found, thrift)
    return found.score, spent()[0] - begin


def _families(surface, longest):
    """{name: list of Rivals} up to the first that is longer than asked."""
    ladder = Ladder(surface, rungs=())
    once, again = tee(rivals.voronoi(ladder, surface))
    made = rivals.partitions(ladder, once), rivals.tipped(ladder, surface, again), rivals.trees(ladder, surface)
    return {name: _until(family, longest) for name, family in zip(FAMILIES, made, strict=True)}


def _until(family, longest):
    """List of a family's networks up to the first that is longer than asked."""
    found = []
    for one in family:
        found.append(one)
        if one.length > longest:
            break
    return found


def _over(distortion, family, length):
    rival = at_length(family, length)
    return None if rival is None or max(rival, distortion) < NOTHING else distortion / rival


HEAD = (f"{'form':12} {'points':>7} {'thrift':>6} {'length':>7} {'distort.':>8} {'partition':>9} {'tipped':>7} {'tree':>7} "
        f"{'(ends)':>6} {'direct':>7} {'taken':>7}")


def line(row):
    """The Row as printed."""
    ratios = " ".join(f"{'':>{width}}" if ratio is None else f"{ratio:{width}.2f}"
                      for width, ratio in ((9, row.partition), (7, row.tipped), (7, row.tree)))
    ends = "" if row.ends is None else row.ends
    return (f"{row.form:12} {row.points:7d} {row.thrift:6g} {row.length:7.2f} {row.distortion:8.4f} {ratios} {ends:>6} "
            f"{row.direct:7.3f} {row.taken:7.1f}")


def summary(measured):
    """Lines on many Rows, one for each thrift: medians over the forms."""
    lines = []
    for thrift in dict.fromkeys(row.thrift for row in measured):
        ours = [row for row in measured if row.thrift == thrift]
        words = ", ".join(f"{name} {_median([getattr(row, name) for row in ours])}" for name in FAMILIES)
        lines.append(f"thrift {thrift:g}, our distortion over that at equal length, median over the forms: {words} (with "
                     f"{_median([row.ends for row in ours])} darts); score over the direct flow's "
                     f"{_median([row.direct for row in ours])}, which takes {_median([row.taken for row in ours])} times "
                     "as long")
    return lines


def _median(values):
    known = [value for value in values if value is not None]
    return f"{np.median(known):.2f}" if known else "none"
