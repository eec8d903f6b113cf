"""Everything the maker asks for beside the form."""

from dataclasses import dataclass
from numbers import Real

import numpy as np

from .errors import WishError

ROUTES = ("through", "edges")
ENERGIES = ("square", "dirichlet", "hencky")
SYMMETRIES = ("auto", "none")
THICKNESS_SIDES = ("none", "outside", "inside")


@dataclass(frozen=True, kw_only=True)
class Wishes:
    """What is wanted; every field has a default. Raises WishError on a value that cannot be.

    goods: a name or a Goods. comfort: 0 (hard limits) to 1 (comfortable ones). thrift: None finds the cheapest network
    that fits, a number is the price of a metre of seam on a form scaled to area 4 pi. energy: "square", "dirichlet",
    "hencky" or (j, dj/du). symmetry: "auto", "none" or a list of (point, normal). keep_clear: (n,) weights of the
    caller's points, 0 free, inf never. held, shut: (k, 2) point pairs that are, or may not be, seams. start: a Pattern
    or (m,) face labels to improve. only: (m,) bool. pieces: a wished number. route: "through" faces or along "edges".
    grain: a direction on the form. thickness_side: which side of thick goods the form's surface is.
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
        elif not (isinstance(self.energy, tuple | list) and len(self.energy) == 2 and all(map(callable, self.energy))):
            raise WishError("energy: give a name or a pair of functions (j, dj/du).")
        if isinstance(self.symmetry, str):
            _choice("symmetry", self.symmetry, SYMMETRIES)
        if self.pieces is not None and (int(self.pieces) != self.pieces or self.pieces < 1):
            raise WishError(f"pieces: {self.pieces!r} is not a whole number of at least 1.")
        if self.keep_clear is not None:
            weights = np.asarray(self.keep_clear, dtype=float)
            if np.isnan(weights).any() or (weights < 0).any():
                bad = np.flatnonzero(~(weights >= 0))[:5]
                raise WishError(f"keep_clear: weights must be 0 or more; points {bad.tolist()} are not. Paint them again.")


def _number(name, value, low, high):
    if not isinstance(value, Real) or not low <= value <= high:
        raise WishError(f"{name}: {value!r} is not a number from {low:g} to {high:g}.")


def _choice(name, value, allowed):
    if value not in allowed:
        raise WishError(f"{name}: {value!r} is not one of {', '.join(allowed)}.")
