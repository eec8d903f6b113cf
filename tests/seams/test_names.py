"""Names of pieces: the largest first, mirror images by one letter and their side; planes of the maker's own."""

import json

import numpy as np
import pytest
import seamwright as sw
from forms import ellipsoid, icosphere, together, torus
from parted import level_of
from seamwright.form.measure import areas
from seamwright.form.mirror import Plane
from seamwright.naming import letter, named
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.network import cut_through
from seamwright.seams.refuse import measured
from seamwright.sheets.draft import draft

X, Y, Z = (Plane(np.zeros(3), axis, 0.0) for axis in np.eye(3))
BACKWARD = Plane(np.zeros(3), np.array([-1.0, 0, 0]), 0.0)
LEANING = Plane(np.zeros(3), np.array([0.6, 0.8, 0]), 0.0)


def network_of(fields, form=None):
    level = level_of(form or ellipsoid(1.0, 0.7, 0.5, 4))
    columns = np.column_stack(fields(*level.surface.points.T))
    return cut_through(level, cut_by_fields(level.surface, columns), 1.0)


def middles(network, names):
    surface, piece = network.surface, network.pieces[1]
    centre = surface.points[surface.triangles].mean(axis=1)
    return {name: centre[piece == k].mean(axis=0) for k, name in enumerate(names)}


def belt(x, y, z):
    """A belt across x = 0 and two ends."""
    return x - 0.5, -x - 0.5, 0 * x


def eighths(x, y, z):
    return [a * x + b * y + c * z for a in (-1, 1) for b in (-1, 1) for c in (-1, 1)]


@pytest.mark.parametrize("plane", [X, BACKWARD])
def test_right_is_where_x_is_whichever_way_the_plane_faces(plane):
    network = network_of(belt)
    names, order, alike = named([network], [[plane]])
    assert sorted(names) == ["A", "B left", "B right"] and alike == [["B left", "B right"]]
    assert [names[k] for k in order] == ["A", "B left", "B right"]
    where = middles(network, names)
    assert where["B right"][0] > 0.4 and where["B left"][0] < -0.4 and abs(where["A"][0]) < 0.01


def test_other_planes_have_front_and_back_lower_and_upper():
    network = network_of(lambda x, y, z: belt(y, x, z))
    names = named([network], [[Y]])[0]
    where = middles(network, names)
    assert where["B back"][1] > 0.3 > -0.3 > where["B front"][1]
    network = network_of(lambda x, y, z: (z - 0.3, -z - 0.3, 0 * x))
    where = middles(network, named([network], [[Z]])[0])
    assert where["B upper"][2] > 0.2 > -0.2 > where["B lower"][2]


def test_a_leaning_plane_goes_by_its_x_part():
    points, faces = ellipsoid(1.0, 0.7, 0.5, 4)
    x, y = np.array([[0.6, 0.8], [-0.8, 0.6]])
    points = np.column_stack([points[:, :2] @ np.array([x, y]), points[:, 2]])  # the long axis along (0.6, 0.8)
    network = network_of(lambda a, b, c: belt(0.6 * a + 0.8 * b, b, c), (points, faces))
    where = middles(network, named([network], [[LEANING]])[0])
    assert where["B right"][0] > 0.2 > -0.2 > where["B left"][0]


def test_several_planes_give_several_words():
    network = network_of(eighths)
    names, order, alike = named([network], [[X, Y, Z]])
    assert len(set(names)) == 8 and all(name.startswith("A ") for name in names) and len(alike) == 1
    for name, centre in middles(network, names).items():
        _, side, depth, height = name.split()
        assert (side == "right") == (centre[0] > 0) and (depth == "back") == (centre[1] > 0)
        assert (height == "upper") == (centre[2] > 0)


def test_without_a_plane_letters_alone_largest_first():
    network = network_of(lambda x, y, z: (x - 0.4, -x - 0.2, 0 * x))
    names, order, alike = named([network], [[]])
    size = [np.sum(network.pieces[1] == k) for k in order]
    assert [names[k] for k in order] == ["A", "B", "C"] and alike == [] and size == sorted(size, reverse=True)


def test_a_piece_without_an_image_has_a_letter_alone():
    network = network_of(lambda x, y, z: (x - 0.4, y - 0.3, 0 * x))
    names, _, alike = named([network], [[X]])
    assert sorted(names) == ["A", "B", "C"] and alike == []


def test_letters_go_on():
    assert [letter(k) for k in (0, 7, 8, 23, 24, 47, 48)] == ["A", "H", "J", "Z", "A2", "Z2", "A3"]


def test_pieces_of_several_parts_are_named_through():
    form = sw.Form(*together(icosphere(2, 0.5), icosphere(2)))
    pattern = sw.cover(form, sw.Wishes(goods="spandex", thrift=0.5))
    sizes = [piece.areas.sum() for piece in pattern.pieces]
    assert sizes[0] > 2 * sizes[-1]
    letters = [piece.name.split()[0] for piece in pattern.pieces]
    assert letters == sorted(letters) and len({piece.name for piece in pattern.pieces}) == len(sizes)
    assert set(pattern.order) <= {seam.name for seam in pattern.seams}


@pytest.fixture(scope="module", name="ring")
def a_ring():
    form = sw.Form(*torus(0.5, 0.2, 60, 32), name="ring")
    own = [((0, 0, 0), (0, 1, 0)), ((0, 0, 0), (2, 0, 0))]
    return sw.cover(form, sw.Wishes(goods="spandex", thrift=0.1, symmetry=own))


def test_planes_of_the_makers_own_are_kept(ring):
    errors = [measure.value for measure in measured(ring, [X, Y]) if measure.name == "mirror error"]
    edge = ring.form.surface.edge_lengths.mean() / np.sqrt(areas(ring.form.surface).sum())
    assert len(errors) == 2 and max(errors) < 0.5 * edge  # a seam on a plane passes beside the points on it
    assert [plane["normal"] for plane in ring.details["planes"]] == [[0, 1, 0], [1, 0, 0]]


def test_details_are_plain_data(ring):
    assert json.loads(json.dumps(ring.details)) == ring.details
    assert ring.details["thrift"] == 0.1 and ring.details["comfort"] == 0.5
    named_pieces = [name for alike in ring.details["mirrored"] for name in alike]
    assert set(named_pieces) <= {piece.name for piece in ring.pieces} and len(named_pieces) == len(set(named_pieces))


def test_sheets_say_which_pieces_are_mirror_images(ring):
    assert ring.details["mirrored"]
    told = {one.name: [mark.text for mark in one.letterings] for one in draft(ring)}
    for alike in ring.details["mirrored"]:
        for name in alike:
            assert name in told[name]
            others = " and ".join(other for other in alike if other != name)
            assert any(f"mirror image of {others}" in text for text in told[name])  # or not quite


def test_weights_that_are_not_alike_on_both_sides_contradict_a_plane():
    form = sw.Form(*ellipsoid(1.0, 0.7, 0.5, 2))
    wishes = sw.Wishes(goods="spandex", thrift=0.2, symmetry=[((0, 0, 0), (1, 0, 0))], keep_clear=form.points[:, 0] > 0.5)
    with pytest.raises(sw.WishError, match="keep_clear and symmetry: the weights are not alike"):
        sw.cover(form, wishes)
