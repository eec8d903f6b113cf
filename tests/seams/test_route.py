"""Seams along edges: only on the maker's own edges, every piece a disk, the mesh untouched."""

import numpy as np
import pytest
from forms import cube, cylinder, icosphere, starfish, torus, two_holes, wrapped_grid
from parted import cells
from seamwright.form.form import Form
from seamwright.form.laplacian import smoothed_defects
from seamwright.form.measure import total_area
from seamwright.seams.level import Level, scaled
from seamwright.seams.route import cut_along

FORMS = {
    "triangles": icosphere(3), "cube of quads": cube(1.0, 8), "two holes": two_holes(28),
    "torus of quads": (torus(1.0, 0.4, 36, 20)[0], wrapped_grid(36, 20)), "starfish": starfish(22),
    "closed tube with round ends of one face": cylinder(0.5, 2.0, 20, closed=True), "open tube": cylinder(1.0, 2.0, 28),
}


@pytest.fixture(params=FORMS, name="made")
def any_route(request):
    """(form, level, cut, network along edges, factor on lengths)."""
    form = Form(*FORMS[request.param])
    surface, factor = scaled(form.surface, total_area(form.surface))
    level = Level(surface, smoothed_defects(surface))
    cut = cells(level, 5)
    return form, level, cut, cut_along(level, cut, form.polygon, form.diagonal, 1 / factor), factor


def test_seams_lie_on_the_makers_edges(made):
    form, _, _, network, _ = made
    assert network.seam.any()
    assert not network.seam[form.diagonal].any()
    assert not network.seam[form.surface.open_edges].any()


def test_every_face_goes_whole_to_one_piece(made):
    form, _, _, network, _ = made
    for polygon in range(form.face_count):
        assert len(set(network.pieces[1][form.polygon == polygon])) == 1


def test_the_mesh_is_untouched(made):
    form, _, _, network, _ = made
    np.testing.assert_allclose(network.surface.points, form.points, rtol=0, atol=1e-14 * np.abs(form.points).max() * 100)
    np.testing.assert_array_equal(network.surface.triangles, form.triangles)
    np.testing.assert_array_equal(network.source, np.arange(len(form.triangles)))


def test_every_piece_is_a_disk(made):
    network = made[3]
    for piece in range(network.pieces[0]):
        part = network.piece_surface(piece)[0]
        assert part.euler == 1 and len(part.boundary_loops) == 1


def test_borders_follow_the_cut(made):
    """Along edges the seams stay within two edges of the smooth ones, save where pieces had to be cut open."""
    form, level, cut, network, factor = made
    surface = level.surface
    a, b = surface.edges[cut.edge].T
    smooth = surface.points[a] + cut.place[:, None] * (surface.points[b] - surface.points[a])
    sides = network.pieces[1][surface.edge_triangles]
    ends = surface.points[surface.edges[network.seam & (sides[:, 0] != sides[:, 1])]].mean(axis=1)
    gap = np.linalg.norm(ends[:, None] - smooth[None], axis=2).min(axis=1)
    widest = surface.edge_lengths[~form.diagonal].max()
    assert gap.max() < 2.5 * widest
