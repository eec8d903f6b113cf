"""Tiles: a table too large for the paper, cut into pages that overlap and are glued together again."""

from dataclasses import dataclass
from math import ceil

import numpy as np
import shapely

MARGIN = 8.0
"""Millimetres round a page where many printers cannot print."""
HEADER = 7.0
"""Millimetres at the top of a page for its name."""
OVERLAP = 12.0
"""Millimetres that neighbours share [common practice: 10-15]."""
ARM = 4.0
"""Half the size in mm of a cross where pages are matched."""


@dataclass(frozen=True)
class Tile:
    """One page: name such as B3 (column B, row 3) and its window (x0, y0, x1, y1) on the table, mm."""

    name: str
    window: tuple

    def holds(self, points):
        """True where points (k, 2) lie in the window."""
        return ((points >= self.window[:2]) & (points <= self.window[2:])).all(axis=1)


@dataclass(frozen=True)
class Grid:
    """The tiles of a table: page (width, height) in mm, columns and rows, and the tiles needed.

    A blank tile is left out unless it lies inside a piece. crosses (k, 2): where neighbours are matched.
    """

    page: tuple
    columns: int
    rows: int
    tiles: list
    crosses: np.ndarray


def tiled(table, page):
    """The Grid for a page (width, height) in mm, upright or on its side, whichever needs fewer pages."""
    return min((_grid(table, size) for size in (tuple(page), tuple(page[::-1]))), key=lambda grid: len(grid.tiles))


def clipped(stroke, window):
    """The parts of a stroke in a window: list of ((k, 2) points, closed)."""
    low, high = stroke.points.min(axis=0), stroke.points.max(axis=0)
    x0, y0, x1, y1 = window
    if low[0] >= x0 and low[1] >= y0 and high[0] <= x1 and high[1] <= y1:
        return [(stroke.points, stroke.closed)]
    if low[0] > x1 or low[1] > y1 or high[0] < x0 or high[1] < y0:
        return []
    points = np.vstack([stroke.points, stroke.points[:1]]) if stroke.closed else stroke.points
    inside = shapely.line_merge(shapely.LineString(points).intersection(shapely.box(*window)))
    return [(np.array(part.coords), False) for part in shapely.get_parts(inside) if part.geom_type == "LineString"]


def column_name(order):
    """A, B, ... Z, AA, AB, ..."""
    name = ""
    while order >= 0:
        order, letter = divmod(order, 26)
        name, order = chr(65 + letter) + name, order - 1
    return name


def _grid(table, page):
    window = np.array([page[0] - 2 * MARGIN, page[1] - 2 * MARGIN - HEADER])
    pitch = window - OVERLAP
    size = np.array([table.width, table.height])
    columns, rows = (max(1, ceil(count)) for count in (size - OVERLAP) / pitch)
    pieces = [shapely.Polygon(stroke.points) for _, stroke in table.strokes if stroke.layer == "cut"]
    tiles = []
    for row in range(rows):
        for column in range(columns):
            corner = np.array([column, row]) * pitch
            tile = Tile(f"{column_name(column)}{row + 1}", (*corner, *(corner + window)))
            drawn = any(clipped(stroke, tile.window) for _, stroke in table.strokes)
            if drawn or shapely.intersects(pieces, shapely.box(*tile.window)).any():
                tiles.append(tile)
    between = [np.arange(1, count) * step + OVERLAP / 2 for count, step in zip((columns, rows), pitch, strict=True)]
    middles = [np.arange(count) * step + size / 2 for count, step, size in zip((columns, rows), pitch, window, strict=True)]
    crosses = [(x, y) for x in between[0] for y in (*between[1], *middles[1])]
    crosses += [(x, y) for x in middles[0] for y in between[1]]
    return Grid(page, columns, rows, tiles, np.array(crosses).reshape(-1, 2))
