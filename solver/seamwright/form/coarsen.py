"""A coarse proxy of a form: the dual of a Voronoi partition of its points, refined until its topology is the form's."""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import csr_matrix
from scipy.sparse.csgraph import connected_components, dijkstra

from .measure import open_points, total_area, vertex_areas, vertex_normals
from .nearest import feet_on_planes
from .surface import Surface

CREASE = 1.0
"""How many cell widths a turn of the normal by one radian adds to the distance: cells then end at creases."""
SWEEPS = 2
"""Rounds of moving each seed to the middle of its cell (Lloyd 1982)."""


@dataclass
class Coarse:
    """surface: the coarse Surface, N points, each a point of the fine one; owner (n,): coarse point of each fine point;
    seeds (N,): the fine point each coarse one is."""

    surface: Surface
    owner: np.ndarray
    seeds: np.ndarray

    def gather(self, values):
        """(N,) or (N, d): sums over each coarse point's cell of fine values (n,) or (n, d)."""
        values = np.asarray(values)
        if values.ndim == 1:
            return np.bincount(self.owner, values, len(self.seeds))
        return np.column_stack([self.gather(column) for column in values.T])

    def interpolation(self, points):
        """(n, N) csr that carries values at the coarse points to the fine points (n, 3): linear on the nearest of the
        triangles around each point's own coarse point, so never from another sheet of the form."""
        triangles, count = self.surface.triangles, len(self.seeds)
        corner = np.argsort(triangles.ravel(), kind="stable")
        around = np.bincount(triangles.ravel(), minlength=count)
        many = around[self.owner]
        first = np.cumsum(many) - many
        row = np.repeat(np.arange(len(points)), many)
        at = (np.cumsum(around) - around)[self.owner[row]] + np.arange(len(row)) - first[row]
        chosen = triangles[corner[at] // 3]
        share = np.maximum(feet_on_planes(points[row], self.surface.points[chosen])[0], 0)  # drawn in to the triangle
        share /= share.sum(axis=1, keepdims=True)
        off = np.linalg.norm(points[row] - np.einsum("kc,kcx->kx", share, self.surface.points[chosen]), axis=1)
        best = np.flatnonzero(off == np.minimum.reduceat(off, first)[row])
        best = best[np.diff(row[best], prepend=-1) > 0]
        ends = np.arange(0, share[best].size + 1, 3)
        return csr_matrix((share[best].ravel(), chosen[best].ravel(), ends), shape=(len(points), count))


def coarsen(surface, count, seed=0):
    """Coarse with about `count` points for a surface, or None where that takes half its points or more.

    Cells grow along the edges from seeds spread evenly in place and direction; three cells that meet in a triangle make a
    coarse triangle. Where a cell is no disk, or two cells meet other than in one stretch (the closed ball property of
    Edelsbrunner and Shah 1997, which makes the dual a copy of the surface), seeds are added. Thin parts thus come out finer
    than asked. Cells that reach an open edge have their seed on it, so the coarse surface does not shrink.
    """
    n = len(surface.points)
    if 2 * count >= n:
        return None
    width = np.sqrt(total_area(surface) / count)
    graph = distances_along_edges(surface, CREASE * width)
    seeds = one_a_part(graph, spread_seeds(surface, count, width, seed))
    mass, rim = vertex_areas(surface), open_points(surface)
    for _ in range(SWEEPS):
        owner, _ = grow(graph, seeds)
        seeds = middles(surface.points, mass, rim, owner)
    owner, reach = grow(graph, seeds)
    while True:
        faulty, triangles = judge(surface, owner, len(seeds))
        if not len(faulty):
            break
        new = farthest(owner, reach, faulty)
        if not len(new) or 2 * (len(seeds) + len(new)) >= n:
            return None
        owner, reach = grow_more(graph, owner, reach, new, len(seeds))
        seeds = np.concatenate([seeds, new])
    coarse = Surface(surface.points[seeds], triangles)
    same = coarse.euler == surface.euler and len(coarse.boundary_loops) == len(surface.boundary_loops)
    return Coarse(coarse, owner, seeds) if same else None


def distances_along_edges(surface, crease):
    """(n, n) csr: length of each edge, longer by `crease` metres for each radian (in chord) that the normal turns."""
    n, (a, b) = len(surface.points), surface.edges.T
    normals = vertex_normals(surface)
    length = surface.edge_lengths + crease * np.linalg.norm(normals[b] - normals[a], axis=1)
    length = np.maximum(length, 1e-12 * surface.edge_lengths.max())
    return csr_matrix((np.concatenate([length, length]), (np.concatenate([a, b]), np.concatenate([b, a]))), shape=(n, n))


def spread_seeds(surface, count, width, seed):
    """About `count` points, one from each box of a grid over place and normal, the box sized by bisection."""
    place = np.column_stack([surface.points - surface.points.min(axis=0), width * CREASE * (vertex_normals(surface) + 1)])
    place = place + np.random.default_rng(seed).random(6) * width
    low, high = 0.25 * width, 8 * width
    for _ in range(7):
        size = np.sqrt(low * high)
        first = first_in_boxes(place, size)
        if len(first) > count:
            low = size
        else:
            high = size
        if abs(len(first) - count) < 0.04 * count:
            break
    return first


def one_a_part(graph, seeds):
    """The seeds, ascending, with the first point of every part that has none."""
    part = connected_components(graph, directed=False)[1]
    first = np.unique(part, return_index=True)[1]
    return np.union1d(seeds, first[~np.isin(part[first], part[seeds])])


def first_in_boxes(place, size):
    """(k,) ascending: the first row in every box of the grid."""
    cell = np.floor(place / size).astype(np.int64)
    key = np.zeros(len(cell), dtype=np.int64)
    for column in cell.T:
        key = key * (column.max() + 1) + column
    return np.sort(np.unique(key, return_index=True)[1])


def grow(graph, seeds):
    """(owner (n,), distance (n,)) of the nearest seed along the graph; ties go the same way every time."""
    reach, _, source = dijkstra(graph, directed=True, indices=seeds, min_only=True, return_predecessors=True)
    number = np.empty(graph.shape[0], dtype=np.int64)
    number[seeds] = np.arange(len(seeds))
    return number[source], reach


def grow_more(graph, owner, reach, new, first):
    """Owner and distance after adding seeds `new`, numbered from `first`: points nearer to one of them change hands."""
    limit = reach[np.isin(owner, owner[new])].max()
    near, _, source = dijkstra(graph, directed=True, indices=new, min_only=True, return_predecessors=True, limit=limit)
    number = np.zeros(graph.shape[0], dtype=np.int64)
    number[new] = np.arange(len(new)) + first
    nearer = near < reach
    nearer[new] = True
    owner, reach = owner.copy(), np.where(nearer, near, reach)
    owner[nearer] = number[source[nearer]]
    return owner, reach


def middles(points, mass, rim, owner):
    """(N,) the point of each cell nearest to the cell's centre of area, among those on the rim where it reaches the rim."""
    on_rim = (np.bincount(owner, rim) > 0)[owner]
    mass = np.where(on_rim & ~rim, 0.0, mass)
    centre = np.column_stack([np.bincount(owner, mass * axis) for axis in points.T]) / np.bincount(owner, mass)[:, None]
    off = np.linalg.norm(points - centre[owner], axis=1)
    return best_of_cell(owner, np.where(on_rim & ~rim, np.inf, off))


def best_of_cell(owner, off):
    """(N,) the point with the least `off` in each cell, the first of equals."""
    order = np.lexsort([off, owner])
    return order[np.searchsorted(owner[order], np.arange(int(owner.max()) + 1))]


def farthest(owner, reach, faulty):
    """Points to seed: in each faulty cell the one farthest from its seed; cells of one point have none."""
    chosen = best_of_cell(owner, -reach)[faulty]
    return chosen[reach[chosen] > 0]


def judge(surface, owner, count):
    """(faulty cells, coarse triangles (t, 3)): cells that break the closed ball property, and the dual as it stands."""
    labels = owner[surface.triangles]
    differ = labels != np.roll(labels, -1, axis=1)
    kinds = differ.sum(axis=1)
    junctions = labels[kinds == 3]
    faulty = np.bincount(junctions.ravel(), minlength=count) == 0  # a part of few cells has no coarse triangle there

    # a cell is a disk when its own points, edges and triangles count to 1 (it is connected by growth)
    ends = owner[surface.edges]
    mixed = ends[:, 0] != ends[:, 1]
    euler = (np.bincount(owner, minlength=count) - np.bincount(ends[~mixed, 0], minlength=count)
             + np.bincount(labels[kinds == 0, 0], minlength=count))
    faulty |= euler != 1

    # two cells meet in one stretch: of its edges and two-cell triangles, one more edge than triangles
    pair = pair_key(ends[mixed], count)
    pairs, where, edge_count = np.unique(pair, return_inverse=True, return_counts=True)
    band = np.flatnonzero(kinds == 2)
    band_edges = surface.triangle_edges[band, differ[band].argmax(axis=1)]
    rank = np.full(len(surface.edges), -1)
    rank[mixed] = where.ravel()
    stretches = edge_count - np.bincount(rank[band_edges], minlength=len(pairs))
    meets = surface.triangle_edges[kinds == 3]
    corners = np.bincount(rank[meets].ravel(), minlength=len(pairs))
    odd = pairs[(stretches != 1) | (corners == 0) | (corners > 2)]
    faulty[odd // count] = faulty[odd % count] = True

    # no two junctions of the same three cells
    key = np.sort(junctions, axis=1)
    order = np.lexsort(key.T)
    again = (key[order[1:]] == key[order[:-1]]).all(axis=1)
    faulty[key[order[1:][again]].ravel()] = True

    # a cell reaches the open edge at most once: two changes of cell along it
    changes = np.bincount(ends[mixed & surface.open_edges].ravel(), minlength=count)
    faulty |= changes > 2
    return np.flatnonzero(faulty), junctions


def pair_key(pairs, count):
    """(k,) one number for each unordered pair."""
    return pairs.min(axis=1) * count + pairs.max(axis=1)
