"""A quick verdict for the seam search: would this piece of the form fit?"""

from dataclasses import dataclass

import numpy as np

from ..flat import flatten, overlaps, untangled
from ..flat.fence import Fence
from .measure import area_quantile, areas, utilisation, warp_weft_shear
from .shape import relax_for_goods

SENSELESS = 1.1
"""Use of the limits from which a piece needs a split anyway: then its crossings say where."""


@dataclass
class Judged:
    """utilisation of the wished limits on 99.5 % of the area (1 is at the limit), and of each triangle, `each` (t,).

    flat (n, 2), laid, sized and shaped as far as was needed to tell; `crossings`, the pairs of outline sides that cross
    (empty: no overlap).
    """

    utilisation: float
    each: np.ndarray
    flat: np.ndarray
    crossings: list


def judge(surface, goods, comfort=0.0, grain=None, stages=1, start=None, done=0, senseless=SENSELESS):
    """Flatten a disk, shape it for the goods with the first `stages` exponents (None: all), and measure the outcome.

    A piece that fits by this fits: more shaping only helps. Stops as soon as it does. Begins from `start`, a flip-free flat
    (n, 2) that has been through the first `done` exponents, where that is known. A piece that then lies over itself is
    shaped again within a fence, and left as it was only where that asks more than `senseless` of the limits; with a
    `senseless` of 0 it is not shaped at all once its flattening does.
    """
    outline = surface.boundary_loops[0]

    def judged(flat, done, fence=None):
        flat = relax_for_goods(surface, flat, goods, comfort, grain, stages, 1.0, done, fence).flat
        each = utilisation(warp_weft_shear(surface.points, surface.triangles, flat), goods, comfort)
        return Judged(area_quantile(each, areas(surface.points, surface.triangles)), each, flat, overlaps(flat, outline))

    start = flatten(surface).flat if start is None else start
    stages = 0 if senseless <= 0 and overlaps(start, outline) else stages
    free = judged(start, done)
    if not free.crossings or free.utilisation > senseless:
        return free
    apart = untangled(surface, free.flat)
    fenced = free if apart is None else judged(apart, 0, Fence(surface.points, [outline]))
    return free if fenced.crossings or fenced.utilisation > senseless else fenced
