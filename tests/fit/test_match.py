"""Pieces matched along their seams: both sides equally long, and the goods still within what they were."""

import numpy as np
import pytest
from forms import disk
from seamwright.fit.goods import get
from seamwright.fit.match import _Seams, match
from seamwright.fit.measure import area_quantile, areas, utilisation, warp_weft_shear
from seamwright.fit.shape import relax_for_goods
from seamwright.flat import flatten
from seamwright.form.surface import Surface


def shell(height, inside=False):
    """A shallow dome over the unit disk whose rim is the unit circle."""
    points, faces = disk(1.0, 12)
    away = np.hypot(points[:, 0], points[:, 1])
    points = np.column_stack([points[:, :2], height * (np.sqrt(np.maximum(0, 1.2 - away**2)) - np.sqrt(0.2))])
    return Surface(points * (1, 1, -1), faces[:, ::-1]) if inside else Surface(points, faces)


@pytest.fixture(scope="module")
def pillow():
    """A high and a shallow dome that share a rim, and the one seam between them."""
    pieces = [shell(0.6), shell(0.3, inside=True)]
    rim = pieces[0].boundary_loops[0]
    return pieces, [(0, np.append(rim, rim[0]), 1, np.append(rim, rim[0]))]


def length(flat, path):
    return np.linalg.norm(np.diff(flat[path], axis=0), axis=1).sum()


@pytest.mark.parametrize("name, dearer", [("felt", 1.03), ("jersey", 1.03), ("canvas", 2.5)])
def test_both_sides_of_a_seam_become_equally_long(pillow, name, dearer):
    pieces, joints = pillow
    goods, rim = get(name), joints[0][1]
    shaped = [relax_for_goods(piece, flatten(piece).flat, goods) for piece in pieces]
    flats = [one.flat for one in shaped]
    assert abs(length(flats[0], rim) / length(flats[1], rim) - 1) > 0.01     # apart before
    matched = match(pieces, flats, joints, goods)
    assert length(matched.flats[0], rim) == pytest.approx(length(matched.flats[1], rim), rel=0.0005)
    assert np.abs(matched.mismatch[0]).max() < 0.001
    assert len(matched.mismatch[0]) >= 8
    for piece, flat, used in zip(pieces, matched.flats, matched.utilisation, strict=True):
        area = areas(piece.points, piece.triangles)
        measured = area_quantile(utilisation(warp_weft_shear(piece.points, piece.triangles, flat), goods), area)
        assert used == pytest.approx(measured, rel=1e-6)
        assert used < dearer * max(one.utilisation for one in shaped)


def test_a_dart_closes():
    # a leaning bell cut open at its side, whose two edges are sewn to each other
    t = np.linspace(0, 2 * np.pi, 25)
    rim = np.column_stack([np.cos(t), np.sin(t), np.zeros(25)])
    rings = [share * rim + [0, 0.3 * share**2, 0.9 * (1 - share) + 0.2 * share**2] for share in (0.2, 0.4, 0.6, 0.8, 1)]
    i, j = (part.ravel() for part in np.meshgrid(np.arange(4), np.arange(24), indexing="ij"))
    a, b, c, d = 25 * i + j, 25 * (i + 1) + j, 25 * (i + 1) + j + 1, 25 * i + j + 1
    surface = Surface(np.concatenate(rings), np.concatenate([np.column_stack([a, b, c]), np.column_stack([a, c, d])]))
    one, other = 25 * np.arange(5), 25 * np.arange(5) + 24
    flat = relax_for_goods(surface, flatten(surface).flat, get("felt")).flat
    assert abs(length(flat, one) / length(flat, other) - 1) > 0.005      # apart before
    matched = match([surface], [flat], [(0, one, 0, other)], get("felt"))
    assert length(matched.flats[0], one) == pytest.approx(length(matched.flats[0], other), rel=0.0005)


def test_gaps_have_the_right_derivative(pillow):
    pieces, joints = pillow
    points = np.concatenate([piece.points for piece in pieces])
    _, at, _, bt = joints[0]
    seams = _Seams(points, [(at, bt + len(pieces[0].points))])
    rng = np.random.default_rng(0)
    flat = points[:, 0] + 1j * points[:, 1] + 0.01 * rng.standard_normal(len(points))
    move = rng.standard_normal(len(points)) + 1j * rng.standard_normal(len(points))
    rows = seams.gaps(flat)[1]
    step = 1e-6
    slope = (seams.gaps(flat + step * move)[0] - seams.gaps(flat - step * move)[0]) / (2 * step)
    np.testing.assert_allclose((rows.conj() @ move).real, slope, rtol=1e-6, atol=1e-8)


def test_a_wanted_grain_is_held_in_every_piece(pillow):
    from seamwright.fit.grain import pull
    from seamwright.flat.rest import Rest
    pieces, joints = pillow
    wanted = (1.0, 0.3, 0.0)
    flats = [relax_for_goods(piece, flatten(piece).flat, get("canvas"), wanted=wanted, stages=1).flat for piece in pieces]
    matched = match(pieces, flats, joints, get("canvas"), wanted=wanted)
    assert np.abs(matched.mismatch[0]).max() < 0.001
    for piece, flat in zip(pieces, matched.flats, strict=True):
        x, y = pull(Rest(piece), wanted) @ flat
        assert y > 0
        assert x / y == pytest.approx(0, abs=1e-9)
