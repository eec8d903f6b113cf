"""Seal pup, 0.8 m long, wool felt: body, head and four flippers grown together from soft balls, then meshed in quads."""

from math import radians

import bpy
from mathutils import Euler

from .tools import modify, on_ground, smooth

# each ball: place, half sizes, turn about x, y, z in degrees; the pup looks along +x, right side mirrored from left
MIDDLE = [
    ((0.00, 0, 0.150), (0.250, 0.150, 0.140), (0, 6, 0)),     # body
    ((0.17, 0, 0.190), (0.140, 0.115, 0.120), (0, -25, 0)),   # chest
    ((0.285, 0, 0.285), (0.105, 0.098, 0.092), (0, 0, 0)),    # head
    ((0.365, 0, 0.262), (0.048, 0.052, 0.040), (0, 12, 0)),   # muzzle
    ((-0.21, 0, 0.105), (0.150, 0.090, 0.080), (0, -8, 0)),   # hind body
]
LEFT = [
    ((0.13, 0.160, 0.070), (0.058, 0.110, 0.036), (-24, 0, -30)),  # fore flipper
    ((-0.340, 0.052, 0.070), (0.105, 0.048, 0.034), (0, 0, -28)),  # hind flipper
]


def make():
    """The object, lying on the ground."""
    balls = bpy.data.metaballs.new("Seal pup")
    balls.resolution = balls.render_resolution = 0.007
    balls.threshold = 0.6
    right = [((x, -y, z), size, (-a, b, -c)) for (x, y, z), size, (a, b, c) in LEFT]
    for place, size, turn in MIDDLE + LEFT + right:
        ball = balls.elements.new(type="ELLIPSOID")
        ball.co, ball.rotation = place, Euler(map(radians, turn)).to_quaternion()
        # with this threshold the surface of a lone ball lies at some 0.6 of its radius
        ball.radius = 1.0
        ball.size_x, ball.size_y, ball.size_z = (1.6 * s for s in size)
    soft = bpy.data.objects.new("Seal pup balls", balls)
    bpy.context.scene.collection.objects.link(soft)
    mesh = bpy.data.meshes.new_from_object(soft.evaluated_get(bpy.context.evaluated_depsgraph_get()))
    bpy.data.objects.remove(soft)
    thing = bpy.data.objects.new("Seal pup", mesh)
    bpy.context.scene.collection.objects.link(thing)
    modify(thing, "REMESH", mode="VOXEL", voxel_size=0.0105)
    modify(thing, "SMOOTH", factor=0.5, iterations=10)
    smooth(thing)
    return on_ground(thing)
