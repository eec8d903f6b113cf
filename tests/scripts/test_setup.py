"""Set-up: what it decides, what it leaves behind."""

import ast
import importlib.util
import os
import subprocess
import sys
import venv
from pathlib import Path

import pytest

SCRIPTS = Path(__file__).resolve().parents[2] / "scripts"


@pytest.fixture
def setup(monkeypatch, tmp_path):
    """The script as a module, its root an empty project in a folder with spaces."""
    spec = importlib.util.spec_from_file_location("setup_under_test", SCRIPTS / "setup.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    root = tmp_path / "a quay"
    root.mkdir()
    monkeypatch.setattr(module, "ROOT", root)
    monkeypatch.setattr(module, "VENV", root / ".venv")
    return module


@pytest.mark.parametrize("version", [(3, 11), (3, 13)])
def test_every_pin_is_one_exact_version(setup, version):
    names = [pin.partition("==") for pin in setup.pins(version)]
    assert all(equals == "==" and number[0].isdigit() for _, equals, number in names)
    assert len({name for name, _, _ in names}) == len(names)
    assert {"bpy", "numpy", "scipy", "fpdf2", "shapely", "pytest", "ruff"} <= {name for name, _, _ in names}


@pytest.mark.parametrize("version", [(3, 8), (3, 10), (3, 12), (3, 14), (4, 0)])
def test_another_python_gets_one_line_that_says_which_it_needs(setup, version):
    with pytest.raises(setup.SetupError) as caught:
        setup.pins(version)
    words = str(caught.value)
    assert "\n" not in words and "3.11" in words and "3.13" in words and "{}.{}".format(*version) in words


@pytest.mark.parametrize("script", ["setup.py", "demo.py", "test.py"])
def test_old_pythons_can_read_the_scripts_as_far_as_that_line(script):
    ast.parse((SCRIPTS / script).read_text(encoding="utf-8"), feature_version=(3, 6))


def test_scripts_import_only_the_standard_library_before_the_environment_stands():
    for script in ("setup.py", "demo.py", "test.py"):
        tree = ast.parse((SCRIPTS / script).read_text(encoding="utf-8"))
        for node in tree.body:
            names = [a.name for a in node.names] if isinstance(node, ast.Import) else []
            names += [node.module] if isinstance(node, ast.ImportFrom) else []
            assert all(name.split(".")[0] in sys.stdlib_module_names or name == "setup" for name in names), (script, names)


def test_the_stamp_changes_with_pins_python_and_place_alone(setup):
    first = setup.stamp(["a==1"], "3.11.7", Path("/here"))
    assert first == setup.stamp(["a==1"], "3.11.7", Path("/here"))
    others = [setup.stamp(["a==2"], "3.11.7", Path("/here")), setup.stamp(["a==1"], "3.13.0", Path("/here")),
              setup.stamp(["a==1"], "3.11.7", Path("/there")), setup.stamp(["a==1", "b==1"], "3.11.7", Path("/here"))]
    assert len({first, *others}) == 5


def test_ready_only_with_the_right_stamp_and_an_interpreter(setup):
    assert not setup.is_ready(setup.VENV, "stamp")
    python = setup.python_of(setup.VENV)
    python.parent.mkdir(parents=True)
    python.touch()
    assert not setup.is_ready(setup.VENV, "stamp"), "a half-made environment passed"
    (setup.VENV / setup.STAMP).write_text("stamp")
    assert setup.is_ready(setup.VENV, "stamp")
    assert not setup.is_ready(setup.VENV, "another")
    python.unlink()
    assert not setup.is_ready(setup.VENV, "stamp")


def test_a_failed_set_up_leaves_nothing(setup, monkeypatch):
    def run(words, failure):
        if "venv" in words:
            setup.VENV.mkdir()
        else:
            raise setup.SetupError(failure)

    monkeypatch.setattr(setup, "run", run)
    with pytest.raises(setup.SetupError, match="run this again"):
        setup.make(setup.VENV, ["a==1"], "stamp")
    assert not setup.VENV.exists()


def test_a_failing_command_shows_its_last_lines_and_why(setup, capsys):
    with pytest.raises(setup.SetupError, match="no network"):
        setup.run([sys.executable, "-c", "print('the reason'); raise SystemExit(1)"], "no network")
    assert "the reason" in capsys.readouterr().err


@pytest.mark.skipif(os.name == "nt", reason="the shell command is for Linux and macOS")
def test_the_command_works_from_anywhere_in_a_path_with_spaces(setup, tmp_path):
    venv.create(setup.VENV, symlinks=True)
    (setup.ROOT / "solver" / "seamwright").mkdir(parents=True)
    (setup.ROOT / "solver" / "seamwright" / "__init__.py").write_text("")
    (setup.ROOT / "addon").mkdir()
    (setup.ROOT / "addon" / "cli.py").write_text("import seamwright\ndef main(argv):\n    print(argv)\n    return 3\n")
    setup.install_own(setup.VENV)
    clean = {key: value for key, value in os.environ.items() if key != "PYTHONPATH"}
    done = subprocess.run([setup.VENV / "bin" / "seamwright", "cover", "a b.obj"], cwd=tmp_path, env=clean,
                          capture_output=True, text=True)
    assert (done.stdout.strip(), done.returncode) == ("['cover', 'a b.obj']", 3), done.stderr
