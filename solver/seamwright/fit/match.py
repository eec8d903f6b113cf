"""Make the edges that are sewn together equally long: all pieces shaped once more at the same time, for goods and seams."""

from dataclasses import dataclass

import numpy as np

from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.state import State
from ..form.surface import Surface
from .grain import pull
from .limits import GoodsEnergy, log_and_ratio
from .measure import area_quantile
from .shape import DAMPING, STEPS, exponents_for, settle

STIFFNESS = 100.0
"""Of the springs along the seams, per area of the pieces; the energy of a piece at its limits is under half its area."""
LEAST_LEVEL = 0.01
"""Pieces that use less of the limits than this are developments: nothing is gained by using still less."""
SPACING = 0.1
"""Metres between the marks that must meet, at most an eighth of the seam: about the trade's distance of notches."""


@dataclass
class Matched:
    """flats, an (n, 2) a piece; utilisation of each on 99.5 % of its area; mismatch of every joint's stretches, a list of
    (s,) logs of length ratios."""

    flats: list
    utilisation: list
    mismatch: list


def match(surfaces, flats, joints, goods, comfort=0.0, wanted=None):
    """Shape the pieces together so that both sides of every joint are equally long, stretch by stretch. Returns Matched.

    surfaces and flats (n, 2), one a piece; joints: (piece, points (q,), piece, points (q,)), points along the seam within
    the piece; a dart joins a piece to itself. As in `shape`, with the level of the most used piece for all, and springs on
    the logs of the length ratios. `wanted`, a direction (3,) on the form, holds each piece's grain along +y.
    """
    begin = np.cumsum([0] + [len(surface.points) for surface in surfaces])
    whole = Surface(np.concatenate([surface.points for surface in surfaces]),
                    np.concatenate([surface.triangles + at for surface, at in zip(surfaces, begin, strict=False)]))
    rest, now = Rest(whole), as_complex(np.concatenate(flats))
    piece = np.repeat(np.arange(len(surfaces)), [len(surface.triangles) for surface in surfaces])
    seams = _Seams(whole.points, [(begin[a] + at, begin[b] + bt) for a, at, b, bt in joints])
    held = np.zeros((0, rest.count), dtype=complex)
    if wanted is not None:
        owner = np.repeat(np.arange(len(surfaces)), np.diff(begin))
        held = pull(rest, wanted) * (owner == np.arange(len(surfaces))[:, None])
    limits = GoodsEnergy(goods, comfort, 1, 1.0)

    def used(flat):
        each = limits.used(*log_and_ratio(*rest.maps(flat)))
        return [area_quantile(each[piece == k], rest.area[piece == k]) for k in range(len(surfaces))]

    damping = DAMPING
    for exponent in exponents_for(goods):
        energy = GoodsEnergy(goods, comfort, exponent, max(LEAST_LEVEL, *used(now)))
        state = _Sewn(rest, energy, now, seams, STIFFNESS * rest.total)
        damping = settle(state, lambda damping, state=state: state.direction(held, damping),
                         STEPS // len(exponents_for(goods)), damping)[1]
        now = state.flat
    parts = [as_points(now[a:b]) for a, b in zip(begin[:-1], begin[1:], strict=True)]
    return Matched(parts, used(now), np.split(seams.gaps(now)[0], seams.ends[:-1]))


class _Sewn(State):
    """A State of all pieces with springs along the seams."""

    def __init__(self, rest, energy, flat, seams, stiffness):
        self.seams, self.stiffness = seams, stiffness
        super().__init__(rest, energy, flat)

    def worth(self, flat, maps):
        return super().worth(flat, maps) + 0.5 * self.stiffness * np.sum(self.seams.gaps(flat)[0] ** 2)

    def slope(self, flat, maps):
        gaps, rows = self.seams.gaps(flat)
        return super().slope(flat, maps) + self.stiffness * gaps @ rows

    def direction(self, held, damping):
        rows = self.seams.gaps(self.flat)[1]
        give = np.concatenate([np.full(len(rows), 1 / self.stiffness), np.zeros(len(held))])
        return self.newton_direction(damping, np.concatenate([rows, held]), give)


class _Seams:
    """Every joint cut into stretches; `ends` (j,) the number of stretches up to the end of each joint."""

    def __init__(self, points, joints):
        tails, heads, stretches, sides, self.ends = [], [], [], [], []
        count = 0
        for one, other in joints:
            stretch = count + _stretches(points[one])
            count = int(stretch[-1]) + 1
            self.ends.append(count)
            for side, path in ((1, one), (-1, other)):
                tails.append(path[:-1])
                heads.append(path[1:])
                stretches.append(stretch)
                sides.append(np.full(len(stretch), side))
        self.tail, self.head, self.stretch, self.side = (np.concatenate(part) for part in (tails, heads, stretches, sides))
        self.count = count

    def gaps(self, flat):
        """((s,) log of length of one side over the other, (s, n) complex derivatives) of every stretch."""
        step = flat[self.head] - flat[self.tail]
        length = np.abs(step)
        one, other = (np.bincount(self.stretch, length * (self.side == side), self.count) for side in (1, -1))
        pull = self.side * step / length / np.where(self.side > 0, one[self.stretch], other[self.stretch])
        rows = np.zeros((self.count, len(flat)), dtype=complex)
        np.add.at(rows, (self.stretch, self.head), pull)
        np.add.at(rows, (self.stretch, self.tail), -pull)
        return np.log(one / other), rows


def _stretches(path):
    """(q - 1,) number of the stretch, from 0, that each side of a path (q, 3) lies in: about equal lengths, none empty."""
    steps = np.linalg.norm(np.diff(path, axis=0), axis=1)
    number = int(np.clip(steps.sum() / SPACING, 8, 16))
    stretch = np.minimum(((np.cumsum(steps) - 0.5 * steps) / steps.sum() * number).astype(int), number - 1)
    return np.cumsum(np.concatenate([[0], np.diff(stretch) > 0]))
