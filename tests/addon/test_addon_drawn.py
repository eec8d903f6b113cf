"""Wishes drawn on the mesh: held seams, shut edges, the only faces to cover; kept, read through modifiers, and met."""

import bpy
import numpy as np
import pytest

from addon import names
from addon.job import load

shut_edges, open_edges = bpy.ops.seamwright.shut_edges, bpy.ops.seamwright.open_edges
cover_only, cover_all = bpy.ops.seamwright.cover_only, bpy.ops.seamwright.cover_all

EQUATOR = 0.2 * np.sin(np.pi / 4)  # z of the ring of edges that the tests hold


def ring_of(mesh):
    """The edges of one ring of the ball."""
    ring = [edge for edge in mesh.edges if all(abs(mesh.vertices[k].co.z - EQUATOR) < 1e-6 for k in edge.vertices)]
    assert len(ring) == 12
    return ring


def mark_ring(mesh):
    """Mark the edges of one ring of the ball as seams; their points, in pairs."""
    ring = ring_of(mesh)
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


def select(mesh, edges=(), faces=()):
    """Select these alone, by number, as Edit Mode does."""
    for things, chosen in ((mesh.vertices, ()), (mesh.edges, edges), (mesh.polygons, faces)):
        things.foreach_set("select", np.isin(np.arange(len(things)), list(chosen)))


def numbers_and_ends(edges):
    return [edge.index for edge in edges], {tuple(sorted(edge.vertices)) for edge in edges}


def top_of(mesh):
    return {face.index for face in mesh.polygons if face.center.z > 0.1}


def test_selected_edges_are_shut_until_opened(ball, reading):
    assert reading(ball).shut.shape == (0, 2)
    select(ball.data)
    with pytest.raises(RuntimeError, match="Ball: no edge is selected"):
        shut_edges()
    ring, ends = numbers_and_ends(ring_of(ball.data))
    select(ball.data, edges=ring)
    shut_edges()
    select(ball.data)
    assert set(map(tuple, np.sort(reading(ball).shut, axis=1).tolist())) == ends
    ball.modifiers.new("finer", "SUBSURF").levels = 1
    bpy.context.view_layer.update()
    assert len(reading(ball).shut) == 24
    open_edges()
    assert reading(ball).shut.shape == (0, 2)


def test_what_is_selected_in_edit_mode_is_taken_as_it_is_there(ball, reading):
    bpy.ops.object.mode_set(mode="EDIT")
    bpy.ops.mesh.select_all(action="SELECT")
    shut_edges()
    cover_only()
    assert ball.mode == "EDIT"
    bpy.ops.object.mode_set(mode="OBJECT")
    assert len(reading(ball).shut) == len(ball.data.edges) and reading(ball).only.all()
    cover_all()
    assert reading(ball).only.shape == (0,)


@pytest.mark.parametrize("route", ["through", "edges"])
def test_no_seam_is_in_the_faces_beside_shut_edges(ball, route):
    points = ball.data.vertices
    ring, ends = numbers_and_ends([edge for edge in ring_of(ball.data) if points[edge.vertices[0]].co.x > 0])
    assert len(ring) > 4
    select(ball.data, edges=ring)
    shut_edges()
    ball.seamwright.wishes.route = route
    bpy.ops.seamwright.cover()
    pattern = load(ball.seamwright.result.path)
    beside = [face.index for face in ball.data.polygons if ends & set(face.edge_keys)]
    owners = [{piece.name for piece in pattern.pieces if face in pattern.form.polygon[piece.source]} for face in beside]
    assert all(len(owner) == 1 for owner in owners) and len(set().union(*owners)) == 1
    if route == "edges":
        assert not ends & seams(ball.data)


@pytest.mark.parametrize("route", ["through", "edges"])
def test_only_selected_faces_are_covered(ball, route):
    top = top_of(ball.data)
    area = sum(ball.data.polygons[face].area for face in top)
    select(ball.data, faces=top)
    cover_only()
    select(ball.data)
    ball.seamwright.wishes.route = route
    bpy.ops.seamwright.cover()
    result = ball.seamwright.result
    pattern, whole = load(result.path), sum(face.area for face in ball.data.polygons)
    covered = sum(piece.areas.sum() for piece in pattern.pieces)
    assert area * (1 - 1e-5) < covered < 0.6 * whole
    faces = {int(face) for piece in pattern.pieces for face in pattern.form.polygon[piece.source]}
    assert faces >= top
    if route == "edges":
        assert {face for face, piece in enumerate(ball.data.attributes[names.PIECE].data) if piece.value >= 0} == faces
        keys = [key for face in faces for key in ball.data.polygons[face].edge_keys]
        border = {key for key in keys if keys.count(key) == 1}
        assert border and border <= seams(ball.data)
    else:
        assert sum(face.area for face in result.copy.data.polygons) == pytest.approx(covered, rel=1e-5)


def test_marked_seams_are_improved(ball, reading):
    """A crooked ring, without a thrift: neither length nor stretch grows; on route edges again and again."""
    wishes = ball.seamwright.wishes
    wishes.route, wishes.improve, wishes.choose_thrift = "edges", True, False
    with pytest.raises(RuntimeError, match="Ball: no edge is marked as a seam, so there is nothing to improve"):
        bpy.ops.seamwright.cover()
    points = [vertex.co for vertex in ball.data.vertices]
    upper = [face.center.z + 0.5 * face.center.x > 0.06 for face in ball.data.polygons]
    sides = {}
    for face in ball.data.polygons:
        for key in face.edge_keys:
            sides.setdefault(key, set()).add(upper[face.index])
    border = {key for key, both in sides.items() if len(both) == 2}
    for edge in ball.data.edges:
        edge.use_seam = edge.key in border
    assert set(map(tuple, np.sort(reading(ball).start, axis=1).tolist())) == border

    def metres():
        return sum((points[a] - points[b]).length for a, b in seams(ball.data))

    before = metres()
    bpy.ops.seamwright.cover()
    assert len(ball.seamwright.result.pieces) == 2
    assert metres() <= before * (1 + 1e-6)
    wishes.improve = False
    assert reading(ball).start.shape == (0, 2)


def test_a_mesh_of_which_only_a_part_is_covered_is_not_cut_itself(ball):
    select(ball.data, faces=top_of(ball.data))
    cover_only()
    ball.seamwright.wishes.cut_itself = True
    with pytest.raises(RuntimeError, match="Ball: only some of its faces"):
        bpy.ops.seamwright.cover()
