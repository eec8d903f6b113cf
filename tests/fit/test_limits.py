"""The energy that knows the goods: it measures what the independent measurement measures, and its derivatives are right."""

import numpy as np
import pytest
from forms import cap
from seamwright.fit.goods import get
from seamwright.fit.limits import GoodsEnergy, log_and_ratio
from seamwright.fit.measure import utilisation, warp_weft_shear
from seamwright.flat.rest import Rest
from seamwright.form.surface import Surface

GOODS = ["canvas", "felt", "jersey", "leather"]


def strained(size=0.004):
    surface = Surface(*cap(0.5, 6))
    rest = Rest(surface)
    noise = size * np.random.default_rng(0).standard_normal((rest.count, 2))
    flat = (surface.points[:, :2] + noise) @ np.array([[0.8, 0.6], [-0.6, 0.8]])
    return surface, rest, flat, rest.maps(flat[:, 0] + 1j * flat[:, 1])


@pytest.mark.parametrize("name", GOODS)
def test_it_uses_the_limits_as_the_independent_measurement_says(name):
    surface, rest, flat, maps = strained()
    goods = get(name)
    expected = utilisation(warp_weft_shear(surface.points, rest.triangles, flat), goods, 0.3)
    np.testing.assert_allclose(GoodsEnergy(goods, 0.3, 4, 1.0).used(*log_and_ratio(*maps)), expected, rtol=1e-10)
    np.testing.assert_allclose(GoodsEnergy(goods, 0.3, 4, 2.5).used(*log_and_ratio(*maps)), expected / 2.5, rtol=1e-10)


@pytest.mark.parametrize("name", GOODS)
def test_gradient_is_the_derivative(name):
    _, _, _, (alpha, beta) = strained()
    used = GoodsEnergy(get(name), 0.3, 4, 1.0).used(*log_and_ratio(alpha, beta))
    assert (used > used.max() / 1.6).any() and (used < used.max() / 1.6).any()
    energy = GoodsEnergy(get(name), 0.3, 4, used.max() / 4)   # some triangles beyond the end of the cosh (2.5), some within
    at_alpha, at_beta = energy.first(alpha, beta)
    step = 1e-6
    for da, db in ((1, 0), (1j, 0), (0, 1), (0, 1j)):
        ahead, behind = (energy.density(alpha + s * da, beta + s * db) for s in (step, -step))
        np.testing.assert_allclose((at_alpha * np.conj(da) + at_beta * np.conj(db)).real, (ahead - behind) / (2 * step),
                                   rtol=1e-5, atol=1e-8 * np.abs(at_alpha).max())


@pytest.mark.parametrize("name", GOODS)
def test_hessian_is_near_the_derivative_of_the_gradient_where_the_strain_is_small(name):
    # Gauss-Newton leaves out slope times curvature of the strains, which vanishes with the strain
    _, _, _, (alpha, beta) = strained(0.0001)
    alpha, beta = alpha / np.abs(alpha), beta / np.abs(alpha) * 0.01
    energy = GoodsEnergy(get(name), 0.0, 2, 1.0)
    bend, at_alpha, at_beta = energy.second(alpha, beta)
    assert (bend >= 0).all()
    rows = np.stack([at_alpha.real, at_alpha.imag, at_beta.real, at_beta.imag])
    exact = np.einsum("rt,irt,jrt->tij", bend, rows, rows)
    step = 1e-7
    for k, (da, db) in enumerate(((1, 0), (1j, 0), (0, 1), (0, 1j))):
        ahead, behind = (energy.first(alpha + s * da, beta + s * db) for s in (step, -step))
        column = np.stack([(x - y) / (2 * step) for x, y in zip(ahead, behind, strict=True)])
        column = np.stack([column[0].real, column[0].imag, column[1].real, column[1].imag], axis=1)
        assert np.abs(exact[:, :, k] - column).max() < 0.05 * np.abs(exact).max()
