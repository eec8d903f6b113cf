"""Pad over a mushroom bollard, EVA foam: a wide cap that turns under its lip, and a skirt down the neck; open below."""

import bmesh
from mathutils import Vector

from .tools import add_row, dome, modify, on_ground, to_object

CAP_RADIUS, CAP_HEIGHT = 0.20, 0.10
# radius and height of the rows under the cap's widest line
PROFILE = ((0.199, -0.022), (0.188, -0.044), (0.166, -0.060), (0.145, -0.074), (0.134, -0.094), (0.130, -0.118),
           (0.130, -0.142), (0.132, -0.166), (0.137, -0.190))


def make():
    """The object, its skirt's edge on the ground."""
    bm, rim = dome(cuts=11)
    bmesh.ops.scale(bm, vec=(CAP_RADIUS, CAP_RADIUS, CAP_HEIGHT), verts=bm.verts[:])
    for radius, height in PROFILE:
        rim = add_row(bm, rim, lambda co, radius=radius, height=height:
                      Vector((co.x, co.y, 0)).normalized() * radius + Vector((0, 0, height)))
    thing = to_object(bm, "Bollard pad")
    modify(thing, "SUBSURF", levels=1)
    return on_ground(thing)
