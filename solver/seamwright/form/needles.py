"""Triangles without height, flipped away along their longest edge."""

import numpy as np

from .polygons import number
from .surface import Surface

FLAT = 1e-4
"""A triangle lower than this share of its longest edge has no shape of its own."""


def flip_needles(points, triangles, which, mended):
    """(triangles, which) with each needle's longest edge flipped: its middle point joined to the corner across.

    The new pair fills the very area of the old one. Both belong to the polygon of the neighbour across, so no edge of the
    caller's is lost but the one that the needle's two other edges lie along. What cannot be flipped (an open longest edge,
    an edge that exists already) stays. Flips within one polygon only better the way it was cut and go untold.
    """
    triangles, which = triangles.copy(), which.copy()
    told = 0
    for _ in range(20):
        height, longest = heights(points, triangles)
        needles = np.flatnonzero(height < FLAT)
        if not len(needles):
            break
        done, crossing = flip_once(points, triangles, which, needles, longest)
        told += crossing
        if not done:
            break
    if told:
        mended.append(f"{number(told, 'triangle')} without height replaced by cutting the face beside.")
    left = int((heights(points, triangles)[0] < FLAT).sum())
    if left:
        mended.append(f"{number(left, 'triangle')} without height left as they are.")
    return triangles, which


def heights(points, triangles):
    """(least height over longest edge (m,), number k (m,) of the longest edge, from corner k to k + 1)."""
    corners = points[triangles]
    sides = np.roll(corners, -1, axis=1) - corners
    squared = np.einsum("tkx,tkx->tk", sides, sides)
    double_area = np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1)
    return double_area / np.maximum(squared.max(axis=1), 1e-300), squared.argmax(axis=1)


def flip_once(points, triangles, which, needles, longest):
    """Flip as many needles as touch nobody else's flip, in place; (how many, how many of them across a polygon's edge)."""
    surface = Surface(points, triangles)
    edge = surface.triangle_edges[needles, longest[needles]]
    sides = surface.edge_triangles[edge]
    across = np.where(sides[:, 0] == needles, sides[:, 1], sides[:, 0])
    busy, made, done, within = set(), set(), 0, 0
    for t, o, k, e in zip(needles.tolist(), across.tolist(), longest[needles].tolist(), edge.tolist(), strict=True):
        if o < 0 or t in busy or o in busy:
            continue
        a, b, tip = (int(triangles[t, (k + s) % 3]) for s in range(3))
        far = (int(np.flatnonzero(surface.triangle_edges[o] == e)[0]) + 2) % 3
        c = int(triangles[o, far])
        if tip == c or surface.edge_index([(tip, c)])[0] >= 0 or (min(tip, c), max(tip, c)) in made:
            continue
        pair = np.array([(a, c, tip), (c, b, tip)])
        if heights(points, pair)[0].min() <= heights(points, triangles[[t, o]])[0].min():
            continue
        triangles[t], triangles[o] = pair
        within += which[t] == which[o]
        which[t] = which[o]
        around = set(surface.edge_triangles[surface.triangle_edges[[t, o]]].ravel().tolist())
        busy |= around - {-1}
        made.add((min(tip, c), max(tip, c)))
        done += 1
    return done, done - within
