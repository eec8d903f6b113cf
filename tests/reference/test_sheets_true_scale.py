"""The sheets measured by other people's readers: pdfplumber (PDF), svgelements and the XML parser (SVG), shapely."""

import io
import re
from xml.etree import ElementTree

import numpy as np
import pdfplumber
import pytest
import shapely
import svgelements
from seamwright import sheets
from sheets import samples

MM = 25.4 / 72
CUT, STITCH = 0.4, 0.25
"""Widths in mm by which the lines are told apart."""
PAPER = {"a4": (210, 297), "letter": (215.9, 279.4)}
"""ISO 216 and ANSI/ASME Y14.1 A, mm."""


def saved(name, folder, kind, paper="roll"):
    return sheets.save(samples.ALL[name](), folder, kinds=kind, paper=paper)[0]


def pages_of(path):
    return pdfplumber.open(io.BytesIO(path.read_bytes()))


def lines_of(page, width):
    """Lines of a width as (k, 2) mm from the upper left corner of the page, closed ones with their first point repeated."""
    found = []
    for shape in page.lines + page.curves + page.rects:
        if abs(shape["linewidth"] * MM - width) < 0.005:
            points = [[x, y] for _, *ends in shape["path"] for x, y in ends]
            closed = any(op[0] == "h" for op in shape["path"])
            points = np.array(points) * MM
            found.append(np.vstack([points, points[:1]]) if closed else points)
    return found


def squares_of(page):
    boxes = [(s["x1"] - s["x0"], s["bottom"] - s["top"]) for s in page.lines + page.curves + page.rects]
    return [(w * MM, h * MM) for w, h in boxes if abs(w * MM - 100) < 3 and abs(h * MM - 100) < 3]


def svg_of(path):
    """svgelements with one pixel a millimetre, as the viewBox says."""
    return svgelements.SVG.parse(io.BytesIO(path.read_bytes()), ppi=25.4)


def svg_lines(svg, layer):
    """{piece number: [(k, 2) mm]} of a layer."""
    found = {}
    for group in svg.select(lambda e: isinstance(e, svgelements.Group) and e.id == layer):
        for path in group.select(lambda e: isinstance(e, svgelements.Path)):
            points = [[segment.end.x, segment.end.y] for segment in path]
            found.setdefault(path.values.get("data-piece"), []).append(np.array(points))
    return found


@pytest.mark.parametrize("paper", ["roll", "a4", "letter"])
def test_the_test_square_of_the_pdf_is_100_mm_in_both_directions(tmp_path, paper):
    found = [size for page in pages_of(saved("cylinder", tmp_path, "pdf", paper)).pages for size in squares_of(page)]
    assert len(found) == (2 if paper == "roll" else 1)
    for wide, high in found:
        assert abs(wide - 100) < 0.5 and abs(high - 100) < 0.5


def test_the_test_square_of_the_svg_is_100_mm_in_both_directions(tmp_path):
    marks = svg_lines(svg_of(saved("cylinder", tmp_path, "svg")), "marks")[None]
    wide, high = np.ptp(marks[0], axis=0)
    assert abs(wide - 100) < 0.5 and abs(high - 100) < 0.5


@pytest.mark.parametrize("name", list(samples.ALL))
def test_one_svg_unit_is_one_millimetre(tmp_path, name):
    root = ElementTree.parse(saved(name, tmp_path, "svg")).getroot()
    left, top, wide, high = map(float, root.get("viewBox").split())
    assert (left, top) == (0, 0)
    assert root.get("width") == f"{wide:g}mm" or float(root.get("width").removesuffix("mm")) == wide
    assert float(root.get("height").removesuffix("mm")) == high
    assert {group.get("id") for group in root.findall("{*}g")} == {"cut", "stitch", "notches", "grain", "marks", "lettering"}


@pytest.mark.parametrize("name", list(samples.ALL))
def test_stitch_and_cut_lines_of_the_svg(tmp_path, name):
    pattern = samples.ALL[name]()
    svg = svg_of(saved(name, tmp_path, "svg"))
    stitch, cut = svg_lines(svg, "stitch"), svg_lines(svg, "cut")
    allowance = pattern.goods.allowance * 1000
    for number, piece in enumerate(pattern.pieces, start=1):
        area = shapely.Polygon(stitch[str(number)][0])
        assert area.area == pytest.approx(piece.flat_areas.sum() * 1e6, rel=1e-4)
        edge = shapely.LinearRing(cut[str(number)][0])
        assert area.boundary.hausdorff_distance(edge) <= 2 * allowance + 0.02
        for s in np.linspace(0, edge.length, 400):
            point = edge.interpolate(s)
            assert area.boundary.distance(point) > 0.98 * allowance - 0.02
            assert allowance == 0 or not area.contains(point)


@pytest.mark.parametrize("name", ["tapered strip", "frustum"])
def test_no_piece_is_mirrored_or_turned(tmp_path, name):
    pattern = samples.ALL[name]()
    pattern.pieces[0].flat = pattern.pieces[0].flat @ np.array([[1, 0.3], [0.2, 1]])  # no symmetry left
    paths = sheets.save(pattern, tmp_path, kinds=("svg", "pdf"))
    drawn = svg_lines(svg_of(paths[0]), "stitch")["1"][0][:-1]
    wanted = pattern.pieces[0].flat[pattern.pieces[0].outline] * [1000, -1000]  # both readers count y downward
    assert np.allclose(drawn - drawn.mean(axis=0), wanted - wanted.mean(axis=0), atol=0.01)
    printed = max(lines_of(pages_of(paths[1]).pages[-1], STITCH), key=len)[:-1]
    assert np.allclose(printed - printed.mean(axis=0), wanted - wanted.mean(axis=0), atol=0.01)


@pytest.mark.parametrize("name", list(samples.ALL))
def test_stitch_lines_of_the_pdf(tmp_path, name):
    pattern = samples.ALL[name]()
    page = pages_of(saved(name, tmp_path, "pdf")).pages[-1]
    areas = sorted(shapely.Polygon(line).area for line in lines_of(page, STITCH))
    wanted = sorted(piece.flat_areas.sum() * 1e6 for piece in pattern.pieces)
    assert areas == pytest.approx(wanted, rel=2e-4)


@pytest.mark.parametrize("name", list(samples.ALL))
def test_letters_of_the_pdf_lie_inside_the_stitch_lines_or_the_test_square(tmp_path, name):
    page = pages_of(saved(name, tmp_path, "pdf")).pages[-1]
    areas = [shapely.Polygon(line) for line in lines_of(page, STITCH)]
    inside = shapely.unary_union([*areas, shapely.box(10, 10, 110, 110)])
    shapely.prepare(inside)
    letters = [c for c in page.chars if c["text"].strip()]
    assert len(letters) > 100
    for c in letters:
        assert inside.contains(shapely.Point((c["x0"] + c["x1"]) / 2 * MM, (c["top"] + c["bottom"]) / 2 * MM))
        if c["matrix"][1] == 0:
            assert inside.contains(shapely.box(c["x0"] * MM, c["top"] * MM, c["x1"] * MM, c["bottom"] * MM))


@pytest.mark.parametrize("paper", ["roll", "a4", "letter"])
@pytest.mark.parametrize("name", ["cylinder", "cube", "tapered strip"])
def test_nothing_is_cut_off_a_page(tmp_path, name, paper):
    document = pages_of(saved(name, tmp_path, "pdf", paper))
    for page in document.pages:
        assert max(page.width, page.height) <= 14400
        assert page.bbox == page.cropbox == page.mediabox
        for shape in page.lines + page.curves + page.rects:
            assert shape["x0"] >= 0 and shape["x1"] <= page.width and shape["top"] >= 0 and shape["bottom"] <= page.height
        if paper != "roll":
            assert sorted((page.width * MM, page.height * MM)) == pytest.approx(sorted(PAPER[paper]), abs=0.1)
            edge = [e * MM for s in page.lines + page.curves + page.rects for e in (s["x0"], page.width - s["x1"])]
            assert min(edge) > 6
    if paper == "roll":
        for c in document.pages[-1].chars:
            assert c["x0"] >= 0 and c["x1"] <= page.width and c["top"] >= 0 and c["bottom"] <= page.height


def test_readers_are_told_not_to_scale(tmp_path):
    preferences = pages_of(saved("pouch", tmp_path, "pdf")).doc.catalog["ViewerPreferences"]
    assert preferences["PrintScaling"].name == "None"


@pytest.mark.parametrize("paper", ["a4", "letter"])
@pytest.mark.parametrize("name", ["cylinder", "frustum", "cube"])
def test_the_tiles_glued_together_are_the_whole(tmp_path, name, paper):
    whole = svg_lines(svg_of(saved(name, tmp_path, "svg")), "cut")
    whole = shapely.MultiLineString([line for lines in whole.values() for line in lines])
    glued = []
    for page in pages_of(saved(name, tmp_path, "pdf", paper)).pages:
        header = "".join(c["text"] for c in page.chars if abs(c["size"] - 11) < 0.01 and c["bottom"] * MM < 16)
        named = re.match(r"([A-Z])(\d+) .*crosses meet$", header)
        if not named:
            continue  # the legend
        frame = max(page.rects, key=lambda r: r["width"] * r["height"])
        column, row = ord(named[1]) - 65, int(named[2]) - 1
        pitch = np.array([frame["width"], frame["height"]]) * MM - 12
        corner = np.array([frame["x0"], frame["top"]]) * MM
        glued += [line - corner + pitch * [column, row] for line in lines_of(page, CUT)]
    glued = shapely.MultiLineString(glued)
    shift = np.array(whole.bounds[:2]) - glued.bounds[:2]
    glued = shapely.transform(glued, lambda points: points + shift)
    assert glued.bounds == pytest.approx(whole.bounds, abs=0.02)
    assert glued.buffer(0.03).covers(whole.simplify(0.01))
    assert whole.buffer(0.03).covers(glued.simplify(0.01))
