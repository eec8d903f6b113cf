"""A fence along the boundary of a flat piece: parts of it that come close push each other away, and none ever cross."""

import numpy as np
from scipy.spatial import cKDTree

from .overlap import overlaps
from .state import State

REACH = 0.1
"""Gap under which the fence pushes, as a share of the mean side of the outline."""
NEAR = 0.02
"""The same as a share of the way along the outline, where that is less: towards the end of a slit the gap closes."""
STRENGTH = 1e-3
"""Of the push, as a share of the energy of the piece."""


class Fence:
    """The outlines of one or several pieces. points (n, 3) on the form; outlines, of each piece (q,) indices in order."""

    def __init__(self, points, outlines):
        self.outlines = outlines
        sides = [np.linalg.norm(points[np.roll(outline, -1)] - points[outline], axis=1) for outline in outlines]
        self.tail = np.concatenate(outlines)
        self.head = np.concatenate([np.roll(outline, -1) for outline in outlines])
        self.side = np.concatenate(sides)
        self.around = np.concatenate([np.full(len(s), s.sum()) for s in sides])
        self.at = np.concatenate([np.cumsum(s) - s for s in sides])
        self.piece = np.repeat(np.arange(len(outlines)), [len(s) for s in sides])
        self.reach = REACH * self.side.mean()

    def crossed(self, flat):
        """True when an outline of the flat points (n,) complex crosses itself."""
        corners = np.column_stack([flat.real, flat.imag])
        return any(overlaps(corners, outline) for outline in self.outlines)

    def gaps(self, flat):
        """Where a point of an outline is close to a side of it, m such pairs: (gap (m,) over the reach, ends, pull).

        ends (m, 3): the point and the two ends of the side; pull (m, 3) complex: the derivatives of the gap by them.
        """
        point, side = self._near(flat)
        step = flat[self.head[side]] - flat[self.tail[side]]
        away = flat[self.tail[point]] - flat[self.tail[side]]
        share = np.clip((away * step.conj()).real / np.abs(step) ** 2, 0, 1)
        away -= share * step
        gap = np.abs(away)
        ahead = (self.at[point] - self.at[side] - self.side[side]) % self.around[point]
        behind = (self.at[side] - self.at[point]) % self.around[point]
        reach = np.minimum(self.reach, NEAR * np.minimum(ahead, behind))
        close = gap < reach
        pull = (away / (gap * reach))[:, None] * np.column_stack([np.ones(len(gap)), share - 1, -share])
        ends = np.column_stack([self.tail[point], self.tail[side], self.head[side]])
        return gap[close] / reach[close], ends[close], pull[close]

    def _near(self, flat):
        """(point, side), each (m,): pairs of the same piece that may be within the reach, without a side's own ends."""
        tail, head = flat[self.tail], flat[self.head]
        trees = (cKDTree(np.column_stack([z.real, z.imag])) for z in (tail, 0.5 * (tail + head)))
        radius = self.reach + 0.5 * np.abs(head - tail).max()
        pairs = next(trees).sparse_distance_matrix(next(trees), radius, output_type="coo_matrix")
        order = np.lexsort((pairs.col, pairs.row))
        point, side = pairs.row[order], pairs.col[order]
        own = (self.tail[point] == self.tail[side]) | (self.tail[point] == self.head[side])
        kept = (self.piece[point] == self.piece[side]) & ~own
        return point[kept], side[kept]


class Fenced(State):
    """A State within a Fence: (reach / gap - 1)^2 for each close pair (Smith, Schaefer 2015), infinite once crossed."""

    def __init__(self, rest, energy, flat, fence):
        self.fence = fence
        self.strength = STRENGTH * (rest.area @ energy.density(*rest.maps(flat)))
        super().__init__(rest, energy, flat)

    def worth(self, flat, maps):
        """As a State's, with the fence's push."""
        value = super().worth(flat, maps)
        if not np.isfinite(value) or self.fence.crossed(flat):
            return np.inf
        return value + self.strength * np.sum((1 / self.fence.gaps(flat)[0] - 1) ** 2)

    def slope(self, flat, maps):
        """As a State's, with the fence's push."""
        gap, ends, pull = self.fence.gaps(flat)
        slope = super().slope(flat, maps)
        np.add.at(slope, ends, -2 * self.strength * ((1 / gap - 1) / gap**2)[:, None] * pull)
        return slope

    def newton_direction(self, damping=0.0, rows=None, give=None):
        """As a State's, the fence stiff where it is close."""
        gap, ends, pull = self.fence.gaps(self.flat)
        own = np.zeros((len(gap), len(self.flat)), dtype=complex)
        np.add.at(own, (np.arange(len(gap))[:, None], ends), pull)
        own_give = 0.5 * gap**4 / (3 - 2 * gap) / self.strength
        if rows is not None:
            own, own_give = np.concatenate([own, rows]), np.concatenate([own_give, give])
        return super().newton_direction(damping, own, own_give)
