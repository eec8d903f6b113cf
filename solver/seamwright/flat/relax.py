"""Let a flat piece relax: least strain energy from a flip-free start, and no triangle ever flips on the way."""

from dataclasses import dataclass

import numpy as np

from .rest import solve_complex
from .state import State, dot

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
