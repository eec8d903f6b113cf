"""What no mending can help is refused: the sentence names the form, the place and what to do."""

import numpy as np
import pytest
import seamwright
from forms import cube, icosphere, split_quads, wrapped_grid
from seamwright.errors import FormError
from seamwright.form.form import Form


def refusal(points, faces):
    with pytest.raises(FormError) as caught:
        Form(points, faces, name="fender")
    assert isinstance(caught.value, ValueError) and isinstance(caught.value, seamwright.SeamwrightError)
    message = str(caught.value)
    assert "fender" in message
    return message


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
def test_numbers_that_are_not_finite(bad):
    points, faces = icosphere(1)
    points[[7, 12], [0, 2]] = bad
    assert "points 7 and 12" in refusal(points, faces)


def test_points_that_are_no_rows_of_three():
    assert "three numbers" in refusal(np.zeros((4, 2)), [(0, 1, 2)])
    assert "three numbers" in refusal([(0, 0, 0), (1, 0)], [(0, 1, 0)])
    assert "three numbers" in refusal([], [])


@pytest.mark.parametrize("bad", [42, -1])
def test_corners_that_are_no_points(bad):
    points, faces = icosphere(1)
    faces[9, 1] = bad
    message = refusal(points, faces)
    assert "face 9" in message and f"point {bad}" in message and "0 to 41" in message


def test_corners_that_are_no_whole_numbers():
    points, faces = icosphere(0)
    assert "whole numbers" in refusal(points, faces + 0.5)
    assert Form(points, faces.astype(float)).surface.euler == 2
    assert "row of point numbers" in refusal(points, [1, 2, 3])


@pytest.mark.parametrize("faces", [[], np.zeros((0, 3), dtype=int), [()]])
def test_no_faces(faces):
    assert "nothing to cover" in refusal(np.eye(3), faces)


def test_faces_without_area():
    line = np.outer(np.arange(4.0), (1, 2, 3))
    assert "no area" in refusal(line, [(0, 1, 2), (1, 2, 3)])
    assert "on top of each other" in refusal(np.ones((3, 3)), [(0, 1, 2)])


def test_three_faces_at_an_edge():
    """A cube with a wall inside it."""
    points, faces = cube(1.0, 1)
    wall = [0, 1, 7, 6]
    corners = points[wall]
    assert np.ptp(corners, axis=0).min() >= 0
    message = refusal(points, [*faces.tolist(), wall])
    assert "three or more faces" in message and "face" in message and "6" in message and "Non Manifold" in message


def test_one_sided():
    """A band with half a twist (Moebius)."""
    n = 16
    turn = np.arange(n) * 2 * np.pi / n
    across = 0.3 * np.stack([np.cos(turn / 2) * np.cos(turn), np.cos(turn / 2) * np.sin(turn), np.sin(turn / 2)], axis=1)
    middle = np.stack([np.cos(turn), np.sin(turn), 0 * turn], axis=1)
    points = np.stack([middle - across, middle + across], axis=1).reshape(-1, 3)
    quads = wrapped_grid(n, 2, open_v=True)
    last = quads[:, 1] == 0
    quads[last, 1], quads[last, 2] = 1, 0
    assert "one-sided" in refusal(points, quads)
    assert Form(points, split_quads(quads[:-1])).surface.euler == 1
