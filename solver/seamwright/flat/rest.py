"""The rest shape: every triangle of a piece laid in its own plane, and the linear maps from flat points to stretch.

A flat point is a complex number x + iy. On a triangle the map from form to flat is z -> alpha z + beta conj(z) + const;
its singular values (flat length over form length) are |alpha| + |beta| and |alpha| - |beta|, and the second is negative
exactly where the triangle is flipped.
"""

import numpy as np
from scipy.sparse import coo_matrix, csr_matrix, diags

from ..form.laplacian import Factor

LEAST_HEIGHT = 1e-3
"""A triangle thinner than this share of its longest edge counts as this thick, so no matrix entry runs away."""


class Rest:
    """Rest shapes of a Surface's triangles.

    points (n, 3), as they are on the form; triangles (t, 3), each turned so that its longest edge comes first; area (t,) m2,
    total its sum; local (t, 3) complex corner places in the triangle's own plane; slope (t, 3) complex, half the gradient of
    each corner's hat function; count of points.
    """

    def __init__(self, surface):
        self.points = points = surface.points
        sides = np.linalg.norm(points[np.roll(surface.triangles, -1, axis=1)] - points[surface.triangles], axis=2)
        turn = (np.argmax(sides, axis=1)[:, None] + np.arange(3)) % 3
        self.triangles = np.take_along_axis(surface.triangles, turn, axis=1)
        self.count = len(points)
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

    def laplacian(self, weight):
        """(n, n) csc: cotangent Laplacian with (t,) weights."""
        first, second = self.triangles.ravel(), np.roll(self.triangles, -1, axis=1).ravel()
        pull = self.slope * np.roll(self.slope, -1, axis=1).conj()
        entry = (4 * (weight * self.area)[:, None] * pull.real).ravel()
        half = coo_matrix((entry, (first, second)), shape=(self.count, self.count)).tocsc()
        both = half + half.T
        return (both - diags(np.asarray(both.sum(axis=1)).ravel())).tocsc()

    def solver(self, weight):
        """Factor of the weighted Laplacian, held at its first point (gradients sum to zero, so that costs nothing)."""
        matrix = self.laplacian(weight)
        matrix[0, 0] *= 2
        return Factor(matrix)


def solve_complex(factor, load):
    """Solution (n,) complex of a real Factor for a complex load: both coordinates at once."""
    both = factor.solve(np.column_stack([load.real, load.imag]))
    return both[:, 0] + 1j * both[:, 1]
