"""Draws the seams of covered forms in the 3D view: the host itself shows them in Edit Mode only."""

import bpy
import gpu
import numpy as np
from gpu_extras.batch import batch_for_shader

from . import names, target
from .read import edges, positions

LIFT = 0.002
"""Lines lie this share of the form's size above it, or they would flicker in and out of its faces."""
WIDTH = 2.5
"""Pixels, before the host's own scale."""

_handle = None


def lines(thing, depsgraph):
    """(2 s, 3) float32 ends of the s seam edges of `thing` in the world, a little above it; empty without a pattern."""
    mesh = thing.evaluated_get(depsgraph).data
    if names.PIECE not in mesh.attributes or not len(mesh.vertices):
        return np.empty((0, 3), np.float32)
    flags = np.empty(len(mesh.edges), bool)
    mesh.edges.foreach_get("use_seam", flags)
    normals = np.empty(3 * len(mesh.vertices), np.float32)
    mesh.vertex_normals.foreach_get("vector", normals)
    points = positions(mesh)
    points = points + LIFT * np.ptp(points, axis=0).max() * normals.reshape(-1, 3)
    matrix = np.array(thing.matrix_world, np.float32)
    return (points @ matrix[:3, :3].T + matrix[:3, 3])[edges(mesh)[flags].ravel()]


def draw():
    """Called by the host for every 3D view."""
    context = bpy.context
    if not context.space_data.overlay.show_overlays:
        return
    depsgraph = context.evaluated_depsgraph_get()
    covered = [thing for thing in context.visible_objects if target.is_covered(thing) and thing.mode != "EDIT"]
    found = [lines(thing, depsgraph) for thing in covered]
    if not any(map(len, found)):
        return
    shader = gpu.shader.from_builtin("POLYLINE_UNIFORM_COLOR")
    shader.uniform_float("color", (*context.preferences.themes[0].view_3d.edge_seam, 1.0))
    shader.uniform_float("lineWidth", WIDTH * context.preferences.system.ui_scale)
    shader.uniform_float("viewportSize", (context.region.width, context.region.height))
    gpu.state.depth_test_set("LESS_EQUAL")
    gpu.state.blend_set("ALPHA")  # smooth edges
    batch_for_shader(shader, "LINES", {"pos": np.concatenate(found)}).draw(shader)
    gpu.state.blend_set("NONE")
    gpu.state.depth_test_set("NONE")


def register():
    """Start drawing."""
    global _handle
    _handle = bpy.types.SpaceView3D.draw_handler_add(draw, (), "WINDOW", "POST_VIEW")


def unregister():
    """Stop drawing."""
    bpy.types.SpaceView3D.draw_handler_remove(_handle, "WINDOW")
