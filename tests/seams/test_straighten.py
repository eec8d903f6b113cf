"""Seams along edges led straight: fewer turns, no leaps, disks and symmetry kept."""

import numpy as np
import pytest
from forms import icosphere, sheet, starfish, torus, wrapped_grid
from parted import cells
from seamwright.form.form import Form
from seamwright.form.mirror import Plane, planes
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.fields import from_labels
from seamwright.seams.ladder import Ladder
from seamwright.seams.network import Network, cut_through
from seamwright.seams.route import cut_along
from seamwright.seams.straighten import corridor, mirrored, straightened
from seamwright.seams.symmetric import Mirror
from seamwright.seams.topology import make_disks


def network_along(form, path):
    """Network with the edges along a path of points as seams."""
    seam = np.zeros(len(form.surface.edges), dtype=bool)
    seam[form.surface.edge_index(np.column_stack([path[:-1], path[1:]]))] = True
    return Network(form.surface, seam, np.arange(len(form.triangles)))


def led(form, path, wished):
    """The network along a path, straightened towards the points wished (k, 3)."""
    gap = np.linalg.norm(form.points[:, None] - wished[None], axis=2).min(axis=1)
    cost, near = corridor(form.surface, ~form.diagonal, np.ones(len(gap)), gap)
    return straightened(network_along(form, path), ~form.diagonal, cost, near, wished)


def turns(network):
    """Degrees turned along all chains."""
    total = 0.0
    for chain in network.chains:
        way = np.diff(network.surface.points[chain], axis=0)
        way /= np.linalg.norm(way, axis=1)[:, None]
        total += np.degrees(np.arccos(np.clip((way[1:] * way[:-1]).sum(axis=1), -1, 1))).sum()
    return total


def across(count, rows):
    """Points of a path over a sheet that climbs to the row given for each column in turn."""
    path = [rows[0] * (count + 1)]
    for column in range(1, count + 1):
        path.append(rows[column - 1] * (count + 1) + column)
        step = np.sign(rows[min(column, count - 1)] - rows[column - 1])
        while step and path[-1] // (count + 1) != rows[column]:
            path.append(path[-1] + step * (count + 1))
    return np.array(path)


def test_a_jagged_seam_across_a_sheet_becomes_straight():
    form = Form(*sheet(20))
    rows = [10 + (column // 2) % 2 for column in range(20)]
    wished = np.column_stack([np.linspace(0, 1, 200), np.full(200, 0.52), np.zeros(200)])
    network = led(form, across(20, rows), wished)
    assert network.length() == pytest.approx(1.0)
    assert turns(network) == 0


def test_a_slanting_seam_keeps_its_slant():
    """On a grid every climb from corner to corner is equally long: it keeps to the one wished and turns less."""
    form = Form(*sheet(24))
    rows = [min(column, 24) for column in range(24)]
    wished = np.linspace([0, 0, 0], [1, 1, 0], 300)
    before = network_along(form, across(24, rows))
    network = led(form, across(24, rows), wished)
    assert network.length() <= before.length() + 1e-12
    assert turns(network) < 0.6 * turns(before)
    seen = network.surface.points[np.unique(network.surface.edges[network.seam])]
    assert (np.abs(seen[:, 0] - seen[:, 1]) / np.sqrt(2)).max() < 3.5 / 24


def test_no_leap_over_a_narrow_tongue():
    """A seam up and down a tongue three cells wide stays, though straight across were much shorter."""
    form = Form(*sheet(30))
    size = 31
    up = [row * size + 13 for row in range(5, 26)]
    over = [25 * size + column for column in (14, 15)]
    down = [row * size + 16 for row in range(25, 4, -1)]
    path = np.array([5 * size + column for column in range(13)] + up + over + down
                    + [5 * size + column for column in range(17, size)])
    network = led(form, path, form.points[path])
    assert network.length() > 0.95 * network_along(form, path).length()


FORMS = {
    "sphere": icosphere(3), "starfish": starfish(26), "torus of quads": (torus(1.0, 0.4, 36, 20)[0], wrapped_grid(36, 20)),
}


@pytest.mark.parametrize("name", FORMS)
def test_seams_along_edges_are_hardly_longer_than_through(name):
    """The borders of whole faces alone are 1.2 to 1.4 times as long as the smooth ones (measured; of a grid's diagonal the
    square root of 2)."""
    form = Form(*FORMS[name])
    ladder = Ladder(form.surface, rungs=())
    level, metric = ladder.levels[-1], 1 / ladder.factor
    cut = cells(level, 6)
    network = cut_along(level, cut, form.polygon, form.diagonal, metric)
    assert network.length() < 1.25 * cut_through(level, cut, metric).length()
    for piece in range(network.pieces[0]):
        part = network.piece_surface(piece)[0]
        assert part.euler == 1 and len(part.boundary_loops) == 1


def test_symmetric_seams_on_a_symmetric_mesh():
    points, faces = FORMS["torus of quads"]
    form = Form(points, faces)
    ladder = Ladder(form.surface, planes=planes(form.surface), rungs=())
    level = ladder.levels[-1]
    mirror = level.symmetry.mirrors[0]
    height = (level.surface.points - mirror.plane.point) @ mirror.plane.normal
    other = np.cross(mirror.plane.normal, [0.3, 0.5, 0.8])
    far = np.abs(height) > 0.35 * np.ptp(height)
    labels = np.where(far, np.where(height > 0, 1, 2), (level.surface.points @ other > 0).astype(int) * 3)
    labels = make_disks(level, labels)
    cut = cut_by_fields(level.surface, from_labels(level, labels))
    network = cut_along(level, cut, form.polygon, form.diagonal, 1 / ladder.factor)
    images = network.surface.edge_index(mirror.image[network.surface.edges[network.seam]])
    assert network.seam[images].all()


def test_a_mirror_image_is_taken_only_where_seams_may_be():
    """Two seams straight over a sheet, not alike: the left becomes the image of the right, unless edges there are barred."""
    form = Form(*sheet(8))
    column = {k: np.arange(9) * 9 + k for k in (1, 2, 6)}
    seam = network_along(form, column[1]).seam | network_along(form, column[6]).seam
    network = Network(form.surface, seam, np.arange(len(form.triangles)))
    mirror = Mirror(form.surface, Plane(np.array([0.5, 0, 0]), np.array([1.0, 0, 0]), 1e-9))
    allowed = ~form.diagonal
    wanted = network_along(form, column[2]).seam | network_along(form, column[6]).seam
    np.testing.assert_array_equal(mirrored(network, mirror, allowed).seam, wanted)
    allowed[np.flatnonzero(network_along(form, column[2]).seam)[0]] = False
    assert mirrored(network, mirror, allowed) is network
