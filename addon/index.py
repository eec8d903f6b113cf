"""The summary of a whole run: as JSON, as a page that leads to every form's sheets, and as plain text."""

import json
from html import escape
from urllib.parse import quote

PAGE = """<!doctype html>
<html lang="en"><meta charset="utf-8"><meta name="viewport" content="width=device-width"><title>Patterns</title>
<style>body{font:16px/1.5 sans-serif;margin:2em auto;max-width:60em;padding:0 1em}table{border-collapse:collapse;width:100%}
th,td{text-align:left;padding:.4em .8em;border-bottom:1px solid #bbb;vertical-align:top}</style>
<h1>Patterns</h1>
<table><thead><tr><th>Form<th>Pattern<th>Sheets</tr></thead><tbody>
ROWS
</tbody></table></html>
"""


def write(out, result):
    """Write summary.json and index.html into the folder `out`."""
    out.mkdir(parents=True, exist_ok=True)
    (out / "summary.json").write_text(json.dumps(result, indent=2) + "\n", encoding="utf-8")
    rows = "\n".join(_row(form) for form in result["forms"])
    (out / "index.html").write_text(PAGE.replace("ROWS", rows), encoding="utf-8")


def forms_text(forms):
    """One line a form; what a check says comes a line each below it."""
    lines = []
    for form in forms:
        if "says" in form:
            lines.append(f"{form['object']}: {'can' if form['sound'] else 'cannot'} be covered")
            lines += [f"    {line}" for line in form["says"]]
        else:
            lines.append(f"{form['object']:20}  {fit_words(form)}")
    return "".join(line + "\n" for line in lines)


def goods_text(goods):
    """A table of the goods: limits comfortable/hard in percent."""
    lines = [f"{'goods':20}{'warp %':>12}{'weft %':>12}{'ease in %':>12}{'width mm':>10}"]
    for each in goods:
        pairs = ("/".join(f"{100 * value:g}" for value in each[key]) for key in ("stretch_warp", "stretch_weft", "ease_in"))
        lines.append(f"{each['name']:20}" + "".join(f"{pair:>12}" for pair in pairs) + f"{1000 * each['width']:10.0f}")
    return "".join(line + "\n" for line in lines)


def fit_words(form):
    """'4 pieces of canvas, 3.20 m of seam, none strained'; or why there are none."""
    if "error" in form:
        return form["error"]
    count = f"{form['pieces']} {'piece' if form['pieces'] == 1 else 'pieces'}"
    strained = f"strained: {', '.join(form['strained'])}" if form["strained"] else "none strained"
    return f"{count} of {form['goods']}, {form['seam_mm'] / 1000:.2f} m of seam, {strained}"


def _row(form):
    name, words = escape(form["object"]), escape(fit_words(form))
    links = " ".join(f'<a href="{quote(form["folder"] + "/" + file)}">{escape(file)}</a>' for file in form.get("files", ()))
    return f"<tr><td>{name}<td>{words}<td>{links}</tr>"
