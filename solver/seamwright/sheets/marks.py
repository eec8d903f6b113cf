"""Marks: what is written on a piece, placed inside it at a readable size, and what found no room."""

import numpy as np
import shapely

from .lettering import Lettering, boxes, text_width
from .notches import path_places

SIZES = (8.0, 6.0, 5.0, 4.0, 3.2, 2.5)
"""Heights of lettering in mm, the first that fits is taken; 2.5 mm (7 point) is the least that reads well."""
TINY = (2.0, 1.5, 1.2)
"""Last resort for a piece that has no room for more than its number."""
SEAM_SIZES = (5.0, 4.0, 3.2, 2.5, 2.0)
SEAM_STRIP = 9.0
"""Millimetres along the stitch line kept free for the seams' names where the piece is wide enough."""
CLEAR = 0.8
"""Millimetres between lettering and any line."""
LINE_PITCH = 1.35
HEAD = 1.8
"""Height of the piece's name over that of the lines under it."""
REPEAT = 400.0
"""A seam's name is repeated about every so many mm."""
ANGLES = (0.0, 15.0, -15.0, 30.0, -30.0, 45.0, -45.0, 60.0, -60.0, 75.0, -75.0, 90.0)
"""Degrees that a piece's lettering may be turned by, the most level first."""
LEVEL_FROM = 4.0
"""Level lettering of this height in mm is better than larger lettering that is turned."""


def piece_marks(area, heads, grain_length):
    """Place the piece's own marks in its stitched area (shapely, mm).

    heads: lists of lines, fullest first; the first list that fits is taken, its first line larger. Returns (letterings,
    grain line as two points (2, 2) or None, the area left for other marks, how many of the lists had to be passed over).
    """
    free = area.buffer(-CLEAR)
    roomy = area.buffer(-SEAM_STRIP)
    for passed, lines in enumerate(heads):
        last = passed == len(heads) - 1
        placed = _place_block(roomy, lines, SIZES) or _place_block(free, lines, SIZES + (TINY if last else ()))
        if placed:
            break
    else:
        placed, passed = [], len(heads)
    for line in placed:
        free = free.difference(shapely.Polygon(line.corners).buffer(CLEAR))
    grain = _place_grain(free, roomy, grain_length)
    if grain is not None:
        free = free.difference(shapely.LineString(grain).buffer(2.5))
    return placed, grain, free, passed


def seam_marks(free, line, inward, texts):
    """Write a seam's name along its stitch line (q, 2), on the side of `inward` (q - 1, 2), within the free area.

    texts: fullest first. Returns (letterings, the free area that is left); no lettering where nothing fits.
    """
    places = path_places(line)
    count = max(1, round(places[-1] / REPEAT))
    letterings = []
    for part in range(count):
        middle, reach = (part + 0.5) / count, 0.45 / count
        placed = _place_beside(free, line, inward, places, texts, middle, reach)
        if placed is not None:
            letterings.append(placed)
            free = free.difference(shapely.Polygon(placed.corners).buffer(CLEAR))
    return letterings, free


def _place_block(area, lines, sizes):
    """The lines under one another in a box inside the area, as large and as level as they go; None if they fit nowhere."""
    if area.is_empty:
        return None
    centres = _spots(area)
    shapely.prepare(area)
    level = [(size, 0.0) for size in sizes if size >= LEVEL_FROM]
    for size, angle in level + [(size, angle) for size in sizes for angle in ANGLES]:
        heights = np.full(len(lines), size)
        if len(lines) > 1:
            heights[0] *= HEAD
        width = max(text_width(text, height) for text, height in zip(lines, heights, strict=True))
        tall = heights.sum() + (LINE_PITCH - 1) * heights[1:].sum()
        fits = shapely.contains_properly(area, shapely.polygons(boxes(centres, width, tall, angle)))
        if fits.any():
            return _stack(lines, heights, centres[np.argmax(fits)], angle, tall)
    return None


def _stack(lines, heights, middle, angle, tall):
    up = np.array([-np.sin(np.radians(angle)), np.cos(np.radians(angle))])
    top, placed = tall / 2, []
    for order, (text, height) in enumerate(zip(lines, heights, strict=True)):
        top -= (LINE_PITCH - 1) * height if order else 0.0
        placed.append(Lettering(text, middle + up * (top - height / 2), float(height), float(angle)))
        top -= height
    return placed


def _spots(area):
    """(k, 2) places to try inside an area, the roomiest first and then by distance from it."""
    left, low, right, high = area.bounds
    step = max(np.sqrt((right - left) * (high - low) / 500), 1e-3)
    x, y = np.meshgrid(np.arange(left + step / 2, right, step), np.arange(low + step / 2, high, step))
    grid = np.column_stack([x.ravel(), y.ravel()])
    grid = grid[shapely.contains_xy(area, grid[:, 0], grid[:, 1])]
    circle = shapely.maximum_inscribed_circle(area, tolerance=max(step / 4, 0.2))
    roomiest = np.array(circle.coords[0])
    order = np.argsort(np.linalg.norm(grid - roomiest, axis=1), kind="stable")
    return np.vstack([roomiest, grid[order]])


def _place_grain(free, roomy, wanted):
    """Ends of an upright line of at most the wanted length in the free area; None where there is no room for 8 mm."""
    for area in (roomy.intersection(free), free):
        if area.is_empty:
            continue
        centres = _spots(max(getattr(area, "geoms", [area]), key=lambda part: part.area))
        shapely.prepare(area)
        for length in (wanted, 0.6 * wanted, 0.35 * wanted, 25.0, 15.0, 8.0):
            if length > wanted:
                continue
            fits = shapely.contains_properly(area, shapely.polygons(boxes(centres, 5.0, length + 2.0, 0.0)))
            if fits.any():
                return centres[np.argmax(fits)] + np.array([[0, -length / 2], [0, length / 2]])
    return None


def _place_beside(free, line, inward, places, texts, middle, reach):
    shapely.prepare(free)
    spread = middle + reach * np.array([0, -.15, .15, -.3, .3, -.45, .45, -.6, .6, -.75, .75, -.9, .9])
    for text in texts:
        for size in SEAM_SIZES:
            width = text_width(text, size)
            if width > places[-1]:
                continue
            at, along, normal = _frames(line, inward, places, spread, width)
            angle = np.degrees(np.arctan2(along[:, 1], along[:, 0]))
            angle = np.where(angle > 90 + 1e-6, angle - 180, np.where(angle < -90 + 1e-6, angle + 180, angle))
            for gap in (1.2, 2.5, 4.0):
                centres = at + normal * (gap + size / 2)
                fits = shapely.contains_properly(free, shapely.polygons(boxes(centres, width, size, angle)))
                if fits.any():
                    k = int(np.argmax(fits))
                    return Lettering(text, centres[k], size, float(angle[k]))
    return None


def _frames(line, inward, places, shares, width):
    """Middle of the chord as wide as the text at each share of the line, its direction, and the normal into the piece."""
    half = width / 2
    s = np.clip(shares * places[-1], half, places[-1] - half)

    def point(at):
        return np.column_stack([np.interp(at, places, line[:, k]) for k in (0, 1)])

    chord = point(s + half) - point(s - half)
    along = chord / np.maximum(np.linalg.norm(chord, axis=1), 1e-12)[:, None]
    normal = np.column_stack([-along[:, 1], along[:, 0]])
    step = np.clip(np.searchsorted(places, s, side="right") - 1, 0, len(inward) - 1)
    flip = np.sign((normal * inward[step]).sum(axis=1))
    return point(s), along, normal * np.where(flip == 0, 1, flip)[:, None]
