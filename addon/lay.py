"""Lays the flat pieces into the unit square of a UV map, all at one scale."""

import numpy as np

GAP = 0.01
"""Space between pieces, as a share of the square."""


def lay(pattern):
    """(places, across): (p, 2) metres to add to each piece's flat points, and the metres across the square.

    Rows of falling height; `(flat + place) / across` lies in the unit square.
    """
    low = np.array([piece.flat.min(axis=0) for piece in pattern.pieces])
    size = np.array([piece.flat.max(axis=0) for piece in pattern.pieces]) - low
    width = max(size[:, 0].max(), np.sqrt((size[:, 0] * size[:, 1]).sum()))
    gap = GAP * width
    places, x, y, row = np.empty_like(low), gap, gap, 0.0
    for i in np.argsort(-size[:, 1], kind="stable"):
        if x > gap and x + size[i, 0] > width + gap:
            x, y, row = gap, y + row + gap, 0.0
        places[i] = (x, y) - low[i]
        x, row = x + size[i, 0] + gap, max(row, size[i, 1])
    return places, max(width + 2 * gap, y + row + gap)
