"""Pieces that would lie over themselves: the fence that keeps them apart, and what it costs."""

import numpy as np
import pytest
import shapely
from forms import cap, split_quads
from seamwright.flat import flatten, overlaps, untangled
from seamwright.flat.fence import Fence, Push
from seamwright.flat.flatten import DIRICHLET, as_complex
from seamwright.flat.rest import Rest
from seamwright.form.surface import Surface


def ring(turns, rings=60, across=6):
    """A strip wound about the z axis, rising as it goes: exact on a flat ring of nearly so many turns."""
    angle, radius = np.meshgrid(np.linspace(0, 2 * np.pi * turns, rings), np.linspace(0.5, 1, across), indexing="ij")
    points = np.stack([radius * np.cos(angle), radius * np.sin(angle), 0.05 * angle], axis=-1).reshape(-1, 3)
    i, j = (a.ravel() for a in np.meshgrid(np.arange(rings - 1), np.arange(across - 1), indexing="ij"))
    a, b = i * across + j, (i + 1) * across + j
    return Surface(points, split_quads(np.column_stack([a, a + 1, b + 1, b]))[:, ::-1])


def ruffle(height, rings=8, around=48, welded=3):
    """A dish with three waves, slit from its rim to near its middle: the slit's sides cross when it is laid flat."""
    radius, angle = np.meshgrid(np.linspace(0, 1, rings + 1)[1:], np.linspace(0, 2 * np.pi, around + 1), indexing="ij")
    points = np.stack([radius * np.cos(angle), radius * np.sin(angle), height * radius**2 * np.sin(3 * angle)], axis=-1)
    index = np.arange(radius.size).reshape(radius.shape)
    index[:welded, -1] = index[:welded, 0]
    quads = np.stack([index[:-1, :-1], index[1:, :-1], index[1:, 1:], index[:-1, 1:]], axis=-1).reshape(-1, 4)
    middle = np.column_stack([np.full(around, radius.size), index[0, :-1], index[0, 1:]])
    used, faces = np.unique(np.concatenate([split_quads(quads), middle]), return_inverse=True)
    return Surface(np.concatenate([points.reshape(-1, 3), np.zeros((1, 3))])[used], faces.reshape(-1, 3))


WOUND = {"a little over one turn": ring(1.1), "one turn and a half": ring(1.5), "slit": ruffle(0.3), "deep": ruffle(0.6)}


@pytest.mark.parametrize("name", WOUND)
def test_what_lies_over_itself_is_laid_apart_without_a_flip(name):
    surface = WOUND[name]
    assert overlaps(flatten(surface).flat, surface.boundary_loops[0])
    flat = untangled(surface, flatten(surface).flat)
    assert overlaps(flat, surface.boundary_loops[0]) == []
    u, v = (flat[surface.triangles[:, k]] - flat[surface.triangles[:, 0]] for k in (1, 2))
    assert (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0] > 0).all()
    assert untangled(surface, flatten(surface).flat).tobytes() == flat.tobytes()


def test_no_outside_library_finds_an_overlap():
    for surface in WOUND.values():
        outline = shapely.Polygon(untangled(surface, flatten(surface).flat)[surface.boundary_loops[0]])
        assert outline.is_valid


def test_a_fence_costs_nothing_where_nothing_is_close():
    surface = Surface(*cap(1.2, 8))
    rest = Rest(surface)
    free, fenced = (rest.area @ DIRICHLET.density(*rest.maps(as_complex(flat)))
                    for flat in (flatten(surface).flat, untangled(surface, flatten(surface).flat)))
    assert fenced == pytest.approx(free, rel=2e-3)


def test_a_ring_wound_too_far_gives_up_no_more_than_it_must():
    # a flat ring that keeps its width and closes at one turn: lengths along it shrink by the turns, at most
    surface = ring(1.1)
    rest = Rest(surface)
    alpha, beta = rest.maps(as_complex(untangled(surface, flatten(surface).flat)))
    worst = max(np.abs(np.log(np.abs(alpha) + np.abs(beta))).max(), np.abs(np.log(np.abs(alpha) - np.abs(beta))).max())
    assert worst < np.log(1.1) * 1.2


def close(seed=0):
    """A piece whose slit is nearly shut, and its fence."""
    surface = ruffle(0.3)
    fence = Fence(surface.points, surface.boundary_loops)
    return surface, fence, as_complex(untangled(surface, flatten(surface).flat))


def test_gaps_are_the_distances_an_outside_library_finds():
    surface, fence, flat = close()
    gap, ends, _ = fence.gaps(flat)
    assert len(gap) > 4
    found = {(point, tail) for point, tail, _ in ends.tolist()}
    spots = [shapely.Point(z.real, z.imag) for z in flat]
    for side, (tail, head) in enumerate(zip(fence.tail, fence.head, strict=True)):
        line = shapely.LineString([spots[tail], spots[head]])
        for place, point in enumerate(fence.tail):
            if point in (tail, head):
                continue
            ahead = (fence.at[place] - fence.at[side] - fence.side[side]) % fence.around[0]
            reach = min(fence.reach, 0.02 * min(ahead, (fence.at[side] - fence.at[place]) % fence.around[0]))
            away = line.distance(spots[point])
            if abs(away / reach - 1) > 1e-6:
                assert ((point, tail) in found) == (away < reach)
            if (point, tail) in found:
                at = np.flatnonzero((ends[:, 0] == point) & (ends[:, 1] == tail))[0]
                assert gap[at] * reach == pytest.approx(away, rel=1e-6)


def test_the_push_is_the_derivative():
    surface, fence, flat = close()
    push = Push(fence, 1.0)
    gradient = push.slope(flat)
    rng = np.random.default_rng(0)
    move = rng.standard_normal(len(flat)) + 1j * rng.standard_normal(len(flat))
    step = 1e-8
    ahead, behind = (push.worth(flat + s * move) for s in (step, -step))
    assert np.vdot(gradient, move).real == pytest.approx((ahead - behind) / (2 * step), rel=1e-4)


def test_the_push_resists_as_its_force_changes():
    # along each gap by itself; that the direction of the gap turns is left out
    surface, fence, flat = close()
    gap, _, _ = fence.gaps(flat)
    rows, give = Push(fence, 1.0).rows(flat)
    step = 1e-7
    for at in range(0, len(gap), 3):
        row = rows[at].toarray().ravel()
        after = fence.gaps(flat + step * row / np.sum(np.abs(row) ** 2))[0][at]
        assert after - gap[at] == pytest.approx(step, rel=1e-3)
        force = [-2e-3 * (1 / x - 1) / x**2 for x in (gap[at], after)]
        assert (force[1] - force[0]) / step == pytest.approx(1 / give[at], rel=1e-3)


def test_outlines_that_cross_already_are_left_out():
    surface = ring(1.5)
    fence = Fence(surface.points, surface.boundary_loops)
    assert fence.uncrossed(as_complex(flatten(surface).flat)).outlines == []
    assert len(fence.uncrossed(as_complex(untangled(surface, flatten(surface).flat))).outlines) == 1


def test_crossing_is_never_worth_it():
    surface = ring(1.5)
    push = Push(Fence(surface.points, surface.boundary_loops), 1.0)
    assert np.isfinite(push.worth(as_complex(untangled(surface, flatten(surface).flat))))
    assert push.worth(as_complex(flatten(surface).flat)) == np.inf
