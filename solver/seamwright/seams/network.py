"""The seam network on an explicit mesh: edges that are seams, the chains they form, the pieces they leave.

This is the state that ends up on the cutting table: slits, darts and seams that close one piece are all just seam edges.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

from ..form.measure import total_area
from ..form.surface import Surface, components_through
from .middle import middles

NEAREST = 0.1  # share of an edge that a cut keeps from its ends: less makes needles, more makes the seam zigzag


@dataclass
class Network:
    """surface: the form with the seams as edges; seam (e,) bool; source (m,) the form's triangle each triangle lies in;
    face (m,): the maker's face of each triangle where faces must stay whole, None where seams may run through them."""

    surface: Surface
    seam: np.ndarray
    source: np.ndarray
    face: np.ndarray | None = None

    @cached_property
    def allowed(self):
        """(e,) bool: edges that may be seams."""
        sides = self.surface.edge_triangles
        return self.surface.open_edges | (True if self.face is None else self.face[sides[:, 0]] != self.face[sides[:, 1]])

    @cached_property
    def pieces(self):
        """(count, (m,) piece of each triangle)."""
        return components_through(self.surface, ~self.seam)

    @cached_property
    def corner_points(self):
        """(m, 3) point of the opened surface at each corner, numbered apart on the two sides of every seam."""
        surface = self.surface
        m = len(surface.triangles)
        joined = np.flatnonzero(~self.seam & ~surface.open_edges)
        first, second = surface.edge_triangles[joined].T
        rows = np.arange(len(joined))
        k = (surface.triangle_edges[first] == joined[:, None]).argmax(axis=1)
        q = (surface.triangle_edges[second] == joined[:, None]).argmax(axis=1)
        # the edge runs corner k to k+1 in its first triangle and against that in its second
        a = np.concatenate([3 * first + k, 3 * first + (k + 1) % 3])
        b = np.concatenate([3 * second + (q + 1) % 3, 3 * second + q])
        assert len(rows) == 0 or (surface.triangles.ravel()[a] == surface.triangles.ravel()[b]).all()
        graph = coo_matrix((np.ones(len(a)), (a, b)), shape=(3 * m, 3 * m))
        return connected_components(graph, directed=False)[1].reshape(m, 3)

    def piece_surface(self, piece):
        """(Surface of one piece opened along its seams, (k,) points of the network, (t,) triangles of the network)."""
        triangles = np.flatnonzero(self.pieces[1] == piece)
        return self.part_surface(triangles)

    def part_surface(self, triangles):
        """The same for the given triangles (t,)."""
        corners = self.corner_points[triangles]
        unique, first, local = np.unique(corners, return_index=True, return_inverse=True)
        points = self.surface.triangles[triangles].ravel()[first]
        return Surface(self.surface.points[points], local.reshape(-1, 3)), points, triangles

    @cached_property
    def chains(self):
        """List of (q,) point indices: maximal runs of seam edges between their ends, junctions and the open edges.

        A closed run without a junction repeats its first point at the end.
        """
        return trace_chains(self.surface, self.seam)

    def without(self, chain):
        """The network with one chain's edges no longer seams."""
        seam = self.seam.copy()
        seam[self.surface.edge_index(np.column_stack([chain[:-1], chain[1:]]))] = False
        return replace(self, seam=seam)

    def with_seams(self, edges):
        """The network with more edges (k,) as seams."""
        seam = self.seam.copy()
        seam[edges] = True
        return replace(self, seam=seam)

    @cached_property
    def surface_area(self):
        """Square metres of the form."""
        return total_area(self.surface)

    def length(self):
        """Metres of seam."""
        return float(self.surface.edge_lengths[self.seam].sum())


def trace_chains(surface, marked, nodes=None):
    """Runs of marked edges (e,) bool as lists of points; cut at points of degree other than two, and at `nodes` (k,), by
    default the points of open edges."""
    ends = surface.edges[marked]
    n = len(surface.points)
    stop = np.bincount(ends.ravel(), minlength=n) != 2
    if nodes is None:
        stop[surface.edges[surface.open_edges].ravel()] = True
    else:
        stop[nodes] = True
    around = {}
    for index, (a, b) in enumerate(ends.tolist()):
        around.setdefault(a, []).append((b, index))
        around.setdefault(b, []).append((a, index))
    used = np.zeros(len(ends), dtype=bool)
    chains = []
    starts = [p for p in around if stop[p]] + list(around)  # what is left after the first part are closed runs
    for start in starts:
        for neighbour, index in around[start]:
            if used[index]:
                continue
            used[index] = True
            chain = [start, neighbour]
            while not stop[chain[-1]] and chain[-1] != start:
                onward = [(q, i) for q, i in around[chain[-1]] if not used[i]]
                if not onward:
                    break
                used[onward[0][1]] = True
                chain.append(onward[0][0])
            chains.append(np.array(chain))
    return chains


def cut_through(level, cut, metric):
    """(Network with the cut's seams as edges, (m,) region of each triangle): the route through faces.

    metric: metres over lengths on the level. Cuts keep NEAREST of the edge from its ends.
    """
    surface = level.surface
    place = np.clip(cut.place, NEAREST, 1 - NEAREST)
    a, b = surface.edges[cut.edge].T
    points = [surface.points, surface.points[a] + place[:, None] * (surface.points[b] - surface.points[a])]
    number = np.full(len(surface.edges), -1)
    number[cut.edge] = len(surface.points) + np.arange(len(cut.edge))
    middle = len(surface.points) + len(cut.edge) + np.arange(len(cut.three.face))
    points.append(middles(points[1][number[cut.three.edges] - len(surface.points)], NEAREST))
    keep = np.ones(len(surface.triangles), dtype=bool)
    triangles, source, segments = [], [], []
    for kind in (cut.two, cut.three):
        keep[kind.face] = False
        whole = surface.triangles[kind.face[:, None], kind.corners]
        nodes = [whole, number[kind.edges]] + ([middle[:, None]] if kind is cut.three else [])
        nodes = np.concatenate(nodes, axis=1)
        triangles += [nodes[:, row] for row in kind.table]
        source += [kind.face] * len(kind.table)
        segments += [nodes[:, pair] for pair in kind.seams]
    triangles = np.concatenate([surface.triangles[keep], *triangles])
    source = np.concatenate([np.flatnonzero(keep), *source])
    fine = Surface(np.concatenate(points) * metric, triangles)
    seam = np.zeros(len(fine.edges), dtype=bool)
    seam[fine.edge_index(np.concatenate(segments))] = True
    return Network(fine, seam, source)
