"""Lay a flat piece on the goods: turn it so that warp and weft suit it, and size it so that stretch and ease-in balance."""

import numpy as np

from .measure import area_quantile, areas, utilisation, warp_weft_shear

DIRECTIONS = 24
UP = (0.0, 0.0, 1.0)


def lay_on_grain(points, triangles, flat, goods, comfort=0.0, wanted=None):
    """(k, 2) flat piece turned so that the warp (+y) lies best, or along `wanted`, a direction (3,) on the form; then sized.

    The best of 24 directions; of the two ways round, the one in which +y runs more upwards (+z) on the form. Goods that
    may lie anyhow are turned so that up is +y.
    """
    flat = rescale_for(points, triangles, flat, goods, comfort)
    if wanted is not None or goods.grain_free:
        return _heading(points, triangles, flat, UP if wanted is None else wanted)
    area = areas(points, triangles)
    tries = [turn(flat, np.pi * k / DIRECTIONS) for k in range(DIRECTIONS)]
    used = [area_quantile(utilisation(warp_weft_shear(points, triangles, one), goods, comfort), area) for one in tries]
    best = tries[int(np.argmin(np.round(used, 9)))]
    best = best if _rise(points, triangles, best, UP)[1] >= 0 else -best
    return rescale_for(points, triangles, best, goods, comfort)


def rescale_for(points, triangles, flat, goods, comfort=0.0):
    """(k, 2) the same piece, larger or smaller all round, so that 99.5 % of its area uses least of the goods' limits.

    Golden section on the log of the factor.
    """
    threads, area = warp_weft_shear(points, triangles, flat), areas(points, triangles)

    def used(shift):
        grown = np.column_stack([(1 + threads[:, :2]) * np.exp(-shift) - 1, threads[:, 2]])
        return area_quantile(utilisation(grown, goods, comfort), area)

    logs = np.log(np.clip(1 + threads[:, :2], 0.05, 20))
    low, high = float(logs.min()), float(logs.max())
    golden = (np.sqrt(5) - 1) / 2
    left, right = high - golden * (high - low), low + golden * (high - low)
    at_left, at_right = used(left), used(right)
    for _ in range(24):
        if at_left <= at_right:
            high, right, at_right = right, left, at_left
            left = high - golden * (high - low)
            at_left = used(left)
        else:
            low, left, at_left = left, right, at_right
            right = low + golden * (high - low)
            at_right = used(right)
    return flat * np.exp(left if at_left <= at_right else right)


def turn(flat, angle):
    """(k, 2) turned counter-clockwise by an angle in radians."""
    c, s = np.cos(angle), np.sin(angle)
    return flat @ np.array([[c, s], [-s, c]])


def _heading(points, triangles, flat, direction):
    """The piece turned so that +y runs as the direction does on the form, on the whole."""
    x, y = _rise(points, triangles, flat, direction)
    return turn(flat, np.pi / 2 - np.arctan2(y, x)) if np.hypot(x, y) > 0 else flat


def _rise(points, triangles, flat, direction):
    """(x, y) sum over the flat area of the slope, in the flat, of the form's height along a direction."""
    height = (points @ np.asarray(direction, dtype=float))[triangles]
    a, b, c = (flat[triangles[:, k]] for k in range(3))
    u, v = b - a, c - a
    du, dv = height[:, 1] - height[:, 0], height[:, 2] - height[:, 0]
    return 0.5 * np.array([(du * v[:, 1] - dv * u[:, 1]).sum(), (dv * u[:, 0] - du * v[:, 0]).sum()])
