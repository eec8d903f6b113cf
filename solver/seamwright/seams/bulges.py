"""Where seams run over a bulge although there is a valley right beside: it costs as much, and shows less."""

import numpy as np
from scipy.sparse import diags_array
from scipy.spatial import cKDTree

from ..form.laplacian import Factor, cotangent_laplacian
from ..form.measure import open_points, total_area, vertex_areas, vertex_normals

SPREAD = 0.03  # share of the size over which bending is averaged: sharp edges are no bulges, seams belong there
BESIDE = (0.03, 0.045, 0.06)  # shares of the size sideways at which a valley is looked for
STEP = 0.01  # share of the size between places looked at
BULGE, VALLEY = 2.0, -1.0  # mean curvature times size: a ball of the form's area has 3.5


def bending(surface):
    """(n,) mean curvature of a Surface times the square root of its area, averaged over SPREAD; bulges positive."""
    laplacian, mass = cotangent_laplacian(surface), vertex_areas(surface)
    whole = 0.5 * np.einsum("nx,nx->n", laplacian @ surface.points, vertex_normals(surface))
    whole[open_points(surface)] = 0.0
    size = np.sqrt(total_area(surface))
    return size * Factor(diags_array(mass) + (SPREAD * size) ** 2 * laplacian).solve(whole)


def metres_on_bulges(seen):
    """(s,) metres of every seam of a Seen that run over a bulge with a valley beside."""
    surface = seen.form.surface
    bent, normals, tree = bending(surface), vertex_normals(surface), cKDTree(surface.points)
    size = np.sqrt(total_area(surface))
    found = np.zeros(len(seen.seams))
    for k, length in enumerate(seen.lengths):
        places = seen.resampled(k, STEP)
        if len(places) < 3:
            continue
        along = np.gradient(places, axis=0)
        along /= np.maximum(np.linalg.norm(along, axis=1, keepdims=True), 1e-30)
        at = tree.query(places)[1]
        side = np.cross(normals[at], along)
        lowest = np.full(len(places), np.inf)
        for off in (*BESIDE, *(-share for share in BESIDE)):
            gap, beside = tree.query(places + off * size * side)
            same = (gap < 0.7 * abs(off) * size) & (np.einsum("kx,kx->k", normals[beside], normals[at]) > 0)
            lowest = np.where(same, np.minimum(lowest, bent[beside]), lowest)
        found[k] = length * ((bent[at] > BULGE) & (lowest < VALLEY)).mean()
    return found
