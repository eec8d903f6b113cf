"""Factors of a piece's equations: the same answers as a dense solver's, whatever the order and width."""

import numpy as np
import pytest
from forms import cap
from scipy.sparse import csc_matrix, diags, random
from seamwright.errors import CoverError
from seamwright.flat.factor import across, factor
from seamwright.flat.rest import Rest
from seamwright.form.laplacian import Factor
from seamwright.form.surface import Surface


def laplacian(points, faces):
    rest = Rest(Surface(points, faces))
    return rest.laplacian(np.ones(len(faces))) + diags(np.full(rest.count, 1e-3))


def test_a_band_solves_what_a_dense_solver_solves():
    points, faces = cap(1.0, 8)
    shuffle = np.random.default_rng(0).permutation(len(points))
    matrix = laplacian(points[np.argsort(shuffle)], shuffle[faces])
    factors = factor(matrix)
    assert not isinstance(factors, Factor)
    for load in (np.arange(len(points)), np.random.default_rng(1).standard_normal((len(points), 2))):
        np.testing.assert_allclose(factors.solve(load), np.linalg.solve(matrix.toarray(), load), rtol=1e-9, atol=1e-9)


def test_a_wide_band_goes_to_general_factors():
    tangle = random(800, 800, density=0.005, random_state=0)  # no order makes this narrow
    matrix = (tangle @ tangle.T + diags(np.ones(800))).tocsc()
    factors = factor(matrix)
    assert isinstance(factors, Factor)
    load = np.random.default_rng(0).standard_normal(matrix.shape[0])
    np.testing.assert_allclose(matrix @ factors.solve(load), load, atol=1e-9)


@pytest.mark.parametrize("rings", [3, 8])
def test_the_inverse_between_rows_is_a_dense_solvers(rings):
    rng = np.random.default_rng(rings)
    matrix = laplacian(*cap(1.0, rings))
    rows = rng.standard_normal((7, matrix.shape[0]))
    wanted = rows @ np.linalg.solve(matrix.toarray(), rows.T)
    for factors in (factor(matrix), Factor(matrix)):
        np.testing.assert_allclose(across(factors, rows), wanted, rtol=1e-9, atol=1e-9 * np.abs(wanted).max())


def test_matrices_that_cannot_be_solved_are_refused():
    with pytest.raises(CoverError, match="singular"):
        factor(csc_matrix(np.zeros((3, 3))))
    with pytest.raises(CoverError, match="not finite"):
        factor(csc_matrix(np.diag([1.0, np.nan, 1.0])))
