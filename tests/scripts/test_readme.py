"""What the README shows is true: its goods file, its Python, its command line, its tables of contents."""

import re
from pathlib import Path

import forms
import pytest
import seamwright as sw

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")


def block(first, text=README):
    """The indented block whose first line holds `first`, without its indent."""
    lines = text.splitlines()
    start = next(k for k, line in enumerate(lines) if line.startswith("    ") and first in line)
    end = next(k for k in range(start, len(lines)) if lines[k] and not lines[k].startswith("    "))
    return "\n".join(line[4:] for line in lines[start:end])


def test_the_goods_file_can_be_read(tmp_path):
    path = tmp_path / "sail.toml"
    path.write_text(block("[\"sail cloth\"]"), encoding="utf-8")
    goods = sw.read_goods(path)
    assert goods.name == "sail cloth" and [goods.width, goods.allowance] == pytest.approx([1.4, 0.015])


def test_the_python_runs(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    points, faces = forms.cylinder(0.1, 0.3, 48)
    exec(block("import seamwright"), {"points": points, "faces": faces})
    assert "True ['fits'" in capsys.readouterr().out
    assert {path.name for path in (tmp_path / "out" / "fender").iterdir()} >= {"pattern.pdf", "pattern.svg", "pattern.json"}


def test_the_goods_of_a_swatch_are_written(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    exec(block("sw.goods_from_swatch("), {"sw": sw})
    sail = sw.read_goods("sail.toml")
    assert sail.name == "sail cloth" and sail.stretch_warp[1] == pytest.approx(0.01)


def test_every_command_line_is_understood():
    from addon import cli

    lines = [line for line in block("seamwright cover props.blend").splitlines() if ".venv/bin/seamwright" in line]
    assert len(lines) >= 4
    for line in lines:
        words = line.split("#")[0].split()[1:]
        if "--help" in words:
            words.remove("--help")
        assert cli.parser().parse_args(words).command == words[0]


@pytest.mark.parametrize("name", ["README.md", "DEVELOPERS.md"])
def test_files_that_are_named_exist(name):
    text = (ROOT / name).read_text(encoding="utf-8")
    named = set(re.findall(r"`((?:scripts|tests|solver|addon|sheets|harbour|fit)/[\w./]+)`", text))
    named |= set(re.findall(r"(?<!/)(scripts/\w+\.py)", text))
    homes = (ROOT, ROOT / "solver" / "seamwright", ROOT / "scripts")
    missing = [path for path in named if not any((home / path).exists() or (home / f"{path}.py").exists() for home in homes)]
    assert named and not missing
