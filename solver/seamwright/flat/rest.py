"""The rest shape: every triangle of a piece laid in its own plane, and the linear maps from flat points to stretch.

A flat point is a complex number x + iy. On a triangle the map from form to flat is z -> alpha z + beta conj(z) + const;
its singular values (flat length over form length) are |alpha| + |beta| and |alpha| - |beta|, and the second is negative
exactly where the triangle is flipped.
"""

from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix, csc_matrix, csr_matrix, diags

from .factor import factor

LEAST_HEIGHT = 1e-3
"""A triangle thinner than this share of its longest edge counts as this thick, so no matrix entry runs away."""


class Rest:
    """Rest shapes of a Surface's triangles.

    points (n, 3), as they are on the form; triangles (t, 3), each turned so that its longest edge comes first; area (t,) m2,
    total its sum; local (t, 3) complex corner places in the triangle's own plane; slope (t, 3) complex, half the gradient of
    each corner's hat function; count of points; anchors, one point of every connected part.
    """

    def __init__(self, surface):
        self.points = points = surface.points
        sides = np.linalg.norm(points[np.roll(surface.triangles, -1, axis=1)] - points[surface.triangles], axis=2)
        turn = (np.argmax(sides, axis=1)[:, None] + np.arange(3)) % 3
        self.triangles = np.take_along_axis(surface.triangles, turn, axis=1)
        self.count = len(points)
        self.anchors = self.triangles[np.unique(surface.triangle_components[1], return_index=True)[1], 0]
        a, b, c = (points[self.triangles[:, k]] for k in range(3))
        longest = np.maximum(sides.max(axis=1), 1e-9 * sides.max())
        along = (b - a) / longest[:, None]
        foot = np.einsum("ij,ij->i", c - a, along)
        height = np.maximum(np.linalg.norm(np.cross(along, c - a), axis=1), LEAST_HEIGHT * longest)
        self.area = 0.5 * longest * height
        self.total = self.area.sum()
        self.local = np.column_stack([np.zeros(len(foot)), longest, foot + 1j * height])
        opposite = np.roll(self.local, -2, axis=1) - np.roll(self.local, -1, axis=1)
        self.slope = 0.25j * opposite / self.area[:, None]
        rows = np.arange(0, 3 * len(foot) + 1, 3)
        self._beta = csr_matrix((self.slope.ravel(), self.triangles.ravel(), rows), shape=(len(foot), self.count))
        self._alpha = self._beta.conj()
        self._to_alpha, self._to_beta = self._beta.T.tocsr(), self._alpha.T.tocsr()

    def maps(self, flat):
        """(alpha, beta), each (t,) complex, of (n,) complex flat points."""
        return self._alpha @ flat, self._beta @ flat

    def gather(self, at_alpha, at_beta):
        """(n,) complex gradient at the points from (t,) complex gradients with respect to alpha and beta."""
        return self._to_alpha @ at_alpha + self._to_beta @ at_beta

    def stiffness(self, bend):
        """(2n, 2n) csc from (t, 4, 4) per area in (Re alpha, Im alpha, Re beta, Im beta), held at a point of every part."""
        p = self.slope
        rows = np.stack([
            np.stack([p.real, p.imag], 2), np.stack([-p.imag, p.real], 2),
            np.stack([p.real, -p.imag], 2), np.stack([p.imag, p.real], 2)], 1).reshape(-1, 4, 6)
        blocks = self.area[:, None, None] * (rows.transpose(0, 2, 1) @ bend @ rows)
        order, first, inner, outer, held = self._pattern
        data = np.add.reduceat(blocks.ravel()[order], first)
        data[held] *= 2
        return csc_matrix((data, inner, outer), shape=(2 * self.count, 2 * self.count))

    @cached_property
    def _pattern(self):
        """Where the entries of `stiffness` go: sorted once, summed many times."""
        at = (2 * self.triangles[:, :, None] + np.arange(2)).reshape(-1, 6)
        size = 2 * self.count
        place = (np.repeat(at, 6, axis=1) + size * np.tile(at, (1, 6))).ravel()
        order = np.argsort(place, kind="stable")
        place = place[order]
        first = np.flatnonzero(np.concatenate([[True], np.diff(place) > 0]))
        inner, column = place[first] % size, place[first] // size
        held = np.flatnonzero((inner == column) & np.isin(inner // 2, self.anchors))
        return order, first, inner, np.searchsorted(column, np.arange(size + 1)), held

    def laplacian(self, weight):
        """(n, n) csc: cotangent Laplacian with (t,) weights."""
        first, second = self.triangles.ravel(), np.roll(self.triangles, -1, axis=1).ravel()
        pull = self.slope * np.roll(self.slope, -1, axis=1).conj()
        entry = (4 * (weight * self.area)[:, None] * pull.real).ravel()
        half = coo_matrix((entry, (first, second)), shape=(self.count, self.count)).tocsc()
        both = half + half.T
        return (both - diags(np.asarray(both.sum(axis=1)).ravel())).tocsc()

    def solver(self, weight):
        """Factors of the weighted Laplacian, held at a point of every part: gradients sum to zero, so that costs nothing."""
        matrix = self.laplacian(weight)
        held = np.zeros(self.count)
        held[self.anchors] = matrix.diagonal()[self.anchors]
        return factor(matrix + diags(held))


def solve_complex(factor, load):
    """Solution (n,) complex of a real factor for a complex load: both coordinates at once."""
    both = factor.solve(np.column_stack([load.real, load.imag]))
    return both[:, 0] + 1j * both[:, 1]
