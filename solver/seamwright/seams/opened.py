"""Cut pieces open until every one is a disk, along the shortest edges that do it.

Tree and cotree (Erickson, Whittlesey 2005): a shortest-path tree from the piece's boundary, a spanning tree of the
triangles over the edges left, and what is in neither is cut, with its ways back to the boundary.
"""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra, minimum_spanning_tree


def opened(network, allowed=None):
    """The Network with seams added so that every piece is a disk. allowed (e,) bool: edges that may become seams, by
    default those that the network allows."""
    allowed = network.allowed if allowed is None else allowed
    extra = []
    for piece in range(network.pieces[0]):
        part, points, triangles = network.piece_surface(piece)
        if part.euler == 1 and len(part.boundary_loops) == 1:
            continue
        edge_of = edges_in(network, part, triangles)
        extra.append(edge_of[_cut_graph(part, allowed[edge_of])])
    return network.with_seams(np.concatenate(extra)) if extra else network


def edges_in(network, part, triangles):
    """(e,) the network's edge of every edge of a part made of its triangles (t,)."""
    edge_of = np.empty(len(part.edges), dtype=np.int64)
    edge_of[part.triangle_edges] = network.surface.triangle_edges[triangles]
    return edge_of


def _cut_graph(part, allowed):
    """Edges of a connected surface whose cutting leaves a disk."""
    n = len(part.points)
    lengths = part.edge_lengths
    usable = allowed & ~part.open_edges
    roots = np.unique(part.edges[part.open_edges])
    closed = not len(roots)
    if closed:
        roots = part.edges[usable][:1, 0] if usable.any() else np.array([0])
    graph = coo_matrix((lengths[usable], tuple(part.edges[usable].T)), shape=(n, n)).tocsr()
    gap, before, _ = dijkstra(graph, directed=False, indices=roots, min_only=True, return_predecessors=True)
    if closed and part.euler == 2:  # a sphere: one slit between two far points
        far = _farthest(gap)
        gap, before = dijkstra(graph, directed=False, indices=far, return_predecessors=True)
        return _way_back(part, before, _farthest(gap))
    tree = np.zeros(len(part.edges), dtype=bool)
    reached = np.flatnonzero(before >= 0)
    tree[part.edge_index(np.column_stack([reached, before[reached]]))] = True
    dual = np.flatnonzero(~tree & ~part.open_edges)
    way = np.where(allowed[dual], gap[part.edges[dual]].sum(axis=1) + lengths[dual], 0)
    weight = np.where(allowed[dual], way.max() + 1 - way, 0) + 1e-9  # cross what would be longest to cut; never cut the rest
    weight[allowed[dual]] += 1
    crossed = _spanning(part, dual, weight)
    left = dual[~crossed]
    cut = [np.array(left)]
    for point in np.unique(part.edges[left]):
        cut.append(_way_back(part, before, int(point)))
    return np.unique(np.concatenate(cut))


def _farthest(gap):
    """The point at the largest distance that can be reached."""
    return int(np.argmax(np.where(np.isfinite(gap), gap, -1)))


def _spanning(part, dual, weight):
    """(k,) bool: which of the edges `dual` a least spanning tree of the triangles crosses."""
    m = len(part.triangles)
    a, b = np.sort(part.edge_triangles[dual], axis=1).T
    order = np.lexsort((weight, b, a))  # of two triangles that share two edges only the lighter counts
    first = np.ones(len(order), dtype=bool)
    first[1:] = (a[order][1:] != a[order][:-1]) | (b[order][1:] != b[order][:-1])
    keep = order[first]
    tree = minimum_spanning_tree(coo_matrix((weight[keep], (a[keep], b[keep])), shape=(m, m)).tocsr()).tocoo()
    at = a[keep] * m + b[keep]
    place = np.searchsorted(at, np.minimum(tree.row, tree.col).astype(np.int64) * m + np.maximum(tree.row, tree.col))
    crossed = np.zeros(len(dual), dtype=bool)
    crossed[keep[place]] = True
    return crossed


def _way_back(part, before, point):
    path = [point]
    while before[path[-1]] >= 0:
        path.append(int(before[path[-1]]))
    return part.edge_index(np.column_stack([path[:-1], path[1:]])) if len(path) > 1 else np.zeros(0, dtype=np.int64)




def halves_border(part, pair, face=None):
    """Edges (k,) of a connected surface that part its triangles by which of a pair of its points they are nearer to.

    Distance is along edges. Triangles of one face (t,), where that is given, go together. Empty where one half would have
    no triangle.
    """
    n = len(part.points)
    graph = coo_matrix((part.edge_lengths, tuple(part.edges.T)), shape=(n, n)).tocsr()
    gaps = dijkstra(graph, directed=False, indices=pair)
    ahead = (gaps[0] - gaps[1])[part.triangles].mean(axis=1)
    if face is not None:
        ahead = np.bincount(face, ahead)[face]
    near = ahead > 0
    sides = part.edge_triangles
    return np.flatnonzero(~part.open_edges & (near[sides[:, 0]] != near[sides[:, 1]]))
