"""Flattening whole pieces: nothing flips, nothing depends on luck, and what is no disk is refused."""

import numpy as np
import pytest
import shapely
from forms import cap, cylinder, disk, icosphere, noisy, torus
from seamwright.errors import CoverError
from seamwright.flat import flatten, overlaps
from seamwright.flat.flatten import DIRICHLET, as_complex, disk_loop
from seamwright.flat.relax import relax
from seamwright.flat.rest import Rest
from seamwright.flat.start import best_scale, conformal_start, embedded_start, valid
from seamwright.flat.state import first_flip
from seamwright.form.surface import Surface


def sock(length, n):
    """A tube of radius 1 closed by half a sphere, n rings from the toe up to the open end."""
    points, faces = disk(1.0, n)
    r, angle = np.hypot(points[:, 0], points[:, 1]), np.arctan2(points[:, 1], points[:, 0])
    along = r * (length + np.pi / 2)
    polar = np.minimum(along, np.pi / 2)
    z = np.cos(polar) - np.maximum(along - np.pi / 2, 0)
    return np.column_stack([np.sin(polar) * np.cos(angle), np.sin(polar) * np.sin(angle), z]), faces


def slivers():
    """A cap with needles: every triangle's first corner joined to a point close to its opposite side."""
    points, faces = cap(0.8, 6)
    a, b, c = (points[faces[:, k]] for k in range(3))
    extra = 0.002 * a + 0.499 * (b + c)
    new = len(points) + np.arange(len(faces))
    faces = np.concatenate([np.column_stack([faces[:, k], faces[:, (k + 1) % 3], new]) for k in range(3)])
    return np.concatenate([points, extra]), faces


PLATE, FACES = disk(1.0, 16)
NASTY = {"crumpled": (noisy(PLATE, 0.05), FACES), "very crumpled": (noisy(PLATE, 0.2), FACES),
         "sock": sock(10, 30), "nearly closed ball": cap(3.0, 20), "needles": slivers()}


@pytest.mark.parametrize("name", NASTY)
def test_nothing_flips_on_nasty_pieces(name):
    surface = Surface(*NASTY[name])
    done = flatten(surface)
    u, v = (done.flat[surface.triangles[:, k]] - done.flat[surface.triangles[:, 0]] for k in (1, 2))
    assert (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0] > 0).all()
    assert done.converged


@pytest.mark.parametrize("name", ["sock", "nearly closed ball", "needles"])
def test_two_starts_lead_to_the_same_energy(name):
    # the conformal start and the round embedding have nothing in common but the piece
    surface = Surface(*NASTY[name])
    rest, loop = Rest(surface), disk_loop(surface)
    starts = [embedded_start(surface, rest, loop), conformal_start(surface, rest, loop)[0]]
    assert all(valid(rest, flat) for flat in starts)
    ends = [relax(rest, flat * best_scale(rest, flat), DIRICHLET, tolerance=1e-7).energy for flat in starts]
    assert ends[0] == pytest.approx(ends[1], rel=1e-4)


def test_relaxing_ends_where_no_direction_helps():
    surface = Surface(*cap(1.2, 12))
    rest = Rest(surface)
    flat = as_complex(flatten(surface).flat)
    tight = relax(rest, flat, DIRICHLET, tolerance=1e-12)
    assert tight.converged
    gradient = rest.gather(*(rest.area * part for part in DIRICHLET.first(*rest.maps(tight.flat))))
    assert np.abs(gradient).max() < 1e-6
    # the quick ending is within a ten-thousandth of it
    assert rest.area @ DIRICHLET.density(*rest.maps(flat)) / rest.total == pytest.approx(tight.energy, rel=1e-4)


def test_first_flip_is_the_first_root_of_every_area():
    rng = np.random.default_rng(0)
    alpha, beta = np.full(500, 1.0 + 0j), 0.5 * (rng.random(500) + 1j * rng.random(500))
    d_alpha, d_beta = (rng.standard_normal(500) + 1j * rng.standard_normal(500) for _ in range(2))
    roots = []
    for a, b, da, db in zip(alpha, beta, d_alpha, d_beta, strict=True):
        middle = 2 * ((a.conjugate() * da).real - (b.conjugate() * db).real)
        found = np.roots([abs(da)**2 - abs(db)**2, middle, abs(a)**2 - abs(b)**2])
        roots += [r.real for r in found if abs(r.imag) < 1e-9 and r.real > 0]
    assert first_flip(alpha, beta, d_alpha, d_beta) == pytest.approx(min(roots), rel=1e-9)
    assert first_flip(alpha, beta, alpha, beta) == np.inf


def test_the_flat_piece_is_true_to_scale_and_the_same_every_time():
    points, faces = cap(0.6, 10)
    once, again, tenfold = (flatten(Surface(scale * points, faces)) for scale in (1, 1, 10))
    assert once.flat.tobytes() == again.flat.tobytes()
    np.testing.assert_allclose(10 * once.flat, tenfold.flat, atol=1e-5)


APART = np.eye(3)[[0, 1, 2, 0, 1, 2]] + np.repeat([[0], [5]], 3, 0), np.arange(6).reshape(2, 3)
PINCHED = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [-1, 0, 0], [0, -1, 0.0]]), np.array([[0, 1, 2], [0, 3, 4]])


@pytest.mark.parametrize("points, faces", [icosphere(1), torus(2, 1, 12, 8), cylinder(1, 2, 12, 3), APART, PINCHED])
def test_what_is_no_disk_is_refused(points, faces):
    with pytest.raises(CoverError, match="no disk"):
        flatten(Surface(points, faces))


def test_one_triangle_is_laid_flat_exactly():
    surface = Surface(np.array([[0, 0, 0], [3, 0, 0], [0, 0, 4.0]]), np.array([[0, 1, 2]]))
    flat = flatten(surface).flat
    assert sorted(np.linalg.norm(flat - np.roll(flat, 1, axis=0), axis=1)) == pytest.approx([3, 4, 5], abs=1e-9)


def helix(turns, rings=300):
    """A cone's strip wound more than once: it can only be laid flat over itself."""
    angle = np.repeat(np.linspace(0, 2 * np.pi * turns, rings), 2)
    radius = np.tile([1.0, 0.7], rings)
    points = np.column_stack([radius * np.cos(angle), radius * np.sin(angle), 0.02 * angle])
    low = 2 * np.arange(rings - 1)
    return points, np.concatenate([np.column_stack([low + 1, low, low + 2]), np.column_stack([low + 1, low + 2, low + 3])])


def test_a_strip_wound_twice_overlaps_and_wound_once_it_does_not():
    for turns, crossed in ((0.9, False), (1.5, True), (2.5, True)):
        surface = Surface(*helix(turns))
        flat = flatten(surface).flat
        assert bool(overlaps(flat, surface.boundary_loops[0])) == crossed


def test_crossings_agree_with_the_plain_pairwise_test():
    # every pair, by an outside library
    corners = np.random.default_rng(0).standard_normal((80, 2))
    sides = [shapely.LineString([a, b]) for a, b in zip(corners, np.roll(corners, -1, axis=0), strict=True)]
    expected = {(i, j) for i in range(80) for j in range(i + 2, 80) if (i, j) != (0, 79) and sides[i].crosses(sides[j])}
    assert set(overlaps(corners, np.arange(80))) == expected


def test_a_simple_boundary_has_no_crossings():
    t = np.linspace(0, 2 * np.pi, 400, endpoint=False)
    star = (1 + 0.9 * np.cos(7 * t))[:, None] * np.column_stack([np.cos(t), np.sin(t)])
    assert overlaps(star, np.arange(400)) == []
    assert len(overlaps(np.column_stack([np.cos(t), np.sin(2 * t)]), np.arange(400))) == 1


def test_a_slit_whose_edges_touch_is_no_overlap_but_one_that_closes_too_far_is():
    t = np.linspace(0, 2 * np.pi, 101)
    for opening, crossed in ((0, False), (0.01, False), (-0.01, True)):
        arc = np.column_stack([np.cos(t), np.sin(t)]) if opening == 0 else np.column_stack(
            [np.cos(t * (1 - opening / 6)), np.sin(t * (1 - opening / 6))])
        inwards = np.outer(np.linspace(1, 0, 9)[1:-1], arc[-1])
        outwards = np.outer(np.linspace(0, 1, 9)[1:-1], arc[0])
        outline = np.concatenate([arc, inwards, [[0, 0]], outwards])
        assert bool(overlaps(outline, np.arange(len(outline)))) == crossed
