"""The cotangent Laplacian against a plain twin and against functions whose Laplacian is known; smoothing keeps the total."""

import numpy as np
import pytest
from forms import cap, disk, ellipsoid, icosphere, noisy, starfish, torus
from scipy.sparse import csc_matrix, diags_array
from seamwright.errors import CoverError
from seamwright.form.form import Form
from seamwright.form.laplacian import Factor, cotangent_laplacian, edge_laplacian, smoothed_defects
from seamwright.form.measure import angle_defects, open_points, total_area, vertex_areas
from seamwright.form.surface import Surface


def plain_laplacian(surface):
    """Slow twin, corner by corner: half the cotangent of each angle on the edge across."""
    n = len(surface.points)
    matrix = np.zeros((n, n))
    for tri in surface.triangles:
        for k in range(3):
            i, j, o = tri[k], tri[(k + 1) % 3], tri[(k + 2) % 3]
            u, v = surface.points[i] - surface.points[o], surface.points[j] - surface.points[o]
            weight = 0.5 * (u @ v) / np.linalg.norm(np.cross(u, v))
            matrix[[i, j], [i, j]] += weight
            matrix[[i, j], [j, i]] -= weight
    return matrix


@pytest.mark.parametrize("form", [ellipsoid(1.0, 0.6, 0.3, 2), torus(1.0, 0.3, 12, 8), cap(1.2, 4)],
                         ids=["ellipsoid", "torus", "cap"])
def test_matches_the_plain_twin(form):
    surface = Surface(*form)
    matrix = cotangent_laplacian(surface)
    assert matrix.format == "csc" and np.allclose(matrix.toarray(), plain_laplacian(surface), atol=1e-12)


def test_symmetric_positive_semidefinite_with_the_constants_alone_as_kernel():
    points, faces = icosphere(2)
    matrix = cotangent_laplacian(Surface(noisy(points, 0.05), faces)).toarray()
    assert np.array_equal(matrix, matrix.T) and np.allclose(matrix.sum(axis=1), 0, atol=1e-12)
    values = np.linalg.eigvalsh(matrix)
    assert abs(values[0]) < 1e-10 and values[1] > 1e-3


def test_linear_functions_are_harmonic_in_the_plane():
    surface = Surface(noisy(disk(1.0, 8)[0], 0.01) * (1, 1, 0), disk(1.0, 8)[1])
    linear = surface.points @ (2.0, -3.0, 0.0) + 1
    inner = ~open_points(surface)
    assert np.abs((cotangent_laplacian(surface) @ linear)[inner]).max() < 1e-12
    assert linear @ cotangent_laplacian(surface) @ linear == pytest.approx(13 * total_area(surface), rel=1e-12)


def test_spherical_harmonics_converge_to_their_eigenvalues():
    """x y on the unit sphere is a harmonic of degree 2: energy over mass tends to 2 (2 + 1) = 6, with second order."""
    errors = []
    for level in (3, 4, 5):
        surface = Surface(*icosphere(level))
        f = surface.points[:, 0] * surface.points[:, 1]
        errors.append(abs(f @ cotangent_laplacian(surface) @ f / (f @ (vertex_areas(surface) * f)) - 6))
    assert np.log2(errors[1] / errors[2]) == pytest.approx(2, abs=0.1)


def test_a_triangle_without_area_stays_finite_and_positive():
    surface = Surface(np.array([(0, 0, 0), (2, 0, 0), (1, 0, 0), (1, 1, 0)], dtype=float), [(0, 1, 3), (1, 0, 2)])
    values = np.linalg.eigvalsh(cotangent_laplacian(surface).toarray())
    assert np.isfinite(values).all() and values[0] > -1e-9


def test_factor_solves_in_the_callers_order():
    rng = np.random.default_rng(3)
    surface = Surface(*ellipsoid(1.0, 0.6, 0.3, 3))
    matrix = cotangent_laplacian(surface) + diags_array(vertex_areas(surface))
    factor = Factor(matrix)
    for shape in ((len(surface.points),), (len(surface.points), 3)):
        answer = rng.normal(size=shape)
        assert np.allclose(factor.solve(matrix @ answer), answer, atol=1e-10)


def test_factor_refuses_what_it_cannot_solve():
    with pytest.raises(CoverError, match="not finite"):
        Factor(csc_matrix(np.array([[1.0, 0.0], [0.0, np.inf]])))
    with pytest.raises(CoverError, match="singular"):
        Factor(csc_matrix(np.array([[1.0, -1.0], [-1.0, 1.0]])))


def test_edge_weights_sum_where_two_triangles_share_an_edge():
    surface = Surface(*icosphere(0))
    matrix = edge_laplacian(surface, np.ones((20, 3))).toarray()
    assert np.array_equal(np.diag(matrix), np.full(12, 10.0)) and matrix.min() == -2


@pytest.mark.parametrize("form", [starfish(32), torus(1.0, 0.4, 30, 12)], ids=["starfish", "torus"])
def test_smoothing_keeps_the_total_curvature(form):
    surface = Form(*form).surface
    assert smoothed_defects(surface, 0.05).sum() == pytest.approx(2 * np.pi * surface.euler, abs=1e-9)


def test_smoothing_leaves_open_edges_without_a_load():
    surface = Surface(*cap(1.0, 12))
    inner = np.where(open_points(surface), 0, angle_defects(surface)).sum()
    assert smoothed_defects(surface).sum() == pytest.approx(inner, rel=1e-9)
    assert np.abs(smoothed_defects(Surface(*disk(1.0, 6)))).max() < 1e-12


def test_smoothing_calms_noise():
    """Points off by a tenth of an edge length scatter the curvature many times over; smoothed, it comes back near 1."""
    points, faces = icosphere(4)
    surface = Surface(noisy(points, 0.005), faces)
    share = vertex_areas(surface)
    rough = np.std(angle_defects(surface) / share)
    calm = np.std(smoothed_defects(surface, 0.1) / share)
    assert rough > 5 and calm < rough / 15 and calm < 0.35


def test_an_order_of_elimination_serves_again():
    surface = Form(*starfish(40)).surface
    matrix = cotangent_laplacian(surface) + diags_array(vertex_areas(surface))
    load = np.random.default_rng(4).normal(size=(len(surface.points), 2))
    first = Factor(matrix)
    order = first.order
    assert sorted(order.tolist()) == list(range(len(order)))
    again = Factor(matrix.tocsr()[order][:, order].tocsc(), ordered=True)
    np.testing.assert_allclose(again.solve(load[order]), first.solve(load)[order], rtol=1e-10, atol=1e-12)
    assert (again.order == np.arange(len(order))).all()  # it is taken as it comes
