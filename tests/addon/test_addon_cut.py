"""Route through with the mesh cut itself: judged from the scene alone, against the mesh as it was."""

import bpy
import numpy as np
import pytest
from mathutils.bvhtree import BVHTree
from test_addon_refusals import linked_from_a_file, refusal
from test_addon_write import check_marks, shape

from addon import names, target


@pytest.fixture
def cut_ball(ball):
    """A ball whose mesh is to be cut itself."""
    ball.seamwright.wishes.cut_itself = True
    return ball


def tree(thing):
    return BVHTree.FromPolygons([vertex.co.copy() for vertex in thing.data.vertices],
                                [tuple(face.vertices) for face in thing.data.polygons])


def area_and_volume(mesh):
    """Of a closed mesh, in its own space; the volume by the divergence theorem."""
    points = np.array([list(vertex.co) for vertex in mesh.vertices])
    a, b, c = (points[[face.vertices[k] for face in mesh.polygons]] for k in range(3))
    crossed = np.cross(b - a, c - a)
    return np.linalg.norm(crossed, axis=1).sum() / 2, (a * crossed).sum() / 6


@pytest.mark.parametrize(("scale", "unit"), [((1, 1, 1), 1.0), ((-1.5, 1, 0.8), 0.5)])
def test_the_mesh_itself_is_cut_where_it_stands(cut_ball, scale, unit):
    bpy.context.scene.unit_settings.scale_length = unit
    cut_ball.scale, cut_ball.location, cut_ball.rotation_euler = scale, (10, 2, 3), (0.3, 0.2, 0.1)
    bpy.context.view_layer.update()
    mesh, stands, before = cut_ball.data, cut_ball.matrix_world.copy(), area_and_volume(cut_ball.data)
    old, count = tree(cut_ball), len(cut_ball.data.vertices)
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    bpy.context.view_layer.update()
    assert cut_ball.data == mesh and (cut_ball.name, cut_ball.matrix_world) == ("Ball", stands)
    assert len(bpy.data.objects) == len(bpy.data.meshes) == 1 and cut_ball.seamwright.result.copy is None
    assert len(mesh.vertices) > count  # seams run through faces
    assert max(old.find_nearest(vertex.co)[3] for vertex in mesh.vertices) < 1e-6
    assert area_and_volume(mesh) == pytest.approx(before, rel=1e-5)  # the same form, and it faces outward as before
    check_marks(mesh, cut_ball.seamwright.result, np.array(stands) * unit, np.sign(np.prod(scale)))
    assert not mesh.validate()


def test_materials_shading_and_weights_stay(cut_ball):
    mesh = cut_ball.data
    for name in ("red", "blue"):
        mesh.materials.append(bpy.data.materials.new(name))
    for face in mesh.polygons:
        face.material_index, face.use_smooth = int(face.center.x > 0), face.center.y > 0
    paint = cut_ball.vertex_groups.new(name="wear")
    for vertex in mesh.vertices:
        if vertex.co.z > 0:
            paint.add([vertex.index], vertex.co.z, "REPLACE")  # runs linearly over every face above the middle
    cut_ball.seamwright.wishes.keep_clear = "wear"
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    assert [material.name for material in mesh.materials] == ["red", "blue"]
    for face in mesh.polygons:
        assert (face.material_index, face.use_smooth) == (int(face.center.x > 0), face.center.y > 0)
    group = cut_ball.vertex_groups["wear"].index
    for vertex in mesh.vertices:
        weight = sum(element.weight for element in vertex.groups if element.group == group)
        assert weight == pytest.approx(max(vertex.co.z, 0.0), abs=1e-5)
    assert "UVMap" in cut_ball.seamwright.result.notes  # the host's sphere came with one
    assert [layer.name for layer in mesh.uv_layers] == [names.UV_MAP]


def test_a_cut_mesh_is_a_form_and_can_be_covered_again(cut_ball):
    bpy.ops.seamwright.cover()
    cut_ball.seamwright.wishes.goods = "card"
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    check_marks(cut_ball.data, cut_ball.seamwright.result, cut_ball.matrix_world)
    bpy.ops.seamwright.clear()
    assert names.PIECE not in cut_ball.data.attributes and not any(edge.use_seam for edge in cut_ball.data.edges)


def test_on_route_edges_nothing_is_cut(cut_ball):
    cut_ball.seamwright.wishes.route = "edges"
    before = shape(cut_ball.data)
    assert bpy.ops.seamwright.cover() == {"FINISHED"}
    assert shape(cut_ball.data) == before and names.PIECE in cut_ball.data.attributes


def test_what_would_be_harmed_is_refused(cut_ball):
    before = shape(cut_ball.data)
    twin = bpy.data.objects.new("Twin", cut_ball.data)
    assert "2 users" in (said := refusal(cut_ball, "through")) and "Make it single-user first" in said
    bpy.data.objects.remove(twin)
    cut_ball.modifiers.new("Round", "SUBSURF")
    assert "modifiers" in (said := refusal(cut_ball, "through")) and "Apply them first" in said
    cut_ball.modifiers.clear()
    cut_ball.shape_key_add(name="Basis")
    assert "shape keys would be lost" in (said := refusal(cut_ball, "through")) and "Apply them first" in said
    cut_ball.shape_key_clear()
    bpy.ops.object.mode_set(mode="SCULPT")
    assert "Object Mode" in refusal(cut_ball, "through")
    bpy.ops.object.mode_set(mode="OBJECT")
    assert shape(cut_ball.data) == before
    cut_ball.data.use_fake_user = True  # no object of its own: nobody is harmed
    assert bpy.ops.seamwright.cover() == {"FINISHED"}


def test_a_linked_mesh_is_not_cut(cut_ball, tmp_path):
    linked = linked_from_a_file(cut_ball, tmp_path)
    with pytest.raises(target.Refused, match="linked from another file, so it cannot be cut"):
        target.check(linked, linked.seamwright.wishes.asked(), bpy.context.evaluated_depsgraph_get())


def test_an_object_scaled_to_nothing_is_refused(cut_ball):
    cut_ball.scale = (1, 1, 0)
    bpy.context.view_layer.update()
    assert "scaled to nothing" in refusal(cut_ball, "through")


def test_undo_takes_one_step(cut_ball):
    bpy.context.preferences.edit.use_global_undo = True
    bpy.ops.ed.undo_push(message="Made")
    before = shape(cut_ball.data)
    bpy.ops.seamwright.cover()
    bpy.ops.ed.undo_push(message="Cover")  # in the window the host does this for every operator that asks for it
    assert shape(bpy.data.objects["Ball"].data) != before
    bpy.ops.ed.undo()
    back = bpy.data.objects["Ball"]
    assert shape(back.data) == before and names.PIECE not in back.data.attributes
    assert not back.seamwright.result.pieces and back.seamwright.wishes.cut_itself
