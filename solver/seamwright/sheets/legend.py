"""The legend: the first pages of the PDF, with everything that is not drawn on the pieces themselves."""

import numpy as np

from .cautions import CAUTIONS
from .colours import piece_colour
from .draft import DOWN, LEAST_EASE
from .lettering import printable, text_width
from .svg import STYLE
from .table import SQUARE, SQUARE_WORDS, stacked

KEY = (("cut", "cut line"), ("stitch", "stitch line"), ("notches", "notch: meets its mate; the double one comes first"),
       ("grain", "grain: the warp of the goods"), ("marks", "marks; a small square is where a seam begins or ends"))


def add_legend(pdf, pattern, sheets, summary, grid):
    """Write the legend onto new pages; `grid` names the tiles, None where the pieces are on one page."""
    pdf.set_auto_page_break(True, margin=12)
    pdf.add_page()
    left, right = pdf.l_margin, pdf.w - pdf.r_margin
    _heading(pdf, summary["form"], 18)
    top = pdf.get_y() + 2
    _square(pdf, right - SQUARE, top)
    pdf.set_right_margin(pdf.w - (right - SQUARE - 8))
    _facts(pdf, summary, grid)
    _key(pdf)
    pdf.set_right_margin(pdf.w - right)
    pdf.set_y(max(pdf.get_y(), top + SQUARE) + 5)
    _heading(pdf, "Take care", 12)
    for caution in CAUTIONS:
        _line(pdf, f"- {caution}", 8)
    pdf.ln(3)
    _overview(pdf, sheets, grid, left, pdf.get_y(), right - left, pdf.h - 12 - pdf.get_y())
    pdf.add_page()
    if summary["notes"]:
        _heading(pdf, "Notes", 12)
        for note in summary["notes"]:
            _line(pdf, f"- {note}", 9)
        pdf.ln(4)
    _heading(pdf, "Pieces", 12)
    shares = summary["all"]["shares"]
    _line(pdf, f"Of all the area {shares['comfortable']:.1%} is within the comfortable limits of the goods, "
          f"{shares['tight']:.1%} tight, {shares['strained']:.1%} beyond the hard limits; most strained near "
          f"{_place(summary['all'])} mm on the form.", 9)
    pdf.ln(1)
    _table(pdf, (8, 30, 18, 34, 28, 22, 26, 28), [
        ("", "piece", "fit", "comfortable, tight, strained", "cut size, mm", "worst stretch", "near, mm", "seams"),
        *(_piece_row(piece, summary) for piece in summary["pieces"])])
    _heading(pdf, "Seams", 12)
    _table(pdf, (30, 62, 34, 34, 34), [("seam", "joins", "first side, mm", "second side, mm", "ease in"),
                                       *map(_seam_row, summary["seams"])])
    _heading(pdf, "Sewing order", 12)
    _line(pdf, ", ".join(summary["order"]) or "Nothing to sew.", 9)


def _facts(pdf, summary, grid):
    goods, pieces, side = summary["goods"], len(summary["pieces"]), summary["thickness_side"]
    sheets = summary["lay"]["sheets"]
    metres = f"{sum(sheet['length_mm'] for sheet in sheets) / 1000:.2f} m of goods"
    used = metres if goods["length_mm"] is None else f"{len(sheets)} x {goods['width_mm']:g} x {goods['length_mm']:g} mm"
    joined = sum(not seam["open"] for seam in summary["seams"])
    facts = [
        f"{pieces} piece{'s' * (pieces != 1)}, {joined} seam{'s' * (joined != 1)}, {summary['seam_metres']:.2f} m of seam"
        + (f", {summary['hem_metres']:.2f} m of hem." if summary["hem_metres"] else "."),
        f"Goods: {goods['name']}, {goods['width_mm']:g} mm wide, {goods['thickness_mm']:g} mm thick"
        + (", whose thickness does not count." if side == "none" else f", lying {side} the form."),
        f"Allowance: {goods['allowance_mm']:g} mm, already added.",
        f"Laid in rows: {used}, yield {summary['lay']['yield']:.0%}.",
        "Fit: " + ("no piece is strained." if summary["fits"] else "STRAINED: " + ", ".join(
            piece["name"] for piece in summary["pieces"] if piece["fit"] == "strained") + "."),
        "Print at 100 % (actual size), never fitted to the page.",
    ]
    if grid is None:
        facts.append("The pieces are on one large page.")
    else:
        facts.append(f"The pieces are on {len(grid.tiles)} pages, named as on the plan below. Trim each along its frame on "
                     "two sides and glue it over its neighbour so that the crosses meet.")
    for fact in facts:
        _line(pdf, fact, 9)
    pdf.ln(2)


def _key(pdf):
    for layer, words in KEY:
        colour, width, dashes = STYLE[layer]
        y = pdf.get_y() + 2.2
        pdf.set_draw_color(colour)
        pdf.set_line_width(width)
        pdf.set_dash_pattern(*(float(length) for length in dashes.split())) if dashes else pdf.set_dash_pattern()
        pdf.line(pdf.l_margin, y, pdf.l_margin + 14, y)
        pdf.set_dash_pattern()
        pdf.set_x(pdf.l_margin + 16)
        pdf.set_font("Helvetica", size=8)
        pdf.multi_cell(0, 4, printable(words), align="L", new_x="LMARGIN", new_y="NEXT")


def _square(pdf, x, y):
    pdf.set_draw_color("#000000")
    pdf.set_line_width(0.2)
    pdf.rect(x, y, SQUARE, SQUARE)
    pdf.set_font("Helvetica", size=9)
    for order, words in enumerate(SQUARE_WORDS):
        pdf.text(x + (SQUARE - text_width(words, 9 / pdf.k)) / 2, y + SQUARE / 2 + 5 * (order - 1), words)


def _overview(pdf, sheets, grid, x, y, width, height):
    """The whole table, small, each piece in its colour with its number, the tiles over it."""
    table = stacked(sheets, headed=False)
    full = np.array([table.width, table.height])
    if grid is not None:
        full = np.maximum(full, np.max([tile.window[2:] for tile in grid.tiles], axis=0))
    scale = min(width / full[0], height / full[1])
    corner = np.array([x, y])
    pdf.set_draw_color("#000000")
    pdf.set_line_width(0.15)
    for draft, stroke in table.strokes:
        if stroke.layer == "cut":
            pdf.set_fill_color(piece_colour(draft.number - 1))
            pdf.polygon((stroke.points * scale + corner).tolist(), style="DF")
    pdf.set_font("Helvetica", size=8)
    for draft, at in ((d, at + [0, top]) for sheet, top in zip(sheets, table.tops, strict=True) for d, at in sheet.pieces):
        px, py = (draft.centre * DOWN + at) * scale + corner
        words = str(draft.number)
        pdf.text(px - text_width(words, 8 / pdf.k) / 2, py + 1, words)
    for tile in grid.tiles if grid else []:
        low, high = np.array(tile.window[:2]) * scale + corner, np.array(tile.window[2:]) * scale + corner
        pdf.set_draw_color("#555555")
        pdf.set_line_width(0.1)
        pdf.rect(*low, *(high - low))
        pdf.set_font("Helvetica", size=6)
        pdf.text(low[0] + 0.8, low[1] + 2.6, tile.name)


def _piece_row(piece, summary):
    seams = [seam["name"] for seam in summary["seams"] if piece["name"] in seam["pieces"]]
    return (str(piece["number"]), piece["name"], piece["fit"],
            ", ".join(f"{share:.0%}" for share in piece["shares"].values()),
            f"{piece['width_mm']:.0f} x {piece['height_mm']:.0f}", f"{piece['stretch']['worst']:+.1%}", _place(piece),
            ", ".join(seams))


def _place(found):
    return ", ".join(f"{value:.0f}" for value in found["worst_place_mm"])


def _seam_row(seam):
    first, second = seam["pieces"]
    a, b = seam["lengths_mm"]
    if seam["open"]:
        return seam["name"], f"hem of {first or second}", f"{a:.0f}", "", ""
    joins = f"{first}, a dart" if seam["dart"] else f"{first} to itself" if first == second else f"{first} to {second}"
    ease = f"{abs(b - a):.1f} mm of the {'second' if b > a else 'first'} side" if abs(b - a) >= LEAST_EASE else ""
    if seam["eased"]:
        ease += ", from {from_mm:.0f} to {to_mm:.0f} mm".format(**seam["eased"])
    return seam["name"], joins, f"{a:.1f}", f"{b:.1f}", ease


def _heading(pdf, words, size):
    if pdf.will_page_break(25):
        pdf.add_page()
    pdf.set_font("Helvetica", style="B", size=size)
    pdf.multi_cell(0, size * 0.5, printable(words), new_x="LMARGIN", new_y="NEXT")
    pdf.ln(1)


def _line(pdf, words, size):
    pdf.set_font("Helvetica", size=size)
    pdf.multi_cell(0, size * 0.48, printable(words), align="L", new_x="LMARGIN", new_y="NEXT")


def _table(pdf, widths, rows):
    pdf.set_font("Helvetica", size=8)
    pdf.set_fill_color("#FFFFFF")
    pdf.set_draw_color("#999999")
    pdf.set_line_width(0.1)
    with pdf.table(col_widths=widths, line_height=4.5, borders_layout="HORIZONTAL_LINES", text_align="LEFT") as table:
        for row in rows:
            table.row([printable(cell) for cell in row])
    pdf.ln(4)
