"""Factors of a piece's equations: kept as a band, since a piece is narrow once its points are in order."""

import numpy as np
from scipy.linalg import LinAlgError, cho_solve_banded, cholesky_banded
from scipy.sparse.csgraph import reverse_cuthill_mckee

from ..form.laplacian import Factor

WIDEST = 250
"""Bandwidth beyond which general sparse factors are quicker; measured, a round piece reaches it at some 12 000 points."""


def factor(matrix):
    """What solves a sparse symmetric positive definite matrix (n, n): has solve(load), load (n,) or (n, k).

    Cholesky's factors of the band in reverse Cuthill-McKee order; of a wide band, `form.laplacian.Factor`. Raises
    CoverError as that does.
    """
    entries = matrix.tocoo()
    order = reverse_cuthill_mckee(matrix.tocsr(), symmetric_mode=True)
    place = np.empty(len(order), dtype=np.int64)
    place[order] = np.arange(len(order))
    row, column = place[entries.row], place[entries.col]
    width = int(np.max(row - column, initial=0))
    if width > WIDEST or not np.isfinite(entries.data).all():
        return Factor(matrix)
    lower = row >= column
    band = np.bincount((column * (width + 1) + row - column)[lower], entries.data[lower], len(order) * (width + 1))
    band = band.reshape(-1, width + 1).T
    try:
        return _Banded(cholesky_banded(band, overwrite_ab=True, lower=True, check_finite=False), order)
    except LinAlgError:
        return Factor(matrix)


class _Banded:
    def __init__(self, band, order):
        self._band, self._order = band, order

    def solve(self, load):
        load = np.asarray(load, dtype=float)
        answer = np.empty_like(load)
        answer[self._order] = cho_solve_banded((self._band, True), load[self._order], check_finite=False)
        return answer
