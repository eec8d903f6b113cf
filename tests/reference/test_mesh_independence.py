"""A seam does not know the triangles: the same form with four times the points, or triangulated otherwise, costs the same.

Experience of this project: independent searches on the same form agree within 3 %, a given network within 1 %.
"""

import numpy as np
import pytest
import seamwright as sw
from forms import ellipsoid, globe, icosphere
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.energy import evaluate
from seamwright.seams.ladder import Ladder
from seamwright.seams.seek import seek

AXES = (1.0, 0.7, 0.5)


def drawn_aside(level):
    """An ellipsoid whose triangles are larger on one side than on the other and keep no symmetry."""
    points, faces = icosphere(level)
    points = points + 0.15 * np.sin(2 * points[:, [1, 2, 0]] + [0.3, 1.1, 2.0])
    return points / np.linalg.norm(points, axis=1, keepdims=True) * AXES, faces


MESHES = {"even": ellipsoid(*AXES, 4), "finer": ellipsoid(*AXES, 5), "uneven": drawn_aside(4), "bands": globe(72, 36, AXES)}


@pytest.fixture(scope="module")
def ladders():
    return {name: Ladder(sw.Form(*mesh).surface) for name, mesh in MESHES.items()}


def test_a_given_network_costs_the_same(ladders):
    """Three regions around an oblique axis, parted where the largest of three plane functions changes."""
    axes = np.array([[0.3, 0.2, 1.0], [-0.9, 0.4, -0.2], [0.5, -0.8, -0.4]])
    found = []
    for ladder in ladders.values():
        level = ladder.levels[-1]
        fields = level.surface.points @ axes.T
        cost = evaluate(level, cut_by_fields(level.surface, fields), 0.3, "square", gradient=False)
        found.append((cost.length, cost.distortion))
    length, distortion = np.array(found).T
    assert np.ptp(length) < 0.003 * length.mean()
    assert np.ptp(distortion) < 0.01 * distortion.mean()


def test_independent_searches_agree(ladders):
    scores = [seek(ladder, 0.3).score for ladder in ladders.values()]
    assert max(scores) < 1.03 * min(scores)
