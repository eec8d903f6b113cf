"""Everything the maker asks for beside the form."""

from dataclasses import dataclass
from math import isfinite
from numbers import Real

import numpy as np

from .errors import WishError

ROUTES = ("through", "edges")
ENERGIES = ("square", "dirichlet", "hencky")
SYMMETRIES = ("auto", "none")
THICKNESS_SIDES = ("none", "outside", "inside")
SQUARE = 0.01  # largest cosine between planes that count as at right angles


@dataclass(frozen=True, kw_only=True)
class Wishes:
    """What is wanted; every field has a default. Raises WishError on a value that cannot be.

    goods: a name or a Goods. comfort: 0 (hard limits) to 1 (comfortable ones). thrift: None finds the cheapest network
    that fits, a number is the price of a metre of seam on a form scaled to area 4 pi. energy: "square", "dirichlet",
    "hencky" or (j, dj/du), functions of an array; it counts where thrift, pieces or start is given. symmetry: "auto",
    "none" or a list of planes (point, normal), metres, at right angles. keep_clear: (n,) weights of the caller's points, 0
    free, 1 twice the price, inf never. held, shut: (k, 2) point pairs that are, or may not be, seams. start: a Pattern of
    the form, (m,) face labels or (k, 2) point pairs that are its seams, improved: with thrift the total never rises, without
    it neither length nor distortion does.
    only: (m,) bool of the faces to cover, with as little more as serves. pieces: a wished number. route: "through" faces or
    along "edges". grain: a direction on the form. thickness_side: "outside" where the goods lie on the outside of the form,
    "inside" where its surface is to be their outer face: pieces are then measured in the middle of the goods' thickness;
    "none" on the form itself. seed: another one tries other coarse levels.
    """

    goods: object = "canvas"
    comfort: float = 0.5
    thrift: float | None = None
    energy: object = "square"
    symmetry: object = "auto"
    keep_clear: object = None
    held: object = None
    shut: object = None
    start: object = None
    only: object = None
    pieces: int | None = None
    route: str = "through"
    grain: object = None
    thickness_side: str = "none"
    seed: int = 0

    def __post_init__(self):
        _number("comfort", self.comfort, 0.0, 1.0)
        if self.thrift is not None:
            _number("thrift", self.thrift, 1e-6, 1e6)
        _choice("route", self.route, ROUTES)
        _choice("thickness_side", self.thickness_side, THICKNESS_SIDES)
        if isinstance(self.energy, str):
            _choice("energy", self.energy, ENERGIES)
        else:
            _check_density(self.energy)
        if isinstance(self.symmetry, str):
            _choice("symmetry", self.symmetry, SYMMETRIES)
        else:
            _check_planes(self.symmetry)
        if self.pieces is not None:
            _whole("pieces", self.pieces, 1)
        _whole("seed", self.seed, 0)
        if self.grain is not None:
            direction = _numbers("grain", self.grain, "a direction of three numbers, such as (0, 0, 1)")
            if direction.shape != (3,) or not np.isfinite(direction).all() or not direction.any():
                raise WishError(f"grain: {self.grain!r} is not a direction of three numbers, such as (0, 0, 1).")
        if self.keep_clear is not None:
            weights = _numbers("keep_clear", self.keep_clear, "a weight for each point")
            if not (weights >= 0).all():
                bad = np.flatnonzero(~(weights >= 0))[:5]
                raise WishError(f"keep_clear: weights must be 0 or more; points {bad.tolist()} are not. Paint them again.")
        for name in ("held", "shut"):
            if getattr(self, name) is not None:
                _check_pairs(name, getattr(self, name))
        if _depth("start", self.start) == 2:
            _check_pairs("start", self.start)


def _number(name, value, low, high):
    if isinstance(value, bool) or not isinstance(value, Real) or not low <= value <= high:
        raise WishError(f"{name}: {value!r} is not a number from {low:g} to {high:g}.")


def _whole(name, value, least):
    if isinstance(value, bool) or not isinstance(value, Real) or not isfinite(value) or int(value) != value or value < least:
        raise WishError(f"{name}: {value!r} is not a whole number of at least {least}.")


def _numbers(name, value, wanted):
    """The value as an array of floats."""
    try:
        return np.asarray(value, dtype=float)
    except (TypeError, ValueError) as error:
        raise WishError(f"{name}: {value!r:.60} is not {wanted}.") from error


def _depth(name, value):
    """Number of dimensions of the value as an array."""
    try:
        return np.ndim(value)
    except ValueError as error:
        raise WishError(f"{name}: {value!r:.60} is neither a label for each face nor pairs of point numbers.") from error


def _check_pairs(name, value):
    """Refuse what is no (k, 2) array of point numbers."""
    wanted = "pairs of point numbers, such as [(0, 1), (1, 2)]"
    pairs = _numbers(name, value, wanted)
    if pairs.size and (pairs.ndim != 2 or pairs.shape[1] != 2 or not (pairs == np.floor(pairs)).all()):
        raise WishError(f"{name}: {value!r:.60} is not {wanted}.")


def _choice(name, value, allowed):
    if not isinstance(value, str) or value not in allowed:
        raise WishError(f"{name}: {value!r} is not one of {', '.join(allowed)}.")


def _check_density(pair):
    """Refuse what is no pair of functions of arrays, the second the slope of the first."""
    if not (isinstance(pair, tuple | list) and len(pair) == 2 and all(map(callable, pair))):
        raise WishError("energy: give a name or a pair of functions (j, dj/du).")
    u = np.linspace(-0.9, 0.9, 12)
    for name, function in zip(("j", "dj/du"), pair, strict=True):
        try:
            with np.errstate(all="ignore"):
                values = np.asarray(function(u), dtype=float)
        except Exception as error:
            raise WishError(f"energy: {name} fails on an array ({error}). It takes u (n,) and gives (n,).") from error
        if values.shape != u.shape:
            raise WishError(f"energy: {name} gives {values.size} numbers for {u.size}. It takes u (n,) and gives (n,).")
        if not np.isfinite(values).all():
            raise WishError(f"energy: {name} is not finite at u = {u[~np.isfinite(values)][0]:.2g}.")
    j, slope = pair
    step = 1e-5
    by_difference = (np.asarray(j(u + step), dtype=float) - np.asarray(j(u - step), dtype=float)) / (2 * step)
    off = np.abs(by_difference - slope(u))
    if off.max() > 1e-3 * max(1.0, np.abs(by_difference).max()):
        raise WishError(f"energy: the second function is not the slope of the first at u = {u[off.argmax()]:.2g}.")


def _check_planes(planes):
    """Refuse what is no list of planes (point, normal) at right angles to each other."""
    wanted = "symmetry: give \"auto\", \"none\" or a list of planes (point, normal), three numbers each."
    try:
        found = np.array([(point, normal) for point, normal in planes], dtype=float)
    except (TypeError, ValueError) as error:
        raise WishError(wanted) from error
    if found.shape[1:] != (2, 3) or not np.isfinite(found).all() or not found[:, 1].any(axis=1).all():
        raise WishError(wanted)
    normals = found[:, 1] / np.linalg.norm(found[:, 1], axis=1, keepdims=True)
    cosines = np.abs(np.triu(normals @ normals.T, 1))
    if cosines.max() > SQUARE:
        i, j = np.unravel_index(cosines.argmax(), cosines.shape)
        raise WishError(f"symmetry: planes {i} and {j} are not at right angles. Give only planes that are.")
