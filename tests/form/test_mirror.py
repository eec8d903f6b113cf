"""Planes of symmetry where a form has them by construction, none where it has none, and fields seen in the mirror."""

import numpy as np
import pytest
from forms import cube, cylinder, disk, dumbbell, ellipsoid, frustum, icosphere, limbs, noisy, split_quads, starfish, torus
from scipy.spatial import cKDTree
from seamwright.form.form import Form
from seamwright.form.measure import total_area, triangle_normals, vertex_normals
from seamwright.form.mirror import NEAR, Plane, mirrored_points, planes, reflection
from seamwright.form.nearest import Nearest, closest_on_triangles
from seamwright.form.surface import Surface

TURN = np.linalg.qr(np.random.default_rng(5).normal(size=(3, 3)))[0]
TURN *= np.linalg.det(TURN)
PAIRED = [(0.9, 0.5, 0.3), (-0.9, 0.5, 0.3), (0, -0.8, 0.2), (0.4, -0.2, 1.0), (-0.4, -0.2, 1.0)]
ONE_PLANE = limbs(PAIRED, 0.25, 0.12, 0.06, 48)
LOPSIDED = {
    "unequal limbs": limbs([(1, 0, 0), (-0.4, 0.9, 0), (-0.6, -0.8, 0.5), (0.2, 0.3, 0.9)], 0.2, 0.1, 0.05, 40),
    "one limb short": limbs([(0.9, 0.5, 0.3), (-0.8, 0.45, 0.27), (0, -0.8, 0.2), (0.2, 0.1, 0.9)], 0.25, 0.12, 0.06, 40),
}


def twisted_bar():
    """A flat bar turned about its length by a quarter: it looks the same from both ends, yet has no mirror."""
    points, faces = cube(1.0, 16)
    angle = 0.5 * np.pi * points[:, 0]
    y, z = points[:, 1], 0.4 * points[:, 2]
    cos, sin = np.cos(angle), np.sin(angle)
    return np.column_stack([2 * points[:, 0], y * cos - z * sin, y * sin + z * cos]), faces


LOPSIDED["twisted bar"] = twisted_bar()


def crowded(points, strength):
    """Points of the unit sphere drawn towards +x: a Moebius map of the sphere onto itself."""
    x = points[:, :1]
    away = 1 + strength**2 + 2 * strength * x
    return ((1 - strength**2) * points + 2 * strength * (1 + strength * x) * np.eye(3)[:1]) / away


def surface_of(form):
    return Form(*form).surface


def turned_off(plane, normal):
    """Radians between a plane's normal and a line."""
    return np.arccos(np.clip(abs(plane.normal @ normal), 0, 1))


def test_a_turned_ellipsoid_has_its_three_planes():
    points, faces = ellipsoid(1.0, 0.7, 0.5, 4)
    found = planes(Surface(points @ TURN.T + [3.0, -1.0, 2.0], faces), most=3)
    assert len(found) == 3
    for axis in TURN.T:
        assert min(turned_off(plane, axis) for plane in found) < 1e-3
    for plane in found:
        assert abs((plane.point - [3.0, -1.0, 2.0]) @ plane.normal) < 1e-3
        assert abs(np.linalg.norm(plane.normal) - 1) < 1e-12


@pytest.mark.parametrize("amount", [0.0, 0.001])
def test_the_only_plane_is_found_wherever_the_form_stands(amount):
    points, faces = ONE_PLANE
    surface = surface_of((noisy(points, amount) @ TURN.T + 1.0, faces))
    found = planes(surface, most=3)
    assert len(found) == 1
    assert turned_off(found[0], TURN[:, 0]) < 3e-3
    assert abs((found[0].point - 1.0) @ found[0].normal) < 3e-3
    assert found[0].error < NEAR * np.sqrt(total_area(surface))


def test_unequal_triangulation_does_not_matter():
    sphere, faces = icosphere(4)
    sphere = crowded(sphere, 0.5)
    length = np.linalg.norm(sphere[faces[:, 0]] - sphere[faces[:, 1]], axis=1)
    assert np.allclose(np.linalg.norm(sphere, axis=1), 1) and length.max() > 7 * length.min()
    found = planes(Surface(sphere * (1.0, 0.7, 0.5), faces), most=3)
    assert sorted(int(np.abs(plane.normal).argmax()) for plane in found) == [0, 1, 2]
    assert max(turned_off(plane, np.eye(3)[np.abs(plane.normal).argmax()]) for plane in found) < 5e-3


def test_stray_points_do_no_harm():
    surface = surface_of(ONE_PLANE)
    normals = vertex_normals(surface)
    stray = [100, 700, 1400]
    points = surface.points.copy()
    points[stray] += 0.1 * normals[stray]
    found = planes(Surface(points, surface.triangles))
    assert len(found) == 1 and turned_off(found[0], np.eye(3)[0]) < 3e-3


def test_diagonals_of_bent_faces_do_not_hide_the_plane():
    points, quads = cube(1.0, 4)
    points = points * (1.3, 1.0, 0.8)
    bent = points * (1 + 0.3 * np.sin(7 * np.abs(points[:, :1])) * np.cos(5 * points[:, 1:2]) + 0.1 * points[:, 2:])
    surface = Surface(bent, split_quads(quads))
    middles, normals = bent[surface.triangles].mean(axis=1), triangle_normals(surface)
    off = Nearest(surface).places(middles * (-1, 1, 1), normals * (-1, 1, 1))[2]
    assert np.quantile(off, 0.9) > NEAR * np.sqrt(total_area(surface))
    found = planes(surface, most=3)
    assert len(found) == 2 and turned_off(found[0], np.eye(3)[0]) < 5e-3


@pytest.mark.parametrize("form", LOPSIDED.values(), ids=LOPSIDED)
def test_no_plane_on_lopsided_forms(form):
    assert planes(surface_of(form), most=3) == []


def test_a_bump_on_one_side_breaks_the_plane():
    points, faces = ellipsoid(1.0, 0.7, 0.5, 4)
    bump = np.exp(-((points - [0.7, 0.35, 0.25]) ** 2).sum(axis=1) / 0.04)
    assert planes(Surface(points * (1 + 0.15 * bump[:, None]), faces), most=3) == []


def test_a_starfish_keeps_one_upright_and_the_level_plane():
    found = planes(surface_of(starfish(64)), most=5)
    limbs_at = np.arange(10) * np.pi / 5 + 0.1  # mirror planes run along the limbs, and between the limbs opposite
    across = np.column_stack([-np.sin(limbs_at), np.cos(limbs_at), 0 * limbs_at])
    assert len(found) == 2
    assert min(turned_off(found[0], normal) for normal in across) < 3e-3
    assert turned_off(found[1], np.eye(3)[2]) < 3e-3


@pytest.mark.parametrize("form", [torus(1.0, 0.3, 100, 40), icosphere(4), cube(1.0, 10), dumbbell(56)],
                         ids=["torus", "sphere", "cube", "dumbbell"])
def test_of_many_planes_three_at_right_angles_the_first_upright(form):
    found = planes(surface_of(form), most=5)
    assert len(found) == 3
    normals = np.array([plane.normal for plane in found])
    assert np.abs(normals @ normals.T - np.eye(3)).max() < 0.1
    assert abs(normals[0, 2]) < 1e-2 and abs(normals[0, 0]) > 0.9


def test_an_open_frustum_has_no_level_plane():
    found = planes(surface_of(frustum(1.0, 0.6, 1.0, 60)), most=3)
    assert len(found) == 2 and max(abs(plane.normal[2]) for plane in found) < 1e-2


def test_a_flat_disk_does_not_lie_in_its_own_mirror():
    found = planes(surface_of(disk(1.0, 12)), most=3)
    assert len(found) == 2 and max(abs(plane.normal[2]) for plane in found) < 1e-2


def test_the_same_form_gives_the_same_bytes():
    first, second = (planes(surface_of(torus(1.0, 0.3, 60, 24)), most=2) for _ in range(2))
    assert [(a.point.tobytes(), a.normal.tobytes(), a.error) for a in first] == [
        (b.point.tobytes(), b.normal.tobytes(), b.error) for b in second]


def test_a_mirrored_mesh_is_reflected_onto_itself_exactly():
    surface = surface_of(cube(1.0, 6))
    matrix = reflection(surface, Plane(np.zeros(3), np.array([1.0, 0, 0]), 0.0))
    assert np.allclose(matrix @ surface.points, surface.points * (-1, 1, 1), atol=1e-12)
    assert abs(matrix @ matrix - np.eye(len(surface.points))).max() < 1e-12


def test_the_plane_of_a_mirrored_mesh_is_right_to_rounding():
    points, faces = icosphere(3)
    points = points * (0.35 + points[:, :1] ** 2 + 0.25 * points[:, 2:])
    points = points @ TURN + [0.3, -2, 1]
    plane, = planes(Surface(points, faces))
    assert cKDTree(points).query(plane.mirrored(points))[0].max() < 1e-12


def test_reflecting_twice_gives_a_smooth_field_back_to_second_order():
    errors = []
    for level in (3, 4, 5):
        sphere, faces = icosphere(level)
        surface = Surface(crowded(sphere, 0.2) * (1.0, 0.7, 0.5), faces)
        matrix = reflection(surface, Plane(np.zeros(3), np.array([1.0, 0, 0]), 0.0))
        assert np.allclose(matrix.sum(axis=1), 1)
        field = np.sin(3 * surface.points[:, 0]) + surface.points[:, 1] ** 2
        mirrored = np.sin(-3 * surface.points[:, 0]) + surface.points[:, 1] ** 2
        errors.append([np.abs(matrix @ field - mirrored).max(), np.abs(matrix @ (matrix @ field) - field).max()])
    rates = np.log2(np.array(errors)[:-1] / np.array(errors)[1:])
    assert rates.min() > 1.7


def test_the_front_of_a_thin_plate_is_not_taken_for_its_back():
    sphere, faces = icosphere(4)
    surface = Surface(crowded(sphere, 0.3) * (1.0, 1.0, 0.01), faces)
    normals = vertex_normals(surface)
    flat = np.abs(normals[:, 2]) > 0.9
    triangle, _ = mirrored_points(surface, Plane(np.zeros(3), np.array([1.0, 0, 0]), 0.0))
    assert (triangle_normals(surface)[triangle[flat], 2] * normals[flat, 2] > -1e-6).all()  # 0 on the rim


@pytest.mark.parametrize("form", [cylinder(1.0, 3.0, 40, rings=1, closed=True), cube(1.0, 1), ONE_PLANE, twisted_bar()],
                         ids=["needles", "box", "limbs", "bar"])
def test_nearest_places_match_a_search_of_every_triangle(form):
    surface = surface_of(form)
    rng = np.random.default_rng(2)
    chosen = rng.integers(len(surface.triangles), size=200)
    normals = triangle_normals(surface)[chosen]
    points = np.einsum("kc,kcx->kx", rng.dirichlet(np.ones(3), size=200), surface.points[surface.triangles[chosen]])
    points += 0.01 * normals
    triangle, share, gap = Nearest(surface).places(points, normals)
    found = np.einsum("kc,kcx->kx", share, surface.points[surface.triangles[triangle]])
    assert np.allclose(np.linalg.norm(points - found, axis=1), gap) and (share >= 0).all() and np.allclose(share.sum(1), 1)
    corners = surface.points[surface.triangles]
    for point, normal, reached in zip(points, normals, gap, strict=True):
        facing = triangle_normals(surface) @ normal >= 0
        every = closest_on_triangles(np.broadcast_to(point, (len(corners), 3)), corners)[1]
        assert reached <= every[facing].min() + 1e-12


def test_no_point_of_a_triangle_is_nearer_than_the_closest():
    rng = np.random.default_rng(3)
    corners, points = rng.normal(size=(300, 3, 3)), 1.5 * rng.normal(size=(300, 3))
    corners[:20, 2] = 0.5 * (corners[:20, 0] + corners[:20, 1])  # without area
    share, gap = closest_on_triangles(points, corners)
    assert (share >= 0).all() and np.allclose(share.sum(axis=1), 1)
    grid = np.array([(i, j, 24 - i - j) for i in range(25) for j in range(25 - i)]) / 24
    others = np.linalg.norm(points[:, None] - np.einsum("gc,kcx->kgx", grid, corners), axis=2).min(axis=1)
    longest = np.linalg.norm(corners - np.roll(corners, 1, axis=1), axis=2).max(axis=1)
    assert (gap <= others + 1e-9).all() and (gap >= others - longest / 24).all()
