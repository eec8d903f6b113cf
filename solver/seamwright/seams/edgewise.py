"""How long a seam is that keeps to edges: a short step counts as the steps along edges that add up to it.

On a square grid that is |x| + |y|, along the grid's lines the plain length and on the diagonal the square root of 2 times as
much. In a triangle with sides along unit vectors e_j it is the norm in which all e_j have length 1, and its unit circle the
polygon of them; every such norm is a sum of |c_j . v| with c_j at right angles to e_j (the dual polygon is a zonogon).
"""

import numpy as np

FLATTEST = 0.2  # sine of the angle between two sides, at least: of needles it would be as good as nothing
SAMPLES = 4  # triangles of the form that speak for a point of a coarser level
ROUNDING = 0.1  # share of a covector by which the kink of |c . v| is rounded, or seams would stick to it
LONGER = 1.1  # what seams along edges are longer than through faces at best (measured) is not counted: pieces for one thrift
# then stretch alike on both routes
UNIT = LONGER * (1 + ROUNDING)  # what a step along a grid's line counts undivided


def covectors(surface, allowed):
    """(m, 3, 3) vectors c_j in the plane of every triangle of a Surface: a step v in it counts sum |c_j . v| along edges.

    allowed (e,) bool: edges that may be seams; where a triangle has but one of them or none, all its sides count.
    """
    corners = surface.points[surface.triangles]
    side = np.roll(corners, -1, axis=1) - corners
    length = np.maximum(np.linalg.norm(side, axis=2), 1e-300)
    unit = side / length[:, :, None]
    normal = np.cross(unit[:, 0], unit[:, 1])
    normal /= np.maximum(np.linalg.norm(normal, axis=1), 1e-300)[:, None]
    sine = np.linalg.norm(np.cross(np.roll(unit, -1, axis=1), np.roll(unit, -2, axis=1)), axis=2)  # of the other two sides
    sine = np.maximum(sine, FLATTEST)
    one, two = np.roll(sine, -1, axis=1), np.roll(sine, -2, axis=1)
    share = np.maximum(one + two - sine, 0) / (2 * one * two)
    use = allowed[surface.triangle_edges]
    grid = use.sum(axis=1) == 2  # two sides of a quad, and its diagonal
    share[grid] = np.where(use[grid], 1 / (sine * ~use).sum(axis=1)[grid, None], 0.0)
    return share[:, :, None] * np.cross(normal[:, None], unit)


def sampled(found, surface, fine, owner):
    """(m', J, 3) the same for the Surface of a coarser level: the mean over some of the triangles around its corners.

    found (m, 3, 3) as `covectors` gives them on the Surface `fine`; owner (n,) the level's point of each of its points.
    """
    cell = owner[fine.triangles[:, 0]]
    order = np.argsort(cell, kind="stable")
    first = np.searchsorted(cell[order], np.arange(len(surface.points) + 1))
    many = np.maximum(np.diff(first), 1)
    at = first[:-1, None] + (np.arange(SAMPLES) * many[:, None]) // SAMPLES
    chosen = order[np.minimum(at, len(order) - 1)]  # (N, SAMPLES)
    return found[chosen[surface.triangles]].reshape(len(surface.triangles), -1, 3) / (3 * SAMPLES)


def in_planes(found, surface):
    """(m, J, 2) vectors (m, J, 3) in each triangle's own plane, its first side the x axis, as in `Level.frames`."""
    a, b, c = (surface.points[surface.triangles[:, k]] for k in range(3))
    x = (b - a) / np.maximum(np.linalg.norm(b - a, axis=1), 1e-300)[:, None]
    y = (c - a) - ((c - a) * x).sum(axis=1)[:, None] * x
    y /= np.maximum(np.linalg.norm(y, axis=1), 1e-300)[:, None]
    return np.stack([np.einsum("mjd,md->mj", found, axis) for axis in (x, y)], axis=2)


def stepped(along, plane):
    """(length (s,), gradient (s, 2)) of steps along (s, 2), counted with the vectors plane (s, J, 2)."""
    size = ROUNDING**2 * (plane**2).sum(axis=2)
    over = np.einsum("sjd,sd->sj", plane, along)
    each = np.sqrt(over**2 + size * (along**2).sum(axis=1)[:, None] + 1e-300)
    slope = np.einsum("sj,sjd->sd", over / each, plane) + (size / each).sum(axis=1)[:, None] * along
    return each.sum(axis=1) / UNIT, slope / UNIT
