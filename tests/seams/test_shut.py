"""Shut edges: no seam runs along one, and the faces beside it are whole and in one piece, on every level and at the end."""

from functools import cache

import numpy as np
import pytest
import seamwright as sw
from forms import ellipsoid, globe, icosphere, starfish, torus, wrapped_grid
from seamwright.form.surface import Surface
from seamwright.seams.ladder import Ladder
from seamwright.seams.starts import starts, tidied
from seamwright.seams.topology import make_disks, regions, voronoi
from seamwright.seams.whole import bound_faces, is_disk, patches, united
from test_held import GLOBE, SLIT, in_plane, shares_that_are_seams, way

BALL = icosphere(3)
RING = torus(1.0, 0.4, 30, 16)[0], wrapped_grid(30, 16)
STAR = starfish(26)
RIM = np.array([(i * 16, (i + 1) * 16) for i in range(20)])
CIRCLE = np.array([(1 + 3 * 24 + j, 1 + 3 * 24 + (j + 1) % 24) for j in range(24)])  # the fourth of GLOBE's rings
CASES = {
    "a line": (BALL, SLIT, {}),
    "a line, to a thrift": (BALL, SLIT, {"thrift": 0.02}),
    "most of a rim": (RING, RIM, {"goods": "spandex"}),
    "along two limbs": (STAR, way(*STAR, (0.9, 0.1, 0.1), (0, 0, 0.2), (-0.7, 0.6, 0.1)),
                        {"goods": "spandex", "thrift": 0.05}),
    "around a cap": (GLOBE, CIRCLE, {"goods": "spandex", "thrift": 0.1}),
}


@cache
def covered(name, route):
    (points, faces), shut, wishes = CASES[name]
    form = sw.Form(points, faces, name=name)
    return form, shut, sw.cover(form, sw.Wishes(**{"goods": "wool felt", **wishes}, route=route, shut=shut))


@pytest.fixture(params=[(name, route) for name in CASES for route in ("through", "edges")], name="made", ids="-".join)
def any_pattern(request):
    return covered(*request.param)


def beside(form, pairs):
    """(k, 2) the maker's faces on the two sides of every edge."""
    return form.polygon[form.surface.edge_triangles[form.surface.edge_index(form.point_of[np.asarray(pairs)])]]


def pieces_of_faces(form, pattern):
    """List of the sets of pieces that hold some of each of the maker's faces."""
    found = [set() for _ in range(form.face_count)]
    for number, piece in enumerate(pattern.pieces):
        for face in np.unique(form.polygon[piece.source]).tolist():
            found[face].add(number)
    return found


def check_free(form, shut, pattern):
    held_by = pieces_of_faces(form, pattern)
    for first, second in beside(form, shut):
        assert held_by[first] == held_by[second] and len(held_by[first]) == 1
    assert shares_that_are_seams(form, shut, pattern).max() == 0


def test_no_seam_is_where_edges_are_shut(made):
    check_free(*made)


def test_pieces_are_disks(made):
    for piece in made[2].pieces:
        part = Surface(piece.points, piece.triangles)
        assert part.euler == 1 and part.triangle_components[0] == 1 and len(part.boundary_loops) == 1
        assert piece.flat_areas.min() > 0


@pytest.mark.parametrize("route", ["through", "edges"])
def test_a_seam_moves_off_where_it_was(route):
    form = sw.Form(*BALL)
    wishes = {"goods": "spandex", "thrift": 0.1, "route": route, "pieces": 2}
    held_by, (first, second) = pieces_of_faces(form, sw.cover(form, sw.Wishes(**wishes))), form.surface.edge_triangles.T
    sides = zip(first, second, strict=True)
    parted = [edge for edge, (i, j) in enumerate(sides) if held_by[i] != held_by[j] or len(held_by[i]) > 1]
    shut = form.surface.edges[parted[::12]]
    assert len(shut) > 3
    check_free(form, shut, sw.cover(form, sw.Wishes(**wishes, shut=shut)))


def test_the_goods_are_served_all_the_same():
    for name in ("a line", "most of a rim"):
        assert covered(name, "through")[2].fits and covered(name, "edges")[2].fits


def test_what_a_ring_encloses_goes_with_it():
    for route in ("through", "edges"):
        pieces = covered("around a cap", route)[2].pieces
        lowest = [piece.points[:, 2].min() for piece in pieces if piece.points[:, 2].max() > np.cos(4 * np.pi / 12) + 1e-9]
        assert len(lowest) == 1 and lowest[0] < np.cos(4 * np.pi / 12) - 1e-9


def line_of(form, pairs):
    """(t,) bool: triangles beside edges."""
    return np.isin(form.polygon, beside(form, pairs))


@pytest.mark.parametrize("name", CASES)
def test_labels_of_every_level_keep_patches_whole(name):
    (points, faces), shut, _ = CASES[name]
    form = sw.Form(points, faces)
    patch = patches(form.surface, line_of(form, shut))
    assert is_disk(form.surface, patch == 0) and patch.max() == 0
    ladder = Ladder(form.surface, rungs=(60, 200), patch=patch)
    random = np.random.default_rng(0)
    assert len(ladder.levels) > 1
    for level in ladder.levels:
        if level.patch is None:
            continue
        scattered = random.integers(0, 3, len(level.mass))
        many = [voronoi(level, 7), make_disks(level, np.zeros(len(level.mass), dtype=int)), tidied(level, scattered)]
        many += starts(level)
        for labels in many:
            assert len(set(labels[level.patch == 0])) == 1 and (regions(level, labels).euler == 1).all()
        fields = random.normal(size=(len(level.mass), 4))
        found, total = level.labels(fields), (fields * level.mass[:, None])[level.patch == 0].sum(axis=0)
        np.testing.assert_array_equal(found, np.where(level.patch == 0, total.argmax(), fields.argmax(axis=1)))
    assert ladder.levels[-1].patch is not None and ladder.levels[0].patch is not None


def test_patches_by_hand():
    form = sw.Form(*globe(8, 6))
    two = np.isin(form.polygon, beside(form, [(1, 9), (5, 13)]))  # two edges down from the first ring, a half turn apart
    patch = patches(form.surface, two)
    assert [np.flatnonzero(patch == number).tolist() for number in (0, 1)] == [[1, 2, 8, 9, 10, 16], [4, 5, 6, 12, 13, 14]]
    faces = bound_faces(form.surface, patch, form.polygon)
    assert (faces[two] >= 0).all()
    labels, number, mass = np.array([0, 1, 1, 2, 2]), np.array([0, 0, 0, -1, -1]), np.array([5.0, 1, 1, 1, 1])
    np.testing.assert_array_equal(united(labels, number, mass), [0, 0, 0, 2, 2])


@pytest.mark.parametrize("route", ["through", "edges"])
def test_held_and_shut_together(route):
    form = sw.Form(*BALL)
    shut = way(*BALL, (0, 0, 1), (0.7, 0, 0.7), (1, 0, 0))
    held = way(*BALL, (0, 0, -1), (-0.7, 0, -0.7), (-1, 0, 0))
    pattern = sw.cover(form, sw.Wishes(goods="spandex", thrift=0.1, held=held, shut=shut, route=route))
    check_free(form, shut, pattern)
    np.testing.assert_allclose(shares_that_are_seams(form, held, pattern), 1, rtol=1e-9)


@pytest.mark.parametrize("route", ["through", "edges"])
def test_a_start_with_seams_where_edges_are_shut(route):
    points, faces = ellipsoid(1.0, 0.7, 0.5, 3)
    form = sw.Form(points, faces)
    labels = (points[faces].mean(axis=1)[:, 0] > 0).astype(int)
    shut = way(points, faces, (-0.5, 0, 0.5), (0, 0, 0.5), (0.5, 0, 0.5))
    for start in (labels, sw.cover(form, sw.Wishes(goods="spandex", start=labels))):
        pattern = sw.cover(form, sw.Wishes(goods="spandex", start=start, shut=shut, route=route))
        check_free(form, shut, pattern)
        assert any(note.startswith("Start: its seams along shut edges") for note in pattern.notes)


def test_edges_shut_on_one_side_alone_leave_no_symmetry():
    form = sw.Form(*GLOBE)
    one_side = way(*GLOBE, (0.8, 0.5, 0.2), (0.4, 0.8, -0.3))
    wishes = {"goods": "spandex", "thrift": 0.1, "shut": one_side}
    assert sw.cover(form, sw.Wishes(**wishes)).details["planes"] == []
    with pytest.raises(sw.WishError, match="shut and symmetry: shut is not alike"):
        sw.cover(form, sw.Wishes(**wishes, symmetry=[((0, 0, 0), (1, 0, 0))]))
    both = np.concatenate([in_plane(*GLOBE, 0)[4:8], in_plane(*GLOBE, 2)])[:4]
    assert len(sw.cover(form, sw.Wishes(**{**wishes, "shut": both})).details["planes"]) == 1


TUBE = np.array([(5 * 16 + j, 5 * 16 + (j + 1) % 16) for j in range(16)])  # around the tube of RING


@pytest.mark.parametrize(("form", "wish", "words"), [
    (RING, {"shut": TUBE}, "shut: the edges around point [0-9]+ close a ring, and what has no seam cannot lie flat"),
    (BALL, {"shut": sw.Form(*BALL).surface.edges}, "shut: the edges around point 0 close a ring"),
    (BALL, {"shut": SLIT, "held": SLIT[2:5]}, "held and shut: the edge from point [0-9]+ to point [0-9]+ is wished to be"),
    (RING, {"shut": [(0, 17)]}, "shut: points 0 and 17 are not the ends of an edge"),
    (BALL, {"shut": [1, 2, 3]}, "shut: .* is not pairs of point numbers"),
])
def test_edges_that_cannot_be_shut(form, wish, words):
    with pytest.raises(sw.WishError, match=words) as caught:
        sw.cover(sw.Form(*form), sw.Wishes(**wish))
    assert str(caught.value).endswith(".")


def test_a_ring_with_a_gap_has_its_seam_in_the_gap():
    form = sw.Form(*RING)
    pattern = sw.cover(form, sw.Wishes(goods="spandex", thrift=0.1, shut=TUBE[:-4]))
    check_free(form, TUBE[:-4], pattern)
