"""Length as edges count it: the shortest sum of steps along a triangle's or a grid's sides, and its exact gradient."""

from dataclasses import replace

import numpy as np
import pytest
from forms import icosphere, sheet, torus, wrapped_grid
from parted import cells
from scipy.optimize import linprog
from seamwright.form.form import Form
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.edgewise import LONGER, ROUNDING, covectors, stepped
from seamwright.seams.energy import borders, evaluate
from seamwright.seams.ladder import Ladder


def counted(vectors, step):
    """Sum |c . step| over vectors (J, 3)."""
    return np.abs(vectors @ step).sum()


def test_in_triangles_it_is_the_shortest_sum_of_sides():
    """Against a linear programme: the least sum of lengths with which the sides' directions add up to the step."""
    chance = np.random.default_rng(3)
    form = Form(icosphere(1)[0] * (1, 0.8, 0.6), icosphere(1)[1])
    surface = form.surface
    found = covectors(surface, np.ones(len(surface.edges), dtype=bool))
    for triangle in range(0, len(surface.triangles), 5):
        corners = surface.points[surface.triangles[triangle]]
        side = np.roll(corners, -1, axis=0) - corners
        unit = side / np.linalg.norm(side, axis=1)[:, None]
        step = chance.normal(size=2) @ side[:2]
        least = linprog(np.ones(6), A_eq=np.concatenate([unit, -unit]).T, b_eq=step, bounds=(0, None)).fun
        assert counted(found[triangle], step) == pytest.approx(least, rel=1e-9)


def test_on_a_square_grid_it_is_the_sum_of_both_ways():
    form = Form(*sheet(4))
    for vectors in covectors(form.surface, ~form.diagonal):
        for x, y in ((1, 0), (0, -1), (0.6, 0.8), (-0.3, 0.2)):
            assert counted(vectors, np.array([x, y, 0])) == pytest.approx(abs(x) + abs(y), rel=1e-12)


def test_the_kink_is_rounded_and_its_gradient_exact():
    chance = np.random.default_rng(1)
    plane, along = chance.normal(size=(40, 3, 2)), chance.normal(size=(40, 2))
    length, slope = stepped(along, plane)
    sharp = np.abs(np.einsum("sjd,sd->sj", plane, along)).sum(axis=1)
    assert (sharp <= length * LONGER * (1 + ROUNDING)).all()
    for axis in np.eye(2):
        rise = [stepped(along + sign * 1e-6 * axis, plane)[0] for sign in (-1, 1)]
        np.testing.assert_allclose(slope @ axis, (rise[1] - rise[0]) / 2e-6, rtol=1e-6, atol=1e-8)


def test_the_total_knows_it_with_its_gradient():
    """Every cut's slope against a central difference, on a form of quads and one of triangles, junctions and all."""
    for mesh in ((torus(1.0, 0.4, 16, 9)[0], wrapped_grid(16, 9)), icosphere(2)):
        form = Form(*mesh)
        level = Ladder(form.surface, rungs=(), along=~form.diagonal).levels[-1]
        cut = cells(level, 5)
        cut = replace(cut, place=np.clip(cut.place, 0.05, 0.95))
        cost, step = evaluate(level, cut, 0.3, "square"), 1e-5
        assert len(cut.three.face) and cost.length == pytest.approx(borders(level, cut).sum() / 2)
        for k in range(0, len(cut.place), 3):
            place = np.repeat(cut.place[None], 2, axis=0)
            place[:, k] += (-step, step)
            low, high = (evaluate(level, replace(cut, place=one), 0.3, "square", gradient=False).total for one in place)
            assert cost.slope[k] == pytest.approx((high - low) / (2 * step), rel=1e-5, abs=1e-6)


@pytest.mark.parametrize("angle", [0, 15, 30, 45])
def test_every_level_counts_alike(angle):
    """On a flat grid a straight seam counts its length times |cos| + |sin| of its angle to the grid, these rounded, on the
    form exactly so, on the coarse rungs nearly."""
    form = Form(*sheet(60))
    turn = np.radians(angle)
    for level in Ladder(form.surface, rungs=(200, 800), along=~form.diagonal).levels:
        off = (level.surface.points - level.surface.points.mean(axis=0)) @ (-np.sin(turn), np.cos(turn), 0)
        cut = cut_by_fields(level.surface, np.column_stack([off, -off]))
        ratio = evaluate(level, cut, 1.0, "square").length / evaluate(level.plain(), cut, 1.0, "square").length
        expected = (np.hypot(np.cos(turn), ROUNDING) + np.hypot(np.sin(turn), ROUNDING)) / (1 + ROUNDING) / LONGER
        assert ratio == pytest.approx(expected, rel=1e-5 if len(level.mass) == len(form.points) else 0.02)
