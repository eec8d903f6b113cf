"""Darts in the flow: they slide to where they serve and vanish where they do not pay; stretches of seam are left out."""

import numpy as np
import pytest
from forms import cap, ellipsoid, frustum, icosphere, torus
from parted import fields_of_cells, level_of
from seamwright.form.form import Form
from seamwright.form.mirror import Plane, planes
from seamwright.seams.cut import cut_by_fields, recut
from seamwright.seams.darts import closed_up, lies_flat, opened_up
from seamwright.seams.flow import DART_PRICE, PIECE_PRICE, flow, settle
from seamwright.seams.ladder import Ladder
from seamwright.seams.level import FORM_AREA
from seamwright.seams.network import cut_through
from seamwright.seams.panels import attached, fused, panels
from seamwright.seams.seek import seek, simplify
from seamwright.seams.symmetric import Symmetry

CAP = cap(2.0, 18)  # a good half of a ball: without a dart its edge would have to stretch
BEYOND = np.array([[False, False, True], [False, False, True], [True, True, False]])


@pytest.fixture(name="level", scope="module")
def cap_level():
    return level_of(CAP)


def with_a_dart(level, end):
    """(fields, uncut) of the cap with a dart from its edge up to the height `end`, on the side of x > 0."""
    x, y, z = (level.surface.points - [0, 0, level.surface.points[:, 2].min()]).T
    beyond = np.maximum(z - end, -x)
    return np.column_stack([np.minimum(y, -beyond), np.minimum(-y, -beyond), beyond]), BEYOND


@pytest.mark.parametrize("begin", [0.15, 0.4, 0.9])
def test_a_dart_grows_past_the_tip_wherever_it_begins(level, begin):
    """To where its price is what it saves: the three ends are one, up to the steps of the mesh."""
    fields, uncut = with_a_dart(level, begin * np.ptp(level.surface.points[:, 2]))
    found = flow(level, fields, 1.0, steps=60, uncut=uncut)
    radius = np.sqrt(FORM_AREA / (2 * np.pi * (1 - np.cos(2.0))))
    assert found.count == 1 and len(found.cut.end.face) == 1
    assert found.cost.length > 2.0 * radius  # the way from the edge to the tip
    assert found.cost.total == pytest.approx(3.95, rel=0.03)  # the least met, from a dart of any length


def test_a_dart_that_does_not_pay_vanishes(level):
    fields, uncut = with_a_dart(level, 0.4 * np.ptp(level.surface.points[:, 2]))
    assert flow(level, fields, 4.0, steps=60, uncut=uncut).cost.length == 0
    found = settle(level, cut_by_fields(level.surface, fields, uncut=uncut), fields.argmax(axis=1), 9.0, uncut=uncut)
    closed = simplify(level, found, 9.0)
    assert closed.count == 1 and closed.cut.uncut is None and closed.cost.length == 0 and closed.score < found.score
    kept = settle(level, found.cut, found.cut.labels, 0.01, uncut=uncut)
    assert closed_up(level, kept, 0.01) is kept


def test_the_score_has_a_price_for_pieces_and_for_ends(level):
    fields, uncut = with_a_dart(level, 0.5 * np.ptp(level.surface.points[:, 2]))
    found = settle(level, cut_by_fields(level.surface, fields, uncut=uncut), fields.argmax(axis=1), 0.1, uncut=uncut)
    assert found.score == pytest.approx(found.cost.total + PIECE_PRICE + DART_PRICE)
    whole = settle(level, found.cut, found.cut.labels, 0.1)  # the same regions, all of them pieces
    assert whole.score == pytest.approx(whole.cost.total + 3 * PIECE_PRICE)


@pytest.mark.parametrize("form", [ellipsoid(1.0, 0.8, 0.5, 3), torus(1.0, 0.4, 30, 15), CAP])
@pytest.mark.parametrize("seed", range(4))
def test_pieces_against_the_cut_mesh(form, seed):
    """Pieces, and which of them are disks, against the components and the Euler numbers of the mesh that is cut."""
    level = level_of(form)
    cut = cut_by_fields(level.surface, fields_of_cells(level, 6))
    chance = np.random.default_rng(seed)
    uncut = np.triu(chance.random((6, 6)) < 0.35, 1)
    uncut |= uncut.T
    cut = recut(level.surface, cut, cut.labels, uncut)
    found, network = panels(level.surface, cut.labels, uncut), cut_through(level, cut, 1.0)
    assert network.pieces[0] == len(found.disk)
    assert network.length() == pytest.approx(settle(level, cut, cut.labels, 0.1, uncut=uncut).cost.length, rel=0.05)
    for piece in range(network.pieces[0]):
        part, _, triangles = network.piece_surface(piece)
        regions = cut.labels[level.surface.triangles[network.source[triangles]]].ravel()
        own = np.bincount(found.piece[regions]).argmax()
        assert found.disk[own] == (part.euler == 1)


def test_regions_that_no_dart_needs_are_one(level):
    labels = fields_of_cells(level, 5).argmax(axis=1)
    for uncut in (np.ones((5, 5), dtype=bool), np.zeros((5, 5), dtype=bool)):
        some, left = fused(level, labels, uncut)
        assert left is None and some.max() == (0 if uncut.any() else 4)


def test_what_is_no_disk_falls_apart():
    level = level_of(icosphere(3))
    labels = fields_of_cells(level, 6).argmax(axis=1)
    some, left = fused(level, labels, np.ones((6, 6), dtype=bool))  # a ball without a seam cannot lie flat
    assert left is None and some.max() == 5


def test_one_seam_may_do_for_an_egg():
    ladder = Ladder(Form(*ellipsoid(1.4, 1.0, 0.9, 4)).surface, rungs=(500,))
    found = seek(ladder, 0.3)
    assert found.count == 1 and len(found.cut.end.face) == 2
    network = cut_through(found.level, found.cut, 1.0)
    assert network.pieces[0] == 1 and lies_flat(found.level, found.cut)
    chain, = network.chains
    assert chain[0] != chain[-1]
    assert seek(ladder, 0.3, pieces=2).count == 2


def test_a_stretch_left_out_keeps_the_symmetry():
    level = level_of(ellipsoid(1.4, 1.0, 0.9, 3))
    level.symmetry = Symmetry(level.surface, [plane.scaled(1.0) for plane in planes(level.surface)][:1])
    normal = level.symmetry.mirrors[0].plane.normal
    across = np.linalg.svd(normal[None])[2][1]
    side = level.surface.points @ across
    found = flow(level, np.column_stack([side, -side]), 0.3)
    opened = opened_up(level, found, 0.3)
    assert opened.count == 1 and opened.score < found.score
    labels, mirror = opened.cut.labels, level.symmetry.mirrors[0]
    twins = mirror.partners(labels, int(labels.max()) + 1)
    assert (twins[labels] == labels[mirror.image]).mean() > 0.97
    assert (opened.cut.uncut == opened.cut.uncut[np.ix_(twins, twins)]).all()


def test_loose_bits_of_seam_go():
    """Two regions of a piece that touch in two places: the seam between them that hangs on nothing is no dart."""
    level = level_of(CAP)
    x, y, z = (level.surface.points - [0, 0, level.surface.points[:, 2].min()]).T
    beyond = np.minimum(np.abs(z - 0.6 * np.ptp(z)) - 0.12 * np.ptp(z), 1.0) * -1  # a belt around
    fields = np.column_stack([y, -y, 3 * beyond])
    cut = cut_by_fields(level.surface, fields, uncut=BEYOND)
    assert len(cut.end.face) == 4 and not panels(level.surface, cut.labels, BEYOND).disk.all()
    labels = attached(level.surface, cut)
    again = recut(level.surface, cut, labels, BEYOND)
    assert len(again.end.face) == 2 and panels(level.surface, labels, BEYOND).disk.all()


def test_a_lampshade_needs_one_seam():
    """Two planes of symmetry would have it twice; it keeps the one that it lies on."""
    form = Form(*frustum(0.2, 0.1, 0.2, 48))
    normals = np.eye(3)[:2]
    ladder = Ladder(form.surface, planes=[Plane(np.zeros(3), normal, 0.0) for normal in normals])
    found = seek(ladder, 0.1)
    assert len(ladder.planes) == 1 and found.count == 1 and found.cost.distortion < 1e-3
    network = cut_through(found.level, found.cut, 1 / ladder.factor)
    plane, = ladder.planes
    height = (network.surface.points[network.surface.edges[network.seam]] - plane.point) @ plane.normal
    assert np.abs(height).max() < 0.004 and network.length() < 1.02 * np.hypot(0.2, 0.1)
