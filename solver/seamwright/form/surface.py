"""Triangle surface with edge tables: what every stage stands on.

Plain arrays, built once by sorting (no Python loop over faces); everything derived is cached.
"""

from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components


class Surface:
    """Oriented triangle mesh whose edges have one or two triangles.

    points (n, 3) float, metres; triangles (m, 3) int, counter-clockwise seen from outside.
    The caller vouches for the mesh (see `form.mend`); nothing is repaired here.
    """

    def __init__(self, points, triangles):
        self.points = np.ascontiguousarray(points, dtype=float)
        self.triangles = np.ascontiguousarray(triangles, dtype=np.int64)

    @cached_property
    def _edge_tables(self):
        n = len(self.points)
        tail = self.triangles.ravel()
        head = np.roll(self.triangles, -1, axis=1).ravel()
        key = np.minimum(tail, head) * n + np.maximum(tail, head)
        unique, inverse = np.unique(key, return_inverse=True)
        inverse = inverse.ravel()
        edges = np.column_stack([unique // n, unique % n])
        owner = np.arange(len(key)) // 3
        sides = np.full((len(unique), 2), -1, dtype=np.int64)
        forward = tail < head
        sides[inverse[forward], 0] = owner[forward]
        sides[inverse[~forward], 1] = owner[~forward]
        return edges, inverse.reshape(-1, 3), sides

    @property
    def edges(self):
        """(e, 2) point indices, smaller first, in ascending order."""
        return self._edge_tables[0]

    @property
    def triangle_edges(self):
        """(m, 3) edge index; edge k joins corner k and corner k+1 of the triangle."""
        return self._edge_tables[1]

    @property
    def edge_triangles(self):
        """(e, 2) the triangle that runs along the edge smaller to larger index, and the one against; -1 at an open edge."""
        return self._edge_tables[2]

    @cached_property
    def open_edges(self):
        """(e,) bool: edges with one triangle."""
        return (self.edge_triangles < 0).any(axis=1)

    @cached_property
    def edge_lengths(self):
        """(e,) metres."""
        return np.linalg.norm(self.points[self.edges[:, 1]] - self.points[self.edges[:, 0]], axis=1)

    @cached_property
    def area_vectors(self):
        """(m, 3) square metres: the outward normal of each triangle, as long as its area."""
        a, b, c = (self.points[self.triangles[:, k]] for k in range(3))
        return 0.5 * np.cross(b - a, c - b)

    @cached_property
    def areas(self):
        """(m,) square metres."""
        return np.linalg.norm(self.area_vectors, axis=1)

    @cached_property
    def neighbours(self):
        """csr (n, n): 1 + the edge (as a float) from each point to each point beside it."""
        a, b = self.edges.T
        number = np.arange(1.0, len(a) + 1)
        rows, columns = np.concatenate([a, b]), np.concatenate([b, a])
        return coo_matrix((np.concatenate([number, number]), (rows, columns)), shape=(len(self.points),) * 2).tocsr()

    @cached_property
    def triangle_components(self):
        """(count, (m,) component of each triangle), joined through shared edges."""
        return components_through(self, np.ones(len(self.edges), dtype=bool))

    def edge_index(self, pairs):
        """(k,) edge index of (k, 2) point pairs in either order; -1 where there is no such edge."""
        pairs = np.sort(np.asarray(pairs, dtype=np.int64).reshape(-1, 2), axis=1)
        n = len(self.points)
        keys = self.edges[:, 0] * n + self.edges[:, 1]
        wanted = pairs[:, 0] * n + pairs[:, 1]
        if not len(keys):
            return np.full(len(wanted), -1)
        place = np.minimum(np.searchsorted(keys, wanted), len(keys) - 1)
        return np.where(keys[place] == wanted, place, -1)

    @cached_property
    def euler(self):
        """Euler characteristic of the used points, edges and triangles."""
        return len(np.unique(self.triangles)) - len(self.edges) + len(self.triangles)

    @cached_property
    def boundary_loops(self):
        """List of (k,) point indices, each a closed loop with the surface on its left."""
        return walk_loops(self)


def components_through(surface, joined):
    """(count, (m,) labels): triangles connected through the edges where `joined` (e,) is true."""
    sides = surface.edge_triangles[joined & ~surface.open_edges]
    m = len(surface.triangles)
    graph = coo_matrix((np.ones(len(sides)), (sides[:, 0], sides[:, 1])), shape=(m, m))
    return connected_components(graph, directed=False)


def walk_loops(surface):
    """Boundary loops as lists of point indices, in the direction of the triangles' edges (surface on the left).

    A point that two boundary arcs share is passed by turning within its own fan of triangles, so loops never cross.
    """
    tri, table = surface.triangles, surface.triangle_edges
    open_corner = surface.open_edges[table]
    at_tri, at_corner = np.nonzero(open_corner)
    next_of = {}
    for t, k in zip(at_tri.tolist(), at_corner.tolist(), strict=True):
        # turn about the head point, triangle by triangle, until the next open edge that leaves it
        face, corner = t, (k + 1) % 3
        while not open_corner[face, corner]:
            edge = table[face, corner]
            a, b = surface.edge_triangles[edge]
            face = int(b if a == face else a)
            corner = (int(np.flatnonzero(table[face] == edge)[0]) + 1) % 3
        next_of[(t, k)] = (face, corner)
    loops, left = [], dict.fromkeys(next_of)
    while left:
        start = here = next(iter(left))
        loop = []
        while here in left:
            del left[here]
            loop.append(tri[here[0], here[1]])
            here = next_of[here]
        assert here == start
        loops.append(np.array(loop))
    return loops
