"""Angles, areas, normals, genus: exact where exact values exist, second order where the surface is only sampled."""

import numpy as np
import pytest
from forms import cap, cube, cylinder, disk, ellipsoid, icosphere, together, torus, two_holes
from seamwright.form import measure
from seamwright.form.form import Form
from seamwright.form.surface import Surface


def order(errors):
    """Order of convergence from errors at halved edge lengths."""
    return np.log2(np.array(errors[:-1]) / np.array(errors[1:]))


def test_sphere_area_and_volume_converge_with_second_order():
    spheres = [Surface(*icosphere(level)) for level in (2, 3, 4, 5)]
    assert order([4 * np.pi - measure.total_area(s) for s in spheres])[-1] == pytest.approx(2, abs=0.02)
    assert order([4 * np.pi / 3 - measure.volume(s) for s in spheres])[-1] == pytest.approx(2, abs=0.02)


def test_torus_area_converges_to_pappus():
    """4 pi^2 R r (Pappus)."""
    errors = [abs(measure.total_area(Surface(*torus(1.0, 0.4, 2 * n, n))) - 4 * np.pi**2 * 0.4) for n in (20, 40, 80)]
    assert order(errors)[-1] == pytest.approx(2, abs=0.02)


def test_angles_of_a_triangle_add_to_pi_even_without_area():
    points = np.array([(0, 0, 0), (1, 0, 0), (0, 1, 0), (0.25, 0, 0), (1e-9, 1e-12, 0)])
    surface = Surface(points, [(0, 1, 2), (0, 1, 3), (0, 4, 1), (0, 0, 1)])
    angles = measure.angles(surface)
    assert np.allclose(angles.sum(axis=1), np.pi, rtol=0, atol=1e-14)
    assert np.allclose(angles[0], (np.pi / 2, np.pi / 4, np.pi / 4)) and np.allclose(angles[1], (0, 0, np.pi))


def test_angles_match_the_law_of_cosines():
    surface = Surface(*ellipsoid(1.0, 0.7, 0.4, 2))
    p = surface.points[surface.triangles]
    a, b, c = (np.linalg.norm(p[:, (k + 1) % 3] - p[:, (k + 2) % 3], axis=1) for k in range(3))
    assert np.allclose(measure.angles(surface)[:, 0], np.arccos((b**2 + c**2 - a**2) / (2 * b * c)), atol=1e-12)


def test_vertex_areas_share_the_whole():
    surface = Surface(*ellipsoid(1.0, 0.7, 0.4, 3))
    shares = measure.vertex_areas(surface)
    assert shares.min() > 0 and shares.sum() == pytest.approx(measure.total_area(surface), rel=1e-13)


def test_normals_of_a_sphere_point_outward():
    points, faces = icosphere(4)
    surface = Surface(points, faces)
    assert np.linalg.norm(measure.vertex_normals(surface) - points, axis=1).max() < 1e-2
    middles = measure.unit(points[faces].mean(axis=1))
    assert np.einsum("ij,ij->i", measure.triangle_normals(surface), middles).min() > 0.999


def test_defects_of_a_cube_sit_in_its_corners():
    form = Form(*cube(1.0, 4))
    defects = measure.angle_defects(form.surface)
    corners = np.abs(form.points).min(axis=1) > 0.4999
    assert corners.sum() == 8 and np.allclose(defects[corners], np.pi / 2) and np.allclose(defects[~corners], 0, atol=1e-12)


def test_open_edges_count_their_turn():
    n = 6
    surface = Surface(*disk(1.0, n))
    rim = measure.open_points(surface)
    assert rim.sum() == 6 * n and np.allclose(measure.angle_defects(surface)[rim], 2 * np.pi / (6 * n))


@pytest.mark.parametrize("form, expected", [
    (icosphere(2), [0]), (torus(1.0, 0.3, 20, 10), [1]), (two_holes(48), [2]),
    (cylinder(1.0, 2.0, 12), [0]), (cap(1.0, 4), [0]),
    (together(torus(1.0, 0.3, 20, 10), icosphere(1), cap(1.0, 3)), [1, 0, 0]),
], ids=["sphere", "torus", "two holes", "tube", "cap", "three parts"])
def test_genus(form, expected):
    assert measure.genus(Form(*form).surface) == expected


def test_genus_does_not_mind_holes():
    points, faces = torus(1.0, 0.3, 20, 10)
    surface = Form(points, np.delete(faces, [0, 100, 200], axis=0)).surface
    assert measure.genus(surface) == [1] and len(surface.boundary_loops) == 3
