"""The cotangent Laplacian, its factors, and curvature smoothed with it."""

import numpy as np
from scipy.sparse import coo_matrix, diags_array
from scipy.sparse.csgraph import reverse_cuthill_mckee
from scipy.sparse.linalg import splu

from ..errors import CoverError
from .measure import angle_defects, areas, edge_vectors, open_points, total_area, vertex_areas

THINNEST = 1e-2
"""Least height of a triangle, as a share of its longest side, that the Laplacian counts with."""


def cotangents(surface):
    """(m, 3): half the cotangent of the angle opposite edge k of each triangle (the edge from corner k to k+1).

    Triangles flatter than THINNEST are counted as if they were that high, which keeps the matrix positive semidefinite.
    """
    sides = edge_vectors(surface)
    longest = np.einsum("tkx,tkx->tk", sides, sides).max(axis=1)
    double_area = np.maximum(2 * areas(surface), THINNEST * longest)
    dots = -np.einsum("tkx,tkx->tk", np.roll(sides, -1, axis=1), np.roll(sides, -2, axis=1))
    return 0.5 * dots / np.where(double_area > 0, double_area, 1.0)[:, None]


def cotangent_laplacian(surface):
    """(n, n) csc, positive semidefinite, unitless: x @ L @ x is the integral of |grad x|^2 (Pinkall and Polthier 1993)."""
    return edge_laplacian(surface, cotangents(surface))


def edge_laplacian(surface, weights):
    """(n, n) csc graph Laplacian with (m, 3) weights, weight k on the edge from corner k to k+1; shares are summed."""
    n = len(surface.points)
    tail, head = surface.triangles.ravel(), np.roll(surface.triangles, -1, axis=1).ravel()
    w = weights.ravel()
    rows = np.concatenate([tail, head, tail, head])
    columns = np.concatenate([head, tail, tail, head])
    return coo_matrix((np.concatenate([-w, -w, w, w]), (rows, columns)), shape=(n, n)).tocsc()


class Factor:
    """Factors of a symmetric positive definite sparse matrix (n, n), for many solves.

    order (n,): the unknowns as they were eliminated, which serves as well for any other matrix with entries in the same
    places or fewer. ordered: the matrix comes in such an order. Without one the unknowns are first put in reverse
    Cuthill-McKee order: minimum degree fills three times as much from the order in which repeated subdivision numbers
    points, and loses nothing elsewhere.
    """

    def __init__(self, matrix, ordered=False):
        matrix = matrix.tocsc()
        if not np.isfinite(matrix.data).all():
            raise CoverError("The form's equations hold numbers that are not finite; look for points that lie on top of "
                             "each other or immensely far away, merge or delete them, and try again.")
        try:
            self._place = None
            if not ordered:
                self._place = reverse_cuthill_mckee(matrix, symmetric_mode=True)
                matrix = matrix[self._place][:, self._place].tocsc()
            self._lu = splu(matrix, permc_spec="NATURAL" if ordered else "MMD_AT_PLUS_A", diag_pivot_thresh=0,
                            options=dict(SymmetricMode=True))
        except RuntimeError as fault:
            raise CoverError("The form's equations have no single answer (their matrix is singular); look for loose points "
                             "or faces without area, delete them, and try again.") from fault

    @property
    def order(self):
        """(n,) the unknown that is eliminated first, second and so on."""
        eliminated = np.argsort(self._lu.perm_c)
        return eliminated if self._place is None else self._place[eliminated]

    def solve(self, load):
        """Solution for a load (n,) or several, (n, k)."""
        load = np.ascontiguousarray(load, dtype=float)
        if self._place is None:
            return self._lu.solve(load)
        answer = np.empty(load.shape)
        answer[self._place] = self._lu.solve(load[self._place])
        return answer


def smoothing(surface, share=0.02):
    """Factor of M + l^2 L, M the vertex areas, L the cotangent Laplacian, l = share * sqrt(area): one step of heat flow."""
    reach = share**2 * total_area(surface)
    return Factor(diags_array(vertex_areas(surface)) + reach * cotangent_laplacian(surface))


def smoothed_defects(surface, share=0.02, smoother=None):
    """(n,) radians: angle defects of the inner points spread over `share` of the form's size, their total kept.

    M (M + l^2 L)^-1 K, by `smoothing` (`smoother`, where it is at hand). Points on an open edge bring no load of their own.
    """
    defects = np.where(open_points(surface), 0.0, angle_defects(surface))
    return vertex_areas(surface) * (smoother or smoothing(surface, share)).solve(defects)
