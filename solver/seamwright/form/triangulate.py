"""Faces with more than three corners, cut into triangles along their diagonals."""

from itertools import pairwise

import numpy as np

ROUNDING = 1e-9
"""Diagonals that differ by less than this share are as good as each other; then the first is taken."""


def triangulate(points, polygons):
    """(triangles (t, 3), (t,) which of the polygons each came from), in the order of the polygons."""
    parts = []
    for size in np.unique(polygons.sizes):
        which, rows = polygons.rows(size)
        if size == 4:
            rows = cut_quads(points, rows, polygons)
        elif size > 4:
            rows = clip_ears(points, rows)
        parts.append((rows.reshape(-1, 3), np.repeat(which, size - 2)))
    triangles, polygon = (np.concatenate(arrays) for arrays in zip(*parts, strict=True))
    order = np.argsort(polygon, kind="stable")
    return triangles[order], polygon[order]


def cut_quads(points, quads, polygons):
    """(k, 2, 3): quads (k, 4) cut along the shorter diagonal that leaves both triangles facing the same way.

    Where two faces share two edges, the diagonal that closes off their common point would be laid twice; then the other
    is taken.
    """
    a, b, c, d = (points[quads[:, k]] for k in range(4))
    through_a = np.einsum("ij,ij->i", np.cross(b - a, c - a), np.cross(c - a, d - a)) > 0
    through_b = np.einsum("ij,ij->i", np.cross(c - b, d - b), np.cross(d - b, a - b)) > 0
    shorter = np.linalg.norm(d - b, axis=1) < np.linalg.norm(c - a, axis=1) * (1 - ROUNDING)
    use_b = np.where(through_a == through_b, shorter, through_b)
    edges = polygons.edges[0]
    base = len(points)
    for _ in range(2):
        ends = np.where(use_b[:, None], quads[:, [1, 3]], quads[:, [0, 2]])
        key = ends.min(axis=1) * base + ends.max(axis=1)
        _, which, count = np.unique(key, return_inverse=True, return_counts=True)
        taken = (count[which.ravel()] > 1) | np.isin(key, edges[:, 0] * base + edges[:, 1])
        if not taken.any():
            break
        use_b ^= taken
    turned = np.where(use_b[:, None], np.roll(quads, -1, axis=1), quads)
    return np.stack([turned[:, [0, 1, 2]], turned[:, [0, 2, 3]]], axis=1)


def clip_ears(points, rows):
    """(k, s - 2, 3): polygons (k, s) cut by clipping the best-shaped ear again and again (Meisters 1975), all at once.

    Judged in each polygon's mean plane. Only reflex corners can lie inside an ear, so only they are tested. A polygon that
    crosses itself has no true ear left at some point; then its best-shaped corner goes.
    """
    count, size = rows.shape
    flat = in_mean_plane(points[rows])
    left = np.tile(np.arange(size), (count, 1))
    every = np.arange(count)
    out = []
    while left.shape[1] > 3:
        p = flat[every[:, None], left]
        before, after = np.roll(p, 1, axis=1), np.roll(p, -1, axis=1)
        double = cross(p - before, after - p)
        shape = double / (((p - before) ** 2).sum(2) + ((after - p) ** 2).sum(2) + ((after - before) ** 2).sum(2) + 1e-300)
        reflex = np.flatnonzero((double <= 0).any(axis=0))
        if len(reflex):
            q = p[:, None, reflex]
            ring = [corner[:, :, None] for corner in (before, p, after, before)]
            sides = [cross(v - u, q - u) for u, v in pairwise(ring)]
            inside = (sides[0] >= 0) & (sides[1] >= 0) & (sides[2] >= 0)
            own = (np.arange(left.shape[1])[:, None] - reflex[None, :]) % left.shape[1]
            inside &= ~np.isin(own, (0, 1, left.shape[1] - 1))[None]
            inside &= (double[:, reflex] <= 0)[:, None, :]
            shape = np.where(inside.any(axis=2), shape - 2, shape)
        ear = shape.argmax(axis=1)
        s = left.shape[1]
        out.append(np.stack([left[every, (ear - 1) % s], left[every, ear], left[every, (ear + 1) % s]], axis=1))
        left = left[np.arange(s)[None, :] != ear[:, None]].reshape(count, s - 1)
    out.append(left)
    return rows[every[:, None, None], np.stack(out, axis=1)]


def in_mean_plane(corners):
    """(k, s, 2): polygons (k, s, 3) seen along their mean normal (Newell), so that they run counter-clockwise."""
    at = corners - corners.mean(axis=1, keepdims=True)
    normal = np.cross(at, np.roll(at, -1, axis=1)).sum(axis=1)
    normal /= np.maximum(np.linalg.norm(normal, axis=1, keepdims=True), 1e-300)
    least = np.eye(3)[np.abs(normal).argmin(axis=1)]
    u = np.cross(normal, least)
    u /= np.maximum(np.linalg.norm(u, axis=1, keepdims=True), 1e-300)
    v = np.cross(normal, u)
    return np.stack([np.einsum("ksx,kx->ks", at, u), np.einsum("ksx,kx->ks", at, v)], axis=2)


def cross(u, v):
    """Third component of the cross product of plane vectors."""
    return u[..., 0] * v[..., 1] - u[..., 1] * v[..., 0]
