"""Lay a piece flat so that it nowhere lies over itself, where the least strained flattening does."""

from .fence import Fence, Push
from .flatten import DIRICHLET, as_points, disk_loop
from .rest import Rest
from .start import best_scale, embedded_start
from .state import State

ROUND = 5
"""Steps after which the fence is made anew: its strength goes with the energy, which falls."""


def untangled(surface, most=40):
    """(n, 2) of a disk, flip-free and with a boundary that does not cross itself, strained little more than that takes.

    From the round embedding, which never overlaps, by at most so many Newton steps on the isotropic energy within a Fence.
    None where no flip-free embedding is found. Raises CoverError if the surface is no disk.
    """
    rest, loop = Rest(surface), disk_loop(surface)
    flat = embedded_start(surface, rest, loop)
    if flat is None:
        return None
    fence, flat = Fence(surface.points, [loop]), flat * best_scale(rest, flat)
    for step in range(most):
        if step % ROUND == 0:
            state = State(rest, DIRICHLET, flat)
            state = State(rest, DIRICHLET, flat, [Push(fence, state.value)])
        before = state.value
        state.step(state.newton_direction())
        flat = state.flat
        if before - state.value < 1e-3 * before:
            break
    return as_points(flat)
