import itertools

import numpy as np
import pytest
import shapely
from seamwright.sheets.draft import draft
from seamwright.sheets.lay import lay, too_large, yield_of
from shapely.affinity import affine_transform
from sheets import samples


def placed(sheet):
    return [affine_transform(d.cut, [1, 0, 0, -1, *offset]) for d, offset in sheet.pieces]


@pytest.mark.parametrize("name", list(samples.ALL))
def test_every_piece_lies_once_within_its_sheet_and_none_overlap(name):
    pattern = samples.ALL[name]()
    drafts = draft(pattern)
    sheets = lay(pattern, drafts)
    assert sorted(d.number for s in sheets for d, _ in s.pieces) == list(range(1, len(drafts) + 1))
    for sheet in sheets:
        assert sheet.width <= pattern.goods.width * 1000
        for cut in placed(sheet):
            assert shapely.box(0, 0, sheet.width, sheet.height).contains(cut)
        for a, b in itertools.combinations(placed(sheet), 2):
            assert a.distance(b) > 5.9


def test_short_sheets_are_filled_one_after_another():
    pattern = samples.cube(side=0.4, goods_=samples.goods("card", width=1.0, length=0.7))
    sheets = lay(pattern, draft(pattern))
    assert len(sheets) == 3
    assert all(sheet.height <= 700 for sheet in sheets)


def test_yield_is_cut_area_over_goods_used():
    pattern = samples.cube(side=0.2, goods_=samples.goods("canvas", allowance=0.0, width=0.632))
    drafts = draft(pattern)
    sheets = lay(pattern, drafts)
    assert sheets[0].width == pytest.approx(632)  # three squares, two gaps, two margins
    assert yield_of(sheets, pattern.goods) == pytest.approx(6 * 200**2 / (632 * (2 * 200 + 6 + 20)))


def test_a_piece_wider_than_the_goods_is_named_and_still_laid():
    pattern = samples.cylinder(radius=0.3, goods_=samples.goods("canvas", width=1.2))
    drafts = draft(pattern)
    assert too_large(drafts, pattern.goods) == ["A"]
    assert lay(pattern, drafts)[0].width > 2 * np.pi * 300
