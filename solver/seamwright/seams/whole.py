"""Patches of a surface that stay whole: the points of one lie in one region, on every level, so that no seam enters it.

A patch holds the maker's faces on both sides of shut edges. Patches that share a point are one.
"""

from dataclasses import replace

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

from ..form.measure import open_points, vertex_areas
from ..form.surface import components_through


def patches(surface, kept):
    """(n,) number of the patch of every point of a Surface, -1 for none. kept (t,) bool: triangles that make the patches.

    What a patch encloses goes with it, as no seam could get there: all that it leaves but for the largest part.
    """
    patch, used = np.full(len(surface.points), -1), np.unique(surface.triangles[kept])
    patch[used] = _joined(surface, surface.triangle_edges[kept].ravel())[used]
    for number in np.unique(patch[used]):
        patch[_enclosed(surface, patch == number)] = number
    inside = patch >= 0
    patch[inside] = np.unique(patch[inside], return_inverse=True)[1].ravel()
    return patch


def _joined(surface, edges):
    """(n,) the component of each point, joined along edges (k,)."""
    n = len(surface.points)
    ends = surface.edges[edges].T
    return connected_components(coo_matrix((np.ones(ends.shape[1]), tuple(ends)), shape=(n, n)), directed=False)[1]


def _enclosed(surface, patch):
    """(n,) bool: the disks, without an open edge, that a patch (n,) bool leaves of the surface beside the largest part."""
    left = ~patch
    component = _joined(surface, np.flatnonzero(left[surface.edges].all(axis=1)))
    found = np.zeros(len(patch), dtype=bool)
    parts, mass = np.unique(component[left]), np.bincount(component, vertex_areas(surface) * left)
    for part in parts[np.argsort(-mass[parts], kind="stable")][1:]:
        inside = left & (component == part)
        if is_disk(surface, inside) and not open_points(surface)[inside].any():
            found |= inside
    return found


def is_disk(surface, inside):
    """Whether the connected points `inside` (n,) bool, with the edges and faces between them, are a disk."""
    return inside.sum() - inside[surface.edges].all(axis=1).sum() + inside[surface.triangles].all(axis=1).sum() == 1


def bound_faces(surface, patch, polygon):
    """(t,) number that triangles which stay whole together share, -1 for others; polygon (t,) the maker's faces, whole."""
    corner = patch[surface.triangles]
    inside = (corner[:, 0] >= 0) & (corner == corner[:, :1]).all(axis=1)
    inside = (np.bincount(polygon, ~inside) == 0)[polygon]
    joined = inside[surface.edge_triangles].all(axis=1) & ~surface.open_edges
    return np.where(inside, components_through(surface, joined)[1], -1)


def kept_whole(network, bound):
    """The Network in which faces `bound` (t,) of the surface it was cut from stay whole, as far as they still are."""
    own = bound[network.source]
    single = int(bound.max(initial=-1)) + 1 + np.arange(len(own))
    return replace(network, face=np.where(own >= 0, own, single))


def on_rung(surface, owner, patch):
    """(N,) number of the patch of each point of a coarse Surface: points that hold some of one patch are one.

    owner (n,) the coarse point of each of the form's points, patch (n,) theirs. Where that gives no disk, as where two ends
    of a patch are near each other, the coarse points are free.
    """
    count, inside = len(surface.points), np.flatnonzero(patch >= 0)
    size = count + int(patch.max(initial=-1)) + 1
    pairs = coo_matrix((np.ones(len(inside)), (owner[inside], count + patch[inside])), shape=(size, size))
    component = connected_components(pairs, directed=False)[1][:count]
    shared = np.bincount(component)[component] > 1
    found = np.full(count, -1)
    for number, part in enumerate(np.unique(component[shared])):
        if is_disk(surface, component == part):
            found[component == part] = number
    return found


def united(labels, patch, mass):
    """Labels of which every patch has one, that of most of its mass; labels, patch and mass are of points, or of faces."""
    count, inside = int(labels.max()) + 1, np.flatnonzero(patch >= 0)
    share = np.bincount(patch[inside] * count + labels[inside], mass[inside], minlength=count * (int(patch.max()) + 1))
    labels = labels.copy()
    labels[inside] = share.reshape(-1, count).argmax(axis=1)[patch[inside]]
    return labels
