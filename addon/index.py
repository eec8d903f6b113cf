"""The summary of a whole run: as JSON, and as a page that leads to every form's sheets."""

import json
from html import escape
from urllib.parse import quote

from . import words

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


def _row(form):
    name, fit = escape(form["object"]), escape(form.get("error") or words.of_pattern(form))
    links = " ".join(f'<a href="{quote(form["folder"] + "/" + file)}">{escape(file)}</a>' for file in form.get("files", ()))
    return f"<tr><td>{name}<td>{fit}<td>{links}</tr>"
