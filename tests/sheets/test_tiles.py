import itertools
import string

import numpy as np
import pytest
import shapely
from seamwright.sheets.draft import draft
from seamwright.sheets.lay import lay
from seamwright.sheets.lettering import Stroke
from seamwright.sheets.table import stacked
from seamwright.sheets.tiles import OVERLAP, clipped, column_name, tiled
from sheets import samples


def test_columns_are_lettered_like_a_sheet_of_figures():
    letters = string.ascii_uppercase
    wanted = [*letters, *("".join(pair) for pair in itertools.product(letters, repeat=2))]
    assert [column_name(k) for k in range(len(wanted))] == wanted


@pytest.mark.parametrize("name", ["cylinder", "cube", "frustum", "tapered strip"])
@pytest.mark.parametrize("page", [(210, 297), (215.9, 279.4)])
def test_the_tiles_hold_the_whole_table_and_neighbours_overlap(name, page):
    pattern = samples.ALL[name]()
    table = stacked(lay(pattern, draft(pattern)), headed=False)
    grid = tiled(table, page)
    windows = [shapely.box(*tile.window) for tile in grid.tiles]
    for _, stroke in table.strokes:
        assert shapely.unary_union(windows).covers(shapely.LineString(stroke.points))
    names = {tile.name: shapely.box(*tile.window) for tile in grid.tiles}
    if {"A1", "B1"} <= set(names):
        left, low, right, high = names["A1"].intersection(names["B1"]).bounds
        assert right - left == pytest.approx(OVERLAP)


def test_no_page_is_printed_for_nothing_and_none_inside_a_piece_is_missing():
    pattern = samples.frustum(low=0.5, high=0.3, height=0.3)
    table = stacked(lay(pattern, draft(pattern)), headed=False)
    grid = tiled(table, (210, 297))
    pieces = shapely.unary_union([shapely.Polygon(s.points) for _, s in table.strokes if s.layer == "cut"])
    windows = shapely.unary_union([shapely.box(*tile.window) for tile in grid.tiles])
    assert windows.covers(pieces)
    assert all(pieces.intersects(shapely.box(*tile.window)) for tile in grid.tiles)
    assert len(grid.tiles) < grid.columns * grid.rows
    edges = shapely.unary_union([shapely.LineString(s.points) for _, s in table.strokes])
    assert any(not edges.intersects(shapely.box(*tile.window)) for tile in grid.tiles)


def test_clipping_keeps_a_ring_whole_or_gives_its_parts():
    ring = Stroke("cut", np.array([[0, 0], [10, 0], [10, 10], [0, 10]], dtype=float), True)
    (points, closed), = clipped(ring, (-1, -1, 11, 11))
    assert closed and points is ring.points
    assert clipped(ring, (20, 20, 30, 30)) == []
    parts = clipped(ring, (-1, -1, 5, 11))
    assert not any(closed for _, closed in parts)
    assert sum(shapely.LineString(points).length for points, _ in parts) == pytest.approx(20)


def test_every_cross_is_on_each_page_that_shares_it():
    pattern = samples.cube(side=0.4)
    grid = tiled(stacked(lay(pattern, draft(pattern)), headed=False), (210, 297))
    for cross in grid.crosses:
        sharing = [tile for tile in grid.tiles if shapely.box(*tile.window).intersects(shapely.Point(cross))]
        assert all(tile.holds(cross[None])[0] for tile in sharing)
        assert len(sharing) != 1 or len(grid.tiles) < grid.columns * grid.rows
