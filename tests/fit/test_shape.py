"""Pieces shaped for their goods: against the least possible stretch, the pinned cloth of theory, and plain sense."""

import numpy as np
import pytest
from forms import cap, split_quads
from seamwright.fit.goods import Goods, get, goods
from seamwright.fit.grain import lay_on_grain, pull
from seamwright.fit.judge import judge
from seamwright.fit.measure import area_quantile, areas, stretches, utilisation, warp_weft_shear
from seamwright.fit.shape import relax_for_goods
from seamwright.flat import flatten, overlaps
from seamwright.flat.flatten import as_complex, as_points
from seamwright.flat.rest import Rest
from seamwright.form.surface import Surface

ALIKE = Goods(name="stretches as it eases in", stretch_warp=(0.05, 0.1), stretch_weft=(0.05, 0.1),
              ease_in=(1 - 1 / 1.05, 1 - 1 / 1.1))


@pytest.mark.parametrize("degrees", [30, 60, 90])
def test_least_stretch_of_caps(degrees):
    # every map of a cap has largest / smallest stretch of a / sin a or more (Milnor 1969), so +- half its log at best
    polar = np.radians(degrees)
    surface = Surface(*cap(polar, 20))
    shaped = relax_for_goods(surface, flatten(surface).flat, ALIKE)
    stretch = 1 + stretches(surface.points, surface.triangles, shaped.flat)
    area = areas(surface.points, surface.triangles)
    worst = np.exp(area_quantile(np.abs(np.log(stretch)).max(axis=1), area))
    best = np.sqrt(polar / np.sin(polar))
    assert worst == pytest.approx(best, rel=0.01)
    assert stretch.max() / stretch.min() > best**2 * (1 - 0.001)   # the mesh is a little flatter than the sphere


def test_shaping_never_makes_it_worse_and_helps_cloth_most():
    surface = Surface(*cap(np.pi / 3, 12))
    flat = flatten(surface).flat
    area = areas(surface.points, surface.triangles)
    for name, gain in (("canvas", 0.2), ("felt", 0.95), ("jersey", 0.85), ("leather", 0.95)):
        laid = as_points(lay_on_grain(Rest(surface), as_complex(flat), get(name)))
        before = area_quantile(utilisation(warp_weft_shear(surface.points, surface.triangles, laid), get(name)), area)
        shaped = relax_for_goods(surface, flat, get(name))
        after = area_quantile(utilisation(warp_weft_shear(surface.points, surface.triangles, shaped.flat), get(name)), area)
        assert after == pytest.approx(shaped.utilisation, rel=1e-6)
        assert after < gain * before


@pytest.mark.parametrize("name", goods())
def test_developments_stay_exact_in_every_goods(name):
    t = np.linspace(0, 2.5, 40)
    rim = np.column_stack([np.cos(t), np.sin(t), np.zeros(40)])
    low = np.arange(39)
    faces = np.concatenate([np.column_stack([low, low + 1, low + 41]), np.column_stack([low, low + 41, low + 40])])
    surface = Surface(np.concatenate([rim, 0.6 * rim + [0, 0, 0.8]]), faces)
    shaped = relax_for_goods(surface, flatten(surface).flat, get(name))
    assert np.abs(stretches(surface.points, surface.triangles, shaped.flat)).max() < 1e-8


def test_a_wanted_grain_is_held_while_shaping():
    surface = Surface(*cap(0.9, 12))
    points = surface.points * (1.0, 1.4, 1.0)
    surface = Surface(points, surface.triangles)
    flat = flatten(surface).flat
    for wanted in ([1.0, 0.5, 0], [0, -1, 0]):
        shaped = relax_for_goods(surface, flat, get("canvas"), wanted=wanted)
        x, y = pull(Rest(surface), wanted) @ shaped.flat
        assert y > 0
        assert x / y == pytest.approx(0, abs=1e-9)
    free = relax_for_goods(surface, flat, get("canvas"))
    assert free.utilisation < 1.05 * shaped.utilisation


def test_the_quick_judge_never_promises_more_than_full_shaping_keeps():
    for polar, name in ((0.5, "felt"), (0.9, "felt"), (0.7, "canvas"), (1.1, "canvas"), (0.9, "leather")):
        surface = Surface(*cap(polar, 10))
        quick = judge(surface, get(name), 0.2)
        full = judge(surface, get(name), 0.2, stages=None)
        assert full.utilisation <= max(1, quick.utilisation)
        assert quick.each.shape == (len(surface.triangles),)


def test_shaping_flips_nothing_and_is_the_same_every_time():
    surface = Surface(*cap(1.4, 10))
    flat = flatten(surface).flat
    for name in ("canvas", "card", "jersey"):
        once, again = (relax_for_goods(surface, flat, get(name)).flat for _ in range(2))
        assert once.tobytes() == again.tobytes()
        u, v = (once[surface.triangles[:, k]] - once[surface.triangles[:, 0]] for k in (1, 2))
        assert (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0] > 0).all()


def test_the_judge_goes_on_from_what_is_known():
    surface = Surface(*cap(1.1, 10))
    for name, stages in (("felt", 3), ("canvas", 6)):
        quick = judge(surface, get(name), 0.5)
        full = judge(surface, get(name), 0.5, stages=None)
        further = judge(surface, get(name), 0.5, stages=None, start=quick.flat, done=1)
        assert quick.utilisation > 1
        assert further.utilisation == pytest.approx(full.utilisation, rel=0.03)
        nothing = judge(surface, get(name), 0.5, stages=None, start=full.flat, done=stages)
        assert nothing.utilisation == pytest.approx(full.utilisation, rel=1e-3)


def test_a_piece_that_would_lie_over_itself_is_kept_apart_where_the_goods_take_it():
    # a cone of more than a full turn, slit from its rim to near its tip: exact in the flat, but over itself
    radius, angle = np.meshgrid(np.linspace(0.05, 1, 10), np.linspace(0, 2 * np.pi, 61), indexing="ij")
    points = np.stack([radius * np.cos(angle), radius * np.sin(angle), 0.3 * radius * np.sin(2 * angle)], axis=-1)
    index = np.arange(radius.size).reshape(radius.shape)
    quads = np.stack([index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]], axis=-1).reshape(-1, 4)
    surface = Surface(points.reshape(-1, 3), split_quads(quads))
    outline = surface.boundary_loops[0]
    assert overlaps(flatten(surface).flat, outline)
    for stages in (1, None):
        kept = judge(surface, get("jersey"), stages=stages)
        assert kept.crossings == [] == overlaps(kept.flat, outline)
        assert 0.05 < kept.utilisation <= 1
    told = judge(surface, get("card"), stages=None)
    assert told.crossings and told.utilisation < 0.01
