"""Tips that the flow misses: found, weighed up, and reached by a seam."""

import numpy as np
import pytest
from forms import icosphere, limbs
from seamwright.form.form import Form
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.flow import settle
from seamwright.seams.ladder import Ladder
from seamwright.seams.pointed import Points
from seamwright.seams.seek import seek, through_tips

CROSS = limbs([(1, 0, 0), (-1, 0, 0), (0, 1, 0), (0, -1, 0.0)], 0.22, 0.12, 0.06, 48)
ENDS = np.array([(1, 0, 0), (-1, 0, 0), (0, 1, 0), (0, -1, 0)], dtype=float)


@pytest.fixture(scope="module", name="ladder")
def cross_ladder():
    return Ladder(Form(*CROSS).surface)


def test_a_sphere_has_no_tips():
    points = Points(Ladder(Form(*icosphere(4)).surface))
    assert len(points.tips) == 0


def test_the_corners_of_an_open_edge_are_no_tips():
    side = 30
    x, y = np.meshgrid(np.linspace(0, 1, side), np.linspace(0, 1, side), indexing="ij")
    first = (np.arange(side - 1)[:, None] * side + np.arange(side - 1)).ravel()
    squares = np.column_stack([first, first + side, first + side + 1, first + 1])
    sheet = Form(np.column_stack([x.ravel(), y.ravel(), 0 * x.ravel()]), squares)
    assert len(Points(Ladder(sheet.surface)).tips) == 0


def test_tips_are_the_ends_of_the_limbs(ladder):
    points = Points(ladder)
    surface = ladder.levels[points.rung].surface
    assert len(points.tips) == 4
    found = surface.points[points.tips] / np.linalg.norm(surface.points[points.tips], axis=1)[:, None]
    assert (np.abs(found @ ENDS.T).max(axis=1) > 0.98).all()


def test_a_seam_beside_the_tips_is_brought_through_them(ladder):
    points = Points(ladder)
    level = ladder.levels[points.rung]
    z = level.surface.points[:, 2]
    beside = np.column_stack([z - z.max() * 0.45, -z + z.max() * 0.45])  # a cut above the middle misses every tip
    cut = cut_by_fields(level.surface, beside)
    found = settle(level, cut, cut.labels, 0.1)
    before = points.missed(found)
    after, emphasis = through_tips(points, found, 0.1, "square")
    assert before.any() and points.missed(after).sum() < before.sum()
    for level, weight in zip(ladder.levels, emphasis, strict=True):
        assert weight.min() >= 1 and weight.max() > 3
        tip = level.surface.points[weight.argmax()] / np.linalg.norm(level.surface.points[weight.argmax()])
        assert np.abs(ENDS @ tip).max() > 0.95
        far = np.abs(level.surface.points @ ENDS.T).max(axis=1) < 0.3 * np.abs(level.surface.points).max()
        assert weight[far].max() < 1.01  # what is away from the tips counts as before


def test_the_whole_way_no_tip_is_missed(ladder):
    found, points = seek(ladder, 0.1), Points(ladder)
    assert points.rung == len(ladder.levels) - 1  # a small form: its tips are found on itself
    assert not points.missed(found).any()
