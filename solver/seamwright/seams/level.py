"""One level of the coarse-to-fine ladder: a triangle surface with its curvature load, seam prices and matrix pattern.

Lengths on a level are scaled so that the form's area is 4 pi (the scale on which thrift is counted).
"""

from copy import copy
from functools import cached_property

import numpy as np
from scipy.sparse import csc_matrix, csr_matrix

from ..form.laplacian import Factor, cotangent_laplacian
from ..form.measure import areas, vertex_areas
from ..form.surface import Surface
from .edgewise import in_planes
from .whole import united

FORM_AREA = 4 * np.pi


class Level:
    """surface: Surface at scale (area near 4 pi). load (n,) curvature, radians. price (n,) factor on the seam's length.
    symmetry: the Symmetry that networks here keep, or None. patch (n,) number of the patch that each point has to stay in
    one region with, -1 for none; or None. smoother: the metric in which seams move, if at hand. edgewise (m, J, 3): how a
    step in each triangle counts where seams keep to edges (see there), in the triangle's own plane (m, J, 2) from then on;
    or None."""

    def __init__(self, surface, load, price=None, symmetry=None, patch=None, smoother=None, edgewise=None):
        self.surface, self.symmetry = surface, symmetry
        self.patch = None if patch is None or patch.max() < 0 else patch
        self.edgewise = None if edgewise is None else in_planes(edgewise, surface)
        self._diffusion = None, None  # length, Factor
        self.fixed = None  # (n,) label of points that keep theirs, -1 for others; or None
        if smoother is not None:
            self.smoother = smoother
        self.load = np.asarray(load, dtype=float)
        self.price = np.ones(len(surface.points)) if price is None else np.asarray(price, dtype=float)
        self.areas = areas(surface)
        self.mass = vertex_areas(surface)
        self.density = np.divide(self.load, self.mass, out=np.zeros_like(self.load), where=self.mass > 0)

    def plain(self):
        """The level on which seams count through faces."""
        level = copy(self)
        level.edgewise = None
        return level

    @cached_property
    def edge_length(self):
        """Mean edge length."""
        return float(self.surface.edge_lengths.mean())

    def labels(self, fields):
        """(n,) the region of each point: that of the largest of its fields (n, K), or of their sums over its patch."""
        labels = fields.argmax(axis=1)
        if self.patch is not None:
            inside = self.patch >= 0
            total = np.zeros((int(self.patch.max()) + 1, fields.shape[1]))
            np.add.at(total, self.patch[inside], self.mass[inside, None] * fields[inside])
            labels[inside] = total.argmax(axis=1)[self.patch[inside]]
        return labels if self.fixed is None else np.where(self.fixed >= 0, self.fixed, labels)

    def united(self, labels):
        """(n,) labels of which every patch has one."""
        return labels if self.patch is None else united(labels, self.patch, self.mass)

    @cached_property
    def frames(self):
        """(m, 3, 2) corners of each triangle in its own plane: first at the origin, second on the x axis."""
        a, b, c = (self.surface.points[self.surface.triangles[:, k]] for k in range(3))
        ab, ac = b - a, c - a
        length = np.maximum(np.linalg.norm(ab, axis=1), 1e-30)
        along = (ab * ac).sum(1) / length
        away = np.sqrt(np.maximum((ac * ac).sum(1) - along**2, 0))
        away = np.maximum(away, 1e-2 * np.maximum(length, np.linalg.norm(ac, axis=1)))  # a flat triangle keeps some height
        flat = np.zeros((len(a), 3, 2))
        flat[:, 1, 0], flat[:, 2, 0], flat[:, 2, 1] = length, along, away
        return flat

    @cached_property
    def free(self):
        """(n,) bool: points off the open edges, where u is unknown."""
        free = np.ones(len(self.surface.points), dtype=bool)
        free[self.surface.edges[self.surface.open_edges].ravel()] = False
        return free

    @cached_property
    def unknown(self):
        """(k,) the free points in the order of elimination: u is unknown there."""
        order = self.smoother.order
        return order[self.free[order]]

    @cached_property
    def _pattern(self):
        """Sparsity of the Laplacian over the unknowns, with the slot of every triangle's nine entries in its data."""
        triangles, count = self.surface.triangles, len(self.unknown)
        number = np.full(len(self.free), -1)
        number[self.unknown] = np.arange(count)
        rows = number[np.repeat(triangles, 3, axis=1)].ravel()
        columns = number[np.tile(triangles, (1, 3))].ravel()
        inside = (rows >= 0) & (columns >= 0)
        key = columns[inside] * count + rows[inside]
        unique, slot = np.unique(key, return_inverse=True)
        slots = np.full(len(rows), len(unique))  # one slot past the end swallows what touches an open edge
        slots[inside] = slot.ravel()
        pointers = np.concatenate([[0], np.cumsum(np.bincount(unique // count, minlength=count))])
        return slots.reshape(-1, 3, 3), (unique % count).astype(np.int32), pointers, count

    @cached_property
    def stiffness(self):
        """(m, 3, 3) cotangent stiffness of every whole triangle."""
        return triangle_stiffness(self.frames)[1]

    @cached_property
    def _base(self):
        slots, rows, _, _ = self._pattern
        return np.bincount(slots.ravel(), self.stiffness.ravel(), minlength=len(rows) + 1)

    def factor(self, cut, face, corner, stiffness):
        """Factor of the Laplacian over the unknowns with the triangles `cut` (f,) replaced by parts of them.

        face (t,): the triangle each part lies in; corner (t, 3): which of its corners is there, 3 for none of them;
        stiffness (t, 3, 3) of the parts.
        """
        slots, rows, pointers, count = self._pattern
        none, own = len(rows), np.minimum(corner, 2)
        places = slots[face[:, None, None], own[:, :, None], own[:, None, :]]
        places = np.where((corner < 3)[:, :, None] & (corner < 3)[:, None, :], places, none)
        data = self._base - np.bincount(slots[cut].ravel(), self.stiffness[cut].ravel(), none + 1)
        data = (data + np.bincount(places.ravel(), stiffness.ravel(), none + 1))[:-1]
        kept = np.abs(data) > 1e-12  # what lies across a seam is exactly zero: the blocks fall apart
        before = np.concatenate([[0], np.cumsum(kept)]).astype(np.int32)  # what sparse matrices hold: then nothing is copied
        return Factor(csc_matrix((data[kept], rows[kept], before[pointers]), shape=(count, count)), ordered=True)

    @cached_property
    def smoother(self):
        """Factor of M + l^2 L, l three edge lengths: the metric in which seams move."""
        return self.diffusion(3 * self.edge_length)

    @cached_property
    def averaging(self):
        """(n, n) csr: half a point's own value, half its neighbours' mean."""
        a, b = self.surface.edges.T
        rows, columns = np.concatenate([a, b]), np.concatenate([b, a])
        half = 0.5 / np.bincount(rows, minlength=len(self.mass))
        own = np.arange(len(self.mass))
        values = np.concatenate([half[rows], np.full(len(own), 0.5)])
        return csr_matrix((values, (np.append(rows, own), np.append(columns, own))), shape=(len(own), len(own)))

    @cached_property
    def laplacian(self):
        """(n, n) csc cotangent Laplacian over all points."""
        return cotangent_laplacian(self.surface)

    def diffusion(self, length):
        """Factor of M + length^2 L over all points; the last one is kept."""
        if self._diffusion[0] != length:
            mass = csc_matrix((self.mass, (np.arange(len(self.mass)),) * 2), shape=self.laplacian.shape)
            self._diffusion = length, Factor((mass + length**2 * self.laplacian).tocsc())
        return self._diffusion[1]


def triangle_stiffness(corners):
    """(area (k,), stiffness (k, 3, 3), gradients (k, 3, 2)) of plane triangles with corners (k, 3, 2): linear elements."""
    a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
    twice = (b[:, 0] - a[:, 0]) * (c[:, 1] - a[:, 1]) - (b[:, 1] - a[:, 1]) * (c[:, 0] - a[:, 0])
    opposite = np.stack([c - b, a - c, b - a], axis=1)
    gradients = np.stack([-opposite[:, :, 1], opposite[:, :, 0]], axis=2) / np.maximum(twice, 1e-30)[:, None, None]
    area = 0.5 * twice
    return area, area[:, None, None] * (gradients @ gradients.transpose(0, 2, 1)), gradients


def scaled(surface, area):
    """(the surface with its area brought to 4 pi, the factor on lengths)."""
    factor = float(np.sqrt(FORM_AREA / area))
    return Surface(surface.points * factor, surface.triangles), factor
