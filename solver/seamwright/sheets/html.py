"""index.html: one page that shows the pieces coloured by stretch, the limits of the goods, and the figures."""

from math import degrees

import numpy as np

from .cautions import CAUTIONS
from .colours import piece_colour, stretch_colour
from .draft import DOWN
from .lettering import text_width
from .svg import path_data, tidy
from .table import stacked

CLASSES = 33
"""Steps of colour on the scale; odd, so that none is the pale middle."""

STYLE = """
:root { color-scheme: light; }
body { font: 15px/1.5 system-ui, sans-serif; color: #1a1a1a; max-width: 70rem; margin: 2rem auto; padding: 0 1rem; }
h1 { margin-bottom: 0; } h2 { margin-top: 2.2rem; font-size: 1.15rem; }
table { border-collapse: collapse; font-variant-numeric: tabular-nums; }
th, td { padding: .2rem .8rem .2rem 0; text-align: right; border-bottom: 1px solid #ddd; vertical-align: top; }
th.w, td.w { text-align: left; }
.chip { display: inline-block; width: .8em; height: .8em; margin-right: .4em; border: 1px solid #444; }
.strained { font-weight: bold; } svg { max-width: 100%; height: auto; } .wide { overflow-x: auto; }
"""


def write(pattern, sheets, summary):
    """Bytes of index.html."""
    goods = pattern.goods
    reach = colour_reach(goods)
    title = tidy(summary["form"])
    count, joined = len(summary["pieces"]), sum(not seam["open"] for seam in summary["seams"])
    verdict = "No piece is strained." if summary["fits"] else "Strained: the goods do not take what some pieces ask."
    parts = [
        f'<!doctype html>\n<html lang="en"><head><meta charset="utf-8"><title>{title}</title>',
        f'<meta name="viewport" content="width=device-width"><style>{STYLE}</style></head><body>',
        f"<h1>{title}</h1><p>{count} piece{'s' * (count != 1)} in {tidy(goods.name)}, {joined} seam{'s' * (joined != 1)}, "
        f"{summary['seam_metres']:.2f} m of seam. {verdict}</p>",
        "<h2>Pieces and their stretch</h2>",
        f"<p>{_measure_words(goods)} Hatching marks what lies beyond the hard limits{_shear_words(goods)}.</p>",
        _legend(goods, reach),
        f'<div class="wide">{_picture(pattern, sheets, reach)}</div>',
        "<h2>Figures</h2>", _piece_table(summary),
        "<h2>Seams</h2>", _seam_table(summary),
        f"<h2>Sewing order</h2><p>{tidy(', '.join(summary['order'])) or 'Nothing to sew.'}</p>",
    ]
    if summary["notes"]:
        parts.append("<h2>Notes</h2><ul>" + "".join(f"<li>{tidy(note)}</li>" for note in summary["notes"]) + "</ul>")
    parts.append("<h2>Take care</h2><ul>" + "".join(f"<li>{tidy(words)}</li>" for words in CAUTIONS) + "</ul>")
    parts.append("</body></html>\n")
    return "\n".join(parts).encode("utf-8")


def shown_stretch(piece, goods):
    """(t,) the stretch that is coloured, the one farther from 0: along warp or weft in cloth that shears, else principal."""
    pair = piece.stretch if goods.shear is None else piece.warp_weft_shear[:, :2]
    return np.where(np.abs(pair[:, 0]) >= np.abs(pair[:, 1]), pair[:, 0], pair[:, 1])


def colour_reach(goods):
    """The stretch at either end of the colours: a quarter beyond the widest of the hard limits, at least 0.5 %."""
    return max(1.25 * max(goods.stretch_warp[1], goods.stretch_weft[1], goods.ease_in[1]), 0.005)


def _picture(pattern, sheets, reach):
    table = stacked(sheets, headed=False)
    lines = [
        f'<svg width="{table.width:.0f}" viewBox="0 0 {table.width:.1f} {table.height:.1f}" '
        'role="img" aria-label="The flat pieces, coloured by stretch">',
        '<defs><pattern id="hatch" width="6" height="6" patternUnits="userSpaceOnUse" patternTransform="rotate(45)">'
        '<path d="M1 0V6" stroke="#FFFFFF" stroke-width="2"/><path d="M1 0V6" stroke="#000000"/></pattern></defs>',
    ]
    size = max(4.0, table.width / 50)
    for sheet, top in zip(sheets, table.tops, strict=True):
        for draft, offset in sheet.pieces:
            piece = pattern.pieces[draft.number - 1]
            corners = (piece.flat * 1000 * DOWN + offset + [0, top])[piece.triangles]
            outline = piece.flat[piece.outline] * 1000 * DOWN + offset + [0, top]
            lines.append(f'<g><title>{tidy(piece.name)}: {piece.fit}</title>')
            lines += _coloured(corners, shown_stretch(piece, pattern.goods) / reach)
            beyond = piece.utilisation > 1
            if beyond.any():
                lines.append(f'<path fill="url(#hatch)" d="{_triangles(corners[beyond])}"/>')
            lines.append(f'<path fill="none" stroke="#000" stroke-width="{size / 12:.2f}" d="{path_data(outline, True)}"/>')
            x, y = draft.centre * DOWN + offset + [0, top]
            width = text_width(piece.name, size) + 0.6 * size
            lines.append(f'<rect x="{x - width / 2:.1f}" y="{y - 0.7 * size:.1f}" width="{width:.1f}" '
                         f'height="{1.4 * size:.1f}" fill="#FFFFFF" stroke="{piece_colour(draft.number - 1)}" '
                         f'stroke-width="{size / 8:.2f}"/>')
            lines.append(f'<text x="{x:.1f}" y="{y + 0.3 * size:.1f}" font-size="{size:.1f}" text-anchor="middle" '
                         f'font-family="Helvetica, Arial, sans-serif">{tidy(piece.name)}</text></g>')
    return "\n".join([*lines, "</svg>"])


def _coloured(corners, share):
    """One path a colour: the triangles of each class together, with a hairline of their own colour to close the cracks."""
    half = CLASSES // 2
    step = np.rint(np.clip(share, -1, 1) * half).astype(int)
    colours = stretch_colour(np.arange(-half, half + 1) / half)
    return [f'<path fill="{colour}" stroke="{colour}" stroke-width="0.3" d="{_triangles(corners[step == k])}"/>'
            for k, colour in ((k, colours[k + half]) for k in np.unique(step))]


def _triangles(corners):
    return "".join("M{:.1f} {:.1f}L{:.1f} {:.1f} {:.1f} {:.1f}Z".format(*row) for row in corners.reshape(-1, 6))


def _legend(goods, reach):
    """The scale with the hard limits marked on it."""
    width, left = 600, 60
    colours = stretch_colour(np.arange(CLASSES) / (CLASSES - 1) * 2 - 1)
    bar = width / CLASSES
    lines = [f'<svg width="{width + 2 * left}" height="86" role="img" aria-label="Scale of stretch">']
    lines += [f'<rect x="{left + k * bar:.2f}" y="30" width="{bar + 0.5:.2f}" height="18" fill="{colour}"/>'
              for k, colour in enumerate(colours)]
    lines.append(_tick(left, width, 0, "0", True))
    marks = [(-goods.ease_in[1], "ease in"), (goods.stretch_warp[1], "warp"), (goods.stretch_weft[1], "weft")]
    if goods.stretch_warp[1] == goods.stretch_weft[1]:
        marks[1:] = [(goods.stretch_warp[1], "stretch")]
    for order, (value, word) in enumerate(marks):
        lines.append(_tick(left, width, value / reach, f"{word} limit {value * 100:+.3g} %", order == 1))
    return "".join([*lines, "</svg>"])


def _tick(left, width, share, words, above):
    x = left + (share + 1) / 2 * width
    line = f'<path d="M{x:.1f} {22 if above else 30}V{48 if above else 56}" stroke="#000000" stroke-width="1.5"/>'
    return line + f'<text x="{x:.1f}" y="{16 if above else 70}" font-size="13" text-anchor="middle">{tidy(words)}</text>'


def _measure_words(goods):
    if goods.shear is None:
        return "Colour shows the principal stretch farther from zero: blue where the goods are eased in, brown stretched."
    return "Colour shows the stretch along warp or weft, whichever is farther from zero: blue eased in, brown stretched."


def _shear_words(goods):
    return "" if goods.shear is None else f", the shear limit of {degrees(goods.shear[1]):.3g} degrees included"


def _piece_table(summary):
    head = ["piece", "fit", "comfortable, tight, strained", "area, m<sup>2</sup>", "stretch, 5 % to 95 %", "worst"]
    goods = summary["goods"]
    threads = [key for key in ("warp", "weft") if key in summary["all"]]
    head += [f"{key}, 5 % to 95 %" for key in threads]
    head += ["shear, 95 % and worst"] * (goods["shear_degrees"] is not None)
    head += ["limit used", "L<sup>2</sup>, L<sup>&infin;</sup>", "worst near x, y, z, mm"]
    rows = []
    for order, piece in enumerate(summary["pieces"]):
        name = f'<span class="chip" style="background:{piece_colour(order)}"></span>{tidy(piece["name"])}'
        rows.append([name, f'<span class="{piece["fit"]}">{piece["fit"]}</span>', *_fit_cells(piece, threads)])
    if len(rows) > 1:
        rows.append(["all", "", *_fit_cells(summary["all"], threads)])
    words = (f"<p>Measured anew from pattern.json, {_measured_on(summary)}. Comfortable, tight and strained are shares of "
             "the area: within the comfortable limits, within the hard ones, beyond them. Limit used is the share of the "
             "hard limits on all but 0.5 % of the area. L<sup>2</sup> and L<sup>&infin;</sup> are the texture stretch of "
             "Sander, Snyder, Gortler and Hoppe (2001), 1 for an exact development.</p>")
    return words + _table(head, rows, 2)


def _measured_on(summary):
    side, half = summary["thickness_side"], summary["goods"]["thickness_mm"] / 2
    return "on the form's own surface" if side == "none" else f"in the middle of the goods, {half:g} mm {side} the form"


def _fit_cells(found, threads):
    """The figures of a piece, or of all: words for the columns of `_piece_table` after the first two."""
    stretch = found["stretch"]
    cells = [", ".join(f"{share:.1%}" for share in found["shares"].values()), f"{found['area_m2']:.4g}",
             f"{stretch['p5']:+.1%} to {stretch['p95']:+.1%}", f"{stretch['worst']:+.1%}"]
    cells += [f"{found[key]['p5']:+.1%} to {found[key]['p95']:+.1%}" for key in threads]
    if "shear_degrees" in found:
        cells.append("{p95:.1f}, {worst:.1f} degrees".format(**found["shear_degrees"]))
    return [*cells, f"{found['utilisation']['p99_5']:.0%}", "{l2:.4f}, {linf:.4f}".format(**found["sander"]),
            ", ".join(f"{value:.0f}" for value in found["worst_place_mm"])]


def _seam_table(summary):
    rows = []
    for seam in summary["seams"]:
        first, second = seam["pieces"]
        joins = f"hem of {first or second}" if seam["open"] else f"{first}, {second}" + (" (dart)" if seam["dart"] else "")
        a, b = seam["lengths_mm"]
        second = ["", ""] if seam["open"] else [f"{b:.1f}", f"{seam['ease']:+.2%}"]
        rows.append([tidy(seam["name"]), tidy(joins), tidy(_ease_words(seam["eased"])), f"{a:.1f}", *second])
    return _table(["seam", "joins", "ease", "first side, mm", "second side, mm", "second longer by"], rows, 3)


def _ease_words(eased):
    return "{by_mm:.1f} mm of {piece}, from {from_mm:.0f} to {to_mm:.0f} mm".format(**eased) if eased else ""


def _table(head, rows, words):
    """An HTML table whose first `words` columns are words and the rest figures; the cells are HTML already."""
    def row(tag, cells):
        kinds = [" class=w" if k < words else "" for k in range(len(cells))]
        return "<tr>" + "".join(f"<{tag}{kind}>{cell}</{tag}>" for kind, cell in zip(kinds, cells, strict=True)) + "</tr>"

    return '<div class="wide"><table>' + row("th", head) + "".join(row("td", cells) for cells in rows) + "</table></div>"
