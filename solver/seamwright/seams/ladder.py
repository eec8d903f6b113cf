"""The ladder of levels from a few hundred points up to the form itself, and how fields climb it."""

import numpy as np

from ..form.coarsen import coarsen
from ..form.laplacian import smoothed_defects
from ..form.measure import total_area
from .fields import smoothed
from .level import Level, scaled
from .symmetric import Symmetry

RUNGS = (500, 1500, 6000)
GROWTH = 1.7  # a rung is worth building only where the next has this many times its points


class Ladder:
    """levels: coarse to fine, the last is the form; owners: for each level (n,) its point for every point of the form.

    surface: one connected Surface. price (n,) factor on seam length. planes: list of Planes of symmetry that networks are to
    keep, at right angles. seed: of the coarse levels. `factor`: lengths on the levels over lengths in metres.
    """

    def __init__(self, surface, price=None, planes=(), rungs=RUNGS, seed=0):
        fine, self.factor = scaled(surface, total_area(surface))
        n = len(fine.points)
        price = np.ones(n) if price is None else price
        load = smoothed_defects(fine)
        self.levels, self.owners = [], []
        for count in rungs:
            rung = coarsen(fine, count, seed) if count * GROWTH < n else None
            if rung is not None:
                size = np.bincount(rung.owner, minlength=len(rung.surface.points))
                coarse, more = scaled(rung.surface, total_area(rung.surface))
                symmetry = _symmetry(coarse, planes, self.factor * more)
                self.levels.append(Level(coarse, rung.gather(load), rung.gather(price) / size, symmetry))
                self.owners.append(rung.owner)
        self.levels.append(Level(fine, load, price, _symmetry(fine, planes, self.factor)))
        self.owners.append(np.arange(n))

    def lift(self, fields, source, target):
        """(N, K) fields on level `target` from those on level `source`: carried by clusters, then their borders rounded."""
        spread = fields[self.owners[source]]
        owner = self.owners[target]
        count = len(self.levels[target].surface.points)
        size = np.bincount(owner, minlength=count)
        carried = np.column_stack([np.bincount(owner, column, minlength=count) for column in spread.T]) / size[:, None]
        level = self.levels[target]
        smooth = 0.7 * self.levels[source].edge_length / level.edge_length
        return smoothed(level, carried, smooth)


def _symmetry(surface, planes, factor):
    return Symmetry(surface, [plane.scaled(factor) for plane in planes]) if len(planes) else None
