"""Seams alone, areas held: the least seams that part a sphere into 2, 3 and 4 equal areas, found by the flow itself.

Sources: least perimeters on the unit sphere 2 pi (Bernstein 1905), 3 pi (Masters 1996), 11.46380, the tetrahedron's
edges drawn on the sphere, 6 arccos(-1/3) (Engelstein 2009); three seams meet at 120 degrees (Plateau 1873).
"""

from dataclasses import replace

import numpy as np
import pytest
from scipy.spatial import ConvexHull
from seamwright.form.form import Form
from seamwright.seams import descend as flow
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.energy import evaluate
from seamwright.seams.fields import from_labels, redistance, smoothed
from seamwright.seams.ladder import Ladder
from seamwright.seams.level import Level, triangle_stiffness
from seamwright.seams.nodes import Nodes

LEAST = {2: 2 * np.pi, 3: 3 * np.pi, 4: 6 * np.arccos(-1 / 3)}
STIFF = 30.0  # price of unequal areas: half of it times the sum of their squares
CORNERS = {2: [[0, 0, 1], [0, 0, -1]], 3: [[1, 0, 0], [-0.5, 0.866, 0], [-0.5, -0.866, 0]],
           4: [[1, 1, 1], [-1, -1, 1], [1, -1, -1], [-1, 1, -1]]}


def lattice(count):
    """(points, faces) of the unit sphere: `count` points on an even spiral, their convex hull."""
    k = np.arange(count) + 0.5
    z, turn = 1 - 2 * k / count, np.pi * (1 + 5**0.5) * k
    points = np.column_stack([np.sqrt(1 - z * z) * np.cos(turn), np.sqrt(1 - z * z) * np.sin(turn), z])
    faces = ConvexHull(points).simplices
    a, b, c = points[faces].transpose(1, 0, 2)
    inward = np.einsum("tx,tx->t", np.cross(b - a, c - a), a) < 0
    faces[inward] = faces[inward][:, ::-1]
    return points, faces


def region_areas(level, cut, count):
    """(areas (count,), their slopes (count, c) by the cut places)."""
    corner, nodes = cut.labels[level.surface.triangles], Nodes(level, cut)
    whole = (corner == corner[:, :1]).all(axis=1)
    part, _, rise = triangle_stiffness(nodes.place[nodes.table])
    owner = cut.labels[nodes.point[nodes.table].min(axis=1)]  # the one corner that is a point, or either of two
    area = np.bincount(corner[whole, 0], level.areas[whole], minlength=count) + np.bincount(owner, part, minlength=count)
    slope = [nodes.by_place(nodes.gather(((owner == region) * part)[:, None, None] * rise), len(level.surface.edges))
             for region in range(count)]
    return area, np.array(slope)[:, cut.edge]


def holding_areas(count):
    """`evaluate` for a form without curvature, with a price on unequal areas."""
    def cost_of(level, cut, thrift, energy, weights=None, gradient=True, emphasis=None):
        cost = evaluate(level, cut, thrift, energy, weights, gradient=True, emphasis=emphasis)
        area, slope = region_areas(level, cut, count)
        off = area - level.areas.sum() / count
        return replace(cost, total=cost.total + STIFF / 2 * (off @ off), slope=cost.slope + STIFF * off @ slope)

    return cost_of


def flown(level, fields, steps, rounds):
    """The best Descent of some rounds; diffusing distances in between moves junctions (Esedoglu, Ruuth, Tsai 2010)."""
    best = None
    for _ in range(rounds):
        end = flow.descend(level, fields, 1.0, steps=steps, tolerance=1e-7)
        best = end if best is None or end.cost.total < best.cost.total else best
        fields = smoothed(level, redistance(level, end.cut, fields.shape[1]), 4.0)
    return best


def parted(surface, count, seed=7):
    """(Level, Descent) of the unit sphere's partition, from cells around corners that are off by a quarter."""
    ladder = Ladder(surface, rungs=(1500,))
    chance = np.random.default_rng(seed)
    corners = np.array(CORNERS[count], dtype=float)
    corners /= np.linalg.norm(corners, axis=1, keepdims=True)
    corners = corners @ np.linalg.qr(chance.normal(size=(3, 3)))[0] + 0.25 * chance.normal(size=(count, 3))
    corners /= np.linalg.norm(corners, axis=1, keepdims=True)
    levels = [Level(level.surface, np.zeros(len(level.load))) for level in ladder.levels]
    fields = from_labels(levels[0], (levels[0].surface.points @ corners.T).argmax(axis=1))
    for rung, level in enumerate(levels):
        fields = fields if rung == 0 else ladder.lift(fields, rung - 1)
        end = flown(level, fields, *((20, 6) if rung == 0 else (8, 4)))
        fields = end.fields
    return level, end


def arrivals(level, cut):
    """(3 j,) degrees between the seams that meet at each of the j junctions, seams taken as the circles they lie on."""
    surface = level.surface
    a, b = surface.edges[cut.edge].T
    places = surface.points[a] + cut.place[:, None] * (surface.points[b] - surface.points[a])
    pairs = np.sort(np.column_stack([cut.labels[a], cut.labels[b]]), axis=1)
    number = np.full(len(surface.edges), -1)
    number[cut.edge] = np.arange(len(cut.edge))
    found = []
    for at in number[cut.three.edges]:
        junction = places[at].mean(axis=0)
        leaving = []
        for pair in pairs[at]:
            seam = places[(pairs == pair).all(axis=1)]
            gap = np.linalg.norm(seam - junction, axis=1)
            seam = seam[(gap > 0.1) & (gap < 1)]
            normal = np.linalg.svd(seam, full_matrices=False)[2][-1]  # of the plane through the sphere's middle
            toward = np.cross(normal, junction)
            leaving.append(toward / np.linalg.norm(toward) * np.sign(toward @ (seam.mean(axis=0) - junction)))
        found += [np.degrees(np.arccos(leaving[k] @ leaving[(k + 1) % 3])) for k in range(3)]
    return np.array(found)


@pytest.fixture(params=LEAST, name="case")
def partition(request, monkeypatch):
    """(count, Level, Descent) on 20,000 points where seams meet, on 5,000 for the halves."""
    count = request.param
    monkeypatch.setattr(flow, "evaluate", holding_areas(count))
    return count, *parted(Form(*lattice(5_000 if count == 2 else 20_000)).surface, count)


def test_least_seams_and_their_junctions(case):
    count, level, end = case
    area = region_areas(level, end.cut, count)[0]
    assert area == pytest.approx(4 * np.pi / count, rel=1e-3)
    assert end.cost.length == pytest.approx(LEAST[count], rel=0.003)
    angles = arrivals(level, end.cut)
    assert len(angles) == {2: 0, 3: 6, 4: 12}[count]
    assert np.abs(angles - 120).max(initial=0) < 2


def test_slope_of_the_areas():
    """Against differences: what the flow is held by is exact."""
    level = Level(Form(*lattice(300)).surface, np.zeros(300))
    cut = cut_by_fields(level.surface, from_labels(level, (level.surface.points @ np.array(CORNERS[4]).T).argmax(axis=1)))
    slope, step = region_areas(level, cut, 4)[1], 1e-6
    for k in range(len(cut.place)):
        ends = []
        for sign in (-step, step):
            place = cut.place.copy()
            place[k] += sign
            ends.append(region_areas(level, replace(cut, place=place), 4)[0])
        np.testing.assert_allclose(slope[:, k], (ends[1] - ends[0]) / (2 * step), atol=1e-8)
