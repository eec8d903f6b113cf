"""Boat fender, 0.24 m through and 0.70 m long, neoprene: a straight barrel with two round ends."""

import bmesh

from .tools import add_row, dome, modify, on_ground, to_object

RADIUS, LENGTH = 0.12, 0.70
ROWS = 11  # of each half's barrel


def make():
    """The object, standing on the ground."""
    bm, rim = dome(cuts=15)
    bmesh.ops.scale(bm, vec=(RADIUS, RADIUS, RADIUS), verts=bm.verts[:])
    barrel = LENGTH / 2 - RADIUS
    bmesh.ops.translate(bm, vec=(0, 0, barrel), verts=bm.verts[:])
    for row in range(1, ROWS + 1):
        height = barrel * (1 - row / ROWS)
        rim = add_row(bm, rim, lambda co, height=height: (co.x, co.y, height))
    thing = to_object(bm, "Fender")
    modify(thing, "MIRROR", use_axis=(False, False, True), merge_threshold=1e-5)
    return on_ground(thing)
