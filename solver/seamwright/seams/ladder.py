"""The ladder of levels from a few hundred points up to the form itself, and how fields climb it."""

from copy import copy

import numpy as np

from ..form.coarsen import coarsen
from ..form.laplacian import smoothed_defects, smoothing
from ..form.measure import total_area
from .edgewise import covectors, sampled
from .level import Level, scaled
from .symmetric import Symmetry
from .whole import on_rung

RUNGS = (500, 1500, 6000, 24000, 96000)
SWEEPS = 2  # of averaging with the neighbours after a lift, which leaves the seams as angular as the rung below
GROWTH = 1.7  # a rung is worth building only where the next has this many times its points


class Ladder:
    """levels: coarse to fine, the last is the form; owners: for each level (n,) its point for every point of the form;
    carriers: for each level but the last the csr that carries values to the next.

    surface: a Surface. price (n,) factor on seam length. planes: list of Planes of symmetry that networks are to keep, at
    right angles. seed: of the coarse levels. patch (n,) number of the patch that each point stays in one region with, -1 for
    none. along (e,) bool: the edges that seams are to keep to, None where they may run through faces. strict: all planes are
    kept, whatever that costs. `factor`: lengths on the levels over lengths in metres; planes: those that are kept.
    """

    def __init__(self, surface, price=None, planes=(), rungs=RUNGS, seed=0, patch=None, strict=False, along=None):
        fine, self.factor = scaled(surface, total_area(surface))
        n = len(fine.points)
        price = np.ones(n) if price is None else price
        self.planes, self.strict = list(planes), strict
        smoother = smoothing(fine)  # the metric in which seams move there, too: one factorisation less
        load = smoothed_defects(fine, smoother=smoother)
        steps = None if along is None else covectors(fine, along)
        self.levels = [Level(fine, load, price, _symmetry(fine, planes, self.factor), patch, smoother, steps)]
        self.owners, self.carriers = [np.arange(n)], []
        surface, owner, scale = fine, np.arange(n), 1.0
        for count in sorted(rungs, reverse=True):  # each rung is made of the one above it
            rung = coarsen(surface, count, seed) if count * GROWTH < len(surface.points) else None
            if rung is not None:
                self.carriers.insert(0, rung.interpolation(surface.points))
                owner = rung.owner[owner]
                size = np.bincount(owner)
                surface, more = scaled(rung.surface, total_area(rung.surface))
                scale *= more
                self.levels.insert(0, Level(surface, np.bincount(owner, load), np.bincount(owner, price) / size,
                                            _symmetry(surface, planes, self.factor * scale),
                                            None if patch is None else on_rung(surface, owner, patch),
                                            edgewise=None if along is None else sampled(steps, surface, fine, owner)))
                self.owners.insert(0, owner)

    def up_to(self, rung):
        """The Ladder of the levels up to a rung, as if that were the form."""
        found = copy(self)
        first = np.unique(self.owners[rung], return_index=True)[1]
        found.levels, found.carriers = self.levels[: rung + 1], self.carriers[:rung]
        found.owners = [owner[first] for owner in self.owners[: rung + 1]]
        return found

    def keep(self, number):
        """From now on networks keep but one of the planes."""
        self.planes = [self.planes[number]]
        for level in self.levels:
            level.symmetry = level.symmetry.only(number)

    def lift(self, fields, source):
        """(N, K) fields on the level after `source` from those on it."""
        carried = self.carriers[source] @ fields
        level = self.levels[source + 1]
        for _ in range(SWEEPS):
            carried = level.averaging @ carried
        return carried


def _symmetry(surface, planes, factor):
    return Symmetry(surface, [plane.scaled(factor) for plane in planes]) if len(planes) else None
