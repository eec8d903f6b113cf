"""Darts where a piece is strained, and pieces that cannot fit: what is left beyond the limits."""

import forms
import numpy as np
import pytest
from seamwright.fit import darts, goods
from seamwright.fit.darts import darted, without_stubs
from seamwright.fit.judge import judge
from seamwright.fit.measure import measure
from seamwright.fit.resigned import resigned
from seamwright.fit.tailored import Judges
from seamwright.form.measure import angle_defects
from seamwright.form.mirror import Plane
from seamwright.form.surface import Surface
from seamwright.seams.network import Network


def cone_without_seam(slope, around=24, rings=8):
    """One piece: a cone of 1 m radius with its tip inside, a disk that no goods take flat. Its sides are plane strips."""
    angle = 2 * np.pi * np.arange(around) / around
    radius = np.arange(1, rings + 1) / rings
    x, y = (np.outer(radius, f(angle)).ravel() for f in (np.cos, np.sin))
    points = np.vstack([[0.0, 0.0, 0.0], np.column_stack([x, y, -slope * np.hypot(x, y)])])
    here, on = 1 + np.arange(around), 1 + (np.arange(around) + 1) % around
    faces = [np.column_stack([np.zeros(around, dtype=int), here, on])]
    for ring in range(rings - 1):
        a, b = here + ring * around, on + ring * around
        faces += [np.column_stack([a, a + around, b + around]), np.column_stack([a, b + around, b])]
    surface = Surface(points, np.concatenate(faces))
    return Network(surface, np.zeros(len(surface.edges), dtype=bool), np.arange(len(surface.triangles)))


def test_a_dart_to_the_tip_makes_a_cone_flat():
    """A cone is developable off its tip (any textbook of differential geometry): cut open to it, it flattens exactly."""
    judges = Judges(goods.get("canvas"), 0.5)
    before = judges.all(cone_without_seam(1.0))
    assert before.use > 1
    after = darted(judges, before)
    assert after.network.pieces[0] == 1
    assert after.use < 1e-6
    # one dart, from the edge to the tip, as long as the cone's side
    assert after.network.length() == pytest.approx(np.sqrt(2), rel=1e-9)


def slit(network, rings, from_ring=8):
    """The cone with a dart over so many of its rings, counted from the outermost (the eighth) or another."""
    points = 1 + 24 * np.arange(from_ring - 1, from_ring - 2 - rings, -1)
    return network.with_seams(network.surface.edge_index(np.column_stack([points[:-1], points[1:]])))


def test_a_dart_too_short_to_sew_is_left_out_where_the_piece_fits_without():
    """Sides of the cone 0.5 m: 25 mm is the least [common practice]; on a small form a tenth of its size."""
    assert darts.shortest(1.0) == 0.025 and darts.shortest(0.01) == pytest.approx(0.01)
    judges = Judges(goods.get("spandex"), 0.0)
    cone = cone_without_seam(0.1, rings=60)
    stub, long = (judges.all(slit(cone, rings, 60)) for rings in (1, 3))
    assert stub.network.length() < 0.025 < long.network.length()
    assert not without_stubs(judges, stub).network.seam.any()
    assert without_stubs(judges, long) is long


def test_a_dart_too_short_to_sew_is_made_longer_where_the_piece_needs_it(monkeypatch):
    """A spherical cap in eight rings with a dart over three of them, where darts of 0.5 m are the least."""
    monkeypatch.setattr(darts, "SHORTEST", 0.5)
    monkeypatch.setattr(darts, "SMALL_FORM", 10.0)
    surface = Surface(*forms.cap(np.radians(50), 8))
    ray = np.array([1 + 3 * ring * (ring - 1) for ring in (8, 7, 6, 5)])
    network = Network(surface, np.zeros(len(surface.edges), dtype=bool), np.arange(len(surface.triangles)))
    judges = Judges(goods.get("wool felt"), 0.5)
    met = judges.all(network.with_seams(surface.edge_index(np.column_stack([ray[:-1], ray[1:]]))))
    found = without_stubs(judges, met)
    assert judges.all(network).use > met.use > 1
    assert met.network.length() < 0.5 <= found.network.length() < 0.7
    assert found.use < met.use and len(found.network.chains) == 1


def test_both_sides_of_a_symmetric_piece_get_the_same_darts():
    """A strip with a cone's tip at each end: a dart to each, though one is a little worse."""
    points, faces = forms.disk(1.0, 20)
    tips = [np.maximum(0.0, 0.3 - np.linalg.norm(points[:, :2] - [x, 0.0], axis=1)) for x in (-0.5, 0.5)]
    surface = Surface(np.column_stack([points[:, :2], 0.8 * tips[0] + 0.82 * tips[1]]), faces)
    network = Network(surface, np.zeros(len(surface.edges), dtype=bool), np.arange(len(surface.triangles)))
    judges, plane = Judges(goods.get("wool felt"), 0.5), Plane(np.zeros(3), np.array([1.0, 0.0, 0.0]), 0.02)
    met = judges.all(network)
    found = darted(judges, met, [plane])
    assert found.use < met.use
    ends = [end for chain in found.network.chains for end in (chain[0], chain[-1]) if np.abs(surface.points[end, 0]) < 0.7]
    places = surface.points[ends][:, :2]
    assert len(places) % 2 == 0 and len(places)
    np.testing.assert_allclose(sorted(places[:, 0]), sorted(-places[:, 0]), atol=0.06)


def test_what_fits_gets_no_dart():
    judges = Judges(goods.get("spandex"), 0.0)
    met = judges.all(cone_without_seam(0.1))
    assert met.fits
    assert darted(judges, met) is met


def test_a_sharp_tip_does_not_spoil_the_rest_of_a_piece():
    """A flat disk with a sharp spike in the middle: less of it is beyond the limits than with the least worst place."""
    points, faces = forms.disk(1.0, 24)
    off = np.linalg.norm(points[:, :2], axis=1)
    points = np.column_stack([points[:, :2], np.maximum(0.0, 0.15 - off) * 6])
    surface = Surface(points, faces)
    felt = goods.get("wool felt")
    one = judge(surface, felt, 0.5, stages=None)
    kept = resigned(surface, one, felt, 0.5)
    before, after = (measure(points, faces, judged.flat, felt).beyond for judged in (one, kept))
    assert before > 0.005
    assert after < before
    assert not kept.crossings
    assert (measure(points, faces, kept.flat, felt).stretch > -1).all()


def test_a_short_dart_is_not_led_on_into_what_is_flat():
    """A plane sheet with a cone near its edge, where darts of 0.7 m are the least: beyond the cone's foot the two sides of
    one would lie on each other. Where the sheet is a cap instead, the dart goes on."""
    points, faces = forms.disk(1.0, 20)
    place = np.array([0.8, 0.0, 0.25])
    cone = np.maximum(0.0, 0.25 - np.linalg.norm(points[:, :2] - place[:2], axis=1))
    for height, led_on in ((cone, False), (cone - 0.1 * (points**2).sum(axis=1), True)):
        part = Surface(np.column_stack([points[:, :2], height]), faces)
        way, = darts._ways_from_edge(part, [place], np.ones(len(part.edges), dtype=bool), 0.7)
        length = np.linalg.norm(np.diff(part.points[way], axis=0), axis=1).sum()
        assert 0.7 < length < 1.0 if led_on else length < 0.5
        assert np.abs(angle_defects(part)[way[-1]]) > darts.FLAT
