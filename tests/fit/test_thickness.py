"""Thick goods: pieces measured in the middle of their thickness, outside or inside the form."""

import json

import numpy as np
import pytest
import seamwright as sw
from forms import cylinder, icosphere
from seamwright.fit.measure import measure

SIGN = {"outside": 1, "inside": -1}


@pytest.mark.parametrize("side", SIGN)
def test_a_pipe_in_foam(side):
    # the neutral line of a sheet bent elastically lies in its middle: circumference 2 pi (r + t / 2), here of a prism
    goods = sw.goods()["eva foam"]
    form = sw.Form(*cylinder(0.05, 0.2, 60))
    pattern = sw.cover(form, sw.Wishes(goods=goods, thickness_side=side))
    piece, = pattern.pieces
    around, radius = piece.flat_areas.sum() / 0.2, 0.05 + SIGN[side] * goods.thickness / 2
    assert around == pytest.approx(60 * 2 * radius * np.sin(np.pi / 60), rel=1e-6)
    assert np.abs(piece.stretch).max() < 1e-6
    np.testing.assert_allclose(piece.neutral[:, :2], piece.points[:, :2] * radius / 0.05, atol=1e-9)
    assert pattern.summary()["thickness_side"] == side and pattern.notes == []


def test_a_ball_in_felt(tmp_path):
    goods = sw.goods()["wool felt"]
    form = sw.Form(*icosphere(2, 0.1))
    pattern = sw.cover(form, sw.Wishes(goods=goods, thickness_side="outside", pieces=2))
    ratio = 1 + goods.thickness / 2 / 0.1
    for piece in pattern.pieces:
        np.testing.assert_allclose(piece.neutral, piece.points * ratio, atol=5e-5)
        measured = measure(piece.neutral, piece.triangles, piece.flat, goods, 0.5)
        np.testing.assert_array_equal(measured.stretch, piece.stretch)
    plain = sum(0.5 * np.linalg.norm(np.cross(*(form.points[form.triangles[:, k]] - form.points[form.triangles[:, 0]]
                                               for k in (1, 2))), axis=1))
    assert pattern.summary()["area_m2"] == pytest.approx(plain * ratio**2, rel=1e-3)
    assert {tuple(point) for seam in pattern.seams for point in seam.path} <= {
        tuple(point) for piece in pattern.pieces for point in piece.points}
    pattern.save(tmp_path, "json")
    saved = json.loads((tmp_path / "pattern.json").read_text(encoding="utf-8"))["pieces"][0]
    np.testing.assert_allclose(saved["neutral"], np.array(saved["points"]) * ratio, atol=0.05)


def test_a_pattern_to_start_from_lies_on_the_form():
    form = sw.Form(*icosphere(2, 0.1))
    thin = sw.cover(form, sw.Wishes(goods="felt", pieces=2))
    thick = sw.cover(form, sw.Wishes(goods="felt", start=thin, thickness_side="outside"))
    for one, other in ((thin, thick), (thick, sw.cover(form, sw.Wishes(goods="felt", start=thick)))):
        assert other.summary()["seam_metres"] == pytest.approx(one.summary()["seam_metres"], rel=0.05)


def test_what_is_too_finely_curved_is_told():
    form = sw.Form(*icosphere(2, 0.004))
    pattern = sw.cover(form, sw.Wishes(goods="eva foam", thickness_side="inside", pieces=2))
    note, = (note for note in pattern.notes if note.startswith("Thickness"))
    assert "on 100.0 % of the form" in note and "5 mm thick" in note
