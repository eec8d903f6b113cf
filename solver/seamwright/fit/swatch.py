"""Goods from a swatch: what a marked line measures when the swatch is pulled, or worked in, by hand."""

from dataclasses import replace

import numpy as np

from ..errors import WishError
from .goods import get

COMFORTABLE_STRETCH = 1 / 3
COMFORTABLE_SHEAR = 1 / 2
"""Share of the hand's pull that is comfortable where only one pull was measured; common practice."""


def goods_from_swatch(name, like, *, warp=None, weft=None, bias=None, eased=None, marked=0.1):
    """Goods by measurement: draw a line of length `marked` along the warp, one along the weft, one at 45 degrees; pull.

    name of the new goods; like, a name or Goods, from which everything is taken that was not measured. warp, weft, bias:
    metres the marked line measures at a gentle pull and at the hardest pull a seam should ask for, as a pair; or one length
    at a firm hand pull, which is then the hard limit. eased: the same for a line that is worked in, with steam or thumbs,
    as far as it goes without a pucker. The bias gives the shear of yarns that turn about their crossings and keep their
    length: a bias stretch b is a shear of asin((1 + b)^2 - 1). Leave it out for knits, felt, sheets.
    Raises WishError on a length that cannot be.
    """
    measured = {}
    for key, lengths in (("warp", warp), ("weft", weft)):
        if lengths is not None:
            measured[f"stretch_{key}"] = _pair(name, key, lengths, marked, 1, COMFORTABLE_STRETCH, lambda stretch: stretch)
    if eased is not None:
        measured["ease_in"] = _pair(name, "eased", eased, marked, -1, COMFORTABLE_STRETCH, lambda stretch: -stretch)
    if bias is not None:
        measured["shear"] = _pair(name, "bias", bias, marked, 1, COMFORTABLE_SHEAR, lambda stretch: _shear(name, stretch))
    return replace(get(like), name=name, **measured)


def _pair(name, key, lengths, marked, sign, comfortable, limit):
    """(comfortable, hard) limits from one or two lengths; `limit` turns a stretch into one."""
    given = (lengths,) if np.ndim(lengths) == 0 else tuple(lengths)
    where = f"swatch of {name!r}: {key} is {lengths!r}"
    try:
        stretch = [float(length) / marked - 1 for length in given]
    except (TypeError, ValueError) as error:
        raise WishError(f"{where}; expected one length or two, in metres.") from error
    if len(stretch) not in (1, 2) or not np.isfinite(stretch).all():
        raise WishError(f"{where}; expected one length or two, in metres.")
    if min(sign * change for change in stretch) < 0 or max(np.abs(stretch)) > 5:
        side = "at least" if sign > 0 else "at most"
        raise WishError(f"{where}; expected {side} the marked {marked:g} m (and all lengths in metres).")
    if len(stretch) == 2 and abs(stretch[0]) > abs(stretch[1]):
        raise WishError(f"{where}; the gentle measure comes first, and changes the line less than the hard one.")
    limits = [limit(change) for change in stretch]
    return tuple(limits) if len(limits) == 2 else (comfortable * limits[0], limits[0])


def _shear(name, stretch):
    if (1 + stretch) ** 2 > 2:
        raise WishError(f"swatch of {name!r}: a bias stretch of {100 * stretch:.0f} % is more than yarns that keep their "
                        "length allow (41 %). If the goods are knitted, leave the bias out; else measure the pull again.")
    return float(np.arcsin((1 + stretch) ** 2 - 1))
