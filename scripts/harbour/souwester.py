"""Sou'wester, an oilskin hat of knit-back vinyl: a crown for a 590 mm head, a brim short in front and long behind."""

from math import cos, radians, sin

import bmesh
from mathutils import Vector

from .tools import add_row, dome, modify, on_ground, to_object

CROWN = (0.084, 0.102, 0.108)  # half width, half length, height
BRIM_FRONT, BRIM_BACK = 0.055, 0.135
ROWS = 5


def brim_point(base, share):
    """Where the brim is, `share` of the way from the crown's rim at `base` to its edge; the front is at +y."""
    ahead = base.normalized().y
    back = (0.5 - 0.5 * ahead) ** 1.5
    length = BRIM_FRONT + (BRIM_BACK - BRIM_FRONT) * back
    slope = radians(-22 - 18 * back + 12 * max(0.0, ahead) ** 2)
    outward = Vector((base.x / CROWN[0] ** 2, base.y / CROWN[1] ** 2, 0)).normalized()
    return base + outward * length * share * cos(slope) + Vector((0, 0, length * share * sin(slope)))


def make():
    """The object, its brim's lowest point on the ground."""
    bm, rim = dome(cuts=9)
    for vert in bm.verts:
        vert.co.z **= 0.8  # fuller than half an egg: the sides rise before they close over the head
    bmesh.ops.scale(bm, vec=CROWN, verts=bm.verts[:])
    bases = {}
    for row in range(1, ROWS + 1):
        def place(co, share=row / ROWS):
            # the point's foot on the rim is remembered under its last place
            base = bases.pop(tuple(co), co)
            new = brim_point(base, share)
            bases[tuple(new)] = base
            return new

        rim = add_row(bm, rim, place)
    thing = to_object(bm, "Souwester")
    modify(thing, "SUBSURF", levels=1)
    return on_ground(thing)
