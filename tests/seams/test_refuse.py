"""What a patternmaker would refuse, on networks made by hand: good ones pass, each bad one is refused for its own reason."""

from dataclasses import replace

import numpy as np
import pytest
from forms import ellipsoid, frustum, icosphere, split_quads
from seamwright.fit.goods import get
from seamwright.flat import flatten
from seamwright.form.form import Form
from seamwright.form.mirror import Plane
from seamwright.pattern import Pattern, Piece, Seam
from seamwright.seams.bulges import bending
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.level import Level
from seamwright.seams.network import Network, cut_through
from seamwright.seams.refuse import measured, mirror_error, refused
from seamwright.seams.seen import Seen
from seamwright.seams.sides import joints

N = 40


def pattern_of(form, network, flat=None):
    """Pattern of a network as it is; flat: the plane places of a piece's points, flattened by default."""
    pieces = []
    for k in range(network.pieces[0]):
        part, points, triangles = network.piece_surface(k)
        laid = flatten(part).flat if flat is None else flat[points]
        none = np.zeros(len(triangles))
        pieces.append(Piece(f"P{k}", part.points, laid, part.triangles, network.source[triangles], part.boundary_loops[0],
                            none[:, None].repeat(2, axis=1), none[:, None].repeat(3, axis=1), none, "fits", 0.0))
    seams = []
    for number, joint in enumerate(joints(network)):
        path = network.surface.points[joint.chain]
        sides = [(None, joint.left.points) if side is None else (f"P{side.piece}", side.points)
                 for side in (joint.left, joint.right)]
        seams.append(Seam(f"S{number}", path, tuple(sides), (0.0, 0.0), joint.dart))
    return Pattern(form, None, pieces, seams, [])


def sheet(*paths, lean=0.0):
    """Pattern of a flat sheet of one metre in N x N cells, seams along runs of (i, j), its rows sheared by `lean`."""
    i, j = (a.ravel() for a in np.meshgrid(np.arange(N + 1), np.arange(N + 1), indexing="ij"))
    cell = (np.arange(N)[:, None] * (N + 1) + np.arange(N)).ravel()
    quads = np.column_stack([cell, cell + N + 1, cell + N + 2, cell + 1])
    points = np.column_stack([i + lean * j, j, 0 * i]) / N
    form = Form(points, split_quads(quads))
    seam = np.zeros(len(form.surface.edges), dtype=bool)
    for path in paths:
        number = np.concatenate([along(a, b) for a, b in zip(path[:-1], path[1:], strict=True)])
        edges = form.surface.edge_index(np.column_stack([number[:-1], number[1:]]))
        seam[edges[number[:-1] != number[1:]]] = True
    return pattern_of(form, Network(form.surface, seam, np.arange(len(form.triangles))), points[:, :2])


def along(a, b):
    """Points of the sheet from cell corner a to b, straight or at 45 degrees."""
    count = max(abs(b[0] - a[0]), abs(b[1] - a[1]))
    steps = np.linspace(a, b, count + 1).round().astype(int)
    return steps[:, 0] * (N + 1) + steps[:, 1]


STAIRS = [(10 + (k + 1) // 2, 10 + k // 2) for k in range(41)]
SHEETS = {
    "halves": (sheet([(20, 0), (20, 40)]), set()),
    "one dart": (sheet([(20, 0), (20, 15)]), set()),
    "four quarters": (sheet([(20, 0), (20, 40)], [(0, 20), (40, 20)]), set()),
    "a speck": (sheet([(0, 3), (3, 3), (3, 0)]), {"smallest piece", "sharp bend"}),
    "a strip": (sheet([(20, 0), (20, 40)], [(21, 0), (21, 40)]), {"narrow share"}),
    "two darts": (sheet([(20, 0), (20, 15)], [(20, 40), (20, 25)]), {"dart ends"}),
    "a slit": (sheet([(20, 10), (20, 30)]), {"pieces that are no disks", "loose bits of seam", "dart ends"}),
    "a ring": (sheet([(10, 10), (30, 10), (30, 30), (10, 30), (10, 10)]),
               {"pieces that are no disks", "loose bits of seam", "sharp bend"}),
    "a bend": (sheet([(10, 0), (10, 10), (30, 30), (30, 40)]), set()),
    "a jog": (sheet([(10, 0), (10, 20), (30, 20), (30, 40)]), {"sharp bend"}),
    "stairs": (sheet([(10, 0), *STAIRS, (30, 40)]), {"jag", "sharp bend"}),
    "a sharp junction": (sheet([(20, 0), (20, 40)], [(20, 20), (40, 40)]), {"junction angle"}),
    "a sharp corner": (sheet([(20, 0), (20, 40)], lean=2.5), {"tip angle"}),
    "a short link": (sheet([(20, 0), (20, 40)], [(0, 20), (20, 20)], [(20, 21), (40, 21)]), {"link between junctions"}),
}


@pytest.mark.parametrize("name", SHEETS)
def test_sheets(name):
    pattern, reasons = SHEETS[name]
    assert {measure.name for measure in measured(pattern) if measure.refused} == reasons
    assert len(refused(pattern)) == len(reasons)
    assert all(sentence.endswith(".") for sentence in refused(pattern))


def value(pattern, name):
    return next(measure.value for measure in measured(pattern) if measure.name == name)


def test_values_by_hand():
    """On the sheet every measure can be reckoned in the head."""
    assert value(SHEETS["a speck"][0], "smallest piece") == pytest.approx(9 / N**2)
    assert value(SHEETS["a strip"][0], "narrow share") == pytest.approx(1.0)
    assert value(SHEETS["halves"][0], "narrow share") == pytest.approx(  # what a disk leaves in four right angles
        4 * (1 - np.pi / 4) * (0.035 / 2) ** 2 / 0.5, rel=0.02)
    assert value(SHEETS["halves"][0], "jag") == pytest.approx(1.0, abs=1e-12)
    assert value(SHEETS["four quarters"][0], "junction angle") == pytest.approx(90, abs=1e-9)
    assert value(SHEETS["a sharp junction"][0], "junction angle") == pytest.approx(45, abs=1e-9)
    assert value(SHEETS["a sharp corner"][0], "tip angle") == pytest.approx(np.degrees(np.arctan(1 / 2.5)), abs=1e-9)
    assert value(SHEETS["a short link"][0], "link between junctions") == pytest.approx(1 / N)
    assert value(SHEETS["two darts"][0], "dart ends") == 2
    assert value(SHEETS["a bend"][0], "sharp bend") == pytest.approx(45, abs=1e-9)
    assert value(SHEETS["a jog"][0], "sharp bend") == pytest.approx(90, abs=1e-9)
    assert value(SHEETS["a jog"][0], "seam on a bulge") == 0


def test_goods_say_how_narrow():
    """Three allowances, at least 40 mm: a strip of 50 mm will do with 10 mm allowance and not with 20 mm."""
    pattern = sheet([(20, 0), (20, 40)], [(22, 0), (22, 40)])
    assert value(pattern, "narrow share") < 0.1
    for allowance, share in ((0.01, 0.02), (0.02, 1.0)):
        pattern.goods = replace(get("canvas"), allowance=allowance)
        assert value(pattern, "narrow share") == pytest.approx(share, abs=0.02)


def cone(total, sides, seams):
    """Pattern of a cone of one metre with `total` degrees around its apex, as many seams down its side, evenly."""
    turn = np.arange(sides) * 2 * np.pi / sides
    radius = np.sin(np.radians(total) / sides / 2) / np.sin(np.pi / sides)
    rim = np.column_stack([radius * np.cos(turn), radius * np.sin(turn), np.full(sides, -np.sqrt(1 - radius**2))])
    form = Form(np.concatenate([[[0, 0, 0]], rim]), [[0, 1 + k, 1 + (k + 1) % sides] for k in range(sides)])
    down = 1 + np.arange(seams) * sides // seams
    seam = np.zeros(len(form.surface.edges), dtype=bool)
    seam[form.surface.edge_index(np.column_stack([0 * down, down]))] = True
    return pattern_of(form, Network(form.surface, seam, np.arange(sides)))


def test_a_pointed_form_may_have_pointed_pieces():
    """Twelve corners at a blunt apex are too sharp, fewer seams would do; at an apex of 80 degrees nothing else can be."""
    blunt, pointed = cone(324, 12, 12), cone(80, 12, 4)
    assert value(blunt, "tip angle") == pytest.approx(27, abs=1e-6)
    assert value(pointed, "tip angle") > 30  # what is left are the corners at the rim
    assert value(pointed, "junction angle") == pytest.approx(20, abs=1e-6)


def test_mean_curvature_of_a_ball():
    form = Form(*icosphere(4))
    np.testing.assert_allclose(bending(form.surface), np.sqrt(4 * np.pi), rtol=0.02)
    np.testing.assert_allclose(bending(Form(3 * form.points, form.triangles).surface), np.sqrt(4 * np.pi), rtol=0.02)


@pytest.mark.parametrize(("at", "where"), [(40, "crest"), (45, "valley")])
def test_a_seam_belongs_in_the_valley(at, where):
    """A sheet in waves, an eighth from crest to crest: along a crest there is a valley beside, along a valley none."""
    n = 80
    i, j = (a.ravel() for a in np.meshgrid(np.arange(n + 1), np.arange(n + 1), indexing="ij"))
    cell = (np.arange(n)[:, None] * (n + 1) + np.arange(n)).ravel()
    quads = np.column_stack([cell, cell + n + 1, cell + n + 2, cell + 1])
    form = Form(np.column_stack([i / n, j / n, 0.012 * np.cos(2 * np.pi * i / 10)]), split_quads(quads))
    steps, still = np.arange(n + 1), np.full(n + 1, at)
    for number, wrong in ((still * (n + 1) + steps, where == "crest"), (steps * (n + 1) + still, False)):
        seam = np.zeros(len(form.surface.edges), dtype=bool)
        seam[form.surface.edge_index(np.column_stack([number[:-1], number[1:]]))] = True
        pattern = pattern_of(form, Network(form.surface, seam, np.arange(len(form.triangles))))
        share = value(pattern, "seam on a bulge")
        assert share > 0.9 if wrong else share < 0.02, share


def needle(direction, height, level=3):
    """(form, Pattern) of a long egg along x, cut by a plane through its faces."""
    form = Form(*ellipsoid(2.0, 0.3, 0.3, level))
    side = form.points @ np.asarray(direction, dtype=float) - height
    level = Level(form.surface, np.zeros(len(form.points)))
    return form, pattern_of(form, cut_through(level, cut_by_fields(form.surface, np.column_stack([side, -side])), 1.0))


def test_limbs():
    along_it = needle([0.0, 1.0, 0.02], 1e-3)[1]
    assert refused(along_it) == []
    assert value(along_it, "tip off the seams") < 0.005
    across = needle([1.0, 0.0, 0.0], 0.05, 4)[1]
    assert {m.name for m in measured(across) if m.refused} == {"tip off the seams"}
    size = np.sqrt(Seen(across).part_area[0])
    assert value(across, "tip off the seams") == pytest.approx(2.0 / size, rel=0.05)


def test_a_cap_on_a_tip():
    pattern = needle([1.0, 0.0, 0.0], 1.9)[1]
    names = {m.name for m in measured(pattern) if m.refused}
    assert "caps on tips" in names and "tip off the seams" in names  # the other tip
    seen = Seen(pattern)
    cap = int(np.argmin(seen.piece_area))
    # by Gauss-Bonnet: 2 pi less the turn of the edge, here an ellipse's cap of known opening
    slope = 0.3 / 2.0 * 1.9 / 2.0 / np.sqrt(1 - (1.9 / 2.0) ** 2)
    assert seen.curvature(cap) == pytest.approx(2 * np.pi * (1 - slope / np.hypot(1, slope)), rel=0.15)


def test_a_wide_cap_is_a_piece():
    assert not any("Caps" in sentence for sentence in refused(needle([1.0, 0.0, 0.0], 1.0)[1]))


def test_each_part_by_its_own_size():
    """A button beside a ball is a piece, not a speck."""
    ball, faces = icosphere(3)
    points = np.concatenate([ball, 0.05 * ball + [2, 0, 0]])
    form = Form(points, np.concatenate([faces, faces + len(ball)]))
    middle = np.repeat([[0.0, 0, 0], [2, 0, 0]], len(ball), axis=0)
    side = (points - middle) @ [0.3, 0.5, 0.8] + 1e-4
    level = Level(form.surface, np.zeros(len(points)))
    cut = cut_by_fields(form.surface, np.column_stack([side, -side]))
    pattern = pattern_of(form, cut_through(level, cut, 1.0))
    assert len(pattern.pieces) == 4
    assert value(pattern, "smallest piece") == pytest.approx(0.5, abs=0.02)
    assert refused(pattern) == []


def test_a_symmetric_form_wants_symmetric_seams():
    plane = Plane(np.zeros(3), np.array([0.0, 1.0, 0.0]), 0.0)
    for direction, error in (([0.0, 0.0, 1.0], 0.0), ([0.0, 1.0, 1.0], 0.2)):
        form, pattern = needle(direction, 1e-3)
        measure = mirror_error(Seen(pattern), plane)
        assert measure.refused == (error > 0)
        assert measured(pattern, [plane])[-1] == measure
        assert measure.value == pytest.approx(error, abs=0.003 if not error else 0.1)


def test_a_plane_concerns_the_parts_it_halves():
    """Two balls, each cut through its middle: the mirror plane of one has no say in the other, whose seam is lopsided."""
    ball, faces = icosphere(3)
    points = np.concatenate([ball, ball + [5, 0, 0]])
    form = Form(points, np.concatenate([faces, faces + len(ball)]))
    first = np.arange(len(points)) < len(ball)
    side = np.where(first, points[:, 2], (points - [5, 0, 0]) @ [0.6, 0.3, 0.7]) + 1e-4
    level = Level(form.surface, np.zeros(len(points)))
    pattern = pattern_of(form, cut_through(level, cut_by_fields(form.surface, np.column_stack([side, -side])), 1.0))
    seen = Seen(pattern)
    for x, lopsided in ((0.0, False), (5.0, True)):
        plane = Plane(np.array([x, 0.0, 0.0]), np.array([1.0, 0.0, 0.0]), 0.0)
        assert mirror_error(seen, plane).refused == lopsided


@pytest.mark.parametrize("turn", [0, 5, 7])
def test_one_seam_of_a_lampshade_may_be_anywhere(turn):
    points, faces = frustum(0.5, 0.3, 0.6, 24)
    form = Form(points, faces)
    rows = len(points) // 24
    down = turn * rows + np.arange(rows)
    seam = np.zeros(len(form.surface.edges), dtype=bool)
    seam[form.surface.edge_index(np.column_stack([down[:-1], down[1:]]))] = True
    pattern = pattern_of(form, Network(form.surface, seam, np.arange(len(form.triangles))))
    assert not mirror_error(Seen(pattern), Plane(np.array([0, 0, 0.3]), np.array([0.0, 1, 0]), 0.0)).refused


def test_a_cap_between_two_pieces_is_a_cap():
    """A long egg in halves along it, the end of one limb a piece of its own that both halves meet."""
    form = Form(*ellipsoid(2.0, 0.3, 0.3, 4))
    x, side = form.points[:, 0] - 1.86, form.points @ [0.0, 1.0, 0.02] - 1e-3
    fields = np.column_stack([x, np.minimum(side, -x), np.minimum(-side, -x)])
    level = Level(form.surface, np.zeros(len(form.points)))
    pattern = pattern_of(form, cut_through(level, cut_by_fields(form.surface, fields), 1.0))
    assert len(pattern.pieces) == 3
    assert value(pattern, "caps on tips") == 1
