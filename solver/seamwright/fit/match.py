"""Make the edges that are sewn together equally long: all pieces shaped once more at the same time, for goods and seams."""

from dataclasses import dataclass

import numpy as np

from ..flat.fence import Fence, Push
from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.stack import Stack
from ..flat.state import State
from .grain import HeldGrain
from .limits import GoodsEnergy, log_and_ratio
from .measure import area_quantile
from .shape import DAMPING, exponents_for, settle
from .springs import Gaps, Springs

STEPS = 5
"""Most Newton steps for each exponent."""
STIFFNESS = 100.0
"""Of the springs along the seams, per area of the pieces; that of a piece's energy at its limits is under 1e-4."""
EXACT = 5e-4
"""A stretch of seam whose sides differ by less is matched: 0.05 mm in 100."""
GROWTH = np.geomspace(1e-6, 1e-1, 6)
"""Shares of the stiffness, one after the other, where the full one asks more of a piece than it may use."""
FURTHER = 1.1
"""A piece that is strained anyway may be strained this much more: seams that cannot be sewn are worse."""
SPARE = 0.97
"""Share of what a piece may use that its energy takes for the limit."""


@dataclass
class Matched:
    """flats, an (n, 2) a piece; utilisation of each on 99.5 % of its area; mismatch of every joint's stretches, a list of
    (s,) logs of length ratios; sewable: none differs by more than the goods are easily sewn with; Newton steps taken."""

    flats: list
    utilisation: list
    mismatch: list
    sewable: bool
    steps: int


def match(surfaces, flats, joints, goods, comfort=0.0, wanted=None):
    """Bring both sides of every joint to one length, stretch by stretch, as far as the goods' limits allow.

    surfaces and flats (n, 2), one a piece; joints: (piece, points (q,), piece, points (q,)), points along the seam within
    the piece; a dart joins a piece to itself. A piece may use its limits fully, or FURTHER than it does already where that
    is more. Springs pull the sides together; where that would ask more of a piece than it may use, they begin again softly
    and grow only as far as they may. `wanted`, a direction (3,) on the form, holds each piece's grain along +y. No piece
    comes to lie over itself. Returns Matched.
    """
    stack = Stack([Rest(surface) for surface in surfaces])
    points, now = np.concatenate([surface.points for surface in surfaces]), as_complex(np.concatenate(flats))
    begin = stack.begin[:-1]
    gaps = Gaps(points, [(begin[a] + at, begin[b] + bt) for a, at, b, bt in joints])
    fence = Fence(points, [first + surface.boundary_loops[0] for first, surface in zip(begin, surfaces, strict=True)])
    fence = fence.uncrossed(now)
    held = [] if wanted is None else [HeldGrain(stack.rests, wanted)]
    limits = GoodsEnergy(goods, comfort, 1, 1.0)

    def each(flat):
        return limits.used(*log_and_ratio(*stack.maps(flat)))

    def used(flat):
        parts = zip(stack.split_faces(each(flat)), stack.rests, strict=True)
        return np.array([area_quantile(part, rest.area) for part, rest in parts])

    free, may, steps = now, used(now), 0
    may = np.where(may > 1, FURTHER * may, 1.0)

    def pulled(now, exponent, share, damping):
        level = may * max(SPARE, (used(now) / may).max())
        level = np.maximum(level[stack.owner], each(now))  # what is beyond already may stay so
        energy = GoodsEnergy(goods, comfort, exponent, level)
        beside = [Springs(gaps, share * STIFFNESS * stack.total), *held]
        if fence.outlines:
            beside.append(Push(fence, stack.area @ energy.density(*stack.maps(now))))
        state = State(stack, energy, now, beside)
        taken, damping = settle(state, STEPS, damping)
        return state.flat, taken, damping, bool((used(state.flat) <= may).all())

    damping = DAMPING
    for exponent in exponents_for(goods):
        now, taken, damping, kept = pulled(now, exponent, 1.0, damping)
        steps += taken
        if kept and np.abs(gaps.sizes(now)[0]).max() <= EXACT:
            break
    if not kept:
        now, trial, damping = free, free, DAMPING
        for share in GROWTH:
            trial, taken, damping, kept = pulled(trial, exponents_for(goods)[-1], share, damping)
            now, steps = trial if kept else now, steps + taken
    mismatch = gaps.sizes(now)[0]
    return Matched([as_points(part) for part in stack.split(now)], used(now).tolist(), np.split(mismatch, gaps.ends[:-1]),
                   bool(np.abs(mismatch).max() <= goods.mismatch[0]), steps)
