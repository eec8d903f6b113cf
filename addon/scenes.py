"""Brings the files named on the command line into the host, and finds the forms in its scene."""

from pathlib import Path

import bpy

from . import target


class WrongUse(Exception):
    """The command line asks for something that cannot be, as a sentence."""


IMPORTERS = {".obj": "obj_import", ".ply": "ply_import", ".stl": "stl_import"}


def sort(files):
    """(blend files, other files) as Paths. Raises WrongUse on a file that is missing or of no kind the host can read."""
    paths = [Path(file) for file in files]
    for path in paths:
        if not path.is_file():
            raise WrongUse(f"{path}: there is no such file.")
        if path.suffix.lower() not in (".blend", *IMPORTERS):
            raise WrongUse(f"{path}: this kind of file cannot be read; give .blend, {', '.join(IMPORTERS)}.")
    blends = [path for path in paths if path.suffix.lower() == ".blend"]
    return blends, [path for path in paths if path not in blends]


def open_blend(path):
    """Open a .blend in place of the scene."""
    try:
        bpy.ops.wm.open_mainfile(filepath=str(path.absolute()), load_ui=False)
    except RuntimeError as error:
        raise WrongUse(f"{path}: cannot be opened ({str(error).strip()}).") from error


def empty():
    """Clear the scene of what the host starts with."""
    for thing in list(bpy.data.objects):
        bpy.data.objects.remove(thing)


def bring_in(path):
    """Import a file into the scene; returns its new objects. Raises WrongUse."""
    before = set(bpy.data.objects)
    try:
        getattr(bpy.ops.wm, IMPORTERS[path.suffix.lower()])(filepath=str(path.absolute()))
    except RuntimeError as error:
        raise WrongUse(f"{path}: cannot be read ({str(error).strip()}).") from error
    new = [thing for thing in bpy.data.objects if thing not in before]
    if not new:
        raise WrongUse(f"{path}: holds no objects.")
    return new


def forms():
    """The forms of the scene that can be seen, in the order of their names."""
    return in_order(thing for thing in bpy.context.scene.objects if target.is_form(thing) and thing.visible_get())


def in_order(things):
    """Objects by name."""
    return sorted(things, key=lambda thing: thing.name)
