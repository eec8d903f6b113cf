"""A fence along the boundary of a flat piece: parts of it that come close push each other away, and none ever cross."""

import numpy as np
from scipy.sparse import csr_matrix
from scipy.spatial import cKDTree

from .overlap import overlaps

REACH = 0.1
"""Gap under which the fence pushes, as a share of the mean side of the outline."""
NEAR = 0.02
"""The same as a share of the way along the outline, where that is less: towards the end of a slit the gap closes."""
STRENGTH = 1e-3
"""Of the push, as a share of the energy of the piece."""


class Fence:
    """The outlines of one or several pieces. points (n, 3) on the form; outlines, of each piece (q,) indices in order."""

    def __init__(self, points, outlines):
        self._form, self.outlines = points, outlines
        heads = [np.roll(outline, -1) for outline in outlines]
        sides = [np.linalg.norm(points[head] - points[tail], axis=1) for tail, head in zip(outlines, heads, strict=True)]
        if outlines:
            self.tail, self.head, self.side = (np.concatenate(parts) for parts in (outlines, heads, sides))
            self.around = np.concatenate([np.full(len(side), side.sum()) for side in sides])
            self.at = np.concatenate([np.cumsum(side) - side for side in sides])
            self.piece = np.repeat(np.arange(len(sides)), [len(side) for side in sides])
            self.reach = REACH * self.side.mean()

    def uncrossed(self, flat):
        """The Fence of those outlines that do not cross themselves in the flat points (n,) complex; maybe of none."""
        corners = np.column_stack([flat.real, flat.imag])
        return Fence(self._form, [outline for outline in self.outlines if not overlaps(corners, outline)])

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


class Push:
    """What a Fence does `beside` the strain of a State: (reach / gap - 1)^2 for each close pair (Smith, Schaefer 2015).

    Infinite once an outline crosses itself. `value` is the energy of the State, of which the push gets its share.
    """

    def __init__(self, fence, value):
        self.fence, self.strength = fence, STRENGTH * value

    def worth(self, flat):
        """Energy of the push."""
        if self.fence.crossed(flat):
            return np.inf
        return self.strength * np.sum((1 / self.fence.gaps(flat)[0] - 1) ** 2)

    def slope(self, flat):
        """(n,) complex gradient."""
        gap, ends, pull = self.fence.gaps(flat)
        slope = np.zeros(len(flat), dtype=complex)
        np.add.at(slope, ends, -2 * self.strength * ((1 / gap - 1) / gap**2)[:, None] * pull)
        return slope

    def rows(self, flat):
        """The gaps of the close pairs, as rows that resist change."""
        gap, ends, pull = self.fence.gaps(flat)
        pair = np.repeat(np.arange(len(gap)), 3)
        rows = csr_matrix((pull.ravel(), (pair, ends.ravel())), shape=(len(gap), len(flat)))
        return rows, 0.5 * gap**4 / (3 - 2 * gap) / self.strength
