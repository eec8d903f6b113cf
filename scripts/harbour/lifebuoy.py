"""Ring buoy, 0.76 m across, canvas over a cork ring: one handle, a section wider than it is high."""

import bmesh
import bpy

from .tools import on_ground, to_object

RING, SECTION, FLATNESS = 0.29, 0.09, 0.7
AROUND, ACROSS = 88, 28


def make():
    """The object, resting on the ground."""
    bpy.ops.mesh.primitive_torus_add(major_segments=AROUND, minor_segments=ACROSS, major_radius=RING, minor_radius=SECTION)
    start = bpy.context.object
    bm = bmesh.new()
    bm.from_mesh(start.data)
    bpy.data.objects.remove(start)
    bmesh.ops.scale(bm, vec=(1, 1, FLATNESS), verts=bm.verts[:])
    return on_ground(to_object(bm, "Lifebuoy"))
