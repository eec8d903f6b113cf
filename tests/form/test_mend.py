"""Mending: every harmless fault is put right, said in a sentence, and the surface is what it was before the fault."""

import numpy as np
import pytest
from forms import cube, cylinder, disk, icosphere, soup, together, torus
from seamwright.form.form import Form
from seamwright.form.measure import total_area, volume


def the_sentence(form, words):
    """The one sentence of form.mended that holds the words."""
    said = [sentence for sentence in form.mended if words in sentence]
    assert len(said) == 1, form.mended
    return said[0]


def test_a_sound_form_is_left_alone():
    points, faces = icosphere(2)
    form = Form(points, faces, name="ball")
    assert form.mended == [] and form.name == "ball" and form.face_count == len(faces)
    assert np.array_equal(form.points, points) and np.array_equal(form.triangles, faces)
    assert np.array_equal(form.point_of, np.arange(len(points))) and np.array_equal(form.polygon, np.arange(len(faces)))
    assert not form.diagonal.any()


def test_the_callers_arrays_are_not_touched():
    points, faces = soup(*icosphere(1))
    kept = points.copy(), faces.copy()
    form = Form(points, faces)
    form.points[:] = 0
    assert np.array_equal(points, kept[0]) and np.array_equal(faces, kept[1])


@pytest.mark.parametrize("scale", [1e-6, 1.0, 1e6])
def test_loose_triangles_are_joined(scale):
    points, faces = icosphere(3)
    loose, apart = soup(points * scale, faces)
    form = Form(loose, apart)
    assert len(form.points) == len(points) and form.surface.euler == 2 and not form.surface.open_edges.any()
    assert the_sentence(form, "joined").startswith(f"{3 * len(faces) - len(points):,} points")
    assert np.array_equal(form.points[form.point_of], loose)


def test_points_a_hair_apart_are_joined_and_no_farther():
    points, faces = soup(*icosphere(2))
    shake = np.random.default_rng(0).uniform(-1, 1, points.shape)
    assert Form(points + 1e-8 * shake, faces).surface.euler == 2
    assert Form(points + 1e-4 * shake, faces).mended == []


def test_edges_without_length_are_collapsed():
    """A ball whose pole is a ring of points in one place, as a rotated profile gives it."""
    points, faces = cylinder(1.0, 2.0, 12, rings=2)
    points[2::3] = points[2::3].mean(axis=0)
    form = Form(points, faces)
    assert len(form.points) == 12 * 2 + 1 and len(form.surface.boundary_loops) == 1
    assert the_sentence(form, "joined").startswith("11 points")


def test_closed_parts_that_touch_stay_apart():
    one = cube(1.0, 2)
    form = Form(*together(one, (one[0] + (1, 0, 0), one[1])))
    assert form.mended == [] and form.surface.triangle_components[0] == 2


def test_points_stay_apart_where_joining_would_crowd_an_edge():
    """Two open tubes end to end and a lid between: joined, three faces would meet all along the ring."""
    tube = cylinder(1.0, 1.0, 12, rings=2)
    lid, fan = disk(1.0, 2)
    form = Form(*together(tube, (tube[0] + (0, 0, 1), tube[1]), (lid + (0, 0, 1), fan)))
    assert form.surface.triangle_components[0] == 3
    assert the_sentence(form, "left apart")


def test_doubled_faces_are_left_out():
    points, faces = icosphere(1)
    form = Form(points, np.concatenate([faces, faces[:7, ::-1], faces[3:5]]))
    assert the_sentence(form, "doubled").startswith("9 faces")
    assert np.array_equal(form.triangles, faces) and np.array_equal(form.polygon, np.arange(len(faces)))


def test_faces_with_fewer_than_three_different_corners_are_left_out():
    points, faces = icosphere(1)
    odd = [tuple(face) for face in faces] + [(3, 3, 5), (4, 7), (), (6,)]
    form = Form(points, odd)
    assert the_sentence(form, "fewer than three").startswith("4 faces")
    assert np.array_equal(form.triangles, faces)


def test_a_repeated_corner_is_dropped_from_its_face():
    points, faces = cube(1.0, 1)
    odd = [[face[0], face[0], *face[1:]] for face in faces.tolist()]
    assert np.array_equal(Form(points, odd).triangles, Form(points, faces).triangles)


def test_unused_points_are_left_out():
    points, faces = icosphere(1)
    form = Form(np.insert(points, 5, 9.0, axis=0), faces + (faces >= 5))
    assert the_sentence(form, "without a face").startswith("1 point ")
    assert form.point_of[5] == -1 and np.array_equal(form.points, points)


def test_faces_are_turned_to_agree():
    points, faces = torus(1.0, 0.3, 24, 12)
    turned = np.random.default_rng(1).random(len(faces)) < 0.3
    mixed = np.where(turned[:, None], faces[:, ::-1], faces)
    form = Form(points, mixed)
    assert the_sentence(form, "turned over").startswith(f"{turned.sum()} faces")
    assert volume(form.surface) == pytest.approx(volume(Form(points, faces).surface), rel=1e-12)
    assert (form.surface.edge_triangles >= 0).all()


def test_closed_parts_face_outward_one_by_one():
    a, b = icosphere(2), cube(1.0, 2)
    quads = Form(*b)
    form = Form(*together((a[0], a[1][:, ::-1]), (quads.points + 3, quads.triangles)))
    assert the_sentence(form, "outward").startswith("1 closed part")
    sound = Form(*together(a, (quads.points + 3, quads.triangles)))
    assert volume(form.surface) == pytest.approx(volume(sound.surface), rel=1e-12)


def test_open_parts_keep_the_side_of_most_faces():
    points, faces = disk(1.0, 4)
    inside_up = faces.copy()
    inside_up[:5] = inside_up[:5, ::-1]
    assert np.array_equal(np.sort(Form(points, inside_up).triangles), np.sort(faces))
    assert Form(points, faces[:, ::-1]).mended == []


def test_touching_points_are_divided():
    a, b = icosphere(1), icosphere(1)
    points, faces = together(a, (b[0] + (2 * b[0][0] @ np.eye(3)), b[1]))
    opposite = len(a[0]) + np.argmin(np.linalg.norm(points[len(a[0]):] - points[0], axis=1))
    form = Form(points, np.where(faces == opposite, 0, faces))
    assert the_sentence(form, "divided").startswith("1 point ")
    assert form.surface.triangle_components[0] == 2 and len(form.points) == len(points)
    assert form.surface.euler == 4


def test_triangles_without_height_are_replaced_by_cutting_the_neighbour():
    """A point on the middle of an edge, with the sliver that fills the gap: area and closedness are kept."""
    points, faces = icosphere(1)
    a, b, c = faces[0]
    middle = len(points)
    form = Form(np.concatenate([points, [(points[a] + points[b]) / 2]]),
                np.concatenate([faces[1:], [(a, middle, c), (middle, b, c), (a, b, middle)]]))
    plain = Form(points, faces)
    assert the_sentence(form, "without height").startswith("1 triangle ")
    assert total_area(form.surface) == pytest.approx(total_area(plain.surface), rel=1e-12)
    assert form.surface.euler == 2 and not form.surface.open_edges.any()
    assert len(form.triangles) == len(faces) + 2


def test_the_same_form_gives_the_same_bytes():
    points, faces = soup(*torus(1.0, 0.4, 20, 10))
    one, two = Form(points, faces), Form(points, faces)
    assert one.points.tobytes() == two.points.tobytes() and one.triangles.tobytes() == two.triangles.tobytes()
