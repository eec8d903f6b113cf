"""The built zip in the real application: installed there, run by its own command line, used in its window.

SEAMWRIGHT_APP names a script that runs the application (`run`, `command`, `window SCRIPT`); the folder shared/host beside
the repository is the place where it is looked for. Without it, or on another system than Linux x86-64, nothing can be run.
"""

import itertools
import json
import os
import platform
import subprocess
import sys
import zipfile
from pathlib import Path

import bpy
import pytest
from conftest import ROOT

APP = Path(os.environ.get("SEAMWRIGHT_APP", ROOT.parent / "shared" / "host" / "app"))

pytestmark = [
    pytest.mark.skipif(not APP.is_file(), reason="the application is not on this machine (set SEAMWRIGHT_APP)"),
    pytest.mark.skipif((sys.platform, platform.machine()) != ("linux", "x86_64"), reason="this zip is for Linux x86-64"),
]


def app(profile, *words):
    env = {**os.environ, "APP_PROFILE": str(profile)}
    return subprocess.run([str(APP), *map(str, words)], cwd=ROOT, env=env, capture_output=True, text=True, timeout=600)


@pytest.fixture(scope="session")
def built():
    """The zip for this platform."""
    import build_extension

    return build_extension.build("linux-x64")


@pytest.fixture(scope="session")
def profile(built, tmp_path_factory):
    """A profile of the application with the zip installed and switched on."""
    folder = tmp_path_factory.mktemp("profile")
    done = app(folder, "command", "-c", "extension", "install-file", "-r", "user_default", "-e", built)
    assert done.returncode == 0, done.stdout + done.stderr
    return folder


def test_the_zip_holds_what_both_pythons_need_and_no_numpy(built):
    inside = zipfile.ZipFile(built).namelist()
    wheels = [Path(name).name for name in inside if name.endswith(".whl")]
    for start in itertools.product(("scipy", "shapely"), ("cp311", "cp313")):
        assert [name for name in wheels if all(part in name for part in (*start, "x86_64"))], start
    pure = {name.split("-")[0] for name in wheels if "none-any" in name}
    assert pure == {"defusedxml", "fonttools", "fpdf2", "seamwright", "threadpoolctl"} and len(wheels) == 9
    assert not any("numpy" in name for name in wheels)
    assert {"LICENSE", "LICENCES.txt", "blender_manifest.toml"} <= {Path(name).name for name in inside}


def test_the_command_covers_a_scene(profile, ball, tmp_path):
    bpy.ops.wm.save_as_mainfile(filepath=str(tmp_path / "props.blend"), copy=True)
    done = app(profile, "command", "-b", tmp_path / "props.blend", "-c", "seamwright", "cover", "--out", tmp_path / "out")
    assert done.returncode == 0, done.stdout + done.stderr
    assert "Ball: " in done.stdout and "none strained" in done.stdout
    said = json.loads((tmp_path / "out" / "summary.json").read_text())
    assert said["fits"] and said["forms"][0]["goods"]["name"] == "spandex"
    assert (tmp_path / "out" / "Ball" / "pattern.pdf").read_bytes().startswith(b"%PDF")


def test_wrong_use_is_status_2_there_too(profile):
    assert app(profile, "command", "-b", "-c", "seamwright", "cover", "nowhere.blend").returncode == 2


WINDOW = '''
import bpy, drive, numpy, sys
from pathlib import Path

def state(thing):
    return (len(thing.seamwright.result.pieces), sum(edge.use_seam for edge in thing.data.edges),
            sorted(item.name for item in thing.data.attributes if "seamwright" in item.name))

def steps():
    out = Path(sys.argv[sys.argv.index("--") + 1])
    bpy.data.batch_remove(list(bpy.data.objects))
    with drive.override():
        bpy.ops.mesh.primitive_uv_sphere_add(segments=24, ring_count=16)
        thing = bpy.context.object
        thing.name = "Ball"
        thing.seamwright.wishes.route = "edges"
        thing.seamwright.wishes.goods = "spandex"
        bpy.ops.ed.undo_push(message="Made")
    drive.sidebar()
    yield 1
    yield from drive.tab("Seamwright")
    yield 0.5
    drive.shot(str(out / "before.png"))
    clean = state(thing)

    # Esc ends it, and nothing has changed
    with drive.override():
        assert bpy.ops.seamwright.cover("INVOKE_DEFAULT") == {"RUNNING_MODAL"}
        assert not bpy.ops.seamwright.cover.poll()
    yield 1.0
    drive.shot(str(out / "running.png"))
    drive.move(*drive.screen_xy(drive.view()[2], -300, 300))
    drive.key("Escape")
    yield 1
    with drive.override():
        assert bpy.ops.seamwright.cover.poll(), "still running after Esc"
    assert state(thing) == clean

    # a form that changes meanwhile gets no pattern
    with drive.override():
        bpy.ops.seamwright.cover("INVOKE_DEFAULT")
    thing.data.vertices[0].co.x += 0.1
    thing.data.update()
    yield from finished()
    assert state(thing) == clean
    thing.data.vertices[0].co.x -= 0.1
    thing.data.update()

    # left alone it ends with a pattern, one step of undo takes it off, redo brings it back
    with drive.override():
        bpy.ops.seamwright.cover("INVOKE_DEFAULT")
    yield from finished()
    done = state(thing)
    assert done[0] > 0 and done[1] > 0 and len(done[2]) == 2
    yield 0.5
    drive.shot(str(out / "after.png"))
    with drive.override():
        bpy.ops.ed.undo()
    yield 0.5
    assert state(bpy.data.objects["Ball"]) == clean
    with drive.override():
        bpy.ops.ed.redo()
    yield 0.5
    assert state(bpy.data.objects["Ball"]) == done
    print("WINDOW STEPS DONE")

def finished():
    for _ in range(1200):
        yield 0.1
        with drive.override():
            if bpy.ops.seamwright.cover.poll():
                return
    raise AssertionError("not finished within two minutes")

drive.play(steps)
'''


def test_the_window_stays_alive_and_undo_takes_one_step(profile, tmp_path):
    script = tmp_path / "steps.py"
    script.write_text(WINDOW)
    done = app(profile, "window", script, tmp_path)
    assert done.returncode == 0 and "WINDOW STEPS DONE" in done.stdout, done.stdout + done.stderr
    for name in ("before", "running", "after"):
        assert (tmp_path / f"{name}.png").stat().st_size > 10_000
