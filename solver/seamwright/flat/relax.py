"""Let a flat piece relax: least strain energy from a flip-free start, and no triangle ever flips on the way."""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_matrix

from ..form.laplacian import Factor
from .rest import solve_complex

MEMORY = 8
REFACTOR = 0.75
STALL = 20
FLOOR = 1e-18
"""An energy per area this small is a stretch of 1e-9: nothing left to gain."""


@dataclass
class Relaxed:
    """How it ended: flat (n,) complex, energy per area, and what it took."""

    flat: np.ndarray
    energy: float
    converged: bool
    iterations: int
    factorisations: int
    newton_steps: int


def relax(rest, flat, energy, tolerance=1e-5, most=300):
    """Minimise the sum of area x energy density from (n,) complex, flip-free `flat`. Returns Relaxed.

    L-BFGS preconditioned with one Laplacian for both coordinates, its triangle weights the secants of the energy, made
    anew when the energy has fallen by a quarter (Liu, Bouaziz, Kavan 2017); two Newton steps on the positive part of the
    Hessian (Smith, de Goes, Kim 2019) when that is slow. Ends when a step promises less than `tolerance` of the energy.
    """
    state = State(rest, energy, flat)
    solver, known_at, pairs = None, np.inf, []
    factorisations = newton_steps = since = 0
    for iteration in range(most):
        by_newton = since >= STALL
        if by_newton:
            direction, pairs, known_at = state.newton_direction(), [], np.inf
            newton_steps += 1
            since = 0 if newton_steps % 2 == 0 else since
        else:
            if state.value < REFACTOR * known_at:
                solver, known_at, pairs = rest.solver(energy.secant(*state.maps)), state.value, []
                factorisations += 1
            direction = -_precondition(state.gradient, pairs, solver)
            since += 1
        promise = -dot(state.gradient, direction)
        if state.value <= FLOOR * rest.total or promise <= tolerance * state.value:
            return Relaxed(state.flat, state.value / rest.total, True, iteration, factorisations, newton_steps)
        flat, gradient = state.flat, state.gradient
        if state.step(direction):
            moved, turned = state.flat - flat, state.gradient - gradient
            if not by_newton and dot(moved, turned) > 0:
                pairs = [*pairs[1 - MEMORY:], (moved, turned)]
        elif pairs:
            pairs = []
        elif by_newton:
            break
        else:
            since = STALL
    return Relaxed(state.flat, state.value / rest.total, False, iteration + 1, factorisations, newton_steps)


class State:
    """Flat points (n,) complex with their maps, energy (`value`, not per area) and gradient, kept together."""

    def __init__(self, rest, energy, flat):
        self.rest, self.energy = rest, energy
        self._take(flat, rest.maps(flat))

    def _take(self, flat, maps, value=None):
        area = self.rest.area
        self.flat, self.maps = flat, maps
        self.value = area @ self.energy.density(*maps) if value is None else value
        at_alpha, at_beta = self.energy.first(*maps)
        self.gradient = self.rest.gather(area * at_alpha, area * at_beta)

    def step(self, direction):
        """Take the longest halved step that lowers the energy enough and stays 10 % short of any flip; False if none."""
        alpha, beta = self.maps
        d_alpha, d_beta = self.rest.maps(direction)
        length = min(1.0, 0.9 * first_flip(alpha, beta, d_alpha, d_beta))
        slope = dot(self.gradient, direction)
        for _ in range(30):
            maps = alpha + length * d_alpha, beta + length * d_beta
            value = self.rest.area @ self.energy.density(*maps)
            if value <= self.value + 1e-4 * length * slope and value < self.value:
                flat = self.flat + length * direction
                self._take(flat, self.rest.maps(flat), value)
                return True
            length *= 0.5
        return False

    def newton_direction(self, damping=0.0, held=None):
        """(n,) complex Newton step on the positive part of the Hessian.

        `damping` is the share of the piece's mean stiffness that every triangle gets besides its own; `held` (n,) complex
        is a weighted sum of the points that the step may not change.
        """
        rest = self.rest
        p, zero = rest.slope, np.zeros(len(rest.area))
        rows = np.stack([
            np.stack([p.real, p.imag], 2), np.stack([-p.imag, p.real], 2),
            np.stack([p.real, -p.imag], 2), np.stack([p.imag, p.real], 2)], 1).reshape(len(zero), 4, 6)
        bend = self.energy.second(*self.maps)
        stiffness = np.einsum("tii->t", bend) / 4
        bend += (1e-8 * stiffness + damping * (rest.area @ stiffness) / rest.total)[:, None, None] * np.eye(4)
        blocks = rest.area[:, None, None] * (rows.transpose(0, 2, 1) @ bend @ rows)
        at = (2 * rest.triangles[:, :, None] + np.arange(2)).reshape(-1, 6)
        size = 2 * rest.count
        matrix = coo_matrix((blocks.ravel(), (np.repeat(at, 6, axis=1).ravel(), np.tile(at, (1, 6)).ravel())),
                            shape=(size, size)).tocsc()
        for coordinate in (0, 1):
            matrix[coordinate, coordinate] *= 2
        factor = Factor(matrix)
        direction = -factor.solve(self.gradient.view(float)).view(complex)
        if held is not None:
            answer = factor.solve(held.view(float)).view(complex)
            direction -= dot(held, direction) / dot(held, answer) * answer
        return direction


def first_flip(alpha, beta, d_alpha, d_beta):
    """Smallest positive step at which a triangle's area becomes zero; infinite if none ever does."""
    c = np.abs(alpha) ** 2 - np.abs(beta) ** 2
    b = (alpha.conj() * d_alpha).real - (beta.conj() * d_beta).real
    a = np.abs(d_alpha) ** 2 - np.abs(d_beta) ** 2
    inside = b * b - a * c
    reach = np.where(inside >= 0, -b + np.sqrt(np.maximum(inside, 0)), 0)
    # c / (-b + root) is the smaller root where both are positive and the positive one where they differ in sign
    return np.min(c / np.where(reach > 0, reach, np.nan), initial=np.inf, where=reach > 0)


def _precondition(gradient, pairs, solver):
    """L-BFGS two-loop product (Nocedal 1980) with the Laplacian's inverse in the middle."""
    left, shares = gradient.copy(), []
    for moved, turned in reversed(pairs):
        shares.append(dot(moved, left) / dot(moved, turned))
        left -= shares[-1] * turned
    left = solve_complex(solver, left)
    for (moved, turned), share in zip(pairs, reversed(shares), strict=True):
        left += (share - dot(turned, left) / dot(moved, turned)) * moved
    return left


def dot(a, b):
    """Real inner product of complex vectors."""
    return np.vdot(a, b).real
