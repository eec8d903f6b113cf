"""Darts where a piece is strained, and pieces that cannot fit: what is left beyond the limits."""

import forms
import numpy as np
import pytest
from seamwright.fit import goods
from seamwright.fit.darts import darted
from seamwright.fit.judge import judge
from seamwright.fit.measure import measure
from seamwright.fit.resigned import resigned
from seamwright.fit.tailored import Judges
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
