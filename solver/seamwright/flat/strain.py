"""Strain energies of one triangle, as functions of (alpha, beta), the map from form to flat (see `rest`).

An energy has four vectorised methods of (t,) complex alpha and beta, all per area of the form: `density` (t,);
`first`, the gradients with respect to alpha and beta as complex numbers; `second`, the Hessian without its negative part
as a sum of squares: how far it bends, (r, t), along each direction, two (r, t) complex; `secant` (t,), the weight of the
Laplacian that pulls as hard as the energy does.
"""

import numpy as np


class Isotropic:
    """Sum of the same function of both singular values.

    `line(s)` returns its value, first and second derivative. Closed forms: the gradient and Hessian of a function of
    |alpha| and |beta| are diagonal in the radial and tangential directions of the two.
    """

    def __init__(self, line):
        self.line = line

    def density(self, alpha, beta):
        """(t,) energy per area; infinite where a triangle is flipped."""
        a, b = np.abs(alpha), np.abs(beta)
        inside = a > b
        large, small = np.where(inside, a + b, 1.0), np.where(inside, a - b, 1.0)
        return np.where(inside, self.line(large)[0] + self.line(small)[0], np.inf)

    def first(self, alpha, beta):
        """Gradients with respect to alpha and beta, two (t,) complex."""
        a, b = np.abs(alpha), np.abs(beta)
        large, small = self.line(a + b)[1], self.line(a - b)[1]
        return (large + small) / a * alpha, (large - small) / np.maximum(b, 1e-300) * beta

    def second(self, alpha, beta):
        """(bend, at_alpha, at_beta), (4, t) each, the latter two complex: the positive part of the Hessian."""
        a, b = np.abs(alpha), np.maximum(np.abs(beta), 1e-12 * np.abs(alpha))
        _, large, large2 = self.line(a + b)
        _, small, small2 = self.line(a - b)
        bend = np.stack([large2, small2, (large + small) / a, (large - small) / b])
        p, q = alpha / a, np.where(np.abs(beta) > 0, beta, b) / b
        return np.maximum(bend, 0), np.stack([p, p, 1j * p, 0 * p]), np.stack([q, -q, 0 * q, 1j * q])

    def secant(self, alpha, beta):
        """(t,) mean over both singular values of the first derivative over the distance from no stretch."""
        a, b = np.abs(alpha), np.abs(beta)
        return 0.5 * (self._secant(a + b) + self._secant(a - b))

    def _secant(self, s):
        _, slope, bend = self.line(s)
        off = s - 1
        near = np.abs(off) < 1e-4
        return np.where(near, bend, slope / np.where(near, 1.0, off))


def symmetric_dirichlet(s):
    """Half of (s - 1/s)^2, which is cosh(2 ln s) - 1: grows without bound both ways, and no flip can be reached."""
    return 0.5 * (s - 1 / s) ** 2, s - s**-3, 1 + 3 * s**-4

