"""The spherical cap, whose conformal flattening and whose least possible stretch are known in closed form."""

import numpy as np
import pytest
from forms import cap
from seamwright.fit.measure import areas, stretches
from seamwright.flat import flatten
from seamwright.flat.flatten import disk_loop
from seamwright.flat.rest import Rest
from seamwright.flat.start import conformal_start
from seamwright.form.surface import Surface


def log_scale_error(polar, rings):
    """Largest error of the log scale against that of the stereographic projection.

    With no change of scale at the rim: u = ln((1 + cos(rim)) / (1 + cos(theta))) (do Carmo 1976, section 4-2).
    """
    surface = Surface(*cap(polar, rings))
    _, log_scale = conformal_start(surface, Rest(surface), disk_loop(surface))
    return np.abs(log_scale - np.log((1 + np.cos(polar)) / (1 + surface.points[:, 2]))).max()


def test_the_log_scale_tends_to_that_of_the_stereographic_projection_to_second_order():
    errors = np.array([log_scale_error(np.pi / 3, rings) for rings in (10, 20, 40)])
    assert (np.log2(errors[:-1] / errors[1:]) > 1.8).all()
    assert errors[-1] < 2e-4


@pytest.mark.parametrize("degrees, bound", [(30, 1.0472), (45, 1.1107), (60, 1.2092), (90, 1.5708)])
def test_no_flattening_beats_the_bound_on_caps(degrees, bound):
    # largest over smallest stretch of ANY map of a cap is at least a / sin a (Milnor 1969)
    polar = np.radians(degrees)
    surface = Surface(*cap(polar, 24))
    stretch = 1 + stretches(surface.points, surface.triangles, flatten(surface).flat)
    assert bound == pytest.approx(polar / np.sin(polar), abs=1e-4)
    assert stretch.max() / stretch.min() > bound * (1 - 0.001)   # the mesh is a little flatter than the sphere


@pytest.mark.parametrize("degrees, conformal, equidistant",
                         [(30, 1.00080, 1.00026), (60, 1.01379, 1.00417), (90, 1.08012, 1.02106)])
def test_the_least_stretch_map_lies_between_the_two_named_projections(degrees, conformal, equidistant):
    # L2 stretch of Sander et al. 2001 of the stereographic and the azimuthal equidistant map, in closed form
    surface = Surface(*cap(np.radians(degrees), 24))
    flat = flatten(surface).flat
    area = areas(surface.points, surface.triangles)
    stretch = 1 + stretches(surface.points, surface.triangles, flat)
    u, v = (flat[surface.triangles[:, k]] - flat[surface.triangles[:, 0]] for k in (1, 2))
    flat_area = 0.5 * (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]).sum()
    l2 = np.sqrt(area @ (stretch**2).sum(axis=1) / 2 / area.sum() * flat_area / area.sum())
    assert 1 < l2 < conformal
    assert l2 == pytest.approx(equidistant, abs=0.5 * (conformal - equidistant))
