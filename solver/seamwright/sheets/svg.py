"""The sheets as one SVG at true scale: one unit is one millimetre, one group to a layer."""

from html import escape

from .lettering import LAYERS
from .table import stacked

STYLE = {  # stroke colour, width in mm, dashes
    "cut": ("#000000", 0.4, None), "stitch": ("#0072B2", 0.25, "3 1.5"), "notches": ("#D55E00", 0.35, None),
    "grain": ("#000000", 0.3, None), "marks": ("#444444", 0.2, None),
}


def write(pattern, sheets):
    """Bytes of pattern.svg. Sheets of goods stand under one another, each framed when there are several."""
    table = stacked(sheets)
    lines = [
        '<?xml version="1.0" encoding="UTF-8"?>',
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{_n(table.width)}mm" height="{_n(table.height)}mm" '
        f'viewBox="0 0 {_n(table.width)} {_n(table.height)}">',
        f"<title>{tidy(pattern.form.name)}: pieces for {tidy(pattern.goods.name)}, 1 unit = 1 mm</title>",
    ]
    for layer in LAYERS:
        colour, width, dashes = STYLE[layer]
        dash = f' stroke-dasharray="{dashes}"' if dashes else ""
        lines.append(f'<g id="{layer}" fill="none" stroke="{colour}" stroke-width="{width}"{dash}>')
        lines += [_path(stroke, draft) for draft, stroke in table.strokes if stroke.layer == layer]
        lines.append("</g>")
    lines.append('<g id="lettering" fill="#000000" font-family="Helvetica, Arial, sans-serif" text-anchor="middle">')
    lines += [_text(mark, draft) for draft, mark in table.letterings]
    lines += ["</g>", "</svg>", ""]
    return "\n".join(lines).encode("utf-8")


def path_data(points, closed):
    """The d attribute of a polyline (k, 2)."""
    body = "L".join(f"{_n(x)} {_n(y)}" for x, y in points)
    return f"M{body}{'Z' if closed else ''}"


def tidy(text):
    """Text as XML takes it: control signs dropped, the rest escaped."""
    return escape("".join(ch for ch in str(text) if ch.isprintable()))


def _path(stroke, draft):
    owner = f' data-piece="{draft.number}"' if draft else ""
    return f'<path{owner} d="{path_data(stroke.points, stroke.closed)}"/>'


def _text(mark, draft):
    x, y = mark.at
    turn = f' transform="rotate({_n(-mark.angle)} {_n(x)} {_n(y)})"' if mark.angle else ""
    owner = f' data-piece="{draft.number}"' if draft else ""
    return (f'<text{owner} x="{_n(x)}" y="{_n(y + 0.27 * mark.height)}" font-size="{_n(mark.height)}" '
            f'textLength="{_n(mark.width)}" lengthAdjust="spacingAndGlyphs"{turn}>{tidy(mark.text)}</text>')


def _n(value):
    text = f"{value:.3f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text
