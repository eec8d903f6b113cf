"""Pieces matched along their seams: both sides equally long, and the goods still within what they were."""

from dataclasses import replace

import numpy as np
import pytest
from forms import disk
from seamwright.fit.goods import get
from seamwright.fit.grain import HeldGrain, pull
from seamwright.fit.match import FURTHER, match
from seamwright.fit.measure import area_quantile, areas, utilisation, warp_weft_shear
from seamwright.fit.shape import relax_for_goods
from seamwright.fit.springs import Gaps, Springs, eased
from seamwright.flat import flatten, overlaps
from seamwright.flat.flatten import DIRICHLET
from seamwright.flat.rest import Rest
from seamwright.flat.stack import Stack
from seamwright.flat.state import State
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


@pytest.mark.parametrize("name", ["felt", "jersey", "canvas"])
def test_both_sides_of_a_seam_become_equally_long(pillow, name):
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
        assert used <= 1


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


def test_springs_have_the_right_derivative(pillow):
    pieces, joints = pillow
    points = np.concatenate([piece.points for piece in pieces])
    _, at, _, bt = joints[0]
    springs = Springs(Gaps(points, [(at, bt + len(pieces[0].points))]), 3.0)
    rng = np.random.default_rng(0)
    flat = points[:, 0] + 1j * points[:, 1] + 0.01 * rng.standard_normal(len(points))
    move = rng.standard_normal(len(points)) + 1j * rng.standard_normal(len(points))
    step = 1e-6
    ahead, behind = (flat + s * move for s in (step, -step))
    rows, give = springs.rows(flat)
    change = (springs.gaps.sizes(ahead)[0] - springs.gaps.sizes(behind)[0]) / (2 * step)
    np.testing.assert_allclose((rows.conj() @ move).real, change, rtol=1e-6, atol=1e-8)
    assert give == pytest.approx(np.full(springs.gaps.count, 1 / 3))
    slope = (springs.worth(ahead) - springs.worth(behind)) / (2 * step)
    assert np.vdot(springs.slope(flat), move).real == pytest.approx(slope, rel=1e-6)


def test_several_pieces_are_as_one():
    # a Stack of pieces against one Rest of all their triangles: the same maps, gradients and Newton steps
    pieces = [shell(0.6), shell(0.3, inside=True)]
    stack = Stack([Rest(piece) for piece in pieces])
    whole = Rest(Surface(np.concatenate([piece.points for piece in pieces]),
                         np.concatenate([pieces[0].triangles, pieces[1].triangles + len(pieces[0].points)])))
    flat = np.concatenate([piece.points[:, 0] + 1j * piece.points[:, 1] * sign
                           for piece, sign in zip(pieces, (1, -1), strict=True)])
    one, other = (State(rest, DIRICHLET, flat, [HeldGrain([Rest(piece) for piece in pieces], (1, 0, 0))])
                  for rest in (stack, whole))
    np.testing.assert_allclose(one.gradient, other.gradient, atol=1e-12)
    np.testing.assert_allclose(one.newton_direction(0.01), other.newton_direction(0.01), rtol=1e-6, atol=1e-9)
    assert [len(part) for part in stack.split(flat)] == [len(piece.points) for piece in pieces]
    assert [len(part) for part in stack.split_faces(stack.area)] == [len(piece.triangles) for piece in pieces]


def used(piece, flat, goods, comfort):
    area = areas(piece.points, piece.triangles)
    return area_quantile(utilisation(warp_weft_shear(piece.points, piece.triangles, flat), goods, comfort), area)


def matched_pillow(pillow, goods, comfort):
    """(use of the limits and of the hard limits by each piece before, the same after, Matched)."""
    pieces, joints = pillow
    flats = [relax_for_goods(piece, flatten(piece).flat, goods, comfort).flat for piece in pieces]
    matched = match(pieces, flats, joints, goods, comfort)
    before, after = ([[used(piece, flat, goods, level) for level in (comfort, 0.0)]
                      for piece, flat in zip(pieces, laid, strict=True)] for laid in (flats, matched.flats))
    return before, after, matched


@pytest.mark.parametrize("comfort", [0.8, 1.0])
def test_comfort_gives_way_to_seams_that_go_together(pillow, comfort):
    before, after, matched = matched_pillow(pillow, get("canvas"), comfort)
    assert max(use for use, _ in after) > max(1, *(use for use, _ in before))
    assert max(hard for _, hard in after) <= 1
    assert np.abs(matched.mismatch[0]).max() < 0.001 and matched.sewable


@pytest.mark.parametrize("name", ["woven-back", "card"])
def test_seams_give_way_to_the_hard_limits(pillow, name):
    before, after, matched = matched_pillow(pillow, get(name), 0.3)
    for (_, free), (_, hard) in zip(before, after, strict=True):
        assert hard <= (1 if free <= 1 else FURTHER * free)
    assert not matched.sewable and np.abs(matched.mismatch[0]).max() > get(name).mismatch[0]
    pieces, joints = pillow
    rim = joints[0][1]
    free = [flatten(piece).flat for piece in pieces]
    apart = [abs(np.log(length(one, rim) / length(other, rim))) for one, other in (free, matched.flats)]
    assert apart[1] < apart[0]


def test_no_piece_comes_to_lie_over_itself():
    # a ring of nearly one turn that must become longer at its rim to meet another: its ends would pass each other
    def ring(turn, stretch):
        angle, radius = np.meshgrid(np.linspace(0, turn, 61), np.linspace(0.6, 1, 6), indexing="ij")
        points = np.stack([radius * np.cos(angle), radius * np.sin(angle), stretch * angle], axis=-1).reshape(-1, 3)
        i, j = (a.ravel() for a in np.meshgrid(np.arange(60), np.arange(5), indexing="ij"))
        a, b = 6 * i + j, 6 * (i + 1) + j
        return Surface(points, np.concatenate([np.column_stack([a, a + 1, b + 1]), np.column_stack([a, b + 1, b])])[:, ::-1])

    pieces = [ring(6.25, 0.0), ring(6.25, 0.15)]
    flats = [flatten(piece).flat for piece in pieces]
    assert not any(overlaps(flat, piece.boundary_loops[0]) for flat, piece in zip(flats, pieces, strict=True))
    rim = 6 * np.arange(61) + 5
    matched = match(pieces, flats, [(0, rim, 1, rim)], get("jersey"))
    assert length(matched.flats[0], rim) == pytest.approx(length(matched.flats[1], rim), rel=0.005)
    assert not any(overlaps(flat, piece.boundary_loops[0]) for flat, piece in zip(matched.flats, pieces, strict=True))


def test_a_wanted_grain_is_held_in_every_piece(pillow):
    pieces, joints = pillow
    wanted = (1.0, 0.3, 0.0)
    flats = [relax_for_goods(piece, flatten(piece).flat, get("canvas"), wanted=wanted, stages=1).flat for piece in pieces]
    matched = match(pieces, flats, joints, get("canvas"), wanted=wanted)
    assert np.abs(matched.mismatch[0]).max() < 0.001
    for piece, flat in zip(pieces, matched.flats, strict=True):
        x, y = pull(Rest(piece), wanted) @ flat
        assert y > 0
        assert x / y == pytest.approx(0, abs=1e-9)


def test_wanted_ease_stays_on_the_fuller_side(pillow):
    """The high dome's rim is longer by itself: it may stay so by the ease, no more, and both ask less of the goods."""
    pieces, joints = pillow
    goods = get("felt")
    eased_goods = replace(goods, ease=0.02)
    flats = [relax_for_goods(piece, flatten(piece).flat, goods, 1.0).flat for piece in pieces]
    rim = joints[0][1]
    free = np.log(length(flats[0], rim) / length(flats[1], rim))
    assert abs(free) > 0.02
    even, eased = (match(pieces, flats, joints, each, 1.0) for each in (goods, eased_goods))
    ratio = [length(one.flats[0], rim) / length(one.flats[1], rim) for one in (even, eased)]
    assert ratio[0] == pytest.approx(1, abs=5e-4)
    assert ratio[1] ** np.sign(free) == pytest.approx(1.02, abs=1e-3)
    assert np.abs(eased.mismatch[0]).max() < 1e-3 and eased.sewable
    assert max(eased.utilisation) < max(even.utilisation)


def test_ease_keeps_off_the_ends_of_a_seam_and_out_of_darts():
    t = np.linspace(0, 1, 41)
    points = np.concatenate([np.column_stack([t, 0 * t, 0 * t])] * 2)
    flat = np.concatenate([t, 1.03 * t + 0.1j])
    one, other = np.arange(41), 41 + np.arange(41)
    gaps = Gaps(points, [(one, other)])
    wanted = gaps.ease(flat, np.log1p(0.02))
    assert gaps.count == 10 and wanted[[0, -1]].tolist() == [0, 0]
    np.testing.assert_allclose(wanted[1:-1], -np.log(1.02))  # the second side is the longer one
    assert np.abs(gaps.ease(flat, 0.5)[1:-1] + np.log(1.03)).max() < 1e-12  # no more than it is longer by itself
    assert eased(points, np.column_stack([flat.real, flat.imag]), one, other) == (0, 1)
    closing = np.append(other[:-1], one[-1])
    assert not Gaps(points, [(one, closing)]).ease(flat, 0.02).any()
