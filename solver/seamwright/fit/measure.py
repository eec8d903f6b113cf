"""The independent verdict: a piece's stretch measured anew from its saved points, against what the goods take."""

from dataclasses import dataclass

import numpy as np

from ..pattern import FITS, STRAINED, TIGHT

SLACK = 0.005
"""Share of a piece's area that may lie beyond the limits without changing the verdict."""


@dataclass
class Measured:
    """stretch (t, 2) principal, largest first; warp_weft_shear (t, 3); utilisation (t,) of the hard limits; verdict."""

    stretch: np.ndarray
    warp_weft_shear: np.ndarray
    utilisation: np.ndarray
    fit: str
    beyond: float


def measure(points, triangles, flat, goods, comfort=0.5):
    """Measured: everything a Piece says about its stretch, from points (k, 3), triangles (t, 3) and flat (k, 2) alone."""
    threads = warp_weft_shear(points, triangles, flat)
    fit, beyond = verdict(threads, areas(points, triangles), goods, comfort)
    return Measured(stretches(points, triangles, flat), threads, utilisation(threads, goods), fit, beyond)


def stretches(points, triangles, flat):
    """(t, 2) principal stretches, largest first: length on the form over length in the flat goods, minus one."""
    weft, warp = _threads(points, triangles, flat)
    a, b, c = _dot(weft, weft), _dot(warp, warp), _dot(weft, warp)
    # singular values through the sum and difference of a rotated pair: exact where the squares' roots would lose digits
    double_area = np.linalg.norm(np.cross(weft, warp), axis=1)
    total, spread = np.sqrt(np.maximum(a + b + 2 * double_area, 0)), np.hypot(a - b, 2 * c)
    spread = spread / np.where(total > 0, total, 1)
    return np.column_stack([(total + spread) / 2, (total - spread) / 2]) - 1


def warp_weft_shear(points, triangles, flat):
    """(t, 3): stretch of the warp (+y in the flat) and of the weft (+x), and the change of their right angle, radians."""
    weft, warp = _threads(points, triangles, flat)
    along_weft, along_warp = np.linalg.norm(weft, axis=1), np.linalg.norm(warp, axis=1)
    shear = np.arctan2(_dot(weft, warp), np.linalg.norm(np.cross(weft, warp), axis=1))
    return np.column_stack([along_warp - 1, along_weft - 1, shear])


def areas(points, triangles):
    """(t,) square metres on the form."""
    a, b, c = (points[triangles[:, k]] for k in range(3))
    return 0.5 * np.linalg.norm(np.cross(b - a, c - a), axis=1)


def utilisation(threads, goods, comfort=0.0):
    """(t,) share of the limits that is used: 1 is at the limit. threads (t, 3) is warp_weft_shear; comfort 0 is hard.

    Stretch is compared as logs of length ratios. With a shear limit: the largest of warp, weft and shear, each over its
    own limit. Without one: no direction may stretch more than its limit, which runs from warp to weft as cos^2 and sin^2
    of the direction, nor be eased in more than the one limit of that; shear by itself is free.
    """
    warp_limit, weft_limit, ease_limit, shear_limit = goods.limits(comfort)
    tiny = np.finfo(float).tiny
    warp, weft = np.log(np.maximum(1 + threads[:, 0], tiny)), np.log(np.maximum(1 + threads[:, 1], tiny))
    if shear_limit is not None:
        sides = [np.where(e > 0, e / limit, -e / ease_limit) for e, limit in ((warp, warp_limit), (weft, weft_limit))]
        return np.maximum(np.maximum(*sides), np.abs(threads[:, 2]) / shear_limit)
    along_weft, along_warp, across = _log_tensor(threads)
    largest = _eigenvalues(along_weft / weft_limit, along_warp / warp_limit, across / np.sqrt(warp_limit * weft_limit))[0]
    return np.maximum(largest, -_eigenvalues(along_weft, along_warp, across)[1] / ease_limit)


def verdict(threads, area, goods, comfort):
    """(fit, beyond) of a piece: how its area (t,) lies against the wished and the hard limits.

    "fits" when all but 0.5 % of the area is within the wished comfort, "tight" when that holds for the hard limits,
    else "strained"; beyond is the share of the area outside the hard limits.
    """
    beyond = _share(utilisation(threads, goods) > 1, area)
    if beyond > SLACK:
        return STRAINED, beyond
    return (FITS if _share(utilisation(threads, goods, comfort) > 1, area) <= SLACK else TIGHT), beyond


def area_quantile(values, area, share=1 - SLACK):
    """The value that `share` of the area stays under or at."""
    total = area.sum()
    few = len(values) // 8 + 1  # enough, unless the triangles' sizes differ much
    top = np.argpartition(values, -few)[-few:]
    if total - area[top].sum() >= share * total:
        top = np.arange(len(values))
    order = top[np.argsort(values[top], kind="stable")]
    reach = total - area[top].sum() + np.cumsum(area[order])
    return float(values[order[min(np.searchsorted(reach, share * total), len(order) - 1)]])


def _threads(points, triangles, flat):
    """(weft, warp), each (t, 3): what a unit step along +x and along +y of the flat goods becomes on the form."""
    a, b, c = (flat[triangles[:, k]] for k in range(3))
    p, q, r = (points[triangles[:, k]] for k in range(3))
    u, v, du, dv = b - a, c - a, q - p, r - p
    det = (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0])[:, None]
    det = np.where(det == 0, 1e-100, det)
    return (v[:, 1:] * du - u[:, 1:] * dv) / det, (u[:, :1] * dv - v[:, :1] * du) / det


def _log_tensor(threads):
    """Half the log of the metric in the goods' axes, as its (weft, warp, mixed) entries, each (t,)."""
    tiny = np.finfo(float).tiny
    warp, weft = np.maximum(1 + threads[:, 0], tiny), np.maximum(1 + threads[:, 1], tiny)
    half, mixed = 0.5 * (weft**2 - warp**2), weft * warp * np.sin(threads[:, 2])
    radius = np.hypot(half, mixed)
    area = weft * warp * np.cos(threads[:, 2])
    middle = 0.5 * np.log(np.maximum(area, tiny))
    # half the log of the ratio of the two stretches: sinh(2 d) = radius / area
    spread = 0.5 * np.arcsinh(radius / np.maximum(area, tiny))
    scale = np.where(radius > 0, spread / np.where(radius > 0, radius, 1), 0.5 / np.maximum(area, tiny))
    return middle + scale * half, middle - scale * half, scale * mixed


def _eigenvalues(xx, yy, xy):
    """(larger, smaller) eigenvalue of symmetric 2 x 2 matrices, each (t,)."""
    middle, radius = 0.5 * (xx + yy), np.hypot(0.5 * (xx - yy), xy)
    return middle + radius, middle - radius


def _share(mask, area):
    return float(area[mask].sum() / area.sum())


def _dot(a, b):
    return np.einsum("ij,ij->i", a, b)
