"""The setting: a stone quay with water before it, a shed wall, chest, crate, bollard and lantern post. Never covered."""

from math import radians

import bpy

from . import studio

STONE, WATER, WOOD, IRON, WALL, ROPE = "#93928c", "#35616f", "#80603f", "#3c4147", "#aebbb9", "#b79a66"
SIZE = (960, 600)  # of the picture, pixels
SEEN = [(x, y, z) for x in (-1.55, 1.5) for y in (-0.95, 1.0) for z in (-0.55, 1.45)]  # what the camera takes in, metres


def furnish(scene):
    """Put the whole setting into the scene, with its camera."""
    _box(scene, "Quay", (3.6, 1.85, 1.0), (0, 0.2, -0.5), STONE, bevel=0.03)
    _box(scene, "Water", (40, 30, 0.1), (0, -10, -0.85), WATER, roughness=0.25)
    for board in range(18):
        _box(scene, "Board", (0.196, 0.03, 1.7), (-1.7 + 0.2 * board, 1.08, 0.85), WALL, bevel=0.006)
    _box(scene, "Chest", (0.64, 0.44, 0.34), (-0.68, 0.42, 0.17), WOOD, bevel=0.012)
    _box(scene, "Chest lid", (0.68, 0.48, 0.08), (-0.68, 0.42, 0.38), WOOD, bevel=0.025)
    _box(scene, "Crate", (0.40, 0.40, 0.42), (-1.32, 0.42, 0.21), "#9a7a52", bevel=0.008)
    _rod(scene, "Bollard", 0.118, 0.27, (0.95, -0.10, 0.135), IRON)
    _rod(scene, "Bollard foot", 0.20, 0.06, (0.95, -0.10, 0.03), IRON)
    _rod(scene, "Lantern post", 0.028, 1.5, (1.25, 0.95, 0.75), IRON)
    _rod(scene, "Lantern arm", 0.016, 0.36, (1.25, 0.79, 1.48), IRON, turn=(90, 0, 0))
    _rod(scene, "Lantern cord", 0.006, 0.16, (1.25, 0.62, 1.41), IRON)
    _rod(scene, "Fender rope", 0.010, 0.40, (-0.80, -0.81, 0.08), ROPE)
    _rod(scene, "Peg", 0.02, 0.30, (-0.15, 0.95, 1.17), WOOD, turn=(90, 0, 0))
    _ball(scene, "Lamp", 0.05, (1.25, 0.62, 1.22), "#fff4d0")
    studio.camera(scene, (0.30, -1, 0.30), lens=46)
    studio.resolution(scene, SIZE)
    studio.frame(scene, SEEN, margin=1.0)


def _box(scene, name, size, place, colour, bevel=0.0, roughness=0.8):
    bpy.ops.mesh.primitive_cube_add(size=1)
    thing = _into(scene, name, place, colour, roughness)
    thing.scale = size
    if bevel:
        # in the object's own space the bevel would be stretched with it
        thing.data.transform(thing.matrix_basis.to_3x3().to_4x4())
        thing.scale = (1, 1, 1)
        edges = thing.modifiers.new("Bevel", "BEVEL")
        edges.width, edges.segments = bevel, 3


def _rod(scene, name, radius, length, place, colour, turn=(0, 0, 0)):
    bpy.ops.mesh.primitive_cylinder_add(radius=radius, depth=length, vertices=48)
    thing = _into(scene, name, place, colour)
    thing.rotation_euler = [radians(angle) for angle in turn]


def _ball(scene, name, radius, place, colour):
    bpy.ops.mesh.primitive_uv_sphere_add(radius=radius)
    _into(scene, name, place, colour)


def _into(scene, name, place, colour, roughness=0.8):
    """Move the object just added from the host's current scene into `scene`."""
    thing = bpy.context.object
    for collection in thing.users_collection:
        collection.objects.unlink(thing)
    scene.collection.objects.link(thing)
    thing.name, thing.location = name, place
    thing.data.materials.append(studio.material(colour, roughness))
    return thing
