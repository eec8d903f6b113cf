"""Sheets: what goes to the cutting table. `save` writes the documents, `report.summary` gives the figures."""

import os
import shutil
import tempfile
from pathlib import Path

from ..errors import WishError
from . import data, html, pdf, svg
from .draft import draft
from .lay import lay
from .names import safe_name
from .report import summary_of

FILES = {"pdf": "pattern.pdf", "svg": "pattern.svg", "json": "pattern.json", "html": "index.html"}

__all__ = ["FILES", "safe_name", "save"]


def save(pattern, folder, kinds=tuple(FILES), paper="roll"):
    """Write the documents of a pattern into a folder; returns their paths in the order of `kinds`.

    kinds: some of FILES. paper: "roll" (one large page), "a4" or "letter" (pages to glue), for the PDF. Everything is
    written beside the folder first and moved in when it is whole, so a failure leaves the folder as it was.
    """
    kinds = (kinds,) if isinstance(kinds, str) else tuple(dict.fromkeys(kinds))
    unknown = [kind for kind in kinds if kind not in FILES]
    if unknown:
        raise WishError(f"kinds: {unknown[0]!r} is not a document the sheets can write; choose from {', '.join(FILES)}.")
    if paper not in pdf.PAPERS:
        raise WishError(f"paper: {paper!r} is not known; choose from {', '.join(pdf.PAPERS)}.")
    drafts = draft(pattern)
    sheets = lay(pattern, drafts)
    summary = summary_of(pattern, drafts, sheets)
    write = {
        "pdf": lambda: pdf.write(pattern, drafts, sheets, summary, paper),
        "svg": lambda: svg.write(pattern, drafts, sheets),
        "json": lambda: data.write(pattern, drafts, summary),
        "html": lambda: html.write(pattern, sheets, summary),
    }
    return _put(Path(folder), {FILES[kind]: write[kind]() for kind in kinds})


def _put(folder, contents):
    """Whole files or none: write all into a temporary neighbour on the same disk, then move each into place."""
    folder.mkdir(parents=True, exist_ok=True)
    waiting = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    try:
        for name, body in contents.items():
            (waiting / name).write_bytes(body)
        for name in contents:
            os.replace(waiting / name, folder / name)
    finally:
        shutil.rmtree(waiting, ignore_errors=True)
    return [folder / name for name in contents]
