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
from .springs import EXACT, Gaps, Springs

STEPS = 12
"""Most Newton steps for each exponent."""
LOOK = 2
"""Steps after which is looked whether the seams match already."""
STIFFNESS = 100.0
"""Of the springs along the seams, per area of the pieces; that of a piece's energy at its limits is under 1e-4."""
GROWTH = np.geomspace(1e-6, 1e-1, 6)
"""Shares of the stiffness, one after the other, where the full one asks more of a piece than it may use."""
FURTHER = 1.1
"""A piece that is strained anyway may be strained this much more: seams that cannot be sewn are worse."""
SPARE = 0.97
"""Share of what a piece may use that its energy takes for the limit."""


@dataclass
class Matched:
    """flats, an (n, 2) a piece; utilisation of each on 99.5 % of its area; mismatch of every joint's stretches, a list of
    (s,) logs of length ratios, less the ease that is wanted; sewable: none differs by more than the goods are easily sewn
    with; Newton steps taken."""

    flats: list
    utilisation: list
    mismatch: list
    sewable: bool
    steps: int


def match(surfaces, flats, joints, goods, comfort=0.0, wanted=None):
    """Bring both sides of every joint to one length, stretch by stretch, as far as the goods' limits allow.

    Where the goods are to be eased, the side that is longer by itself may stay so by as much.

    surfaces and flats (n, 2), one a piece; joints: (piece, points (q,), piece, points (q,)), points along the seam within
    the piece; a dart joins a piece to itself. Springs pull the sides together while every piece stays within its limits at
    the wished comfort; else within the hard limits, or FURTHER than it already is beyond them; else the springs begin again
    softly and grow only as far as that. `wanted`, a direction (3,) on the form, holds each piece's grain along +y. No piece
    comes to lie over itself. Returns Matched, its utilisation that of the wished comfort.
    """
    table = _Table(surfaces, flats, joints, wanted)
    table.gaps.wanted = table.gaps.ease(table.free, np.log1p(goods.ease))
    exponents, now, steps = exponents_for(goods), table.free, 0
    wished, hard = _Limits(table, goods, comfort), _Limits(table, goods, 0.0)

    def done(flat):
        return table.largest_gap(flat) <= EXACT and wished.kept(flat) and hard.kept(flat)

    for limits in (wished, hard):
        damping = DAMPING
        for exponent in exponents:
            if limits.kept(now) and hard.kept(now) and table.largest_gap(now) <= EXACT:
                break
            now, taken, damping = table.pulled(now, limits, exponent, 1.0, damping, done)
            steps += taken
        if limits.kept(now) and hard.kept(now):
            break
    else:
        now, trial, damping = table.free, table.free, DAMPING
        for share in GROWTH:
            trial, taken, damping = table.pulled(trial, hard, exponents[-1], share, damping, done)
            now, steps = trial if hard.kept(trial) else now, steps + taken
    mismatch = table.gaps.sizes(now)[0]
    return Matched([as_points(part) for part in table.stack.split(now)], wished.used(now).tolist(),
                   np.split(mismatch, table.gaps.ends[:-1]), bool(np.abs(mismatch).max() <= goods.mismatch[0]), steps)


class _Table:
    """All pieces on one table with the springs between them; free (n,) complex, as they were laid."""

    def __init__(self, surfaces, flats, joints, wanted):
        self.stack = Stack([Rest(surface) for surface in surfaces])
        self.free = as_complex(np.concatenate(flats))
        points, begin = np.concatenate([surface.points for surface in surfaces]), self.stack.begin[:-1]
        self.gaps = Gaps(points, [(begin[a] + at, begin[b] + bt) for a, at, b, bt in joints])
        outlines = [first + surface.boundary_loops[0] for first, surface in zip(begin, surfaces, strict=True)]
        self.fence = Fence(points, outlines).uncrossed(self.free)
        self.held = [] if wanted is None else [HeldGrain(self.stack.rests, wanted)]

    def largest_gap(self, flat):
        """Of all stretches."""
        return np.abs(self.gaps.sizes(flat)[0]).max()

    def pulled(self, flat, limits, exponent, share, damping, done):
        """(flat, steps, damping) after some steps with springs of this share of their stiffness, until it is done(flat)."""
        energy = GoodsEnergy(limits.goods, limits.comfort, exponent, limits.levels(flat))
        beside = [Springs(self.gaps, share * STIFFNESS * self.stack.total), *self.held]
        if self.fence.outlines:
            beside.append(Push(self.fence, self.stack.area @ energy.density(*self.stack.maps(flat))))
        state = State(self.stack, energy, flat, beside)
        steps, taken = 0, LOOK
        while steps < STEPS and taken == LOOK and not done(state.flat):
            taken, damping = settle(state, LOOK, damping)
            steps += taken
        return state.flat, steps, damping


class _Limits:
    """What every piece on a _Table may use of the goods' limits at a comfort."""

    def __init__(self, table, goods, comfort):
        self.stack, self.goods, self.comfort = table.stack, goods, comfort
        self._energy = GoodsEnergy(goods, comfort, 1, 1.0)
        free = self.used(table.free)
        self.may = np.where(free > 1, FURTHER * free, 1.0)

    def each(self, flat):
        """(t,) utilisation."""
        return self._energy.used(*log_and_ratio(*self.stack.maps(flat)))

    def used(self, flat):
        """(p,) utilisation of every piece on 99.5 % of its area."""
        parts = zip(self.stack.split_faces(self.each(flat)), self.stack.rests, strict=True)
        return np.array([area_quantile(part, rest.area) for part, rest in parts])

    def kept(self, flat):
        """True when no piece uses more than it may."""
        return bool((self.used(flat) <= self.may).all())

    def levels(self, flat):
        """(t,) where the energy is to be steep: alike for all pieces; what is beyond already may stay so."""
        level = self.may * max(SPARE, (self.used(flat) / self.may).max())
        return np.maximum(level[self.stack.owner], self.each(flat))
