"""Tips that a network misses: they count for more, until a seam runs through them.

The integral of u^2 hardly feels the tip of a limb, as it is small; a maker minds the cap that a seam beside it leaves.
"""

from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra

from ..form.measure import angle_defects, open_points
from .level import FORM_AREA
from .tips import EVEN, tips

MOST_POINTS = 12000  # of the rung on which tips are found
MISSED = 0.03 * np.sqrt(FORM_AREA)  # distance from the seams from which a tip counts as missed
REACH = 0.03 * np.sqrt(FORM_AREA)  # how far around a missed tip distortion counts for more
MORE = (12.0, 40.0, 120.0)  # how much more at the tip itself: at first, and where that was not enough


class Points:
    """The tips of a form on a ladder: rung, where they are found; tips (k,) points there."""

    def __init__(self, ladder):
        self.ladder = ladder
        self.rung = max(rung for rung, level in enumerate(ladder.levels) if rung == 0 or len(level.mass) <= MOST_POINTS)

    @cached_property
    def tips(self):
        """(k,) points of the rung."""
        level, owner = self.ladder.levels[self.rung], self.ladder.owners[self.rung]
        form = self.ladder.levels[-1].surface
        defects = np.bincount(owner, np.where(open_points(form), 0.0, angle_defects(form)))
        return tips(level.surface, load=level.mass * level.diffusion(EVEN * np.sqrt(FORM_AREA)).solve(defects))

    @cached_property
    def _gaps(self):
        """(k, N) distance along edges of the rung from each tip."""
        surface = self.ladder.levels[self.rung].surface
        shape = (len(surface.points),) * 2
        graph = coo_matrix((surface.edge_lengths, tuple(surface.edges.T)), shape=shape).tocsr()
        return dijkstra(graph, directed=False, indices=self.tips, limit=5 * REACH)

    def missed(self, found):
        """(k,) bool: tips too far from the seams of a Found on the rung."""
        labels, uncut = found.cut.labels, found.cut.uncut
        if uncut is None:  # the fields are signed distances from the regions' borders
            return found.fields[self.tips].max(axis=1) > MISSED
        ends = found.level.surface.edges[found.cut.edge]
        beside = np.unique(ends[~uncut[tuple(labels[ends].T)]])
        return self._gaps[:, beside].min(axis=1) > MISSED

    def emphasis(self, amount):
        """List with (N,) for every level: 1, and up to 1 + amount (k,) at the tips."""
        bump = amount[:, None] * np.exp(-0.5 * (self._gaps / REACH) ** 2)
        values = 1 + bump.max(axis=0)
        for carrier in self.ladder.carriers[self.rung :]:
            values = carrier @ values
        return [np.bincount(owner, values) / np.bincount(owner) for owner in self.ladder.owners]
