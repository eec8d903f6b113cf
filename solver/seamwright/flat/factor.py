"""Factors of a piece's equations: kept as a band, since a piece is narrow once its points are in order."""

import numpy as np
from numpy.lib.stride_tricks import as_strided
from scipy.linalg import LinAlgError, cho_solve_banded, cholesky_banded, solve_triangular
from scipy.sparse import coo_matrix, tril
from scipy.sparse.csgraph import reverse_cuthill_mckee

from ..form.laplacian import Factor

WIDEST = 320
"""Bandwidth beyond which general sparse factors are quicker; measured, a round piece reaches it at some 16 000 points."""


class Pattern:
    """Where the entries of a symmetric matrix stand; made once, for many matrices.

    row, column (e,): each unordered pair of unknowns that has an entry, in either order; entries of a repeated pair add
    up. order (n,): the unknowns from one end of the piece to the other, reverse Cuthill-McKee's if not given.
    """

    def __init__(self, row, column, count, order=None):
        self.row, self.column, self.count = row, column, count
        self.order = _narrow_order(row, column, count) if order is None else order
        place = np.empty(count, dtype=np.int64)
        place[self.order] = np.arange(count)
        row, column = place[row], place[column]
        self.wide = int(np.max(np.abs(row - column), initial=0)) + 1
        self._slot = np.minimum(row, column) * self.wide + np.abs(row - column)

    def factor(self, entries):
        """What solves the positive definite matrix with these entries (e,): has solve(load), load (n,) or (n, k).

        Cholesky's factors of the band; of a wide one `form.laplacian.Factor`, and raises CoverError as that does.
        """
        if self.wide <= WIDEST and np.isfinite(entries).all():
            band = np.bincount(self._slot, entries, self.count * self.wide).reshape(-1, self.wide).T
            try:
                return _Banded(cholesky_banded(band, overwrite_ab=True, lower=True, check_finite=False), self.order)
            except LinAlgError:
                pass
        return Factor(self.matrix(entries))

    def matrix(self, entries):
        """(n, n) csc with these entries (e,)."""
        apart = self.row != self.column
        row, column = np.append(self.row, self.column[apart]), np.append(self.column, self.row[apart])
        return coo_matrix((np.append(entries, entries[apart]), (row, column)), shape=(self.count, self.count)).tocsc()


def factor(matrix):
    """Factors of a sparse symmetric positive definite matrix (n, n), as by `Pattern.factor`."""
    lower = tril(matrix).tocoo()
    order = reverse_cuthill_mckee(matrix.tocsr(), symmetric_mode=True)
    return Pattern(lower.row, lower.col, matrix.shape[0], order).factor(lower.data)


def _narrow_order(row, column, count):
    """(n,) an order of the unknowns in which pairs (e,) stand close together."""
    graph = coo_matrix((np.ones(2 * len(row)), (np.append(row, column), np.append(column, row))), shape=(count, count))
    return reverse_cuthill_mckee(graph.tocsr(), symmetric_mode=True)


def across(factors, rows):
    """(m, m) rows @ A^-1 @ rows.T of the matrix A with these factors, for dense rows (m, n)."""
    if isinstance(factors, _Banded):
        half = factors.half(rows.T)
        return half.T @ half
    return rows @ factors.solve(rows.T)


class _Banded:
    def __init__(self, band, order):
        self._band, self._order = band, order

    def solve(self, load):
        load = np.asarray(load, dtype=float)
        answer = np.empty_like(load)
        answer[self._order] = cho_solve_banded((self._band, True), load[self._order], check_finite=False)
        return answer

    def half(self, loads):
        """(n, m) in the factors' order: the factor's inverse times loads (n, m).

        Through blocks as large as the band is wide: a block has to do with the one before alone, above the diagonal of what
        lies between them.
        """
        half = loads[self._order]
        wide, count = self._band.shape
        down, along = self._band.strides
        entries = as_strided(self._band, (count, count), (down, along - down), writeable=False)  # right within the band
        above = np.arange(wide)[:, None] < np.arange(wide)
        before = slice(0, 0)
        for begin in range(0, count, wide):
            own = slice(begin, min(begin + wide, count))
            if begin:
                half[own] -= np.where(above[: own.stop - begin], entries[own, before], 0.0) @ half[before]
            half[own] = solve_triangular(entries[own, own], half[own], lower=True, check_finite=False)
            before = own
        return half
