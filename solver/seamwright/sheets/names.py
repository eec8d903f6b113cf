"""File and folder names made from the names of forms."""

import unicodedata

RESERVED = {"con", "prn", "aux", "nul", *(f"{port}{k}" for port in ("com", "lpt") for k in range(1, 10))}
"""Names that one common operating system keeps for devices."""


def safe_name(name, taken=()):
    """A name for a file or folder on any disk: no separators or other signs, no leading dot, about 80 letters at most.

    taken: names already given out; a number is added while the name, whatever its case, is among them.
    """
    kept = (ch if ch.isalnum() or ch in " -_." else "_" for ch in unicodedata.normalize("NFC", str(name)))
    plain = "".join(kept).strip(" .")[:80].rstrip(" .") or "form"
    if plain.split(".")[0].lower() in RESERVED:
        plain = f"_{plain}"
    used = {other.lower() for other in taken}
    number, found = 1, plain
    while found.lower() in used:
        number += 1
        found = f"{plain} {number}"
    return found
