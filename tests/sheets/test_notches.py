import numpy as np
import pytest
import shapely
from seamwright.sheets.draft import draft
from seamwright.sheets.notches import path_places, takes_slits
from sheets import samples


def places_on_form(pattern, name):
    """{(piece, side): (k, 3)} where the notches of a seam lie on the form, read back from their flat places."""
    found = {}
    for d, piece in zip(draft(pattern), pattern.pieces, strict=True):
        for notch in (n for n in d.notches if n.seam == name):
            flat = piece.flat * 1000
            a, b, c = (flat[piece.triangles[:, k]] for k in range(3))
            u, v, w = b - a, c - a, notch.at - a
            det = u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
            s = (w[:, 0] * v[:, 1] - w[:, 1] * v[:, 0]) / det
            t = (u[:, 0] * w[:, 1] - u[:, 1] * w[:, 0]) / det
            inside = int(np.argmax(np.minimum(np.minimum(s, t), 1 - s - t)))
            p, q, r = piece.points[piece.triangles[inside]]
            found.setdefault(round(notch.share, 9), []).append(p + s[inside] * (q - p) + t[inside] * (r - p))
    return found


@pytest.mark.parametrize("name", ["cylinder", "cube", "pouch"])
def test_mates_meet_at_the_same_point_of_the_form(name):
    pattern = samples.ALL[name]()
    for seam in (s for s in pattern.seams if not s.open):
        by_share = places_on_form(pattern, seam.name)
        assert by_share, f"{seam.name} has no notch"
        for mates in by_share.values():
            assert len(mates) == 2
            assert np.linalg.norm(mates[0] - mates[1]) < 1e-9


def test_ease_has_a_notch_at_either_end_on_both_sides():
    pattern = samples.pouch()
    seam = pattern.seams[0]
    plain = places_on_form(pattern, seam.name)
    seam.eased = (0.4, 0.71)
    by_share = places_on_form(pattern, seam.name)
    assert {0.4, 0.71} <= set(by_share) and not {0.4, 0.71} & set(plain)
    for mates in by_share.values():
        assert len(mates) == 2 and np.linalg.norm(mates[0] - mates[1]) < 1e-9
    assert np.diff(sorted(by_share)).min() * path_places(seam.path)[-1] > 0.004  # none so near that two read as one


def test_spacing_is_that_of_common_practice():
    pattern = samples.cylinder(height=1.2)
    shares = sorted({round(n.share, 9) for n in draft(pattern)[0].notches if n.seam == "s1"})
    gaps = np.diff(np.r_[0, shares, 1]) * 1200
    singles = gaps[gaps > 10]
    assert singles.min() > 90 and singles.max() < 150


def test_a_seam_matched_the_wrong_way_round_shows():
    for pattern in (samples.cylinder(), samples.cube(), samples.cylinder(height=2.0)):
        for seam in (s for s in pattern.seams if not s.open):
            shares = np.array(sorted({n.share for d in draft(pattern) for n in d.notches if n.seam == seam.name}))
            assert not np.allclose(shares, 1 - shares[::-1])


def test_notches_lie_on_the_stitch_line_and_point_outward():
    for make in samples.ALL.values():
        for d in draft(make()):
            for notch in d.notches:
                assert d.area.boundary.distance(shapely.Point(notch.at)) < 1e-6
                assert not d.area.contains(shapely.Point(notch.at + 0.5 * notch.outward))
                assert d.area.contains(shapely.Point(notch.at - 0.5 * notch.outward))


def test_only_uncoated_cloth_is_slit_and_no_slit_passes_half_the_allowance():
    assert all(takes_slits(samples.goods(name)) for name in ("canvas", "upholstery cloth"))
    for name in ("leather", "woven-back vinyl", "knit-back vinyl", "cotton jersey", "neoprene", "eva foam"):
        assert not takes_slits(samples.goods(name))
    d = draft(samples.cube(goods_=samples.goods("canvas", allowance=0.006)))[0]
    for stroke in (s for s in d.strokes if s.layer == "notches"):
        assert d.cut.boundary.distance(shapely.Point(stroke.points[0])) < 1e-6
        assert np.linalg.norm(stroke.points[1] - stroke.points[0]) == pytest.approx(3.0)


def test_a_closed_seam_has_at_least_its_quarter_points():
    pattern = samples.cap(polar=0.2, radius=0.05)
    edge = pattern.seams[0]
    dome = pattern.pieces[0]
    edge.sides = (edge.sides[0], (dome.name, edge.sides[0][1]))  # sewn to itself: no use, but a closed path with two sides
    shares = sorted({round(n.share, 3) for n in draft(pattern)[0].notches})
    length = path_places(edge.path)[-1] * 1000
    assert len(shares) >= 4
    assert {0.5, 0.75} <= set(shares)
    assert shares[1] - shares[0] == pytest.approx(5.0 / length, abs=2e-3)
