"""Lay a flat piece on the goods: turn it so that warp and weft suit it, and size it so that stretch and ease-in balance."""

import numpy as np
from scipy.optimize import minimize_scalar
from scipy.sparse import csr_matrix

from .limits import GoodsEnergy, log_and_ratio
from .measure import area_quantile

DIRECTIONS = 24
UP = (0.0, 0.0, 1.0)


def lay_on_grain(rest, flat, goods, comfort=0.0, wanted=None):
    """(n,) complex flat piece, the warp (+y) where it lies best, or along `wanted`, a direction (3,) on the form; sized.

    The best of 24 directions; of the two ways round, the one in which +y runs more upwards (+z) on the form. Goods that
    may lie anyhow are turned so that up is +y.
    """
    if wanted is not None or goods.grain_free:
        x, y = _parts(pull(rest, UP if wanted is None else wanted) @ flat)
        return resize(rest, flat * np.exp(1j * (np.pi / 2 - np.arctan2(y, x))), goods, comfort)
    flat = resize(rest, flat, goods, comfort)
    limits = GoodsEnergy(goods, comfort, 1, 1.0)
    log, w = log_and_ratio(*rest.maps(flat))
    turns = np.exp(1j * np.pi * np.arange(DIRECTIONS) / DIRECTIONS)
    used = [round(area_quantile(limits.used(log, w * turn**2), rest.area), 9) for turn in turns]
    flat = flat * turns[int(np.argmin(used))]
    return resize(rest, flat if _parts(pull(rest, UP) @ flat)[1] >= 0 else -flat, goods, comfort)


def resize(rest, flat, goods, comfort=0.0):
    """(n,) complex, larger or smaller all round, so that 99.5 % of the area uses least of the goods' limits."""
    limits = GoodsEnergy(goods, comfort, 1, 1.0)
    log, w = log_and_ratio(*rest.maps(flat))
    low, high = (log - np.log1p(np.abs(w))).min(), (log - np.log1p(-np.abs(w))).max()
    best = minimize_scalar(lambda shift: area_quantile(limits.used(log - shift, w), rest.area), method="bounded",
                           bounds=(low, high), options={"xatol": 1e-4 * (high - low)})
    return flat * np.exp(best.x)


def pull(rest, direction):
    """(n,) weights: their sum over the flat points is how `direction` (3,) on the form runs in the flat, times the area.

    A hat function's slope along a direction d in a triangle with unit normal n is (n x e) . d over twice the area, e the
    opposite edge; the part of d that leaves the triangle's plane does not count.
    """
    corners = rest.points[rest.triangles]
    opposite = np.roll(corners, -2, axis=1) - np.roll(corners, -1, axis=1)
    normal = np.cross(opposite[:, 0], opposite[:, 1])
    normal /= np.maximum(np.linalg.norm(normal, axis=1, keepdims=True), 1e-300)
    slope = 0.5 * (np.cross(normal[:, None], opposite) @ np.asarray(direction, dtype=float))
    return np.bincount(rest.triangles.ravel(), slope.ravel(), rest.count)


class HeldGrain:
    """Keeps how `direction` (3,) on the form runs across every piece, `beside` the strain of a State. rests: one a piece."""

    def __init__(self, rests, direction):
        piece = np.repeat(np.arange(len(rests)), [rest.count for rest in rests])
        pulls = np.concatenate([pull(rest, direction) for rest in rests]).astype(complex)
        self._rows = csr_matrix((pulls, (piece, np.arange(len(piece)))))

    def worth(self, flat):
        """Nothing: it yields not at all."""
        return 0.0

    def slope(self, flat):
        """(n,) zeros."""
        return np.zeros(len(flat), dtype=complex)

    def rows(self, flat):
        """A row a piece: how far the direction runs along x, which may not change at all."""
        return self._rows, np.zeros(self._rows.shape[0])


def _parts(number):
    return number.real, number.imag
