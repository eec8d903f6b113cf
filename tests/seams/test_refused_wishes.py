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
    ({"start": np.zeros(79)}, "start: 79 labels for a form of 80 faces"),
])
def test_a_wish_that_cannot_be(wish, words):
    with pytest.raises(sw.WishError, match=words) as caught:
        sw.cover(BALL, sw.Wishes(**{"goods": "spandex", **wish}))
    assert str(caught.value).endswith(".")


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
    def no_ladder(surface, price):
        raise sw.CoverError("No way up." if len(surface.points) == 42 else "Never reached.")

    monkeypatch.setattr(sys.modules["seamwright.cover"], "Ladder", no_ladder)  # sw.cover is the function
    with pytest.raises(sw.CoverError, match="^ball: No way up.$"):
        sw.cover(BALL)
    with pytest.raises(sw.CoverError, match="^pair, part 1 of 2: No way up.$"):
        sw.cover(sw.Form(*together(icosphere(1), icosphere(1)), name="pair"))
