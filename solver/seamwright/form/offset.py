"""The surface at a distance from the form: where the middle of thick goods lies, which alone keeps its length in a bend."""

from dataclasses import dataclass

import numpy as np

from .measure import angles, area_vectors, areas, sum_at_points, triangle_normals, unit, vertex_areas
from .surface import Surface

CREASE = np.cos(np.radians(20))
"""A triangle whose normal leans farther from the point's makes a crease of it, where the planes themselves are moved."""
LONGEST = 2.0
"""Of a crease's move, over the distance: a mitre of 60 degrees."""
LEAST_AREA, LEAST_EDGE = 0.2, 0.4
"""Share of its area and of its edges, along themselves, that every triangle keeps; with less the goods would crumple."""
NEEDLE = 0.02
"""A triangle lower than this share of its longest edge does not count: its normal is rounding."""
SLOPE = 0.2
"""Most that the distance changes in a step of length 1, where it is capped."""
STEP, MOST = 0.8, 60
FULL = 0.99
"""Share of the distance from which a point counts as having it all."""


@dataclass
class Offset:
    """surface: the same triangles, moved; capped: share of the area that could not have the whole distance; worst (3,): the
    point of the form that has least of it."""

    surface: Surface
    capped: float
    worst: np.ndarray


def offset(surface, distance):
    """Offset of a Surface along its normals, metres, outwards where positive.

    On smooth parts every point moves along its normal; at creases to where the moved planes of its triangles meet, so that
    flat faces stay flat. Where the form is too finely curved on the side the goods lie, points move less.
    """
    moves = distance * _directions(surface)
    share, height = np.ones(len(surface.points)), _heights(surface)
    counted = height > NEEDLE * surface.edge_lengths[surface.triangle_edges].max(axis=1)
    for _ in range(MOST):
        moved = Surface(surface.points + share[:, None] * moves, surface.triangles)
        crumpled = _crumpled(surface, moved) & counted
        if not crumpled.any():
            break
        share[np.unique(surface.triangles[crumpled])] *= STEP
        share = _eased(surface, share, abs(distance))
    area = vertex_areas(surface)
    return Offset(moved, float(area[share < FULL].sum() / area.sum()), surface.points[share.argmin()])


def carried(fine, source, here, there):
    """(n, 3) the points of a Surface cut from `here`, at the same places of `there`, which has the same triangles.

    source (m,): the triangle of `here` in which each triangle of `fine` lies.
    """
    if here is there:
        return fine.points
    points = fine.points
    triangle = np.empty(len(points), dtype=np.int64)
    triangle[fine.triangles] = source[:, None]
    a, b, c = (here.points[here.triangles[triangle, k]] for k in range(3))
    u, v, w = b - a, c - a, points - a
    uu, uv, vv, uw, vw = (np.einsum("ij,ij->i", x, y) for x, y in ((u, u), (u, v), (v, v), (u, w), (v, w)))
    det = uu * vv - uv * uv
    det = np.where(det > 0, det, np.inf)
    s, t = (vv * uw - uv * vw) / det, (uu * vw - uv * uw) / det
    a, b, c = (there.points[there.triangles[triangle, k]] for k in range(3))
    return a + s[:, None] * (b - a) + t[:, None] * (c - a)


def _directions(surface):
    """(n, 3) how each point moves for a distance of 1."""
    weight, normal = angles(surface), triangle_normals(surface)
    weight = np.where(normal.any(axis=1)[:, None], weight, 0.0)
    out = unit(sum_at_points(surface, weight[:, :, None] * normal[:, None]))
    lean = np.einsum("tkx,tx->tk", out[surface.triangles], normal)
    crease = np.zeros(len(out), dtype=bool)
    crease[surface.triangles[(lean < CREASE) & (weight > 0)]] = True
    # least sum of weight (n . move - 1)^2, with a little of |move - out|^2 for what the planes leave open
    total = np.maximum(sum_at_points(surface, weight), 1e-12)[:, None]
    squares = sum_at_points(surface, (weight[:, :, None] * (normal[:, :, None] * normal[:, None]).reshape(-1, 1, 9)))
    squares = (squares / total).reshape(-1, 3, 3)[crease] + 1e-6 * np.eye(3)
    load = (sum_at_points(surface, weight[:, :, None] * normal[:, None]) / total + 1e-6 * out)[crease]
    out[crease] = np.linalg.solve(squares, load[:, :, None])[:, :, 0]
    return out * np.minimum(1, LONGEST / np.maximum(np.linalg.norm(out, axis=1, keepdims=True), 1e-12))


def _heights(surface):
    return 2 * areas(surface) / np.maximum(surface.edge_lengths[surface.triangle_edges].max(axis=1), 1e-300)


def _crumpled(surface, moved):
    """(t,) bool: triangles that would turn over or shrink too far."""
    before, after = area_vectors(surface), area_vectors(moved)
    kept = np.einsum("ij,ij->i", before, after) / np.maximum(np.einsum("ij,ij->i", before, before), 1e-300)
    step, was = ((s.points[s.edges[:, 1]] - s.points[s.edges[:, 0]]) for s in (moved, surface))
    short = np.einsum("ij,ij->i", step, was) < LEAST_EDGE * surface.edge_lengths**2
    return (kept < LEAST_AREA) | short[surface.triangle_edges].any(axis=1)


def _eased(surface, share, distance):
    """Shares (n,) lowered where they would otherwise change faster than SLOPE along an edge."""
    a, b = surface.edges.T
    room = SLOPE * surface.edge_lengths / distance
    while True:
        lower = share.copy()
        np.minimum.at(lower, a, share[b] + room)
        np.minimum.at(lower, b, share[a] + room)
        if (lower == share).all():
            return share
        share = lower
