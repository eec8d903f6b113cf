"""What the maker sees is what is read: modifiers, keys, transforms, units; each expected value worked out by hand."""

import bpy
import numpy as np
import pytest


def volume(reading):
    """Signed volume by the divergence theorem, fans over every face."""
    total, start = 0.0, 0
    for size in reading.sizes:
        face = reading.points[reading.corners[start:start + size]]
        for k in range(1, size - 1):
            total += np.dot(face[0], np.cross(face[k], face[k + 1])) / 6
        start += size
    return total


def test_millimetre_scene_under_a_scaled_and_turned_parent(reading):
    bpy.context.scene.unit_settings.scale_length = 0.001
    bpy.ops.object.empty_add(location=(10, 0, 0), rotation=(0, 0, np.pi / 2))
    parent = bpy.context.object
    parent.scale = (2, 2, 2)
    bpy.ops.mesh.primitive_cube_add(size=100)
    cube = bpy.context.object
    cube.parent, cube.scale = parent, (1, 2, 3)
    bpy.context.view_layer.update()
    points = reading(cube).points
    # 100 units x scale x parent's scale 2, in mm; the quarter turn changes X and Y
    assert np.ptp(points, axis=0) == pytest.approx([0.4, 0.2, 0.6], rel=1e-6)
    assert points.mean(axis=0) == pytest.approx([0.010, 0, 0], abs=1e-8)


def test_modifiers_and_shape_keys_count(reading):
    bpy.ops.mesh.primitive_cube_add(size=2)
    cube = bpy.context.object
    cube.shape_key_add(name="Basis")
    key = cube.shape_key_add(name="Tall")
    for point in key.data:
        point.co.z *= 3
    key.value = 1.0
    array = cube.modifiers.new("Array", "ARRAY")
    array.count = 2
    read = reading(cube)
    assert len(read.points) == 16 and len(read.sizes) == 12
    assert np.ptp(read.points, axis=0) == pytest.approx([4, 2, 6])


def test_faces_of_many_corners_stay_whole(reading):
    bpy.ops.mesh.primitive_cylinder_add(vertices=12, end_fill_type="NGON")
    read = reading(bpy.context.object)
    assert sorted(read.sizes) == [4] * 12 + [12] * 2
    assert sorted(len(face) for face in read.faces) == [4] * 12 + [12] * 2


def test_triangles_come_as_one_array(reading, ball):
    read = reading(ball)
    assert isinstance(read.faces, np.ndarray) and read.faces.shape == (len(ball.data.polygons), 3)


@pytest.mark.parametrize("scale", [(1, 1, 1), (-1, 1, 1), (2, -0.5, 3), (-1, -1, -1)])
def test_a_mirrored_object_still_faces_outward(reading, scale):
    bpy.ops.mesh.primitive_cube_add(size=2)
    bpy.context.object.scale = scale
    bpy.context.view_layer.update()
    assert volume(reading(bpy.context.object)) == pytest.approx(8 * abs(np.prod(scale)), rel=1e-6)


def test_painted_weights_become_prices(reading, ball):
    assert reading(ball).keep_clear.size == 0
    paint = ball.vertex_groups.new(name="wear")
    paint.add([0], 0.5, "REPLACE")
    paint.add([1], 1.0, "REPLACE")
    ball.seamwright.wishes.keep_clear = "wear"
    prices = reading(ball).keep_clear
    assert prices[:3].tolist() == [1.0, np.inf, 0.0] and prices.shape == (len(ball.data.vertices),)
