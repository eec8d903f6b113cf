"""Per-region fields: signed distances from each region's border, so that every region can move against every other."""

from dataclasses import replace

import numpy as np
from scipy.sparse import csr_matrix
from scipy.sparse.csgraph import dijkstra

from .cut import cut_faces
from .nodes import seam_nodes, seam_sides

REACH = 8.0  # edge lengths beyond which a distance no longer matters within one round


def from_labels(level, labels, smooth=1.0):
    """(n, K) fields whose borders are the labels' borders, rounded by diffusion over `smooth` edge lengths."""
    return smoothed(level, (labels[:, None] == np.arange(int(labels.max()) + 1)).astype(float), smooth)


def smoothed(level, fields, smooth):
    """(n, K) fields after diffusion over `smooth` edge lengths."""
    return level.diffusion(smooth * level.edge_length).solve(level.mass[:, None] * fields)


def redistance(level, cut, count):
    """(n, K) signed distance of every point to the border of every region, positive inside; capped at REACH edge lengths.

    Exact within the cut faces (so the cut stays where it is up to second order), along edges beyond them.
    """
    n, reach = len(cut.labels), REACH * level.edge_length
    points, regions, near = [], [], []
    if cut.uncut is not None:  # borders that are no seams count like others
        cut = replace(cut, **dict(zip(("two", "three", "end"), cut_faces(level.surface, cut.labels), strict=True)))
    for kind in cut.kinds:
        nodes, whole = seam_nodes(level, cut, kind)
        a, b = nodes[:, kind.seams.T][:, :, :, None].swapaxes(0, 1)
        gap = _segment_distance(nodes[:, None, :3], a, b)  # (k, s, 3): of every seam from every corner
        around = cut.labels[whole][:, seam_sides(kind)]  # (k, s, 2)
        shape = (*gap.shape, 2)
        points.append(np.broadcast_to(whole[:, None, :, None], shape).ravel())
        regions.append(np.broadcast_to(around[:, :, None], shape).ravel())
        near.append(np.broadcast_to(gap[..., None], shape).ravel())
    fields = np.full((n, count), -reach)
    if points:
        points, regions, near = map(np.concatenate, (points, regions, near))
        order = np.lexsort((near, regions * n + points))
        points, regions, near = points[order], regions[order], near[order]
        first = np.ones(len(points), dtype=bool)
        first[1:] = (points[1:] != points[:-1]) | (regions[1:] != regions[:-1])
        points, regions, near = points[first], regions[first], np.maximum(near[first], 1e-12)
        beside = level.surface.neighbours
        lengths = level.surface.edge_lengths[beside.data.astype(np.int64) - 1]
        before = np.concatenate([beside.indptr, beside.indptr[-1] + np.cumsum(np.bincount(regions, minlength=count))])
        graph = csr_matrix((np.append(lengths, near), np.append(beside.indices, points), before), shape=(n + count,) * 2)
        gap = dijkstra(graph, indices=n + np.arange(count), limit=reach)[:, :n].T
        fields = -np.minimum(gap, reach)
    own = (np.arange(n), cut.labels)
    fields[own] = -fields[own]
    return fields


def _segment_distance(point, a, b):
    along = b - a
    share = ((point - a) * along).sum(-1) / np.maximum((along * along).sum(-1), 1e-300)
    off = point - a - np.clip(share, 0, 1)[..., None] * along
    return np.sqrt((off * off).sum(-1))
