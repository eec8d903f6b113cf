import json
from html.parser import HTMLParser

import numpy as np
import pytest
from seamwright import sheets
from seamwright.errors import WishError
from seamwright.sheets.names import safe_name
from sheets import samples


@pytest.mark.parametrize("paper", ["roll", "a4"])
def test_two_saves_give_the_same_bytes(tmp_path, paper):
    for name in ("cube", "cap"):
        first = sheets.save(samples.ALL[name](), tmp_path / "one", paper=paper)
        second = sheets.save(samples.ALL[name](), tmp_path / "two", paper=paper)
        assert [p.name for p in first] == list(sheets.FILES.values())
        for a, b in zip(first, second, strict=True):
            assert a.read_bytes() == b.read_bytes()


def test_no_document_holds_a_date_of_today(tmp_path):
    import datetime
    now = datetime.datetime.now(datetime.UTC)
    stamps = [now.strftime(form).encode() for form in ("%Y%m%d", "%Y-%m-%d", "%d.%m.%Y")]
    for path in sheets.save(samples.pouch(), tmp_path):
        assert not any(stamp in path.read_bytes() for stamp in stamps), path.name


def test_only_the_kinds_asked_for_are_written(tmp_path):
    (tmp_path / "mine.txt").write_text("kept")
    paths = sheets.save(samples.pouch(), tmp_path, kinds=("svg", "json"))
    assert paths == [tmp_path / "pattern.svg", tmp_path / "pattern.json"]
    assert sorted(p.name for p in tmp_path.iterdir()) == ["mine.txt", "pattern.json", "pattern.svg"]


def test_a_kind_that_fails_leaves_the_folder_as_it_was(tmp_path, monkeypatch):
    folder = tmp_path / "out"
    sheets.save(samples.pouch(), folder)
    before = {p.name: p.read_bytes() for p in folder.iterdir()}

    def broken(*_):
        raise RuntimeError("no ink")
    monkeypatch.setattr(sheets.html, "write", broken)
    with pytest.raises(RuntimeError):
        sheets.save(samples.cube(), folder)
    assert {p.name: p.read_bytes() for p in folder.iterdir()} == before
    assert [p.name for p in tmp_path.iterdir()] == ["out"]


def test_a_disk_that_fails_half_way_gets_its_old_files_back(tmp_path, monkeypatch):
    folder = tmp_path / "out"
    sheets.save(samples.pouch(), folder)
    before = {p.name: p.read_bytes() for p in folder.iterdir()}
    replace = sheets.os.replace

    def failing(source, target):
        if str(target).endswith("out/pattern.json") and "before" not in str(source):
            raise PermissionError(13, "Permission denied")
        replace(source, target)
    monkeypatch.setattr(sheets.os, "replace", failing)
    with pytest.raises(WishError, match="Permission denied"):
        sheets.save(samples.cube(), folder)
    assert {p.name: p.read_bytes() for p in folder.iterdir()} == before
    assert [p.name for p in tmp_path.iterdir()] == ["out"]


def test_a_folder_in_a_documents_place_is_never_touched(tmp_path):
    (tmp_path / "pattern.pdf").mkdir()
    (tmp_path / "pattern.pdf" / "deep.txt").write_text("kept")
    with pytest.raises(WishError, match="is a folder"):
        sheets.save(samples.pouch(), tmp_path)
    assert [p.name for p in tmp_path.rglob("*")] == ["pattern.pdf", "deep.txt"]


def test_a_place_that_cannot_be_written_is_named(tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(WishError, match="cannot be written"):
        sheets.save(samples.pouch(), tmp_path / "file")


@pytest.mark.parametrize("wrong", [{"kinds": ("pdf", "doc")}, {"paper": "a3"}])
def test_unknown_wishes_say_what_is_known(tmp_path, wrong):
    with pytest.raises(WishError, match="choose from"):
        sheets.save(samples.pouch(), tmp_path / "out", **wrong)
    assert not (tmp_path / "out").exists()


class Words(HTMLParser):
    def __init__(self):
        super().__init__()
        self.words, self.tags = [], []

    def handle_data(self, data):
        self.words.append(data)

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)


def test_names_cannot_break_out_of_the_page(tmp_path):
    pattern = samples.pouch()
    pattern.form.name = "<script>alert('x')</script> & \"co\""
    pattern.pieces[0].name = "a</td><b>"
    for seam in pattern.seams:
        seam.sides = tuple(("a</td><b>" if n == "front" else n, i) for n, i in seam.sides)
    pattern.notes = ["<img src=x>"]
    page = sheets.save(pattern, tmp_path, kinds="html")[0].read_text(encoding="utf-8")
    reader = Words()
    reader.feed(page)
    assert not {"script", "b", "img"} & set(reader.tags)
    words = "".join(reader.words)
    assert pattern.form.name in words and "a</td><b>" in words and "<img src=x>" in words


def test_the_page_needs_nothing_from_elsewhere(tmp_path):
    page = sheets.save(samples.cube(), tmp_path, kinds="html")[0].read_text(encoding="utf-8")
    assert not any(word in page for word in ("http:", "https:", "src=", "@import", "<link", "<script"))


def test_pattern_json_holds_the_pattern(tmp_path):
    pattern = samples.frustum()
    data = json.loads(sheets.save(pattern, tmp_path, kinds="json")[0].read_text(encoding="utf-8"))
    piece, read = pattern.pieces[0], data["pieces"][0]
    assert np.allclose(read["outline"], piece.flat[piece.outline] * 1000, atol=1e-4)
    assert np.allclose(np.array(read["flat"])[read["border"]], read["outline"])
    assert np.array_equal(read["triangles"], piece.triangles)
    for seam in data["seams"]:
        for side, length in zip(seam["sides"], seam["lengths_mm"], strict=True):
            if side["piece"] is not None:
                assert samples.length(np.array(read["flat"])[side["points"]]) == pytest.approx(length, abs=1e-3)
    assert data["order"] == ["closing"]
    assert data["summary"] == json.loads(json.dumps(pattern.summary()))


def test_safe_names():
    assert safe_name("fender") == "fender"
    assert safe_name("../../etc/passwd") == "_.._etc_passwd"
    assert safe_name('a/b\\c:d*e?f"g<h>i|j\n') == "a_b_c_d_e_f_g_h_i_j_"
    assert safe_name("") == safe_name(" ..") == "form"
    assert safe_name("CON.txt") == "_CON.txt"
    assert safe_name("\u0431\u0443\u0439 3") == "\u0431\u0443\u0439 3"
    assert len(safe_name("x" * 300)) == 80
    assert safe_name("Buoy", taken=["buoy", "buoy 2"]) == "Buoy 3"
