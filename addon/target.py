"""What may be covered, and where the answer goes: one place for the rules, used by the window and the command line."""

import bpy
import numpy as np

from . import covered, cut, marks, names, read, result
from .wishes import OWN


class Refused(Exception):
    """Why this object cannot be covered as it is, as a sentence for the maker."""


def is_form(thing):
    """True for mesh objects that have faces and are no covered copies."""
    return thing.type == "MESH" and len(thing.data.polygons) > 0 and not group(thing).is_copy


def is_covered(thing):
    """True for forms that have a pattern, and for covered copies."""
    return thing.type == "MESH" and (len(group(thing).result.pieces) > 0 or group(thing).is_copy)


def group(thing):
    """The object's property group (names.PROPERTY)."""
    return getattr(thing, names.PROPERTY)


def check(thing, asked, depsgraph):
    """Raise Refused where the pattern that is `asked` for could not be laid on the object."""
    if thing.mode == "EDIT":
        raise Refused(f"{thing.name}: leave Edit Mode (Tab) first.")
    painted = group(thing).wishes.keep_clear
    if painted and painted not in thing.vertex_groups:
        raise Refused(f"{thing.name}: it has no vertex group {painted!r} to keep clear; choose another, or none.")
    if group(thing).wishes.improve and not read.seams(thing.data).any():
        raise Refused(f"{thing.name}: no edge is marked as a seam, so there is nothing to improve. Mark some (Edge > Mark "
                      "Seam), or have seams found (Improve Seams off).")
    if asked["goods"] == OWN and not asked["own_goods"]:
        raise Refused(f"{thing.name}: choose the file of your own goods.")
    if asked["cut_itself"] and asked["route"] == "through":
        _check_cut(thing)
    if asked["route"] == "edges":
        _check_edges(thing, depsgraph)


def _check_cut(thing):
    """Raise Refused where the mesh cannot be cut itself without harm to something else."""
    mesh, copy = thing.data, "or leave it as it is and have a covered copy made (Cut the Mesh Itself off)."
    if mesh.library is not None or mesh.override_library is not None:
        raise Refused(f"{thing.name}: its mesh is linked from another file, so it cannot be cut. "
                      f"Make it local (Object > Relations > Make Local), {copy}")
    if thing.mode != "OBJECT":
        raise Refused(f"{thing.name}: go back to Object Mode first, so that its mesh can be cut.")
    users = mesh.users - mesh.use_fake_user
    if users > 1:
        raise Refused(f"{thing.name}: its mesh has {users} users, and the cuts would be in all of them. "
                      f"Make it single-user first (Object > Relations > Make Single User), {copy}")
    if mesh.shape_keys is not None:
        raise Refused(f"{thing.name}: its shape keys would be lost with the points they move. "
                      f"Apply them first (Object Data > Shape Keys > Apply All Shape Keys), {copy}")
    if names.ONLY in mesh.attributes:
        raise Refused(f"{thing.name}: only some of its faces are to be covered, and the others would be lost. "
                      f"Cover all of them, {copy}")
    if len(thing.modifiers):
        raise Refused(f"{thing.name}: its modifiers would work on the cut mesh once more. "
                      f"Apply them first (Object > Apply > Visual Geometry to Mesh), {copy}")
    if thing.matrix_world.determinant() == 0.0:
        raise Refused(f"{thing.name}: it is scaled to nothing along an axis, so its mesh cannot be cut in its place. "
                      f"Apply the scale first (Object > Apply > Scale), {copy}")


def _check_edges(thing, depsgraph):
    """Raise Refused where seams cannot be marked on the edges of the mesh."""
    if thing.data.library is not None or thing.data.override_library is not None:
        raise Refused(f"{thing.name}: its mesh is linked from another file, so no seams can be marked on it. "
                      "Make it local (Object > Relations > Make Local), or choose route through.")
    evaluated = thing.evaluated_get(depsgraph)
    mesh = evaluated.to_mesh()
    try:
        same = len(mesh.vertices) == len(thing.data.vertices) and all(
            np.array_equal(*pair) for pair in zip(read.faces(mesh), read.faces(thing.data), strict=True))
    finally:
        evaluated.to_mesh_clear()
    if not same:
        raise Refused(f"{thing.name}: its modifiers change the faces, so the seams have no edges to be marked on. "
                      "Apply the modifiers, or choose route through.")


def take_off(thing):
    """Take the pattern off the object; its wishes stay."""
    kept, mesh = group(thing).result, thing.data
    if kept.copy is not None:
        worn = kept.copy.data
        bpy.data.objects.remove(kept.copy)
        if not worn.users:
            bpy.data.meshes.remove(worn)
    if names.PIECE in mesh.attributes and mesh.library is None:
        marks.clear(mesh)
    result.forget(kept)


def read_form(thing, scene, depsgraph):
    """The read.Reading of a form, with the wishes drawn on it."""
    wishes = group(thing).wishes
    return read.read(thing, scene, depsgraph, wishes.keep_clear, wishes.improve)


def lay_in(thing, pattern, path, asked, scene):
    """Put the pattern, whose file is `path`, into the scene and its figures on the object; returns its summary."""
    kept, summary = group(thing).result, pattern.summary()
    if asked["route"] == "edges":
        kept.copy, kept.across = None, marks.mark(thing.data, pattern)
        if thing.data.users > 1:
            summary["notes"].append(f"The mesh is shared by {thing.data.users} objects; all of them show these seams.")
    elif asked["cut_itself"]:
        lost = cut.would_be_lost(thing.data)
        kept.copy, kept.across = None, cut.cut(thing, pattern, scene)
        if lost:
            summary["notes"].append(f"The mesh was cut itself; gone with its old faces: {', '.join(lost)}.")
    else:
        old = kept.copy if kept.copy is not None and kept.copy.name in scene.objects else None
        kept.copy, kept.across = covered.make(thing, pattern, scene, old)
        group(kept.copy).is_copy = True
    result.keep(kept, summary, path)
    return summary
