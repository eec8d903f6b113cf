"""The summary: what the report, the command line and the panel show, as plain JSON data."""

from math import degrees

import numpy as np

from .draft import draft
from .lay import lay, too_large, yield_of
from .notches import path_places


def summary(pattern):
    """Plain JSON data about a Pattern; the same pattern gives the same data.

    form, version, fits, goods (name and figures), pieces, seams, order, seam_metres (joined seams, on the form),
    hem_metres, thickness_side (as in Wishes), area_m2 (covered, in the middle of the goods) and flat_area_m2, lay (sheets of
    goods with width and length used in mm, yield), notes.
    Each piece: name, number, fit, beyond (share of its area beyond the hard limits), area_m2 and flat_area_m2, stretch
    {p5, p95, worst} (shares; over the form's area, the smaller and the larger principal one; worst is the one farthest
    from 0), warp and weft {p5, p95, worst} and shear_degrees {p95, worst} where the goods have a grain, utilisation
    {p95, p99_5, worst} of the hard limits, width_mm and height_mm of the cut line. Each seam: name, pieces (two names, null
    at an open edge), lengths_mm, ease, dart, open.
    """
    drafts = draft(pattern)
    return summary_of(pattern, drafts, lay(pattern, drafts))


def summary_of(pattern, drafts, sheets):
    """The summary of a pattern whose drafts and lay are at hand."""
    on_form = [(path_places(seam.path)[-1], seam.open) for seam in pattern.seams]
    goods = pattern.goods
    return _plain({
        "form": pattern.form.name,
        "version": pattern.version,
        "fits": pattern.fits,
        "goods": {
            "name": goods.name, "width_mm": goods.width * 1000,
            "length_mm": None if goods.length is None else goods.length * 1000, "thickness_mm": goods.thickness * 1000,
            "allowance_mm": goods.allowance * 1000, "stretch_warp": goods.stretch_warp, "stretch_weft": goods.stretch_weft,
            "ease_in": goods.ease_in,
            "shear_degrees": None if goods.shear is None else [degrees(value) for value in goods.shear],
        },
        "thickness_side": pattern.details.get("thickness_side", "none"),
        "area_m2": sum(piece.areas.sum() for piece in pattern.pieces),
        "flat_area_m2": sum(piece.flat_areas.sum() for piece in pattern.pieces),
        "seam_metres": sum(length for length, open_ in on_form if not open_),
        "hem_metres": sum(length for length, open_ in on_form if open_),
        "pieces": [_piece(piece, d, goods) for piece, d in zip(pattern.pieces, drafts, strict=True)],
        "seams": [_seam(seam) for seam in pattern.seams],
        "order": list(pattern.order),
        "lay": {"sheets": [{"width_mm": s.width, "length_mm": s.height} for s in sheets], "yield": yield_of(sheets, goods)},
        "notes": notes(pattern, drafts),
    })


def notes(pattern, drafts):
    """Sentences the maker should read: the pattern's own, and what the sheets could not do."""
    found = list(pattern.notes)
    large = too_large(drafts, pattern.goods)
    if large:
        found.append(f"Larger than the goods as they lie: {', '.join(large)}. Join goods, or ask for smaller pieces.")
    for d in drafts:
        if d.crossed:
            found.append(f"Piece {d.name} overlaps itself when laid flat and cannot be cut as drawn: add a seam there.")
        if d.unmarked:
            found.append(f"Piece {d.name} has no room for: {'; '.join(d.unmarked)}.")
    return found


def quantiles(values, weights, shares):
    """Values (t,) at shares of the total weight, nearest from below."""
    order = np.argsort(values, kind="stable")
    total = np.cumsum(weights[order])
    place = np.searchsorted(total, np.asarray(shares) * total[-1] * (1 - 1e-12))
    return values[order][np.minimum(place, len(order) - 1)]


def farthest(values):
    """The value farthest from 0, with its sign."""
    return values.ravel()[np.argmax(np.abs(values))]


def _piece(piece, d, goods):
    area = piece.areas
    left, low, right, high = d.bounds
    found = {
        "name": piece.name, "number": d.number, "fit": piece.fit, "beyond": piece.beyond,
        "area_m2": area.sum(), "flat_area_m2": piece.flat_areas.sum(),
        "width_mm": right - left, "height_mm": high - low,
        "stretch": {"p5": quantiles(piece.stretch[:, 1], area, 0.05), "p95": quantiles(piece.stretch[:, 0], area, 0.95),
                    "worst": farthest(piece.stretch)},
        "utilisation": {"p95": quantiles(piece.utilisation, area, 0.95),
                        "p99_5": quantiles(piece.utilisation, area, 0.995), "worst": piece.utilisation.max()},
    }
    if not goods.grain_free:
        for k, name in enumerate(("warp", "weft")):
            values = piece.warp_weft_shear[:, k]
            p5, p95 = quantiles(values, area, [0.05, 0.95])
            found[name] = {"p5": p5, "p95": p95, "worst": farthest(values)}
    if goods.shear is not None:
        shear = np.abs(np.degrees(piece.warp_weft_shear[:, 2]))
        found["shear_degrees"] = {"p95": quantiles(shear, area, 0.95), "worst": shear.max()}
    return found


def _seam(seam):
    return {"name": seam.name, "pieces": [name for name, _ in seam.sides],
            "lengths_mm": [length * 1000 for length in seam.lengths], "ease": seam.ease, "dart": seam.dart,
            "open": seam.open}


def _plain(value):
    """The same data in JSON's own types, numbers to nine figures so that they read well."""
    if isinstance(value, dict):
        return {key: _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple | np.ndarray):
        return [_plain(item) for item in value]
    if isinstance(value, bool | np.bool_):
        return bool(value)
    if isinstance(value, int | np.integer):
        return int(value)
    if isinstance(value, float | np.floating):
        return float(f"{value:.9g}")
    return value
