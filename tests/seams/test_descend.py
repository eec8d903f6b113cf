"""The flow goes downhill, the fields follow the cut, the ladder keeps what it must, the foresight's quantiles are exact."""

import numpy as np
import pytest
from forms import cap, ellipsoid, icosphere, starfish, torus
from parted import OWN, fields_of_cells, level_of
from seamwright.fit.foresee import QUANTILE, area_quantile
from seamwright.form.form import Form
from seamwright.form.measure import total_area
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.descend import LAST, REST, descend
from seamwright.seams.energy import evaluate
from seamwright.seams.fields import redistance
from seamwright.seams.ladder import Ladder

FORMS = {"egg": ellipsoid(1.0, 0.7, 0.5, 3), "torus": torus(1.0, 0.4, 36, 20), "cap": cap(1.6, 12), "starfish": starfish(26)}


@pytest.mark.parametrize("energy", ["square", "dirichlet", "hencky", OWN], ids=["square", "dirichlet", "hencky", "own"])
@pytest.mark.parametrize("name", FORMS)
def test_downhill(name, energy):
    level = level_of(FORMS[name])
    fields = fields_of_cells(level, 4)
    end = descend(level, fields, 0.2, energy, steps=10)
    begin = evaluate(level, cut_by_fields(level.surface, fields), 0.2, energy).total
    assert end.history[0] == pytest.approx(begin, rel=0.02)  # redistancing moves the cut by a little, and comes first
    assert end.cost.total < 0.97 * begin
    assert end.cost.total == pytest.approx(min(end.history), rel=0.01)  # only the redistancing may cost a little
    assert end.steps <= 10
    again = evaluate(level, end.cut, 0.2, energy)
    assert again.total == pytest.approx(end.cost.total, rel=1e-12)  # cut and cost belong together
    assert (end.cut.labels == end.fields.argmax(axis=1)).all()


def test_says_how_it_ended():
    level = level_of(FORMS["egg"])
    fields = fields_of_cells(level, 2)
    short, long = descend(level, fields, 0.2, steps=3), descend(level, fields, 0.2, steps=400, tolerance=1e-3)
    assert not short.converged and short.steps == 3
    assert long.converged and long.steps < 400
    rest = descend(level, long.fields, 0.2, steps=20, tolerance=1e-3)
    assert rest.cost.total > 0.99 * long.cost.total  # where it came to rest there is little left to gain
    enough = next(end for end in (descend(level, fields, 0.2, steps=steps) for steps in range(3, 60, 3)) if end.converged)
    before = enough.history[-1 - LAST :][0]
    assert before - enough.history[-1] < REST * before
    more = descend(level, enough.fields, 0.2, steps=60)
    assert more.cost.total > (1 - 2 * REST) * enough.cost.total


def test_halves_of_a_sphere_become_equal():
    """A lopsided cap's edge flows to the great circle, where seam is dear enough that it does not wind."""
    level = level_of(icosphere(4))
    height = level.surface.points[:, 2] - 0.3
    end = descend(level, np.column_stack([height, -height]), 2.0, steps=60, tolerance=1e-6)
    share = level.mass[end.cut.labels == 0].sum() / level.mass.sum()
    assert share == pytest.approx(0.5, abs=0.01)
    assert end.cost.length == pytest.approx(2 * np.pi, rel=0.002)


@pytest.mark.parametrize("name", FORMS)
def test_distances_keep_the_cut(name):
    level = level_of(FORMS[name])
    cut = cut_by_fields(level.surface, fields_of_cells(level, 5))
    fields = redistance(level, cut, 5)
    again = cut_by_fields(level.surface, fields)
    assert (again.labels == cut.labels).all()
    moved = np.abs(again.place - cut.place) * level.surface.edge_lengths[cut.edge]
    assert np.median(moved) < 0.02 * level.edge_length
    two = fields[np.arange(len(cut.labels)), cut.labels]
    assert (two > 0).all()
    others = fields.copy()
    others[np.arange(len(cut.labels)), cut.labels] = -1
    assert (others < 0).all()


@pytest.mark.parametrize("name", FORMS)
def test_every_rung_carries_the_whole_form(name):
    points, faces = FORMS[name]
    surface = Form(3.7 * points, faces).surface
    price = np.random.default_rng(1).uniform(1, 2, len(surface.points))
    ladder = Ladder(surface, price, rungs=(60, 200))
    factor = np.sqrt(4 * np.pi / total_area(surface))
    assert len(ladder.levels) == 3
    for level, owner in zip(ladder.levels, ladder.owners, strict=True):
        assert level.load.sum() == pytest.approx(ladder.levels[-1].load.sum(), abs=1e-9)
        assert level.areas.sum() == pytest.approx(4 * np.pi, rel=1e-9)
        assert level.surface.euler == surface.euler
        assert sorted(set(owner.tolist())) == list(range(len(level.surface.points)))
        assert 1 <= level.price.min() and level.price.max() <= 2
    assert ladder.factor == pytest.approx(factor, rel=1e-12)


def test_a_network_climbs_the_ladder():
    surface = Form(*ellipsoid(1.0, 0.7, 0.5, 4)).surface
    ladder = Ladder(surface, rungs=(300,))
    coarse, fine = ladder.levels
    fields = descend(coarse, fields_of_cells(coarse, 2), 0.2, steps=30).fields
    low = evaluate(coarse, cut_by_fields(coarse.surface, fields), 0.2, "square")
    lifted = ladder.lift(fields, 0)
    high = evaluate(fine, cut_by_fields(fine.surface, lifted), 0.2, "square")
    assert high.length == pytest.approx(low.length, rel=0.05)
    assert high.total == pytest.approx(low.total, rel=0.1)


def test_quantiles_by_area_against_a_plain_count():
    chance = np.random.default_rng(2)
    values, area, group = chance.normal(size=900), chance.uniform(0.1, 1, 900), chance.integers(0, 4, 900)
    expected = []
    for number in range(5):
        inside = sorted(zip(values[group == number].tolist(), area[group == number].tolist(), strict=True))
        total, below = sum(size for _, size in inside), 0.0
        found = 0.0  # a group without members
        for value, size in inside:
            below += size
            if below / total >= QUANTILE:
                found = value
                break
        expected.append(found)
    np.testing.assert_array_equal(area_quantile(values, area, group, 5), expected)
