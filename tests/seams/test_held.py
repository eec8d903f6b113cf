"""Held seams: they are seams of every pattern to the last edge, and everything else goes on as ever."""

from functools import cache

import numpy as np
import pytest
import seamwright as sw
from forms import ellipsoid, frustum, globe, icosphere, together, torus, wrapped_grid
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra
from seamwright.form.measure import areas
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.fields import from_labels
from seamwright.seams.held import ALIKE, Held
from seamwright.seams.ladder import Ladder
from seamwright.seams.network import cut_through
from tiled import check_tiled

BALL = icosphere(3)
RING = torus(1.0, 0.4, 30, 16)[0], wrapped_grid(30, 16)
EGG = ellipsoid(1.0, 0.7, 0.5, 3)
GLOBE = globe(24, 12)
LEMON = globe(24, 14, (0.5, 0.6, 1.0))


def way(points, faces, *places):
    """(k, 2) edges of the shortest way along edges from place to place."""
    form = sw.Form(points, faces)
    surface, real = form.surface, ~form.diagonal
    graph = coo_matrix((surface.edge_lengths[real], tuple(surface.edges[real].T)), shape=(len(points),) * 2).tocsr()
    stops = [int(np.linalg.norm(surface.points - place, axis=1).argmin()) for place in places]
    path = stops[:1]
    for start, stop in zip(stops[:-1], stops[1:], strict=True):
        before = dijkstra(graph, directed=False, indices=start, return_predecessors=True)[1]
        back = [stop]
        while back[-1] != start:
            back.append(int(before[back[-1]]))
        path += back[-2::-1]
    return np.column_stack([path[:-1], path[1:]])


def in_plane(points, faces, axis):
    """(k, 2) edges of a form that lie in the plane through the origin across an axis."""
    surface = sw.Form(points, faces).surface
    return surface.edges[np.abs(surface.points[surface.edges][:, :, axis]).max(axis=1) < 1e-9]


SLIT = way(*BALL, (1, 0, 0.2), (0.2, 0.9, 0.3), (-0.6, 0.4, 0.7))
FORK = np.concatenate([SLIT, way(*BALL, (0.2, 0.9, 0.3), (0, 0, -1))])
QUARTER = np.array([(i * 16, (i + 1) * 16) for i in range(12)])
CASES = {
    "slit": (BALL, SLIT, {}),
    "fork, to a thrift": (BALL, FORK, {"thrift": 0.05}),
    "ring around a ball": (GLOBE, in_plane(*GLOBE, 2), {"goods": "spandex", "thrift": 0.1}),
    "part of a rim": (RING, QUARTER, {"goods": "spandex", "thrift": 0.1}),
    "part of a rim, three pieces": (RING, QUARTER, {"goods": "spandex", "pieces": 3}),
    "across an open form": (frustum(0.5, 0.3, 0.6, 24), np.array([(1, 2), (2, 3), (3, 4)]), {"goods": "card"}),
    "one of two parts": (together(icosphere(2), icosphere(2, 0.5)), way(*icosphere(2), (1, 0, 0), (0, 1, 0)),
                         {"thrift": 0.1}),
}


@cache
def covered(name, route):
    (points, faces), held, wishes = CASES[name]
    form = sw.Form(points, faces, name=name)
    return form, held, sw.cover(form, sw.Wishes(**{"goods": "wool felt", **wishes}, route=route, held=held))


@pytest.fixture(params=[(name, route) for name in CASES for route in ("through", "edges")], name="made", ids="-".join)
def any_pattern(request):
    return covered(*request.param)


def shares_that_are_seams(form, pairs, pattern):
    """(k,) the share of every edge along which two edges of pieces are sewn together."""
    ends = np.concatenate([np.stack([seam.path[:-1], seam.path[1:]], axis=1) for seam in pattern.seams if not seam.open])
    found = []
    for a, b in form.points[form.point_of[np.asarray(pairs)]]:
        length = np.linalg.norm(b - a)
        along = (ends - a) @ (b - a) / length
        off = np.linalg.norm(ends - a - along[:, :, None] * (b - a) / length, axis=2).max(axis=1)
        on = (off < 1e-9) & (along.min(axis=1) > -1e-9) & (along.max(axis=1) < length + 1e-9)
        found.append(np.ptp(along[on], axis=1).sum() / length)
    return np.array(found)


def test_every_held_edge_is_a_seam(made):
    form, held, pattern = made
    np.testing.assert_allclose(shares_that_are_seams(form, held, pattern), 1, rtol=1e-9)


def test_pieces_are_flat_disks_that_tile_the_form(made):
    form, _, pattern = made
    check_tiled(form, pattern)


def test_both_sides_of_a_seam_are_the_same_line_on_the_form(made):
    _, _, pattern = made
    by_name = {piece.name: piece for piece in pattern.pieces}
    sides = {name: [] for name in by_name}
    for seam in pattern.seams:
        for name, along in seam.sides:
            if name is not None:
                np.testing.assert_allclose(by_name[name].points[along], seam.path, atol=1e-12)
                sides[name].append(np.sort(np.column_stack([along[:-1], along[1:]]), axis=1))
    for name, piece in by_name.items():  # and together they are all of the outline, once
        outline = np.sort(np.column_stack([piece.outline, np.roll(piece.outline, -1)]), axis=1)
        found = np.concatenate(sides[name])
        assert sorted(map(tuple, found.tolist())) == sorted(map(tuple, outline.tolist()))


def test_the_goods_are_served_as_without():
    for name in ("slit", "ring around a ball", "part of a rim"):
        for route in ("through", "edges"):
            pattern = covered(name, route)[2]
            assert pattern.fits and max(abs(seam.ease) for seam in pattern.seams) < pattern.goods.mismatch[0]


def halves():
    """(Held of a ball along its equator, a Network of the opened halves, each in two by a seam across, not the same)."""
    surface = sw.Form(*GLOBE).surface
    held = Held(surface, np.abs(surface.points[surface.edges][:, :, 2]).max(axis=1) < 1e-9)
    ladder = Ladder(held.opened)
    level, points = ladder.levels[-1], held.opened.points
    lower = np.zeros(len(points), dtype=int)
    lower[held.opened.triangles] = (points[held.opened.triangles][:, :, 2].mean(axis=1) < 0)[:, None]
    labels = 2 * lower + ((points * [1, 0.3, 0]).sum(axis=1) > 0.1 * lower)
    cut = cut_by_fields(level.surface, from_labels(level, labels))
    return held, cut, cut_through(level, cut, 1 / ladder.factor)


def test_a_network_is_sewn_together_with_the_points_of_both_sides():
    held, _, network = halves()
    assert held.opened.triangle_components[0] == 2
    corners = network.surface.points[network.surface.triangles]
    whole, came, values = held.sewn_together(network, corners)
    assert not whole.surface.open_edges.any() and whole.surface.euler == 2
    assert network.pieces[0] == whole.pieces[0] == 4
    np.testing.assert_array_equal(whole.source, network.source[came])
    np.testing.assert_allclose(values, whole.surface.points[whole.surface.triangles], atol=1e-15)  # the very places
    ring = held.surface.edge_lengths[held.edges].sum()
    assert whole.length() == pytest.approx(network.length() + ring, rel=1e-12)
    np.testing.assert_allclose(np.bincount(whole.source, areas(whole.surface)), areas(held.surface), rtol=1e-12)
    back = held.opened_network(whole)  # opened again it is what it was
    assert back.length() == pytest.approx(network.length(), rel=1e-12) and back.pieces[0] == 4
    on_ring = np.abs(whole.surface.points[whole.surface.edges][:, :, 2]).max(axis=1) < 1e-9
    assert on_ring.sum() == 24 + 4 and whole.seam[on_ring].all()  # two seams meet it from either side
    assert [len(loop) for loop in back.surface.boundary_loops] == [28, 28]


def test_cuts_that_nearly_meet_at_a_held_edge_meet():
    held, cut, _ = halves()
    on = np.flatnonzero(held.edges[held.whole_edge[cut.edge]])
    on = on[np.argsort(held.whole_edge[cut.edge[on]], kind="stable")]
    assert len(on) == 4  # two of them on either side, one pair on one edge
    turned = held.origin[held.opened.edges[cut.edge[on], 0]] != held.surface.edges[held.whole_edge[cut.edge[on]], 0]
    whole = held.whole_edge[cut.edge[on]]
    pair = np.flatnonzero(np.diff(whole) == 0)[0]
    for gap in (0.9 * ALIKE, 1.1 * ALIKE):
        place = np.full(4, 0.3)
        place[pair] += gap
        cut.place[on] = np.where(turned, 1 - place, place)
        found = held.evened(cut).place[on]
        found = np.where(turned, 1 - found, found)
        place[[pair, pair + 1]] = (0.3 + gap / 2, 0.3 + gap / 2) if gap < ALIKE else (0.3 + gap, 0.3)
        np.testing.assert_allclose(found, place, atol=1e-12)


@pytest.mark.parametrize("route", ["through", "edges"])
def test_a_centre_seam_keeps_the_symmetry(route):
    pattern = sw.cover(sw.Form(*LEMON), sw.Wishes(goods="wool felt", held=in_plane(*LEMON, 0), route=route, thrift=0.03))
    assert [plane["normal"] for plane in pattern.details["planes"]] == [pytest.approx([1, 0, 0], abs=1e-3)]
    area = {piece.name: piece.areas.sum() for piece in pattern.pieces}
    assert pattern.details["mirrored"]
    for left, right in pattern.details["mirrored"]:
        assert left.endswith("left") and right.endswith("right")
        assert area[left] == pytest.approx(area[right], rel=0.02)
    assert sum(map(len, pattern.details["mirrored"])) == len(pattern.pieces)  # no piece crosses the centre seam


def test_seams_held_on_one_side_alone_leave_no_symmetry():
    slit = way(*EGG, (1, 0, 0), (0.5, 0.6, 0.1))
    wishes = {"goods": "spandex", "held": slit, "thrift": 0.1}
    assert sw.cover(sw.Form(*EGG), sw.Wishes(**wishes)).details["planes"] == []
    with pytest.raises(sw.WishError, match="held and symmetry: held is not alike"):
        sw.cover(sw.Form(*EGG), sw.Wishes(**wishes, symmetry=[((0, 0, 0), (1, 0, 0))]))


def test_what_is_there_is_improved_and_the_held_seam_stays():
    form = sw.Form(*EGG)
    oblique = (EGG[0][EGG[1]].mean(axis=1) @ [0.3, 0.2, 1.0] > 0.15).astype(int)
    held = way(*EGG, (1, 0, 0), (0.5, 0.6, 0.1))
    first = sw.cover(form, sw.Wishes(goods="spandex", start=oblique, held=held, thrift=0.05))
    assert not any(note.startswith("Start") for note in first.notes)  # better was found, though one seam had to stay
    np.testing.assert_allclose(shares_that_are_seams(form, held, first), 1, rtol=1e-9)
    more = way(*EGG, (-1, 0, 0), (-0.5, -0.6, -0.1))
    for both in (held, np.concatenate([held, more])):
        second = sw.cover(form, sw.Wishes(goods="spandex", start=first, held=both))
        np.testing.assert_allclose(shares_that_are_seams(form, both, second), 1, rtol=1e-9)


def test_the_same_pattern_again():
    form, held, pattern = covered("slit", "through")
    again = sw.cover(form, sw.Wishes(goods="wool felt", held=held[::-1, ::-1]))
    for old, new in zip(pattern.pieces, again.pieces, strict=True):
        np.testing.assert_array_equal(old.flat, new.flat)


def test_edges_where_the_form_ends_need_no_holding():
    points, faces = frustum(0.5, 0.3, 0.6, 24)
    plain = sw.cover(sw.Form(points, faces), sw.Wishes(goods="card"))
    held = sw.cover(sw.Form(points, faces), sw.Wishes(goods="card", held=[(0, 6)]))
    assert np.array_equal(plain.pieces[0].flat, held.pieces[0].flat)


QUADS = [(0, 1, 4, 3), (1, 2, 5, 4), (3, 4, 7, 6), (4, 5, 8, 7)]
SHEET = np.array([(x, y, 0.0) for y in range(3) for x in range(3)])


@pytest.mark.parametrize(("wish", "words"), [
    ({"held": [(0, 9)]}, "held: point 9 is none of this form, whose points run from 0 to 8"),
    ({"held": [(-1, 0)]}, "held: point -1 is none"),
    ({"held": [(0, 1), (0, 8), (1, 7)]}, "held: points 0 and 8 are not the ends of an edge of 'sheet', and 1 more"),
    ({"held": [(0, 4), (4, 8)]}, "a line across a face is none"),
    ({"held": [(0, 1, 2)]}, "held: \\[\\(0, 1, 2\\)\\] is not pairs of point numbers"),
    ({"held": [(0.5, 1)]}, "held: .* is not pairs of point numbers"),
    ({"held": "all"}, "held: 'all' is not pairs of point numbers"),
    ({"held": [(1, 4)], "keep_clear": np.full(9, np.inf)},
     "held and keep_clear: the edge from point 1 to point 4 is a held seam where there may never be one"),
    ({"held": [(1, 4), (4, 7)], "pieces": 1}, "pieces and held: 1 pieces, and the held seams alone part 'sheet' into 2"),
])
def test_a_seam_that_cannot_be_held(wish, words):
    with pytest.raises(sw.WishError, match=words) as caught:
        sw.cover(sw.Form(SHEET, QUADS, name="sheet"), sw.Wishes(**wish))
    assert str(caught.value).endswith(".")


def test_one_edge_alone_is_no_seam():
    inner = sw.Form(*BALL).surface.edges[100]
    with pytest.raises(sw.WishError, match=f"held: the edge from point {inner[0]} to point {inner[1]} is alone"):
        sw.cover(sw.Form(*BALL), sw.Wishes(held=[inner]))


def test_held_seams_that_leave_what_cannot_lie_flat():
    points, faces = frustum(0.5, 0.3, 0.6, 24)
    rings = np.array([[(k * 6 + row, (k + 1) % 24 * 6 + row) for k in range(24)] for row in (1, 4)]).reshape(-1, 2)
    never = np.where(np.isin(np.arange(len(points)) % 6, (2, 3)), np.inf, 0.0)
    with pytest.raises(sw.WishError, match="seams may never be anywhere around point 1, and the held seams leave there"):
        sw.cover(sw.Form(points, faces, name="cone"), sw.Wishes(goods="card", held=rings, keep_clear=never))
