"""Where a piece cannot fit: as little of it as can be beyond the hard limits, instead of the least worst place.

The least worst use spreads the strain of one sharp tip over the whole piece; the maker is better served by a piece that fits
but for the tip.
"""

from dataclasses import replace

import numpy as np

from ..flat import flatten, overlaps
from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.state import State
from .grain import HeldGrain, lay_on_grain
from .limits import GoodsEnergy
from .measure import SLACK, area_quantile, areas, utilisation, warp_weft_shear
from .shape import DAMPING, settle

EXPONENTS = (4, 16)  # with the limits themselves as the level: flat within, and beyond them no steeper than a parabola
STEPS = 12


def resigned(surface, one, goods, comfort, grain=None):
    """The Judged `one`, or one whose flat has less of its area beyond the hard limits, if that is more than SLACK of it."""
    area = areas(surface.points, surface.triangles)

    def beyond(flat):
        return area[utilisation(warp_weft_shear(surface.points, surface.triangles, flat), goods) > 1].sum() / area.sum()

    now = beyond(one.flat)
    if now <= SLACK:
        return one
    rest = Rest(surface)
    held = [] if grain is None else [HeldGrain([rest], grain)]
    flat = lay_on_grain(rest, as_complex(flatten(surface).flat), goods, 0.0, grain)
    for exponent in EXPONENTS:
        state = State(rest, GoodsEnergy(goods, 0.0, exponent, 1.0), flat, held)
        settle(state, STEPS, DAMPING)
        flat = state.flat
    flat = as_points(flat)
    crossings = overlaps(flat, surface.boundary_loops[0])
    if beyond(flat) >= now or (crossings and not one.crossings) or not np.isfinite(flat).all():
        return one
    each = utilisation(warp_weft_shear(surface.points, surface.triangles, flat), goods, comfort)
    return replace(one, utilisation=area_quantile(each, area), each=each, flat=flat, crossings=crossings)
