"""Darts where a piece is strained at one place: a seam from its edge to the point that asks most of the goods."""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra

from ..errors import CoverError
from ..form.measure import areas, open_points, sum_at_points
from ..seams.opened import edges_in
from .tailored import ENOUGH, Tailored

MOST = 3  # darts a piece
GAIN = 0.97  # share of the use that a dart must bring it down to
NARROWEST = 3  # edges: a shorter way to the edge makes no dart


def darted(judges, met):
    """Tailored with darts in the pieces that are beyond their limits, as long as each brings the use down."""
    for _ in range(MOST):
        beyond = [piece for piece, one in enumerate(met.judged) if one.utilisation > ENOUGH]
        trials = [_with_dart(judges, met, piece) for piece in beyond]
        found = [(piece, *trial) for piece, trial in zip(beyond, trials, strict=True) if trial is not None]
        if not found:
            break
        network = met.network.with_seams(np.concatenate([edges for _, edges, _ in found]))
        judged = list(met.judged)  # a dart divides no piece, so their numbers stay
        for piece, _, one in found:
            judged[piece] = one
        met = Tailored(network, judged)
    return met


def _with_dart(judges, met, piece):
    """(edges of the network that become the dart, Judged with it), or None where it does not help."""
    network, old = met.network, met.judged[piece]
    part, _, triangles = network.piece_surface(piece)
    edge_of = edges_in(network, part, triangles)
    way = _way_to_edge(part, _worst_point(part, old.each), network.allowed[edge_of])
    if len(way) < NARROWEST:
        return None
    edges = edge_of[part.edge_index(np.column_stack([way[:-1], way[1:]]))]
    cut = network.with_seams(edges).part_surface(triangles)[0]
    if cut.euler != 1 or len(cut.boundary_loops) != 1:
        return None
    try:
        one = judges.piece(cut)
    except CoverError:
        return None
    return (edges, one) if one.utilisation < GAIN * old.utilisation and not one.crossings else None


def _worst_point(part, each):
    """The inner point around which the triangles (t,) use most of the limits, by area."""
    area = areas(part)
    around = sum_at_points(part, np.repeat((area * each)[:, None], 3, axis=1))
    mean = around / np.maximum(sum_at_points(part, np.repeat(area[:, None], 3, axis=1)), 1e-300)
    return int(np.argmax(np.where(open_points(part), -1.0, mean)))


def _way_to_edge(part, point, allowed):
    """(q,) points of the shortest way along the allowed edges (e,) from the piece's edge to a point."""
    n = len(part.points)
    graph = coo_matrix((part.edge_lengths[allowed], tuple(part.edges[allowed].T)), shape=(n, n)).tocsr()
    gap, before = dijkstra(graph, directed=False, indices=point, return_predecessors=True)
    rim = np.flatnonzero(open_points(part))
    way = [int(rim[np.argmin(gap[rim])])]
    while before[way[-1]] >= 0:
        way.append(int(before[way[-1]]))
    return np.array(way)
