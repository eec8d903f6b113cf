"""The cut line: the stitch line moved outward by the allowance."""

import shapely

MITRE_LIMIT = 2.0
"""A corner of the cut line lies at most this many allowances from its corner of the stitch line; else bevelled."""

LEDGE = 4.0
"""mm: notches of the cut line narrower than twice this are filled: knives and scissors do not follow them."""


def stitch_area(stitch):
    """The goods inside a stitch line (q, 2) in mm, as a shapely Polygon. Of a line that crosses itself, its largest part."""
    area = shapely.Polygon(stitch)
    if area.is_valid:
        return area
    return _largest(area.buffer(0))


def cut_area(stitch, allowance):
    """The goods to cut, as a shapely Polygon: every point within `allowance` mm of the stitched area, corners mitred.

    Where the allowances of two edges meet, as across a dart or a narrow mouth, they share the goods and no cut runs
    between them. An opening left inside is cut out when it is larger than an allowance squared.
    """
    area = stitch_area(stitch)
    if allowance <= 0:
        return area
    even = min(LEDGE, 0.5 * allowance)
    mitre = MITRE_LIMIT * allowance / (allowance + even)
    wide = area.buffer(allowance + even, join_style="mitre", mitre_limit=mitre)
    grown = _largest(wide.buffer(-even, join_style="mitre", mitre_limit=MITRE_LIMIT))
    openings = [ring for ring in grown.interiors if shapely.Polygon(ring).area > allowance**2]
    return shapely.Polygon(grown.exterior, openings)


def _largest(shape):
    parts = [part for part in getattr(shape, "geoms", [shape]) if part.geom_type == "Polygon"]
    return max(parts, key=lambda part: part.area)
