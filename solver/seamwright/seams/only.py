"""One patch that covers given faces and grows where that serves: its stretch and its border count, the rest does not."""

import numpy as np
from scipy.spatial import cKDTree

from ..form.surface import Surface
from .cut import recut
from .descend import descend
from .fields import from_labels, redistance
from .network import Network, cut_through
from .route import face_labels, shortened
from .straighten import corridor
from .topology import split_components

STEPS = 16  # of flow on every level
BORDER = 16.0  # price of the border against stretch as the goods take it: it comes out smooth, the seams within do the rest
PATCH, REST = 0, 1


def grown(ladder, given, thrift, energy, weight):
    """Cut of the Ladder's last level in two: the patch (label 0) and the rest (1); None where the patch is everything.

    given (n,) bool: points that the patch holds; weight: of its distortion against `thrift` times its border.
    """
    levels, fields = ladder.levels, None
    if levels[-1].patch is not None:
        given = given | np.isin(levels[-1].patch, np.setdiff1d(levels[-1].patch[given], [-1]))
    if given.all():
        return None
    far = _farthest(levels[-1].surface.points, given) if levels[-1].free.all() else None
    for rung, level in enumerate(levels):
        owner, count = ladder.owners[rung], len(level.mass)
        level.fixed = np.where(np.bincount(owner, given, minlength=count) > 0, PATCH, -1)
        if far is not None and level.fixed[owner[far]] < 0:
            level.fixed[owner[far]] = REST  # a closed form has to keep an edge somewhere
        if (level.fixed == PATCH).all() or (far is not None and level.fixed[owner[far]] == PATCH):
            continue  # too coarse for what is left
        if fields is None:
            fields = from_labels(level, np.where(level.fixed == PATCH, PATCH, REST))
        end = descend(level, fields, thrift, energy, np.array([weight, 0.0]), STEPS)
        fields = end.fields if rung == len(levels) - 1 else ladder.lift(end.fields, rung)
    level = levels[-1]
    region = split_components(level.surface, end.cut.labels)
    held = np.isin(region, region[given])
    return recut(level.surface, end.cut, np.where((end.cut.labels == PATCH) & held, PATCH, REST))


def _farthest(points, given):
    return int(np.argmax(cKDTree(points[given]).query(points)[0]))


def through_faces(level, cut, metric):
    """(Network cut along the patch's border, (t,) bool: triangles in the patch)."""
    network = cut_through(level, cut, metric)
    n = len(level.surface.points)
    corner = network.surface.triangles
    corner = corner[np.arange(len(corner)), (corner < n).argmax(axis=1)]  # every triangle has a point of the form
    return network, cut.labels[corner] == PATCH


def along_edges(level, cut, polygon, diagonal, given, metric):
    """The same with whole faces: polygon (t,) each triangle's face, diagonal (e,) bool: edges within faces, given (t,) bool:
    triangles that the patch holds."""
    surface = Surface(level.surface.points * metric, level.surface.triangles)
    gap = np.abs(redistance(level, cut, 2)).min(axis=1) * metric
    fixed = np.unique(polygon[given])
    labels = face_labels(level, cut, polygon)
    labels[fixed] = PATCH
    labels = shortened(surface, labels, polygon, corridor(surface, ~diagonal, level.price, gap)[0], fixed)[polygon]
    a, b = surface.edge_triangles.T
    network = Network(surface, ~surface.open_edges & (labels[a] != labels[b]), np.arange(len(labels)))
    piece = network.pieces[1]
    return network, (labels == PATCH) & np.isin(piece, piece[given])
