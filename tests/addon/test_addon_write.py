"""What is laid into the scene, judged from the scene alone: the host's mesh, its UV map and attributes."""

import json

import bpy
import numpy as np
import pytest

from addon import names, overlay
from addon.job import load


def faces_of(mesh):
    """(t, 3) points and (t, 3) loops of an all-triangle mesh."""
    loops = np.array([list(face.loop_indices) for face in mesh.polygons])
    points = np.array([list(face.vertices) for face in mesh.polygons])
    return points, loops


def places(mesh, matrix=None):
    points = np.array([list(vertex.co) for vertex in mesh.vertices])
    if matrix is not None:
        points = points @ np.array(matrix)[:3, :3].T
    return points


def uvs(mesh):
    return np.array([list(uv.vector) for uv in mesh.uv_layers[names.UV_MAP].uv])


def attribute(mesh, name):
    return np.array([item.value for item in mesh.attributes[name].data])


def stretch_by_singular_values(points, flat):
    """(t, 2) largest and smallest, minus one: singular values of the map from the flat goods to the form.

    Sander, Snyder, Gortler, Hoppe 2001, one triangle at a time.
    """
    found = []
    for p, q in zip(points, flat, strict=True):
        jacobian = np.column_stack([p[1] - p[0], p[2] - p[0]]) @ np.linalg.inv(np.column_stack([q[1] - q[0], q[2] - q[0]]))
        found.append(np.linalg.svd(jacobian, compute_uv=False) - 1)
    return np.array(found)


def regions(mesh):
    """Face labels: flooding across every edge that is no seam."""
    by_edge = {}
    for face in mesh.polygons:
        for key in face.edge_keys:
            by_edge.setdefault(key, []).append(face.index)
    seams = {tuple(sorted(edge.vertices)) for edge in mesh.edges if edge.use_seam}
    label, count = [-1] * len(mesh.polygons), 0
    for start in range(len(label)):
        if label[start] >= 0:
            continue
        todo = [start]
        label[start] = count
        while todo:
            for key in mesh.polygons[todo.pop()].edge_keys:
                if key in seams:
                    continue
                for other in by_edge[key]:
                    if label[other] < 0:
                        label[other] = count
                        todo.append(other)
        count += 1
    return np.array(label)


def check_marks(mesh, result, matrix, orientation=1):
    """Everything that must hold of a covered mesh of triangles."""
    points, loops = faces_of(mesh)
    spots, piece = uvs(mesh), attribute(mesh, names.PIECE)
    assert spots.min() >= 0 and spots.max() <= 1
    assert sorted(set(piece)) == list(range(len(result.pieces)))
    # seams part the mesh into exactly the pieces
    assert len(set(zip(regions(mesh), piece, strict=True))) == len(set(regions(mesh))) == len(set(piece))
    # lengths in the UV map are true at the scale that is told, no face turned over
    flat = spots[loops] * result.across
    stretch = stretch_by_singular_values(places(mesh, matrix)[points], flat)
    worst = np.where(abs(stretch[:, 0]) >= abs(stretch[:, 1]), stretch[:, 0], stretch[:, 1])
    assert attribute(mesh, names.STRETCH) == pytest.approx(worst, abs=2e-4)
    u, v = flat[:, 1] - flat[:, 0], flat[:, 2] - flat[:, 0]
    assert (orientation * (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]) > 0).all()
    # across an edge that is no seam the two faces share their UVs
    seams = {tuple(sorted(edge.vertices)) for edge in mesh.edges if edge.use_seam}
    seen = {}
    for face, corners in zip(points, loops, strict=True):
        for k in range(3):
            a, b = sorted([(face[k], corners[k]), (face[(k + 1) % 3], corners[(k + 1) % 3])])
            here = spots[[a[1], b[1]]]
            there = seen.setdefault((a[0], b[0]), here)
            if (a[0], b[0]) not in seams:
                assert np.array_equal(here, there)
    # pieces keep apart: no two boxes meet
    parts = [spots[loops[piece == k]].reshape(-1, 2) for k in set(piece)]
    boxes = [(part.min(axis=0), part.max(axis=0)) for part in parts]
    for i, (low, high) in enumerate(boxes):
        for other_low, other_high in boxes[:i]:
            assert (low > other_high).any() or (high < other_low).any()


def shape(mesh):
    faces, edges = ([list(item.vertices) for item in items] for items in (mesh.polygons, mesh.edges))
    return places(mesh).tobytes(), faces, edges


@pytest.mark.parametrize("scale", [(1, 1, 1), (-1.5, 1, 0.8)])
def test_edges_mark_the_mesh_and_change_no_shape(ball, scale):
    ball.scale = scale
    bpy.context.view_layer.update()
    ball.seamwright.wishes.route = "edges"
    before = shape(ball.data)
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    assert shape(ball.data) == before
    assert ball.data.uv_layers.active.name == names.UV_MAP
    assert len(bpy.data.objects) == 1
    check_marks(ball.data, ball.seamwright.result, ball.matrix_world, np.sign(np.prod(scale)))


def test_covering_again_leaves_one_set_of_marks(ball):
    ball.seamwright.wishes.route = "edges"
    bpy.ops.seamwright.cover()
    ball.seamwright.wishes.goods = "card"
    bpy.ops.seamwright.cover()
    named = [item.name for item in (*ball.data.attributes, *ball.data.uv_layers) if "eamwright" in item.name]
    assert sorted(named) == sorted([names.UV_MAP, names.UV_MAP, names.PIECE, names.STRETCH])  # a UV map is an attribute too
    assert ball.seamwright.result.goods == "card"
    check_marks(ball.data, ball.seamwright.result, ball.matrix_world)


def test_through_makes_a_covered_copy_beside_the_form(ball):
    bpy.context.scene.unit_settings.scale_length = 0.5
    ball.location = (1, 2, 3)
    bpy.context.view_layer.update()
    before = shape(ball.data)
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    assert shape(ball.data) == before and names.PIECE not in ball.data.attributes
    copy = ball.seamwright.result.copy
    check_marks(copy.data, ball.seamwright.result, np.eye(4) * 0.5)
    bpy.context.view_layer.update()
    points = np.array([list(copy.matrix_world @ vertex.co) for vertex in copy.data.vertices])
    low, high = points.min(axis=0), points.max(axis=0)
    assert high[1:] - low[1:] == pytest.approx([0.4, 0.4], rel=0.05)  # as large as the form, in scene units
    assert low[0] > 1.2 and (low[1:] + high[1:]) / 2 == pytest.approx([2, 3], abs=0.02)
    edges = {key: 0 for key in copy.data.edge_keys}
    for face in copy.data.polygons:
        for key in face.edge_keys:
            edges[key] += 1
    assert set(edges.values()) == {2}  # welded along the seams: closed, as the form is


def test_thick_goods_get_larger_pieces_but_the_copy_is_as_large_as_the_form(ball):
    ball.seamwright.wishes.goods = "eva foam"
    areas = []
    for side in ("none", "outside"):
        ball.seamwright.wishes.thickness_side = side
        bpy.ops.seamwright.cover()
        mesh = ball.seamwright.result.copy.data
        a, b, c = np.array([list(corner.uv) for corner in mesh.uv_layers.active.data]).reshape(-1, 3, 2).transpose(1, 0, 2)
        areas.append(np.abs(np.linalg.det(np.stack([b - a, c - a], axis=1))).sum() / 2 * ball.seamwright.result.across**2)
        points = places(mesh)
        assert np.ptp(points, axis=0) == pytest.approx([0.4, 0.4, 0.4], rel=0.05)
    assert areas[1] / areas[0] == pytest.approx((1 + 0.0025 / 0.2) ** 2, abs=0.01)  # half of 5 mm on a radius of 200


def test_covering_through_again_replaces_the_copy(ball):
    bpy.ops.seamwright.cover()
    first = ball.seamwright.result.copy
    bpy.ops.seamwright.cover()
    assert ball.seamwright.result.copy == first and len(bpy.data.objects) == 2 and len(bpy.data.meshes) == 2
    bpy.data.objects.remove(first)
    bpy.ops.seamwright.cover()
    assert len(bpy.context.scene.objects) == 2


def test_the_covered_copy_is_no_form(ball):
    bpy.ops.seamwright.cover()
    bpy.context.view_layer.objects.active = ball.seamwright.result.copy
    assert not bpy.ops.seamwright.cover.poll()


def test_clear_takes_everything_off(ball):
    for route in ("edges", "through"):
        ball.seamwright.wishes.route = route
        bpy.ops.seamwright.cover()
        bpy.ops.seamwright.clear()
        assert not any("eamwright" in item.name for item in (*ball.data.attributes, *ball.data.uv_layers))
        assert not any(edge.use_seam for edge in ball.data.edges)
        assert len(bpy.data.objects) == 1 and not ball.seamwright.result.pieces
        assert ball.seamwright.wishes.goods == "spandex"


def test_the_table_shows_what_the_summary_says(ball, tmp_path):
    bpy.ops.seamwright.cover()
    bpy.ops.seamwright.save_sheets(directory=str(tmp_path / "sheets"))
    said = json.loads((tmp_path / "sheets" / "Ball" / "pattern.json").read_text())["summary"]
    result = ball.seamwright.result
    assert [(row.name, row.fit) for row in result.pieces] == [(piece["name"], piece["fit"]) for piece in said["pieces"]]
    for row, piece in zip(result.pieces, said["pieces"], strict=True):
        assert row.worst == pytest.approx(100 * piece["stretch"]["worst"])
    assert result.seam == pytest.approx(said["seam_metres"])


@pytest.mark.parametrize("route", ["edges", "through"])
def test_the_view_shows_the_seams(ball, route):
    ball.seamwright.wishes.route = route
    ball.location = (5, 0, 0)
    bpy.context.view_layer.update()
    bpy.ops.seamwright.cover()
    bpy.context.view_layer.update()
    covered = ball.seamwright.result.copy or ball
    ends = overlay.lines(covered, bpy.context.evaluated_depsgraph_get())
    seams = [edge for edge in covered.data.edges if edge.use_seam]
    assert len(ends) == 2 * len(seams) > 0
    expected = np.array([list(covered.matrix_world @ covered.data.vertices[k].co) for edge in seams for k in edge.vertices])
    apart = np.linalg.norm(ends - expected, axis=1)
    assert (apart < 0.005 * 0.4).all() and (apart > 0).all()  # just above the form, which is 0.4 m across


@pytest.mark.parametrize("keep", [True, False])
def test_symmetry_is_kept_where_it_is_wished(keep):
    bpy.ops.mesh.primitive_uv_sphere_add(segments=12, ring_count=8, radius=0.2)
    egg = bpy.context.object
    egg.scale = (1, 1.3, 1.7)
    bpy.context.view_layer.update()
    wishes = egg.seamwright.wishes
    wishes.goods, wishes.choose_pieces, wishes.pieces, wishes.symmetry = "spandex", True, 4, keep
    bpy.ops.seamwright.cover()
    result = egg.seamwright.result
    pattern, rows = load(result.path), [row.name for row in result.pieces]
    assert bool(pattern.details["planes"]) == keep
    assert rows == [piece.name for piece in pattern.pieces]
    if keep:  # the copy numbers the pieces as the table does, and every piece has its mirror image, or is its own
        points, number = faces_of(result.copy.data)[0], attribute(result.copy.data, names.PIECE)
        middles = np.array([places(result.copy.data)[points[number == k]].mean(axis=0) for k in range(len(rows))])
        off = np.linalg.norm(middles[:, None] - middles * [-1, 1, 1], axis=2)
        assert off.min(axis=1).max() < 0.01
