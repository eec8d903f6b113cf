"""The rest shape: every triangle of a piece laid in its own plane, and the linear maps from flat points to stretch.

A flat point is a complex number x + iy. On a triangle the map from form to flat is z -> alpha z + beta conj(z) + const;
its singular values (flat length over form length) are |alpha| + |beta| and |alpha| - |beta|, and the second is negative
exactly where the triangle is flipped.
"""

from functools import cached_property

import numpy as np
from scipy.sparse import csr_matrix

from .factor import Pattern

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

    def stiffness(self, bend, at_alpha, at_beta, floor):
        """[(slice of the points, factors)] of the (2n, 2n) second derivative of an energy, held at a point of every part.

        bend (r, t) by the direction (at_alpha, at_beta), each (r, t) complex, as from `strain`; floor (t,) is added to the
        second derivatives in all directions. Unknown 2i is x of point i, 2i + 1 its y.
        """
        corner = [self.slope[:, k] * at_alpha + self.slope[:, k].conj() * at_beta for k in range(3)]
        rows = np.stack([part for c in corner for part in (c.real, c.imag)])
        heavy = self.area * bend * rows
        entries = np.concatenate([(heavy[i] * rows[: i + 1]).sum(axis=1) for i in range(6)])
        i, j = np.tril_indices(6)
        plain = (i - j) % 2 == 0
        entries[plain] += 0.5 * floor * self._pull[(i // 2 * (i // 2 + 1) // 2 + j // 2)[plain]]
        pattern, held = self._coordinates
        return [(slice(0, self.count), pattern.factor(_held(entries, held)))]

    def solver(self, weight):
        """Factors of the Laplacian with (t,) weights, held at a point of every part.

        Gradients sum to zero over a part, so that holding costs nothing.
        """
        pattern, held = self._points
        return pattern.factor(_held(weight * self._pull, held))

    def laplacian(self, weight):
        """(n, n) csc: cotangent Laplacian with (t,) weights."""
        return self._points[0].matrix((weight * self._pull).ravel())

    @cached_property
    def _pull(self):
        """(6, t) integrals of the products of the corners' hat gradients, pairs of corners as in `np.tril_indices`."""
        i, j = np.tril_indices(3)
        return 4 * self.area * (self.slope[:, i] * self.slope[:, j].conj()).real.T

    @cached_property
    def _points(self):
        """Pattern of the entries between points, and which of them hold an anchor."""
        pairs = self.triangles[:, np.array(np.tril_indices(3))].transpose(1, 2, 0)
        return Pattern(*pairs.reshape(2, -1), self.count), (pairs[0] == pairs[1]) & np.isin(pairs[0], self.anchors)

    @cached_property
    def _coordinates(self):
        """The same of the entries between coordinates."""
        at = (2 * self.triangles[:, :, None] + np.arange(2)).reshape(-1, 6)
        pairs = at[:, np.array(np.tril_indices(6))].transpose(1, 2, 0)
        order = (2 * self._points[0].order[:, None] + np.arange(2)).ravel()
        held = (pairs[0] == pairs[1]) & np.isin(pairs[0] // 2, self.anchors)
        return Pattern(*pairs.reshape(2, -1), 2 * self.count, order), held


def _held(entries, held):
    """(e,) entries of a matrix, those on its diagonal that hold an anchor doubled."""
    return np.where(held, 2 * entries, entries).ravel()


def solve_complex(factor, load):
    """Solution (n,) complex of a real factor for a complex load: both coordinates at once."""
    both = factor.solve(np.column_stack([load.real, load.imag]))
    return both[:, 0] + 1j * both[:, 1]
