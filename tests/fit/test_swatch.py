"""Goods from a swatch: worked by hand, and by the trellis relations between bias stretch and shear."""

from dataclasses import replace
from math import cos, degrees, radians, sqrt

import pytest
from seamwright.errors import WishError
from seamwright.fit.goods import get, goods, read_goods, write_goods
from seamwright.fit.swatch import goods_from_swatch


def test_lengths_at_a_gentle_and_a_hard_pull_are_the_limits():
    # 100 mm along the warp become 100.6 and 102 mm: 0.6 and 2 %; along the weft 101 and 103.5; eased in to 99 and 97
    mine = goods_from_swatch("my duck", "canvas", warp=(0.1006, 0.102), weft=(0.101, 0.1035), eased=(0.099, 0.097))
    assert mine.stretch_warp == pytest.approx((0.006, 0.02))
    assert mine.stretch_weft == pytest.approx((0.01, 0.035))
    assert mine.ease_in == pytest.approx((0.01, 0.03))
    canvas = get("canvas")
    assert mine == replace(canvas, name="my duck", stretch_warp=mine.stretch_warp, stretch_weft=mine.stretch_weft,
                           ease_in=mine.ease_in)


@pytest.mark.parametrize("shear, bias", [(10, 8.3), (20, 15.9), (30, 22.5), (40, 28.2)])
def test_bias_stretch_is_shear_as_in_a_trellis(shear, bias):
    # a square of yarns that keep their length, sheared by g, has the diagonal sqrt2 cos(45 - g/2) (plane geometry)
    exact = sqrt(2) * cos(radians(45 - shear / 2)) - 1
    assert 100 * exact == pytest.approx(bias, abs=0.06)
    mine = goods_from_swatch("cloth", "canvas", bias=(0.1, 0.1 * (1 + exact)))
    assert degrees(mine.shear[1]) == pytest.approx(shear, abs=1e-9)
    assert mine.shear[0] == pytest.approx(0)


def test_one_firm_pull_is_the_hard_limit():
    mine = goods_from_swatch("stretchy", "jersey", warp=0.115, weft=0.13)
    assert mine.stretch_warp == pytest.approx((0.05, 0.15))
    assert mine.stretch_weft == pytest.approx((0.1, 0.3))
    assert mine.shear is None and mine.ease_in == get("jersey").ease_in
    woven = goods_from_swatch("cloth", "canvas", bias=0.1 * sqrt(1.5))
    assert [degrees(g) for g in woven.shear] == pytest.approx([15, 30])


def test_a_longer_line_reads_finer():
    for marked in (0.5, 0.1):
        mine = goods_from_swatch("a", "canvas", warp=1.02 * marked, marked=marked)
        assert mine.stretch_warp == pytest.approx((0.02 / 3, 0.02))


@pytest.mark.parametrize("lengths, said", [
    (dict(warp=0.095), "at least the marked 0.1 m"), (dict(warp=102), "all lengths in metres"),
    (dict(eased=0.101), "at most the marked"), (dict(weft=(0.103, 0.101)), "gentle measure comes first"),
    (dict(weft="long"), "one length or two"), (dict(weft=(0.1, 0.2, 0.3)), "one length or two"),
    (dict(warp=float("nan")), "one length"),
    (dict(bias=0.15), "knitted, leave the bias out"),
])
def test_lengths_that_cannot_be_are_refused(lengths, said):
    with pytest.raises(WishError, match=said):
        goods_from_swatch("mine", "canvas", **lengths)


def test_swatch_goods_go_to_a_file_and_back(tmp_path):
    mine = goods_from_swatch('the "blue" roll', "upholstery", warp=(0.101, 0.103), bias=0.12)
    for one in (mine, *goods().values()):
        path = tmp_path / "mine.toml"
        write_goods(one, path)
        back = read_goods(path)
        assert back.name == one.name and back.nap == one.nap and back.price_per == one.price_per
        for field in ("stretch_warp", "stretch_weft", "ease_in", "shear", "thickness", "width", "length", "allowance",
                      "mismatch", "price"):
            value = getattr(one, field)
            assert getattr(back, field) == (None if value is None else pytest.approx(value, rel=1e-8))


def test_a_place_that_cannot_be_written_is_refused(tmp_path):
    with pytest.raises(WishError, match="cannot be written.*Choose another place"):
        write_goods(get("canvas"), tmp_path / "missing" / "mine.toml")
