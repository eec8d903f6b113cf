"""Make what is sewn together equally long, where the goods allow it: all pieces shaped together, then judged anew."""

from dataclasses import replace

import numpy as np

from ..flat import overlaps
from ..form.measure import total_area
from ..pattern import STRAINED
from ..seams.sides import joints
from .match import match
from .measure import SLACK, measure, utilisation, warp_weft_shear
from .tailored import Tailored


def sewn(network, judged, goods, comfort, grain=None):
    """List of Judged, one a piece, with both sides of every seam matched.

    As they were where that would strain a piece that was not, put more than SLACK of the form further beyond the hard
    limits, or lay a piece over itself. Comfort gives way to seams that go together.
    """
    seams = _seams(network)
    if not seams:
        return judged
    surfaces = [network.piece_surface(piece)[0] for piece in range(network.pieces[0])]
    matched = match(surfaces, [one.flat for one in judged], seams, goods, comfort, grain)
    new, worse = [], 0.0
    for surface, flat, use, old in zip(surfaces, matched.flats, matched.utilisation, judged, strict=True):
        crossings = overlaps(flat, surface.boundary_loops[0])
        if not np.isfinite(flat).all() or (crossings and not old.crossings):
            return judged
        now, before = (measure(surface.points, surface.triangles, one, goods, comfort) for one in (flat, old.flat))
        if now.fit == STRAINED and before.fit != STRAINED:
            return judged
        worse += (now.beyond - before.beyond) * total_area(surface)
        each = utilisation(warp_weft_shear(surface.points, surface.triangles, flat), goods, comfort)
        new.append(replace(old, utilisation=use, each=each, flat=flat, crossings=crossings))
    return new if worse <= SLACK * network.surface_area else judged


def closed(held, met):
    """The Tailored on the whole of a surface, from one on the same opened along a Held's seams: pieces stay as they are."""
    if not held.edges.any():
        return met
    network, came, corners = held.sewn_together(met.network, corner_flats(met))
    own = met.network.pieces[1]
    rank = np.empty(len(own), dtype=np.int64)  # of each triangle within its piece
    for piece in range(met.network.pieces[0]):
        rank[own == piece] = np.arange((own == piece).sum())
    judged = []
    for piece in range(network.pieces[0]):
        part, _, triangles = network.piece_surface(piece)
        old = met.judged[own[came[triangles[0]]]]
        flat = np.empty((len(part.points), 2))
        flat[part.triangles] = corners[triangles]
        crossings = overlaps(flat, part.boundary_loops[0]) if old.crossings else []
        judged.append(replace(old, each=old.each[rank[came[triangles]]], flat=flat, crossings=crossings))
    return Tailored(network, judged)


def corner_flats(met):
    """(t, 3, 2) where the corners of a Tailored's triangles lie in the flat."""
    corners = np.empty((*met.network.surface.triangles.shape, 2))
    for piece, one in enumerate(met.judged):
        part, _, triangles = met.network.piece_surface(piece)
        corners[triangles] = one.flat[part.triangles]
    return corners


def uneven(met):
    """Largest difference between the two sides of a seam of a Tailored, the log of their lengths' ratio."""
    def length(piece, along):
        return np.linalg.norm(np.diff(met.judged[piece].flat[along], axis=0), axis=1).sum()

    return max((abs(np.log(length(a, at) / length(b, bt))) for a, at, b, bt in _seams(met.network)), default=0.0)


def _seams(network):
    """List of (piece, points (q,), piece, points (q,)), both sides of every seam."""
    return [(joint.left.piece, joint.left.points, joint.right.piece, joint.right.points)
            for joint in joints(network) if joint.right is not None]
