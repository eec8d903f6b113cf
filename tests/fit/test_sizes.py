"""What the goods hold: pieces no wider than the roll and no larger than the hide, and none too narrow to be sewn."""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest
import seamwright as sw
from forms import cylinder, globe, icosphere
from seamwright.fit.sizes import excess, is_strip, sized, upright
from seamwright.fit.tailor import Tailor
from seamwright.form.measure import total_area
from seamwright.parts import parts_of
from seamwright.seams.begun import network_of_labels
from seamwright.seams.ladder import Ladder
from seamwright.seams.refuse import measured
from seamwright.sheets.draft import draft
from seamwright.sheets.lay import too_large
from tiled import check_tiled

FELT, CANVAS = (sw.goods()[name] for name in ("wool felt", "canvas"))
CASES = {
    "ball": (icosphere(2, 0.3), replace(sw.goods()["spandex"], width=0.45)),
    "tube": (cylinder(0.3, 1.0, 24), replace(sw.goods()["card"], width=0.6, length=0.8)),
    "sleeve": (cylinder(0.3, 1.0, 24), replace(CANVAS, width=0.75)),
}


@cache
def covered(name, route):
    (points, faces), goods = CASES[name]
    form = sw.Form(points, faces, name=name)
    return form, sw.cover(form, sw.Wishes(goods=goods, comfort=0.0, route=route))


@pytest.fixture(params=[(name, route) for name in CASES for route in ("through", "edges")], name="made", ids="-".join)
def any_pattern(request):
    return covered(*request.param)


def test_the_goods_hold_every_piece_with_its_allowance(made):
    pattern = made[1]
    assert too_large(draft(pattern), pattern.goods) == []
    assert not any(note.startswith("Larger than the goods") for note in pattern.summary()["notes"])


def test_halved_pieces_are_disks_that_tile_the_form_and_fit(made):
    form, pattern = made
    check_tiled(form, pattern)
    assert pattern.fits
    by_name = {piece.name: piece for piece in pattern.pieces}
    for seam in pattern.seams:
        for name, along in seam.sides:
            if name is not None:
                np.testing.assert_allclose(by_name[name].points[along], seam.path, atol=1e-12)
        assert abs(seam.ease) < pattern.goods.mismatch[1]


@pytest.mark.parametrize("name", ["ball", "tube", "sleeve"])
def test_goods_that_are_wide_need_no_more_seam(name):
    (points, faces), goods = CASES[name]
    wide = replace(goods, width=20.0, length=None)
    pattern = sw.cover(sw.Form(points, faces), sw.Wishes(goods=wide, comfort=0.0))
    narrow = covered(name, "through")[1]
    length = [sum(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum() for seam in one.seams if not seam.open)
              for one in (pattern, narrow)]
    assert len(pattern.pieces) < len(narrow.pieces) and length[0] < length[1]


def test_a_number_of_pieces_goes_before_the_goods():
    """The maker may join goods; the sheets say what is too large."""
    (points, faces), goods = CASES["tube"]
    pattern = sw.cover(sw.Form(points, faces), sw.Wishes(goods=goods, comfort=0.0, pieces=2))
    assert len(pattern.pieces) == 2
    assert any(note.startswith("Larger than the goods") for note in pattern.summary()["notes"])


STRIP = np.array([(0, 0), (1, 0), (1, 0.2), (0, 0.2)])
LEAST = replace(FELT, width=0.5 + 2 * FELT.allowance)


def test_how_much_larger_than_the_goods_by_hand():
    assert excess(STRIP, LEAST, False)[0] == pytest.approx(2.0) and excess(STRIP, LEAST, False)[1] == pytest.approx([1, 0])
    over, _, across = excess(STRIP, LEAST, True)
    assert over == pytest.approx(0.4) and np.abs(across) == pytest.approx([0, 1])
    hide = replace(LEAST, length=0.8 + 2 * FELT.allowance)
    assert excess(STRIP, hide, True)[0] > 1 and excess(STRIP * 0.8, hide, True)[0] == pytest.approx(1, abs=0.02)
    assert LEAST.room[0] == pytest.approx(0.5) and LEAST.room[1] == np.inf


def test_a_piece_is_turned_where_that_is_how_the_goods_hold_it():
    turned = upright(STRIP, LEAST, True)
    assert np.ptp(turned, axis=0) == pytest.approx([0.2, 1.0])
    a, b = turned[1] - turned[0], turned[3] - turned[0]
    assert a[0] * b[1] - a[1] * b[0] == pytest.approx(0.2)  # the face side stays up
    np.testing.assert_array_equal(upright(STRIP, LEAST, False), STRIP)
    np.testing.assert_array_equal(upright(STRIP * 0.4, LEAST, True), STRIP * 0.4)


def test_a_symmetric_form_is_cut_across_alike_on_both_sides():
    """An ellipsoid wider than the goods: its seams are their own mirror image, to 0.5 % of its size or a quarter edge."""
    form = sw.Form(*globe(24, 17, (0.30, 0.22, 0.20)))
    narrow = replace(sw.goods()["spandex"], width=0.5)
    pattern = sw.cover(form, sw.Wishes(goods=narrow, comfort=0.0, symmetry=[((0, 0, 0), (1, 0, 0))]))
    wide = sw.cover(form, sw.Wishes(goods=replace(narrow, width=5.0), comfort=0.0, symmetry=[((0, 0, 0), (1, 0, 0))]))
    assert len(pattern.pieces) > len(wide.pieces) or len(pattern.seams) > len(wide.seams)
    off, edge = measured(pattern)[-1], form.surface.edge_lengths.mean() / np.sqrt(total_area(form.surface))
    assert off.name == "mirror error" and off.value < 0.25 * edge
    assert not any(note.startswith("Symmetry") for note in pattern.notes)


def test_strips_by_hand():
    assert is_strip(STRIP, 0.21) and not is_strip(STRIP, 0.19)
    # trade practice: at least 40 mm, and three allowances
    assert FELT.narrowest == pytest.approx(0.04) and CANVAS.narrowest == pytest.approx(0.06)


def test_a_strip_is_joined_to_a_piece_that_can_take_it():
    """A ball in three bands, the middle one 55 mm high, in goods with 20 mm of allowance: 60 mm is the least."""
    form = sw.Form(*globe(24, 17, (0.3, 0.3, 0.3)))
    part = parts_of(form, form.surface, *np.zeros((2, len(form.surface.edges)), bool), np.ones(len(form.points)))[0]
    height = form.points[form.triangles].mean(axis=1)[:, 2]
    network = network_of_labels(part.surface, np.digitize(height, [-0.025, 0.025]), ~part.diagonal)
    ladder = Ladder(part.surface)
    tailor = Tailor(ladder, None, replace(sw.goods()["spandex"], allowance=0.02, ease_in=(0.3, 0.4)), 0.0)
    met = tailor.judges.all(network)
    assert met.network.pieces[0] == 3
    found = sized(part, tailor, met, "through")
    assert found.network.pieces[0] == 2 and found.fits
    for piece, one in enumerate(found.judged):
        assert not is_strip(one.flat[found.network.piece_surface(piece)[0].boundary_loops[0]], 0.06)
