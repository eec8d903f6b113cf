"""Energies of our pieces by libigl's operators (Jacobson, Panozzo and others): LSCM, ARAP, symmetric Dirichlet, and SLIM.

The binding tells no energies, so they are summed from its gradients and areas; LSCM's also from its own quadratic form.
"""

import igl
import numpy as np
import pytest
from forms import cap, disk
from seamwright.fit.measure import areas, stretches
from seamwright.flat import flatten
from seamwright.form.surface import Surface

NONE = np.zeros(0, dtype=np.int64), np.zeros((0, 2), order="F")


def saddle():
    points, faces = disk(1.0, 10)
    return points * (1, 1, 0) + np.column_stack([0 * points[:, :2], 0.6 * (points[:, 0] ** 2 - points[:, 1] ** 2)]), faces


PIECES = {"cap of 70 degrees": cap(np.radians(70), 10), "hemisphere": cap(np.pi / 2, 10), "saddle": saddle()}


@pytest.fixture(params=PIECES, name="piece")
def any_piece(request):
    """(Surface, Flattening, its points and triangles as libigl takes them)."""
    surface = Surface(*PIECES[request.param])
    return surface, flatten(surface), np.asfortranarray(surface.points), np.asfortranarray(surface.triangles)


def singular_values(points, faces, flat):
    """((t, 2) length in the flat over length on the form, largest first, (t,) areas), by libigl."""
    gradient = igl.grad(points, faces) @ flat  # three blocks: x, y, z of every triangle
    jacobian = gradient.reshape(3, len(faces), 2).transpose(1, 2, 0)
    return np.linalg.svd(jacobian, compute_uv=False), igl.doublearea(points, faces) / 2


def test_energies_are_those_of_libigl(piece):
    surface, laid, points, faces = piece
    theirs, area = singular_values(points, faces, laid.flat)
    ours = 1 / (1 + stretches(surface.points, surface.triangles, laid.flat)[:, ::-1])
    np.testing.assert_allclose(areas(surface.points, surface.triangles), area, rtol=1e-9)
    np.testing.assert_allclose(ours, theirs, rtol=1e-9)
    # symmetric Dirichlet (Smith, Schaefer 2015) is the sum of s^2 + 1/s^2; ours counts half of it, from 0 on
    dirichlet = area @ (theirs**2 + theirs**-2.0).sum(axis=1) / area.sum()
    assert laid.energy == pytest.approx(dirichlet / 2 - 2, rel=1e-8)
    # LSCM (Levy and others 2002): the area of what is not conformal, by libigl's own quadratic form
    form = igl.lscm(points, faces, np.array([0, 5]), np.asfortranarray(laid.flat[[0, 5]]))[1]
    stacked = laid.flat.T.ravel()
    assert stacked @ (form @ stacked) == pytest.approx(area @ (ours[:, 0] - ours[:, 1]) ** 2, rel=1e-8)


def test_libigl_finds_nothing_less_strained(piece):
    surface, laid, points, faces = piece
    data = igl.slim_precompute(points, faces, np.asfortranarray(laid.flat), igl.MappingEnergyType.SYMMETRIC_DIRICHLET,
                               *NONE, 0.0)
    values, area = singular_values(points, faces, igl.slim_solve(data, 30))
    assert laid.energy <= (area @ (values**2 + values**-2.0).sum(axis=1) / area.sum() / 2 - 2) * (1 + 1e-4)
    free = igl.lscm(points, faces, np.array([0, 5]), np.asfortranarray(laid.flat[[0, 5]]))[0]  # the most conformal one
    values = singular_values(points, faces, free)[0]
    ours = singular_values(points, faces, laid.flat)[0]
    assert area @ (values[:, 0] - values[:, 1]) ** 2 < area @ (ours[:, 0] - ours[:, 1]) ** 2
    scale = np.sqrt(area @ (values**-2.0).sum(axis=1) / (area @ (values**2).sum(axis=1))) ** 0.5
    assert laid.energy < area @ ((scale * values) ** 2 + (scale * values) ** -2.0).sum(axis=1) / area.sum() / 2 - 2


def test_arap_shrinks_and_the_goods_would_notice(piece):
    """ARAP (Liu and others 2008) has less of its own energy than our piece, and more area lost to it."""
    surface, laid, points, faces = piece
    data = igl.slim_precompute(points, faces, np.asfortranarray(laid.flat), igl.MappingEnergyType.ARAP, *NONE, 0.0)
    theirs, area = singular_values(points, faces, igl.slim_solve(data, 30))
    ours = singular_values(points, faces, laid.flat)[0]
    assert area @ ((theirs - 1) ** 2).sum(axis=1) < area @ ((ours - 1) ** 2).sum(axis=1)
    assert area @ theirs.prod(axis=1) < area @ ours.prod(axis=1)
