"""The worst place is told of where it asks much of the goods, though too little of the piece does to count as strained."""

import forms
import numpy as np
import pytest
import seamwright as sw
from seamwright.assemble import _far_beyond
from seamwright.fit.measure import measure
from seamwright.pattern import Piece

POINTS, FACES = forms.disk(1.0, 24)


def tent(height, goods, name="A"):
    """A flat disk whose middle point, with triangles 42 mm wide, is lifted off it."""
    lifted, flat = POINTS.copy(), POINTS[:, :2]
    lifted[0, 2] = height
    found = measure(lifted, FACES, flat, goods)
    return Piece(name, lifted, flat, FACES, np.arange(len(FACES)), np.arange(0), found.stretch, found.warp_weft_shear,
                 found.utilisation, found.fit, found.beyond)


def largest_stretch(piece):
    """(t,) by singular values, one triangle at a time."""
    found = []
    for face in FACES:
        (p, q, r), (u, v, w) = piece.points[face], piece.flat[face]
        jacobian = np.column_stack([q - p, r - p]) @ np.linalg.inv(np.column_stack([v - u, w - u]))
        found.append(np.linalg.svd(jacobian, compute_uv=False)[0])
    return np.array(found)


def test_where_and_by_how_much():
    felt = sw.goods()["wool felt"]
    pieces = [tent(0.08, felt), tent(0.06, felt, "B"), tent(0.0, felt, "C")]
    assert all(piece.fit != "strained" for piece in pieces)
    (note,) = _far_beyond(pieces, felt)
    stretch, limit = largest_stretch(pieces[0]), np.log(1 + felt.stretch_warp[1])
    times = np.log(stretch.max()) / limit
    assert f"piece A asks for {100 * (stretch.max() - 1):+.0f} %, {times:.1f} times what wool felt takes" in note
    x, y, z = map(float, note.split("(")[1].split(")")[0].split(","))
    assert np.hypot(x, y) < 45 and z == pytest.approx(80 / 3, abs=1)  # a triangle's middle, one corner lifted by 80 mm
    area = sum(piece.areas[np.log(largest_stretch(piece)) > 2 * limit].sum() for piece in pieces)
    assert f"{1e6 * area:.0f} mm2 ask for more than twice that, on B too" in note


def test_nothing_is_told_of_less_than_twice_the_limit():
    spandex = sw.goods()["spandex"]
    piece = tent(0.04, spandex)
    assert 1 < np.log(largest_stretch(piece).max()) / np.log(1.15)
    assert _far_beyond([piece], spandex) == []


def test_cloth_is_asked_along_its_threads_and_in_shear():
    canvas = sw.goods()["canvas"]
    piece = tent(0.08, canvas)
    at = piece.utilisation.argmax()
    warp, weft, shear = piece.warp_weft_shear[at]
    (note,) = _far_beyond([piece], canvas)
    assert f"asks for {100 * max(warp, weft):+.0f} % along the threads and {np.degrees(abs(shear)):.0f} degrees" in note
