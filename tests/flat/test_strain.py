"""The strain energies: values, gradients and Hessians against a plain twin and finite differences."""

import numpy as np
import pytest
from forms import cap
from seamwright.flat.rest import Rest
from seamwright.flat.strain import Isotropic, symmetric_dirichlet
from seamwright.form.surface import Surface

ENERGY = Isotropic(symmetric_dirichlet)


@pytest.fixture(scope="module")
def piece():
    surface = Surface(*cap(1.0, 4))
    rest = Rest(surface)
    noise = np.random.default_rng(1).standard_normal((rest.count, 2)) * 0.03
    return surface, rest, surface.points[:, 0] + noise[:, 0] + 1j * (surface.points[:, 1] + noise[:, 1])


def total(rest, flat):
    return rest.area @ ENERGY.density(*rest.maps(flat))


def plain_energy(surface, flat):
    """Slow twin: singular values of each triangle's 2 x 2 map by a general routine, cosh of twice the log strain."""
    result = 0.0
    for a, b, c in surface.triangles:
        p, q, r = surface.points[[a, b, c]]
        x = (q - p) / np.linalg.norm(q - p)
        y = np.cross(np.cross(q - p, r - p), q - p)
        y /= np.linalg.norm(y)
        form = np.array([[(q - p) @ x, (r - p) @ x], [(q - p) @ y, (r - p) @ y]])
        goods = np.array([[(flat[k] - flat[a]).real for k in (b, c)], [(flat[k] - flat[a]).imag for k in (b, c)]])
        strains = np.log(np.linalg.svd(goods @ np.linalg.inv(form), compute_uv=False))
        result += 0.5 * np.linalg.det(form) * np.sum(np.cosh(2 * strains) - 1)
    return result


def test_energy_equals_its_plain_twin(piece):
    surface, rest, flat = piece
    assert total(rest, flat) == pytest.approx(plain_energy(surface, flat), rel=1e-12)


def test_gradient_is_the_derivative(piece):
    _, rest, flat = piece
    gradient = rest.gather(*(rest.area * part for part in ENERGY.first(*rest.maps(flat))))
    step = 1e-6
    for k in range(0, rest.count, 7):
        for unit in (1, 1j):
            moved = np.zeros_like(flat)
            moved[k] = step * unit
            slope = (total(rest, flat + moved) - total(rest, flat - moved)) / (2 * step)
            assert (gradient[k] * np.conj(unit)).real == pytest.approx(slope, rel=1e-6, abs=1e-7)


def as_matrices(bend, at_alpha, at_beta):
    """(t, 4, 4) in (Re alpha, Im alpha, Re beta, Im beta) from the sum of squares that `second` returns."""
    rows = np.stack([at_alpha.real, at_alpha.imag, at_beta.real, at_beta.imag])
    return np.einsum("rt,irt,jrt->tij", bend, rows, rows)


def test_hessian_is_the_derivative_of_the_gradient_where_it_is_positive():
    rng = np.random.default_rng(2)
    beta = 0.2 * (rng.standard_normal(20) + 1j * rng.standard_normal(20))
    alpha = (1.1 + np.abs(beta)) * np.exp(1j * rng.uniform(0, 6, 20))   # pulled out all round: nothing is left out
    exact = as_matrices(*ENERGY.second(alpha, beta))
    step = 1e-6
    for k, (da, db) in enumerate(((1, 0), (1j, 0), (0, 1), (0, 1j))):
        ahead, behind = ENERGY.first(alpha + step * da, beta + step * db), ENERGY.first(alpha - step * da, beta - step * db)
        column = [(x - y) / (2 * step) for x, y in zip(ahead, behind, strict=True)]
        column = np.stack([column[0].real, column[0].imag, column[1].real, column[1].imag], axis=1)
        np.testing.assert_allclose(exact[:, :, k], column, rtol=1e-6, atol=1e-6)


def test_hessian_has_no_negative_part_even_under_heavy_ease_in():
    rng = np.random.default_rng(3)
    beta = 0.1 * (rng.standard_normal(200) + 1j * rng.standard_normal(200))
    alpha = (np.abs(beta) + rng.uniform(0.05, 0.8, 200)) * np.exp(1j * rng.uniform(0, 6, 200))
    bend, at_alpha, _ = ENERGY.second(alpha, beta)
    assert (bend >= 0).all() and (bend == 0).any()
    assert at_alpha.shape == bend.shape == (4, 200)


def test_a_flipped_triangle_costs_without_bound():
    assert ENERGY.density(np.array([0.5 + 0j]), np.array([0.6 + 0j]))[0] == np.inf


def test_the_laplacian_is_that_of_the_form(piece):
    # the cotangent Laplacian of the form, built another way
    from seamwright.form.laplacian import cotangent_laplacian
    surface, rest, _ = piece
    assert abs(rest.laplacian(np.ones(len(rest.area))) - cotangent_laplacian(surface)).max() < 1e-12


def test_stiffness_is_the_second_derivative_held_at_the_anchors():
    # where nothing is left out: a piece pulled out all round; finite differences of the gradient against the factors
    surface = Surface(*cap(0.5, 3))
    rest = Rest(surface)
    flat = 1.3 * (surface.points[:, 0] + 1j * surface.points[:, 1])
    floor = np.linspace(0, 1, len(rest.area))

    def gradient(flat):
        alpha, beta = rest.maps(flat)
        at_alpha, at_beta = ENERGY.first(alpha, beta)
        return rest.gather(rest.area * (at_alpha + floor * alpha), rest.area * (at_beta + floor * beta))

    [(own, factors)] = rest.stiffness(*ENERGY.second(*rest.maps(flat)), floor)
    assert own == slice(0, rest.count)
    move = np.random.default_rng(0).standard_normal(rest.count) * np.exp(1j * np.arange(rest.count))
    move[rest.anchors] = 0   # there the matrix is stiffened
    step = 1e-6
    load = (gradient(flat + step * move) - gradient(flat - step * move)) / (2 * step)
    np.testing.assert_allclose(factors.solve(load.view(float)), move.view(float), rtol=1e-5, atol=1e-5)
