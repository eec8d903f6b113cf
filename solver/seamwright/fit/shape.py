"""Shape a flat piece for its goods: the least use of their limits, by raising the exponent of a limit-aware energy."""

from dataclasses import dataclass

import numpy as np

from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.state import State, dot
from .grain import lay_on_grain, pull, resize
from .limits import GoodsEnergy, log_and_ratio
from .measure import area_quantile

EXPONENTS_WOVEN = (2, 4, 8, 16, 32, 64)
EXPONENTS = (16, 32, 64)
"""Without a shear limit the isotropic flattening is close enough to begin high."""
STEPS = 6
DAMPING = 0.01


@dataclass
class Shaped:
    """flat (n, 2) laid, sized and shaped; utilisation of the wished limits on 99.5 % of the area; Newton steps taken."""

    flat: np.ndarray
    utilisation: float
    steps: int


def relax_for_goods(surface, flat, goods, comfort=0.0, wanted=None, stages=None, enough=0.0):
    """Shape a flip-free flat (n, 2) so that it uses least of the goods' limits at a comfort. Returns Shaped.

    The exponent k of the energy rises (a p-norm that tends to the maximum), each time with the limits measured in the
    utilisation reached so far; the best piece on the way is kept. The first `stages` exponents only, if given; no further
    once the utilisation is `enough`. The grain may turn, unless a `wanted` direction (3,) on the form is held along +y.
    """
    rest = Rest(surface)
    held = None if wanted is None else pull(rest, wanted)[None].astype(complex)
    limits = GoodsEnergy(goods, comfort, 1, 1.0)

    def used(flat):
        return area_quantile(limits.used(*log_and_ratio(*rest.maps(flat))), rest.area)

    now = lay_on_grain(rest, as_complex(np.asarray(flat, dtype=float)), goods, comfort, wanted)
    best, steps = (used(now), now), 0
    for exponent in (EXPONENTS if goods.shear is None else EXPONENTS_WOVEN)[:stages]:
        if best[0] <= max(enough, 1e-6):
            break
        state = State(rest, GoodsEnergy(goods, comfort, exponent, used(now)), now)
        steps += settle(state, lambda state=state: state.newton_direction(DAMPING, held, np.zeros(1)))
        now = resize(rest, state.flat, goods, comfort)
        best = min(best, (used(now), now), key=lambda pair: pair[0])
    return Shaped(as_points(best[1]), best[0], steps)


def settle(state, direction):
    """Steps of a State along direction() while they pay; returns their number."""
    for step in range(STEPS):
        before, way = state.value, direction()
        if -dot(state.gradient, way) <= 1e-3 * before or not state.step(way):
            return step
        if before - state.value < 0.02 * before:
            return step + 1
    return STEPS
