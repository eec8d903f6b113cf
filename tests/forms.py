"""Named forms for the tests: plain functions, each returning (points, faces), faces counter-clockwise seen from outside."""

import numpy as np


def icosphere(level, radius=1.0):
    """Sphere from an icosahedron, every triangle split in four `level` times: 10 * 4**level + 2 points."""
    g = (1 + 5**0.5) / 2
    points = np.array([(-1, g, 0), (1, g, 0), (-1, -g, 0), (1, -g, 0), (0, -1, g), (0, 1, g),
                       (0, -1, -g), (0, 1, -g), (g, 0, -1), (g, 0, 1), (-g, 0, -1), (-g, 0, 1)])
    faces = np.array([(0, 11, 5), (0, 5, 1), (0, 1, 7), (0, 7, 10), (0, 10, 11), (1, 5, 9), (5, 11, 4), (11, 10, 2),
                      (10, 7, 6), (7, 1, 8), (3, 9, 4), (3, 4, 2), (3, 2, 6), (3, 6, 8), (3, 8, 9), (4, 9, 5),
                      (2, 4, 11), (6, 2, 10), (8, 6, 7), (9, 8, 1)])
    points = points / np.linalg.norm(points, axis=1, keepdims=True)
    for _ in range(level):
        points, faces = split_in_four(points, faces)
        points /= np.linalg.norm(points, axis=1, keepdims=True)
    return points * radius, faces


def split_in_four(points, faces):
    """Every triangle in four at the middles of its edges."""
    pairs = np.sort(np.stack([faces, np.roll(faces, -1, axis=1)], axis=2).reshape(-1, 2), axis=1)
    edges, which = np.unique(pairs, axis=0, return_inverse=True)
    middle = which.reshape(-1, 3) + len(points)
    a, b, c = faces.T
    ab, bc, ca = middle.T
    quarters = [np.column_stack(t) for t in ((a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca))]
    return np.concatenate([points, points[edges].mean(axis=1)]), np.stack(quarters, axis=1).reshape(-1, 3)


def ellipsoid(a, b, c, level):
    """Ellipsoid with half axes a, b, c."""
    points, faces = icosphere(level)
    return points * (a, b, c), faces


def globe(around, bands, axes=(1.0, 1.0, 1.0)):
    """Sphere of latitude bands, or ellipsoid with half axes: quads, triangles at the poles; point 1 + i around + j is on
    the i-th ring from the north, the first and last point are the poles."""
    angle, turn = np.meshgrid(np.arange(1, bands) * np.pi / bands, np.arange(around) * 2 * np.pi / around, indexing="ij")
    rings = np.stack([np.sin(angle) * np.cos(turn), np.sin(angle) * np.sin(turn), np.cos(angle)], axis=-1).reshape(-1, 3)
    j, south = np.arange(around), len(rings) + 1
    k = (j + 1) % around
    first = 1 + around * np.arange(bands - 2)[:, None]
    quads = np.stack([first + j, first + around + j, first + around + k, first + k], axis=-1).reshape(-1, 4).tolist()
    faces = [[0, 1 + a, 1 + b] for a, b in zip(j.tolist(), k.tolist(), strict=True)] + quads
    faces += [[south, south - around + b, south - around + a] for a, b in zip(j.tolist(), k.tolist(), strict=True)]
    return np.concatenate([[(0, 0, 1.0)], rings, [(0, 0, -1.0)]]) * axes, faces


def torus(R, r, nu, nv):
    """Torus about z in nu x nv quads, split: R to the middle of the tube, r the tube."""
    u, v = np.meshgrid(np.arange(nu) * 2 * np.pi / nu, np.arange(nv) * 2 * np.pi / nv, indexing="ij")
    ring = R + r * np.cos(v)
    points = np.stack([ring * np.cos(u), ring * np.sin(u), r * np.sin(v)], axis=-1).reshape(-1, 3)
    return points, split_quads(wrapped_grid(nu, nv))


def wrapped_grid(nu, nv, open_v=False):
    """Quads of a grid of points i * nv + j, closed along u and (unless open_v) along v."""
    i, j = (a.ravel() for a in np.meshgrid(np.arange(nu), np.arange(nv - open_v), indexing="ij"))
    i1, j1 = (i + 1) % nu, (j + 1) % nv
    return np.column_stack([i * nv + j, i1 * nv + j, i1 * nv + j1, i * nv + j1])


def split_quads(quads):
    """Each quad as two triangles along its first diagonal."""
    return np.stack([quads[:, [0, 1, 2]], quads[:, [0, 2, 3]]], axis=1).reshape(-1, 3)


def sheet(count):
    """Flat square of count x count quads, side 1."""
    line = np.linspace(0, 1, count + 1)
    x, y = np.meshgrid(line, line)
    points = np.column_stack([x.ravel(), y.ravel(), np.zeros(x.size)])
    corner = (np.arange(count)[:, None] * (count + 1) + np.arange(count)).ravel()
    return points, np.column_stack([corner, corner + 1, corner + count + 2, corner + count + 1])


def frustum(r1, r2, h, n, rings=None, closed=False):
    """Side of a cone cut off, radius r1 at z = 0 and r2 at z = h, n points around; `closed` adds both ends as n-gons."""
    rings = rings or max(1, round(np.hypot(r1 - r2, h) / (2 * np.pi * max(r1, r2) / n)))
    u, t = np.meshgrid(np.arange(n) * 2 * np.pi / n, np.linspace(0, 1, rings + 1), indexing="ij")
    radius = r1 + (r2 - r1) * t
    points = np.stack([radius * np.cos(u), radius * np.sin(u), h * t], axis=-1).reshape(-1, 3)
    faces = split_quads(wrapped_grid(n, rings + 1, open_v=True))
    if closed:
        foot = np.arange(n) * (rings + 1)
        faces = faces.tolist() + [foot[::-1].tolist(), (foot + rings).tolist()]
    return points, faces


def cylinder(r, h, n, rings=None, closed=False):
    """Side of a cylinder about z, n points around; `closed` adds both ends as n-gons."""
    return frustum(r, r, h, n, rings, closed)


def disk_of_rings(n):
    """(radius 0..1, angle, faces) of a disk with n rings, ring k holding 6 k points: nearly equilateral triangles."""
    radius, angle, faces = [np.zeros(1)], [np.zeros(1)], []
    first = [0] + [1 + 3 * k * (k - 1) for k in range(1, n + 2)]
    for k in range(1, n + 1):
        radius.append(np.full(6 * k, k / n))
        angle.append(np.arange(6 * k) * 2 * np.pi / (6 * k))
        for side in range(6):
            outer = first[k] + (side * k + np.arange(k + 1)) % (6 * k)
            inner = first[k - 1] + (side * (k - 1) + np.arange(k)) % max(6 * (k - 1), 1)
            faces.append(np.column_stack([inner, outer[:-1], outer[1:]]))
            faces.append(np.column_stack([inner[:-1], outer[1:-1], inner[1:]]))
    return np.concatenate(radius), np.concatenate(angle), np.concatenate(faces)


def disk(radius, n):
    """Flat disk in the plane z = 0 with n rings."""
    r, angle, faces = disk_of_rings(n)
    return np.column_stack([radius * r * np.cos(angle), radius * r * np.sin(angle), 0 * r]), faces


def cap(polar, n, radius=1.0):
    """Spherical cap about +z of polar angle `polar` (radians), n rings, the pole a point."""
    r, angle, faces = disk_of_rings(n)
    theta = polar * r
    return radius * np.column_stack([np.sin(theta) * np.cos(angle), np.sin(theta) * np.sin(angle), np.cos(theta)]), faces


def cube(side, n):
    """Cube in n x n quads a side (an (m, 4) array), about the origin."""
    i, j = (a.ravel() for a in np.meshgrid(np.arange(n + 1), np.arange(n + 1), indexing="ij"))
    cell = (np.arange(n)[:, None] * (n + 1) + np.arange(n)).ravel()
    quad = np.column_stack([cell, cell + n + 1, cell + n + 2, cell + 1])
    points, quads = [], []
    for axis in range(3):
        for end in (0, n):
            grid = np.empty((len(i), 3), dtype=int)
            grid[:, axis], grid[:, (axis + 1) % 3], grid[:, (axis + 2) % 3] = end, i, j
            quads.append((quad if end else quad[:, ::-1]) + len(i) * len(points))
            points.append(grid)
    grid, where = np.unique(np.concatenate(points), axis=0, return_inverse=True)
    return (grid / n - 0.5) * side, where.ravel()[np.concatenate(quads)]


def of_level_set(function, low, high, cells):
    """Surface where function(x, y, z) = 0 (negative inside) within a box with `cells` cells along its longest side.

    Quads with one point a grid cell (Gibson 1998), drawn onto the level set by Newton steps along the numerical gradient.
    """
    low, high = np.asarray(low, dtype=float), np.asarray(high, dtype=float)
    step = (high - low).max() / cells
    low = low - 0.37 * step  # no grid plane along a flat top, where the sign would be rounding
    shape = np.ceil((high - low) / step).astype(int) + 1
    grid = np.indices(shape)
    inside = function(*(low[a] + step * grid[a] for a in range(3))) < 0
    number, quads = {}, []
    for axis in range(3):
        change = np.diff(inside.astype(np.int8), axis=axis)
        at = np.argwhere(change)
        at = at[(at[:, (axis + 1) % 3] > 0) & (at[:, (axis + 2) % 3] > 0)]
        outward = change[tuple(at.T)] < 0
        e1, e2 = np.eye(3, dtype=int)[(axis + 1) % 3], np.eye(3, dtype=int)[(axis + 2) % 3]
        around = np.stack([at - e1 - e2, at - e2, at, at - e1], axis=1)
        around[~outward] = around[~outward, ::-1]
        quads.append(around)
    quads = np.concatenate(quads)
    number, where = np.unique(quads.reshape(-1, 3), axis=0, return_inverse=True)
    points = low + step * (number + 0.5)
    for _ in range(8):
        value = function(*points.T)
        gradient = np.column_stack([(function(*(points + d).T) - function(*(points - d).T)) / (2e-4 * step)
                                    for d in np.eye(3) * 1e-4 * step])
        move = -gradient * (value / np.maximum((gradient**2).sum(axis=1), 1e-30))[:, None]
        points = points + move * np.minimum(1, 0.5 * step / np.maximum(np.linalg.norm(move, axis=1), 1e-30))[:, None]
    return points, where.reshape(-1, 4)


def limbs(ends, radius, tip, blend, cells=48):
    """Tapered limbs from the origin to each of `ends`, radius at the origin and at the tip, blended smoothly: quads."""
    ends = np.asarray(ends, dtype=float)

    def function(x, y, z):
        total = 0.0
        for end in ends:
            t = np.clip((x * end[0] + y * end[1] + z * end[2]) / (end @ end), 0, 1)
            gap = np.sqrt((x - t * end[0]) ** 2 + (y - t * end[1]) ** 2 + (z - t * end[2]) ** 2)
            total = total + np.exp(-(gap - (radius + (tip - radius) * t)) / blend)
        return -blend * np.log(total)

    room = 1.5 * max(radius, tip) + blend
    return of_level_set(function, ends.min(axis=0).clip(max=0) - room, ends.max(axis=0).clip(min=0) + room, cells)


def starfish(cells=64):
    """Five limbs in a plane."""
    angle = np.arange(5) * 2 * np.pi / 5 + 0.1
    return limbs(np.column_stack([np.cos(angle), np.sin(angle), 0 * angle]), 0.25, 0.12, 0.05, cells)


def dumbbell(cells=64):
    """Two balls joined by a thin neck along x."""
    def function(x, y, z):
        neck = np.maximum(np.hypot(y, z) - 0.12, np.abs(x) - 0.8)
        balls = np.minimum(np.sqrt((x - 0.8) ** 2 + y**2 + z**2), np.sqrt((x + 0.8) ** 2 + y**2 + z**2)) - 0.4
        return -0.05 * np.log(np.exp(-neck / 0.05) + np.exp(-balls / 0.05))

    return of_level_set(function, (-1.35, -0.55, -0.55), (1.35, 0.55, 0.55), cells)


def two_holes(cells=64):
    """A tube of genus 2 about a figure of eight: two rings blended."""
    def function(x, y, z):
        rings = [np.hypot(np.hypot(x - c, y) - 0.55, z) - 0.2 for c in (-0.62, 0.62)]
        return -0.05 * np.log(sum(np.exp(-ring / 0.05) for ring in rings))

    return of_level_set(function, (-1.5, -0.9, -0.35), (1.5, 0.9, 0.35), cells)


def noisy(points, amount, seed=0):
    """The points moved at random by a normal deviation of `amount` metres along each axis."""
    return points + np.random.default_rng(seed).normal(scale=amount, size=points.shape)


def soup(points, faces):
    """The same triangles, each with three points of its own."""
    faces = np.asarray(faces)
    return points[faces.ravel()], np.arange(faces.size).reshape(faces.shape)


def together(*forms):
    """Several forms as one, each a part of its own: points stacked, faces renumbered (all faces of one size)."""
    shift = np.cumsum([0] + [len(points) for points, _ in forms])
    faces = [np.asarray(f) + s for (_, f), s in zip(forms, shift[:-1], strict=True)]
    return np.concatenate([p for p, _ in forms]), np.concatenate(faces)
