"""Cloth whose yarns keep their length and shear freely becomes the Chebyshev net on the sphere; gores stretch as in theory.

Sources: the net from the pole solves the sine-Gordon equation (Chebyshev 1878); angles and lengths below were computed from
it for this project. Gores: closed forms of the sphere, computed for this project.
"""

import numpy as np
import pytest
from forms import cap
from seamwright.fit.goods import Goods
from seamwright.fit.measure import areas, measure, stretches, warp_weft_shear
from seamwright.fit.shape import relax_for_goods
from seamwright.flat import flatten
from seamwright.form.surface import Surface

TRELLIS = Goods(name="trellis", stretch_warp=(0.002, 0.002), stretch_weft=(0.002, 0.002), ease_in=(0.002, 0.002),
                shear=(1.3, 1.3))


@pytest.fixture(scope="module")
def hemisphere():
    """(Surface of a unit hemisphere about +z, flat (n, 2) in the trellis, its warp along y)."""
    surface = Surface(*cap(np.pi / 2, 24))
    return surface, relax_for_goods(surface, flatten(surface).flat, TRELLIS, wanted=(0, 1, 0)).flat


def test_shear_on_the_diagonal(hemisphere):
    surface, flat = hemisphere
    threads = warp_weft_shear(surface.points, surface.triangles, flat)
    middle = surface.points[surface.triangles].mean(axis=1)
    polar = np.degrees(np.arccos(middle[:, 2] / np.linalg.norm(middle, axis=1)))
    diagonal = np.abs(np.degrees(np.arctan2(middle[:, 1], middle[:, 0])) % 90 - 45) < 6
    assert np.abs(threads[:, :2]).max() < 0.01  # the yarns keep their length
    for at, shear in ((30, 7.5), (45, 16.1), (60, 26.9), (75, 39.3), (90, 52.4)):
        ring = diagonal & (np.abs(polar - at) < 2.5)
        assert ring.sum() >= 8
        assert np.degrees(np.abs(threads[ring, 2])).mean() == pytest.approx(shear, abs=1.5)


def test_the_blank_of_a_hemisphere(hemisphere):
    # a quarter of the circumference along the yarns, 1.387 radii on the bias
    surface, flat = hemisphere
    rim = surface.boundary_loops[0]
    reach = np.linalg.norm(flat[rim] - flat[surface.points[:, 2].argmax()], axis=1)
    angle = np.degrees(np.arctan2(surface.points[rim, 1], surface.points[rim, 0])) % 90
    assert reach[np.minimum(angle, 90 - angle) < 2].mean() == pytest.approx(np.pi / 2, rel=0.01)
    assert reach[np.abs(angle - 45) < 4].mean() == pytest.approx(1.387, rel=0.01)


def test_warp_and_weft_stretch_are_those_of_threads_measured_on_the_form(hemisphere):
    """A thread drawn in the flat, laid on the form triangle by triangle, is as much longer as the strain along it says."""
    surface, flat = hemisphere
    threads = warp_weft_shear(surface.points, surface.triangles, flat)
    places, form = flat[surface.triangles], surface.points[surface.triangles]
    for axis, column in ((1, 0), (0, 1)):  # warp along y, weft along x
        at = np.median(flat[:, 1 - axis]) + 0.3
        on_form = by_strain = 0.0
        for corners, raised, strain in zip(places, form, threads[:, column], strict=True):
            side = corners[:, 1 - axis] - at
            ends = [(corners[i] + s * (corners[j] - corners[i]), raised[i] + s * (raised[j] - raised[i]))
                    for i, j in ((0, 1), (1, 2), (2, 0)) if side[i] * side[j] < 0
                    for s in [side[i] / (side[i] - side[j])]]
            if len(ends) == 2:
                on_form += np.linalg.norm(ends[0][1] - ends[1][1])
                by_strain += (1 + strain) * np.linalg.norm(ends[0][0] - ends[1][0])
        assert on_form > 1
        assert by_strain == pytest.approx(on_form, rel=1e-12)


@pytest.mark.parametrize("count, edge, worst, l2", [
    (4, 1.1398, 1.4670, 1.01699), (6, 1.0654, 1.2955, 1.00759), (8, 1.0375, 1.2154, 1.00427), (12, 1.0169, 1.1394, 1.00190)])
def test_gores_drawn_with_half_width_k_cos_latitude(count, edge, worst, l2):
    """n gores of half-width (pi / n) cos(latitude): equal in area; their edge over a meridian, the stretch at their points
    k / 2 + sqrt(1 + k^2 / 4), and their texture stretch sqrt(1 + k^2 / 18) (Sander and others 2001)."""
    k = np.pi / count
    latitude, share = np.meshgrid(np.linspace(-np.pi / 2, np.pi / 2, 241), np.linspace(-1, 1, 41), indexing="ij")
    flat = np.column_stack([(k * share * np.cos(latitude)).ravel(), latitude.ravel()])
    points = np.column_stack([(np.cos(latitude) * np.cos(k * share)).ravel(), (np.cos(latitude) * np.sin(k * share)).ravel(),
                              np.sin(latitude).ravel()])
    i, j = (a.ravel() for a in np.meshgrid(np.arange(1, 239), np.arange(40), indexing="ij"))  # without the two points
    a, b = 41 * i + j, 41 * (i + 1) + j
    triangles = np.concatenate([np.column_stack([a, a + 1, b + 1]), np.column_stack([a, b + 1, b])])
    border = flat[40::41]
    assert np.linalg.norm(np.diff(border, axis=0), axis=1).sum() / np.pi == pytest.approx(edge, abs=1e-3)
    stretch, area = 1 + stretches(points, triangles, flat), areas(points, triangles)
    assert np.sqrt(area @ (stretch**2).sum(axis=1) / 2 / area.sum()) == pytest.approx(l2, abs=5e-4)
    assert worst == pytest.approx(k / 2 + np.sqrt(1 + k**2 / 4), abs=1e-4)
    assert stretch.max() == pytest.approx(worst, rel=0.01) and stretch.max() < worst  # the last row ends short of the point
    assert measure(points, triangles, flat, TRELLIS).stretch.max() == stretch.max() - 1
