"""The lay: the pieces set down in rows on the width of the goods, the grain upright.

First fit by falling height (Johnson, Demers, Ullman, Garey, Graham 1974): every piece goes into the first row that has
room for it. Pieces keep to their own rectangles, so the yield is that of rows, not of a true nesting.
"""

from dataclasses import dataclass, field
from math import inf

import numpy as np

GAP = 6.0
"""Millimetres between the cut lines of two pieces."""
MARGIN = 10.0
"""Millimetres kept free along the selvedges and the ends."""


@dataclass
class Sheet:
    """One length of goods: width and height in mm as used, x along the weft, y along the warp and, on paper, downward.

    pieces: list of (Draft, offset (2,)), the offset as `Draft.drawing` takes it.
    """

    width: float
    height: float
    pieces: list = field(default_factory=list)


def lay(pattern, drafts):
    """The sheets of goods a pattern needs, every draft set down once; as many hides or sheets as its goods' length asks for.

    A piece wider or longer than the goods still gets its place, and its sheet is then larger than the goods.
    """
    width, length = _goods_size(pattern.goods)
    rows = []
    for draft in sorted(drafts, key=lambda d: -(_size(d)[1])):
        w, h = _size(draft)
        row = next((row for row in rows if row.used + GAP + w <= width - MARGIN), None)
        if row is None:
            row = _Row(h)
            rows.append(row)
        row.add(draft, w)
    sheets, top = [], None
    for row in rows:
        if top is None or top + row.height > length - MARGIN:
            sheets.append(Sheet(0.0, 0.0))
            top = MARGIN
        sheet = sheets[-1]
        for draft, left in row.pieces:
            low_x, low_y = draft.bounds[:2]
            sheet.pieces.append((draft, np.array([left - low_x, top + _size(draft)[1] + low_y])))
        sheet.width = max(sheet.width, row.used + MARGIN)
        sheet.height = max(sheet.height, top + row.height + MARGIN)
        top += row.height + GAP
    return sheets


def too_large(drafts, goods):
    """Names of the drafts that the goods cannot hold upright."""
    width, length = _goods_size(goods)
    return [d.name for d in drafts if _size(d)[0] > width or _size(d)[1] > length]


def yield_of(sheets, goods):
    """Area inside the cut lines over the area of goods used: the full width by the length used, or whole hides or sheets."""
    width, length = _goods_size(goods)
    used = sum(max(width, s.width) * (s.height if length == inf else max(length, s.height)) for s in sheets)
    return sum(d.cut.area for s in sheets for d, _ in s.pieces) / used


def _goods_size(goods):
    return goods.width * 1000, inf if goods.length is None else goods.length * 1000


class _Row:
    def __init__(self, height):
        self.height, self.used, self.pieces = height, MARGIN - GAP, []

    def add(self, draft, width):
        self.pieces.append((draft, self.used + GAP))
        self.used += GAP + width


def _size(draft):
    left, low, right, high = draft.bounds
    return right - left, high - low
