"""The network that the maker begins with: from a pattern of the same form, or from labels of its faces."""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra

from ..form.measure import areas
from ..form.surface import Surface
from .fields import smoothed
from .network import Network
from .opened import edges_in, opened
from .study import shares

NEAR = 0.8  # how far a point of a dart's side is from it at most, as a share of its way to the other side, around the end


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


def regions_of(level, network, factor):
    """(labels (n,) of the points of the Level that a Network lies on, uncut (K, K) as in `Cut` or None without darts).

    A region is a piece; along every dart of a piece each side is one of its own, as far as it is much nearer than the other.
    factor: lengths on the Level over lengths of the Network.
    """
    region, uncut = _with_sides(network)
    labels = smoothed(level, point_shares(level.surface, network, factor, region), 1.0).argmax(axis=1)
    if uncut is None:
        return labels, None
    kept, labels = np.unique(labels, return_inverse=True)
    return labels.ravel(), uncut[np.ix_(kept, kept)]


def _with_sides(network):
    """(region (m,) of every triangle of a Network, uncut (K, K) or None): its pieces and the sides of their darts."""
    count, piece = network.pieces
    surface, region, opposite = network.surface, piece.copy(), []
    sides = piece[surface.edge_triangles]
    dart = network.seam & ~surface.open_edges & (sides[:, 0] == sides[:, 1])
    if not dart.any():
        return piece, None
    node = np.bincount(surface.edges[network.seam].ravel(), minlength=len(surface.points)) != 2
    of_piece = list(range(count))
    for owner in np.unique(sides[dart, 0]).tolist():
        part, points, triangles = network.piece_surface(owner)
        loop = part.boundary_loops[0]
        edge = edges_in(network, part, triangles)[part.edge_index(np.column_stack([loop, np.roll(loop, -1)]))]
        run = np.cumsum(node[points[loop]] | (dart[edge] != dart[np.roll(edge, 1)])) - 1
        run[run < 0] = run.max()
        runs = [run == number for number in np.unique(run[dart[edge]])]
        across = np.array([[np.isin(edge[one], edge[other]).any() and one is not other for other in runs] for one in runs])
        near = _nearer(part, [np.append(loop[one], np.roll(loop, -1)[one]) for one in runs], across)
        at = near[part.triangles].max(axis=1)  # a triangle beside a dart's end is on a side
        region[triangles[at >= 0]] = len(of_piece) + at[at >= 0]
        opposite += [(len(of_piece) + i, len(of_piece) + j) for i, j in np.argwhere(across)]
        of_piece += [owner] * len(runs)
    of_piece = np.array(of_piece)
    uncut = of_piece[:, None] == of_piece
    uncut[tuple(np.array(opposite).reshape(-1, 2).T)] = False
    return region, uncut & ~np.eye(len(uncut), dtype=bool)


def _nearer(part, runs, across):
    """(n,) for each point of a Surface the run of points (k,) that is nearest, if so much nearer than all across from it,
    else -1; across (r, r) bool."""
    graph = coo_matrix((part.edge_lengths, tuple(part.edges.T)), shape=(len(part.points),) * 2).tocsr()
    gap = np.array([dijkstra(graph, directed=False, indices=np.unique(run), min_only=True) for run in runs])
    other = np.array([gap[row].min(axis=0, initial=np.inf) for row in across])
    gap[gap >= NEAR * other] = np.inf
    return np.where(np.isfinite(gap).any(axis=0), gap.argmin(axis=0), -1)


def point_shares(surface, network, factor, region):
    """(n, K) share that every region of a Network, region (m,) of its triangles, has in the area around each point of the
    Surface it lies on.

    factor: lengths on the Surface over lengths of the Network.
    """
    count = int(region.max()) + 1
    weight = (areas(network.surface) / 3)[:, None] * shares(surface, network, factor).sum(axis=1)
    share = np.zeros((len(surface.points), count))
    np.add.at(share, (surface.triangles[network.source].ravel(), np.repeat(region, 3)), weight.ravel())
    return share / share.sum(axis=1, keepdims=True)
