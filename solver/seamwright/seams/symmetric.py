"""Keeping a network symmetric: fields and their gradient projected, regions mirrored in whole, merges made on both sides.

A network is symmetric when a permutation pairs its regions (a region on the plane is its own partner) and every field is its
partner's mirror image, F_i = R F_partner(i). Then a seam between partners lies on the plane by itself, and every other seam
has its mirror image; so the flow needs no rule for the plane. Several planes are at right angles: their mirrors commute.
"""

from copy import copy

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra

from ..form.measure import open_points
from ..form.mirror import drawn_in, reflection
from .topology import make_disks, regions, split_components

SMALLEST = 0.005  # share of the form's area under which what lies on one side of a plane is no region


class Mirror:
    """One mirror on one level: surface a Surface, plane a Plane on the same scale.

    matrix (n, n) csr reflects fields; height (n,) signed distance from the plane; right (n,) bool: points on the side of
    the plane's normal, or on it; on (n,) bool: those on it with the surface on both sides; image (n,): a point near
    each point's mirror image; twin (n,): the same among the points on the right, -1 where none is near.
    """

    def __init__(self, surface, plane):
        n = len(surface.points)
        self.plane = plane
        self.matrix = reflection(surface, plane)
        self.back = self.matrix.T.tocsr()
        self.height, inward = ((points - plane.point) @ plane.normal for points in (surface.points, drawn_in(surface)))
        tiny = 1e-9 * np.ptp(self.height)
        flat = np.abs(self.height) <= tiny
        self.right = np.where(flat, inward, self.height) > -tiny  # a slit in the plane has two sides
        low, high = self.height.copy(), self.height.copy()
        for one, other in (surface.edges.T, surface.edges.T[::-1]):
            np.minimum.at(low, one, self.height[other])
            np.maximum.at(high, one, self.height[other])
        self.on = flat & (low < -tiny) & (high > tiny)
        corners, share = self.matrix.indices.reshape(n, 3), self.matrix.data.reshape(n, 3)
        rows = np.arange(n)
        self.image = corners[rows, share.argmax(axis=1)]
        share = np.where(self.right[corners], share, -1.0)
        self.twin = np.where(share.max(axis=1) >= 0, corners[rows, share.argmax(axis=1)], -1)
        # the points of all edges that reach over the plane; an open edge along it parts the sides already
        along = open_points(surface) & (np.abs(self.height) <= 1e-6 * np.ptp(self.height))
        over = (self.height[surface.edges].prod(axis=1) <= 0) & ~along[surface.edges].any(axis=1)
        self.near = np.unique(surface.edges[over])

    def partners(self, labels, count):
        """(count,) the region where most of each region's mirror image lies; one whose partner has another stands alone."""
        votes = np.bincount(labels * count + labels[self.image], minlength=count * count).reshape(count, count)
        partner, alone = (votes + votes.T).argmax(axis=1), np.arange(count)
        return np.where(partner[partner] == alone, partner, alone)

    def parted(self, fields, partner, height):
        """(n, K) fields whose partners differ by twice +- `height` (n,) near the plane, so that it parts them."""
        fields = fields.copy()
        for i, j in zip(*_pairs(partner), strict=True):
            side = 1.0 if (self.height * (fields[:, i] - fields[:, j])).sum() > 0 else -1.0
            middle = 0.5 * (fields[self.near, i] + fields[self.near, j])
            fields[self.near, i] = middle + side * height[self.near]
            fields[self.near, j] = middle - side * height[self.near]
        return fields


def _pairs(partner):
    """(i, j) the regions that have another one for a partner, each pair once."""
    first = np.flatnonzero(np.arange(len(partner)) < partner)
    return first, partner[first]


class Symmetry:
    """The mirrors of one level: surface a Surface, planes a list of Planes on its scale, at right angles to each other."""

    def __init__(self, surface, planes):
        self.mirrors = [Mirror(surface, plane) for plane in planes]

    def only(self, number):
        """The Symmetry about one of the planes alone."""
        fewer = copy(self)
        fewer.mirrors = [self.mirrors[number]]
        return fewer

    def partners(self, labels, count):
        """List with the (count,) partners of the regions of labels (n,), one array for each mirror."""
        return [mirror.partners(labels, count) for mirror in self.mirrors]

    def project(self, fields, partners):
        """(n, K) symmetric fields: for each mirror the mean of the fields and their partners' mirror images.

        Near the plane partners differ by the height over it: a mirror image on a mesh that is not symmetric itself is
        true but to a share of an edge, and the flow would make use of that.
        """
        for mirror, partner in zip(self.mirrors, partners, strict=True):
            fields = 0.5 * (fields + (mirror.matrix @ fields)[:, partner])
            fields = mirror.parted(fields, partner, mirror.height)
        return fields

    def project_move(self, move, partners):
        """(n, K) the same for the difference of two fields that are to be symmetric."""
        for mirror, partner in zip(self.mirrors, partners, strict=True):
            move = 0.5 * (move + (mirror.matrix @ move)[:, partner])
            move = mirror.parted(move, partner, np.zeros(len(move)))
        return move

    def pull_back(self, gradient, partners):
        """(n, K) gradient by the fields that went into `project`, from the gradient by those that came out."""
        for mirror, partner in zip(self.mirrors[::-1], partners[::-1], strict=True):
            gradient = mirror.parted(gradient, partner, np.zeros(len(gradient)))
            gradient = 0.5 * (gradient + (mirror.back @ gradient)[:, partner])
        return gradient


def symmetrised(level, symmetry, labels):
    """(n,) labels 0..K-1, every region a disk, each plane's right side as it was and its left side the mirror image.

    A region goes on across a plane as one piece where most of its edges across did so before and the whole is a disk; else
    it is one of two partners that meet in a seam on the plane. Labels that are symmetric come back as they are.
    """
    for mirror in symmetry.mirrors:
        if not _is_symmetric(level, mirror, labels):
            labels = _mirrored_over(level, mirror, labels)
    return labels


def _is_symmetric(level, mirror, labels):
    """Whether all regions are disks and match their mirror images but for points within two edges of a border."""
    edges = level.surface.edges
    border = np.zeros(len(labels), dtype=bool)
    border[edges[labels[edges[:, 0]] != labels[edges[:, 1]]]] = True
    border[edges[border[edges].any(axis=1)]] = True
    off = mirror.partners(labels, int(labels.max()) + 1)[labels] != labels[mirror.image]
    return not (off & ~border).any() and (regions(level, labels).euler == 1).all()


def _mirrored_over(level, mirror, labels):
    surface, right = level.surface, mirror.right
    half = split_components(surface, np.where(right, labels, labels.max() + 1))
    large = np.bincount(half, level.mass) > SMALLEST * level.mass.sum()
    half = _filled(surface, half, right & large[half], right)
    half = make_disks(level, np.where(right, half, half.max() + 1))
    count = int(half.max()) + 1
    ends = surface.edges[right[surface.edges].sum(axis=1) == 1]
    ends = np.where(right[ends[:, :1]], ends, ends[:, ::-1])
    same = np.where(labels[ends[:, 0]] == labels[ends[:, 1]], 1.0, -1.0)
    across = np.bincount(half[ends[:, 0]], same, minlength=count) > 0
    twin = half[mirror.twin]
    while True:
        whole = np.where(right, half, np.where(across[twin], twin, twin + count))
        whole = _filled(surface, whole, right | (mirror.twin >= 0), ~right)
        number, whole = np.unique(whole, return_inverse=True)
        whole = whole.ravel()
        joined = (number < count) & across[number % count]
        broken = number[joined & (regions(level, whole).euler != 1)]
        if not len(broken):
            return make_disks(level, whole)
        across[broken] = False


def _filled(surface, labels, known, within):
    """Labels with the points of `within` that are not `known` given the label of the nearest known one along edges."""
    lost = within & ~known
    edges = surface.edges
    used = (lost | known)[edges].all(axis=1) & lost[edges].any(axis=1)
    graph = coo_matrix((surface.edge_lengths[used], tuple(edges[used].T)), shape=(len(labels),) * 2).tocsr()
    source = dijkstra(graph, directed=False, indices=np.flatnonzero(known), min_only=True, return_predecessors=True)[2]
    return np.where(lost & (source >= 0), labels[np.maximum(source, 0)], labels)


def alike(level, symmetry, labels, i, j):
    """(K,) region that each becomes part of when neighbours i and j merge, and their partners too; None when that leaves
    what is no disk."""
    count = int(labels.max()) + 1
    together = [(i, j)]
    for partner in symmetry.partners(labels, count):
        together += [(partner[a], partner[b]) for a, b in together]
    root = np.arange(count)
    for a, b in together:
        root[root == root[b]] = root[a]
    trial = np.unique(root, return_inverse=True)[1].ravel()[labels]
    return root if (regions(level, trial).euler == 1).all() else None
