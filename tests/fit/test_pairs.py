"""Left and right alike: folded and mirrored pieces on forms whose mesh is its own mirror image."""

import numpy as np
import pytest
import seamwright as sw
from forms import cap, icosphere
from scipy.spatial import cKDTree
from seamwright.fit.goods import get
from seamwright.fit.grain import UP, pull
from seamwright.fit.pairs import paired
from seamwright.fit.tailored import Judges
from seamwright.flat.flatten import as_complex
from seamwright.flat.rest import Rest
from seamwright.form.mirror import Plane
from seamwright.form.surface import Surface
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.level import Level
from seamwright.seams.network import cut_through
from seamwright.seams.symmetric import Symmetry

X, Z = Plane(np.zeros(3), np.array([1.0, 0, 0]), 0.0), Plane(np.zeros(3), np.array([0, 0, 1.0]), 0.0)


def image(one, other, plane, atol=1e-9):
    """(k,) point of the piece `one` whose mirror image each point of `other` is, by their triangles."""
    gap, at = cKDTree(plane.mirrored(one.points[one.triangles].mean(axis=1))).query(
        other.points[other.triangles].mean(axis=1))
    corners = plane.mirrored(one.points)[one.triangles[at]]
    order = np.linalg.norm(other.points[other.triangles][:, :, None] - corners[:, None], axis=3).argmin(axis=2)
    point = np.empty(len(other.points), dtype=int)
    point[other.triangles] = np.take_along_axis(one.triangles[at], order, axis=1)
    np.testing.assert_allclose(other.points, plane.mirrored(one.points)[point], atol=atol)
    return point


def egg(rings):
    """Two lobes along x, lopsided along z: half a mesh, its mirror image about x = 0, and edges in the plane between."""
    points, faces = cap(np.pi / 2, rings)
    points = points[:, [2, 0, 1]]
    points[np.abs(points) < 1e-12] = 0
    both = np.concatenate([points, points * (-1, 1, 1)])
    points, at = np.unique(both, axis=0, return_inverse=True)
    faces = at.ravel()[np.concatenate([faces, (faces + len(both) // 2)[:, ::-1]])]
    return points * (0.05 + 0.15 * points[:, :1] ** 2 + 0.04 * points[:, 2:]), faces


@pytest.fixture(scope="module")
def quarters():
    """An egg in four wavy quarters, as a Network."""
    surface = Surface(*egg(10))
    level = Level(surface, np.zeros(len(surface.points)))
    x, y, z = level.surface.points.T
    level.symmetry = Symmetry(level.surface, [X])
    wave = 0.01 * np.sin(20 * y)
    return cut_through(level, cut_by_fields(level.surface, np.column_stack(
        [x + z - wave, -x + z - wave, x - z + wave, -x - z + wave])), 1.0)


@pytest.mark.parametrize("name, grain", [("upholstery", None), ("canvas", None), ("felt", None), ("canvas", (0, 1, 1)),
                                         ("canvas", (1, 0, 0)), ("canvas", (1, 1, 0))])
def test_twins_are_mirror_images_in_the_flat(quarters, name, grain):
    judges = Judges(get(name), 0.0, grain)
    free = judges.all(quarters)
    found = paired(free, [X], judges.goods, 0.0, grain)
    surfaces = [quarters.piece_surface(k)[0] for k in range(4)]
    right, high = np.sign([surface.points.mean(axis=0)[[0, 2]] - [0, 0.01] for surface in surfaces]).T
    pairs = [(a, b) for a in range(4) for b in range(4) if right[a] != right[b] and high[a] == high[b]]
    assert len(pairs) == 4
    for a, b in pairs:
        point = image(surfaces[a], surfaces[b], X)
        one, other = found.judged[a], found.judged[b]
        half_round = min(np.abs(one.flat[point] * sign - other.flat).max() for sign in ([-1, 1], [1, -1]))
        if grain == (1, 1, 0):  # neither along the plane nor across it: a held grain cannot be mirrored
            assert half_round > 1e-3
            np.testing.assert_array_equal(other.flat, free.judged[b].flat)
            continue
        assert half_round < 1e-9
        assert one.utilisation == pytest.approx(other.utilisation, rel=1e-9)
        assert one.utilisation <= max(free.judged[k].utilisation for k in (a, b))
    for surface, judged in zip(surfaces, found.judged, strict=True):
        run = pull(Rest(surface), UP if grain is None else grain) @ as_complex(judged.flat)
        assert run.imag > 0  # nap and held grain run the same way on both
        assert grain is None or run.real == pytest.approx(0, abs=1e-9)


def test_lower_and_upper_keep_the_way_of_the_nap():
    surface = Surface(*icosphere(2, 0.1))
    level = Level(surface, np.zeros(len(surface.points)))
    z = level.surface.points[:, 2]
    level.symmetry = Symmetry(level.surface, [Z])
    network = cut_through(level, cut_by_fields(level.surface, np.column_stack([z, -z])), 1.0)
    judges = Judges(get("upholstery"), 0.0)
    found = paired(judges.all(network), [Z], judges.goods, 0.0)
    surfaces = [network.piece_surface(k)[0] for k in range(2)]
    point = image(*surfaces, Z)
    one, other = (judged.flat for judged in found.judged)
    assert min(np.abs(one[point] * sign - other).max() for sign in ([-1, 1], [1, -1])) < 1e-9


@pytest.mark.parametrize("goods", ["leather", "jersey"])  # in cloth a neighbour on the bias draws its two sides unlike
def test_left_and_right_of_a_whole_pattern(goods):
    pattern = sw.cover(sw.Form(*egg(12), name="egg"), sw.Wishes(goods=goods, pieces=6))
    by_name = {piece.name: piece for piece in pattern.pieces}
    assert pattern.details["mirrored"]
    for left, right in pattern.details["mirrored"]:
        one, other = by_name[left], by_name[right]
        size = np.sqrt(one.areas.sum())
        point = image(one, other, X, 2e-3 * size)
        off = [one.flat[point] * sign - other.flat for sign in ([-1, 1], [1, -1])]
        assert min(np.abs(each - each.mean(axis=0)).max() for each in off) < 1e-3 * size
