"""The demo scene as it is saved: each prop's size, topology, mesh and goods. The sizes are the design's own."""

import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
import seamwright as sw
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

ROOT = Path(__file__).resolve().parents[2]

READ_BACK = """
import json, sys
import bpy
from addon import properties
properties.register()
bpy.ops.wm.open_mainfile(filepath=sys.argv[1])
found = {}
for thing in bpy.context.scene.objects:
    mesh = thing.data
    found[thing.name] = {
        "points": [list(thing.matrix_world @ v.co) for v in mesh.vertices],
        "faces": [list(p.vertices) for p in mesh.polygons],
        "size": list(thing.dimensions), "scale": list(thing.scale), "goods": thing.seamwright.wishes.goods}
answer = {"scene": bpy.context.scene.name, "forms": found, "quay": [o.name for o in bpy.data.scenes["Quay"].objects],
          "unit": bpy.context.scene.unit_settings.scale_length}
json.dump(answer, open(sys.argv[2], "w"))
properties.unregister()
"""

# name: goods, Euler characteristic, open loops, size (sorted, metres) and how near
PROPS = {
    "Lifebuoy": ("canvas", 0, 0, (0.126, 0.76, 0.76), 0.005),
    "Souwester": ("knit-back vinyl", 1, 1, (0.19, 0.32, 0.36), 0.02),
    "Seal pup": ("wool felt", 2, 0, (0.34, 0.50, 0.80), 0.06),
    "Cushion": ("upholstery cloth", 2, 0, (0.12, 0.40, 0.60), 0.02),
    "Lantern shade": ("card", 0, 2, (0.24, 0.38, 0.38), 0.001),
    "Fender": ("neoprene", 2, 0, (0.24, 0.24, 0.70), 0.001),
    "Bollard pad": ("eva foam", 1, 1, (0.29, 0.40, 0.40), 0.005),
}


@pytest.fixture(scope="module")
def saved(tmp_path_factory):
    """The scene file read back by a fresh process."""
    folder = tmp_path_factory.mktemp("harbour")
    env = {**os.environ, "PYTHONPATH": os.pathsep.join(map(str, (ROOT / "scripts", ROOT, ROOT / "solver")))}
    for words in (["-m", "harbour.scene", folder / "h.blend"], ["-c", READ_BACK, folder / "h.blend", folder / "h.json"]):
        subprocess.run([sys.executable, *words], env=env, check=True, capture_output=True, timeout=120)
    return json.loads((folder / "h.json").read_text())


def edge_counts(faces):
    """{(a, b) smaller first: [times run along, times run against]}."""
    counts = {}
    for face in faces:
        for a, b in zip(face, face[1:] + face[:1], strict=True):
            counts.setdefault((min(a, b), max(a, b)), [0, 0])[a > b] += 1
    return counts


def test_the_file_opens_with_the_forms_alone_and_the_quay_beside(saved):
    assert saved["scene"] == "Props" and set(saved["forms"]) == set(PROPS) and saved["unit"] == 1.0
    assert set(PROPS) < set(saved["quay"]) and len(saved["quay"]) > 2 * len(PROPS)


@pytest.mark.parametrize("name", PROPS)
def test_goods_are_kept_in_the_file(saved, name):
    assert saved["forms"][name]["goods"] == PROPS[name][0] and PROPS[name][0] in sw.goods()


@pytest.mark.parametrize("name", PROPS)
def test_size_is_as_designed(saved, name):
    form = saved["forms"][name]
    assert form["scale"] == [1, 1, 1]
    assert sorted(form["size"]) == pytest.approx(PROPS[name][3], abs=PROPS[name][4])


@pytest.mark.parametrize("name", PROPS)
def test_topology_is_as_designed_and_the_mesh_is_sound(saved, name):
    points, faces = saved["forms"][name]["points"], saved["forms"][name]["faces"]
    edges = edge_counts(faces)
    assert all(along <= 1 and against <= 1 for along, against in edges.values()), "faces disagree on which side is out"
    ends = np.array(list(edges))
    used = len(np.unique(ends))
    assert used == len(points), "points without faces"
    assert used - len(edges) + len(faces) == PROPS[name][1]
    open_ends = np.array([edge for edge, counts in edges.items() if sum(counts) == 1]).reshape(-1, 2)
    _, component = connected_components(coo_matrix((np.ones(len(ends)), ends.T), shape=(used, used)), directed=False)
    assert component.max() == 0, "more than one part"
    local = np.unique(open_ends, return_inverse=True)[1].reshape(-1, 2)
    count = local.max() + 1 if len(local) else 0
    loops = connected_components(coo_matrix((np.ones(len(local)), local.T), shape=(count, count)))[0] if count else 0
    assert loops == PROPS[name][2]


@pytest.mark.parametrize("name", PROPS)
def test_mesh_is_quads_of_even_size_in_the_promised_number(saved, name):
    points, faces = np.array(saved["forms"][name]["points"]), saved["forms"][name]["faces"]
    assert 1000 <= len(points) <= 20000
    assert all(len(face) == 4 for face in faces)
    ends = np.array(list(edge_counts(faces)))
    lengths = np.linalg.norm(points[ends[:, 0]] - points[ends[:, 1]], axis=1)
    assert lengths.max() < 4 * np.median(lengths) and lengths.min() > np.median(lengths) / 8


@pytest.mark.parametrize("name", [name for name, facts in PROPS.items() if facts[2] == 0])
def test_closed_forms_face_outward(saved, name):
    points, faces = np.array(saved["forms"][name]["points"]), np.array(saved["forms"][name]["faces"])
    points = points - points.mean(axis=0)
    a, b, c, d = (points[faces[:, k]] for k in range(4))
    assert (np.einsum("ij,ij->i", a, np.cross(b, c)) + np.einsum("ij,ij->i", a, np.cross(c, d))).sum() > 0


def test_the_lantern_shade_unrolls_without_stretch(saved):
    """Its points lie on one cone and its rows on circles about the axis: the slant is the same along every line."""
    points = np.array(saved["forms"]["Lantern shade"]["points"])
    points -= (points.min(axis=0) + points.max(axis=0)) / 2
    radius, height = np.hypot(points[:, 0], points[:, 1]), points[:, 2]
    slope, start = np.polyfit(height, radius, 1)
    assert np.abs(radius - (slope * height + start)).max() < 1e-6 and slope == pytest.approx((0.10 - 0.19) / 0.24, rel=1e-5)


def test_props_are_the_same_in_every_run():
    """Number for number, whatever the host's memory is like: their patterns would differ else."""
    program = ("import sys; sys.path[:0] = sys.argv[1:]\n"
               "from harbour import scene\n"
               "for prop in scene.PROPS:\n"
               "    mesh = prop.module.make().data\n"
               "    print([tuple(v.co) for v in mesh.vertices], [tuple(e.vertices) for e in mesh.edges],\n"
               "          [tuple(f.vertices) for f in mesh.polygons])\n")
    runs = [subprocess.run([sys.executable, "-c", program, *map(str, (ROOT / "scripts", ROOT, ROOT / "solver"))], check=True,
                           capture_output=True, text=True, timeout=120).stdout for _ in range(2)]
    assert len(runs[0]) > 1e6 and runs[0] == runs[1]
