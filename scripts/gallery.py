"""Named forms for the bench, the same ones everywhere: FORMS[name](count) -> (points, faces), about `count` points, 1 m2.

Forms made as level sets come as quads, those drawn on a grid as quads or triangles; all counter-clockwise from outside.
"""

import numpy as np

LARGEST_GRID = 30_000  # points up to which a level set is meshed directly; finer ones are split from a coarser one


def capsule(start, end, radius, tip=None):
    """Distance function of a limb from start to end, radius at the start, tip at the end (default: the same)."""
    a, d = np.asarray(start, dtype=float), np.subtract(end, start).astype(float)

    def distance(x, y, z):
        t = np.clip(((x - a[0]) * d[0] + (y - a[1]) * d[1] + (z - a[2]) * d[2]) / max(d @ d, 1e-12), 0, 1)
        gap = np.sqrt((x - a[0] - t * d[0]) ** 2 + (y - a[1] - t * d[1]) ** 2 + (z - a[2] - t * d[2]) ** 2)
        return gap - (radius + ((radius if tip is None else tip) - radius) * t)

    return distance


def blended(parts, blend):
    """Smooth union of distance functions."""
    return lambda x, y, z: -blend * np.log(sum(np.exp(-part(x, y, z) / blend) for part in parts))


def egg(x, y, z):
    """Egg-shaped level set, blunt below."""
    return np.sqrt(x**2 + y**2 + (z / (1.3 + 0.25 * np.tanh(z))) ** 2) - 0.6


def crate(x, y, z):
    """Box with edges rounded to a tenth of its side."""
    outside = [np.maximum(np.abs(w) - 0.4, 0) for w in (x, y, z)]
    inside = np.minimum(np.maximum.reduce([np.abs(x), np.abs(y), np.abs(z)]) - 0.4, 0)
    return np.sqrt(sum(w**2 for w in outside)) + inside - 0.1


def rings(x, y, z):
    """Two rings blended into a figure of eight: genus 2."""
    both = [np.hypot(np.hypot(x - c, y) - 0.55, z) - 0.2 for c in (-0.62, 0.62)]
    return -0.05 * np.log(sum(np.exp(-ring / 0.05) for ring in both))


def _star(count):
    angle = np.arange(count) * 2 * np.pi / count + 0.1
    return [capsule((0, 0, 0), (np.cos(a), np.sin(a), 0), 0.25, 0.12) for a in angle]


def _fingers():
    angle = np.radians([-55, -22, -7, 8, 24])
    length = [0.75, 1.1, 1.2, 1.12, 0.95]
    root = np.column_stack([0.28 * np.sin(1.4 * angle), 0.35 + 0.05 * np.cos(angle), 0 * angle])
    tip = root + np.column_stack([np.sin(angle), np.cos(angle), 0 * angle]) * (np.array(length)[:, None] - 0.4)
    palm = [capsule((x, 0.25, 0), (0.6 * x, -0.5, 0), 0.17) for x in (-0.22, -0.07, 0.08, 0.22)]
    return palm + [capsule(a, b, 0.11, 0.085) for a, b in zip(root, tip, strict=True)]


def _bends(count=24):
    t = np.linspace(0, 1, count + 1)
    middle = np.column_stack([2.4 * t - 1.2, 0.35 * np.sin(2 * np.pi * t), 0.2 * np.sin(np.pi * t)])
    return [capsule(a, b, 0.22) for a, b in zip(middle[:-1], middle[1:], strict=True)]


LEVEL_SETS = {  # function, corners of its box
    "ball": (capsule((0, 0, 0), (0, 0, 0), 0.5), (-0.6,) * 3, (0.6,) * 3),
    "egg": (egg, (-0.8, -0.8, -1.0), (0.8, 0.8, 1.2)),
    "pear": (blended([capsule((0, 0, -0.3), (0, 0, -0.2), 0.5), capsule((0, 0, 0.2), (0, 0, 0.75), 0.25, 0.16)], 0.12),
             (-0.8, -0.8, -1.1), (0.8, 0.8, 1.2)),
    "crate": (crate, (-0.6,) * 3, (0.6,) * 3),
    "double ring": (rings, (-1.5, -0.9, -0.35), (1.5, 0.9, 0.35)),
    "buoy": (blended([capsule((-0.8, 0, 0), (-0.8, 0, 0), 0.4), capsule((0.8, 0, 0), (0.8, 0, 0), 0.4),
                      capsule((-0.8, 0, 0), (0.8, 0, 0), 0.12)], 0.05), (-1.35, -0.6, -0.6), (1.35, 0.6, 0.6)),
    "starfish": (blended(_star(5), 0.05), (-1.4, -1.4, -0.5), (1.4, 1.4, 0.5)),
    "glove": (blended(_fingers(), 0.04), (-1.2, -0.95, -0.4), (1.0, 1.6, 0.4)),
    "worm": (blended(_bends(), 0.02), (-1.6, -0.8, -0.4), (1.6, 0.8, 0.6)),
}


def level_set(name, count):
    """A level set's quads (triangles where it was split), drawn onto it by Newton steps."""
    function, low, high = LEVEL_SETS[name]
    splits = 0
    while count / 4**splits > LARGEST_GRID:
        splits += 1
    first = _quads(function, low, high, 24)
    cells = round(24 * np.sqrt(count / 4**splits / len(first[0])))
    points, faces = _quads(function, low, high, cells)
    step = np.subtract(high, low).max() / cells
    points = _drawn(function, points, step)
    if splits:
        faces = np.stack([faces[:, [0, 1, 2]], faces[:, [0, 2, 3]]], axis=1).reshape(-1, 3)
    for _ in range(splits):
        points, faces = _in_four(points, faces)
        step /= 2
        points = _drawn(function, points, step)
    return _to_area(points, faces)


def _quads(function, low, high, cells):
    """One point in every grid cell that the surface passes, a quad over every grid edge that it crosses (Gibson 1998)."""
    low, high = np.asarray(low, dtype=float), np.asarray(high, dtype=float)
    step = (high - low).max() / cells
    low = low - 0.37 * step  # no grid plane along a flat side, where the sign would be rounding
    shape = np.ceil((high - low) / step).astype(int) + 1
    axes = [low[a] + step * np.arange(shape[a]) for a in range(3)]
    inside = _filled(function(*np.meshgrid(*axes, indexing="ij")))
    quads = []
    for axis in range(3):
        change = np.diff(inside.astype(np.int8), axis=axis)
        at = np.argwhere(change)
        outward = change[tuple(at.T)] < 0
        e1, e2 = np.eye(3, dtype=int)[(axis + 1) % 3], np.eye(3, dtype=int)[(axis + 2) % 3]
        around = np.stack([at - e1 - e2, at - e2, at, at - e1], axis=1)
        around[~outward] = around[~outward, ::-1]
        quads.append(around)
    cell, where = np.unique(np.concatenate(quads).reshape(-1, 3), axis=0, return_inverse=True)
    return low + step * (cell + 0.5), where.reshape(-1, 4)


def _filled(value):
    """Which grid points count as inside: those of negative value, and more where these meet in a diagonal alone, as in a
    crotch narrower than the grid: an edge of the surface would have four faces there."""
    inside = value < 0
    low, high = slice(None, -1), slice(1, None)
    corners = (low, low), (high, high), (low, high), (high, low)
    while True:
        more = np.zeros_like(inside)
        for axes in ((0, 1), (1, 2), (2, 0)):
            near, level, added = (np.moveaxis(grid, axes, (0, 1)) for grid in (inside, value, more))
            for a, b, c, d in (corners, corners[2:] + corners[:2]):
                meet = near[a] & near[b] & ~near[c] & ~near[d]
                added[c] |= meet & (level[c] <= level[d])
                added[d] |= meet & (level[d] < level[c])
        if not more.any():
            return inside
        inside |= more


def _drawn(function, points, step, turns=8):
    small = 1e-4 * step
    for _ in range(turns):
        value = function(*points.T)
        slope = np.column_stack([(function(*(points + d).T) - function(*(points - d).T)) / (2 * small)
                                 for d in np.eye(3) * small])
        move = -slope * (value / np.maximum((slope**2).sum(axis=1), 1e-30))[:, None]
        points = points + move * np.minimum(1, 0.5 * step / np.maximum(np.linalg.norm(move, axis=1), 1e-30))[:, None]
    return points


def _in_four(points, faces):
    pairs = np.sort(np.stack([faces, np.roll(faces, -1, axis=1)], axis=2).reshape(-1, 2), axis=1)
    edges, which = np.unique(pairs, axis=0, return_inverse=True)
    (a, b, c), (ab, bc, ca) = faces.T, which.reshape(-1, 3).T + len(points)
    quarters = np.stack([np.column_stack(t) for t in ((a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca))], axis=1)
    return np.concatenate([points, points[edges].mean(axis=1)]), quarters.reshape(-1, 3)


def _to_area(points, faces):
    """The form scaled to one square metre."""
    fan = [faces[:, [0, k, k + 1]] for k in range(1, faces.shape[1] - 1)]
    a, b, c = (points[np.concatenate(fan)[:, k]] for k in range(3))
    area = 0.5 * np.linalg.norm(np.cross(b - a, c - a), axis=1).sum()
    return points / np.sqrt(area), faces


def _grid(u_count, v_count, place, closed_v=False):
    """Quads of a grid closed along u (and v), its points place(u, v) for u, v from 0 to 1."""
    u = np.arange(u_count) / u_count
    v = np.arange(v_count) / v_count if closed_v else np.linspace(0, 1, v_count)
    points = place(*np.meshgrid(u, v, indexing="ij")).reshape(-1, 3)
    i, j = (a.ravel() for a in np.meshgrid(np.arange(u_count), np.arange(v_count - (not closed_v)), indexing="ij"))
    i1, j1 = (i + 1) % u_count, (j + 1) % v_count
    return _to_area(points, np.column_stack([i * v_count + j, i1 * v_count + j, i1 * v_count + j1, i * v_count + j1]))


def ring(count):
    """Torus, the tube two fifths of the ring."""
    across = max(6, round(np.sqrt(count / 2.5)))

    def place(u, v):
        far = 1 + 0.4 * np.cos(2 * np.pi * v)
        return np.stack([far * np.cos(2 * np.pi * u), far * np.sin(2 * np.pi * u), 0.4 * np.sin(2 * np.pi * v)], axis=-1)

    return _grid(round(count / across), across, place, closed_v=True)


def shade(count):
    """Lampshade: the side of a frustum, open at both ends."""
    across = max(3, round(np.sqrt(count / 6.5)))

    def place(u, v):
        radius = 0.5 - 0.2 * v
        return np.stack([radius * np.cos(2 * np.pi * u), radius * np.sin(2 * np.pi * u), 0.6 * v], axis=-1)

    return _grid(round(count / across), across, place)


def bowl(count):
    """Spherical cap of 100 degrees from the pole, open; nearly even triangles in rings."""
    n = round(np.sqrt(count / 3))
    radius, angle, faces = [np.zeros(1)], [np.zeros(1)], []
    first = [0] + [1 + 3 * k * (k - 1) for k in range(1, n + 2)]
    for k in range(1, n + 1):
        radius.append(np.full(6 * k, k / n))
        angle.append(np.arange(6 * k) * 2 * np.pi / (6 * k))
        for side in range(6):
            outer = first[k] + (side * k + np.arange(k + 1)) % (6 * k)
            inner = first[k - 1] + (side * (k - 1) + np.arange(k)) % max(6 * (k - 1), 1)
            faces += [np.column_stack([inner, outer[:-1], outer[1:]]), np.column_stack([inner[:-1], outer[1:-1], inner[1:]])]
    polar, angle = np.radians(100) * np.concatenate(radius), np.concatenate(angle)
    points = np.column_stack([np.sin(polar) * np.cos(angle), np.sin(polar) * np.sin(angle), np.cos(polar)])
    return _to_area(points, np.concatenate(faces))


FORMS = {
    **{name: lambda count, name=name: level_set(name, count) for name in LEVEL_SETS},
    "ring": ring, "shade": shade, "bowl": bowl,
}
