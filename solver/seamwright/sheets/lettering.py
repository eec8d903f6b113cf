"""Strokes and lettering: the few things a sheet is drawn with, the same for every kind of document."""

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from fpdf import FPDF

LAYERS = ("cut", "stitch", "notches", "grain", "marks")
"""What a cutter or plotter may switch on and off: each is a layer of the documents."""


@dataclass(frozen=True)
class Stroke:
    """A line: points (k, 2) in mm, closed or not, on one of LAYERS."""

    layer: str
    points: np.ndarray
    closed: bool = False


@dataclass(frozen=True)
class Lettering:
    """One line of text: its middle `at` (2,) and its height (em) in mm, turned by `angle` degrees counter-clockwise."""

    text: str
    at: np.ndarray
    height: float
    angle: float = 0.0

    @property
    def width(self):
        """Millimetres, in Helvetica."""
        return text_width(self.text, self.height)

    @property
    def corners(self):
        """(4, 2) corners of the box the line fills."""
        return boxes(self.at[None], self.width, self.height, self.angle)[0]

    def moved(self, to):
        """The same line with its middle at `to`."""
        return replace(self, at=np.asarray(to, dtype=float))


def printable(text):
    """The text with signs that the documents' Helvetica lacks shown as question marks (Latin letters are all there)."""
    return "".join(ch if ch.isprintable() else " " for ch in text).encode("latin-1", "replace").decode("latin-1")


def text_width(text, height):
    """Width in mm of a line of Helvetica of `height` mm."""
    return _width_per_em(printable(text)) * height


def boxes(centres, width, height, angle):
    """(k, 4, 2) corners of boxes about centres (k, 2), all turned by `angle` degrees (a number or (k,))."""
    turn = np.radians(np.broadcast_to(angle, len(centres)))
    along = np.column_stack([np.cos(turn), np.sin(turn)]) * width / 2
    up = np.column_stack([-np.sin(turn), np.cos(turn)]) * height / 2
    return np.stack([centres - along - up, centres + along - up, centres + along + up, centres - along + up], axis=1)


@cache
def _ruler():
    ruler = FPDF(unit="pt")
    ruler.set_font("Helvetica", size=1000)
    return ruler


@cache
def _width_per_em(text):
    return _ruler().get_string_width(text) / 1000
