"""Gauss-Bonnet, to rounding: curvature inside plus turn along open edges is 2 pi times the Euler characteristic.

Source: the theorem (Gauss 1827, Bonnet 1848; Descartes for polyhedra), which angle defects obey exactly on any mesh.
"""

import numpy as np
import pytest
from forms import (
    cap,
    cube,
    cylinder,
    disk,
    dumbbell,
    ellipsoid,
    frustum,
    icosphere,
    noisy,
    starfish,
    together,
    torus,
    two_holes,
)
from seamwright.form.form import Form
from seamwright.form.measure import angle_defects, genus, open_points, vertex_areas
from seamwright.form.surface import Surface

FORMS = {
    "sphere": (icosphere(4), 2), "ellipsoid": (ellipsoid(3.0, 1.0, 0.2, 4), 2), "cube": (cube(1.0, 6), 2),
    "starfish": (starfish(), 2), "dumbbell": (dumbbell(), 2), "closed tube": (cylinder(1.0, 2.0, 30, closed=True), 2),
    "torus": (torus(1.0, 0.3, 60, 24), 0), "two holes": (two_holes(48), -2), "tube": (cylinder(1.0, 2.0, 30), 0),
    "cone": (frustum(1.0, 0.2, 1.0, 24), 0), "cap": (cap(2.0, 12), 1), "disk": (disk(1.0, 12), 1),
    "three parts": (together(icosphere(2), torus(1.0, 0.3, 20, 10), cap(1.0, 5)), 3),
    "noise": ((noisy(icosphere(3)[0], 0.05), icosphere(3)[1]), 2),
}


@pytest.mark.parametrize("name", FORMS)
def test_total_curvature(name):
    form, euler = FORMS[name]
    surface = Form(*form).surface
    total = angle_defects(surface).sum()
    assert surface.euler == euler
    assert total == pytest.approx(2 * np.pi * euler, abs=1e-13 * len(surface.points))
    assert euler == sum(2 - 2 * g for g in genus(surface)) - len(surface.boundary_loops)


@pytest.mark.parametrize("polar", [0.5, 1.0, 2.0])
def test_cap_splits_into_curvature_and_turn(polar):
    """Inside a cap of the unit sphere lies 2 pi (1 - cos a), along its edge 2 pi cos a (geodesic curvature cot a)."""
    errors = []
    for n in (12, 24, 48):
        surface = Surface(*cap(polar, n))
        defects, rim = angle_defects(surface), open_points(surface)
        inner = vertex_areas(surface)[rim].sum()  # the strip that belongs to the rim's points; curvature 1
        errors.append(abs(defects[~rim].sum() + inner - 2 * np.pi * (1 - np.cos(polar))))
    assert errors[2] < errors[0] / 8


def test_outer_half_of_a_torus_holds_four_pi():
    """The parts of positive and negative curvature hold 4 pi and -4 pi (Gauss map: each covers the sphere once)."""
    errors = []
    for n in (12, 24, 48):
        surface = Surface(*torus(1.0, 0.3, 3 * n, n))
        outer = np.hypot(*surface.points[:, :2].T) > 1 + 1e-9
        errors.append(abs(angle_defects(surface)[outer].sum() - 4 * np.pi))
    assert errors[2] < errors[0] / 10
