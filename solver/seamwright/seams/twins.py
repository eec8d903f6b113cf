"""Which pieces and which seams of an explicit network are mirror images of each other."""

import numpy as np

from ..form.measure import areas, triangle_normals
from ..form.nearest import Nearest

ALIKE = 0.85
"""Share of a piece's area that has to lie on the other, mirrored, for the two to be twins."""
CLOSE = 0.02
"""Mean distance from a seam's mirror image to another under which they are twins, as a share of the form's size."""


def twin_pieces(network, plane):
    """(twin (P,), side (P,)) of a Network's pieces: the piece each one's mirror image is, itself when it lies across the
    plane, -1 when it is none; and 1 on the side of the plane's normal, -1 on the other, 0 across."""
    surface = network.surface
    count, piece = network.pieces
    middles, area = surface.points[surface.triangles].mean(axis=1), areas(surface)
    there = Nearest(surface).places(plane.mirrored(middles), plane.turned(triangle_normals(surface)))[0]
    votes = np.bincount(piece * count + piece[there], area, minlength=count * count).reshape(count, count)
    whole = votes.sum(axis=1)
    twin = votes.argmax(axis=1)
    alike = (votes.max(axis=1) > ALIKE * whole) & (twin[twin] == np.arange(count))
    twin = np.where(alike & alike[twin], twin, -1)
    lean = np.bincount(piece, area * ((middles - plane.point) @ plane.normal), minlength=count)
    return twin, np.where(twin == np.arange(count), 0, np.sign(lean)).astype(np.int64)


def twin_stretch(network, plane, stretch):
    """The run of seam (r,) that is the mirror image of a run (q,) of the network's points along one of its chains.

    None where that is mostly the run itself (it lies across the plane or along it), or where no seam is near.
    """
    points = network.surface.points
    wanted = plane.mirrored(points[stretch])
    gaps = [np.linalg.norm(wanted[:, None] - points[chain], axis=2) for chain in network.chains]
    off = [gap.min(axis=1).mean() for gap in gaps]
    best = int(np.argmin(off))
    chain, near = network.chains[best], gaps[best].argmin(axis=1)
    if off[best] > CLOSE * np.sqrt(network.surface_area):
        return None
    first, last = sorted((near[0], near[-1]))
    if stretch[0] == stretch[-1] or (first <= 2 and last >= len(chain) - 3):
        first, last = 0, len(chain) - 1
    twin = chain[first : last + 1]
    return None if len(twin) < 2 or np.isin(stretch, twin).mean() > 0.5 else twin
