"""Seams the maker has marked on the mesh are held: remembered, read through modifiers, and seams of every pattern."""

import bpy
import numpy as np
import pytest

from addon import names
from addon.job import load

EQUATOR = 0.2 * np.sin(np.pi / 4)  # z of the ring of edges that the tests hold


def mark_ring(mesh):
    """Mark the edges of one ring of the ball as seams; their points, in pairs."""
    ring = [edge for edge in mesh.edges if all(abs(mesh.vertices[k].co.z - EQUATOR) < 1e-6 for k in edge.vertices)]
    assert len(ring) == 12
    for edge in ring:
        edge.use_seam = True
    return {tuple(sorted(edge.vertices)) for edge in ring}


def seams(mesh):
    return {tuple(sorted(edge.vertices)) for edge in mesh.edges if edge.use_seam}


def test_marked_seams_are_held_until_let_go(ball, reading):
    assert reading(ball).held.shape == (0, 2)
    ring = mark_ring(ball.data)
    assert reading(ball).held.shape == (0, 2)  # marked is not held
    bpy.ops.seamwright.hold_seams()
    assert set(map(tuple, np.sort(reading(ball).held, axis=1).tolist())) == ring
    bpy.ops.seamwright.let_go_seams()
    assert reading(ball).held.shape == (0, 2)


def test_nothing_marked_is_said(ball):
    with pytest.raises(RuntimeError, match="Ball: no edge is marked as a seam"):
        bpy.ops.seamwright.hold_seams()
    assert names.HELD not in ball.data.attributes


def test_held_seams_go_through_modifiers(ball, reading):
    mark_ring(ball.data)
    bpy.ops.seamwright.hold_seams()
    ball.modifiers.new("finer", "SUBSURF").levels = 1
    bpy.context.view_layer.update()
    assert len(reading(ball).held) == 24


@pytest.mark.parametrize("route", ["through", "edges"])
def test_a_pattern_has_the_held_seams(ball, route):
    ring = mark_ring(ball.data)
    bpy.ops.seamwright.hold_seams()
    ball.seamwright.wishes.route = route
    bpy.ops.seamwright.cover()
    result = ball.seamwright.result
    above = [piece.points[:, 2].min() > EQUATOR - 1e-6 for piece in load(result.path).pieces]
    below = [piece.points[:, 2].max() < EQUATOR + 1e-6 for piece in load(result.path).pieces]
    assert any(above) and any(below) and np.logical_or(above, below).all()  # no piece crosses the ring
    if route == "edges":
        assert ring < seams(ball.data)
        bpy.ops.seamwright.clear()
    assert seams(ball.data) == ring  # what is held stays marked
