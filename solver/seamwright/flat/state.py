"""A flat piece on its way: points, strain energy and gradient kept together, steps that never flip a triangle."""

import numpy as np


class State:
    """Flat points (n,) complex with their maps, energy (`value`, not per area) and gradient (n,) complex."""

    def __init__(self, rest, energy, flat):
        self.rest, self.energy = rest, energy
        self._take(flat, rest.maps(flat))

    def worth(self, flat, maps):
        """Energy of flat points with these maps; infinite where a triangle is flipped."""
        return self.rest.area @ self.energy.density(*maps)

    def slope(self, flat, maps):
        """(n,) complex gradient of `worth`."""
        at_alpha, at_beta = self.energy.first(*maps)
        return self.rest.gather(self.rest.area * at_alpha, self.rest.area * at_beta)

    def step(self, direction):
        """Take the longest halved step that lowers the energy enough, 10 % short of any flip; its length, 0 if none."""
        alpha, beta = self.maps
        d_alpha, d_beta = self.rest.maps(direction)
        length = min(1.0, 0.9 * first_flip(alpha, beta, d_alpha, d_beta))
        promise = dot(self.gradient, direction)
        for _ in range(30):
            flat = self.flat + length * direction
            value = self.worth(flat, (alpha + length * d_alpha, beta + length * d_beta))
            if value <= self.value + 1e-4 * length * promise and value < self.value:
                self._take(flat, self.rest.maps(flat))
                return length
            length *= 0.5
        return 0.0

    def newton_direction(self, damping=0.0, rows=None, give=None):
        """(n,) complex Newton step on the positive part of the Hessian.

        `damping` is the share of the mean stiffness that every triangle gets besides its own. `rows` (m, n) complex are
        sums over the points, Re(conj(row) . flat), that resist change: a row by the inverse of its `give` (m,), one that
        gives 0 entirely (Woodbury's formula).
        """
        bend, at_alpha, at_beta = self.energy.second(*self.maps)
        stiffness = 0.25 * (bend * (np.abs(at_alpha) ** 2 + np.abs(at_beta) ** 2)).sum(axis=0)
        floor = 1e-8 * stiffness + damping * (self.rest.area @ stiffness) / self.rest.total
        factors = self.rest.stiffness(bend, at_alpha, at_beta, floor)
        direction = -factors.solve(self.gradient.view(float)).view(complex)
        if rows is not None:
            real = np.ascontiguousarray(rows).view(float)
            answers = factors.solve(real.T)
            pulls = np.linalg.solve(np.diag(give) + real @ answers, real @ direction.view(float))
            direction -= (answers @ pulls).view(complex)
        return direction

    def _take(self, flat, maps):
        self.flat, self.maps = flat, maps
        self.value, self.gradient = self.worth(flat, maps), self.slope(flat, maps)


def first_flip(alpha, beta, d_alpha, d_beta):
    """Smallest positive step at which a triangle's area becomes zero; infinite if none ever does."""
    c = np.abs(alpha) ** 2 - np.abs(beta) ** 2
    b = (alpha.conj() * d_alpha).real - (beta.conj() * d_beta).real
    a = np.abs(d_alpha) ** 2 - np.abs(d_beta) ** 2
    inside = b * b - a * c
    reach = np.where(inside >= 0, -b + np.sqrt(np.maximum(inside, 0)), 0)
    # c / (-b + root) is the smaller root where both are positive and the positive one where they differ in sign
    return np.min(c / np.where(reach > 0, reach, np.nan), initial=np.inf, where=reach > 0)


def dot(a, b):
    """Real inner product of complex vectors."""
    return np.vdot(a, b).real
