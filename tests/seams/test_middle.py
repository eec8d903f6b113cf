"""The middle of three cuts: Torricelli's point, its gradient exact."""

import numpy as np
import pytest
from scipy.optimize import minimize
from seamwright.seams.middle import LEAST, ROUND, middles, pulled, shares


def triangles(count=300, seed=3):
    """(count, 3, 2) random triangles, counter-clockwise."""
    cuts = np.random.default_rng(seed).normal(size=(count, 3, 2))
    a, b = cuts[:, 1] - cuts[:, 0], cuts[:, 2] - cuts[:, 0]
    clockwise = a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0] < 0
    cuts[clockwise] = cuts[clockwise][:, ::-1]
    return cuts


def angles(cuts):
    ahead, back = np.roll(cuts, -1, axis=1) - cuts, np.roll(cuts, 1, axis=1) - cuts
    return np.degrees(np.arccos((ahead * back).sum(2) / np.linalg.norm(ahead, axis=2) / np.linalg.norm(back, axis=2)))


def test_ways_meet_at_120_degrees():
    """Where every angle is well under 120 degrees (Torricelli; Courant, Robbins: What is Mathematics?, VII.5)."""
    cuts = triangles()
    cuts = cuts[angles(cuts).max(axis=1) < 100]
    away = cuts - middles(cuts, 0.0)[:, None]
    away /= np.linalg.norm(away, axis=2, keepdims=True)
    assert len(cuts) > 50
    assert np.abs(away.sum(axis=1)).max() < ROUND


def test_least_way_found_by_search():
    for cuts in triangles(12, seed=5):
        best = minimize(lambda at, cuts=cuts: np.linalg.norm(cuts - at, axis=1).sum(), cuts.mean(axis=0),
                        method="Nelder-Mead", options={"xatol": 1e-9, "fatol": 1e-12}).fun
        assert np.linalg.norm(cuts - middles(cuts[None], 0.0)[0], axis=1).sum() == pytest.approx(best, rel=1e-3)


def test_beyond_120_degrees_it_is_the_cut_but_for_a_share():
    cuts = np.array([[[0.0, 0.0], [1.0, 0.1], [-1.0, 0.1]]])
    assert shares(cuts, 0.0)[0, 0] > 0.99
    assert shares(cuts)[0] == pytest.approx([1 - 2 * LEAST, LEAST, LEAST], abs=0.01)
    assert (shares(triangles()) >= LEAST).all() and shares(triangles()).sum(axis=1) == pytest.approx(1)


def test_the_same_in_space_and_at_any_size():
    cuts = triangles()
    turned = 7 * cuts @ np.linalg.qr(np.random.default_rng(1).normal(size=(3, 3)))[0][:2]
    np.testing.assert_allclose(shares(turned), shares(cuts), atol=1e-9)


def test_gradient_against_differences():
    cuts, pull, step = triangles(), np.random.default_rng(2).normal(size=(300, 2)), 1e-6
    gradient = pulled(cuts, pull)
    for cut in range(3):
        for axis in range(2):
            ends = []
            for sign in (-step, step):
                moved = cuts.copy()
                moved[:, cut, axis] += sign
                ends.append((middles(moved) * pull).sum(axis=1))
            np.testing.assert_allclose(gradient[:, cut, axis], (ends[1] - ends[0]) / (2 * step), atol=1e-7)
