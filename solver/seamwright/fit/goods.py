"""The goods: sheet material and what it takes. Data from TOML, checked key by key; names may be shortened."""

import json
import re
import tomllib
from dataclasses import dataclass
from functools import cache
from math import radians
from numbers import Real
from pathlib import Path

import numpy as np

from ..errors import WishError

LEAST_LIMIT = 5e-4
"""No limit counts as less than 0.5 mm in a metre: no cutting table holds more than that."""


PAIRS = {"stretch_warp": (0, 5), "stretch_weft": (0, 5), "ease_in": (0, 0.9), "mismatch": (0, 1),
         "shear": (0, radians(80))}
NUMBERS = {"thickness": (0, 0.2), "width": (0.01, 100), "length": (0.01, 1000), "allowance": (0, 1), "ease": (0, 1),
           "price": (0, 1e9)}
"""What each field may be, from and to."""


@dataclass(frozen=True, kw_only=True)
class Goods:
    """One sheet material. Pairs are (comfortable, hard); stretch and ease-in are shares (0.02 is 2 %), lengths metres.

    stretch_warp, stretch_weft: how much longer the goods may become along each. ease_in: how much shorter, along either.
    shear: change of the right angle between warp and weft, radians; None where the two principal stretches count.
    width of the roll, hide or sheet; length of a hide or sheet, None for a roll. mismatch: (easy, most) share by which
    one side of a seam may be longer than the other; ease, a share too: by how much it may stay longer where it wants to be,
    worked in when sewn. nap: pieces may not be turned head to foot. price per `price_per`,
    "m" of the roll or "m2". Raises WishError on a value that cannot be.
    """

    name: str
    stretch_warp: tuple
    stretch_weft: tuple
    ease_in: tuple
    shear: tuple | None = None
    thickness: float = 0.001
    width: float = 1.5
    length: float | None = None
    allowance: float = 0.01
    mismatch: tuple = (0.01, 0.02)
    ease: float = 0.0
    nap: bool = False
    price: float = 0.0
    price_per: str = "m"

    def __post_init__(self):
        where = f"goods {self.name!r}"
        for key in (*PAIRS, *NUMBERS):
            if getattr(self, key) is not None or key not in ("shear", "length"):
                object.__setattr__(self, key, _checked(where, key, key, getattr(self, key)))
        if self.ease > self.mismatch[0]:
            raise WishError(f"{where}: ease is {self.ease:g}; expected at most {self.mismatch[0]:g}, what is easily sewn "
                            "(the first of mismatch).")
        if self.price_per not in ("m", "m2"):
            raise WishError(f"{where}: price_per is {self.price_per!r}; write \"m\" or \"m2\".")
        if not isinstance(self.nap, bool):
            raise WishError(f"{where}: nap is {self.nap!r}; write true or false.")

    @property
    def grain_free(self):
        """True when a piece may lie in any direction: same limits all round and no nap."""
        return self.shear is None and self.stretch_warp == self.stretch_weft and not self.nap

    @property
    def narrowest(self):
        """Metres: no strip of a piece is sewn narrower than the larger of 40 mm and three allowances (common practice)."""
        return max(0.04, 3 * self.allowance)

    @property
    def room(self):
        """Metres across and along the goods that the outline of a piece has, its allowance on both sides left out."""
        both = 2 * self.allowance
        return max(self.width - both, 1e-9), np.inf if self.length is None else max(self.length - both, 1e-9)

    def limits(self, comfort=0.0):
        """Log-strain limits at a comfort from 0 (hard) to 1 (comfortable), straight between the two in percent.

        Returns (warp, weft, ease_in, shear): three positive logs of length ratios and radians (None without shear).
        """
        def between(pair):
            return pair[1] + comfort * (pair[0] - pair[1])

        warp, weft = (max(LEAST_LIMIT, np.log1p(between(pair))) for pair in (self.stretch_warp, self.stretch_weft))
        ease_in = max(LEAST_LIMIT, -np.log1p(-between(self.ease_in)))
        return warp, weft, ease_in, None if self.shear is None else max(LEAST_LIMIT, between(self.shear))


def goods():
    """The built-in goods: dict of name to Goods, all starting values of common practice (a swatch test overrides)."""
    return dict(_built_in())


@cache
def _built_in():
    return _read(Path(__file__).with_name("goods.toml"))


def get(wanted):
    """The Goods for a name, which may be shortened while it stays unique ("felt"), or a Goods itself. Raises WishError."""
    if isinstance(wanted, Goods):
        return wanted
    known = goods()
    if not isinstance(wanted, str):
        raise WishError(f"goods: {wanted!r} is neither a name nor a Goods. Known names: {', '.join(known)}.")
    if wanted.strip().lower() in known:
        return known[wanted.strip().lower()]
    asked = _words(wanted)
    found = [name for name in known if asked and all(any(w.startswith(a) for w in _words(name)) for a in asked)]
    if len(found) == 1:
        return known[found[0]]
    if found:
        raise WishError(f"goods: {wanted!r} may be {' or '.join(found)}. Say which.")
    raise WishError(f"goods: {wanted!r} is not known. Known names: {', '.join(known)}; or read your own with read_goods.")


def read_goods(path):
    """The one Goods of the maker's own TOML file, in the format of the built-in goods.toml. Raises WishError."""
    read = _read(Path(path))
    if len(read) != 1:
        raise WishError(f"{path}: holds {len(read)} goods; give each its own file with one table, like [canvas].")
    return next(iter(read.values()))


def write_goods(goods, path):
    """Write Goods as a file that `read_goods` reads. Raises WishError where that cannot be."""
    try:
        Path(path).write_text(_to_toml(goods), encoding="utf-8")
    except OSError as error:
        raise WishError(f"{path}: cannot be written ({error.strerror}). Choose another place.") from error


def _to_toml(goods):
    lines = [f"[{_quoted(goods.name)}]"]
    for key, (field, factor) in _KEYS.items():
        value = getattr(goods, field)
        if value is None:
            continue
        if isinstance(value, tuple):
            text = "[" + ", ".join(f"{part / factor:.10g}" for part in value) + "]"
        elif isinstance(value, str):
            text = _quoted(value)
        elif isinstance(value, bool):
            text = str(value).lower()
        else:
            text = f"{value / (factor or 1):.10g}"
        lines.append(f"{key} = {text}")
    return "\n".join(lines) + "\n"


def _quoted(text):
    return json.dumps(text, ensure_ascii=False)  # a JSON string is a TOML basic string


_PERCENT, _DEGREES, _MM = 0.01, radians(1), 0.001
_KEYS = {  # key of the file: (field, factor to the field's unit); factor None is kept as it is
    "stretch_warp_percent": ("stretch_warp", _PERCENT), "stretch_weft_percent": ("stretch_weft", _PERCENT),
    "ease_in_percent": ("ease_in", _PERCENT), "shear_degrees": ("shear", _DEGREES), "thickness_mm": ("thickness", _MM),
    "width_mm": ("width", _MM), "length_mm": ("length", _MM), "allowance_mm": ("allowance", _MM),
    "mismatch_percent": ("mismatch", _PERCENT), "ease_percent": ("ease", _PERCENT), "nap": ("nap", None),
    "price": ("price", None), "price_per": ("price_per", None),
}
_NEEDED = ("stretch_warp_percent", "stretch_weft_percent", "ease_in_percent")


def _read(path):
    try:
        tables = tomllib.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise WishError(f"{path}: cannot be read ({error.strerror}).") from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError) as error:
        raise WishError(f"{path}: not valid TOML ({error}).") from error
    return {name: _from_table(path, name, table) for name, table in tables.items()}


def _from_table(path, name, table):
    where = f"{path}, [{name}]"
    if not isinstance(table, dict):
        raise WishError(f"{path}: key {name!r} stands outside a table; begin the file with a line like [my canvas].")
    fields = {"name": name}
    for key, value in table.items():
        if key not in _KEYS:
            raise WishError(f"{where}: key {key!r} is not known; expected one of {', '.join(_KEYS)}.")
        field, factor = _KEYS[key]
        if factor is not None:
            value = _checked(where, field, key, value, factor)
            value = tuple(v * factor for v in value) if isinstance(value, tuple) else value * factor
        fields[field] = value
    missing = [key for key in _NEEDED if key not in table]
    if missing:
        raise WishError(f"{where}: {missing[0]} is missing; expected a pair [comfortable, hard].")
    try:
        return Goods(**fields)
    except WishError as error:
        raise WishError(f"{path}, {error}") from error


def _words(text):
    return re.split(r"[\s\-_]+", text.strip().lower())


def _is_number(value):
    return isinstance(value, Real) and not isinstance(value, bool) and np.isfinite(value)


def _checked(where, field, key, value, factor=1.0):
    """The value of a field, called `key` and in units of `factor` where it stands. Raises WishError."""
    low, high = (end / factor for end in (PAIRS | NUMBERS)[field])
    if field in PAIRS and (not isinstance(value, tuple | list) or len(value) != 2):
        raise WishError(f"{where}: {key} is {value!r}; expected a pair, the comfortable value and the hard one.")
    for number in value if field in PAIRS else [value]:
        if not _is_number(number) or not low <= number <= high * (1 + 1e-12):
            unit = " without a unit, which the key names" if isinstance(number, str) else ""
            raise WishError(f"{where}: {key} is {number!r}; expected a number from {low:g} to {high:g}{unit}.")
    if field not in PAIRS:
        return value
    if value[0] > value[1]:
        raise WishError(f"{where}: {key} is comfortable at {value[0]:g}, hard at {value[1]:g}; the first is the smaller.")
    return tuple(float(number) for number in value)
