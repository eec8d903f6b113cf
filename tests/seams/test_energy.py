"""Energy of a seam network: equal to a slow twin on the cut mesh, its gradient equal to finite differences."""

from dataclasses import replace

import numpy as np
import pytest
from forms import cap, cube, cylinder, dumbbell, ellipsoid, icosphere, limbs, torus
from parted import OWN, cells, fields_of_cells, level_of, slow_cost, slow_edges_cost
from seamwright.form.form import Form
from seamwright.seams.cut import NEAREST, cut_by_fields
from seamwright.seams.energy import density, evaluate, field_gradient
from seamwright.seams.ladder import Ladder
from seamwright.seams.network import Network
from seamwright.seams.study import log_scale, network_cost, seam_energy

FORMS = {
    "ellipsoid": ellipsoid(1.0, 0.8, 0.5, 2), "torus": torus(1.0, 0.4, 16, 9), "cap": cap(1.4, 7),
    "tube": cylinder(1.0, 3.0, 12), "cube": cube(1.0, 5),
    "limbs": limbs([(1, 0, 0), (-0.6, 0.8, 0), (-0.6, -0.8, 0.3)], 0.3, 0.2, 0.05, 14),
}
ENERGIES = {"square": "square", "dirichlet": "dirichlet", "hencky": "hencky", "the caller's own": OWN}


@pytest.fixture(params=[*FORMS, "limbs with a dart", "torus with a dart"], name="case")
def any_case(request):
    """(level, fields, cut, weights): five cells with junctions, prices and weights at random; some of one piece."""
    name, _, dart = request.param.partition(" with ")
    chance = np.random.default_rng(7)
    level = level_of(FORMS[name])
    level.price = chance.uniform(0.5, 2.0, len(level.price))
    fields = fields_of_cells(level, 5)
    cut = cut_by_fields(level.surface, fields)
    assert len(cut.three.face) >= 2
    weights = chance.uniform(0.5, 2.0, 5)
    if dart:
        uncut = beyond(level, cut, cut.three.face[:1])
        cut = cut_by_fields(level.surface, fields, uncut=uncut)
        assert len(cut.end.face) >= 1
        weights[(uncut.any(axis=1))] = 1.3  # one piece, one weight
    return level, fields, cut, weights


def beyond(level, cut, faces):
    """(K, K) bool: in each face, where three regions meet, the third is of one piece with the first two."""
    uncut = np.zeros((int(cut.labels.max()) + 1,) * 2, dtype=bool)
    for a, b, c in cut.labels[level.surface.triangles[faces]].tolist():
        uncut[[a, c, b, c], [c, a, c, b]] = True
    return uncut


@pytest.mark.parametrize("energy", ENERGIES)
def test_slow_twin_agrees(case, energy):
    level, _, cut, weights = case
    cost = evaluate(level, cut, 0.3, ENERGIES[energy], weights)
    distortion, length, total, u = slow_cost(level, cut, 0.3, density(ENERGIES[energy]), weights)
    assert cost.distortion == pytest.approx(distortion, rel=1e-10)
    assert cost.length == pytest.approx(length, rel=1e-12)
    assert cost.total == pytest.approx(total, rel=1e-10)
    np.testing.assert_allclose(cost.u, u, rtol=0, atol=1e-10)


@pytest.mark.parametrize("name", FORMS)
@pytest.mark.parametrize("energy", ENERGIES)
def test_slow_twin_agrees_along_edges(name, energy):
    """Borders of five cells, and a slit where there was none: a run that ends in the middle of a piece."""
    form = Form(*FORMS[name])
    surface, chance = form.surface, np.random.default_rng(5)
    price = chance.uniform(0.5, 2.0, len(form.points))
    ladder = Ladder(surface, price, rungs=())
    level = ladder.levels[-1]
    owner = cells(level, 5).labels[surface.triangles].min(axis=1)
    a, b = surface.edge_triangles.T
    seam = ~surface.open_edges & (owner[a] != owner[b])
    seam[np.flatnonzero(~surface.open_edges)[3]] = True
    cost = network_cost(ladder, Network(surface, seam, np.arange(len(owner))), 0.3, ENERGIES[energy])
    distortion, length, total, u = slow_edges_cost(level.surface.points, surface.triangles, surface.edges[seam].tolist(),
                                                   level.load / level.mass, price, 0.3, density(ENERGIES[energy]))
    assert cost.distortion == pytest.approx(distortion, rel=1e-10)
    assert cost.length == pytest.approx(length, rel=1e-12)
    assert cost.total == pytest.approx(total, rel=1e-10)
    np.testing.assert_allclose(cost.u, u, rtol=0, atol=1e-10)


@pytest.mark.parametrize("energy", ENERGIES)
def test_slope_by_every_cut_place(case, energy):
    level, _, cut, weights = case
    cut = replace(cut, place=np.clip(cut.place, 0.05, 0.95))
    cost = evaluate(level, cut, 0.3, ENERGIES[energy], weights)
    step, measured = 1e-5, np.empty(len(cut.place))
    for k in range(len(cut.place)):
        ends = []
        for sign in (-step, step):
            place = cut.place.copy()
            place[k] += sign
            ends.append(evaluate(level, replace(cut, place=place), 0.3, ENERGIES[energy], weights, gradient=False).total)
        measured[k] = (ends[1] - ends[0]) / (2 * step)
    # the second order error of the central difference is what is left
    np.testing.assert_allclose(cost.slope, measured, rtol=0, atol=1e-6 * np.abs(measured).max())


@pytest.mark.parametrize("energy", ENERGIES)
def test_slope_through_the_fields(case, energy):
    level, fields, cut, weights = case
    cost = evaluate(level, cut, 0.3, ENERGIES[energy], weights)
    gradient = field_gradient(level, cut, fields, cost.slope)
    for seed in range(3):
        direction = np.random.default_rng(seed).normal(size=fields.shape) * np.abs(fields).mean()
        ends = []
        for step in (-1e-6, 1e-6):
            moved = cut_by_fields(level.surface, fields + step * direction, uncut=cut.uncut)
            assert (moved.labels == cut.labels).all()
            ends.append(evaluate(level, moved, 0.3, ENERGIES[energy], weights, gradient=False).total)
        assert (gradient * direction).sum() == pytest.approx((ends[1] - ends[0]) / 2e-6, rel=1e-6, abs=1e-7)


def test_a_cut_at_its_stop_has_no_slope():
    level = level_of(icosphere(2))
    height = level.surface.points[:, 2]
    height = np.where(height > 0, height, height * 1e-6)  # nearly on the points below: nearer than a cut may come
    fields = np.column_stack([height, -height])
    cut = cut_by_fields(level.surface, fields)
    stopped = np.minimum(cut.place, 1 - cut.place) <= NEAREST
    assert stopped.sum() > 5
    slope = np.ones(len(cut.edge))
    gradient = field_gradient(level, cut, fields, slope * stopped)
    assert np.abs(gradient).max() == 0


@pytest.mark.parametrize("gradient", [True, False])
def test_an_open_form_in_one_piece_has_no_seams(gradient):
    level = level_of(cap(1.4, 7))
    cut = cut_by_fields(level.surface, np.ones((len(level.mass), 1)))
    cost = evaluate(level, cut, 0.3, "square", gradient=gradient)
    assert cost.length == 0 and cost.total == cost.distortion > 0
    assert not gradient or cost.slope.shape == (0,)


def test_only_thrift_scales_the_length():
    level = level_of(dumbbell(16))
    cut = cells(level, 4)
    low, high = (evaluate(level, cut, thrift, "square") for thrift in (0.1, 0.4))
    assert low.length == high.length and low.distortion == high.distortion
    assert high.total - low.total == pytest.approx(0.3 * low.length, rel=1e-12)
    doubled = evaluate(level, cut, 0.1, "square", np.full(4, 2.0))
    assert doubled.distortion == pytest.approx(2 * low.distortion, rel=1e-12)


def test_what_is_across_a_seam_does_not_matter():
    level = level_of(ellipsoid(1.0, 0.8, 0.5, 3))
    cut = cells(level, 2)
    inside = cut.labels == 0
    before = evaluate(level, cut, 0.1, "square", gradient=False).u
    level.density = np.where(inside, level.density, 3 * level.density)
    after = evaluate(level, cut, 0.1, "square", gradient=False).u
    np.testing.assert_allclose(after[inside], before[inside], rtol=0, atol=1e-12)
    np.testing.assert_allclose(after[~inside], 3 * before[~inside], rtol=1e-9)


def test_a_given_partition_at_any_scale():
    points, faces = ellipsoid(1.0, 0.7, 0.6, 3)
    labels = (points[faces].mean(axis=1)[:, 0] > 0.1).astype(int)
    small, large = Form(points, faces), Form(30 * points, faces)
    np.testing.assert_allclose(log_scale(small, labels), log_scale(large, labels), atol=1e-9)
    distortion, length, total = seam_energy(small, labels, 0.5, "hencky")
    assert total == pytest.approx(distortion + 0.5 * length)
    assert (distortion, length) == pytest.approx(seam_energy(large, labels, 0.5, "hencky")[:2])
    assert seam_energy(small, 9 - 4 * labels) == pytest.approx(seam_energy(small, labels))  # names of pieces mean nothing
