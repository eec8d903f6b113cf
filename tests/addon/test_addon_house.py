"""The house rules of the add-on, read from its source."""

import ast
import os
import subprocess
import sys
import tomllib

import pytest
from conftest import ROOT

from addon import names

SOURCES = sorted((ROOT / "addon").rglob("*.py"))
TREES = {path: ast.parse(path.read_text(encoding="utf-8")) for path in SOURCES}


def declared():
    return {value for key, value in vars(names).items() if key.isupper()}


def test_identifiers_are_declared_once():
    for path, tree in TREES.items():
        if path.name == "names.py":
            continue
        for node in ast.walk(tree):
            if isinstance(node, ast.Constant):
                assert node.value not in declared(), f"{path.name}, line {node.lineno}: {node.value!r}"


def test_identifiers_differ_but_for_the_maker_facing_name():
    values = [value for key, value in vars(names).items() if key.isupper() and value not in ("Seamwright", "seamwright")]
    assert len(values) == len(set(values))


def test_the_addon_computes_nothing_of_its_own():
    for path, tree in TREES.items():
        for node in ast.walk(tree):
            if isinstance(node, ast.Import | ast.ImportFrom):
                module = getattr(node, "module", None) or ""
                modules = [module, *(alias.name for alias in node.names)]
                assert not any(name.split(".")[0] in ("scipy", "shapely", "fpdf") for name in modules), path.name
            if isinstance(node, ast.Attribute):
                assert node.attr not in ("linalg", "fft", "lstsq", "solve", "eig"), f"{path.name}, line {node.lineno}"


def test_the_worker_does_not_know_the_host():
    imported = {alias.name for node in ast.walk(TREES[ROOT / "addon" / "worker.py"])
                if isinstance(node, ast.Import | ast.ImportFrom) for alias in node.names}
    assert "bpy" not in imported and imported


def test_the_hosts_own_unwrapping_is_never_called():
    for path in SOURCES:
        text = path.read_text(encoding="utf-8")
        assert "ops.uv" not in text and "unwrap" not in text, path.name


def test_the_solver_imports_without_the_host():
    code = ("import sys, pkgutil, importlib; sys.modules['bpy'] = None; import seamwright;"
            "names = [m.name for m in pkgutil.walk_packages(seamwright.__path__, 'seamwright.')];"
            "[importlib.import_module(name) for name in names]; print(len(names))")
    env = {**os.environ, "PYTHONPATH": str(ROOT / "solver")}
    done = subprocess.run([sys.executable, "-c", code], env=env, capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
    assert int(done.stdout) > 20


def manifest():
    return tomllib.loads((ROOT / "addon" / "blender_manifest.toml").read_text(encoding="utf-8"))


def test_the_manifest_is_valid_to_the_host():
    import build_extension

    done = subprocess.run([sys.executable, str(build_extension.host_builder()), "validate", str(ROOT / "addon")],
                          capture_output=True, text=True)
    assert done.returncode == 0, done.stdout + done.stderr


def test_addon_and_solver_bear_one_version():
    import seamwright

    solver = tomllib.loads((ROOT / "solver" / "pyproject.toml").read_text(encoding="utf-8"))
    assert manifest()["version"] == seamwright.__version__ == solver["project"]["version"]


def test_the_extension_never_brings_numpy():
    import build_extension

    assert "numpy" not in build_extension.BINARY | build_extension.PURE


@pytest.mark.parametrize("platform", ["linux-x64", "macos-arm64", "macos-x64", "windows-x64"])
def test_every_platform_is_built_for(platform):
    import build_extension

    assert platform in build_extension.PLATFORMS
