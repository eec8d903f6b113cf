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
    folder = Path(folder)
    blocked = [FILES[kind] for kind in kinds if (folder / FILES[kind]).is_dir()]
    if blocked:
        raise WishError(f"{folder / blocked[0]} is a folder, where a document is to be written. Choose another folder.")
    drafts = draft(pattern)
    sheets = lay(pattern, drafts)
    saved = data.pieces(pattern, drafts)
    summary = summary_of(pattern, drafts, sheets, saved)
    write = {
        "pdf": lambda: pdf.write(pattern, drafts, sheets, summary, paper),
        "svg": lambda: svg.write(pattern, sheets),
        "json": lambda: data.write(pattern, saved, summary),
        "html": lambda: html.write(pattern, sheets, summary),
    }
    return _put(folder, {FILES[kind]: write[kind]() for kind in kinds})


def _put(folder, contents):
    """Whole files or none: write all beside the folder, then change them for the old ones; put those back if that fails."""
    changed = []
    waiting = None
    try:
        folder.mkdir(parents=True, exist_ok=True)
        waiting = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
        before = waiting / "before"
        before.mkdir()
        for name, body in contents.items():
            (waiting / name).write_bytes(body)
        for name in contents:
            if (folder / name).exists():
                os.replace(folder / name, before / name)
            changed.append(name)
            os.replace(waiting / name, folder / name)
    except OSError as error:
        for name in changed:
            (folder / name).unlink(missing_ok=True)
            if (before / name).exists():
                os.replace(before / name, folder / name)
        raise WishError(f"{folder}: sheets cannot be written there ({error.strerror}). Choose another folder.") from error
    finally:
        if waiting:
            shutil.rmtree(waiting, ignore_errors=True)
    return [folder / name for name in contents]
