"""The length term moves circles as curve shortening does, and leaves great circles where they are.

Sources: Gage and Hamilton 1986, Grayson 1987; closed forms by the chain rule. A circle of radius r in the plane has
dL/dr = 2 pi and shrinks as r^2 = r0^2 - 2 t; on the unit sphere, at polar angle theta, dL/dtheta = 2 pi cos(theta) and
cos(theta) = cos(theta0) e^t; geodesic curvature 1/r and cot(theta).
"""

from dataclasses import replace

import numpy as np
import pytest
from forms import disk, icosphere
from seamwright.form.surface import Surface
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.energy import evaluate
from seamwright.seams.level import Level

CIRCLES = 24


def plane():
    """(level, centre -> distance function, closed forms): a flat disk; circles off its middle, clear of its rings."""
    points, faces = disk(1.0, 40)

    def distance(seed):
        centre = np.random.default_rng(seed).uniform(0.1, 0.25, 2)
        return lambda at: np.hypot(*(at[:, :2] - centre).T)

    return Level(Surface(points, faces), np.zeros(len(points))), distance


def sphere(level=5):
    """The same for the unit sphere, its points drawn aside so that no symmetry helps; distance is the polar angle about a
    pole at random."""
    points, faces = icosphere(level)
    points = points + 0.15 * np.sin(2 * points[:, [1, 2, 0]] + [0.3, 1.1, 2.0])
    points /= np.linalg.norm(points, axis=1, keepdims=True)

    def distance(seed):
        pole = np.random.default_rng(seed).normal(size=3)
        pole /= np.linalg.norm(pole)
        return lambda at: np.arccos(np.clip(at @ pole / np.linalg.norm(at, axis=1), -1, 1))

    return Level(Surface(points, faces), np.zeros(len(points))), distance


def circle(level, distance, radius):
    """(length, gradient of the length by the radius): the cut whose every point has the distance `radius`, by bisection."""
    surface = level.surface
    height = distance(surface.points) - radius
    cut = cut_by_fields(surface, np.column_stack([-height, height]))
    a, b = surface.points[surface.edges[cut.edge]].transpose(1, 0, 2)
    low, high, inner = np.zeros(len(a)), np.ones(len(a)), height[surface.edges[cut.edge, 0]] < 0
    for _ in range(50):
        middle = (low + high) / 2
        near = (distance(a + middle[:, None] * (b - a)) < radius) == inner
        low, high = np.where(near, middle, low), np.where(near, high, middle)
    place, step = (low + high) / 2, 1e-6
    growth = (distance(a + (place + step)[:, None] * (b - a)) - distance(a + (place - step)[:, None] * (b - a))) / (2 * step)
    cost = evaluate(level, replace(cut, place=place), 1.0, "square", np.zeros(2))
    assert cost.distortion == 0
    return cost.length, (cost.slope / growth).sum()


@pytest.mark.parametrize(("made", "low", "high", "length", "rise"), [
    (plane, 0.3, 0.7, lambda r: 2 * np.pi * r, lambda r: 2 * np.pi),
    (sphere, 0.5, 1.1, lambda t: 2 * np.pi * np.sin(t), lambda t: 2 * np.pi * np.cos(t)),
], ids=["plane", "sphere"])
def test_length_and_its_gradient(made, low, high, length, rise):
    level, distance = made()
    errors = []
    for seed, radius in enumerate(np.linspace(low, high, CIRCLES)):
        measured, gradient = circle(level, distance(seed), radius)
        assert measured == pytest.approx(length(radius), rel=1e-3)
        errors.append(gradient / rise(radius) - 1)
    # points that slide along edges nearly parallel to the circle scatter the single gradients
    assert abs(np.mean(errors)) < 0.001
    assert np.abs(errors).max() < 0.01


@pytest.mark.parametrize(("made", "start", "end", "time"), [
    (plane, 0.7, 0.35, lambda start, end: (start**2 - end**2) / 2),
    (sphere, 1.2, 0.6, lambda start, end: np.log(np.cos(end) / np.cos(start))),
], ids=["plane", "sphere"])
def test_time_a_circle_takes_to_shrink(made, start, end, time):
    level, distance = made()
    distance = distance(3)
    edges = np.linspace(start, end, 25)
    taken = 0.0
    for a, b in zip(edges[:-1], edges[1:], strict=True):
        length, gradient = circle(level, distance, (a + b) / 2)
        taken += (a - b) * length / gradient  # speed = - gradient over length element
    assert taken == pytest.approx(time(start, end), rel=0.001)


def test_a_great_circle_rests():
    pulls = []
    for refined in (3, 4, 5):
        level, distance = sphere(refined)
        gradients = [circle(level, distance(seed), np.pi / 2)[1] for seed in range(12)]
        pulls.append(np.sqrt(np.mean(np.square(gradients))) / (2 * np.pi))
    assert np.log2(pulls[0] / pulls[2]) / 2 > 1.6  # second order, blurred by the few circles averaged
    assert pulls[2] < 1e-3
