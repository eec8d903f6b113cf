"""Left and right alike: a piece that lies across a plane of symmetry is laid on a fold, and of two pieces that are mirror
images on the form, one is laid flat and the other is its mirror image, grain and all."""

from dataclasses import replace

import numpy as np
from scipy.spatial import cKDTree

from ..flat import overlaps
from ..flat.flatten import as_complex, as_points
from ..flat.rest import Rest
from ..flat.start import valid
from ..seams.twins import twin_pieces
from .grain import UP, pull
from .judge import judge
from .measure import area_quantile, areas, utilisation, warp_weft_shear
from .tailored import ENOUGH, Tailored

ALIKE = 2e-3
"""Gap between mirrored points, over the size of the piece, under which they are the same; and least turn of a grain, rad."""
SLIGHTLY = 1.02
"""What a piece may use of the limits as the mirror image of another, over what that one uses."""


def paired(met, planes, goods, comfort, grain=None):
    """The Tailored whose pieces are as symmetric in the flat as they are on the form. planes: mirror Planes.

    Only pieces whose meshes are mirror images too, where they fit so, and a wanted `grain` (3,) still runs
    along the warp. Of twins the least strained is the pattern of the others.
    """
    network, judged = met.network, list(met.judged)
    twins = [(plane, twin_pieces(network, plane)[0]) for plane in planes]
    order = sorted(range(len(judged)), key=lambda piece: (bool(judged[piece].crossings), judged[piece].utilisation, piece))
    done = set()
    for first in order:
        if first in done:
            continue
        own = [plane for plane, twin in twins if twin[first] == first]
        if own:
            judged[first] = _folded(network.piece_surface(first)[0], judged[first], own, goods, comfort, grain)
        reached = [first]
        done.add(first)
        for piece in reached:
            for plane, twin in twins:
                other = int(twin[piece])
                if other in done or other < 0:
                    continue
                surfaces = [network.piece_surface(number)[0] for number in (piece, other)]
                found = _mirrored(*surfaces, judged[piece], plane, goods, comfort, grain)
                if found is not None:
                    judged[other] = found
                    done.add(other)
                    reached.append(other)
    return Tailored(network, judged)


def _mirrored(surface, other, judged, plane, goods, comfort, grain):
    """Judged of the piece `other`, the mirror image of that of `surface`; None where that cannot be.

    Turned half round where that lets the warp, and with it the nap, run upwards.
    """
    point = _image(surface, other, plane)
    if point is None:
        return None
    flat = as_complex(judged.flat[point] * [-1, 1])
    run = pull(Rest(other), UP if grain is None else grain) @ flat
    flat = as_points(flat if run.imag >= 0 else -flat)
    if grain is not None and abs(run.real) > ALIKE * abs(run):
        return None
    each = utilisation(warp_weft_shear(other.points, other.triangles, flat), goods, comfort)
    used, before = (area_quantile(values, areas(piece.points, piece.triangles))
                    for values, piece in ((each, other), (judged.each, surface)))
    if used > max(ENOUGH, SLIGHTLY * before) or not valid(Rest(other), as_complex(flat)):
        return None
    return replace(judged, flat=flat, each=each, crossings=overlaps(flat, other.boundary_loops[0]))


def _folded(surface, judged, planes, goods, comfort, grain):
    """Judged of a piece that lies across planes, symmetric in the flat too, warp or weft along the fold; else as it was."""
    flat = as_complex(judged.flat)
    for plane in planes:
        point = _image(surface, surface, plane)
        if point is None:
            return judged
        flat = flat - flat.mean()
        turned = flat[point].conj()
        flat = 0.5 * (flat + np.exp(1j * np.angle(np.vdot(turned, flat))) * turned)
    rest, plane = Rest(surface), planes[0]
    runs = np.array([pull(rest, axis) @ flat for axis in np.eye(3)])
    along = np.eye(3) - np.outer(plane.normal, plane.normal)
    fold = (along @ runs * np.exp(-1j * np.angle((along @ runs) @ (along @ runs)) / 2)).real
    for direction in (fold, plane.normal) if grain is None else (np.asarray(grain, dtype=float),):
        lean = abs(direction @ plane.normal) / np.linalg.norm(direction)
        if ALIKE < lean < 1 - ALIKE:
            continue
        upward = 1 if grain is not None or direction @ UP >= 0 else -1
        found = judge(surface, goods, comfort, upward * direction, None, as_points(flat))
        if not found.crossings and found.utilisation <= ENOUGH:
            return found
    return judged


def _image(surface, other, plane):
    """(k,) the point of `surface` whose mirror image each point of `other` is; None where the meshes differ.

    By the triangles around it, as points on the two sides of a dart lie in one place. A face across the plane may be cut
    along one diagonal where its mirror image has the other.
    """
    size = np.sqrt(np.prod(np.sort(np.ptp(surface.points, axis=0))[1:]))
    gap, triangle = cKDTree(plane.mirrored(surface.points[surface.triangles].mean(axis=1))).query(
        other.points[other.triangles].mean(axis=1))
    same = gap <= ALIKE * size
    theirs, ours = surface.triangles[triangle[same]], other.triangles[same]
    apart = np.linalg.norm(other.points[ours][:, :, None] - plane.mirrored(surface.points)[theirs][:, None], axis=3)
    point = np.full(len(other.points), -1)
    point[ours] = np.where(apart.min(axis=2) <= ALIKE * size, np.take_along_axis(theirs, apart.argmin(axis=2), axis=1), -1)
    whole = len(surface.points) == len(other.points) and len(np.unique(point)) == len(point) and point.min() >= 0
    return point if whole else None
