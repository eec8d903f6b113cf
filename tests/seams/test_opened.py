"""Cutting pieces open until every one is a disk."""

import numpy as np
import pytest
from forms import cap, cube, cylinder, disk, icosphere, together, torus, two_holes, wrapped_grid
from seamwright.form.form import Form
from seamwright.seams.network import Network
from seamwright.seams.opened import opened


def pierced(form, *points):
    """A form without the triangles around some points: a loop each."""
    at, faces = form
    return at, faces[~np.isin(faces, points).any(axis=1)]


FORMS = {
    "sphere": icosphere(3), "torus": torus(1.0, 0.4, 30, 16), "two holes": two_holes(26), "tube": cylinder(1.0, 2.0, 28),
    "long tube": cylinder(0.2, 2.0, 12), "cube": cube(1.0, 6), "three loops": pierced(icosphere(3), 100, 333, 500),
    "six loops": pierced(icosphere(3), 100, 200, 333, 400, 500, 600),
    "torus with two loops": pierced(torus(1.0, 0.4, 30, 16), 0, 250),
}


def network_of(form, seam=None):
    surface = form.surface
    seam = np.zeros(len(surface.edges), dtype=bool) if seam is None else seam
    return Network(surface, seam, np.arange(len(surface.triangles)))


def check_disks(network):
    for piece in range(network.pieces[0]):
        part = network.piece_surface(piece)[0]
        assert part.euler == 1 and len(part.boundary_loops) == 1 and part.triangle_components[0] == 1


@pytest.mark.parametrize("name", FORMS)
def test_one_piece_becomes_a_disk(name):
    network = opened(network_of(Form(*FORMS[name])))
    assert network.pieces[0] == 1
    check_disks(network)
    # nothing in vain: with any one chain sewn up again it is no disk
    for chain in network.chains:
        part = network.without(chain).piece_surface(0)[0]
        assert part.euler != 1 or len(part.boundary_loops) != 1


@pytest.mark.parametrize("name", FORMS)
def test_pieces_with_seams_already(name):
    """Two halves of each form, whatever they are: all disks, and what was a seam stays one."""
    form = Form(*FORMS[name])
    surface = form.surface
    side = surface.points[surface.triangles].mean(axis=1)[:, 0] > 0.013
    seam = ~surface.open_edges & (side[surface.edge_triangles[:, 0]] != side[surface.edge_triangles[:, 1]])
    before = network_of(form, seam)
    network = opened(before)
    assert network.pieces[0] == before.pieces[0]
    assert network.seam[seam].all()
    check_disks(network)


@pytest.mark.parametrize("form", [cylinder(1.0, 2.0, 28), cap(1.2, 8), disk(1.0, 5)])
def test_disks_stay(form):
    network = opened(network_of(Form(*form)))
    assert opened(network) is network  # nothing to do for what is open already
    if len(Form(*form).surface.boundary_loops) == 1:
        assert not network.seam.any()


def test_two_parts_at_once():
    form = Form(*together(icosphere(2), torus(1.0, 0.4, 20, 10)))
    network = opened(network_of(form))
    assert network.pieces[0] == 2
    check_disks(network)


@pytest.mark.parametrize("quads", [
    cube(1.0, 6), two_holes(26), (torus(1.0, 0.4, 30, 16)[0], wrapped_grid(30, 16)),
], ids=["cube", "two holes", "torus"])
def test_along_allowed_edges(quads):
    form = Form(*quads)
    assert form.diagonal.sum() == form.face_count
    network = opened(network_of(form), ~form.diagonal)
    check_disks(network)
    assert not network.seam[form.diagonal].any()


def test_a_tube_is_cut_along_its_shortest_way():
    """The only cut a tube needs is one line from end to end: at least the height, and here exactly it."""
    network = opened(network_of(Form(*cylinder(1.0, 2.0, 28))))
    assert network.length() == pytest.approx(2.0, rel=1e-12)


def test_a_torus_is_cut_along_its_shortest_loops():
    """Two loops cut a torus open; the shortest pair is the tube's and the inner rim's (edge paths of this mesh)."""
    around, across = 30, 16
    network = opened(network_of(Form(*torus(1.0, 0.4, around, across))))
    tube = across * 2 * 0.4 * np.sin(np.pi / across)
    rim = around * 2 * 0.6 * np.sin(np.pi / around)
    assert network.length() >= (tube + rim) * (1 - 1e-12)
    assert network.length() <= 1.25 * (tube + rim)
