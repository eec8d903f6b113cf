"""The seam stage alone, its starts included, one child process a row: time, growth with the points, peak memory, score.

Time is processor time, that of the stage's own child processes included. Peak memory is the whole process's, the gallery's
form and this program included, read before anything is drawn.
"""

import resource
import statistics
import sys
import time
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from multiprocessing import get_context

import numpy as np
from seamwright.form.mirror import planes as planes_of_symmetry
from seamwright.seams.ladder import Ladder
from seamwright.seams.refuse import measured
from seamwright.seams.seek import seek

from .drawn import drawn, network_of
from .unit import form_of, one_factorisation, refusals

MAXRSS = 1024 if sys.platform != "darwin" else 1  # bytes in a unit of ru_maxrss


@dataclass
class Row:
    """One seam stage: asked and points, wished and met; metres on a form of 1 m2; peak in bytes; symmetric: a plane of
    symmetry was found and kept; wall: seconds on the clock."""

    form: str
    asked: int
    points: int
    thrift: float
    symmetric: bool
    seconds: float
    wall: float
    factorisations: float
    peak: int
    score: float
    pieces: int
    metres: float
    converged: bool
    refused: list
    measures: dict


def spent():
    """(processor seconds of this process and its children that have ended, wall seconds)."""
    children = resource.getrusage(resource.RUSAGE_CHILDREN)
    return time.process_time() + children.ru_utime + children.ru_stime, time.perf_counter()


def stage(form, thrift, symmetry="auto", seed=0, along=None):
    """(Ladder, Found, planes) of the seam stage as `cover` runs it for a Form of one part; along (e,) bool: the edges that
    seams are to keep to, if any."""
    planes = planes_of_symmetry(form.surface) if symmetry == "auto" else []
    ladder = Ladder(form.surface, planes=planes, seed=seed, along=along)
    found = seek(ladder, thrift)
    return ladder, found, ladder.planes


def measured_row(name, count, thrift, symmetry):
    """(Row, Pattern) for a form of the gallery."""
    form = form_of(name, count)
    before = one_factorisation(form.surface)
    begin = spent()
    ladder, found, planes = stage(form, thrift, symmetry)
    seconds, wall = np.subtract(spent(), begin)
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * MAXRSS
    unit = (before + one_factorisation(form.surface)) / 2  # a busy machine's pace drifts
    network = network_of(ladder, found.cut)
    pattern = drawn(form, network, planes)
    pattern.details["thrift"] = thrift
    refused, values = refusals(measured(pattern))
    row = Row(name, count, len(form.points), thrift, bool(planes), seconds, wall, seconds / unit, peak, found.score,
              found.count, network.length(), found.converged, refused, values)
    return row, pattern


def rows(names, counts, thrifts, symmetry="auto"):
    """Yield (Row, Pattern) for every form, number of points and thrift, each from a child process of its own."""
    with ProcessPoolExecutor(1, mp_context=get_context("spawn"), max_tasks_per_child=1) as pool:
        for thrift in thrifts:
            for count in counts:
                for name in names:
                    yield pool.submit(measured_row, name, count, thrift, symmetry).result()


HEAD = (f"{'form':12} {'points':>7} {'thrift':>6} {'factor.':>8} {'seconds':>8} {'wall s':>7} {'peak MB':>8} {'score':>7} "
        f"{'pieces':>6} {'metres':>7} refused")


def line(row):
    """The Row as printed."""
    return (f"{row.form:12} {row.points:7d} {row.thrift:6g} {row.factorisations:8.1f} {row.seconds:8.2f} {row.wall:7.2f} "
            f"{row.peak / 1e6:8.0f} {row.score:7.3f} {row.pieces:6d} {row.metres:7.2f} {', '.join(row.refused)}")


def summary(measured):
    """Lines on many Rows: median and most for every number of points and thrift, and how time grows with the points."""
    lines = []
    for thrift, asked in dict.fromkeys((row.thrift, row.asked) for row in measured):
        ours = [row for row in measured if (row.thrift, row.asked) == (thrift, asked)]
        taken = [row.factorisations for row in ours]
        bad = sum(bool(row.refused) for row in ours)
        lines.append(f"thrift {thrift:g}, about {asked} points: median "
                     f"{statistics.median(taken):.1f} factorisations, most {max(taken):.1f}; peak memory "
                     f"{max(row.peak for row in ours) / 1e9:.2f} GB; {bad} of {len(ours)} with something to refuse")
    grown = growth(measured)
    if grown:
        lines.append(f"time grows as points to the power {statistics.median(grown.values()):.2f} (median), "
                     f"{max(grown.values()):.2f} (most, {max(grown, key=grown.get)})")
    return lines


def growth(measured):
    """{form: p} of the least-squares fit seconds ~ points^p over a form's Rows of several sizes, the first thrift's."""
    powers = {}
    for name in dict.fromkeys(row.form for row in measured):
        ours = [row for row in measured if row.form == name and row.thrift == measured[0].thrift]
        if len({row.asked for row in ours}) > 1:
            points, seconds = np.log([(row.points, row.seconds) for row in ours]).T
            powers[name] = float(np.polyfit(points, seconds, 1)[0])
    return powers
