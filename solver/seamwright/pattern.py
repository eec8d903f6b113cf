"""The answer: pieces, seams, and what the maker should know. Plain data; the stages fill it, the sheets read it."""

from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

FITS, TIGHT, STRAINED = "fits", "tight", "strained"


@dataclass
class Piece:
    """One flat part to cut.

    points (k, 3) metres on the form; flat (k, 2) metres, counter-clockwise, the face side up, the grain along +y;
    triangles (t, 3); source (t,) the form's triangle each came from; outline (q,) indices in order, counter-clockwise,
    not repeated at the end. stretch (t, 2) principal, largest first (length on the form over length in the flat goods,
    minus one); warp_weft_shear (t, 3), shear in radians; utilisation (t,) share of the hard limit that is used.
    neutral (k, 3): the points in the middle of the goods' thickness, against which the flat ones are measured; the same as
    `points` where the wishes name no side for the thickness.
    """

    name: str
    points: np.ndarray
    flat: np.ndarray
    triangles: np.ndarray
    source: np.ndarray
    outline: np.ndarray
    stretch: np.ndarray
    warp_weft_shear: np.ndarray
    utilisation: np.ndarray
    fit: str
    beyond: float
    grain_free: bool = True
    neutral: np.ndarray | None = None

    def __post_init__(self):
        if self.neutral is None:
            self.neutral = self.points

    @property
    def areas(self):
        """(t,) square metres that are covered, in the middle of the goods."""
        a, b, c = (self.neutral[self.triangles[:, k]] for k in range(3))
        return 0.5 * np.linalg.norm(np.cross(b - a, c - a), axis=1)

    @property
    def flat_areas(self):
        """(t,) square metres in the flat goods; negative where a triangle is flipped (which never may be)."""
        a, b, c = (self.flat[self.triangles[:, k]] for k in range(3))
        u, v = b - a, c - a
        return 0.5 * (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0])


@dataclass
class Seam:
    """Where two edges are joined.

    path (q, 3) metres on the form; sides: two of (piece name or None at an open edge, (q,) point indices in that piece,
    both in the path's direction); a closed seam repeats its first point at the end. A seam whose two sides are in one
    piece closes that piece (a dart where `dart` is true: it ends inside). eased: where ease is wanted and the sides are
    not equally long, (begin, end) as shares of the path; else None.
    """

    name: str
    path: np.ndarray
    sides: tuple
    lengths: tuple
    dart: bool = False
    eased: tuple | None = None

    @property
    def ease(self):
        """Share by which the second side is longer than the first; 0 at an open edge."""
        if self.sides[0][0] is None or self.sides[1][0] is None:
            return 0.0
        return self.lengths[1] / self.lengths[0] - 1.0

    @property
    def open(self):
        """True where the form ends and nothing is joined (a hem)."""
        return self.sides[0][0] is None or self.sides[1][0] is None


@dataclass
class Pattern:
    """Everything the cutting table needs. `form` is the covered Form, `goods` the Goods, `order` seam names."""

    form: object
    goods: object
    pieces: list
    seams: list
    order: list
    notes: list = field(default_factory=list)
    details: dict = field(default_factory=dict)
    version: str = ""

    @property
    def fits(self):
        """True when no piece is strained."""
        return all(piece.fit != STRAINED for piece in self.pieces)

    def summary(self):
        """Plain JSON data: what the report, the command line and the panel show. Lengths in mm, stretch as shares."""
        from .sheets.report import summary

        return summary(self)

    def save(self, folder, kinds=("pdf", "svg", "json", "html"), paper="roll"):
        """Write the sheets; returns the list of paths. Whole files or none: a failure leaves the folder as it was."""
        from .sheets import save

        return save(self, Path(folder), kinds, paper)
