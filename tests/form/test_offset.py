"""The surface in the middle of thick goods: closed forms of plane and space geometry, creases, and caps by curvature."""

import numpy as np
import pytest
from forms import cap, cube, cylinder, disk, icosphere, noisy, split_quads, torus
from seamwright.form.measure import area_vectors, total_area
from seamwright.form.offset import LEAST_AREA, LEAST_EDGE, carried, offset
from seamwright.form.surface import Surface


def kept(before, after):
    """Least share that triangles keep of their area, turned over negative, and edges of their length."""
    a, b = area_vectors(before), area_vectors(after)
    return ((a * b).sum(axis=1) / (a * a).sum(axis=1)).min(), (after.edge_lengths / before.edge_lengths).min()


@pytest.mark.parametrize("distance", [0.02, -0.02])
def test_spheres_and_cylinders_change_by_the_ratio_of_their_radii(distance):
    ball = Surface(*icosphere(3, 0.3))
    moved = offset(ball, distance)
    assert moved.capped == 0
    np.testing.assert_allclose(np.linalg.norm(moved.surface.points, axis=1), 0.3 + distance, rtol=2e-6)
    assert total_area(moved.surface) / total_area(ball) == pytest.approx((1 + distance / 0.3) ** 2, rel=1e-4)
    pipe = Surface(*cylinder(0.1, 0.4, 40))
    moved = offset(pipe, distance)
    np.testing.assert_allclose(moved.surface.points, pipe.points * [1 + distance / 0.1, 1 + distance / 0.1, 1], atol=1e-12)


@pytest.mark.parametrize("distance", [0.03, -0.03])
def test_a_torus_gets_a_thicker_or_thinner_tube(distance):
    # Steiner's formula for parallel surfaces: area 4 pi^2 R (r + d), since the mean curvature integrates to 2 pi^2 R
    moved = offset(Surface(*torus(0.5, 0.15, 120, 60)), distance)
    assert moved.capped == 0
    assert total_area(moved.surface) == pytest.approx(4 * np.pi**2 * 0.5 * (0.15 + distance), rel=3e-3)


@pytest.mark.parametrize("distance", [0.05, -0.05])
def test_flat_faces_stay_flat_and_meet_at_a_mitre(distance):
    points, quads = cube(1.0, 5)
    moved = offset(Surface(points, split_quads(quads)), distance)
    edge = np.isclose(np.abs(points), 0.5)
    np.testing.assert_allclose(np.abs(moved.surface.points[edge]), 0.5 + distance, atol=1e-6)
    assert moved.capped == 0
    flat = Surface(*disk(0.2, 6))
    np.testing.assert_allclose(offset(flat, distance).surface.points, flat.points + [0, 0, distance], atol=1e-15)


def test_no_triangle_turns_over_where_the_form_is_too_finely_curved():
    whole = offset(Surface(*icosphere(3, 0.1)), -0.15)
    assert whole.capped == 1
    points, faces = icosphere(4, 0.3)
    rough = Surface(noisy(points, 0.004), faces)
    for distance in (0.03, -0.03):  # mesh noise of a fifth of an edge
        found = offset(rough, distance)
        area, edge = kept(rough, found.surface)
        assert area >= LEAST_AREA and edge >= LEAST_EDGE
        assert 0 < found.capped <= 1
    # a dent of 15 mm radius in a ball of 300 mm: only there can goods not lie 20 mm outside
    points, faces = icosphere(5, 0.3)
    dent = points * (1 - 0.1 * np.exp(-((np.linalg.norm(points - [0, 0, 0.3], axis=1) / 0.03) ** 2)))[:, None]
    found = offset(Surface(dent, faces), 0.02)
    assert 0 < found.capped < 0.05
    assert np.linalg.norm(found.worst - [0, 0, 0.3]) < 0.05
    far = points[:, 2] < 0.2
    np.testing.assert_allclose(np.linalg.norm(found.surface.points[far], axis=1), 0.32, rtol=1e-4)


def test_points_keep_their_place_in_their_triangles():
    here = Surface(*cap(1.0, 8))
    there = Surface(here.points @ np.diag([2.0, 3.0, 0.5]) + [0.1, 0, 0], here.triangles)  # affine, so exact everywhere
    middles = here.points[here.triangles].mean(axis=1)
    count = len(here.points)
    fine = Surface(np.concatenate([here.points, middles]), np.concatenate([
        np.column_stack([here.triangles[:, k], here.triangles[:, (k + 1) % 3], count + np.arange(len(middles))])
        for k in range(3)]))
    source = np.tile(np.arange(len(middles)), 3)
    np.testing.assert_allclose(carried(fine, source, here, there), fine.points @ np.diag([2.0, 3.0, 0.5]) + [0.1, 0, 0],
                               atol=1e-12)
    assert carried(fine, source, here, here) is fine.points
