"""The command line in processes of its own: exit statuses, standard output, files."""

import json

import bpy
import pytest

from addon import names


@pytest.fixture
def props(ball, tmp_path):
    """A scene of a ball that can be covered and a fan that cannot."""
    mesh = bpy.data.meshes.new("Fan")
    mesh.from_pydata([(0, 0, 0), (0, 0, 1), (1, 0, 0), (0, 1, 0), (-1, -1, 0)], (), [(0, 1, 2), (0, 1, 3), (0, 1, 4)])
    bpy.context.collection.objects.link(bpy.data.objects.new("Fan", mesh))
    ball.seamwright.wishes.route = "edges"
    path = tmp_path / "props.blend"
    bpy.ops.wm.save_as_mainfile(filepath=str(path), copy=True)
    return path


def test_one_form_that_fails_does_not_stop_the_others(props, command, tmp_path):
    status, out, err = command("cover", props, "--json", "--out", "done", "--save", "saved.blend", "--kinds", "svg,json",
                               folder=tmp_path)
    assert status == 3, err
    said = json.loads(out)  # nothing else on standard output
    ball, fan = said["forms"]
    assert (ball["object"], fan["object"]) == ("Ball", "Fan")
    assert "error" not in ball and ball["goods"]["name"] == "spandex"  # the object's own wish
    assert "Fan" in fan["error"] and fan["error"] in err
    assert sorted(path.name for path in (tmp_path / "done" / "Ball").iterdir()) == ["pattern.json", "pattern.svg"]
    assert json.loads((tmp_path / "done" / "summary.json").read_text()) == said
    page = (tmp_path / "done" / "index.html").read_text()
    assert "Ball/pattern.svg" in page and "Fan" in page
    bpy.ops.wm.open_mainfile(filepath=str(tmp_path / "saved.blend"))
    ball = bpy.data.objects["Ball"]
    assert names.PIECE in ball.data.attributes and any(edge.use_seam for edge in ball.data.edges)
    assert ball.seamwright.result.pieces


def test_statuses_of_sound_forms(props, command, tmp_path):
    status, out, err = command("cover", props, "--object", "Ball", folder=tmp_path)
    assert status == 0, err
    assert out.startswith("Ball: ") and "none strained" in out
    assert (tmp_path / "out" / "Ball" / "pattern.pdf").is_file()
    status, out, _ = command("cover", props, "--object", "Ball", "--goods", "card", "--route", "through", "--kinds", "json",
                             folder=tmp_path)
    assert status == 1 and "strained: " in out and "card" in out


def test_files_of_every_kind_side_by_side(ball, command, tmp_path):
    bpy.ops.wm.obj_export(filepath=str(tmp_path / "cup.obj"), export_selected_objects=False)
    bpy.ops.wm.stl_export(filepath=str(tmp_path / "hull.stl"))
    bpy.ops.wm.ply_export(filepath=str(tmp_path / "mask.ply"))
    status, out, err = command("cover", "cup.obj", "mask.ply", "hull.stl", "--goods", "spandex", "--thrift", 0.1,
                               "--workers", 2, "--kinds", "json", "--json", folder=tmp_path)
    assert status == 0, err
    forms = json.loads(out)["forms"]
    assert [form["file"] for form in forms] == ["cup.obj", "mask.ply", "hull.stl"]
    assert len({form["folder"] for form in forms}) == 3
    areas = [form["area_m2"] for form in forms]
    assert areas == pytest.approx([areas[0]] * 3, rel=1e-4)


def test_check_covers_nothing(props, command, tmp_path):
    status, out, _ = command("check", props, "--json", folder=tmp_path)
    assert status == 3
    assert [form["sound"] for form in json.loads(out)["forms"]] == [True, False]
    assert not (tmp_path / "out").exists()
    status, out, _ = command("check", props, "--object", "Ball", folder=tmp_path)
    assert status == 0 and "Ball: can be covered" in out


def test_goods_are_listed(command, tmp_path):
    status, out, _ = command("goods", "--json", folder=tmp_path)
    assert status == 0 and "wool felt" in [each["name"] for each in json.loads(out)["goods"]]


@pytest.mark.parametrize(("words", "said"), [
    ([], "COMMAND"),
    (["cover"], "name a FILE"),
    (["cover", "nowhere.blend"], "nowhere.blend"),
    (["cover", "notes.txt"], "cannot be read"),
    (["cover", "props.blend", "--object", "Nobody"], "Nobody"),
    (["cover", "props.blend", "--goods", "moonlight"], "moonlight"),
    (["cover", "props.blend", "--goods", "missing.toml"], "missing.toml"),
    (["cover", "props.blend", "--comfort", "2"], "comfort"),
    (["cover", "props.blend", "--kinds", "docx"], "docx"),
    (["cover", "props.blend", "--workers", "0"], "--workers"),
])
def test_wrong_use_is_status_2_and_a_sentence(props, command, words, said):
    (props.parent / "notes.txt").write_text("no form")
    status, out, err = command(*words, folder=props.parent)
    assert (status, out) == (2, "") and said in err and "Traceback" not in err
