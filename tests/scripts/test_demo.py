"""The demo's table and page, from sheets that were written to a folder; the pictures' views."""

import os
import subprocess
import sys
from html.parser import HTMLParser
from pathlib import Path
from urllib.parse import unquote

import numpy as np
import pytest
from sheets import samples

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT / "scripts"))
from harbour import covering, page, pictures  # noqa: E402

NAME = "Tube <b>&amp;\"'"


class Reader(HTMLParser):
    """Collects tags, links and text of a page."""

    def __init__(self):
        super().__init__()
        self.links, self.tags, self.text = [], [], []

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        self.links += [value for key, value in attrs if key in ("src", "href")]

    def handle_data(self, data):
        self.text.append(data)


@pytest.fixture
def rows(tmp_path):
    """Two forms that the command line reported, one of them failed; their sheets lie in tmp_path."""
    pattern = samples.cylinder(radius=0.1, height=0.3)
    pattern.form.name = NAME
    pattern.save(tmp_path / "tube 1", kinds=("json", "pdf", "svg", "html"))
    reported = [{"object": NAME, "folder": "tube 1"}, {"object": "Knot", "folder": "Knot", "error": "Knot: edges <3> meet."}]
    return [covering._row(form, tmp_path, {NAME: 12.4}) for form in reported]


def test_figures_of_a_tube_are_those_of_its_development(rows):
    tube = rows[0]
    assert (tube.pieces, tube.fits, tube.error) == (1, True, None)
    assert tube.seam_metres == pytest.approx(0.3) and tube.seconds == 12.4
    assert np.abs([*tube.stretch, tube.worst]).max() < 1e-8


def test_table_has_a_line_a_form_and_says_why_one_failed(rows):
    lines = covering.table(rows).splitlines()
    assert len(lines) == 3 and lines[2] == "Knot: Knot: edges <3> meet."
    assert lines[1].split()[-5:] == ["+0.0", "0", "deg", "yes", "12"] and len(lines[0]) == len(lines[1])


def test_page_escapes_names_and_every_link_leads_to_a_file_beside_it(rows, tmp_path):
    page.write(tmp_path, rows)
    for name in ("quay-before.png", "quay-after.png", "tube 1/front.png", "tube 1/back.png"):
        (tmp_path / name).touch()  # pictures are made by other processes
    reader = Reader()
    reader.feed((tmp_path / "index.html").read_text(encoding="utf-8"))
    assert "b" not in reader.tags and "script" not in reader.tags
    assert any(NAME in text for text in reader.text) and "Knot: edges <3> meet." in reader.text
    assert len(reader.links) == 8
    for link in reader.links:
        assert not link.startswith(("/", "http")) and (tmp_path / unquote(link)).is_file(), link


@pytest.mark.parametrize("angle", [0.0, 0.4, -1.2])
def test_views_turn_with_the_form(angle):
    """A form that lies at an angle is seen from the same side of its own as one that lies along x."""
    rng = np.random.default_rng(1)
    form = rng.normal(size=(4000, 3)) * (3, 1, 1)
    turn = np.array([[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    straight = np.array(pictures.turned(pictures.VIEWS["front"], form))
    assert np.array(pictures.turned(pictures.VIEWS["front"], form @ turn.T)) == pytest.approx(turn @ straight, abs=1e-9)


def test_a_picture_is_drawn_from_the_sheets(rows, tmp_path):
    """One covered form through the renderer: pieces in their colours, seams dark, the ground as it is."""
    from PIL import Image

    env = {**os.environ, "PYTHONPATH": os.pathsep.join(map(str, (ROOT / "scripts", ROOT, ROOT / "solver")))}
    subprocess.run([sys.executable, "-m", "harbour.pictures", tmp_path, "tube 1", "front"], env=env, check=True,
                   capture_output=True, timeout=300)
    pixels = np.asarray(Image.open(tmp_path / "tube 1" / "front.png").convert("RGB")).astype(int)
    assert pixels.shape == (*pictures.SIZE[::-1], 3)
    orange = (pixels[..., 0] > 1.4 * pixels[..., 2]).mean()  # the first piece's colour under any light
    dark = (pixels.max(axis=2) < 90).mean()
    assert 0.15 < orange < 0.9 and 0.001 < dark < 0.2
