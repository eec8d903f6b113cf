"""The log scale of spherical caps against stereographic projection, second order in the edge length.

Source: stereographic projection is conformal and flattens a cap of polar radius a with the length ratio, form over flat,
exp(u) = (1 + cos theta) / (1 + cos a), 1 along the edge; so u solves -Laplace u = 1 there (do Carmo 1976, 4.2).
What limits the order: curvature spread by `smoothed_defects` over a fixed share of the form keeps second order inside a
closed sphere, but on an open cap the half ring of curvature at the open points, which bears no load, is missed as far
inside as the curvature is spread: first order, of size (edge length) x (share), gone as the share goes to 0.
"""

import numpy as np
import pytest
from forms import cap, icosphere
from seamwright.form.laplacian import smoothed_defects
from seamwright.form.surface import Surface
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.energy import evaluate
from seamwright.seams.level import Level

LOADS = {
    "true curvature": lambda surface: Level(surface, np.zeros(len(surface.points))).mass,
    "angle defects": lambda surface: smoothed_defects(surface, 1e-6),
    "defects spread": smoothed_defects,
}
ANGLES = {"half": np.pi / 2, "small": 1.0, "large": 2.0}


def turned(points):
    """Points turned so that no symmetry plane of the mesh is level."""
    x, y, z = np.linalg.qr(np.random.default_rng(4).normal(size=(3, 3)))[0]
    return points @ np.column_stack([x, y, z])


def errors_of(surfaces, load, angle):
    """Largest error of u within the cap on every surface, the cap's edge cut at its height."""
    errors = []
    for surface in surfaces:
        level = Level(surface, LOADS[load](surface))
        height = surface.points[:, 2] - np.cos(angle) + 1e-12  # points on the edge of an open cap count as inside
        u = evaluate(level, cut_by_fields(surface, np.column_stack([height, -height])), 0.0, "square", gradient=False).u
        truth = np.log((1 + surface.points[:, 2]) / (1 + np.cos(angle)))
        errors.append(np.abs(u - truth)[height > 0].max())
    return np.array(errors)


def order(errors):
    return np.log2(errors[:-1] / errors[1:])


@pytest.mark.parametrize("angle", ANGLES)
@pytest.mark.parametrize("load", ["angle defects", "true curvature"])
def test_cap_cut_from_a_sphere(load, angle):
    surfaces = [Surface(turned(points), faces) for points, faces in (icosphere(k) for k in (3, 4, 5))]
    errors = errors_of(surfaces, load, ANGLES[angle])
    assert errors[-1] < 3e-4
    assert (order(errors) > 1.7).all()  # h^2 log h: linear elements in the largest norm (Scott 1976), cut faces of any shape


def test_spreading_the_curvature_costs_nothing_on_the_sphere():
    surfaces = [Surface(turned(points), faces) for points, faces in (icosphere(k) for k in (3, 4, 5))]
    errors = errors_of(surfaces, "defects spread", np.pi / 2)
    assert errors[-1] < 1e-4
    assert (order(errors) > 1.9).all()


@pytest.mark.parametrize("angle", ANGLES)
@pytest.mark.parametrize("load", ["angle defects", "true curvature"])
def test_open_cap(load, angle):
    surfaces = [Surface(*cap(ANGLES[angle], rings)) for rings in (10, 20, 40)]
    errors = errors_of(surfaces, load, ANGLES[angle])
    assert errors[-1] < 5e-4
    assert (order(errors) > 1.9).all()


def test_spreading_on_an_open_cap_is_first_order():
    surfaces = [Surface(*cap(1.0, rings)) for rings in (20, 40, 80)]
    errors = errors_of(surfaces, "defects spread", 1.0)
    assert errors[0] < 1e-3  # a thousandth of stretch at the default share
    assert (order(errors) > 0.5).all()
