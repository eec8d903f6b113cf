"""Lay a flat piece on the goods: turn it so that warp and weft suit it, and size it so that stretch and ease-in balance."""

import numpy as np
from scipy.optimize import minimize_scalar

from .measure import area_quantile, areas, utilisation, warp_weft_shear

DIRECTIONS = 24
UP = (0.0, 0.0, 1.0)


def lay_on_grain(points, triangles, flat, goods, comfort=0.0, wanted=None):
    """(k, 2) flat piece turned so that the warp (+y) lies best, or along `wanted`, a direction (3,) on the form; then sized.

    The best of 24 directions, refined together with the size; of the two ways round, the one in which +y runs more
    upwards (+z) on the form. Goods that may lie anyhow are turned so that up is +y.
    """
    flat = rescale_for(points, triangles, flat, goods, comfort)
    if wanted is not None or goods.grain_free:
        flat = _heading(points, triangles, flat, UP if wanted is None else wanted)
        return rescale_for(points, triangles, flat, goods, comfort)
    area = areas(points, triangles)

    def used(angle):
        return area_quantile(utilisation(warp_weft_shear(points, triangles, turn(flat, angle)), goods, comfort), area)

    def used_sized(angle):
        return _best_size(warp_weft_shear(points, triangles, turn(flat, angle)), area, goods, comfort, 0.01).fun

    step = np.pi / DIRECTIONS
    near = step * int(np.argmin([round(used(k * step), 9) for k in range(DIRECTIONS)]))
    best = turn(flat, _least(used_sized, near - step, near + step, 0.01).x)
    best = best if pull(points, triangles, UP) @ best[:, 1] >= 0 else -best
    return rescale_for(points, triangles, best, goods, comfort)


def rescale_for(points, triangles, flat, goods, comfort=0.0):
    """(k, 2) the same piece, larger or smaller all round, so that 99.5 % of its area uses least of the goods' limits."""
    threads = warp_weft_shear(points, triangles, flat)
    return flat * np.exp(_best_size(threads, areas(points, triangles), goods, comfort, 1e-4).x)


def turn(flat, angle):
    """(k, 2) turned counter-clockwise by an angle in radians."""
    c, s = np.cos(angle), np.sin(angle)
    return flat @ np.array([[c, s], [-s, c]])


def _best_size(threads, area, goods, comfort, fineness):
    """The least utilisation over all sizes (fun) and the log of the factor to get there (x)."""
    def used(shift):
        grown = np.column_stack([(1 + threads[:, :2]) * np.exp(-shift) - 1, threads[:, 2]])
        return area_quantile(utilisation(grown, goods, comfort), area)

    logs = np.log(np.clip(1 + threads[:, :2], 0.05, 20))
    return _least(used, logs.min(), logs.max(), fineness)


def _least(function, low, high, fineness):
    return minimize_scalar(function, bounds=(low, high), method="bounded", options={"xatol": fineness * (high - low)})


def _heading(points, triangles, flat, direction):
    """The piece turned so that `direction` on the form comes to lie along +y, on the whole."""
    x, y = pull(points, triangles, direction) @ flat
    return turn(flat, np.pi / 2 - np.arctan2(y, x)) if np.hypot(x, y) > 0 else flat


def pull(points, triangles, direction):
    """(k,) weights: their sum over the flat points is how `direction` (3,) on the form runs in the flat, times the area.

    A hat function's slope along a direction d in a triangle with unit normal n is (n x e) . d over twice the area, e the
    opposite edge; the part of d that leaves the triangle's plane does not count.
    """
    corners = points[triangles]
    opposite = np.roll(corners, -2, axis=1) - np.roll(corners, -1, axis=1)
    normal = np.cross(opposite[:, 0], opposite[:, 1])
    normal /= np.maximum(np.linalg.norm(normal, axis=1, keepdims=True), 1e-300)
    slope = 0.5 * (np.cross(normal[:, None], opposite) @ np.asarray(direction, dtype=float))
    return np.bincount(triangles.ravel(), slope.ravel(), len(points))
