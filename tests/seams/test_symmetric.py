"""Symmetric networks: regions mirrored in whole, projected fields, their exact gradient, merges on both sides, twins."""

import numpy as np
import pytest
import seamwright as sw
from forms import dumbbell, ellipsoid, globe, icosphere, torus
from parted import level_of
from scipy.spatial import cKDTree
from seamwright.form.measure import total_area
from seamwright.form.mirror import Plane
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.descend import descend
from seamwright.seams.energy import evaluate, field_gradient
from seamwright.seams.fields import from_labels
from seamwright.seams.merging import joined
from seamwright.seams.network import cut_through
from seamwright.seams.refuse import measured
from seamwright.seams.symmetric import Symmetry, alike, symmetrised
from seamwright.seams.topology import make_disks, regions, voronoi
from seamwright.seams.twins import twin_pieces, twin_stretch

X, Y = (Plane(np.zeros(3), axis, 0.0) for axis in np.eye(3)[:2])


def uneven(radii, level=4):
    """Ellipsoid whose triangulation does not know its planes: the sphere turned before it is stretched."""
    points, faces = icosphere(level)
    turn = np.linalg.qr(np.random.default_rng(1).normal(size=(3, 3)))[0]
    return points @ (turn * np.linalg.det(turn)).T * radii, faces


FORMS = {"ellipsoid": uneven((1.0, 0.7, 0.5)), "dumbbell": dumbbell(48), "torus": torus(1.0, 0.4, 61, 25)}


@pytest.fixture(params=FORMS, name="level")
def any_level(request):
    return level_of(FORMS[request.param])


def beside_borders(level, labels, rings):
    """(n,) bool: points within so many edges of a border."""
    edges = level.surface.edges
    near = np.zeros(len(labels), dtype=bool)
    near[edges[labels[edges[:, 0]] != labels[edges[:, 1]]]] = True
    for _ in range(rings - 1):
        near[edges[near[edges].any(axis=1)]] = True
    return near


def asymmetric(level, mirror, labels):
    """(n,) bool: points whose region is not the partner of the region at their mirror image."""
    partner = mirror.partners(labels, int(labels.max()) + 1)
    assert (partner[partner] == np.arange(len(partner))).all()
    return partner[labels] != labels[mirror.image]


@pytest.mark.parametrize("count", [2, 3, 5, 9])
@pytest.mark.parametrize("planes", [[X], [Y], [X, Y]], ids=["x", "y", "x and y"])
def test_any_cells_become_symmetric_disks(level, count, planes):
    symmetry = Symmetry(level.surface, planes)
    labels = make_disks(level, voronoi(level, count))
    now = symmetrised(level, symmetry, labels)
    assert sorted(set(now)) == list(range(now.max() + 1)) and (regions(level, now).euler == 1).all()
    for mirror in symmetry.mirrors:
        assert not (asymmetric(level, mirror, now) & ~beside_borders(level, now, 3)).any()
    again = symmetrised(level, symmetry, now)
    assert (again != now).mean() < 0.03


def test_the_right_side_stays_as_it_was(level):
    labels = make_disks(level, voronoi(level, 6))
    symmetry = Symmetry(level.surface, [X])
    now, right = symmetrised(level, symmetry, labels), symmetry.mirrors[0].right
    a, b = level.surface.edges[right[level.surface.edges].all(axis=1)].T
    away = ~beside_borders(level, labels, 2)
    kept = away[a] & away[b]
    assert ((labels[a] == labels[b])[kept] <= (now[a] == now[b])[kept]).all()


def test_symmetric_labels_come_back_as_they_are():
    level = level_of(ellipsoid(1.0, 0.7, 0.5, 3))
    labels = (level.surface.points[:, 2] > 0.1).astype(np.int64)
    assert symmetrised(level, Symmetry(level.surface, [X, Y]), labels) is labels


def test_halves_are_partners_and_bands_are_their_own():
    level = level_of(uneven((1.0, 0.7, 0.5)))
    mirror = Symmetry(level.surface, [X]).mirrors[0]
    x, _, z = level.surface.points.T
    halves, bands = (x > 0).astype(np.int64), (z > 0).astype(np.int64)
    assert mirror.partners(halves, 2).tolist() == [1, 0]
    assert mirror.partners(bands, 2).tolist() == [0, 1]
    assert mirror.partners(2 * halves + bands, 4).tolist() == [2, 3, 0, 1]


def test_a_ring_through_the_plane_becomes_partners():
    level = level_of(torus(1.0, 0.4, 60, 24))
    labels = (np.abs(level.surface.points[:, 1]) > 0.6).astype(np.int64)  # each band holds rings that cross x = 0 twice
    now = symmetrised(level, Symmetry(level.surface, [X]), labels)
    assert (regions(level, now).euler == 1).all() and now.max() >= 3


def test_project_is_a_projection_on_a_mirrored_mesh():
    level = level_of(ellipsoid(1.0, 0.7, 0.5, 3))
    symmetry = Symmetry(level.surface, [X, Y])
    labels = symmetrised(level, symmetry, make_disks(level, voronoi(level, 6)))
    count = int(labels.max()) + 1
    partners = symmetry.partners(labels, count)
    fields = symmetry.project(np.random.default_rng(0).normal(size=(len(labels), count)), partners)
    for mirror, partner in zip(symmetry.mirrors, partners, strict=True):
        assert np.allclose(mirror.matrix @ fields, fields[:, partner], atol=1e-12)
    assert np.allclose(symmetry.project(fields, partners), fields, atol=1e-12)


def test_the_gradient_is_that_of_the_projected_fields(level):
    symmetry = Symmetry(level.surface, [X, Y])
    labels = symmetrised(level, symmetry, make_disks(level, voronoi(level, 4)))
    partners = symmetry.partners(labels, int(labels.max()) + 1)
    chance = np.random.default_rng(4)
    fields = from_labels(level, labels) + 0.01 * chance.normal(size=(len(labels), int(labels.max()) + 1))
    step = chance.normal(size=fields.shape)

    def total(share):
        cut = cut_by_fields(level.surface, symmetry.project(fields + share * step, partners))
        return evaluate(level, cut, 0.3, "square")

    projected = symmetry.project(fields, partners)
    cut = cut_by_fields(level.surface, projected)
    gradient = field_gradient(level, cut, projected, total(0.0).slope)
    slope = (symmetry.pull_back(gradient, partners) * step).sum()
    h = 1e-6
    assert slope == pytest.approx((total(h).total - total(-h).total) / (2 * h), rel=1e-4)


@pytest.mark.parametrize("made", [globe(24, 16, (0.2, 0.2, 0.2)), torus(0.3, 0.12, 40, 20)], ids=["ball", "ring"])
def test_what_is_sought_for_goods_is_alike_on_both_sides(made):
    """Seams for the goods alone: their own mirror image within 0.5 % of the form's size, or a quarter of a coarse edge."""
    form = sw.Form(*made)
    pattern = sw.cover(form, sw.Wishes(goods="wool felt"))
    assert pattern.fits and len(pattern.details["planes"]) == 1
    off, edge = measured(pattern)[-1], form.surface.edge_lengths.mean() / np.sqrt(total_area(form.surface))
    assert off.name == "mirror error" and off.value < max(0.005, 0.25 * edge)
    assert not any(note.startswith("Symmetry") for note in pattern.notes)


def test_seams_of_projected_fields_are_mirrored():
    level = level_of(uneven((1.0, 0.7, 0.5)))
    symmetry = Symmetry(level.surface, [X])
    labels = symmetrised(level, symmetry, make_disks(level, voronoi(level, 5)))
    fields = symmetry.project(from_labels(level, labels, 3.0), symmetry.partners(labels, int(labels.max()) + 1))
    network = cut_through(level, cut_by_fields(level.surface, fields), 1.0)
    seam = network.surface.points[network.surface.edges[network.seam]]
    middles = seam.mean(axis=1)
    mirrored = X.mirrored(middles)
    along = seam[:, 1] - seam[:, 0]
    share = np.einsum("qsx,sx->qs", mirrored[:, None] - seam[:, 0], along) / np.maximum((along**2).sum(axis=1), 1e-300)
    nearest = seam[:, 0] + np.clip(share, 0, 1)[:, :, None] * along
    off = np.linalg.norm(mirrored[:, None] - nearest, axis=2).min(axis=1)
    assert off.max() < 0.005 * np.sqrt(level.areas.sum())


@pytest.mark.parametrize("regions", ["halves", "halves and a cap"])
def test_on_a_mirrored_mesh_the_cut_is_mirrored_to_rounding(regions):
    # a seam on the plane has no room for a cut a little beside it, nor a face there for a diagonal of its own
    level = level_of(ellipsoid(1.0, 0.7, 0.5, 3))
    x, y, z = level.surface.points.T
    wave = 0.1 * np.cos(3 * y)
    fields = {"halves": [x, -x], "halves and a cap": [x, -x, z - 0.25 + wave + np.abs(x)]}[regions]
    level.symmetry = Symmetry(level.surface, [X])
    network = cut_through(level, cut_by_fields(level.surface, np.column_stack(fields)), 1.0)
    surface = network.surface
    gap, image = cKDTree(surface.points).query(X.mirrored(surface.points))
    assert gap.max() < 1e-12 and len(np.unique(surface.triangles)) == len(surface.points)
    edges = np.sort(surface.edges[network.seam], axis=1)
    assert {tuple(edge) for edge in edges} == {tuple(edge) for edge in np.sort(image[edges], axis=1)}
    assert network.pieces[0] == len(fields) and total_area(surface) == pytest.approx(total_area(level.surface), rel=1e-12)
    if regions == "halves":
        assert np.abs(surface.points[edges][:, :, 0]).max() < 1e-12


def test_merges_are_made_on_both_sides():
    level = level_of(ellipsoid(1.0, 0.7, 0.5, 4))
    x, y, z = level.surface.points.T
    symmetry = Symmetry(level.surface, [X])
    quarters = 2 * (x > 0) + (z > 0)
    both = joined(quarters, alike(level, symmetry, quarters, 0, 1))  # and with it 2 and 3
    assert both.max() == 1 and (both == (x > 0)).all()
    assert joined(quarters, alike(level, symmetry, quarters, 0, 2)).max() == 2
    belt = np.where(np.abs(z) > 0.6, np.where(z > 0, 0, 3), np.where(x > 0, 1, 2))
    assert alike(level, symmetry, belt, 1, 2) is None  # the halves of a belt would make a ring
    assert joined(belt, alike(level, symmetry, belt, 0, 1)).max() == 1  # a cap takes both halves


def test_twins_are_named_by_their_side():
    level = level_of(uneven((1.0, 0.7, 0.5)))
    x, y, z = level.surface.points.T
    fields = np.column_stack([x - 0.5, -x - 0.5, np.where(y > 0, 0.5 - np.abs(x), -9), np.where(y > 0, -9, 0.5 - np.abs(x))])
    network = cut_through(level, cut_by_fields(level.surface, fields), 1.0)
    twin, side = twin_pieces(network, X)
    assert len(twin) == 4 and sorted(side) == [-1, 0, 0, 1]
    right, left = np.flatnonzero(side == 1)[0], np.flatnonzero(side == -1)[0]
    assert twin[right] == left and twin[left] == right and all(twin[k] == k for k in np.flatnonzero(side == 0))
    for chain in network.chains:
        middle = network.surface.points[chain].mean(axis=0)
        other = twin_stretch(network, X, chain)
        if abs(middle[0]) < 0.1:
            assert other is None  # it lies across the plane
        else:
            assert np.linalg.norm(network.surface.points[other].mean(axis=0) - middle * (-1, 1, 1)) < 0.05
    chain = next(chain for chain in network.chains if network.surface.points[chain].mean(axis=0)[0] > 0.1)
    part = chain[: len(chain) // 3]
    ends = network.surface.points[twin_stretch(network, X, part)[[0, -1]]] * (-1, 1, 1)
    gap = np.linalg.norm(ends[:, None] - network.surface.points[part[[0, -1]]], axis=2)
    assert min(gap[0, 0] + gap[1, 1], gap[0, 1] + gap[1, 0]) < 0.2


def test_a_lopsided_network_has_no_twins():
    level = level_of(uneven((1.0, 0.7, 0.5)))
    lean = (level.surface.points @ [0.7, 0.2, 0.5] > 0.3).astype(np.int64)
    network = cut_through(level, cut_by_fields(level.surface, from_labels(level, lean)), 1.0)
    assert (twin_pieces(network, X)[0] == -1).any()
    assert twin_stretch(network, X, network.chains[0]) is None


def test_a_seam_between_partners_lies_on_the_plane_and_stays_there():
    level = level_of(uneven((1.0, 0.7, 0.5)))
    symmetry = Symmetry(level.surface, [X])
    level.symmetry = symmetry
    height = symmetry.mirrors[0].height
    waves = 0.3 * level.edge_length * np.sin(40 * level.surface.points[:, 1])
    fields = np.column_stack([height + waves, -height - waves])
    partners = symmetry.partners(fields.argmax(axis=1), 2)
    straight = symmetry.project(fields, partners)
    for fields in (straight, descend(level, straight, 0.1, steps=6).fields):
        cut = cut_by_fields(level.surface, fields)
        a, b = level.surface.edges[cut.edge].T
        off = height[a] + cut.place * (height[b] - height[a])
        assert np.abs(off).max() < 1e-3 * level.edge_length  # a cut keeps 1e-4 of an edge from its ends
    move = np.random.default_rng(6).normal(size=fields.shape)
    once = symmetry.project_move(move, partners)
    np.testing.assert_allclose(symmetry.project(straight + once, partners) - symmetry.project(straight, partners),
                               symmetry.project_move(once, partners), atol=1e-12)  # a move is what two fields differ by
    pull = np.random.default_rng(7).normal(size=fields.shape)
    assert (symmetry.pull_back(pull, partners) * move).sum() == pytest.approx((pull * once).sum(), rel=1e-12)
