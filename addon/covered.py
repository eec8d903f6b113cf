"""The covered copy: a mesh of its own beside the form, with the seams cut into its faces and each piece in its colour."""

import bpy
import numpy as np

from . import marks, names
from .lay import lay
from .read import edges, positions

ASIDE = 1.5
"""The copy stands this many of the form's widths away, along the world's X."""


def make(thing, pattern, scene, old=None):
    """(object, metres across its UVs): the covered copy of `thing`, new or, where `old` is one, in its place."""
    mesh = bpy.data.meshes.new(f"{pattern.form.name} covered")
    centre = np.array(thing.matrix_world.translation)
    across = fill(mesh, pattern, lambda points: points / scene.unit_settings.scale_length - centre)
    _colour(mesh)
    if any(face.use_smooth for face in thing.data.polygons):
        mesh.shade_smooth()
    mesh.update()
    if old is not None:
        worn, old.data = old.data, mesh
        if not worn.users:
            bpy.data.meshes.remove(worn)
        return old, across
    copy = bpy.data.objects.new(mesh.name, mesh)
    for collection in thing.users_collection or (scene.collection,):
        if collection.library is None:
            collection.objects.link(copy)
    if not copy.users_collection:
        scene.collection.objects.link(copy)
    width = np.ptp(positions(mesh)[:, 0])
    copy.location = centre + (ASIDE * width, 0.0, 0.0)
    return copy, across


def fill(mesh, pattern, place):
    """Make the empty `mesh` that of the pieces, marked and welded where they are sewn; returns metres across its UVs.

    place: gives the mesh's own (n, 3) coordinates of points in the world, metres.
    """
    stacked = np.concatenate([piece.points for piece in pattern.pieces])
    starts = np.cumsum([0, *(len(piece.points) for piece in pattern.pieces)])[:-1]
    points, weld = np.unique(stacked, axis=0, return_inverse=True)  # pieces agree to the last bit along seams
    weld = weld.ravel()
    stacked_triangles = [piece.triangles + start for piece, start in zip(pattern.pieces, starts, strict=True)]
    triangles = weld[np.concatenate(stacked_triangles)]
    mesh.from_pydata(place(points).astype(np.float32), (), triangles)
    places, across = lay(pattern)
    uvs = [((piece.flat + place) / across)[piece.triangles].reshape(-1, 2)
           for piece, place in zip(pattern.pieces, places, strict=True)]
    marks.set_uvs(mesh, np.concatenate(uvs))
    piece_of = np.repeat(np.arange(len(pattern.pieces)), [len(piece.triangles) for piece in pattern.pieces])
    marks.set_attribute(mesh, names.PIECE, "INT", piece_of)
    marks.set_attribute(mesh, names.STRETCH, "FLOAT", np.concatenate([marks.worst_of(p.stretch) for p in pattern.pieces]))
    marks.set_seams(mesh, _sewn(mesh, pattern, weld, starts))
    return across


def _sewn(mesh, pattern, weld, starts):
    """(e,) bool: edges on an outline that have a face on both sides."""
    outlines = [weld[piece.outline + start] for piece, start in zip(pattern.pieces, starts, strict=True)]
    around = np.concatenate([np.column_stack([outline, np.roll(outline, -1)]) for outline in outlines])
    count = len(mesh.vertices)
    keys, uses = np.unique(np.sort(around, axis=1) @ (count, 1), return_counts=True)
    return np.isin(np.sort(edges(mesh), axis=1) @ (count, 1), keys[uses > 1])


def _colour(mesh):
    """Give every piece its colour, by materials; the first pieces' colours, then again from the start."""
    from seamwright.sheets.colours import PIECES

    piece_of = np.empty(len(mesh.polygons), np.int32)
    mesh.attributes[names.PIECE].data.foreach_get("value", piece_of)
    for number, colour in enumerate(PIECES[:piece_of.max() + 1], 1):
        name = f"{names.MATERIAL} {number}"
        material = bpy.data.materials.get(name) or bpy.data.materials.new(name)
        material.diffuse_color = [_linear(int(colour[k:k + 2], 16) / 255) for k in (1, 3, 5)] + [1.0]
        mesh.materials.append(material)
    mesh.attributes.new("material_index", "INT", "FACE")
    mesh.attributes["material_index"].data.foreach_set("value", piece_of % len(PIECES))


def _linear(value):
    """Linear light of an sRGB value (IEC 61966-2-1)."""
    return value / 12.92 if value <= 0.04045 else ((value + 0.055) / 1.055) ** 2.4
