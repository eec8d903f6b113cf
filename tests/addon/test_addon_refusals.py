"""What cannot be covered is refused in a sentence, and nothing is changed."""

import bpy
import pytest

from addon import names, target


def refusal(thing, route="edges"):
    thing.seamwright.wishes.route = route
    bpy.context.view_layer.objects.active = thing
    with pytest.raises(RuntimeError) as caught:
        bpy.ops.seamwright.cover()
    assert names.PIECE not in thing.data.attributes and not thing.seamwright.result.pieces
    return str(caught.value)


def linked_from_a_file(thing, folder):
    """The object in the scene's place, its data linked from another file."""
    name, path = thing.name, str(folder / "props.blend")
    bpy.data.libraries.write(path, {thing})
    bpy.data.objects.remove(thing)
    with bpy.data.libraries.load(path, link=True) as (_, wanted):
        wanted.objects = [name]
    bpy.context.collection.objects.link(wanted.objects[0])
    return wanted.objects[0]


def test_modifiers_that_change_faces_ask_for_route_through(ball):
    ball.modifiers.new("Round", "SUBSURF")
    assert "Apply the modifiers, or choose route through" in refusal(ball)


def test_modifiers_that_only_move_points_are_welcome_on_route_edges(ball):
    ball.modifiers.new("Bend", "SIMPLE_DEFORM").angle = 0.3
    ball.seamwright.wishes.route = "edges"
    assert bpy.ops.seamwright.cover() == {"FINISHED"}


def test_edit_mode_is_to_be_left_first(ball):
    bpy.ops.object.mode_set(mode="EDIT")
    with pytest.raises(RuntimeError, match="leave Edit Mode"):
        bpy.ops.seamwright.cover()


def test_two_objects_with_one_mesh_are_told(ball):
    bpy.context.collection.objects.link(bpy.data.objects.new("Twin", ball.data))
    ball.seamwright.wishes.route = "edges"
    bpy.ops.seamwright.cover()
    assert "shared by 2 objects" in ball.seamwright.result.notes


def test_a_linked_mesh_is_not_marked_but_may_be_covered_through(ball, tmp_path):
    linked = linked_from_a_file(ball, tmp_path)
    asked = {**linked.seamwright.wishes.asked(), "route": "edges"}
    with pytest.raises(target.Refused, match="linked from another file"):
        target.check(linked, asked, bpy.context.evaluated_depsgraph_get())
    target.check(linked, {**asked, "route": "through"}, bpy.context.evaluated_depsgraph_get())


def test_a_paint_that_is_gone_is_named(ball):
    ball.seamwright.wishes.keep_clear = "wear"
    assert "no vertex group 'wear'" in refusal(ball)


def test_own_goods_need_a_file(ball):
    ball.seamwright.wishes.goods_menu = "own"
    assert "choose the file of your own goods" in refusal(ball)


def test_own_goods_are_read_from_their_file(ball, tmp_path):
    own = tmp_path / "oilskin.toml"
    own.write_text("[oilskin]\nstretch_warp_percent = [5, 20]\nstretch_weft_percent = [5, 20]\nease_in_percent = [3, 9]\n")
    ball.seamwright.wishes.goods_menu, ball.seamwright.wishes.own_goods = "own", str(own)
    bpy.ops.seamwright.cover()
    assert ball.seamwright.result.goods == "oilskin"


def test_a_form_that_the_solver_refuses_says_why(ball):
    mesh = bpy.data.meshes.new("Fan")
    mesh.from_pydata([(0, 0, 0), (0, 0, 1), (1, 0, 0), (0, 1, 0), (-1, -1, 0)], (), [(0, 1, 2), (0, 1, 3), (0, 1, 4)])
    fan = bpy.data.objects.new("Fan", mesh)
    bpy.context.collection.objects.link(fan)
    assert "Fan" in refusal(fan) and "fault of the program" not in refusal(fan)


def test_only_meshes_with_faces_are_forms(ball):
    bpy.ops.object.light_add()
    assert not bpy.ops.seamwright.cover.poll()
    bpy.context.collection.objects.link(wire := bpy.data.objects.new("Wire", bpy.data.meshes.new("Wire")))
    bpy.context.view_layer.objects.active = wire
    assert not bpy.ops.seamwright.cover.poll()


def test_a_changed_form_is_noticed(ball, reading):
    before = reading(ball)
    assert before.same(reading(ball))
    ball.data.vertices[0].co.x += 1e-4
    ball.data.update()
    assert not before.same(reading(ball))
