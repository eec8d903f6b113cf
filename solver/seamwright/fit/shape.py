"""Shape a flat piece for its goods: the least use of their limits, by raising the exponent of a limit-aware energy."""

from dataclasses import dataclass

import numpy as np

from ..flat.fence import Push
from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.state import State
from .grain import HeldGrain, lay_on_grain, resize
from .limits import GoodsEnergy, log_and_ratio
from .measure import area_quantile

EXPONENTS_WOVEN = (2, 4, 8, 16, 32, 64)
EXPONENTS = (16, 32, 64)
"""Without a shear limit the isotropic flattening is close enough to begin high."""
STEPS = 24
"""Most Newton steps in all, the same number for each exponent."""
DAMPING = 0.01
"""Share of the mean stiffness that every triangle gets besides its own, to begin with."""
LEAST_GAIN = 0.05
"""An exponent is left when a step lowers its energy by less than this share."""


@dataclass
class Shaped:
    """flat (n, 2) laid, sized and shaped; utilisation of the wished limits on 99.5 % of the area; Newton steps taken."""

    flat: np.ndarray
    utilisation: float
    steps: int


def relax_for_goods(surface, flat, goods, comfort=0.0, wanted=None, stages=None, enough=0.0, done=0, fence=None):
    """Shape a flip-free flat (n, 2) so that it uses least of the goods' limits at a comfort. Returns Shaped.

    The exponent k of the energy rises (a p-norm that tends to the maximum), each time with the limits measured in the
    utilisation reached so far; the best piece on the way is kept. The first `stages` exponents only, if given, without
    those already `done`; no further once the utilisation is `enough`. The grain may turn, unless a `wanted` direction (3,)
    on the form is held along +y. A `fence` (flat.fence) keeps a boundary that does not cross itself from doing so.
    """
    rest = Rest(surface)
    held = [] if wanted is None else [HeldGrain([rest], wanted)]
    limits = GoodsEnergy(goods, comfort, 1, 1.0)

    def used(flat):
        return area_quantile(limits.used(*log_and_ratio(*rest.maps(flat))), rest.area)

    now = lay_on_grain(rest, as_complex(np.asarray(flat, dtype=float)), goods, comfort, wanted)
    best, steps, damping = (used(now), now), 0, DAMPING
    exponents = exponents_for(goods)
    for exponent in exponents[done:stages]:
        if best[0] <= max(enough, 1e-6):
            break
        state = State(rest, GoodsEnergy(goods, comfort, exponent, used(now)), now, held)
        if fence:
            state = State(rest, state.energy, now, [*held, Push(fence, state.value)])
        taken, damping = settle(state, STEPS // len(exponents), damping)
        now, steps = resize(rest, state.flat, goods, comfort), steps + taken
        best = min(best, (used(now), now), key=lambda pair: pair[0])
    return Shaped(as_points(best[1]), best[0], steps)


def exponents_for(goods):
    """The exponents of the energy, rising."""
    return EXPONENTS if goods.shear is None else EXPONENTS_WOVEN


def settle(state, most, damping):
    """At most so many Newton steps of a State while they pay; returns (steps taken, damping)."""
    return state.settle(most, damping, LEAST_GAIN)
