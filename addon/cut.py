"""Cuts the seams into the form's own mesh: object, materials and vertex groups stay, points and faces are the pattern's."""

import numpy as np
from mathutils import Vector
from mathutils.bvhtree import BVHTree
from mathutils.interpolate import poly_3d_calc

from . import covered, names

CARRIED = ("sharp_face", "material_index", names.UV_MAP, names.PIECE, names.STRETCH)


def would_be_lost(mesh):
    """Names of the mesh's own attributes, UV maps and colours that `cut` cannot keep."""
    return [each.name for each in mesh.attributes if not (each.is_internal or each.is_required or each.name in CARRIED)]


def cut(thing, pattern, scene):
    """Make the object's mesh the covered one; returns metres across its UVs.

    The form was read from this very mesh, with no modifiers or shape keys. Faces keep material and shading of those they
    are parts of; points have the weights of the place where they lie.
    """
    mesh, world = thing.data, thing.matrix_world
    inward, origin = np.array(world.to_3x3().inverted()), np.array(world.translation)
    owner = pattern.form.polygon[np.concatenate([piece.source for piece in pattern.pieces])]
    looks = {key: _of_faces(mesh, key, kind)[owner] for key, kind in (("material_index", np.int32), ("use_smooth", bool))}
    weights = _Weights(thing)
    mesh.clear_geometry()
    across = covered.fill(mesh, pattern, lambda points: (points / scene.unit_settings.scale_length - origin) @ inward.T)
    for key, values in looks.items():
        mesh.polygons.foreach_set(key, values)
    if world.is_negative:
        mesh.flip_normals()  # reading had turned the faces of a mirrored object
    weights.give(thing)
    mesh.update()
    return across


def _of_faces(mesh, key, kind):
    values = np.empty(len(mesh.polygons), kind)
    mesh.polygons.foreach_get(key, values)
    return values


class _Weights:
    """The vertex groups of a mesh that is about to lose its points."""

    def __init__(self, thing):
        self.names = [group.name for group in thing.vertex_groups]
        if not self.names:
            return
        self.points = [vertex.co.copy() for vertex in thing.data.vertices]
        self.faces = [tuple(face.vertices) for face in thing.data.polygons]
        self.of_point = [{element.group: element.weight for element in vertex.groups} for vertex in thing.data.vertices]
        self.tree = BVHTree.FromPolygons(self.points, self.faces)

    def give(self, thing):
        """Give them to the new points, each as it is at the nearest place of the old faces."""
        groups = [thing.vertex_groups.new(name=name) for name in self.names]
        for vertex in thing.data.vertices if groups else ():
            place, _, face, _ = self.tree.find_nearest(vertex.co)
            corners = self.faces[face]
            shares = poly_3d_calc([self.points[corner] for corner in corners], Vector(place))
            for number, group in enumerate(groups):
                found = [self.of_point[corner].get(number) for corner in corners]
                if any(weight is not None for weight in found):
                    group.add([vertex.index], sum(s * (w or 0.0) for s, w in zip(shares, found, strict=True)), "REPLACE")
