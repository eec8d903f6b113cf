"""The summary: what the report, the command line and the panel show, as plain JSON data."""

from math import degrees

import numpy as np

from . import data
from .draft import draft
from .figures import figures, read, together
from .lay import lay, too_large, yield_of
from .notches import path_places


def summary(pattern):
    """Plain JSON data about a Pattern; the same pattern gives the same data.

    form, version, fits, goods (name and figures), pieces, seams, order, seam_metres (joined seams, on the form),
    hem_metres, thickness_side (as in Wishes), area_m2 (covered, in the middle of the goods) and flat_area_m2, lay (sheets of
    goods with width and length used in mm, yield), notes.
    Each piece: name, number, fit, width_mm and height_mm of the cut line, and, measured from the pieces as they are saved,
    beyond (share of its area beyond the hard limits), area_m2 and flat_area_m2, shares {comfortable, tight, strained} of
    the area within the comfortable limits, between them and the hard ones, and beyond these; worst_place_mm on the form,
    where most of the limits is used; stretch {p5, p95, worst} (shares; over the form's area, the smaller and the larger
    principal one; worst is the one farthest from 0); warp and weft {p5, p95, worst} and shear_degrees {p95, worst} where
    the goods have a grain; utilisation {p95, p99_5, worst} of the hard limits; sander {l2, linf}, texture stretch (Sander,
    Snyder, Gortler, Hoppe 2001). all: the same of all pieces together. Each seam: name, pieces (two names, null at an open
    edge), lengths_mm, ease, dart, open, eased (null, or where ease is wanted {piece, by_mm, from_mm, to_mm}: the
    longer side, and from where to where on the form's seam it is worked in).
    """
    drafts = draft(pattern)
    return summary_of(pattern, drafts, lay(pattern, drafts), data.pieces(pattern, drafts))


def summary_of(pattern, drafts, sheets, saved):
    """The summary of a pattern whose drafts, lay and pieces, as they are saved, are at hand."""
    readings = [read(piece, pattern.goods) for piece in saved]
    every = figures(together(readings), pattern.goods)
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
        "area_m2": every["area_m2"],
        "flat_area_m2": every["flat_area_m2"],
        "seam_metres": sum(length for length, open_ in on_form if not open_),
        "hem_metres": sum(length for length, open_ in on_form if open_),
        "all": every,
        "pieces": [_piece(piece, d, figures(reading, goods))
                   for piece, d, reading in zip(pattern.pieces, drafts, readings, strict=True)],
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


def _piece(piece, d, found):
    left, low, right, high = d.bounds
    return {"name": piece.name, "number": d.number, "fit": piece.fit, "width_mm": right - left, "height_mm": high - low,
            **found}


def _seam(seam):
    return {"name": seam.name, "pieces": [name for name, _ in seam.sides],
            "lengths_mm": [length * 1000 for length in seam.lengths], "ease": seam.ease, "dart": seam.dart,
            "open": seam.open, "eased": _eased(seam)}


def _eased(seam):
    if seam.eased is None:
        return None
    one, other = seam.lengths
    length = path_places(seam.path)[-1] * 1000
    return {"piece": seam.sides[int(other > one)][0], "by_mm": abs(other - one) * 1000,
            "from_mm": seam.eased[0] * length, "to_mm": seam.eased[1] * length}


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
