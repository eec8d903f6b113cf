"""Cushion of a sea chest, 0.60 x 0.40 x 0.10 m, upholstery cloth: a box cushion with rounded edges and a filled top."""

from math import cos, pi

import bmesh

from .tools import modify, on_ground, to_object

SIZE = (0.60, 0.40, 0.10)
PARTS = (12, 8, 2)
FILL = 0.018  # how much the middle of top and bottom stands out


def make():
    """The object, lying on the ground."""
    bm = bmesh.new()
    x, y, z = PARTS
    for side in (-1, 1):
        rows = [[bm.verts.new((SIZE[0] * (i / x - 0.5), SIZE[1] * (j / y - 0.5), side * SIZE[2] / 2)) for j in range(y + 1)]
                for i in range(x + 1)]
        for i in range(x):
            for j in range(y):
                bm.faces.new((rows[i][j], rows[i + 1][j], rows[i + 1][j + 1], rows[i][j + 1]))
    rims = [edge for edge in bm.edges if edge.is_boundary]
    walls = bmesh.ops.bridge_loops(bm, edges=rims)["edges"]
    bmesh.ops.subdivide_edges(bm, edges=walls, cuts=z - 1)
    crease = bm.edges.layers.float.new("crease_edge")
    for edge in bm.edges:
        if len(edge.link_faces) == 2 and edge.calc_face_angle() > 1:
            edge[crease] = 0.55
    for vert in bm.verts:
        swell = cos(pi * vert.co.x / SIZE[0]) * cos(pi * vert.co.y / SIZE[1])
        vert.co.z += FILL * swell * (1 if vert.co.z > 0 else -1 if vert.co.z < 0 else 0)
    thing = to_object(bm, "Cushion")
    modify(thing, "SUBSURF", levels=2)
    return on_ground(thing)
