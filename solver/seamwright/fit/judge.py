"""A quick verdict for the seam search: would this piece of the form fit?"""

from dataclasses import dataclass

import numpy as np

from ..flat import flatten, overlaps
from .grain import lay_on_grain
from .measure import area_quantile, areas, utilisation, warp_weft_shear


@dataclass
class Judged:
    """utilisation of the wished limits on 99.5 % of the area (1 is at the limit), per triangle `each` (t,); flat (n, 2) laid
    and sized; `crossings`, the pairs of outline sides that cross (empty: no overlap)."""

    utilisation: float
    each: np.ndarray
    flat: np.ndarray
    crossings: list


def judge(surface, goods, comfort=0.0, grain=None):
    """Flatten a disk for any goods, lay it on the grain, size it, and say how much of the goods' limits it uses."""
    flat = lay_on_grain(surface.points, surface.triangles, flatten(surface).flat, goods, comfort, grain)
    each = utilisation(warp_weft_shear(surface.points, surface.triangles, flat), goods, comfort)
    share = area_quantile(each, areas(surface.points, surface.triangles))
    return Judged(share, each, flat, overlaps(flat, surface.boundary_loops[0]))
