"""Regions as combinatorial things, against brute force on the explicitly cut mesh."""

import numpy as np
import pytest
from forms import cap, cylinder, dumbbell, icosphere, starfish, together, torus, two_holes
from parted import cut_mesh, level_of
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from seamwright.form.surface import Surface
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.starts import SPECK, starts, tidied
from seamwright.seams.topology import (
    absorb,
    make_disks,
    merged,
    nearer,
    regions,
    split_components,
    voronoi,
)

FORMS = {
    "sphere": icosphere(3), "torus": torus(1.0, 0.4, 30, 16), "two holes": two_holes(26), "tube": cylinder(1.0, 2.0, 28),
    "long tube": cylinder(0.2, 2.0, 12), "cap": cap(1.8, 10),
    "starfish": starfish(22), "dumbbell": dumbbell(24),
}


def annulus(inner, outer, around, across):
    """Flat ring."""
    points, faces = cylinder(1.0, 1.0, around, rings=across)
    radius = inner + (outer - inner) * points[:, 2]
    return np.column_stack([radius * points[:, 0], radius * points[:, 1], 0 * radius]), faces


FORMS["annulus"] = annulus(0.4, 1.0, 40, 8)


@pytest.fixture(params=FORMS, name="level")
def any_level(request):
    return level_of(FORMS[request.param])


def surfaces_of(level, labels):
    """The Surface of every region of the mesh cut along the borders of labels, by plain loops."""
    one_hot = np.eye(int(labels.max()) + 1)[labels]
    points, triangles, region = cut_mesh(level.surface, cut_by_fields(level.surface, one_hot, labels))[:3]
    found = []
    for number in range(int(labels.max()) + 1):
        own = triangles[region == number]
        used, local = np.unique(own, return_inverse=True)
        found.append(Surface(points[used], local.reshape(-1, 3)))
    return found


def euler(surface):
    """Points less edges plus triangles, counted one by one."""
    edges = {tuple(sorted((t[k], t[(k + 1) % 3]))) for t in surface.triangles.tolist() for k in range(3)}
    return len(set(surface.triangles.ravel().tolist())) - len(edges) + len(surface.triangles)


def is_disk(surface):
    return euler(surface) == 1 and surface.triangle_components[0] == 1 and len(surface.boundary_loops) == 1


def ragged(level, seed):
    """Labels of connected regions with ragged borders, islands and rings: random ones among cells."""
    chance = np.random.default_rng(seed)
    labels = voronoi(level, 6)
    flips = chance.choice(len(labels), len(labels) // 12, replace=False)
    labels[flips] = chance.integers(0, 7, len(flips))
    return split_components(level.surface, labels)


def test_tables_against_the_cut_mesh(level):
    for seed in range(3):
        labels = ragged(level, seed)
        tables = regions(level, labels)
        cut = surfaces_of(level, labels)
        assert tables.euler.tolist() == [euler(surface) for surface in cut]
        neighbours = {tuple(sorted(labels[edge].tolist())) for edge in level.surface.edges if len(set(labels[edge])) == 2}
        assert sorted(map(tuple, tables.pairs.tolist())) == sorted(neighbours)
        for (i, j), both in list(zip(tables.pairs.tolist(), tables.pair_euler.tolist(), strict=True))[::7]:
            union = surfaces_of(level, merged(labels, i, j))[i]
            assert both == euler(union)
        assert tables.area.sum() == pytest.approx(level.areas.sum())


def test_border_is_about_its_length():
    level = level_of(icosphere(4))
    half = (level.surface.points[:, 2] > 0.01).astype(int)
    assert regions(level, half).border == pytest.approx([2 * np.pi], rel=0.15)


def test_components_are_told_apart():
    surface = level_of(together(icosphere(2), cap(1.0, 5))).surface
    height = surface.points[:, 2]
    labels = (np.abs(height - np.median(height)) > 0.3).astype(int)  # one label on both sides of a band
    split = split_components(surface, labels)
    for number in range(split.max() + 1):
        inside = np.flatnonzero(split == number)
        assert len(set(labels[inside])) == 1
        edges = surface.edges[np.isin(surface.edges, inside).all(axis=1)]
        graph = coo_matrix((np.ones(len(edges)), edges.T), shape=(len(labels),) * 2).tocsr()[inside][:, inside]
        assert connected_components(graph, directed=False)[0] == 1
    ends = split[surface.edges]
    assert ((ends[:, 0] == ends[:, 1]) == (labels[surface.edges[:, 0]] == labels[surface.edges[:, 1]])).all()
    first = [int(np.flatnonzero(split == number)[0]) for number in range(split.max() + 1)]
    assert first == sorted(first)


def test_everything_becomes_disks(level):
    for labels in (np.zeros(len(level.price), dtype=int), ragged(level, 1), (level.surface.points[:, 0] > 0).astype(int)):
        parted = make_disks(level, labels)
        if parted.max() == 0:  # a region without a border: a disk only on an open form of one loop
            assert is_disk(level.surface)
        else:
            assert all(is_disk(surface) for surface in surfaces_of(level, parted))


def test_disks_are_left_alone(level):
    parted = make_disks(level, voronoi(level, 8))
    assert (make_disks(level, parted) == parted).all()


def test_cells_merge_as_far_as_they_may(level):
    """No two cells that a region was cut into could still be one disk."""
    whole = np.zeros(len(level.price), dtype=int)
    tables = regions(level, make_disks(level, whole))
    assert (tables.pair_euler != 1).all()


def test_small_regions_are_absorbed(level):
    labels = make_disks(level, voronoi(level, 30))
    least = 0.05 * level.mass.sum()
    left = absorb(level, labels, least)
    tables = regions(level, left)
    assert all(is_disk(surface) for surface in surfaces_of(level, left))
    small = tables.area < least
    assert not (small[tables.pairs].any(axis=1) & (tables.pair_euler == 1)).any()
    assert left.max() < labels.max()
    # regions only ever grow together
    pairs = np.unique(np.column_stack([labels, left]), axis=0)
    assert len(pairs) == labels.max() + 1


def test_starts_are_disks_of_a_sensible_size(level):
    for labels in starts(level):
        tables = regions(level, labels)
        assert all(is_disk(surface) for surface in surfaces_of(level, labels))
        assert (tidied(level, labels) == labels).all()
        assert (tables.area >= SPECK * level.mass.sum()).all()


def test_voronoi_cells_are_the_nearest():
    level = level_of(torus(1.0, 0.4, 30, 16))
    owner = voronoi(level, 9)
    assert sorted(set(owner.tolist())) == list(range(9))
    assert (split_components(level.surface, owner).max() + 1) == 9  # along edges every cell is connected
    assert voronoi(level, 9).tolist() == owner.tolist()


def test_points_that_no_place_reaches_go_to_the_first():
    """Two bands around a sphere, not connected: both places are on the upper one."""
    level = level_of(FORMS["sphere"])
    points = level.surface.points
    height = points[:, 2] / np.abs(points[:, 2]).max()
    inside = np.flatnonzero(np.abs(height) > 0.5)
    places = np.array([[-1.0, 0.0, 1.2], [1.0, 0.0, 1.2]])
    owner = nearer(level, inside, places)
    upper = height[inside] > 0
    assert (owner[~upper] == 0).all()
    assert set(owner[upper].tolist()) == {0, 1}
    assert (owner[upper & (points[inside, 0] > 0.4)] == 1).all()
