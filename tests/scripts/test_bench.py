"""The bench: its forms are what their names say, its table and JSON tell what was measured, its pictures can be read."""

import json
import struct
import sys
import zlib
from pathlib import Path

import numpy as np
import pytest
import seamwright as sw
from seamwright.form.measure import genus, total_area, volume

sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "scripts"))
import bench  # noqa: E402
import gallery  # noqa: E402
import portraits  # noqa: E402

HOLES = {"ring": 1, "double ring": 2}
LOOPS = {"shade": 2, "bowl": 1}


@pytest.mark.parametrize("name", gallery.FORMS)
def test_forms_are_sound(name):
    form = sw.Form(*gallery.FORMS[name](1500), name=name)
    surface = form.surface
    assert form.mended == []
    assert len(form.points) == pytest.approx(1500, rel=0.15)
    assert total_area(surface) == pytest.approx(1, abs=0.005)
    assert surface.triangle_components[0] == 1
    assert genus(surface) == [HOLES.get(name, 0)]
    assert len(surface.boundary_loops) == LOOPS.get(name, 0)
    if name not in LOOPS:
        assert volume(surface) > 0.03  # faces outward


def test_large_forms_are_split_from_smaller_ones(monkeypatch):
    monkeypatch.setattr(gallery, "LARGEST_GRID", 1000)
    points, faces = gallery.FORMS["pear"](3500)
    form = sw.Form(points, faces)
    assert len(points) == pytest.approx(3500, rel=0.15) and genus(form.surface) == [0] and form.mended == []
    assert len(gallery.FORMS) >= 12


def test_table_json_and_page(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(bench, "OUT", tmp_path)
    assert bench.main(["--forms", "bowl,shade", "--points", "300", "--thrift", "0.5", "--picture"]) == 0
    printed = capsys.readouterr().out.splitlines()
    rows = json.loads((tmp_path / "bench.json").read_text())
    assert [row["form"] for row in rows] == ["bowl", "shade"]
    for row, words in zip(rows, printed[1:3], strict=True):
        assert words == bench.line(bench.Row(**row))
        assert row["factorisations"] > 0 and row["wish"] == "thrift 0.5"
        assert row["refused"] == [name for name in row["measures"] if name in row["refused"]]
        form = sw.Form(*gallery.FORMS[row["form"]](300))
        pattern = sw.cover(form, sw.Wishes(goods="spandex", thrift=0.5))
        assert row["pieces"] == len(pattern.pieces)
        seams = [seam for seam in pattern.seams if not seam.open]
        assert row["metres"] == pytest.approx(sum(np.linalg.norm(np.diff(s.path, axis=0), axis=1).sum() for s in seams))
    page = (tmp_path / "index.html").read_text()
    assert page.count("<img") == 4
    for name in ("00-bowl-front.png", "01-shade-back.png"):
        assert name in page and (tmp_path / name).is_file()


def test_pictures_are_read_back():
    picture = np.random.default_rng(0).integers(0, 256, (portraits.SIDE, portraits.SIDE, 3)) / 255
    data = portraits.png(picture)
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    at, body = 8, b""
    while at < len(data):
        size = struct.unpack(">I", data[at:at + 4])[0]
        kind, chunk = data[at + 4:at + 8], data[at + 8:at + 8 + size]
        assert struct.unpack(">I", data[at + 8 + size:at + 12 + size])[0] == zlib.crc32(kind + chunk)
        body += chunk if kind == b"IDAT" else b""
        at += 12 + size
    rows = np.frombuffer(zlib.decompress(body), np.uint8).reshape(portraits.SIDE, -1)
    assert (rows[:, 1:].reshape(picture.shape) == np.rint(picture * 255)).all()


def test_a_portrait_shows_the_pieces():
    """A ball in two halves: a round patch in the two pieces' colours, black between, white around."""
    pattern = sw.cover(sw.Form(*gallery.FORMS["ball"](300)), sw.Wishes(goods="spandex", thrift=2.0))
    picture = portraits.portrait(pattern, portraits.FRONT)
    covered = (picture < 1).any(axis=2)
    assert covered.mean() == pytest.approx(np.pi / 4 * 0.94**2, rel=0.02)
    assert (picture[covered].max(axis=1) == 0).any()


@pytest.mark.parametrize("arguments", [["--forms", "anchor"], ["--thrift", "much"]])
def test_wrong_use(arguments, capsys):
    with pytest.raises(SystemExit) as ended:
        bench.main(arguments)
    assert ended.value.code == 2
    assert "ball" in capsys.readouterr().err or "--thrift" in arguments
