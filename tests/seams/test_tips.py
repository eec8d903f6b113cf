"""Tips of forms whose tips are known; the basins against a plain merge tree."""

import numpy as np
import pytest
from forms import cap, cube, cylinder, disk, dumbbell, ellipsoid, icosphere, limbs, noisy, starfish, together, torus
from seamwright.form.form import Form
from seamwright.form.laplacian import cotangent_laplacian, smoothed_defects
from seamwright.form.measure import angle_defects, open_points, vertex_areas
from seamwright.seams.tips import EVEN, PERSISTENCE, curvature_potential, tips

ENDS = np.array([(1, 0, 0), (-0.6, 0.8, 0), (-0.6, -0.8, 0.3)])
FIVE = np.arange(5) * 2 * np.pi / 5 + 0.1
KNOWN = {  # where the tips are, and how near
    "sphere": (icosphere(4), [], 0),
    "rough sphere": ((noisy(icosphere(4)[0], 0.01), icosphere(4)[1]), [], 0),
    "torus: a ridge all around": (torus(1.0, 0.4, 60, 30), [], 0),
    "drum: two rims": (cylinder(0.3, 2.0, 30, closed=True), [], 0),
    "tube": (cylinder(0.3, 2.0, 30), [], 0), "cap": (cap(1.4, 20), [], 0), "flat": (disk(1.0, 12), [], 0),
    "egg": (ellipsoid(1.0, 0.5, 0.5, 4), [(1, 0, 0), (-1, 0, 0)], 1e-9),
    "cube": (cube(1.0, 12), [(x, y, z) for x in (-0.5, 0.5) for y in (-0.5, 0.5) for z in (-0.5, 0.5)], 1e-9),
    "dumbbell": (dumbbell(40), [(1.2, 0, 0), (-1.2, 0, 0)], 0.08),
    "limbs": (limbs(ENDS, 0.3, 0.2, 0.05, 40), ENDS * (1 + 0.2 / np.linalg.norm(ENDS, axis=1, keepdims=True)), 0.1),
    "starfish": (starfish(48), 1.12 * np.column_stack([np.cos(FIVE), np.sin(FIVE), 0 * FIVE]), 0.06),
    "a ball beside a needle": (together(icosphere(3), ellipsoid(2.0, 0.3, 0.3, 3)), [(2, 0, 0), (-2, 0, 0)], 1e-9),
}


@pytest.mark.parametrize("name", KNOWN)
def test_known_tips(name):
    form, places, near = KNOWN[name]
    surface = Form(*form).surface
    found = surface.points[tips(surface)]
    assert len(found) == len(places)
    for place in places:
        assert np.linalg.norm(found - place, axis=1).min() <= near


@pytest.mark.parametrize("name", ["egg", "limbs", "a ball beside a needle", "cap"])
def test_the_potential_solves_its_equation(name):
    surface = Form(*KNOWN[name][0]).surface
    load = np.where(open_points(surface), 0, angle_defects(surface))
    part = np.empty(len(load), dtype=int)
    part[surface.triangles] = surface.triangle_components[1][:, None]
    mass = vertex_areas(surface)
    mean = np.bincount(part, load) / np.bincount(part, mass)
    rest = cotangent_laplacian(surface) @ curvature_potential(surface) - (load - mean[part] * mass)
    assert np.abs(rest).max() < 1e-9


def slow_lasting(surface, values):
    """{maximum: how far it rises over the pass to a higher one}, by flooding downward point by point."""
    around = {}
    for a, b in surface.edges.tolist():
        around.setdefault(a, []).append(b)
        around.setdefault(b, []).append(a)
    top, lasting = {}, {}

    def find(point):
        while top[point] != point:
            point = top[point]
        return point

    for point in sorted(range(len(values)), key=lambda p: (-values[p], -p)):
        tops = sorted({find(q) for q in around[point] if q in top}, key=lambda p: (-values[p], -p))
        if not tops:
            top[point] = point
            continue
        top[point] = tops[0]
        for low in tops[1:]:
            lasting[low] = values[low] - values[point]
            top[low] = tops[0]
    for point in range(len(values)):
        if top[point] == point:
            lasting[point] = np.inf
    return lasting


@pytest.mark.parametrize("persistence", [0.1, 0.2, PERSISTENCE])
def test_basins_against_flooding(persistence):
    points, faces = limbs(ENDS, 0.3, 0.2, 0.05, 30)
    surface = Form(noisy(points, 0.004), faces).surface
    lasting = slow_lasting(surface, curvature_potential(surface, smoothed_defects(surface, EVEN)))
    expected = {point for point, height in lasting.items() if height >= persistence}
    assert set(tips(surface, persistence).tolist()) == expected
    assert len(expected) >= 3
