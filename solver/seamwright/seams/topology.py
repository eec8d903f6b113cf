"""Regions of a level's points as a combinatorial thing: components, disks, splits and merges.

The points of one label, with the edges and faces all of whose corners bear it, carry the region's topology (the cut region
retracts onto them): a connected region is a disk exactly when points - edges + faces = 1.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_matrix, csr_matrix
from scipy.sparse.csgraph import connected_components, dijkstra

from .whole import united

CELLS = 8  # cells that a region which is no disk is first cut into
MOST_CELLS = 128


def split_components(surface, labels):
    """(n,) labels renumbered 0..K-1 so that every connected region has its own, ordered by its first point."""
    beside = surface.neighbours
    same = np.repeat(labels, np.diff(beside.indptr)) == labels[beside.indices]
    before = np.concatenate([[0], np.cumsum(same)])[beside.indptr]
    graph = csr_matrix((beside.data[same], beside.indices[same], before), shape=beside.shape)
    component = connected_components(graph, connection="strong")[1]  # of a symmetric graph the same, and sooner
    first = np.unique(component, return_index=True)[1]
    number = np.empty(len(first), dtype=np.int64)
    number[np.argsort(first, kind="stable")] = np.arange(len(first))
    return number[component]


@dataclass
class Regions:
    """K regions: euler (K,); pairs (q, 2) neighbours; border (q,) length; pair_euler (q,) of their union; area (K,)."""

    euler: np.ndarray
    pairs: np.ndarray
    border: np.ndarray
    pair_euler: np.ndarray
    area: np.ndarray


def regions(level, labels):
    """The Regions of connected labels 0..K-1."""
    surface, count = level.surface, int(labels.max()) + 1
    a, b = labels[surface.edges].T
    inside = a == b
    corner = labels[surface.triangles]
    like = corner == corner[:, [1, 2, 0]]
    whole = like[:, 0] & like[:, 1]
    euler = (
        np.bincount(labels, minlength=count)
        - np.bincount(a[inside], minlength=count)
        + np.bincount(corner[whole, 0], minlength=count)
    )
    a, b = a[~inside], b[~inside]
    keys, which = np.unique(np.minimum(a, b) * count + np.maximum(a, b), return_inverse=True)
    two = np.flatnonzero(~whole & like.any(axis=1))
    shared = np.searchsorted(keys, corner[two].min(axis=1) * count + corner[two].max(axis=1))
    pairs = np.column_stack([keys // count, keys % count])
    edges_across = np.bincount(which.ravel(), minlength=len(keys))
    faces_across = np.bincount(shared, minlength=len(keys))
    border = np.bincount(shared, 0.7 * np.sqrt(level.areas[two]), minlength=len(keys))  # a face's cut is about this long
    pair_euler = euler[pairs[:, 0]] + euler[pairs[:, 1]] - edges_across + faces_across
    return Regions(euler, pairs, border, pair_euler, np.bincount(labels, level.mass, minlength=count))


def merged(labels, i, j):
    """Labels with region j given to region i, renumbered without a gap."""
    labels = np.where(labels == j, i, labels)
    return labels - (labels > j)


def make_disks(level, labels):
    """(n,) labels whose regions are all disks: what is none falls into cells, cells merge again while disks stay disks."""
    labels = split_components(level.surface, labels)
    for first in [np.argmax(labels == region) for region in np.flatnonzero(regions(level, labels).euler != 1)]:
        inside = np.flatnonzero(labels == labels[first])  # regions change their numbers meanwhile, points do not
        cells = CELLS
        while True:
            trial = labels.copy()
            trial[inside] = labels.max() + 1 + voronoi(level, min(cells, len(inside)), inside)
            trial = split_components(level.surface, trial)
            parts = np.unique(trial[inside])
            if (regions(level, trial).euler[parts] == 1).all() or cells > MOST_CELLS:
                break
            cells *= 2
        labels = _merge_cells(level, trial, set(parts.tolist()))
    return split_components(level.surface, labels)


def _merge_cells(level, labels, parts):
    """Merge the cells `parts`, longest shared border first, while the union is a disk."""
    cell = np.isin(labels, sorted(parts))
    while True:
        tables = regions(level, labels)
        ours = np.zeros(int(labels.max()) + 1, dtype=bool)
        ours[np.unique(labels[cell])] = True
        fit = ours[tables.pairs].all(axis=1) & (tables.pair_euler == 1)
        if not fit.any():
            return labels
        # the border against the smaller cell's size: round cells first, or a sleeve is swallowed ring by ring
        size = np.sqrt(tables.area[tables.pairs].min(axis=1))
        best = np.argmax(np.where(fit, tables.border / np.maximum(size, 1e-12), -1))
        labels = merged(labels, *tables.pairs[best])


def absorb(level, labels, smallest):
    """Give every region under the area `smallest` to the neighbour with the longest border whose union is a disk."""
    while int(labels.max()) > 0:
        tables = regions(level, labels)
        small = tables.area < smallest
        fit = small[tables.pairs].any(axis=1) & (tables.pair_euler == 1)
        if not fit.any():
            return labels
        area = np.where(small[tables.pairs], tables.area[tables.pairs], np.inf).min(axis=1)
        order = np.lexsort((-tables.border, np.where(fit, area, np.inf)))
        labels = merged(labels, *tables.pairs[order[0]])
    return labels


def voronoi(level, count, inside=None):
    """(k,) cell of each point of `inside` (all by default): farthest points by distance along edges, two Lloyd sweeps."""
    inside = np.arange(len(level.surface.points)) if inside is None else inside
    graph = graph_within(level, inside)
    points, mass = level.surface.points[inside], np.maximum(level.mass[inside], 1e-30)
    middle = (points * mass[:, None]).sum(0) / mass.sum()
    seeds = [int(np.argmax(np.linalg.norm(points - middle, axis=1)))]
    gap = _distance(graph, seeds)[0]
    while len(seeds) < count and gap.max() > 1e-6 * level.edge_length:  # the points of a patch are as good as one
        seeds.append(int(np.argmax(gap)))
        gap = np.minimum(gap, _distance(graph, seeds[-1:])[0])
    for _ in range(2):
        owner = _nearest(level, inside, graph, seeds)
        total = np.maximum(np.bincount(owner, mass), 1e-300)  # a seed whose patch is another's has no points
        pull = np.column_stack([np.bincount(owner, mass * points[:, k]) for k in range(3)])
        middle = pull / total[:, None]
        off = np.linalg.norm(points - middle[owner], axis=1)
        order = np.lexsort((off, owner))
        seeds = order[np.unique(owner[order], return_index=True)[1]].tolist()
    return _nearest(level, inside, graph, seeds)


def nearer(level, inside, places):
    """(k,) which of the places (c, 3) each point of `inside` is nearest to, by distance along edges."""
    points = level.surface.points[inside]
    seeds = [int(np.argmin(np.linalg.norm(points - place, axis=1))) for place in places]
    return _nearest(level, inside, graph_within(level, inside), seeds)


def through(level, inside, peak):
    """(k,) 0 or 1: `inside` in halves by the plane through the point `peak` and the region's middle, across its width."""
    points, mass = level.surface.points[inside], np.maximum(level.mass[inside], 1e-30)
    off = points - level.surface.points[peak]
    middle = (off * mass[:, None]).sum(axis=0) / mass.sum()
    away = off - middle
    along = middle / max(np.linalg.norm(middle), 1e-30)
    across = away - np.outer(away @ along, along)
    normal = np.linalg.eigh((across * mass[:, None]).T @ across)[1][:, -1]
    return (off @ normal > 0).astype(np.int64)


def graph_within(level, inside):
    """(k, k) csr of edge lengths among the points `inside`, both ways."""
    surface = level.surface
    number = np.full(len(surface.points), -1)
    number[inside] = np.arange(len(inside))
    rows, columns = number[surface.edges].T
    kept = (rows >= 0) & (columns >= 0)
    rows, columns, lengths = rows[kept], columns[kept], surface.edge_lengths[kept]
    if level.patch is not None:  # points of one patch are as good as one
        together = level.patch[surface.edges[kept]]
        lengths = np.where((together[:, 0] == together[:, 1]) & (together[:, 0] >= 0), 1e-9 * lengths, lengths)
    both = (np.concatenate([rows, columns]), np.concatenate([columns, rows]))
    return coo_matrix((np.concatenate([lengths, lengths]), both), shape=(len(inside),) * 2).tocsr()


def _nearest(level, inside, graph, seeds):
    """(k,) index of the seed nearest to each point of `inside`, one for every patch."""
    owner = _distance(graph, seeds)[1]
    return owner if level.patch is None else united(owner, level.patch[inside], level.mass[inside])


def _distance(graph, seeds):
    """(distance, index of the nearest seed) along edges; points no seed reaches go to seed 0 at a large distance."""
    gap, _, source = dijkstra(graph, indices=seeds, min_only=True, return_predecessors=True)
    place = np.zeros(graph.shape[0], dtype=np.int64)
    place[seeds] = np.arange(len(seeds))
    return np.where(np.isfinite(gap), gap, 1e6), np.where(source >= 0, place[np.maximum(source, 0)], 0)
