"""The cutting table: every sheet of goods in one drawing, with its heading and a square to test the scale on."""

from dataclasses import dataclass

import numpy as np

from .lay import MARGIN
from .lettering import Lettering, Stroke

SQUARE = 100.0
"""Side in mm of the test square."""
SQUARE_WORDS = ("Test square: 100 mm wide and 100 mm high.", "Measure both ways before you cut.",
                "If it is not, print again at 100 %.")
HEADING = SQUARE + 2 * MARGIN
"""Height in mm of the strip above the sheets."""
BETWEEN = 20.0


@dataclass
class Table:
    """Width and height in mm; strokes and letterings as pairs (Draft or None, Stroke or Lettering), y downward.

    tops: where each sheet begins.
    """

    width: float
    height: float
    strokes: list
    letterings: list
    tops: list


def stacked(sheets, headed=True):
    """The sheets under one another, below a strip with the test square if it is to be `headed`. Returns a Table."""
    strokes, letterings, tops, top, width = [], [], [], 0.0, 0.0
    if headed:
        strokes.append((None, Stroke("marks", MARGIN + SQUARE * np.array([[0, 0], [1, 0], [1, 1], [0, 1]]), True)))
        for order, text in enumerate(SQUARE_WORDS):
            mark = Lettering(text, np.zeros(2), 3.2)
            letterings.append((None, mark.moved([MARGIN + SQUARE / 2, MARGIN + SQUARE / 2 + 5 * (order - 1)])))
        top, width = HEADING, HEADING
    for sheet in sheets:
        offset = np.array([0.0, top])
        tops.append(top)
        for draft, at in sheet.pieces:
            drawn, written = draft.drawing(at + offset)
            strokes += [(draft, stroke) for stroke in drawn]
            letterings += [(draft, mark) for mark in written]
        if len(sheets) > 1:
            frame = offset + np.array([[0, 0], [sheet.width, 0], [sheet.width, sheet.height], [0, sheet.height]])
            strokes.append((None, Stroke("marks", frame, True)))
        top += sheet.height + BETWEEN
        width = max(width, sheet.width)
    return Table(width, top - BETWEEN, strokes, letterings, tops)
