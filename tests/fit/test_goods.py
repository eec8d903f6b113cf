"""The goods: built-in values, shortened names, the maker's own file and its faults."""

from math import degrees

import numpy as np
import pytest
from seamwright.errors import WishError
from seamwright.fit.goods import LEAST_LIMIT, Goods, get, goods, read_goods

TABLE = '["my canvas"]\nstretch_warp_percent = [0.5, 2]\nstretch_weft_percent = [1, 3]\nease_in_percent = [0.5, 1.5]\n'


def test_the_twelve_built_in_goods_are_there_in_the_trades_order():
    assert list(goods()) == ["canvas", "upholstery cloth", "wool felt", "leather", "knit-back vinyl", "woven-back vinyl",
                             "cotton jersey", "spandex", "neoprene", "eva foam", "card", "sheet metal"]


def test_percent_degrees_and_millimetres_become_shares_radians_and_metres():
    # starting values of common practice
    canvas = get("canvas")
    assert canvas.stretch_warp == pytest.approx((0.005, 0.02))
    assert [degrees(s) for s in canvas.shear] == pytest.approx([15, 30])
    assert canvas.width == pytest.approx(1.5)
    assert get("leather").stretch_weft == pytest.approx((1.3 * 0.03, 1.3 * 0.08))


@pytest.mark.parametrize("short, full", [("felt", "wool felt"), ("Uphol", "upholstery cloth"), ("eva", "eva foam"),
                                         ("knit vinyl", "knit-back vinyl"), ("metal", "sheet metal"), ("CANVAS", "canvas")])
def test_a_name_may_be_shortened(short, full):
    assert get(short).name == full


def test_a_name_that_fits_two_goods_or_none_is_refused_with_the_choices():
    with pytest.raises(WishError, match="knit-back vinyl or woven-back vinyl"):
        get("vinyl")
    with pytest.raises(WishError, match="'tweed' is not known.*canvas"):
        get("tweed")
    with pytest.raises(WishError, match="'' is not known|'' may be"):
        get("")


def test_limits_run_straight_from_hard_to_comfortable():
    canvas = get("canvas")
    warp, weft, ease_in, shear = canvas.limits(0.5)
    assert np.expm1([warp, weft]) == pytest.approx([0.0125, 0.02])
    assert -np.expm1(-ease_in) == pytest.approx(0.01)
    assert degrees(shear) == pytest.approx(22.5)
    assert get("sheet metal").limits()[2] == LEAST_LIMIT
    assert get("felt").limits()[3] is None


def test_which_goods_may_lie_in_any_direction():
    free = [name for name, one in goods().items() if one.grain_free]
    assert free == ["wool felt", "spandex", "eva foam", "card", "sheet metal"]


def test_the_makers_own_file(tmp_path):
    path = tmp_path / "own.toml"
    path.write_text(TABLE + "width_mm = 910\n")
    own = read_goods(path)
    assert (own.name, own.width, own.shear) == ("my canvas", pytest.approx(0.91), None)


@pytest.mark.parametrize("text, words", [
    (TABLE + "width_inch = 60\n", ["own.toml", "width_inch", "width_mm"]),
    (TABLE + "width_mm = -1\n", ["own.toml", "my canvas", "width_mm is -1", "from 10 to 100000"]),
    (TABLE + "allowance_mm = 2000\n", ["own.toml", "allowance_mm is 2000", "from 0 to 1000"]),
    (TABLE + "shear_degrees = [15, 95]\n", ["shear_degrees is 95", "from 0 to 80"]),
    (TABLE + "mismatch_percent = [1, 2]\nease_percent = 1.5\n", ["own.toml", "ease is 0.015", "at most 0.01"]),
    (TABLE + "thickness_cm = 0.3\n", ["thickness_cm", "expected one of", "thickness_mm"]),
    (TABLE + 'width_mm = "1.5 m"\n', ["width_mm", "1.5 m", "without a unit"]),
    (TABLE + "shear_degrees = [30, 15]\n", ["own.toml", "shear", "comfortable", "hard"]),
    (TABLE + "shear_degrees = 30\n", ["shear", "pair"]),
    (TABLE + 'nap = "yes"\n', ["nap", "true or false"]),
    (TABLE + 'price_per = "yard"\n', ["price_per", "yard", "m2"]),
    (TABLE.replace("[0.5, 2]", "[0.5, nan]"), ["stretch_warp", "nan"]),
    (TABLE.replace("ease_in_percent = [0.5, 1.5]", ""), ["ease_in_percent", "missing"]),
    (TABLE + "[other]\n", ["stretch_warp_percent is missing"]),
    ("width_mm = 3\n", ["width_mm", "outside a table"]),
    ("[canvas\n", ["not valid TOML"]),
    ("", ["holds 0 goods"]),
])
def test_a_faulty_file_is_refused_with_what_and_where(tmp_path, text, words):
    path = tmp_path / "own.toml"
    path.write_text(text)
    with pytest.raises(WishError) as error:
        read_goods(path)
    for word in words:
        assert word in str(error.value)


def test_a_missing_file_is_named(tmp_path):
    with pytest.raises(WishError, match="nowhere.toml"):
        read_goods(tmp_path / "nowhere.toml")


def test_goods_made_in_python_are_checked_too():
    with pytest.raises(WishError, match="ease_in is 0.95"):
        Goods(name="x", stretch_warp=(0, 0.1), stretch_weft=(0, 0.1), ease_in=(0.1, 0.95))
