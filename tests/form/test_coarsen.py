"""Coarse proxies: manifold, of the form's own topology, near it in area, every point owned, whatever the form."""

import numpy as np
import pytest
from forms import cap, cube, cylinder, dumbbell, icosphere, limbs, noisy, starfish, torus, two_holes
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from seamwright.form.coarsen import coarsen, distances_along_edges, grow, grow_more, judge
from seamwright.form.form import Form
from seamwright.form.measure import angle_defects, angles, genus, open_points, total_area, vertex_areas
from seamwright.form.surface import Surface

THIN = limbs([(1, 0, 0), (-0.6, 0.8, 0), (-0.6, -0.8, 0.3)], 0.08, 0.03, 0.02, 150)
FORMS = {
    "sphere": icosphere(4), "cube": cube(1.0, 20), "starfish": starfish(72), "dumbbell": dumbbell(72), "thin limbs": THIN,
    "torus": torus(1.0, 0.3, 80, 30), "thin torus": torus(1.0, 0.05, 200, 10), "two holes": two_holes(60),
    "cap": cap(1.2, 24), "tube": cylinder(1.0, 2.0, 60), "thin tube": cylinder(0.05, 2.0, 12, rings=200),
    "ribbon": cylinder(1.0, 0.06, 600, rings=3),
    "noise": (noisy(icosphere(4)[0], 0.01), icosphere(4)[1]),
}


@pytest.fixture(params=FORMS, name="surface")
def any_surface(request):
    return Form(*FORMS[request.param]).surface


@pytest.mark.parametrize("count", [40, 150, 500])
def test_topology_is_the_forms_own(surface, count):
    coarse = coarsen(surface, count)
    assert coarse is not None
    proxy = coarse.surface
    assert np.bincount(proxy.triangle_edges.ravel()).max() <= 2
    assert proxy.euler == surface.euler and genus(proxy) == genus(surface)
    assert len(proxy.boundary_loops) == len(surface.boundary_loops) and proxy.triangle_components[0] == 1
    corners = Form(proxy.points, proxy.triangles)
    assert corners.surface.euler == surface.euler and not [s for s in corners.mended if "divided" in s or "turned over" in s]


def test_cells_are_connected_own_every_point_and_keep_their_seed(surface):
    coarse = coarsen(surface, 150)
    n = len(coarse.seeds)
    assert np.array_equal(coarse.owner[coarse.seeds], np.arange(n)) and np.array_equal(np.unique(coarse.owner), np.arange(n))
    assert np.array_equal(surface.points[coarse.seeds], coarse.surface.points)
    a, b = surface.edges[coarse.owner[surface.edges[:, 0]] == coarse.owner[surface.edges[:, 1]]].T
    m = len(surface.points)
    assert connected_components(coo_matrix((np.ones(len(a)), (a, b)), shape=(m, m)), directed=False)[0] == n


def test_curvature_and_area_are_gathered_whole(surface):
    coarse = coarsen(surface, 150)
    load = np.column_stack([angle_defects(surface), vertex_areas(surface)])
    gathered = coarse.gather(load)
    assert np.allclose(gathered.sum(axis=0), (2 * np.pi * surface.euler, total_area(surface)))
    assert np.array_equal(coarse.gather(load[:, 1]), gathered[:, 1]) and gathered[:, 1].min() > 0


def test_open_edges_keep_their_place():
    surface = Surface(*cap(1.2, 40))
    coarse = coarsen(surface, 300)
    assert open_points(surface)[coarse.seeds[open_points(coarse.surface)]].all()
    assert total_area(coarse.surface) == pytest.approx(total_area(surface), rel=0.01)


def test_area_tends_to_the_forms_with_the_count():
    surface = Surface(*icosphere(5))
    off = [1 - total_area(coarsen(surface, count).surface) / total_area(surface) for count in (100, 400, 1600)]
    assert off[0] < 0.06 and off[1] < off[0] / 3 and off[2] < off[1] / 3


def test_the_count_is_met_and_the_triangles_are_shapely():
    surface = Form(*starfish(100)).surface
    for count in (300, 1000):
        coarse = coarsen(surface, count)
        assert abs(len(coarse.seeds) - count) < 0.1 * count
        assert np.quantile(angles(coarse.surface).min(axis=1), 0.05) > np.radians(15)


def test_cells_end_at_creases():
    """On a cube hardly a coarse triangle lies across an edge: the area stays."""
    surface = Form(*cube(1.0, 30)).surface
    assert total_area(coarsen(surface, 400).surface) == pytest.approx(6, rel=0.02)


def test_none_when_it_would_take_half_the_points():
    surface = Surface(*icosphere(2))
    assert coarsen(surface, 81) is None and coarsen(surface, 80) is not None
    assert coarsen(Surface(*torus(1.0, 0.3, 5, 3)), 7) is None  # no torus can do with fewer than 7 points (Moebius 1861)


def test_same_seed_same_bytes_and_another_seed_another_proxy():
    surface = Form(*starfish(48)).surface
    one, two, other = coarsen(surface, 200, seed=5), coarsen(surface, 200, seed=5), coarsen(surface, 200, seed=6)
    assert one.owner.tobytes() == two.owner.tobytes() and one.surface.triangles.tobytes() == two.surface.triangles.tobytes()
    assert not np.array_equal(one.seeds, other.seeds)


def test_growing_more_is_growing_anew():
    surface = Form(*starfish(48)).surface
    graph = distances_along_edges(surface, 0.1)
    seeds = np.arange(0, len(surface.points), 60)
    owner, reach = grow(graph, seeds[:-9])
    owner, reach = grow_more(graph, owner, reach, seeds[-9:], len(seeds) - 9)
    whole_owner, whole_reach = grow(graph, seeds)
    assert np.allclose(reach, whole_reach, rtol=1e-12)
    assert (owner == whole_owner).mean() > 0.99


def test_faulty_cells_are_found():
    """Bands around a tube, halves of a sphere, a strip across a ribbon: none may stand."""
    tube = Surface(*cylinder(1.0, 3.0, 12, rings=9))
    assert judge(tube, np.minimum(np.arange(len(tube.points)) % 10 // 2, 4), 5)[0].tolist() == [0, 1, 2, 3, 4]
    ball = Surface(*icosphere(2))
    assert judge(ball, (ball.points[:, 2] > 0.01).astype(int), 2)[0].tolist() == [0, 1]
    thirds = (np.arctan2(ball.points[:, 1], ball.points[:, 0]) // (2 * np.pi / 3) + 2).astype(int)
    assert judge(ball, np.unique(thirds, return_inverse=True)[1].ravel(), len(np.unique(thirds)))[0].size


def test_interpolation_is_linear_and_stays_on_its_own_sheet(surface):
    coarse = coarsen(surface, 150)
    carry = coarse.interpolation(surface.points)
    weights = carry.toarray()
    assert weights.min() >= 0 and np.abs(weights.sum(axis=1) - 1).max() < 1e-12
    np.testing.assert_allclose(weights[coarse.seeds], np.eye(len(coarse.seeds)), atol=1e-9)  # coarse points keep their value
    landed = carry @ coarse.surface.points
    for point in range(0, len(surface.points), max(1, len(surface.points) // 60)):  # slow twin, one triangle at a time
        around = coarse.surface.triangles[(coarse.surface.triangles == coarse.owner[point]).any(axis=1)]
        off = np.linalg.norm(landed[point] - surface.points[point])
        for corners in coarse.surface.points[around]:
            share = np.linalg.lstsq((corners[1:] - corners[0]).T, surface.points[point] - corners[0], rcond=None)[0]
            if share.min() >= 0 and share.sum() <= 1:  # its foot lies inside: no nearer one was left
                assert off <= np.linalg.norm(corners[0] + share @ (corners[1:] - corners[0]) - surface.points[point]) + 1e-9
