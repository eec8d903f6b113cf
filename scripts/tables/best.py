"""Scores against the best known: that of the default run over the best of many differently seeded ones, and symmetric
against free. A score is the energy with its seam and the price of its pieces and darts, as the seam stage takes it."""

from dataclasses import dataclass

import numpy as np

from .stage import stage
from .unit import form_of


@dataclass
class Row:
    """Scores of the form's seam stage: free, the default seed without symmetry; best of all seeds; symmetric, or None where
    the form has no plane of symmetry; over: free over best less 1; unlike: symmetric over free less 1, or None."""

    form: str
    points: int
    thrift: float
    seeds: int
    free: float
    best: float
    symmetric: float | None
    over: float
    unlike: float | None


def rows(names, counts, thrifts, seeds):
    """Yield (Row, None) for every thrift, number of points and form."""
    for thrift in thrifts:
        for count in counts:
            for name in names:
                form = form_of(name, count)
                scores = [stage(form, thrift, "none", seed)[1].score for seed in range(seeds)]
                _, found, planes = stage(form, thrift)
                symmetric = found.score if planes else None
                yield compared(name, len(form.points), thrift, scores, symmetric), None


def compared(name, points, thrift, scores, symmetric):
    """Row of a form's free scores, that of the default seed first, and the symmetric one."""
    best = min(scores) if symmetric is None else min(*scores, symmetric)
    return Row(name, points, thrift, len(scores), scores[0], best, symmetric, scores[0] / best - 1,
               None if symmetric is None else symmetric / scores[0] - 1)


HEAD = (f"{'form':12} {'points':>7} {'thrift':>6} {'seeds':>5} {'free':>7} {'best':>7} {'over best %':>11} {'symmetric':>9} "
        f"{'over free %':>11}")


def line(row):
    """The Row as printed."""
    symmetric = f"{'':9} {'':11}" if row.symmetric is None else f"{row.symmetric:9.3f} {100 * row.unlike:11.1f}"
    return (f"{row.form:12} {row.points:7d} {row.thrift:6g} {row.seeds:5d} {row.free:7.3f} {row.best:7.3f} "
            f"{100 * row.over:11.1f} {symmetric}")


def summary(measured):
    """Lines on many Rows, one for each thrift."""
    lines = []
    for thrift in dict.fromkeys(row.thrift for row in measured):
        ours = [row for row in measured if row.thrift == thrift]
        over, unlike = [row.over for row in ours], [row.unlike for row in ours if row.unlike is not None]
        words = f", symmetric over free at most {100 * max(unlike):.1f} %" if unlike else ""
        lines.append(f"thrift {thrift:g}, best of {ours[0].seeds} seeds: median {100 * np.median(over):.1f} % over best, "
                     f"most {100 * max(over):.1f} %{words}")
    return lines
