"""Shade of a quay lantern, card: part of a cone, open at both ends, which unrolls without any stretch."""

import bmesh

from .tools import add_row, to_object

TOP, BOTTOM, HEIGHT = 0.10, 0.19, 0.24  # radii and height
AROUND, ROWS = 96, 13


def make():
    """The object, standing on the ground."""
    bm = bmesh.new()
    bmesh.ops.create_circle(bm, segments=AROUND, radius=BOTTOM)
    rim = bm.edges[:]
    for row in range(1, ROWS + 1):
        share = row / ROWS
        radius = BOTTOM + (TOP - BOTTOM) * share
        rim = add_row(bm, rim, lambda co, radius=radius, share=share:
                      co.to_2d().normalized().to_3d() * radius + type(co)((0, 0, HEIGHT * share)))
    return to_object(bm, "Lantern shade")
