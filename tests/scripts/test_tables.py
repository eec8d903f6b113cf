"""The bench's tables: what they compare with is what it is said to be, and their ratios are plain arithmetic."""

import json
import sys
from pathlib import Path

import numpy as np
import pytest
import seamwright as sw
from forms import cap, icosphere, torus
from seamwright.flat import flatten
from seamwright.form.form import Form
from seamwright.form.surface import Surface
from seamwright.seams.ladder import Ladder
from seamwright.seams.network import Network
from seamwright.seams.refuse import measured

sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "scripts"))
import bench  # noqa: E402
from tables import against, best, edges, rivals, slim, stage  # noqa: E402
from tables.geodesics import Heat, exact  # noqa: E402
from tables.rivals import Rival  # noqa: E402
from tables.unit import form_of  # noqa: E402


def first(family, form, count):
    """The first networks of a family on (points, faces)."""
    surface = Form(*form).surface
    found = family(Ladder(surface, rungs=()), surface)
    return [next(found) for _ in range(count)]


def test_distances_on_the_sphere():
    """Great circles: pi between poles; the angle to any point."""
    surface = Form(*icosphere(4)).surface
    pole = int(surface.points[:, 2].argmax())
    angle = np.arccos(np.clip(surface.points @ surface.points[pole], -1, 1))
    for point in (17, 400, int(angle.argmax())):
        assert exact(surface, np.array([pole]), point) == pytest.approx(angle[point], rel=0.003)
    assert np.abs(Heat(surface).from_points([pole])[:, 0] - angle).max() < 0.1


def test_partition_of_the_sphere_in_two():
    """Two half spheres: seam 2 pi; u = ln(1 + cos t), so the integral of u^2 is 8 pi (1 - ln 2)^2."""
    two = first(lambda ladder, surface: rivals.partitions(ladder, rivals.voronoi(ladder, surface)), icosphere(4), 1)[0]
    assert two.length == pytest.approx(2 * np.pi, rel=0.005)
    assert two.distortion == pytest.approx(8 * np.pi * (1 - np.log(2)) ** 2, rel=0.02)
    assert two.ends == 0


def test_tree_on_the_sphere():
    """Without tips the first path joins two poles; every later one makes the tree longer and the distortion less."""
    trees = first(rivals.trees, icosphere(3), 5)
    assert trees[0].length == pytest.approx(np.pi, rel=0.01) and trees[0].ends == 2
    assert (np.diff([tree.length for tree in trees]) > 0).all()
    assert (np.diff([tree.distortion for tree in trees]) < 0).all()


def test_a_form_with_a_hole_is_opened():
    """A tree that opens a torus holds its two loops: at least 2 pi (1 - r) and 2 pi r on one of ring 1 and tube r."""
    tree = first(rivals.trees, torus(1.0, 0.4, 48, 28), 1)[0]
    factor = np.sqrt(4 * np.pi / (4 * np.pi**2 * 0.4))
    assert tree.length > 0.98 * factor * 2 * np.pi * (0.6 + 0.4)


def test_a_seam_of_stairs_is_drawn_tight():
    """Along the edges of a square grid a diagonal is 2 long, drawn tight sqrt(2)."""
    n = 80
    i, j = (a.ravel() for a in np.meshgrid(np.arange(n + 1), np.arange(n + 1), indexing="ij"))
    at = (np.arange(n)[:, None] * (n + 1) + np.arange(n)).ravel()
    quads = np.column_stack([at, at + n + 1, at + n + 2, at + 1])
    surface = Form(np.column_stack([i, j, 0 * i]) / n, quads).surface
    steps = np.cumsum(np.tile([0, 1], n))
    stairs = np.arange(2 * n + 1) - np.append(0, steps), np.append(0, steps)
    number = stairs[0] * (n + 1) + stairs[1]
    seam = np.zeros(len(surface.edges), dtype=bool)
    seam[surface.edge_index(np.column_stack([number[:-1], number[1:]]))] = True
    network = Network(surface, seam, np.arange(len(surface.triangles)))
    ladder = Ladder(surface, rungs=())
    assert network.length() * ladder.factor == pytest.approx(2 * np.sqrt(4 * np.pi))
    assert rivals.tight(ladder, network) == pytest.approx(np.sqrt(2) * np.sqrt(4 * np.pi), rel=0.02)


def test_distortion_at_a_length():
    """Straight between networks in logarithms, over those that no shorter one beats; the last one beyond."""
    family = [Rival(16.0, 1.0, 0), Rival(4.0, 8.0, 0), Rival(8.0, 9.0, 0), Rival(32.0, 3.0, 0)]
    assert against.at_length(family, 8.0) == pytest.approx(np.sqrt(8))
    assert against.at_length(family, 16.0) == pytest.approx(1)
    assert against.at_length(family, 100.0) == pytest.approx(1)
    assert against.at_length(family, 3.9) is None


def test_over_the_best():
    row = best.compared("ball", 9, 0.1, [1.1, 1.0, 1.3], 1.21)
    assert (row.over, row.unlike, row.best) == (pytest.approx(0.1), pytest.approx(0.1), 1.0)
    assert best.compared("ball", 9, 0.1, [1.1, 1.2], 0.99).best == 0.99
    assert best.compared("ball", 9, 0.1, [1.1, 1.2], None).unlike is None


def test_flattening_against_slim():
    """Both come to the same least energy, which is that of `flatten`."""
    points, faces = cap(1.3, 16)
    row = slim.compared("cap", Surface(points, faces))
    assert row.points == len(points) and all(0 < steps < slim.MOST for steps in row.steps)
    assert row.near_ratio > 0 and row.nearer_ratio > 0 and row.reached
    assert slim.line(row).startswith("cap") and "over 1 pieces" in slim.summary([row])[0]
    assert row.energy == pytest.approx(flatten(Surface(points, faces)).energy, rel=1e-3)


@pytest.mark.parametrize("name", ["pear", "starfish", "bowl"])
def test_along_edges_against_through_faces(name):
    """No quad is split; length and distortion over those through faces, the length anew from the pattern's own pieces."""
    row, pattern = edges.measured_row(form_of(name, 1500), 0.1)
    assert row.split == 0 and 0.9 < row.longer < 1.1 and 0.5 < row.more < 1.5
    triangles = np.concatenate([piece.source for piece in pattern.pieces])
    faces = np.concatenate([np.full(len(piece.source), k) for k, piece in enumerate(pattern.pieces)])
    pairs = np.unique(np.column_stack([pattern.form.polygon[triangles], faces]), axis=0)
    assert len(pairs) == pattern.form.face_count  # every quad lies in one piece
    assert edges.line(row).startswith(name)
    assert edges.summary([row])[0].startswith(f"along edges over through faces: seam {row.longer:.3f}")


def test_a_cover_along_edges_is_what_the_table_measures():
    form = form_of("bowl", 1500)
    pattern = edges.measured_row(form, 0.1)[1]
    covered = sw.cover(form, sw.Wishes(goods="spandex", thrift=0.1, route="edges"))
    aimed, met = (sorted(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum() for seam in one.seams)
                  for one in (pattern, covered))
    assert met == pytest.approx(aimed, rel=1e-9)


@pytest.mark.parametrize("name", ["ball", "egg", "pear", "crate", "buoy", "worm", "shade", "bowl"])
def test_nothing_to_refuse(name):
    """Seams for a thrift are such as a patternmaker would sew, limbs and all."""
    points = 5000 if name == "egg" else 3000  # on its uneven mesh half an edge is what mirror images are off by
    row, pattern = stage.measured_row(name, points, 0.1, "auto")
    assert row.refused == [], [one.sentence for one in measured(pattern) if one.refused]
    assert row.symmetric == (name != "worm")  # which is twisted


def test_tables_are_printed_and_written(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(bench, "OUT", tmp_path)
    asked = ["--forms", "ball", "--points", "300", "--thrift", "0.1", "--seeds", "2", "--rivals"]
    assert bench.main(asked) == 0
    printed = capsys.readouterr().out.splitlines()
    found = json.loads((tmp_path / "bench.json").read_text())
    assert list(found) == ["against", "best"]
    assert against.line(against.Row(**found["against"][0])) in printed
    assert best.line(best.Row(**found["best"][0])) in printed
    row = found["against"][0]
    assert row["length"] > 6 and 0 < row["direct"] < 1.5
