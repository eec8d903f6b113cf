"""Wishes that cannot be, and forms for which no pattern is found: one sentence that says which, why and what to do."""

import sys

import numpy as np
import pytest
import seamwright as sw
from forms import icosphere, together
from seamwright.seams.study import log_scale, seam_energy

BALL = sw.Form(*icosphere(1), name="ball")  # 42 points, 80 faces
ONE_NAN, NEGATIVE = np.zeros(42), np.zeros(42)
ONE_NAN[7], NEGATIVE[[3, 5]] = np.nan, -1


@pytest.mark.parametrize(("wish", "words"), [
    ({"goods": "velvet"}, "'velvet' is not known"),
    ({"goods": "vinyl"}, "knit-back vinyl or woven-back vinyl"),
    ({"goods": 3}, "neither a name nor a Goods"),
    ({"comfort": 1.2}, "comfort: 1.2"),
    ({"comfort": np.nan}, "comfort: nan"),
    ({"comfort": "high"}, "comfort: 'high'"),
    ({"thrift": 0.0}, "thrift: 0"),
    ({"thrift": np.inf}, "thrift: inf"),
    ({"route": "across"}, "route: 'across' is not one of through, edges"),
    ({"energy": "cubic"}, "energy: 'cubic'"),
    ({"energy": (np.abs,)}, "pair of functions"),
    ({"symmetry": "left"}, "symmetry: 'left'"),
    ({"thickness_side": "both"}, "thickness_side: 'both'"),
    ({"pieces": 0}, "pieces: 0"),
    ({"pieces": 2.5}, "pieces: 2.5"),
    ({"keep_clear": ONE_NAN}, "keep_clear: weights must be 0 or more; points \\[7\\]"),
    ({"keep_clear": NEGATIVE}, "points \\[3, 5\\]"),
    ({"keep_clear": np.zeros(41)}, "keep_clear: 41 weights for a form of 42 points"),
    ({"keep_clear": "abc"}, "keep_clear: 'abc' is not a weight for each point"),
    ({"keep_clear": np.full(42, np.inf)}, "keep_clear: seams may never be anywhere on 'ball'"),
    ({"start": np.zeros(79)}, "start: 79 labels for a form of 80 faces"),
    ({"start": np.full(80, np.nan)}, "start: labels must be numbers"),
    ({"start": ["a"] * 80}, "start: labels must be numbers"),
    ({"start": [[0, 1], [2]]}, "start: .* is neither a label for each face nor pairs"),
    ({"start": [[0, 1, 2]]}, "start: .* is not pairs of point numbers"),
    ({"start": [[0, 99]]}, "start: point 99 is none of this form"),
    ({"pieces": "three"}, "pieces: 'three' is not a whole number of at least 1"),
    ({"pieces": np.nan}, "pieces: nan"),
    ({"pieces": np.inf}, "pieces: inf"),
    ({"pieces": [1, 2]}, "pieces: \\[1, 2\\]"),
    ({"pieces": True}, "pieces: True"),
    ({"pieces": 81}, "pieces: 81 for a form of 80 faces"),
    ({"seed": -1}, "seed: -1 is not a whole number of at least 0"),
    ({"seed": "x"}, "seed: 'x'"),
    ({"grain": "up"}, "grain: 'up' is not a direction"),
    ({"grain": (0, 0, 0)}, "grain: \\(0, 0, 0\\)"),
    ({"grain": (1, 2)}, "grain: \\(1, 2\\)"),
    ({"grain": (0, 0, np.nan)}, "grain"),
    ({"energy": (lambda u: u * np.nan, lambda u: u)}, "energy: j is not finite at u = -0.9"),
    ({"energy": (lambda u: 1.0, lambda u: u)}, "energy: j gives 1 numbers for 12"),
    ({"energy": (np.square, lambda u: [].pop())}, "energy: dj/du fails on an array \\(pop from empty list\\)"),
    ({"energy": (np.square, np.copy)}, "the second function is not the slope of the first"),
    ({"symmetry": []}, "symmetry: give"),
    ({"symmetry": [((0, 0, 0), (0, 0, 0))]}, "symmetry: give"),
    ({"symmetry": [((0, 0, 0), (1, 0, 0)), ((0, 0, 0), (1, 1, 0))]}, "planes 0 and 1 are not at right angles"),
    ({"symmetry": [((0.1, 0, 0), (1, 0, 0))]}, "no mirror image of itself about plane 0: the sides differ by [0-9.]+ mm"),
])
def test_a_wish_that_cannot_be(wish, words):
    with pytest.raises(sw.WishError, match=words) as caught:
        sw.cover(BALL, sw.Wishes(**{"goods": "spandex", **wish}))
    assert str(caught.value).endswith(".")


def test_pieces_are_shared_out_among_the_parts():
    pair = sw.Form(*together(icosphere(2), icosphere(2, 0.5)), name="pair")
    with pytest.raises(sw.WishError, match="pieces: 1 for a form of 2 parts"):
        sw.cover(pair, sw.Wishes(goods="spandex", pieces=1))
    pattern = sw.cover(pair, sw.Wishes(goods="spandex", pieces=5))
    of = pair.surface.triangle_components[1]
    assert np.bincount([of[piece.source[0]] for piece in pattern.pieces]).tolist() == [3, 2]


def test_a_start_of_another_form():
    other = sw.cover(sw.Form(*icosphere(2), name="larger"), sw.Wishes(goods="spandex", thrift=0.5))
    with pytest.raises(sw.WishError, match="start: the pattern is of another form \\('larger'\\)"):
        sw.cover(BALL, sw.Wishes(goods="spandex", start=other))


def test_what_is_not_met_is_said():
    notes = sw.cover(BALL, sw.Wishes(goods="spandex", pieces=80)).notes
    assert any("80 were wished, the pattern has" in note for note in notes)
    notes = sw.cover(BALL, sw.Wishes(goods="spandex", energy="hencky")).notes
    assert any(note.startswith("Energy: it had no say") for note in notes)


@pytest.mark.parametrize("study", [log_scale, seam_energy])
@pytest.mark.parametrize(("labels", "words"), [
    (np.zeros(79), "labels: 79 for a form of 80 faces"),
    (np.full(80, np.nan), "not a number"),
    (np.zeros(80), "closed and all one piece"),
])
def test_a_partition_that_cannot_be(study, labels, words):
    with pytest.raises(sw.WishError, match=words):
        study(BALL, labels)


def test_the_part_without_a_seam_is_named():
    form = sw.Form(*together(icosphere(2), icosphere(1)))
    labels = np.r_[np.arange(320) < 160, np.zeros(80, dtype=bool)]
    with pytest.raises(sw.WishError, match="around triangle 320"):
        log_scale(form, labels)


def test_a_form_that_cannot_be_covered_is_named(monkeypatch):
    def no_ladder(surface, *_, **__):
        raise sw.CoverError("No way up." if len(surface.points) == 42 else "Never reached.")

    monkeypatch.setattr(sys.modules["seamwright.cover"], "Ladder", no_ladder)  # sw.cover is the function
    with pytest.raises(sw.CoverError, match="^ball: No way up.$"):
        sw.cover(BALL)
    with pytest.raises(sw.CoverError, match="^pair, part 1 of 2: No way up.$"):
        sw.cover(sw.Form(*together(icosphere(1), icosphere(1)), name="pair"))
