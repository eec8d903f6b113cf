"""The independent measurement: hand-worked stretches, shears, utilisations and verdicts."""

import numpy as np
import pytest
from forms import cap
from seamwright.fit.goods import Goods, get
from seamwright.fit.grain import lay_on_grain, resize
from seamwright.fit.judge import judge
from seamwright.fit.measure import area_quantile, areas, measure, stretches, utilisation, verdict, warp_weft_shear
from seamwright.flat import flatten
from seamwright.flat.flatten import as_complex, as_points
from seamwright.flat.rest import Rest
from seamwright.form.surface import Surface

CLOTH = Goods(name="cloth", stretch_warp=(0.01, 0.02), stretch_weft=(0.02, 0.04), ease_in=(0.005, 0.01),
              shear=(np.radians(15), np.radians(30)))
KNIT = Goods(name="knit", stretch_warp=(0.05, 0.10), stretch_weft=(0.10, 0.20), ease_in=(0.03, 0.06))


def sheet(form_from_goods):
    """A unit square of goods, two triangles, and the points on the form that a 2 x 2 map sends it to, tilted in space."""
    flat = np.array([[0, 0], [1, 0], [1, 1], [0, 1.0]])
    tilt = np.linalg.qr(np.random.default_rng(0).standard_normal((3, 3)))[0][:, :2]
    return flat @ np.asarray(form_from_goods, dtype=float).T @ tilt.T, np.array([[0, 1, 2], [0, 2, 3]]), flat


def turned(flat, angle):
    return flat @ np.array([[np.cos(angle), np.sin(angle)], [-np.sin(angle), np.cos(angle)]])


def test_stretch_is_signed_and_along_its_own_thread():
    # the form is 3 % longer than the goods along the warp (+y) and 1 % shorter along the weft (+x)
    square = sheet([[0.99, 0], [0, 1.03]])
    np.testing.assert_allclose(stretches(*square), [[0.03, -0.01]] * 2, atol=1e-14)
    np.testing.assert_allclose(warp_weft_shear(*square), [[0.03, -0.01, 0]] * 2, atol=1e-14)


def test_shear_is_the_change_of_the_right_angle():
    shear = np.radians(20)
    square = sheet([[1, np.sin(shear)], [0, np.cos(shear)]])
    np.testing.assert_allclose(warp_weft_shear(*square), [[0, 0, shear]] * 2, atol=1e-14)


@pytest.mark.parametrize("degrees, longer, shorter", [(10, 8.3, 9.1), (20, 15.9, 18.9), (30, 22.5, 29.3), (40, 28.2, 40.2)])
def test_trellis_bias_stretch(degrees, longer, shorter):
    # pure trellis shear g: bias extension sqrt2 cos(45 - g/2) - 1, contraction sqrt2 sin(45 - g/2) - 1
    shear = np.radians(degrees)
    square = sheet([[1, np.sin(shear)], [0, np.cos(shear)]])
    expected = np.sqrt(2) * np.array([np.cos(np.pi / 4 - shear / 2), np.sin(np.pi / 4 - shear / 2)]) - 1
    np.testing.assert_allclose(stretches(*square), [expected] * 2, atol=1e-12)
    np.testing.assert_allclose(100 * stretches(*square)[0], [longer, -shorter], atol=0.06)


def test_principal_stretches_equal_singular_values_of_a_general_routine():
    rng = np.random.default_rng(1)
    for _ in range(20):
        matrix = np.eye(2) + 0.4 * rng.standard_normal((2, 2))
        expected = np.linalg.svd(matrix, compute_uv=False) - 1
        np.testing.assert_allclose(stretches(*sheet(matrix))[0], expected, atol=1e-12)


@pytest.mark.parametrize("threads, used", [
    ([0.02, 0, 0], 1.0),                       # at the warp limit
    ([0.01, 0, 0], np.log(1.01) / np.log(1.02)),
    ([0, 0.04, 0], 1.0),                       # weft
    ([-0.01, 0, 0], 1.0), ([0, -0.01, 0], 1.0),  # eased in
    ([0, 0, np.radians(-15)], 0.5),            # shear, either way
    ([0.02, 0.08, np.radians(15)], np.log(1.08) / np.log(1.04)),   # the worst counts
])
def test_utilisation_of_woven_goods_by_hand(threads, used):
    assert utilisation(np.array([threads]), CLOTH)[0] == pytest.approx(used, rel=1e-12)


def test_comfort_shrinks_the_limits():
    at_comfort = np.array([[0.01, 0.0, 0.0]])
    assert utilisation(at_comfort, CLOTH, 1.0)[0] == pytest.approx(1)
    assert utilisation(np.array([[0.015, 0.0, 0.0]]), CLOTH, 0.5)[0] == pytest.approx(1)


def test_utilisation_of_knits_by_hand_and_in_every_direction():
    assert utilisation(np.array([[0.1, 0, 0]]), KNIT)[0] == pytest.approx(1)
    assert utilisation(np.array([[0, 0.2, 0]]), KNIT)[0] == pytest.approx(1)
    assert utilisation(np.array([[-0.06, 0, 0]]), KNIT)[0] == pytest.approx(1)
    # stretched in one direction only, at any angle from the weft: its limit runs from weft to warp as cos^2 and sin^2
    for angle in np.radians([0, 20, 45, 70, 90]):
        along = np.array([np.cos(angle), np.sin(angle)])
        threads = warp_weft_shear(*sheet(np.eye(2) + 0.05 * np.outer(along, along)))
        share = np.log(1.05) * (np.cos(angle)**2 / np.log(1.2) + np.sin(angle)**2 / np.log(1.1))
        np.testing.assert_allclose(utilisation(threads, KNIT), share, rtol=1e-9)


def test_utilisation_of_goods_alike_all_round_does_not_depend_on_the_grain():
    felt = get("felt")
    points, triangles, flat = sheet([[1.02, 0.01], [-0.015, 0.97]])
    stretch = stretches(points, triangles, flat)
    expected = max(np.log1p(stretch[0, 0]) / np.log(1.08), np.log1p(stretch[0, 1]) / np.log(0.94))
    for angle in (0, 0.4, 2.0):
        threads = warp_weft_shear(points, triangles, turned(flat, angle))
        np.testing.assert_allclose(utilisation(threads, felt), expected, rtol=1e-9)


def test_verdicts_by_area():
    area = np.array([990.0, 4.0, 6.0])
    threads = np.zeros((3, 3))
    assert verdict(threads, area, CLOTH, 0.5) == ("fits", 0)
    threads[1, 0] = 0.05    # 0.4 % of the area beyond everything: within the allowance
    assert verdict(threads, area, CLOTH, 0.5) == ("fits", pytest.approx(0.004))
    threads[2, 0] = 0.018   # beyond halfway, within hard: 1 % of the area no longer fits the wish
    assert verdict(threads, area, CLOTH, 0.5) == ("tight", pytest.approx(0.004))
    assert verdict(threads, area, CLOTH, 0.0) == ("fits", pytest.approx(0.004))
    threads[2, 0] = 0.03
    assert verdict(threads, area, CLOTH, 0.0) == ("strained", pytest.approx(0.010))


def test_area_quantile():
    assert area_quantile(np.array([3.0, 1, 2]), np.array([1.0, 1, 8]), 0.9) == 2
    assert area_quantile(np.array([3.0, 1, 2]), np.array([1.0, 1, 8]), 0.95) == 3


def test_size_balances_stretch_against_ease_in():
    # one triangle stretched, one eased in, by logs 0.05 and 0.02; knits take ln 1.1 along the warp and ln 1/0.94 of ease-in
    points = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [5, 0, 0], [6, 0, 0], [5, 1, 0.0]])
    triangles = np.array([[0, 1, 2], [3, 4, 5]])
    flat = points[:, :2] * np.repeat([[np.exp(-0.05)], [np.exp(0.02)]], 3, axis=0)
    sized = as_points(resize(Rest(Surface(points, triangles)), as_complex(flat), KNIT))
    shift = np.log(np.linalg.norm(sized[1] - sized[0]) / np.linalg.norm(flat[1] - flat[0]))
    stretch, ease = np.log(1.1), -np.log(0.94)
    assert shift == pytest.approx((0.05 * ease - 0.02 * stretch) / (stretch + ease), abs=1e-5)
    used = utilisation(warp_weft_shear(points, triangles, sized), KNIT)
    assert used[0] == pytest.approx(used[1], rel=1e-3)


def test_the_grain_that_fits_is_found_whichever_way_the_piece_lies():
    # a sheared and stretched square fits well with its threads as they are; turned by any angle it must be turned back
    shear = np.radians(20)
    points, triangles, flat = sheet([[1.03, np.sin(shear)], [0, np.cos(shear)]])
    best = utilisation(warp_weft_shear(points, triangles, flat), CLOTH).max()
    for angle in (0.3, 1.0, 2.0):
        lying = turned(flat, angle)
        assert utilisation(warp_weft_shear(points, triangles, lying), CLOTH).max() > 1.15 * best
        laid = as_points(lay_on_grain(Rest(Surface(points, triangles)), as_complex(lying), CLOTH))
        away = np.degrees(np.arctan2(*(laid[3] - laid[0]))) - np.degrees(np.arctan2(*(flat[3] - flat[0])))
        assert abs((away + 90) % 180 - 90) < 15 or abs(away % 180 - 90) < 15


def test_a_wanted_grain_is_held_and_up_stays_up():
    surface = Surface(*cap(0.8, 8))
    flat = as_complex(flatten(surface).flat)
    for wanted in ([1, 0, 0], [0, -1, 0], [1, 1, 0.3]):
        laid = as_points(lay_on_grain(Rest(surface), flat, get("canvas"), wanted=wanted))
        height = surface.points @ wanted
        slope = np.linalg.lstsq(np.column_stack([laid, np.ones(len(laid))]), height, rcond=None)[0]
        assert np.arctan2(slope[0], slope[1]) == pytest.approx(0, abs=0.02)
    tilted = Surface(surface.points[:, [2, 0, 1]], surface.triangles)
    laid = as_points(lay_on_grain(Rest(tilted), flat, get("leather")))
    assert np.corrcoef(laid[:, 1], tilted.points[:, 2])[0, 1] > 0


def test_the_judge_says_what_the_measurement_says():
    surface = Surface(*cap(0.5, 10))
    for goods in ("felt", "canvas", "jersey"):
        judged = judge(surface, get(goods), 0.5)
        measured = measure(surface.points, surface.triangles, judged.flat, get(goods), 0.5)
        assert judged.crossings == []
        assert (judged.utilisation <= 1) == (measured.fit == "fits")
        area = areas(surface.points, surface.triangles)
        assert measured.beyond == pytest.approx(area[measured.utilisation > 1].sum() / area.sum())
    assert judge(surface, get("felt"), 0.0).utilisation < judge(surface, get("felt"), 1.0).utilisation
