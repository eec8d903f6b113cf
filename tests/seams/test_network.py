"""The network on the mesh: cut points, pieces, chains, sides, the route through faces."""

import numpy as np
import pytest
from forms import cap, cylinder, disk, icosphere, split_quads, starfish, torus
from parted import cells, level_of
from seamwright.form.form import Form
from seamwright.form.measure import areas
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.network import NEAREST, Network, cut_through
from seamwright.seams.sides import joints

FORMS = {"sphere": icosphere(3), "torus": torus(1.0, 0.4, 30, 16), "tube": cylinder(1.0, 2.0, 28), "cap": cap(1.8, 10),
         "starfish": starfish(22)}


def network_of(form, *paths):
    """Network of a form's (points, faces) whose seams are the given runs of points."""
    surface = Form(*form).surface
    seam = np.zeros(len(surface.edges), dtype=bool)
    for path in paths:
        edges = surface.edge_index(np.column_stack([path[:-1], path[1:]]))
        assert (edges >= 0).all()
        seam[edges] = True
    return Network(surface, seam, np.arange(len(surface.triangles)))


def grid(n):
    """Square of n x n cells in two triangles each; point (i, j) is i * (n + 1) + j."""
    i, j = (a.ravel() for a in np.meshgrid(np.arange(n + 1), np.arange(n + 1), indexing="ij"))
    cell = (np.arange(n)[:, None] * (n + 1) + np.arange(n)).ravel()
    quads = np.column_stack([cell, cell + n + 1, cell + n + 2, cell + 1])
    return np.column_stack([i, j, 0 * i]).astype(float), split_quads(quads)


def row(n, i, first, last):
    """Points (i, first) to (i, last) of a grid."""
    step = 1 if last >= first else -1
    return i * (n + 1) + np.arange(first, last + step, step)


def opened_by_hand(network):
    """Number of points at each point of the network after cutting, by turning around it: gaps in its fan of triangles."""
    surface = network.surface
    counts = np.zeros(len(surface.points), dtype=int)
    joined = {tuple(edge) for edge, seam, open_ in zip(surface.edges.tolist(), network.seam, surface.open_edges, strict=True)
              if not seam and not open_}
    for point in range(len(surface.points)):
        fan = [set(t) for t in surface.triangles.tolist() if point in t]
        groups = []
        for triangle in fan:
            touching = [g for g in groups if any(
                tuple(sorted((point, other))) in joined for member in g for other in (triangle & member) - {point})]
            merged = [triangle] + [member for g in touching for member in g]
            groups = [g for g in groups if g not in touching] + [merged]
        counts[point] = len(groups)
    return counts


CASES = {
    "slit": (network_of(grid(6), row(6, 3, 1, 5)), 1, {(3, j): 2 for j in (2, 3, 4)}),
    "dart": (network_of(grid(6), row(6, 3, 0, 3)), 1, {(3, j): 2 for j in (0, 1, 2)}),
    "across": (network_of(grid(6), row(6, 3, 0, 6)), 2, {(3, j): 2 for j in range(7)}),
    "cross": (network_of(grid(6), row(6, 3, 0, 6), np.arange(7) * 7 + 3), 4,
              {**{(3, j): 2 for j in range(7)}, **{(i, 3): 2 for i in range(7)}, (3, 3): 4}),
    "two slits that meet": (network_of(grid(6), row(6, 3, 1, 5), np.arange(1, 4) * 7 + 3), 1,
                            {(3, 2): 2, (3, 3): 3, (3, 4): 2, (2, 3): 2}),
    "ring": (network_of(grid(6), [2 * 7 + 2, 2 * 7 + 3, 3 * 7 + 3, 3 * 7 + 2, 2 * 7 + 2]), 2,
             {p: 2 for p in ((2, 2), (2, 3), (3, 3), (3, 2))}),
    "dart and a slit beside": (network_of(grid(6), row(6, 1, 0, 2), row(6, 4, 2, 5)), 1,
                               {(1, 0): 2, (1, 1): 2, (4, 3): 2, (4, 4): 2}),
    "ring with a tail": (network_of(grid(6), [2 * 7 + 2, 2 * 7 + 3, 3 * 7 + 3, 3 * 7 + 2, 2 * 7 + 2], row(6, 3, 3, 5)), 2,
                         {(2, 2): 2, (2, 3): 2, (3, 2): 2, (3, 3): 3, (3, 4): 2}),
    "nothing": (network_of(grid(6)), 1, {}),
}


@pytest.mark.parametrize("name", CASES)
def test_points_part_along_seams_alone(name):
    network, pieces, parted = CASES[name]
    assert network.pieces[0] == pieces
    expected = np.ones(49, dtype=int)
    for (i, j), count in parted.items():
        expected[i * 7 + j] = count
    got = np.array([len(set(network.corner_points[network.surface.triangles == point])) for point in range(49)])
    assert got.tolist() == expected.tolist() == opened_by_hand(network).tolist()
    for piece in range(pieces):
        part, points, triangles = network.piece_surface(piece)
        assert (network.pieces[1][triangles] == piece).all()
        whole = network.surface.triangles[triangles]
        np.testing.assert_array_equal(part.points[part.triangles], network.surface.points[whole])
        np.testing.assert_array_equal(points[part.triangles], whole)
        both = (part.edge_triangles >= 0).all(axis=1)
        assert both.sum() == sum(  # joined inside a piece: exactly the edges that are neither seam nor open
            ~network.seam & ~network.surface.open_edges & np.isin(network.surface.edge_triangles, triangles).all(axis=1))


@pytest.mark.parametrize(("name", "lengths"), [
    ("slit", [4]), ("dart", [3]), ("across", [6]), ("cross", [3, 3, 3, 3]), ("two slits that meet", [2, 2, 2]),
    ("ring", [4]),
    ("ring with a tail", [4, 2]),    ("dart and a slit beside", [2, 3]), ("nothing", []),
])
def test_chains(name, lengths):
    network = CASES[name][0]
    assert sorted(len(chain) - 1 for chain in network.chains) == sorted(lengths)
    edges = np.concatenate([network.surface.edge_index(np.column_stack([c[:-1], c[1:]])) for c in network.chains] or [[]])
    assert sorted(edges.tolist()) == np.flatnonzero(network.seam).tolist()  # every seam edge once
    assert network.length() == pytest.approx(sum(lengths))
    for chain in network.chains:
        left = network.without(chain)
        assert left.length() == pytest.approx(network.length() - (len(chain) - 1))
        assert (left.with_seams(np.flatnonzero(network.seam)).seam == network.seam).all()


@pytest.mark.parametrize(("name", "darts"), [
    ("slit", 1), ("dart", 1), ("across", 0), ("cross", 0), ("two slits that meet", 3), ("ring", 0),
    ("ring with a tail", 1), ("dart and a slit beside", 2),
])
def test_darts(name, darts):
    found = [joint for joint in joints(CASES[name][0]) if joint.right is not None]
    assert sum(joint.dart for joint in found) == darts


def through(form, count):
    level = level_of(form)
    cut = cells(level, count)
    return level, cut, cut_through(level, cut, 0.5)


@pytest.fixture(params=FORMS, name="made")
def any_network(request):
    return through(FORMS[request.param], 6)


def check_joints(network):
    """Both sides of every chain lie on it, and every side of every outline belongs to exactly one seam or hem."""
    surface = network.surface
    found = joints(network)
    parts = [network.piece_surface(piece)[0] for piece in range(network.pieces[0])]
    taken = [{} for _ in parts]
    for number, joint in enumerate(found):
        along = np.linalg.norm(np.diff(surface.points[joint.chain], axis=0), axis=1).sum()
        for side, direction in ((joint.left, 1), (joint.right, -1)):
            if side is None:
                continue
            part = parts[side.piece]
            np.testing.assert_array_equal(part.points[side.points], surface.points[joint.chain])
            assert np.linalg.norm(np.diff(part.points[side.points], axis=0), axis=1).sum() == pytest.approx(along, rel=1e-12)
            points = side.points[::direction]  # the left side runs with the outline, the right one against it
            for a, b in zip(points[:-1].tolist(), points[1:].tolist(), strict=True):
                assert (a, b) not in taken[side.piece]
                taken[side.piece][a, b] = number
    for part, used in zip(parts, taken, strict=True):
        outline = [np.column_stack([loop, np.roll(loop, -1)]) for loop in part.boundary_loops]
        assert set(map(tuple, np.concatenate(outline).tolist())) == set(used)
    return found


@pytest.mark.parametrize("name", CASES)
def test_joints_by_hand(name):
    check_joints(CASES[name][0])


def test_joints_of_cut_forms(made):
    found = check_joints(made[2])
    assert not any(joint.dart for joint in found)
    assert sum(joint.right is None for joint in found) == 0 or made[0].surface.open_edges.any()


def test_a_hem_without_a_seam_is_one_closed_run():
    hems = check_joints(network_of(disk(1.0, 4)))
    assert len(hems) == 1 and hems[0].right is None and hems[0].chain[0] == hems[0].chain[-1] and len(hems[0].chain) == 25


def test_cut_through_keeps_the_form(made):
    level, cut, network = made
    surface, fine = level.surface, network.surface
    assert fine.euler == surface.euler
    assert len(fine.boundary_loops) == len(surface.boundary_loops)
    assert (fine.edge_triangles >= 0).any(axis=1).all()
    small = np.bincount(network.source, areas(fine), minlength=len(surface.triangles))
    np.testing.assert_allclose(small, 0.25 * level.areas, rtol=1e-12)
    assert (areas(fine) > 0).all()
    # every sub-triangle in its face's plane and inside it: barycentric coordinates
    corners = surface.points[surface.triangles[network.source]] * 0.5
    edges = np.stack([corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]], axis=2)
    for k in range(3):
        off = fine.points[fine.triangles[:, k]] - corners[:, 0]
        share = np.einsum("tij,tj->ti", np.linalg.pinv(edges), off)
        np.testing.assert_allclose(np.einsum("tij,tj->ti", edges, share), off, atol=1e-12)
        assert share.min() > -1e-12 and share.sum(axis=1).max() < 1 + 1e-12


def test_cut_through_parts_the_regions(made):
    level, cut, network = made
    fine = network.surface
    region = np.full(len(fine.points), -1)
    region[: len(cut.labels)] = cut.labels
    count, piece = network.pieces
    assert count == cut.labels.max() + 1
    for number in range(count):  # one region's points in each piece, all of them
        points = np.unique(fine.triangles[piece == number])
        inside = points[points < len(cut.labels)]
        assert len(set(region[inside])) == 1
        assert len(inside) == (cut.labels == region[inside[0]]).sum()
    # the seam's points are those of cut edges and junctions, none of the form's own
    assert np.unique(fine.edges[network.seam]).min() >= len(cut.labels)
    assert len(network.chains) - sum(c[0] == c[-1] for c in network.chains) >= len(cut.three.face)


def test_cuts_leave_no_needles():
    level = level_of(icosphere(3))
    height = level.surface.points[:, 2] - 1e-9
    cut = cut_by_fields(level.surface, np.column_stack([height, -height]))
    fine = cut_through(level, cut, 1.0).surface
    shortest = areas(fine) / (fine.edge_lengths[fine.triangle_edges].max(axis=1) ** 2)
    whole = areas(level.surface) / (level.surface.edge_lengths[level.surface.triangle_edges].max(axis=1) ** 2)
    assert shortest.min() > 0.5 * NEAREST * whole.min()
