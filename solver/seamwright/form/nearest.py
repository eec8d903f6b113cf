"""The nearest place on a surface, on the side that faces the same way: so a thin fin's front is never taken for its back."""

import numpy as np
from scipy.spatial import cKDTree

from .measure import areas, total_area, triangle_normals, vertex_normals

FACING = 1.5
"""How many mean point distances a turn of the normal by one radian (in chord) counts for when points are compared."""
WALKS = 3
"""How often a place may move on to the triangles around its triangle's corners."""


class Nearest:
    """Finds places on one Surface: points by a tree, then the triangles around them, exactly."""

    def __init__(self, surface):
        self.surface = surface
        self._gap = np.sqrt(total_area(surface) / len(surface.points))
        self.normals = triangle_normals(surface)
        # the tree's points: the surface's own, each with the triangles around it, and more where triangles are large
        n, corners = len(surface.points), surface.triangles.ravel()
        more, of = _more_points(surface, 2 * self._gap)
        self._around = np.concatenate([np.argsort(corners, kind="stable") // 3, of])
        self._count = np.concatenate([np.bincount(corners, minlength=n), np.ones(len(of), dtype=np.int64)])
        self._first = np.cumsum(self._count) - self._count
        self._used = np.flatnonzero(self._count)
        points = np.concatenate([surface.points, more])
        normals = np.concatenate([vertex_normals(surface), self.normals[of]])
        self._tree = cKDTree(np.column_stack([points, FACING * self._gap * normals])[self._used])

    def places(self, points, normals):
        """(triangle (k,), barycentric (k, 3), distance (k,) metres) nearest to points (k, 3) with unit normals (k, 3).

        A triangle that faces the other way is taken only where no other is near.
        """
        start = self._used[self._tree.query(np.column_stack([points, FACING * self._gap * normals]))[1]]
        best, share, gap = self._best(points, normals, start[:, None])
        # a place within the triangles that were tried is the foot of a perpendicular; one on their rim may move on
        of_start = (share * (self.surface.triangles[best] == start[:, None])).sum(axis=1)
        moving = np.flatnonzero(np.where(start < len(self.surface.points), of_start, share.min(axis=1)) <= 0)
        for _ in range(WALKS):
            around = self.surface.triangles[best[moving]]
            there, there_share, there_gap = self._best(points[moving], normals[moving], around)
            better = there_gap < gap[moving] * (1 - 1e-9)
            moving = moving[better]
            best[moving], share[moving], gap[moving] = there[better], there_share[better], there_gap[better]
            if not len(moving):
                break
        found = np.einsum("kc,kcx->kx", share, self.surface.points[self.surface.triangles[best]])
        return best, share, np.linalg.norm(points - found, axis=1)

    def around(self, points, normals, triangles):
        """(triangle (k,), barycentric (k, 3)) nearest to points (k, 3) among those that touch the triangles (k,)."""
        return self._best(points, normals, self.surface.triangles[triangles])[:2]

    def _best(self, points, normals, around):
        """(triangle, barycentric, rank) of the best of all triangles around the tree's points `around` (k, c)."""
        count = self._count[around.ravel()]
        row = np.repeat(np.repeat(np.arange(len(points)), around.shape[1]), count)
        step = np.arange(count.sum()) - np.repeat(np.cumsum(count) - count, count)
        triangle = self._around[np.repeat(self._first[around.ravel()], count) + step]
        share, gap = closest_on_triangles(points[row], self.surface.points[self.surface.triangles[triangle]])
        gap += np.where(np.einsum("kx,kx->k", normals[row], self.normals[triangle]) < 0, 10 * self._gap, 0.0)
        least = np.minimum.reduceat(gap, np.searchsorted(row, np.arange(len(points))))
        at = np.flatnonzero(gap == least[row])
        at = at[np.diff(row[at], prepend=-1) > 0]
        return triangle[at], share[at], gap[at]


def _more_points(surface, step):
    """(points (k, 3), triangle of each (k,)): a grid of at most `step` metres over every triangle with longer sides."""
    large = np.flatnonzero(surface.edge_lengths[surface.triangle_edges].max(axis=1) > 1.5 * step)
    lengths = surface.edge_lengths[surface.triangle_edges[large]]
    order = (lengths.argmax(axis=1)[:, None] + np.arange(3)) % 3
    a, b, c = np.moveaxis(surface.points[surface.triangles[large[:, None], order]], 1, 0)
    wide = np.ceil(lengths.max(axis=1) / step).astype(np.int64)
    high = np.ceil(2 * areas(surface)[large] / np.maximum(lengths.max(axis=1), 1e-300) / step).astype(np.int64).clip(min=1)
    row = np.repeat(np.arange(len(large)), wide * high)
    cell = np.arange(len(row)) - np.repeat(np.cumsum(wide * high) - wide * high, wide * high)
    along, up = (((cell % wide[row]) + 0.5) / wide[row])[:, None], ((cell // wide[row] + 0.5) / high[row])[:, None]
    return (1 - up) * (a[row] + along * (b - a)[row]) + up * c[row], large[row]


def closest_on_triangles(points, corners):
    """(barycentric (k, 3), distance (k,)) of the point of each triangle (k, 3, 3) nearest to each of points (k, 3)."""
    share, flat = feet_on_planes(points, corners)
    out = np.flatnonzero(flat | (share < 0).any(axis=1))
    share[out] = _closest_on_sides(points[out], corners[out])
    return share, np.linalg.norm(points - np.einsum("kc,kcx->kx", share, corners), axis=1)


def feet_on_planes(points, corners):
    """(barycentric (k, 3) of the foot of each of points (k, 3) on the plane of each triangle (k, 3, 3), (k,) bool: triangles
    too flat for that)."""
    a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
    ab, ac, ap = b - a, c - a, points - a
    bb, cc, bc = (np.einsum("kx,kx->k", *pair) for pair in ((ab, ab), (ac, ac), (ab, ac)))
    pb, pc = np.einsum("kx,kx->k", ap, ab), np.einsum("kx,kx->k", ap, ac)
    area = bb * cc - bc * bc
    flat = area <= 1e-14 * bb * cc
    area = np.where(flat, 1.0, area)
    v, w = (cc * pb - bc * pc) / area, (bb * pc - bc * pb) / area
    return np.column_stack([1 - v - w, v, w]), flat


def _closest_on_sides(points, corners):
    """(k, 3) barycentric of the nearest point on the three sides."""
    along = np.roll(corners, -1, axis=1) - corners
    length = np.maximum(np.einsum("ksx,ksx->ks", along, along), 1e-300)
    t = np.clip(np.einsum("ksx,ksx->ks", points[:, None] - corners, along) / length, 0, 1)
    gap = points[:, None] - corners - t[:, :, None] * along
    side = np.einsum("ksx,ksx->ks", gap, gap).argmin(axis=1)
    row = np.arange(len(points))
    share = np.zeros((len(points), 3))
    share[row, side], share[row, (side + 1) % 3] = 1 - t[row, side], t[row, side]
    return share
