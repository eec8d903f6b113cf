"""Where seams are dear: what is seen, against closed forms; creases, valleys and ridges; and that seams keep clear."""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest
import seamwright as sw
from forms import cap, cube, ellipsoid, icosphere, torus
from seamwright.form.measure import areas, vertex_areas


def points_of(form):
    return form.points.T


@pytest.mark.parametrize("eye", [(0, 0, 1), (1, 2, -0.5)])
def test_a_ball_is_half_seen_by_the_cosine(eye):
    form = sw.Form(*icosphere(4))
    weights = sw.seen_weights(form, [np.multiply(eye, 3)])
    cosine = form.points @ eye / np.linalg.norm(eye)
    np.testing.assert_allclose(weights, np.maximum(cosine, 0), atol=0.02)
    assert vertex_areas(form.surface) @ (weights > 0) / vertex_areas(form.surface).sum() == pytest.approx(0.5, abs=0.03)
    # a ball shows a quarter of its area as a disk (Archimedes)
    shown = vertex_areas(form.surface) @ weights
    assert shown == pytest.approx(areas(form.surface).sum() / 4, rel=0.01)


def test_two_eyes_see_both_sides():
    form = sw.Form(*icosphere(4))
    np.testing.assert_allclose(sw.seen_weights(form, [(0, 1, 0), (0, -1, 0)]), np.abs(form.points[:, 1]), atol=0.02)


def test_a_ring_hides_its_own_far_side():
    """From the side the far wall of the hole faces the eye, behind the near limb: by rays against the torus' equation."""
    form = sw.Form(*torus(1.0, 0.4, 80, 40))
    x, y, z = points_of(form)
    ring = np.hypot(x, y)
    facing = x * (1 - 1 / ring) / 0.4
    far = np.linspace(0.02, 3, 400)
    inside = ((np.hypot(x[:, None] + far, y[:, None]) - 1) ** 2 + z[:, None] ** 2 < 0.4**2).any(axis=1)
    wanted = np.where(inside, 0, np.maximum(facing, 0))
    assert (inside & (facing > 0.3)).mean() > 0.1  # there is something to hide
    assert np.abs(sw.seen_weights(form, [(1, 0, 0)]) - wanted).max() < 0.1


def test_a_box_from_above_shows_its_lid():
    form = sw.Form(*cube(1.0, 8))
    x, y, z = points_of(form)
    weights = sw.seen_weights(form, [(0, 0, 1)])
    lid = (z > 0.49) & (np.maximum(np.abs(x), np.abs(y)) < 0.49)
    np.testing.assert_allclose(weights[lid], 1)
    np.testing.assert_allclose(weights[z < 0.49], 0)
    edge = (z > 0.49) & (np.maximum(np.abs(x), np.abs(y)) > 0.49) & (np.minimum(np.abs(x), np.abs(y)) < 0.49)
    np.testing.assert_allclose(weights[edge], 0.5)  # half of what lies around an edge is lid


def test_an_eye_must_be_somewhere():
    with pytest.raises(sw.WishError, match="directions"):
        sw.seen_weights(sw.Form(*icosphere(1)), [(0, 0, 0)])


def test_points_that_were_left_out_weigh_nothing():
    points, faces = icosphere(2)
    form = sw.Form(np.vstack([points, [5, 5, 5]]), faces)
    assert len(sw.seen_weights(form, [(1, 0, 0)])) == len(sw.crease_weights(form)) == len(points) + 1
    assert sw.seen_weights(form, [(1, 0, 0)])[-1] == sw.crease_weights(form)[-1] == 0


def test_a_ball_has_neither_ridge_nor_valley():
    np.testing.assert_allclose(sw.crease_weights(sw.Form(*icosphere(4))), 1, atol=0.05)


def test_the_inside_of_a_ring_is_a_valley():
    """Mean curvature of a torus: (R + 2 r cos v) / (2 r (R + r cos v)), least on the inside."""
    R, r = 1.0, 0.4
    form = sw.Form(*torus(R, r, 100, 50))
    x, y, z = points_of(form)
    cosine = (np.hypot(x, y) - R) / r
    bend = (R + 2 * r * cosine) / (2 * r * (R + r * cosine)) * np.sqrt(R * r * np.pi)  # area 4 pi^2 R r, of a ball 4 pi
    order = np.argsort(bend)
    mass = vertex_areas(form.surface)[order]
    usual = bend[order][np.searchsorted(np.cumsum(mass), mass.sum() / 2)]
    np.testing.assert_allclose(sw.crease_weights(form), 1 + np.tanh(bend - usual), atol=0.06)


def test_the_edges_of_a_box_are_free_and_its_sides_alike():
    form = sw.Form(*cube(1.0, 8))
    on_edge = (np.abs(form.points) > 0.49).sum(axis=1) >= 2
    weights = sw.crease_weights(form)
    np.testing.assert_array_equal(weights[on_edge], 0)
    np.testing.assert_allclose(weights[~on_edge], 1)


def test_an_open_rim_is_no_ridge():
    np.testing.assert_allclose(sw.crease_weights(sw.Form(*cap(1.2, 30))), 1, atol=0.15)


EGG = ellipsoid(1.0, 0.7, 0.5, 4)
UPPER = EGG[0][:, 2] > 0.05  # about 44 % of the area
WIDE = replace(sw.goods()["spandex"], width=50.0, length=None)  # what sizes ask for has tests of its own


@cache
def covered(weight, **wishes):
    weights = None if weight is None else np.where(UPPER, weight, 0.0)
    return sw.cover(sw.Form(*EGG), sw.Wishes(goods=WIDE, keep_clear=weights, **wishes))


def share_there(pattern, above=0.05):
    """Share of the metres of seam whose middle is in the upper part."""
    there = total = 0.0
    for seam in pattern.seams:
        if not seam.open:
            length = np.linalg.norm(np.diff(seam.path, axis=0), axis=1)
            total += length.sum()
            there += length[(seam.path[:-1, 2] + seam.path[1:, 2]) / 2 > above].sum()
    return there / total


@pytest.mark.parametrize("wishes", [{"thrift": 0.1}, {}], ids=["thrift", "goods"])
def test_seams_at_five_times_the_price_are_few(wishes):
    size = vertex_areas(sw.Form(*EGG).surface)
    assert 0.4 < size[UPPER].sum() / size.sum() < 0.5
    assert share_there(covered(4.0, **wishes)) < 0.2


@pytest.mark.parametrize("wishes", [{"thrift": 0.1}, {}], ids=["thrift", "goods"])
def test_where_seams_may_never_be_there_is_none(wishes):
    pattern = covered(np.inf, **wishes)
    edge = sw.Form(*EGG).surface.edge_lengths.max()
    assert share_there(pattern, 0.05 + edge) == 0  # a seam may touch the faces on the border
    assert not any(note.startswith("Keep clear") for note in pattern.notes)
