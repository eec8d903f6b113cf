"""The sheets of a form that was really covered, measured again from what was written."""

import itertools
import json

import forms
import numpy as np
import pytest
import seamwright as sw
import shapely
from seamwright.sheets.draft import draft


@pytest.fixture(scope="module", params=["frustum", "ellipsoid"])
def covered(request, tmp_path_factory):
    shape = {"frustum": lambda: forms.frustum(0.2, 0.12, 0.25, 36), "ellipsoid": lambda: forms.ellipsoid(0.2, 0.12, 0.1, 3)}
    pattern = sw.cover(sw.Form(*shape[request.param](), name=request.param), sw.Wishes(goods="cotton jersey"))
    folder = tmp_path_factory.mktemp("all")
    return pattern, json.loads(pattern.save(folder)[2].read_text(encoding="utf-8")), folder


def test_the_summary_agrees_with_the_points_that_were_written(covered):
    _, data, _ = covered
    points = {piece["name"]: np.array(piece["points"]) for piece in data["pieces"]}
    flats = {piece["name"]: np.array(piece["flat"]) for piece in data["pieces"]}
    for piece, told in zip(data["pieces"], data["summary"]["pieces"], strict=True):
        p, f = points[piece["name"]][piece["triangles"]], flats[piece["name"]][piece["triangles"]]
        edges = np.stack([p[:, 1] - p[:, 0], p[:, 2] - p[:, 0]], axis=2)
        flat = np.stack([f[:, 1] - f[:, 0], f[:, 2] - f[:, 0]], axis=2)
        area = np.linalg.norm(np.cross(edges[..., 0], edges[..., 1]), axis=1) / 2
        flat_area = np.linalg.det(flat) / 2
        assert (flat_area > 0).all()
        assert told["area_m2"] == pytest.approx(area.sum() * 1e-6, rel=1e-6)
        assert told["flat_area_m2"] == pytest.approx(flat_area.sum() * 1e-6, rel=1e-6)
        assert told["flat_area_m2"] == pytest.approx(shapely.Polygon(piece["outline"]).area * 1e-6, rel=1e-6)
        fine = flat_area > 0.01  # needles of less lose their figures to the rounding of the file
        assert area[fine].sum() > 0.999 * area.sum()
        stretch = np.linalg.svd(edges[fine] @ np.linalg.inv(flat[fine]), compute_uv=False) - 1
        assert np.allclose(np.array(piece["stretch"])[fine], stretch, atol=2e-3)
        assert abs(told["stretch"]["worst"]) >= np.abs(stretch).max() - 2e-3
    metres = sum(np.linalg.norm(np.diff(points[side["piece"]][side["points"]], axis=0), axis=1).sum() / 1000
                 for seam in data["seams"] for side in seam["sides"] if side["piece"] is not None and None not in
                 [other["piece"] for other in seam["sides"]])
    assert data["summary"]["seam_metres"] == pytest.approx(metres / 2, rel=1e-6)


def test_both_sides_of_a_seam_are_the_same_points_of_the_form(covered):
    _, data, _ = covered
    points = {piece["name"]: np.array(piece["points"]) for piece in data["pieces"]}
    for seam in data["seams"]:
        sides = [points[side["piece"]][side["points"]] for side in seam["sides"] if side["piece"] is not None]
        assert all(np.allclose(side, sides[0], atol=1e-3) for side in sides)


def test_every_stretch_of_the_stitch_line_belongs_to_one_seam(covered):
    _, data, _ = covered
    for piece in data["pieces"]:
        border = piece["border"]
        steps = sorted(tuple(sorted(pair)) for pair in zip(border, border[1:] + border[:1], strict=True))
        sides = [side["points"] for seam in data["seams"] for side in seam["sides"] if side["piece"] == piece["name"]]
        assert sorted(tuple(sorted(pair)) for side in sides for pair in itertools.pairwise(side)) == steps


def test_lettering_lies_inside(covered):
    pattern, _, folder = covered
    for d in draft(pattern):
        assert d.letterings and not d.crossed
        assert all(d.area.contains(shapely.Polygon(mark.corners)) for mark in d.letterings)
    assert sorted(path.name for path in folder.iterdir()) == ["index.html", "pattern.json", "pattern.pdf", "pattern.svg"]
