"""The add-on registered in the host's module, and an empty scene for every test."""

import os
import subprocess
import sys
from pathlib import Path

import bpy
import pytest

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT), str(ROOT / "scripts")]

import addon  # noqa: E402


@pytest.fixture(scope="session", autouse=True)
def registered():
    addon.register()
    yield
    addon.unregister()


@pytest.fixture(autouse=True)
def empty_scene():
    if bpy.context.object is not None and bpy.context.object.mode != "OBJECT":
        bpy.ops.object.mode_set(mode="OBJECT")
    bpy.data.batch_remove([*bpy.data.objects, *bpy.data.meshes, *bpy.data.libraries, *bpy.data.materials])
    bpy.context.scene.unit_settings.scale_length = 1.0


@pytest.fixture
def reading():
    """Reads an object as the add-on does."""
    from addon import target

    def read(thing):
        return target.read_form(thing, bpy.context.scene, bpy.context.evaluated_depsgraph_get())

    return read


@pytest.fixture
def ball():
    """A small closed form of triangles in goods that take it, quick to cover."""
    bpy.ops.mesh.primitive_uv_sphere_add(segments=12, ring_count=8, radius=0.2)
    bpy.ops.object.mode_set(mode="EDIT")
    bpy.ops.mesh.select_all(action="SELECT")
    bpy.ops.mesh.quads_convert_to_tris()
    bpy.ops.object.mode_set(mode="OBJECT")
    thing = bpy.context.object
    thing.name = "Ball"
    wishes = thing.seamwright.wishes
    wishes.goods, wishes.choose_thrift, wishes.thrift = "spandex", True, 0.1
    return thing


@pytest.fixture(scope="session")
def command():
    """Runs the command line in a process of its own; returns (exit status, standard output, standard error)."""
    env = {**os.environ, "PYTHONPATH": os.pathsep.join([str(ROOT / "solver"), str(ROOT)])}

    def run(*words, folder):
        start = "import sys; from addon.cli import main; sys.exit(main(sys.argv[1:]))"
        done = subprocess.run([sys.executable, "-c", start, *map(str, words)], cwd=folder, env=env, capture_output=True,
                              text=True, timeout=600)
        return done.returncode, done.stdout, done.stderr

    return run
