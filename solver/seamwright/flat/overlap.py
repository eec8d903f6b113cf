"""Does the flat boundary cross itself? With no triangle flipped, a boundary that does not is proof of no overlap."""

import numpy as np


def overlaps(flat, outline):
    """List of (i, j), i < j: sides of the flat outline that cross; side k runs from outline[k] to the next point.

    flat (n, 2), outline (q,) point indices in order, counter-clockwise. Sides that share a corner are not compared. Empty
    when the boundary is simple, and then a flattening without flips nowhere lies on itself (its winding number is 1
    everywhere inside). Touching is no crossing: the outline is first drawn in by a millionth of its extent.
    """
    corners = _drawn_in(np.asarray(flat, dtype=float)[np.asarray(outline)])
    ends = np.roll(corners, -1, axis=0)
    first, second = _near_pairs(corners, ends)
    q = len(corners)
    apart = (second - first > 1) & (second - first < q - 1)
    first, second = first[apart], second[apart]
    a, b, c, d = corners[first], ends[first], corners[second], ends[second]
    crossing = (_side(a, b, c) * _side(a, b, d) < 0) & (_side(c, d, a) * _side(c, d, b) < 0)
    return list(zip(first[crossing].tolist(), second[crossing].tolist(), strict=True))


def _drawn_in(corners):
    ahead = np.roll(corners, -1, axis=0) - corners
    ahead /= np.maximum(np.linalg.norm(ahead, axis=1, keepdims=True), 1e-300)
    both = ahead + np.roll(ahead, 1, axis=0)
    return corners + 1e-6 * np.ptp(corners, axis=0).max() * np.column_stack([-both[:, 1], both[:, 0]])


def _near_pairs(starts, ends):
    """(first, second) with first < second: sides that share a cell of a grid about as wide as their mean length."""
    low, high = np.minimum(starts, ends), np.maximum(starts, ends)
    extent = np.ptp(starts, axis=0).max()
    cell = max(np.linalg.norm(ends - starts, axis=1).mean(), extent / 2000, 1e-300)
    from_cell = np.floor((low - low.min(axis=0)) / cell).astype(np.int64)
    to_cell = np.floor((high - low.min(axis=0)) / cell).astype(np.int64)
    wide, tall = (to_cell - from_cell + 1).T
    side = np.repeat(np.arange(len(starts)), wide * tall)
    within = np.arange(len(side)) - np.repeat(np.cumsum(wide * tall) - wide * tall, wide * tall)
    x = from_cell[side, 0] + within % wide[side]
    y = from_cell[side, 1] + within // wide[side]
    order = np.argsort(x * (to_cell[:, 1].max() + 1) + y, kind="stable")
    side, x, y = side[order], x[order], y[order]
    fresh = np.concatenate([[True], (np.diff(x) != 0) | (np.diff(y) != 0)])
    begin = np.flatnonzero(fresh)
    size = np.diff(np.append(begin, len(side)))
    after = np.repeat(begin + size, size) - np.arange(len(side)) - 1
    first = np.repeat(side, after)
    step = np.arange(len(first)) - np.repeat(np.cumsum(after) - after, after)
    second = side[np.repeat(np.arange(len(side)), after) + 1 + step]
    pairs = np.unique(np.column_stack([np.minimum(first, second), np.maximum(first, second)]), axis=0)
    return pairs[:, 0], pairs[:, 1]


def _side(a, b, c):
    """Twice the signed area of the triangles a, b, c, rows of (k, 2)."""
    u, v = b - a, c - a
    return u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
