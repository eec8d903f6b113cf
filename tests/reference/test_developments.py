"""Developable forms lie flat without stretch, in the true size that drawing-board development gives."""

import numpy as np
import pytest
from seamwright.fit.measure import stretches
from seamwright.flat import flatten
from seamwright.form.surface import Surface


def ruled(below, above):
    """Strip of triangles between two open polylines (n, 3), outside seen with `below` running to the right."""
    n = len(below)
    low, high = np.arange(n - 1), n + np.arange(n - 1)
    return Surface(np.concatenate([below, above]),
                   np.concatenate([np.column_stack([low, low + 1, high + 1]), np.column_stack([low, high + 1, high])]))


def ring(radius, z, n):
    t = np.linspace(0, 2 * np.pi, n + 1)
    return np.column_stack([radius * np.cos(t), radius * np.sin(t), np.full(n + 1, z)])


def worst(surface, flat):
    return np.abs(stretches(surface.points, surface.triangles, flat)).max()


def test_frustum_development():
    # r1, r2, h = 100, 60, 80: slant from the apex 223.607 and 134.164, angle 160.997 degrees (L = r1 s / (r1 - r2),
    # s = hypot(r1 - r2, h), angle 2 pi (r1 - r2) / s); with n sides the form is a pyramid, and tends to it as 1 / n^2
    n = 720
    surface = ruled(ring(100, 0, n), ring(60, 80, n))
    done = flatten(surface)
    assert worst(surface, done.flat) < 1e-8
    low, high = done.flat[: n + 1], done.flat[n + 1:]
    apex = intersection(low[0], high[0], low[-1], high[-1])
    assert np.linalg.norm(low - apex, axis=1) == pytest.approx(223.607, abs=0.001)
    assert np.linalg.norm(high - apex, axis=1) == pytest.approx(134.164, abs=0.001)
    arms = low[0] - apex, low[-1] - apex
    angle = np.degrees(np.arccos(arms[0] @ arms[1] / np.linalg.norm(arms[0]) / np.linalg.norm(arms[1])))
    assert angle == pytest.approx(160.997, abs=0.002)


def intersection(a, b, c, d):
    share = np.linalg.solve(np.column_stack([b - a, c - d]), c - a)
    return a + share[0] * (b - a)


def test_mitred_bend_development():
    # ordinates of a mitred bend: (R + r cos v) tan(a / 2), sheet-metal drawing; a right-angled two-piece bend, R 150, r 50
    n, R, r, mitre = 360, 150.0, 50.0, np.radians(45)
    v = np.linspace(0, 2 * np.pi, n + 1)
    straight = np.column_stack([r * np.cos(v), r * np.sin(v), np.zeros(n + 1)])
    cut = straight + np.outer((R + r * np.cos(v)) * np.tan(mitre / 2), [0, 0, 1])
    surface = ruled(straight, cut)
    done = flatten(surface)
    assert worst(surface, done.flat) < 1e-8
    low, high = done.flat[: n + 1], done.flat[n + 1:]
    assert np.linalg.norm(low[-1] - low[0]) == pytest.approx(2 * np.pi * r, rel=2e-5)
    assert np.linalg.norm(high - low, axis=1) == pytest.approx((R + r * np.cos(v)) * np.tan(mitre / 2), abs=1e-6)


@pytest.mark.parametrize("profile", [lambda t: np.column_stack([np.cos(5 * t), np.sin(5 * t)]),
                                     lambda t: np.column_stack([t * np.cos(9 * t), t * np.sin(9 * t)]),
                                     lambda t: np.column_stack([t, 0.2 * np.sin(12 * t)])])
def test_cylinders_over_any_profile_keep_their_length(profile):
    # the development of a cylinder is the profile's length by its height
    t = np.linspace(0.2, 1, 150)
    base = np.column_stack([profile(t), np.zeros(150)])
    surface = ruled(base, base + [0, 0, 0.5])
    done = flatten(surface)
    assert worst(surface, done.flat) < 1e-8
    length = np.linalg.norm(np.diff(base, axis=0), axis=1).sum()
    assert np.linalg.norm(done.flat[149] - done.flat[0]) == pytest.approx(length, rel=1e-9)
