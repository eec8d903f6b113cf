"""Laying a piece flat against libigl's SLIM (Rabinovich and others 2017): processor time to come near the least symmetric
Dirichlet energy. Our set-up and start count, SLIM's start, which is ours, does not.

The piece is the largest of the seam stage's network at a thrift; the least energy is ours, run on until nothing moves.
"""

import time
from dataclasses import dataclass

import igl
import numpy as np
from seamwright.flat.flatten import DIRICHLET, as_points, disk_loop
from seamwright.flat.relax import relax
from seamwright.flat.rest import Rest
from seamwright.flat.start import start
from seamwright.form.surface import Surface

from .drawn import network_of
from .stage import stage
from .unit import form_of, one_factorisation

NEAR, NEARER = 0.01, 1e-4  # shares over the least energy
THRIFT = 0.1
MOST = 60  # steps of either


@dataclass
class Row:
    """points of the piece; near and nearer: our seconds to within NEAR and NEARER of the least energy, and SLIM's seconds
    over them; steps: ours and SLIM's to the nearer; reached: whether SLIM came so near in MOST steps (else its ratio is at
    least that); factorisations: our time to the nearer in those of the piece's own Laplacian."""

    form: str
    points: int
    energy: float
    near: float
    nearer: float
    near_ratio: float
    nearer_ratio: float
    steps: tuple
    reached: bool
    factorisations: float


def rows(names, counts):
    """Yield (Row, None) for every number of points and form."""
    for count in counts:
        for name in names:
            ladder, found, _ = stage(form_of(name, count), THRIFT)
            network = network_of(ladder, found.cut)
            sizes = np.bincount(network.pieces[1])
            yield compared(name, network.piece_surface(int(sizes.argmax()))[0]), None


def compared(name, piece):
    """Row for a piece, a Surface that is a disk."""
    rest = Rest(piece)
    begun = start(piece, rest, disk_loop(piece))[0]
    least = relax(rest, begun, DIRICHLET, tolerance=1e-11, most=2000).energy
    ours, slim = _ours(piece, least), _slim(piece, rest, begun, least)
    (near, _), (nearer, steps) = ours
    ratios = [theirs[0] / mine[0] for mine, theirs in zip(ours, slim, strict=True)]
    return Row(name, len(piece.points), least, near, nearer, *ratios, (steps, slim[1][1]), slim[1][2],
               nearer / one_factorisation(piece, 1))


def _ours(piece, least):
    """[(seconds, steps) to NEAR, the same to NEARER]: run anew with one step more each time, as a maker would wait."""
    found = []
    for steps in range(MOST):
        begin = time.process_time()
        fresh = Surface(piece.points, piece.triangles)
        rest = Rest(fresh)
        flat = start(fresh, rest, disk_loop(fresh))[0]
        done = relax(rest, flat, DIRICHLET, most=max(steps, 1)) if steps else None
        seconds = time.process_time() - begin
        energy = energy_of(rest, flat) if done is None else done.energy
        for share in (NEAR, NEARER)[len(found):]:
            if energy <= least * (1 + share):
                found.append((seconds, steps))
        if len(found) == 2:
            return found
    raise RuntimeError(f"the flattening did not come within {NEARER:g} of its least energy in {MOST} steps")


def _slim(piece, rest, begun, least):
    """The same for SLIM from a flat (n,) complex, and whether it came so near."""
    points, faces = np.asfortranarray(piece.points), np.asfortranarray(piece.triangles.astype(np.int32))
    begin = time.process_time()
    data = igl.slim_precompute(points, faces, np.asfortranarray(as_points(begun)), igl.MappingEnergyType.SYMMETRIC_DIRICHLET,
                               np.zeros(0, dtype=np.int32), np.zeros((0, 2), order="F"), 0.0)
    seconds, found = time.process_time() - begin, []
    for steps in range(1, MOST + 1):
        begin = time.process_time()
        flat = igl.slim_solve(data, 1)
        seconds += time.process_time() - begin
        energy = energy_of(rest, flat[:, 0] + 1j * flat[:, 1])
        for share in (NEAR, NEARER)[len(found):]:
            if energy <= least * (1 + share):
                found.append((seconds, steps, True))
        if len(found) == 2:
            break
    return found + [(seconds, steps, False)] * (2 - len(found))


def energy_of(rest, flat):
    """Symmetric Dirichlet energy per area of a flat (n,) complex, 0 for an exact development."""
    return rest.area @ DIRICHLET.density(*rest.maps(flat)) / rest.total


HEAD = (f"{'form':12} {'points':>7} {'energy':>9} {'to 1 % s':>9} {'SLIM':>6} {'to 0.01 % s':>11} {'SLIM':>6} "
        f"{'steps':>6} {'SLIM':>5} {'factor.':>8}")


def line(row):
    """The Row as printed; SLIM's seconds as multiples of ours."""
    nearer = f"{'' if row.reached else '>'}{row.nearer_ratio:.1f}"
    return (f"{row.form:12} {row.points:7d} {row.energy:9.2e} {row.near:9.3f} {row.near_ratio:6.1f} {row.nearer:11.3f} "
            f"{nearer:>6} {row.steps[0]:6d} {row.steps[1]:5d} {row.factorisations:8.1f}")


def summary(measured):
    """One line: medians over the pieces."""
    near, nearer = [row.near_ratio for row in measured], [row.nearer_ratio for row in measured]
    points = [row.points for row in measured]
    return [f"SLIM's time over ours, median over {len(measured)} pieces of {min(points)} to {max(points)} points: "
            f"{np.median(near):.1f} to 1 %, {np.median(nearer):.1f} to 0.01 % or more; ours to 0.01 % at most "
            f"{max(row.factorisations for row in measured):.1f} factorisations of the piece"]
