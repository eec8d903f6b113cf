"""Seams along edges that exist against the same seams through faces: how much longer, how much more distortion, how much
they wind, and whether faces of more than three corners stay whole."""

from dataclasses import dataclass

import numpy as np
from seamwright.seams.refuse import measured
from seamwright.seams.route import cut_along
from seamwright.seams.study import network_cost

from .drawn import drawn, network_of
from .stage import stage
from .unit import form_of, refusals

LONGER, MORE = 1.10, 1.03  # of the length and the distortion through faces: what is aimed at
LEAST = 1e-3  # distortion on a form of area 4 pi under which there is nothing to compare: it lies flat by itself


@dataclass
class Row:
    """longer, more: seam and distortion along edges over those through faces, `more` None where there is hardly any; split:
    faces that a seam cuts; jag: seam over its resampling; refused, measures: of the pattern along edges."""

    form: str
    points: int
    thrift: float
    longer: float
    more: float | None
    split: int
    jag: float
    refused: list
    measures: dict


def rows(names, counts, thrifts):
    """Yield (Row, Pattern along edges) for every form, number of points and thrift."""
    for thrift in thrifts:
        for count in counts:
            for name in names:
                yield measured_row(form_of(name, count), thrift)


def measured_row(form, thrift):
    """(Row, Pattern along edges) of a Form of one part."""
    ladder, found, _ = stage(form, thrift)
    through = network_of(ladder, found.cut)
    ladder, found, planes = stage(form, thrift, along=~form.diagonal)
    along = cut_along(ladder.levels[-1], found.cut, form.polygon, form.diagonal, 1 / ladder.factor)
    free, bound = (network_cost(ladder, network, thrift) for network in (through, along))
    pattern = drawn(form, along, planes)
    pattern.details.update(thrift=thrift, route="edges")
    refused, values = refusals(measured(pattern))
    more = bound.distortion / free.distortion if free.distortion > LEAST else None
    cut = along.seam & form.diagonal
    split = len(np.unique(form.polygon[form.surface.edge_triangles[cut]]))
    return Row(form.name, len(form.points), thrift, bound.length / free.length, more, split, values["jag"], refused,
               values), pattern


HEAD = f"{'form':12} {'points':>7} {'thrift':>6} {'longer':>7} {'more':>6} {'split':>5} {'jag':>6} refused"


def line(row):
    """The Row as printed."""
    more = f"{'':6}" if row.more is None else f"{row.more:6.3f}"
    return (f"{row.form:12} {row.points:7d} {row.thrift:6g} {row.longer:7.3f} {more} {row.split:5d} {row.jag:6.3f} "
            f"{', '.join(row.refused)}")


def summary(measured_rows):
    """A line on many Rows."""
    far = [row.form for row in measured_rows if row.longer > LONGER or (row.more or 0) > MORE]
    longer = [row.longer for row in measured_rows]
    more = [row.more for row in measured_rows if row.more is not None]
    words = f"; distortion {np.median(more):.3f}, most {max(more):.3f}" if more else ""
    return [f"along edges over through faces: seam {np.median(longer):.3f} (median), most {max(longer):.3f}{words}; over "
            f"{LONGER:g} or {MORE:g}: {', '.join(far) or 'none'}"]
