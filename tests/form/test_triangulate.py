"""Faces with many corners: the triangles fill them exactly, and the maker's edges are told from diagonals."""

import numpy as np
import pytest
from forms import cube, cylinder
from seamwright.form.form import Form
from seamwright.form.measure import area_vectors, areas, total_area, triangle_normals


def turned(points):
    """Somewhere in space."""
    spin, _ = np.linalg.qr(np.random.default_rng(4).normal(size=(3, 3)))
    return points @ spin.T + (3, 1, 4)


def flat_polygon(outline):
    points = turned(np.column_stack([outline, np.zeros(len(outline))]))
    return Form(points, [list(range(len(outline)))])


def shoelace(outline):
    x, y = outline.T
    return 0.5 * float(x @ np.roll(y, -1) - y @ np.roll(x, -1))


def star(spikes, inner):
    angle = np.arange(2 * spikes) * np.pi / spikes
    return np.where(np.arange(2 * spikes) % 2, inner, 1.0)[:, None] * np.column_stack([np.cos(angle), np.sin(angle)])


COMB = np.array([(0, 0), (7, 0), (7, 5), (6, 5), (6, 1), (5, 1), (5, 5), (4, 5), (4, 1), (3, 1), (3, 5), (0, 5)], float)
SPIRAL = np.array([(0, 0), (6, 0), (6, 6), (1, 6), (1, 2), (4, 2), (4, 4), (3, 4), (3, 3), (2, 3), (2, 5), (5, 5), (5, 1),
                   (0, 1)], dtype=float)
DENT = np.array([(0, 0), (2, 1), (4, 0), (2, 4)], dtype=float)
ON_A_LINE = np.array([(0, 0), (1, 0), (2, 0), (3, 0), (3, 1), (3, 2), (1.5, 2), (0, 2)], dtype=float)


OUTLINES = {"star": star(5, 0.4), "gear": star(9, 0.7), "comb": COMB, "spiral": SPIRAL, "dent": DENT,
            "dent turned": np.roll(DENT, 1, axis=0), "on a line": ON_A_LINE, "fine star": star(60, 0.5)}


@pytest.mark.parametrize("outline", OUTLINES.values(), ids=OUTLINES)
def test_triangles_fill_the_polygon_once(outline):
    form = flat_polygon(outline)
    assert len(form.triangles) == len(outline) - 2
    assert total_area(form.surface) == pytest.approx(shoelace(outline), rel=1e-12)
    normals = triangle_normals(form.surface)
    assert np.allclose(normals, normals[0], atol=1e-9) and areas(form.surface).min() > 0
    assert form.diagonal.sum() == len(outline) - 3 and form.surface.euler == 1
    assert form.mended == []


def test_concave_quads_are_cut_inside():
    form = flat_polygon(DENT)
    (edge,) = form.surface.edges[form.diagonal]
    assert edge.tolist() == [1, 3]


def test_quads_take_the_shorter_diagonal():
    points = np.array([(0, 0, 0), (2, 0, 0), (3, 1, 0), (1, 1, 0)], dtype=float)
    form = Form(points, np.array([(0, 1, 2, 3)]))
    assert form.surface.edges[form.diagonal].tolist() == [[1, 3]]


def test_mixed_faces_know_where_they_come_from():
    points, faces = cylinder(1.0, 2.0, 24, rings=3, closed=True)
    form = Form(points, faces)
    assert form.face_count == len(faces) and form.surface.euler == 2 and not form.surface.open_edges.any()
    sizes = np.array([len(face) for face in faces])
    assert np.array_equal(np.bincount(form.polygon), sizes - 2)
    for face in (0, len(faces) - 2, len(faces) - 1):
        assert set(form.triangles[form.polygon == face].ravel()) == set(faces[face])


def test_diagonals_are_the_edges_the_maker_did_not_draw():
    points, quads = cube(1.0, 3)
    form = Form(points, quads)
    drawn = {tuple(sorted(pair)) for quad in quads.tolist() for pair in zip(quad, quad[1:] + quad[:1], strict=True)}
    assert {tuple(edge) for edge in form.surface.edges[~form.diagonal].tolist()} == drawn
    assert form.diagonal.sum() == len(quads)
    assert np.allclose(area_vectors(form.surface).sum(axis=0), 0, atol=1e-12)


@pytest.mark.parametrize("tip", [(0.9, 0.9, 0.5), (0, 0, 1), (-2, -2, 0.5), (-2, -2, 5)])
def test_two_quads_that_share_two_edges(tip):
    """Point 2 lies between two faces only: the diagonal between the ends they share must not be laid twice."""
    points = np.array([(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0), tip], dtype=float)
    form = Form(points, [(1, 2, 3, 0), (3, 2, 1, 4)])
    assert len(form.triangles) == 4 and form.surface.euler == 1 and form.diagonal.sum() == 2
    assert np.bincount(form.surface.triangle_edges.ravel()).max() == 2


def test_a_polygon_that_crosses_itself_still_gives_a_sound_surface():
    bow = np.array([(0, 0), (2, 2), (2, 0), (0, 2), (-1, 1)], dtype=float)
    form = flat_polygon(bow)
    assert len(form.triangles) == 3 and form.surface.euler == 1
