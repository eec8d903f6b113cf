"""The exact cut: where per-region fields meet, faces fall into sub-triangles that never cross a seam.

A region's field is largest where the region is; an edge whose ends differ is cut where the two fields are equal. A face
with two regions falls into three triangles, one with three regions into six around the middle of its three cuts.

Where regions are told to be one piece, their border is no seam and nothing is cut there. So a dart is a seam between two
regions that ends at a third one, which is of one piece with both: it ends at the middle of the face where the three meet.
"""

from dataclasses import dataclass

import numpy as np

NEAREST = 1e-4  # a cut keeps this share of the edge away from its ends

# Nodes of a cut face. Two regions: lone corner A, B, C, cut P on AB, cut Q on AC.
# Three: A, B, C, cuts on AB, BC, CA, middle. At a dart's end only AB is cut, the other two just place the middle.
TWO = np.array([[0, 3, 4], [3, 1, 2], [3, 2, 4]])
THREE = np.array([[0, 3, 6], [0, 6, 5], [1, 4, 6], [1, 6, 3], [2, 5, 6], [2, 6, 4]])
TWO_SEAMS = np.array([[3, 4]])
THREE_SEAMS = np.array([[3, 6], [4, 6], [5, 6]])
END = np.array([[0, 3, 6], [3, 1, 6], [1, 2, 6], [2, 0, 6]])
END_SEAMS = np.array([[3, 6]])


@dataclass
class CutFaces:
    """Cut faces of one kind. face (k,); corners (k, 3) which corner is A, B, C; edges (k, c) the cut edges in node order;
    tails (k, c) point each cut's share counts from; table: sub-triangles over the nodes; seams: segments over the nodes."""

    face: np.ndarray
    corners: np.ndarray
    edges: np.ndarray
    tails: np.ndarray
    table: np.ndarray
    seams: np.ndarray


@dataclass
class Cut:
    """labels (n,), edge (c,) between regions, place (c,) share of the edge from its smaller point, kinds: CutFaces, of which
    `end` are the ends of darts; uncut (K, K) bool: pairs of regions between which there is no seam, None for none."""

    labels: np.ndarray
    edge: np.ndarray
    place: np.ndarray
    two: CutFaces
    three: CutFaces
    end: CutFaces
    uncut: np.ndarray | None = None

    @property
    def kinds(self):
        """The kinds of cut faces that occur."""
        return [kind for kind in (self.two, self.three, self.end) if len(kind.face)]


def cut_by_fields(surface, fields, labels=None, uncut=None):
    """Cut of a Surface by fields (n, K); labels default to the largest field of each point; uncut (K, K) as in Cut.

    Next to a point whose label is not its largest field's the cut is as near as it can be.
    """
    if labels is None:
        labels = fields.argmax(axis=1)
    edges = surface.edges
    low, high = labels[edges[:, 0]], labels[edges[:, 1]]
    edge = np.flatnonzero(low != high)
    tail, head = rises(surface, fields, labels, edge)
    total = tail + head
    place = np.divide(tail, total, out=np.full(len(edge), 0.5), where=total > 1e-300)
    return Cut(labels, edge, np.clip(place, NEAREST, 1 - NEAREST), *cut_faces(surface, labels, uncut), uncut)


def rises(surface, fields, labels, edge):
    """(tail (c,), head (c,)): by how much each end of a cut edge prefers its own region to the other's."""
    a, b = surface.edges[edge, 0], surface.edges[edge, 1]
    i, j = labels[a], labels[b]
    return np.maximum(fields[a, i] - fields[a, j], 0), np.maximum(fields[b, j] - fields[b, i], 0)


def cut_faces(surface, labels, uncut=None):
    """(CutFaces with two seams in from their edges, with three, with one: the ends of darts)."""
    corner = labels[surface.triangles]
    after = corner[:, [1, 2, 0]]
    same = corner == after  # corner k like corner k + 1: no seam between them
    if uncut is not None:
        same |= uncut[corner, after]
    count = same.sum(axis=1)
    face = np.flatnonzero(count == 1)
    lone = (same[face].argmax(axis=1) + 2) % 3
    two = _cut_faces(surface, face, lone, [0, 2], [0, 0], TWO, TWO_SEAMS)
    face = np.flatnonzero(count == 0)
    three = _cut_faces(surface, face, np.zeros(len(face), dtype=np.int64), [0, 1, 2], [0, 1, 2], THREE, THREE_SEAMS)
    face = np.flatnonzero(count == 2)
    first = (~same[face]).argmax(axis=1)
    return two, three, _cut_faces(surface, face, first, [0, 1, 2], [0, 1, 2], END, END_SEAMS)


def _cut_faces(surface, face, first, sides, tails, table, seams):
    corners = (first[:, None] + np.arange(3)) % 3
    rows = face[:, None]
    edges = surface.triangle_edges[rows, corners[:, sides]]
    return CutFaces(face, corners, edges, surface.triangles[rows, corners[:, tails]], table, seams)


def recut(surface, cut, labels, uncut=None):
    """Cut for other labels (n,), uncut (K, K) as in Cut: what was cut keeps its place, what was not is cut in half."""
    place = np.full(len(surface.edges), 0.5)
    place[cut.edge] = cut.place
    edge = np.flatnonzero(labels[surface.edges[:, 0]] != labels[surface.edges[:, 1]])
    return Cut(labels, edge, place[edge], *cut_faces(surface, labels, uncut), uncut)
