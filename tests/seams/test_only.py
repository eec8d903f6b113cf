"""Only a part of the form: the given faces are covered, with a border that serves, and nothing else is."""

from functools import cache

import numpy as np
import pytest
import seamwright as sw
from forms import frustum, globe, icosphere, together, torus, wrapped_grid
from seamwright.form.measure import areas
from seamwright.form.surface import Surface
from seamwright.seams.cut import cut_by_fields, recut
from seamwright.seams.energy import evaluate
from seamwright.seams.fields import from_labels
from seamwright.seams.ladder import Ladder
from seamwright.seams.only import PATCH, REST, grown
from test_held import shares_that_are_seams, way
from test_shut import check_free
from tiled import share_covered

BALL = icosphere(3)
GLOBE = globe(24, 12)
RING = torus(1.0, 0.4, 30, 16)[0], wrapped_grid(30, 16)
CONE = frustum(0.5, 0.3, 0.6, 24)


def middles(points, faces):
    return np.array([points[face].mean(axis=0) for face in faces])


def jagged(points, faces):
    """A cap with seven teeth."""
    x, y, z = middles(points, faces).T
    return z > 0.55 + 0.15 * np.sign(np.sin(7 * np.arctan2(y, x)))


CASES = {
    "jagged cap": (BALL, jagged(*BALL), {}),
    "jagged cap, to a thrift": (BALL, jagged(*BALL), {"thrift": 0.05}),
    "two caps": (BALL, np.abs(middles(*BALL)[:, 2]) > 0.8, {}),
    "more than half": (GLOBE, middles(*GLOBE)[:, 2] > -0.4, {"goods": "spandex"}),
    "outer half of a ring": (RING, np.hypot(*middles(*RING)[:, :2].T) > 1, {"goods": "spandex", "thrift": 0.1}),
    "strip of a cone": (CONE, middles(*CONE)[:, 0] > 0.2, {"goods": "card"}),
    "some of one part": (together(BALL, icosphere(2, 0.5)), np.arange(1280 + 320) < 100, {"goods": "spandex"}),
}


@cache
def covered(name, route):
    (points, faces), only, wishes = CASES[name]
    form = sw.Form(points, faces, name=name)
    return form, only, sw.cover(form, sw.Wishes(**{"goods": "wool felt", **wishes}, route=route, only=only))


@pytest.fixture(params=[(name, route) for name in CASES for route in ("through", "edges")], name="made", ids="-".join)
def any_pattern(request):
    return covered(*request.param)


def test_the_given_faces_are_covered_once_and_little_more(made):
    form, only, pattern = made
    share, given = share_covered(form, pattern), only[form.polygon]
    np.testing.assert_allclose(share[given], 1, rtol=1e-9)
    assert share.max() < 1 + 1e-9
    size = areas(form.surface)
    assert (share * size).sum() < 1.35 * size[given].sum()


def test_pieces_are_disks_with_open_edges_at_the_border(made):
    form, _, pattern = made
    for piece in pattern.pieces:
        part = Surface(piece.points, piece.triangles)
        assert part.euler == 1 and part.triangle_components[0] == 1 and len(part.boundary_loops) == 1
        assert piece.flat_areas.min() > 0
    outline = sum(len(piece.outline) for piece in pattern.pieces)
    seams = sum((2 - seam.open) * (len(seam.path) - 1) for seam in pattern.seams)
    assert outline == seams and any(seam.open for seam in pattern.seams)


def test_the_pattern_fits_and_is_written(tmp_path):
    pattern = covered("jagged cap", "through")[2]
    assert pattern.fits
    assert {path.name for path in pattern.save(tmp_path / "cap")} >= {"pattern.pdf", "pattern.svg"}


def test_separate_faces_stay_separate():
    for route in ("through", "edges"):
        pieces = covered("two caps", route)[2].pieces
        assert len({np.sign(piece.points[:, 2]).mean() for piece in pieces}) == 2  # none reaches over the equator


def test_along_edges_faces_are_covered_whole():
    for name in CASES:
        form, _, pattern = covered(name, "edges")
        share = share_covered(form, pattern)
        np.testing.assert_allclose(share, np.round(share), atol=1e-9)
        for face in range(form.face_count):
            assert len(set(np.round(share[form.polygon == face]))) <= 1


@pytest.mark.parametrize("weight", [1.0, 15.0, 200.0])
def test_the_patch_costs_no_more_than_the_given_faces_alone(weight):
    points, faces = BALL
    ladder = Ladder(sw.Form(points, faces).surface)
    level = ladder.levels[-1]
    given = np.zeros(len(points), dtype=bool)
    given[faces[jagged(points, faces)]] = True
    cut = grown(ladder, given, 1.0, "square", weight)
    assert (cut.labels[given] == PATCH).all() and (cut.labels == REST).any()
    labels = np.where(given, PATCH, REST)
    alone = recut(level.surface, cut_by_fields(level.surface, from_labels(level, labels)), labels)
    after, before = (evaluate(level, one, 1.0, "square", np.array([weight, 0.0]), gradient=False) for one in (cut, alone))
    assert after.total < before.total


def test_a_border_dear_enough_has_no_teeth():
    """As long as the convex outline of the cap, a circle of latitude through the tips of the teeth, within a few percent."""
    points, faces = icosphere(4)
    ladder = Ladder(sw.Form(points, faces).surface)
    given = np.zeros(len(points), dtype=bool)
    given[faces[jagged(points, faces)]] = True
    cut = grown(ladder, given, 1.0, "square", 4.0)
    length = evaluate(ladder.levels[-1], cut, 1.0, "square", gradient=False).length
    assert length < 1.02 * 2 * np.pi * np.sqrt(1 - points[given, 2].min() ** 2)


@pytest.mark.parametrize("route", ["through", "edges"])
def test_with_seams_held_and_edges_shut(route):
    form = sw.Form(*GLOBE)
    only = middles(*GLOBE)[:, 2] > -0.4
    held = way(*GLOBE, (0.8, 0, 0.6), (0, 0, 1), (-0.8, 0, 0.6))
    shut = way(*GLOBE, (0, 0.6, 0.8), (0, 1, 0))
    pattern = sw.cover(form, sw.Wishes(goods="spandex", only=only, held=held, shut=shut, route=route))
    np.testing.assert_allclose(share_covered(form, pattern)[only[form.polygon]], 1, rtol=1e-9)
    np.testing.assert_allclose(shares_that_are_seams(form, held, pattern), 1, rtol=1e-9)
    check_free(form, shut, pattern)


def test_all_faces_are_the_form():
    form = sw.Form(*BALL)
    wishes = {"goods": "spandex", "thrift": 0.1}
    whole, all_given = (sw.cover(form, sw.Wishes(**wishes, only=only)) for only in (None, np.ones(form.face_count, bool)))
    for one, other in zip(whole.pieces, all_given.pieces, strict=True):
        np.testing.assert_array_equal(one.flat, other.flat)


@pytest.mark.parametrize(("wish", "words"), [
    ({"only": np.ones(79, bool)}, "only: 79 values for a form of 80 faces"),
    ({"only": np.zeros(80, bool)}, "only: it holds no face of the form"),
    ({"only": np.full(80, 0.5)}, "only: give true or false for each face"),
    ({"only": np.full(80, np.nan)}, "only: give true or false for each face"),
    ({"only": ["yes"] * 80}, "only: give true or false for each face"),
    ({"only": np.arange(80) < 9, "start": np.arange(80) % 3}, "only and start"),
])
def test_a_part_that_cannot_be(wish, words):
    with pytest.raises(sw.WishError, match=words) as caught:
        sw.cover(sw.Form(*icosphere(1)), sw.Wishes(goods="spandex", **wish))
    assert str(caught.value).endswith(".")


def test_a_lopsided_part_has_no_symmetry():
    form, only = sw.Form(*GLOBE), middles(*GLOBE)[:, 0] > 0.3
    with pytest.raises(sw.WishError, match="only and symmetry: only is not alike"):
        sw.cover(form, sw.Wishes(goods="spandex", only=only, symmetry=[((0, 0, 0), (1, 0, 0))]))
    assert sw.cover(form, sw.Wishes(goods="spandex", only=only, symmetry=[((0, 0, 0), (0, 1, 0))])).details["planes"]
