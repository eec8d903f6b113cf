import json

import numpy as np
import pytest
from seamwright.sheets.colours import VIK, stretch_colour
from seamwright.sheets.figures import quantiles
from seamwright.sheets.html import colour_reach, shown_stretch
from seamwright.sheets.report import summary
from sheets import samples


@pytest.mark.parametrize("name", list(samples.ALL))
def test_the_summary_is_plain_json_and_repeats(name):
    one, two = (json.dumps(summary(samples.ALL[name]()), allow_nan=False) for _ in range(2))
    assert one == two


def test_a_cylinder():
    found = summary(samples.cylinder(radius=0.1, height=0.3))
    # the tube is a prism of 72 sides; its flat length is the true circumference
    chord = 72 * 2 * 0.1 * np.sin(np.pi / 72)
    assert found["seam_metres"] == pytest.approx(0.3)
    assert found["hem_metres"] == pytest.approx(2 * chord)
    assert found["area_m2"] == pytest.approx(chord * 0.3)
    assert found["flat_area_m2"] == pytest.approx(2 * np.pi * 0.1 * 0.3)
    assert found["pieces"][0]["width_mm"] == pytest.approx(2 * np.pi * 100 + 40, abs=1e-6)
    assert found["pieces"][0]["height_mm"] == pytest.approx(340)
    assert found["seams"][0] == {"name": "s1", "pieces": ["A", "A"], "lengths_mm": [300, 300], "ease": 0, "dart": False,
                                 "open": False, "eased": None}
    assert found["fits"] and found["order"] == ["s1"]


def test_the_stretch_of_a_cap_laid_at_true_distance():
    # Milnor 1969: around the parallel at polar angle a the azimuthal equidistant map has length ratio sin a / a
    pattern = samples.cap(polar=np.pi / 3)
    found = summary(pattern)["pieces"][0]
    assert found["stretch"]["worst"] == pytest.approx(np.sin(np.pi / 3) / (np.pi / 3) - 1, abs=0.006)
    # 5 % of a cap's area lies beyond the polar angle whose cap holds 95 % of it
    edge = np.arccos(1 - 0.95 * (1 - np.cos(np.pi / 3)))
    assert found["stretch"]["p5"] == pytest.approx(np.sin(edge) / edge - 1, abs=0.005)
    assert found["stretch"]["p95"] == pytest.approx(0, abs=1e-3)
    assert sum(found["shares"].values()) == pytest.approx(1) and found["shares"]["strained"] == found["beyond"]
    # felt takes 2 % of ease-in in comfort, 6 at most: sin a / a = 0.98, 0.94 at polar angles of 19.9 and 34.6 degrees
    caps = [(1 - np.cos(np.radians(angle))) / (1 - np.cos(np.pi / 3)) for angle in (19.9, 34.6)]
    assert [found["shares"][key] for key in ("comfortable", "strained")] == pytest.approx([caps[0], 1 - caps[1]], abs=0.02)
    # near the rim; texture stretch of the azimuthal equidistant map in closed form (Sander et al. 2001): 1.00417
    assert np.hypot(*found["worst_place_mm"][:2]) == pytest.approx(200 * np.sin(np.pi / 3), rel=0.02)
    assert found["sander"]["l2"] == pytest.approx(1.00417, abs=3e-4)
    # the largest stretch is 0, outward, at equal areas: root of flat area a^2 over area 2 (1 - cos a)
    assert found["sander"]["linf"] == pytest.approx(np.pi / 3 / np.sqrt(2 * (1 - np.cos(np.pi / 3))), abs=2e-3)
    assert found["fit"] == "strained" and not summary(pattern)["fits"]
    assert "The dome is beyond what felt takes." in summary(pattern)["notes"]


def test_what_is_told_is_measured_from_what_is_saved(tmp_path):
    """Figures of all pieces against a plain reading of pattern.json; the pattern's own stretch has no say."""
    pattern = samples.pouch()
    for piece in pattern.pieces:
        piece.stretch[:], piece.utilisation[:] = 7.0, 7.0
        piece.flat[:, 0] *= 0.97
    pattern.save(tmp_path, "json")
    saved = json.loads((tmp_path / "pattern.json").read_text(encoding="utf-8"))
    told, felt = saved["summary"]["all"], pattern.goods
    stretch, weight, places = [], [], []
    for piece in saved["pieces"]:
        for corners in piece["triangles"]:
            p, q, r = (np.array(piece["points"][k]) for k in corners)
            a, b, c = (np.array(piece["flat"][k]) for k in corners)
            axes = np.linalg.qr(np.column_stack([q - p, r - p]))[0]
            jacobian = axes.T @ np.column_stack([q - p, r - p]) @ np.linalg.inv(np.column_stack([b - a, c - a]))
            stretch.append(np.linalg.svd(jacobian, compute_uv=False))
            weight.append(0.5 * np.linalg.norm(np.cross(q - p, r - p)))
            places.append((p + q + r) / 3)
    stretch, weight = np.array(stretch), np.array(weight) / np.sum(weight)
    assert stretch.max() == pytest.approx(1 / 0.97, rel=1e-4)
    assert told["stretch"]["worst"] == pytest.approx(stretch.max() - 1, abs=1e-6)
    used = np.maximum(np.log(stretch.max(axis=1)) / np.log1p(felt.stretch_warp[1]), -np.log(stretch.min(axis=1)) / 0.0619)
    assert told["utilisation"]["worst"] == pytest.approx(used.max(), rel=1e-3)
    easy = (stretch <= 1 + felt.stretch_warp[0]).all(axis=1) & (stretch >= 1 - felt.ease_in[0]).all(axis=1)
    assert told["shares"]["comfortable"] == pytest.approx(weight[easy].sum(), abs=1e-6)
    assert told["sander"]["l2"] == pytest.approx(np.sqrt(0.97 * weight @ (stretch**2).sum(axis=1) / 2), rel=1e-6)
    assert np.linalg.norm(np.array(places) - told["worst_place_mm"], axis=1).min() < 1e-3


def test_quantiles_against_repeating_each_value():
    rng = np.random.default_rng(3)
    values, weights = rng.normal(size=40), rng.integers(1, 9, 40)
    plain = np.sort(np.repeat(values, weights))
    for share in (0.05, 0.5, 0.95, 1.0):
        assert quantiles(values, weights.astype(float), share) == plain[max(0, int(np.ceil(share * len(plain))) - 1)]


def test_figures_of_cloth_and_of_felt():
    cloth, felt = summary(samples.cylinder())["pieces"][0], summary(samples.pouch())["pieces"][0]
    assert {"warp", "weft", "shear_degrees"} <= set(cloth)
    assert not {"warp", "weft", "shear_degrees"} & set(felt)


def test_colours_run_from_blue_through_pale_to_brown():
    assert stretch_colour([-1, 0, 1]) == ["#001261", "#ECE5E0", "#590008"]
    assert stretch_colour([-7, 7]) == stretch_colour([-1, 1])
    # perceptually uniform: relative luminance rises to the middle and falls from it, the same to about 10 % on both sides
    light = (VIK / 255) ** 2.2 @ [0.2126, 0.7152, 0.0722]
    assert (np.diff(light[:9]) > 0).all() and (np.diff(light[8:]) < 0).all()


def test_the_limits_of_the_goods_lie_on_the_scale():
    for name in ("canvas", "wool felt", "leather", "sheet metal", "spandex"):
        goods = samples.goods(name)
        assert colour_reach(goods) > max(goods.stretch_warp[1], goods.stretch_weft[1], goods.ease_in[1])


def test_shown_stretch_is_the_one_farther_from_zero():
    dome = samples.cap().pieces[0]
    assert np.array_equal(shown_stretch(dome, samples.goods("wool felt")), dome.stretch[:, 1])


def test_what_a_piece_lacks_is_in_the_notes():
    notes = summary(samples.tapered_strip())["notes"]
    assert any(note.startswith("Piece chip has no room for") for note in notes)


def test_a_piece_that_overlaps_itself_is_in_the_notes():
    pattern = samples.cube()
    pattern.pieces[2].flat[pattern.pieces[2].outline[:2]] = pattern.pieces[2].flat[pattern.pieces[2].outline[1::-1]]
    assert any("Piece C overlaps itself" in note for note in summary(pattern)["notes"])
