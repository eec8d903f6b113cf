"""What a real flattening teaches about a level's points and regions. `met` is the Tailored that it gave."""

import numpy as np

from ..form.measure import areas

DAMPED = 1.0  # power with which the spread of the real use within a piece is taken over


def spread(level, met):
    """(n,) at the level's points, how the real use there compares with the typical one of its piece, damped."""
    surface = level.surface
    number, piece = met.network.pieces
    each = np.empty(len(piece))
    for index, one in enumerate(met.judged):
        typical = np.sqrt(np.mean(one.each**2))
        each[piece == index] = np.clip(one.each / max(typical, 1e-9), 0.5, 3.0)
    corners = surface.triangles[met.network.source].ravel()
    area = np.repeat(areas(met.network.surface), 3)
    n = len(surface.points)
    mean = np.bincount(corners, area * np.repeat(each, 3), minlength=n) / np.bincount(corners, area, minlength=n)
    return mean**DAMPED


def worst(level, met):
    """(P,) the level's point at the worst place of every piece."""
    triangles = level.surface.triangles[met.network.source]
    number, piece = met.network.pieces
    at = [np.flatnonzero(piece == index)[one.each.argmax()] for index, one in enumerate(met.judged)]
    return triangles[at, 0]


def piece_of_region(level, labels, met):
    """(K,) the piece that most of every region's triangle corners lie in."""
    count = int(labels.max()) + 1
    corners = labels[level.surface.triangles[met.network.source]]
    number, piece = met.network.pieces
    votes = np.zeros((count, number))
    np.add.at(votes, (corners.ravel(), np.repeat(piece, 3)), 1)
    return votes.argmax(axis=1)


def lobes(part, one):
    """(2,) two points of a piece that lie on each other in the flat: those farthest apart along its outline."""
    outline = part.boundary_loops[0]
    pairs = np.array(one.crossings)
    way = np.abs(pairs[:, 1] - pairs[:, 0])
    return outline[pairs[np.argmax(np.minimum(way, len(outline) - way))]]
