"""The sheets as a PDF at true scale: a legend, then one large page for the roll or tiles for small paper."""

from datetime import UTC, datetime

import numpy as np
from fpdf import FPDF
from fpdf.prefs import ViewerPreferences

from . import tiles
from .legend import add_legend
from .lettering import LAYERS, printable
from .svg import STYLE
from .table import stacked

PAPERS = {"a4": (210.0, 297.0), "letter": (215.9, 279.4), "roll": None}
"""Width and height in mm [ISO 216; ANSI/ASME Y14.1 A]; the roll has whatever the table needs."""
LONGEST = 5000.0
"""A page side in mm stays under the 14400 units of 1/72 inch (5.08 m) readers handle [ISO 32000; from memory]."""
LONG_AGO = datetime(2000, 1, 1, tzinfo=UTC)
"""The creation date of every document: the same pattern gives the same bytes."""


def write(pattern, drafts, sheets, summary, paper):
    """Bytes of pattern.pdf on a paper of PAPERS."""
    size = PAPERS[paper]
    pdf = FPDF(unit="mm", format=size or PAPERS["a4"])
    pdf.set_creation_date(LONG_AGO)
    pdf.set_title(printable(f"{pattern.form.name}: cutting sheets"))
    pdf.set_producer("seamwright")
    pdf.viewer_preferences = ViewerPreferences(print_scaling="None")
    pdf.set_margin(tiles.MARGIN)
    table = stacked(sheets, headed=size is None)
    whole = size is None and max(table.width, table.height) <= LONGEST
    grid = None if whole else tiles.tiled(table, size or (LONGEST, LONGEST))
    add_legend(pdf, pattern, sheets, summary, grid)
    pdf.set_auto_page_break(False)
    if whole:
        pdf.add_page(orientation="portrait", format=(table.width, table.height))
        _draw(pdf, table, (0.0, 0.0, table.width, table.height), np.zeros(2))
    else:
        for tile in grid.tiles:
            pdf.add_page(orientation="portrait", format=grid.page)
            _draw_tile(pdf, table, grid, tile, pattern.form.name)
    return bytes(pdf.output())


def _draw(pdf, table, window, origin):
    """What lies in the window, its upper left corner at `origin` (2,) on the page."""
    shift = origin - window[:2]
    for layer in LAYERS:
        colour, width, dashes = STYLE[layer]
        pdf.set_draw_color(colour)
        pdf.set_line_width(width)
        pdf.set_dash_pattern(*(float(length) for length in dashes.split())) if dashes else pdf.set_dash_pattern()
        for _, stroke in table.strokes:
            if stroke.layer == layer:
                for points, closed in tiles.clipped(stroke, window):
                    pdf.polyline((points + shift).tolist(), polygon=closed)
    pdf.set_dash_pattern()
    with pdf.rect_clip(*origin, window[2] - window[0], window[3] - window[1]):
        for _, mark in table.letterings:
            corners = mark.corners
            if (corners.max(axis=0) > window[:2]).all() and (corners.min(axis=0) < window[2:]).all():
                write_line(pdf, mark, shift)


def write_line(pdf, mark, shift=0.0):
    """One Lettering on the page, moved by `shift`."""
    x, y = mark.at + shift
    pdf.set_font("Helvetica", size=mark.height * pdf.k)
    with pdf.rotation(mark.angle, x, y):
        pdf.text(x - mark.width / 2, y + 0.27 * mark.height, printable(mark.text))


def _draw_tile(pdf, table, grid, tile, name):
    origin = np.array([tiles.MARGIN, tiles.MARGIN + tiles.HEADER])
    _draw(pdf, table, tile.window, origin)
    corner = np.array(tile.window[:2])
    pdf.set_draw_color("#999999")
    pdf.set_line_width(0.1)
    pdf.rect(*origin, *(np.array(tile.window[2:]) - corner))
    pdf.set_line_width(0.2)
    pdf.set_draw_color("#000000")
    for x, y in grid.crosses[tile.holds(grid.crosses)] - corner + origin:
        pdf.line(x - tiles.ARM, y, x + tiles.ARM, y)
        pdf.line(x, y - tiles.ARM, x, y + tiles.ARM)
    pdf.set_font("Helvetica", size=11)
    words = (f"{tile.name}     {name}     scale 1:1     columns A to {tiles.column_name(grid.columns - 1)}, "
             f"rows 1 to {grid.rows}     glue so that the crosses meet")
    pdf.text(tiles.MARGIN, tiles.MARGIN + 4.5, printable(words))
