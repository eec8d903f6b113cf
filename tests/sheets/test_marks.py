import itertools

import numpy as np
import pytest
import shapely
from seamwright.sheets.draft import draft, is_mirror_image
from seamwright.sheets.lettering import Lettering, text_width
from sheets import samples


@pytest.mark.parametrize("name", list(samples.ALL))
def test_lettering_lies_inside_its_piece_and_nothing_overlaps(name):
    for d in draft(samples.ALL[name]()):
        boxes = [shapely.Polygon(mark.corners) for mark in d.letterings]
        assert boxes
        for box in boxes:
            assert d.area.contains(box)
        grain = [shapely.LineString(s.points) for s in d.strokes if s.layer == "grain"]
        for a, b in itertools.combinations(boxes, 2):
            assert a.distance(b) > 0.05
        for box, line in itertools.product(boxes, grain):
            assert not box.intersects(line)
        for line in grain:
            assert d.area.contains(line)


@pytest.mark.parametrize("name", ["cylinder", "frustum", "cube", "pouch", "cap"])
def test_pieces_with_room_say_all_that_a_piece_must_say(name):
    pattern = samples.ALL[name]()
    for d in draft(pattern):
        words = "\n".join(mark.text for mark in d.letterings)
        count, goods = len(pattern.pieces), pattern.goods
        grain = "direction" if goods.grain_free else "arrow"
        for wanted in (d.name, pattern.form.name, f"{d.number} of {count}", "cut 1", goods.name, "face side up",
                       f"{goods.allowance * 1000:g} mm allowance", "scale 1:1", grain):
            assert wanted in words
        assert not d.unmarked
        assert min(mark.height for mark in d.letterings) >= 2.5
        for seam in (s for s in pattern.seams if d.name in (n for n, _ in s.sides)):
            mate = [n for n, _ in seam.sides if n != d.name]
            starts = (f"{seam.name} ", f"{seam.name}:")
            label = next(mark.text for mark in d.letterings if mark.text.startswith(starts))
            assert (mate[0] if mate and mate[0] else ("hem" if seam.open else "itself")) in label


@pytest.mark.parametrize("name", ["cube", "pouch", "frustum"])
def test_a_seams_name_stands_nearest_to_its_own_stitch_line(name):
    pattern = samples.ALL[name]()
    for d, piece in zip(draft(pattern), pattern.pieces, strict=True):
        sides = [(s.name, i) for s in pattern.seams for n, i in s.sides if n == d.name]
        lines = [(seam, shapely.LineString(piece.flat[i] * 1000)) for seam, i in sides]
        for mark in d.letterings:
            owner = next((n for n, _ in lines if mark.text.startswith((f"{n} ", f"{n}:"))), None)
            if owner and mark.text != d.name:
                nearest = min(lines, key=lambda line: line[1].distance(shapely.Point(mark.at)))
                assert nearest[0] == owner
                assert nearest[1].distance(shapely.Point(mark.at)) < 10


def test_what_finds_no_room_is_named():
    band, chip = draft(samples.tapered_strip())
    assert not band.unmarked
    assert any("allowance" in words for words in chip.unmarked)


def test_lettering_is_never_upside_down():
    for make in samples.ALL.values():
        for d in draft(make()):
            assert all(-90 - 1e-6 <= mark.angle <= 90 + 1e-6 for mark in d.letterings)


def test_width_of_letters():
    # Adobe Core 14 font metrics, Helvetica: A 667, i 222, space 278 thousandths of an em [from memory]
    assert text_width("A", 10) == pytest.approx(6.67)
    assert text_width("i i", 1) == pytest.approx(0.222 * 2 + 0.278)


def test_corners_turn_with_the_text():
    mark = Lettering("AA", np.array([5.0, 7.0]), 2.0, 90.0)
    assert np.allclose(mark.corners.min(axis=0), [4, 7 - 0.667 * 2])
    assert np.allclose(mark.corners.max(axis=0), [6, 7 + 0.667 * 2])


def test_a_mirror_image_is_called_so_only_where_it_is_one():
    pattern = samples.pouch()
    front, back = pattern.pieces
    front.flat = front.flat + 0.01 * np.sin(20 * front.flat[:, ::-1]) * (1, 0)  # no longer its own mirror image
    back.flat = front.flat * (-1, 1)
    assert is_mirror_image(front, back)
    back.flat = -back.flat  # turned half round, as the lay allows
    assert is_mirror_image(front, back)
    back.flat = front.flat.copy()
    assert not is_mirror_image(front, back)
    pattern.details["mirrored"] = [["front", "back"]]
    said = [mark.text for mark in draft(pattern)[0].letterings]
    assert any("not quite the mirror image of back" in text for text in said)
