"""The network that the maker begins with: from a pattern of the same form, or from labels of its faces."""

import numpy as np

from ..form.measure import areas
from ..form.surface import Surface
from .network import Network
from .opened import opened
from .study import shares


def network_of_pattern(pieces, part_triangles):
    """The Network of Pieces on one part of a form; part_triangles (t,): the form's triangles in the part, ascending."""
    pieces = [piece for piece in pieces if np.isin(piece.source[0], part_triangles)]
    points, where = np.unique(np.concatenate([piece.points for piece in pieces]), axis=0, return_inverse=True)
    first = np.cumsum([0] + [len(piece.points) for piece in pieces])
    where = where.ravel()
    triangles = np.concatenate([where[piece.triangles + start] for piece, start in zip(pieces, first, strict=False)])
    surface = Surface(points, triangles)
    seam = np.zeros(len(surface.edges), dtype=bool)
    for piece, start in zip(pieces, first, strict=False):
        outline = where[piece.outline + start]
        seam[surface.edge_index(np.column_stack([outline, np.roll(outline, -1)]))] = True
    source = np.searchsorted(part_triangles, np.concatenate([piece.source for piece in pieces]))
    return Network(surface, seam & ~surface.open_edges, source)


def network_of_labels(surface, labels, allowed):
    """The Network of triangle labels (t,) on a Surface, opened to disks along edges where `allowed` (e,) is true."""
    a, b = surface.edge_triangles.T
    return opened(Network(surface, ~surface.open_edges & (labels[a] != labels[b]), np.arange(len(labels))), allowed)


def triangle_labels(network, count):
    """(count,) for each triangle that a Network was cut from the piece that has most of it."""
    pieces, piece = network.pieces
    area = np.bincount(network.source * pieces + piece, areas(network.surface), minlength=count * pieces)
    return area.reshape(count, pieces).argmax(axis=1)


def point_shares(surface, network, factor):
    """(n, K) share that every piece of a Network has in the area around each point of the Surface it lies on.

    factor: lengths on the Surface over lengths of the Network.
    """
    count, piece = network.pieces
    weight = (areas(network.surface) / 3)[:, None] * shares(surface, network, factor).sum(axis=1)
    share = np.zeros((len(surface.points), count))
    np.add.at(share, (surface.triangles[network.source].ravel(), np.repeat(piece, 3)), weight.ravel())
    return share / share.sum(axis=1, keepdims=True)
