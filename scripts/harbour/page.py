"""out/index.html: for each form its picture, its pieces in the same colours, and its figures, on one page."""

import json
from html import escape
from urllib.parse import quote

import numpy as np
from seamwright.sheets.cautions import CAUTIONS
from seamwright.sheets.colours import piece_colour
from seamwright.sheets.svg import path_data
from shapely import Polygon
from shapely.ops import polylabel

WIDTH = 560.0  # of the drawing of the pieces, its own units
FILES = (("pattern.pdf", "PDF, true scale"), ("pattern.svg", "SVG, true scale"),
         ("index.html", "stretch, seams, sewing order"), ("pattern.json", "data"))
STYLE = """
body{font:16px/1.5 system-ui,sans-serif;color:#1a1a1a;background:#fff;max-width:74rem;margin:2rem auto;padding:0 1rem}
h1{margin-bottom:0}h2{margin:3rem 0 .5rem;border-top:1px solid #bbb;padding-top:1.5rem}
img,svg{max-width:100%;height:auto}svg{font-family:Helvetica,Arial,sans-serif}
.pair{display:grid;grid-template-columns:1fr 1fr;gap:1rem;align-items:start}
figure{margin:0}figcaption{color:#444;font-size:.9rem}
table{border-collapse:collapse;font-variant-numeric:tabular-nums;margin:1rem 0}
th,td{padding:.25rem .9rem .25rem 0;text-align:right;border-bottom:1px solid #ccc}th.w,td.w{text-align:left}
.no{font-weight:bold}figure svg{max-height:32rem}
.chip{display:inline-block;width:.8em;height:.8em;margin-right:.4em;border:1px solid #444}
@media(max-width:50rem){.pair{grid-template-columns:1fr}}
@media print{body{font-size:10pt;max-width:none}h2{break-before:page;border:0}}
"""
HEAD = ('<!doctype html>\n<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width">'
        f"<title>Props of a stage harbour</title><style>{STYLE}</style></head><body>\n")


def write(out, rows):
    """Write index.html into `out`, where the pictures and each form's sheets lie already."""
    body = [
        "<h1>Props of a stage harbour</h1>",
        "<p>Seven modelled forms, each covered in its goods: seams, flat pieces, cutting sheets.</p>",
        '<div class="pair">', _figure("quay-before.png", "The quay as it is modelled"),
        _figure("quay-after.png", "The same with every form covered, pieces in colour"), "</div>",
        _table(rows), *(_form(out, row) for row in rows),
        "<h2>Take care</h2><ul>", *(f"<li>{escape(words)}</li>" for words in CAUTIONS), "</ul>",
    ]
    (out / "index.html").write_text(HEAD + "\n".join(body) + "\n</body></html>\n", encoding="utf-8")


def _form(out, row):
    name, folder = escape(row.form), quote(row.folder)
    if row.error:
        return f"<h2>{name}</h2><p class=no>{escape(row.error)}</p>"
    document = json.loads((out / row.folder / "pattern.json").read_text(encoding="utf-8"))
    links = " &middot; ".join(f'<a href="{folder}/{file}">{words}</a>' for file, words in FILES)
    return "\n".join([
        f"<h2>{name}, {escape(row.goods)}</h2>",
        f"<p>{_verdict(row, document)} {links}</p>",
        '<div class="pair">', _figure(f"{folder}/front.png", f"{name} from the front"),
        _figure(f"{folder}/back.png", f"{name} from behind and below"), "</div>",
        '<div class="pair">', f"<figure>{_pieces(document)}<figcaption>Stitch lines (dashed) and cut lines, warp upward."
        "</figcaption></figure>", f"<div>{_piece_table(document)}{_notes(document)}</div></div>",
    ])


def _verdict(row, document):
    strained = [piece["name"] for piece in document["summary"]["pieces"] if piece["fit"] == "strained"]
    if not strained:
        return "No piece is strained."
    return f"<b>Strained: {escape(', '.join(strained))}.</b> These goods do not take what the form asks there."


def _table(rows):
    lines = ["<table><tr><th class=w>form<th class=w>goods<th>pieces<th>seam, m<th>stretch, 5th to 95th percentile<th>worst"
             "<th>worst shear<th class=w>fits<th>seconds</tr>"]
    for row in rows:
        if row.error:
            lines.append(f"<tr><td class=w>{escape(row.form)}<td class=w colspan=8>{escape(row.error)}</tr>")
            continue
        shear = "" if row.shear is None else f"{row.shear:.0f} degrees"
        lines.append(
            f"<tr><td class=w>{escape(row.form)}<td class=w>{escape(row.goods)}<td>{row.pieces}<td>{row.seam_metres:.2f}"
            f"<td>{_percent(row.stretch[0])} to {_percent(row.stretch[1])}<td>{_percent(row.worst)}<td>{shear}"
            f'<td class="w {"yes" if row.fits else "no"}">{"yes" if row.fits else "no"}<td>{row.seconds:.0f}</tr>')
    words = ("Stretch is along warp and weft in cloth that shears, else principal; seconds are on this machine, with "
             "two forms covered at a time.")
    return "\n".join([*lines, f"</table><p>{words}</p>"])


def _piece_table(document):
    lines = ["<table><tr><th class=w>piece<th class=w>fit<th>size, mm<th>stretch, 5 to 95 %<th>worst</tr>"]
    for order, piece in enumerate(document["summary"]["pieces"]):
        chip = f'<span class=chip style="background:{piece_colour(order)}"></span>'
        kind = "no" if piece["fit"] == "strained" else "yes"
        directions = [piece["stretch"]] if "shear_degrees" not in piece else [piece["warp"], piece["weft"]]
        low, high = min(d["p5"] for d in directions), max(d["p95"] for d in directions)
        worst = max((d["worst"] for d in directions), key=abs)
        lines.append(
            f'<tr><td class=w>{chip}{escape(piece["name"])}<td class="w {kind}">{piece["fit"]}'
            f"<td>{piece['width_mm']:.0f} x {piece['height_mm']:.0f}<td>{_percent(low)} to {_percent(high)}"
            f"<td>{_percent(worst)}</tr>")
    return "\n".join([*lines, "</table>"])


def _notes(document):
    notes = document["summary"]["notes"]
    return "<ul>" + "".join(f"<li>{escape(note)}</li>" for note in notes) + "</ul>" if notes else ""


def _pieces(document):
    """The cut pieces in their colours with their names, in rows of falling height; scaled to the page."""
    pieces = document["pieces"]
    cuts = [[np.array(ring) * [1, -1] for ring in piece["cut"]] for piece in pieces]
    low = np.array([np.concatenate(rings).min(axis=0) for rings in cuts])
    size = np.array([np.concatenate(rings).max(axis=0) for rings in cuts]) - low
    across = max(size[:, 0].max(), 1.5 * np.sqrt((size[:, 0] * size[:, 1]).sum()))
    gap, x, y, row, tall = 0.03 * across, 0.0, 0.0, 0.0, 0.0
    lines = []
    for k in np.argsort(-size[:, 1], kind="stable"):
        if x > 0 and x + size[k, 0] > across:
            x, y, row = 0.0, y + row + gap, 0.0
        lines.append(_piece(pieces[k], cuts[k], np.array([x, y]) - low[k], WIDTH / across, piece_colour(k)))
        x, row = x + size[k, 0] + gap, max(row, size[k, 1])
        tall = max(tall, y + row)
    height = tall * WIDTH / across
    return (f'<svg viewBox="-2 -2 {WIDTH + 4:.1f} {height + 4:.1f}" width="{WIDTH + 4:.0f}" role="img" '
            f'aria-label="The flat pieces">{"".join(lines)}</svg>')


def _piece(piece, cut, place, scale, colour):
    outline = (np.array(piece["outline"]) * [1, -1] + place) * scale
    shape = "".join(path_data((ring + place) * scale, True) for ring in cut)
    x, y = (np.array(_inside(piece)) * [1, -1] + place) * scale
    name = escape(piece["name"])
    return (f'<path fill="{colour}" fill-rule="evenodd" stroke="#1a1a1a" d="{shape}"/>'
            f'<path fill="none" stroke="#1a1a1a" stroke-width=".8" stroke-dasharray="3 2" d="{path_data(outline, True)}"/>'
            f'<text x="{x:.1f}" y="{y + 5:.1f}" font-size="15" text-anchor="middle" paint-order="stroke" stroke="#fff" '
            f'stroke-width="3">{name}</text>')


def _inside(piece):
    """A point of the piece far from its stitch line, where the name is legible."""
    return polylabel(Polygon(piece["outline"]).buffer(0), tolerance=2.0).coords[0]


def _figure(path, words):
    return f'<figure><img src="{path}" alt="{words}"><figcaption>{words}</figcaption></figure>'


def _percent(share):
    return f"{100 * share:+.1f} %"
