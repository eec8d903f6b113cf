"""Pieces made of several regions: the pairs of regions between which there is no seam, kept true while labels change.

A dart lies between two regions of one piece and ends where a third one begins that is of that piece too (see `cut`). As all
three have fields like any region, the end slides with the flow, and the dart is gone when the two regions part.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_matrix, csr_matrix
from scipy.sparse.csgraph import connected_components

from .topology import regions


@dataclass
class Panels:
    """The pieces of labels (n,) with uncut (K, K): piece (K,) number of each region's; disk (P,) bool: whether it is one."""

    piece: np.ndarray
    disk: np.ndarray


def panels(surface, labels, uncut):
    """Panels of labels whose regions are connected.

    Points, edges that no seam crosses and faces that no seam enters carry a piece's topology.
    """
    ends, corner = labels[surface.edges], labels[surface.triangles]
    same = uncut | np.eye(len(uncut), dtype=bool)
    kept = ends[same[ends[:, 0], ends[:, 1]]]
    beside = np.zeros(uncut.shape)
    beside[tuple(kept.T)] = 1
    count, piece = connected_components(csr_matrix(beside), directed=False)
    clear = same[corner, corner[:, [1, 2, 0]]].all(axis=1)
    euler = np.bincount(piece[labels], minlength=count) - np.bincount(piece[kept[:, 0]], minlength=count)
    return Panels(piece, euler + np.bincount(piece[corner[clear, 0]], minlength=count) == 1)


def attached(surface, cut):
    """(n,) labels of a Cut with darts without the bits of seam that hang together with neither the rest nor an open edge.

    Both sides of such a bit go to the region that it ends at.
    """
    labels, number = cut.labels.copy(), len(surface.edges)
    links = [cut.two.edges, cut.three.edges[:, :2], cut.three.edges[:, 1:]]
    graph = coo_matrix((np.ones(sum(map(len, links))), tuple(np.concatenate(links).T)), shape=(number, number))
    bit = connected_components(graph, directed=False)[1]
    ends = surface.edges[cut.edge]
    sewn = cut.edge[~cut.uncut[tuple(labels[ends].T)]]
    size = np.bincount(bit[sewn], minlength=number)
    size[bit[sewn[surface.open_edges[sewn]]]] = number
    largest = size.max(initial=0)
    for face, edge, corner in zip(cut.end.face, cut.end.edges[:, 0], cut.end.corners, strict=True):
        if size[bit[edge]] < largest:
            labels[surface.edges[sewn[bit[sewn] == bit[edge]]]] = cut.labels[surface.triangles[face, corner[2]]]
    return labels


def carried(level, uncut, before, labels):
    """(K', K') the pairs of one piece of labels (n,) that came from others, `before` (n,)."""
    count = int(labels.max()) + 1
    votes = np.bincount(labels * len(uncut) + before, level.mass, count * len(uncut)).reshape(count, -1)
    origin = votes.argmax(axis=1)
    return uncut[np.ix_(origin, origin)]


def fused(level, labels, uncut):
    """(labels, uncut or None) in which every piece is a disk and has no more regions than its darts need.

    A piece that is no disk loses its darts, or where that does not mend it falls into its regions. Two regions of a piece
    are one where they are a disk together and every neighbour of both is to both the same.
    """
    for twins in level.symmetry.partners(labels, len(uncut)) if level.symmetry is not None else ():
        uncut = uncut | uncut[np.ix_(twins, twins)]
    for mended in (True, False):
        found = panels(level.surface, labels, uncut)
        broken = ~found.disk[found.piece]
        together = broken[:, None] & (found.piece[:, None] == found.piece)
        uncut = np.where(together, mended, uncut) & ~np.eye(len(uncut), dtype=bool)
    while uncut.any():
        tables = regions(level, labels)
        near = np.zeros_like(uncut)
        near[tuple(tables.pairs.T)] = near[tuple(tables.pairs[:, ::-1].T)] = True
        needed = near & ~uncut
        alike = [uncut[i, j] and euler == 1 and (needed[i] == needed[j])[near[i] & near[j]].all()
                 for (i, j), euler in zip(tables.pairs, tables.pair_euler, strict=True)]
        if not any(alike):
            return labels, uncut
        i, j = tables.pairs[alike.index(True)]
        uncut[i] = np.where(near[i], uncut[i], uncut[j])
        uncut[i, i] = False
        uncut[:, i] = uncut[i]
        labels, uncut = np.where(labels == j, i, labels), np.delete(np.delete(uncut, j, axis=0), j, axis=1)
        labels = labels - (labels > j)
    return labels, None
