"""Lay a piece flat so that it nowhere lies over itself, where the least strained flattening does."""

import numpy as np

from .factor import factor
from .fence import Fence, Push
from .flatten import DIRICHLET, as_complex, as_points, disk_loop
from .overlap import overlaps
from .rest import Rest, solve_complex
from .start import best_scale, closed_polygon, embedded_start, valid
from .state import State

ROUNDER = (0.05, 0.1, 0.2, 0.4)
"""How far the boundary is bent towards a circle, to open what lies over itself."""
ROUNDS, STEPS = 12, 5
"""The fence is made anew after so many steps: its strength goes with the energy, which falls."""
LEAST_GAIN = 1e-3
"""Share of the energy that a round must gain."""


def untangled(surface, flat):
    """(n, 2) of a disk, flip-free and with a boundary that does not cross itself, strained little more than that takes.

    flat (n, 2): the flattening that lies over itself. Its boundary is bent until it does not (or the round embedding taken,
    which never does), and the isotropic energy made least again by Newton steps within a Fence. None where nothing to begin
    from is found. Raises CoverError if the surface is no disk.
    """
    rest, loop = Rest(surface), disk_loop(surface)
    flat = _start(surface, rest, loop, as_complex(np.asarray(flat, dtype=float)))
    if flat is None:
        return None
    fence, damping = Fence(surface.points, [loop]), 1e-3
    for _ in range(ROUNDS):
        before = rest.area @ DIRICHLET.density(*rest.maps(flat))
        state = State(rest, DIRICHLET, flat, [Push(fence, before)])
        damping = state.settle(STEPS, damping, LEAST_GAIN)[1]
        flat = state.flat
        if before - rest.area @ DIRICHLET.density(*rest.maps(flat)) < LEAST_GAIN * before:
            break
    return as_points(flat)


def _start(surface, rest, loop, flat):
    """(n,) complex, the least strained of a few that are flip-free and do not lie over themselves, or None."""
    starts = [one for one in _opened(rest, loop, flat)
              if valid(rest, one) and not overlaps(as_points(one), loop)]
    embedded = embedded_start(surface, rest, loop)
    starts = [one * best_scale(rest, one) for one in [*starts, embedded] if one is not None]
    return min(starts, key=lambda one: rest.area @ DIRICHLET.density(*rest.maps(one)), default=None)


def _opened(rest, loop, flat):
    """The flat piece with its boundary bent towards a circle, more and more, its inside harmonic. Yields (n,) complex."""
    side = np.roll(flat[loop], -1) - flat[loop]
    length, turn = np.abs(side), np.angle(side / np.roll(side, 1))
    even = 0.5 * (length + np.roll(length, 1))
    turn += (2 * np.pi - turn.sum()) / len(turn)
    inner = np.setdiff1d(np.arange(rest.count), loop)
    matrix = rest.laplacian(np.ones(len(rest.area))).tocsr()[inner]
    factors = factor(matrix[:, inner]) if len(inner) else None
    for share in ROUNDER:
        bent = np.zeros(rest.count, dtype=complex)
        bent[loop] = closed_polygon(length, (1 - share) * turn + share * 2 * np.pi * even / even.sum())
        if len(inner):
            bent[inner] = solve_complex(factors, -(matrix[:, loop] @ bent[loop]))
        yield bent
