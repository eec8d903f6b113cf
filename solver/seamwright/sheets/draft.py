"""The draft of a piece: stitch line, cut line, notches, grain and marks in mm, before it is laid on the goods."""

from dataclasses import dataclass, replace

import numpy as np
import shapely

from .allowance import cut_area, stitch_area
from .lettering import Stroke, boxes
from .marks import piece_marks, seam_marks
from .notches import PEN_TICK, SLIT_DEPTH, seam_notches, takes_slits

DOWN = np.array([1.0, -1.0])
LEAST_EASE = 1.0
"""Millimetres by which one side of a seam must be longer before its name says so."""
UNLIKE = 0.005
"""Share of its area by which a piece may miss its mirror image and still be called that: 1 mm around a piece of 1 m."""
QUANTITY = 1
"""Every piece is cut once: mirrored twins are pieces of their own, left and right."""


@dataclass(frozen=True)
class Draft:
    """One piece as it is drawn: number n of `count`, `area` inside the stitch line and `cut` (shapely, mm), the grain up.

    notches: list of Notch. unmarked: what found no room on the piece, for the legend to say. crossed: the
    stitch line crosses itself, so that the piece cannot be cut as drawn.
    """

    name: str
    number: int
    count: int
    area: object
    cut: object
    notches: list
    strokes: list
    letterings: list
    unmarked: list
    crossed: bool

    @property
    def centre(self):
        """(2,) the roomiest point inside the stitch line."""
        return np.array(shapely.maximum_inscribed_circle(self.area, tolerance=1.0).coords[0])

    @property
    def bounds(self):
        """Left, low, right, high of the cut line, mm."""
        return self.cut.bounds

    def drawing(self, offset):
        """(strokes, letterings) on a sheet whose y runs downward: a point (x, y) of the piece comes to offset + (x, -y)."""
        strokes = [replace(stroke, points=stroke.points * DOWN + offset) for stroke in self.strokes]
        return strokes, [mark.moved(mark.at * DOWN + offset) for mark in self.letterings]


def draft(pattern):
    """The list of Draft of a Pattern's pieces, in their order."""
    names = {piece.name: order for order, piece in enumerate(pattern.pieces)}
    if len(names) < len(pattern.pieces):
        raise ValueError("two pieces of a pattern have the same name")
    edges = [_Edge(piece) for piece in pattern.pieces]
    notches = [[] for _ in edges]
    sides = [[] for _ in edges]
    for seam in pattern.seams:
        used = [(edges[names[name]], indices) for name, indices in seam.sides if name is not None]
        lines = [edge.line(indices) for edge, indices in used]
        normals = [edge.outward(indices) for edge, indices in used]
        ticks = seam_notches(seam, lines, normals)
        owners = [name for name, _ in seam.sides if name is not None]
        for side, name in enumerate(owners):
            mate = None if seam.open else owners[1 - side]
            texts = _seam_texts(seam, name, mate, side)
            sides[names[name]].append((seam.name, texts, lines[side], normals[side]))
            if not seam.open:
                notches[names[name]] += ticks[side]
    return [_draft_piece(pattern, order, edges[order], notches[order], sides[order]) for order in range(len(edges))]


class _Edge:
    """The stitch line of a piece, and which way is out along any stretch of it."""

    def __init__(self, piece):
        self.flat = piece.flat * 1000
        self.stitch = self.flat[piece.outline]
        after = np.roll(piece.outline, -1)
        self.steps = set(zip(piece.outline.tolist(), after.tolist(), strict=True))

    def line(self, indices):
        return self.flat[indices]

    def outward(self, indices):
        """(q - 1, 2): right of the outline's own direction, which runs counter-clockwise."""
        step = np.diff(self.flat[indices], axis=0)
        pairs = zip(indices[:-1].tolist(), indices[1:].tolist(), strict=True)
        sign = np.array([1.0 if pair in self.steps else -1.0 for pair in pairs])
        length = np.maximum(np.linalg.norm(step, axis=1), 1e-12)
        return np.column_stack([step[:, 1], -step[:, 0]]) * (sign / length)[:, None]


def _draft_piece(pattern, order, edge, notches, sides):
    piece, goods = pattern.pieces[order], pattern.goods
    allowance = goods.allowance * 1000
    area = stitch_area(edge.stitch)
    cut = cut_area(edge.stitch, allowance)
    strokes = [Stroke("cut", np.array(ring.coords)[:-1], True) for ring in (cut.exterior, *cut.interiors)]
    strokes.append(Stroke("stitch", edge.stitch, True))
    strokes += _ticks(notches, cut, allowance, takes_slits(goods))
    unmarked = []
    height = area.bounds[3] - area.bounds[1]
    letterings, grain, free, passed = piece_marks(area, _heads(pattern, order), min(0.7 * height, 300.0))
    if passed:
        unmarked.append("goods, allowance and scale" if letterings else "its name and number")
    if grain is None:
        unmarked.append("the grain line (it is upright on the sheet)")
    else:
        strokes += _arrow(grain, both_ways=not goods.nap)
    nameless = {}
    for seam, texts, line, normals in sides:
        strokes += _dots(line)
        placed, free = seam_marks(free, line, -normals, texts)
        letterings += placed
        if not placed:
            nameless.setdefault(seam)
    if nameless:
        unmarked.append(f"the name{'s' * (len(nameless) > 1)} of seam{'s' * (len(nameless) > 1)} {', '.join(nameless)}")
    crossed = not shapely.LinearRing(edge.stitch).is_simple
    return Draft(piece.name, order + 1, len(pattern.pieces), area, cut, notches, strokes, letterings, unmarked, crossed)


def _heads(pattern, order):
    """Lists of lines for a piece, the fullest first [common practice: what every piece carries; ASTM D6673 piece text]."""
    piece, goods, count = pattern.pieces[order], pattern.goods, len(pattern.pieces)
    numbered = f"{order + 1} of {count}"
    if goods.nap:
        grain = "nap runs down the arrow"
    elif goods.grain_free and piece.grain_free:
        grain = "any direction of the goods"
    else:
        grain = "warp along the arrow"
    allowance = f"{goods.allowance * 1000:g} mm allowance included" if goods.allowance else "no allowance"
    full = [piece.name, f"{pattern.form.name}, piece {numbered}, cut {QUANTITY}", f"{goods.name}, face side up",
            f"{allowance}, scale 1:1", grain]
    alike = next((names for names in pattern.details.get("mirrored", ()) if piece.name in names), ())
    twins = [other for other in pattern.pieces if other.name in alike and other is not piece]
    for words, mirrored in (("mirror image of", True), ("not quite the mirror image of", False)):
        names = [other.name for other in twins if is_mirror_image(piece, other) == mirrored]
        if names:
            full.insert(2, f"{words} {' and '.join(names)}")
    if pattern.version:
        full.append(f"seamwright {pattern.version}")
    return [full, [piece.name, f"{numbered}, cut {QUANTITY}"], [piece.name], [str(order + 1)]]


def is_mirror_image(piece, other):
    """True where one flat piece laid face down covers the other, grain along grain, but for UNLIKE of its area."""
    one, two = (shapely.Polygon(each.flat[each.outline]) for each in (piece, other))
    if not (one.is_valid and two.is_valid):
        return False
    middle = np.array([one.centroid.x, one.centroid.y])
    for turn in ([-1, 1], [1, -1]):
        at = shapely.transform(two, lambda points, turn=turn: points * turn)
        laid = shapely.transform(at, lambda points, at=at: points - [at.centroid.x, at.centroid.y] + middle)
        if one.symmetric_difference(laid).area < UNLIKE * one.area:
            return True
    return False


def _seam_texts(seam, name, mate, side):
    """What may stand beside one side of a seam, fullest first; the longer side says how much is eased in."""
    if seam.open:
        return [f"{seam.name}: hem", seam.name]
    text = f"{seam.name}: dart" if seam.dart else f"{seam.name} to {'itself' if mate == name else mate}"
    longer = (seam.lengths[side] - seam.lengths[1 - side]) * 1000
    return [f"{text}, ease in {longer:.1f} mm"] * (longer >= LEAST_EASE) + [text, seam.name]


def _ticks(notches, cut, allowance, slits):
    """Each notch as a line over the allowance: from the stitch line to a slit in the edge, or a pen tick all the way."""
    strokes = []
    edge = cut.boundary
    for notch in notches:
        end = notch.at + notch.outward * allowance
        on_edge = allowance > 0 and edge.distance(shapely.Point(end)) < 0.05 * allowance + 0.1
        if not on_edge:
            reach = -PEN_TICK if allowance <= 0 else min(PEN_TICK, allowance / 2)
            strokes.append(Stroke("notches", np.array([notch.at, notch.at + notch.outward * reach])))
        elif slits:
            bottom = end - notch.outward * min(SLIT_DEPTH, allowance / 2)
            strokes += [Stroke("notches", np.array([end, bottom])), Stroke("marks", np.array([bottom, notch.at]))]
        else:
            strokes.append(Stroke("notches", np.array([notch.at, end])))
    return strokes


def _arrow(grain, both_ways):
    low, high = grain
    barb = min(4.0, 0.25 * (high[1] - low[1]))
    heads = [(low, 1.0)] + ([(high, -1.0)] if both_ways else [])
    strokes = [Stroke("grain", grain)]
    for tip, way in heads:
        strokes.append(Stroke("grain", tip + barb * np.array([[-0.4, way], [0.0, 0.0], [0.4, way]])))
    return strokes


def _dots(line):
    """Small squares on the stitch line where a stretch of seam begins and ends; a closed one has none."""
    if np.allclose(line[0], line[-1]):
        return []
    return [Stroke("marks", corners, True) for corners in boxes(line[[0, -1]], 1.6, 1.6, 45.0)]
