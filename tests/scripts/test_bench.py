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
from tables import fits, stage  # noqa: E402

HOLES = {"ring": 1, "double ring": 2}
LOOPS = {"shade": 2, "bowl": 1}


@pytest.mark.parametrize("count", [1000, 2500, 6000])
@pytest.mark.parametrize("name", gallery.FORMS)
def test_forms_are_sound(name, count):
    """On coarse grids too, where the crotches of the glove are narrower than a cell."""
    form = sw.Form(*gallery.FORMS[name](count), name=name)
    surface = form.surface
    assert count == 1000 or form.mended == []
    assert len(form.points) == pytest.approx(count, rel=0.16)
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


def seam_metres(pattern):
    return sum(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum() for seam in pattern.seams if not seam.open)


def test_seam_stage_json_and_page(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(bench, "OUT", tmp_path)
    assert bench.main(["--forms", "bowl,shade", "--points", "300,600", "--thrift", "0.5", "--picture"]) == 0
    printed = capsys.readouterr().out.splitlines()
    found = json.loads((tmp_path / "bench.json").read_text())
    assert list(found) == ["stage"]
    rows = found["stage"]
    assert [(row["form"], row["asked"]) for row in rows] == [("bowl", 300), ("shade", 300), ("bowl", 600), ("shade", 600)]
    for row, words in zip(rows, printed[1:5], strict=True):
        assert words == stage.line(stage.Row(**row))
        assert row["factorisations"] > 0 and row["thrift"] == 0.5
        assert 1e7 < row["peak"] < 1e9
        assert row["refused"] == [name for name in row["measures"] if name in row["refused"]]
        pattern = sw.cover(sw.Form(*gallery.FORMS[row["form"]](row["asked"])), sw.Wishes(goods="spandex", thrift=0.5))
        assert row["pieces"] == len(pattern.pieces)
        assert row["metres"] == pytest.approx(seam_metres(pattern), rel=0.01)  # cuts near points are moved off them
    page = (tmp_path / "index.html").read_text()
    assert page.count("<img") == 16
    for name in ("00-bowl-seams-front.png", "03-shade-u-back.png"):
        assert name in page and (tmp_path / name).is_file()


def test_growth_is_the_slope_of_the_logs():
    rows = [stage.Row("ball", n, n, 0.1, False, 1e-4 * n**1.2, 0, 0, 0, 0, 0, 0, True, [], {}) for n in (5000, 20000, 80000)]
    assert stage.growth(rows) == {"ball": pytest.approx(1.2)}
    assert stage.growth(rows[:1]) == {}
    assert "power 1.20" in stage.summary(rows)[-1] and len(stage.summary(rows)) == 4


def test_fit_table(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(bench, "OUT", tmp_path)
    assert bench.main(["--forms", "shade", "--points", "300", "--goods", "card,felt", "--comfort", "0"]) == 0
    printed = capsys.readouterr().out.splitlines()
    rows = json.loads((tmp_path / "bench.json").read_text())["fits"]
    assert [row["goods"] for row in rows] == ["card", "wool felt"]
    for row, words in zip(rows, printed[1:3], strict=True):
        assert words == fits.line(fits.Row(**row))
        pattern = sw.cover(sw.Form(*gallery.FORMS["shade"](300)), sw.Wishes(goods=row["goods"], comfort=0))
        assert row["pieces"] == len(pattern.pieces)
        assert row["metres"] == pytest.approx(seam_metres(pattern), rel=0.01)  # the form is not quite 1 m2
        assert row["fits"] and row["utilisation"] <= 1 and row["beyond"] <= 0.005


def test_u_on_the_page_is_that_of_the_pieces():
    """On a ball in halves u is ln((1 + cos) / 1) about each half's middle: 0 on the seam, ln 2 at the pole."""
    pattern = sw.cover(sw.Form(*gallery.FORMS["ball"](1500)), sw.Wishes(goods="spandex", thrift=2.0, pieces=2))
    scales = portraits.log_scales(pattern)
    assert [len(u) for u in scales] == [len(piece.points) for piece in pattern.pieces]
    for u, piece in zip(scales, pattern.pieces, strict=True):
        assert np.abs(u[piece.outline]).max() == 0
        assert u.max() == pytest.approx(np.log(2), abs=0.02)


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
    pattern = sw.cover(sw.Form(*gallery.FORMS["ball"](300)), sw.Wishes(goods="spandex", thrift=2.0, pieces=2))
    picture = portraits.portrait(pattern, portraits.FRONT)
    covered = (picture < 1).any(axis=2)
    assert covered.mean() == pytest.approx(np.pi / 4 * 0.94**2, rel=0.02)
    assert (picture[covered].max(axis=1) == 0).any()


@pytest.mark.parametrize("arguments", [["--forms", "anchor"], ["--thrift", "much"], ["--points", "few"]])
def test_wrong_use(arguments, capsys):
    with pytest.raises(SystemExit) as ended:
        bench.main(arguments)
    assert ended.value.code == 2
    assert "ball" in capsys.readouterr().err or "--forms" not in arguments
