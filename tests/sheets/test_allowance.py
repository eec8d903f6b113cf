import numpy as np
import pytest
import shapely
from seamwright.sheets.allowance import MITRE_LIMIT, cut_area, stitch_area


def distance_to_line(points, ring):
    """(k,) plain distance of points from a closed polyline, one segment after another."""
    best = np.full(len(points), np.inf)
    for a, b in zip(ring, np.roll(ring, -1, axis=0), strict=True):
        t = np.clip(((points - a) @ (b - a)) / max((b - a) @ (b - a), 1e-300), 0, 1)
        best = np.minimum(best, np.linalg.norm(points - a - t[:, None] * (b - a), axis=1))
    return best


def boundary_points(area, step=0.7):
    rings = [area.exterior, *area.interiors]
    return np.array([ring.interpolate(s).coords[0] for ring in rings for s in np.arange(0, ring.length, step)])


SQUARE = np.array([[0, 0], [100, 0], [100, 80], [0, 80]], dtype=float)
ELL = np.array([[0, 0], [120, 0], [120, 50], [50, 50], [50, 140], [0, 140]], dtype=float)
turn = np.linspace(0, 2 * np.pi, 60, endpoint=False)
DISK = 70 * np.column_stack([np.cos(turn), np.sin(turn)])
BEAN = (60 + 25 * np.cos(2 * turn))[:, None] * np.column_stack([np.cos(turn), np.sin(turn)])


@pytest.mark.parametrize("ring", [SQUARE, ELL, DISK, BEAN], ids=["square", "ell", "disk", "bean"])
@pytest.mark.parametrize("allowance", [6.0, 13.0, 20.0])
def test_every_point_of_the_cut_line_is_the_allowance_outside(ring, allowance):
    points = boundary_points(cut_area(ring, allowance))
    distance = distance_to_line(points, ring)
    # the library simplifies concave runs by up to 1 % of the distance
    assert distance.min() > 0.985 * allowance
    assert distance.max() < MITRE_LIMIT * allowance
    assert not shapely.contains_xy(shapely.Polygon(ring), *points.T).any()


def test_mitred_corners_of_a_rectangle_have_the_area_of_the_larger_rectangle():
    assert cut_area(SQUARE, 10.0).area == pytest.approx(120 * 100, rel=1e-12)


def test_a_sharp_point_is_bevelled():
    spike = np.array([[0, 0], [200, -4], [200, 4]], dtype=float)
    cut = cut_area(spike, 10.0)
    tip = boundary_points(cut, 0.2)
    assert np.linalg.norm(tip - [0, 0], axis=1).max() < 220
    assert -MITRE_LIMIT * 10 - 1e-9 <= tip[:, 0].min() < -9


def test_a_dart_is_not_cut_and_a_wide_mouth_is():
    def with_slit(width):
        slit = [[50 + width / 2, 100], [50, 40], [50 - width / 2, 100]]
        return np.array([[0, 0], [100, 0], [100, 100], *slit, [0, 100]], float)
    assert shapely.contains_xy(cut_area(with_slit(8.0), 10.0), 50, 105)
    assert not shapely.contains_xy(cut_area(with_slit(60.0), 10.0), 50, 95)


def test_an_opening_within_the_piece_is_cut_out_and_a_small_one_is_not():
    def clasp(inner):
        a = np.radians(np.linspace(5, 355, 80))
        ring = np.column_stack([np.cos(a), np.sin(a)])
        return np.vstack([100 * ring, inner * ring[::-1]])
    large = cut_area(clasp(60.0), 12.0)
    assert len(large.interiors) == 1
    assert shapely.Polygon(large.interiors[0]).area == pytest.approx(np.pi * 48**2, rel=0.02)
    assert len(cut_area(clasp(16.0), 12.0).interiors) == 0


def test_no_allowance_cuts_on_the_stitch_line():
    assert cut_area(ELL, 0.0).equals(stitch_area(ELL))


def test_a_line_that_crosses_itself_still_gives_goods_to_cut():
    bow = np.array([[0, 0], [100, 80], [100, 0], [0, 60]], dtype=float)
    assert stitch_area(bow).is_valid
    assert cut_area(bow, 5.0).is_valid
