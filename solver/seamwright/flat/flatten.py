"""Flatten a piece: a disk in space to a flat one of the same triangles, true to scale, with least strain."""

from dataclasses import dataclass, field

import numpy as np

from ..errors import CoverError
from .relax import relax
from .rest import Rest
from .start import start
from .strain import Isotropic, symmetric_dirichlet

DIRICHLET = Isotropic(symmetric_dirichlet)


@dataclass
class Flattening:
    """flat (n, 2) metres, no triangle flipped; energy per area (0 for an exact development); how the solver ended."""

    flat: np.ndarray
    energy: float
    converged: bool
    iterations: int
    notes: list = field(default_factory=list)


def flatten(surface, tolerance=1e-5):
    """Least symmetric Dirichlet energy over all flattenings of a disk (Smith, Schaefer 2015). Returns Flattening.

    tolerance: share of the energy; a step that promises less is the last.
    Raises CoverError if the surface is no disk. Whether the flat boundary crosses itself is for `overlap` to say.
    """
    loop = disk_loop(surface)
    rest = Rest(surface)
    flat, note = start(surface, rest, loop)
    if flat is None:
        raise CoverError(f"A piece of {len(rest.triangles)} triangles cannot be laid flat: {note}. Split it with a seam.")
    done = relax(rest, flat, DIRICHLET, tolerance)
    notes = [note] if note else []
    if not done.converged:
        notes.append(f"the flattening was still improving after {done.iterations} steps")
    return Flattening(as_points(done.flat), done.energy, done.converged, done.iterations, notes)


def disk_loop(surface):
    """(q,) the boundary of a disk, in order. Raises CoverError, naming what it is instead."""
    if not len(surface.triangles):
        raise CoverError("A piece without triangles cannot be laid flat.")
    parts = surface.triangle_components[0]
    loops = surface.boundary_loops
    if parts != 1 or len(loops) != 1 or surface.euler != 1 or len(np.unique(loops[0])) != len(loops[0]):
        raise CoverError(f"A piece is no disk: it has {parts} parts, {len(loops)} boundary loops and Euler characteristic "
                         f"{surface.euler}, where 1, 1 and 1 are needed. Cut it open with a seam.")
    if len(np.unique(surface.triangles)) != len(surface.points):
        raise CoverError("A piece holds points that no triangle uses; leave them out.")
    return loops[0]


def as_points(flat):
    """(n, 2) float from (n,) complex."""
    return np.column_stack([flat.real, flat.imag])


def as_complex(flat):
    """(n,) complex from (n, 2) float."""
    return flat[:, 0] + 1j * flat[:, 1]
