"""A flat piece on its way: points, strain energy and gradient kept together, steps that never flip a triangle."""

import numpy as np
from scipy.sparse import vstack

from .factor import across


class State:
    """Flat points (n,) complex with their maps, energy (`value`, not per area) and gradient (n,) complex.

    `beside`: what acts on the points besides the strain. Each has `worth(flat)`, its energy; `slope(flat)`, the gradient of
    that, (n,) complex; and `rows(flat)`: (m, n) complex csr, sums over the points, Re(conj(row) . flat), that resist change,
    and the inverse of how much, (m,); 0 resists entirely.
    """

    def __init__(self, rest, energy, flat, beside=()):
        self.rest, self.energy, self.beside = rest, energy, beside
        self._take(flat, rest.maps(flat))

    def worth(self, flat, maps):
        """Energy of flat points with these maps; infinite where a triangle is flipped."""
        value = self.rest.area @ self.energy.density(*maps)
        return value + sum(other.worth(flat) for other in self.beside) if np.isfinite(value) else np.inf

    def slope(self, flat, maps):
        """(n,) complex gradient of `worth`."""
        at_alpha, at_beta = self.energy.first(*maps)
        strain = self.rest.gather(self.rest.area * at_alpha, self.rest.area * at_beta)
        return sum((other.slope(flat) for other in self.beside), strain)

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

    def newton_direction(self, damping=0.0):
        """(n,) complex Newton step on the positive part of the Hessian.

        `damping` is the share of the mean stiffness that every triangle gets besides its own.
        """
        bend, at_alpha, at_beta = self.energy.second(*self.maps)
        stiffness = 0.25 * (bend * (np.abs(at_alpha) ** 2 + np.abs(at_beta) ** 2)).sum(axis=0)
        floor = 1e-8 * stiffness + damping * (self.rest.area @ stiffness) / self.rest.total
        blocks = self.rest.stiffness(bend, at_alpha, at_beta, floor)
        direction = np.concatenate([-factors.solve(self.gradient[own].view(float)) for own, factors in blocks]).view(complex)
        resisting = [other.rows(self.flat) for other in self.beside]
        if not sum(len(give) for _, give in resisting):
            return direction
        return self._resisted(direction, blocks, vstack([rows for rows, _ in resisting]).tocsc(),
                              np.concatenate([give for _, give in resisting]))

    def _resisted(self, direction, blocks, rows, give):
        """The direction with the resistance of the rows (Woodbury's formula), block by block."""
        matrix, right, parts = np.diag(give), np.zeros(len(give)), []
        for own, factors in blocks:
            part = rows[:, own].tocsr()
            touched = np.flatnonzero(np.diff(part.indptr))
            part = part[touched].toarray().view(float)
            matrix[np.ix_(touched, touched)] += across(factors, part)
            right[touched] += part @ direction[own].view(float)
            parts.append((own, factors, touched, part))
        pulls = np.linalg.solve(matrix, right)
        for own, factors, touched, part in parts:
            direction[own] -= factors.solve(pulls[touched] @ part).view(complex)
        return direction

    def settle(self, most, damping, least_gain):
        """At most so many Newton steps, while one lowers the energy by `least_gain` of it. Returns (steps taken, damping).

        The damping falls after full steps as good as foreseen and rises after shortened ones (Levenberg 1944, Marquardt
        1963).
        """
        for step in range(most):
            before, way = self.value, self.newton_direction(damping)
            promise = -dot(self.gradient, way)
            if promise <= 1e-3 * before:
                return step, damping
            if self.step(way) < 1:
                damping = min(3 * damping, 1.0)
            elif before - self.value > 0.35 * promise:
                damping = max(damping / 2, 1e-5)
            if before - self.value < least_gain * before:
                return step + 1, damping
        return most, damping

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
