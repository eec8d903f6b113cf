"""The edge tables against a plain twin, and the walks round open edges."""

import numpy as np
import pytest
from forms import cap, cylinder, disk, icosphere, torus
from seamwright.form.form import Form
from seamwright.form.surface import Surface


def plain_tables(surface):
    """Slow twin: edges, who runs along them and who against."""
    sides = {}
    for t, corners in enumerate(surface.triangles.tolist()):
        for k in range(3):
            a, b = corners[k], corners[(k + 1) % 3]
            sides.setdefault((min(a, b), max(a, b)), [-1, -1])[a > b] = t
    return sorted(sides), [sides[edge] for edge in sorted(sides)]


@pytest.mark.parametrize("form", [icosphere(1), torus(1.0, 0.3, 8, 5), cylinder(1.0, 1.0, 7), disk(1.0, 3)],
                         ids=["sphere", "torus", "tube", "disk"])
def test_tables_match_the_plain_twin(form):
    surface = Surface(*form)
    edges, sides = plain_tables(surface)
    assert surface.edges.tolist() == [list(edge) for edge in edges] and surface.edge_triangles.tolist() == sides
    for k in range(3):
        ends = np.sort(surface.triangles[:, [k, (k + 1) % 3]], axis=1)
        assert np.array_equal(surface.edges[surface.triangle_edges[:, k]], ends)
    assert np.array_equal(surface.edge_index(surface.edges[:, ::-1]), np.arange(len(edges)))
    assert surface.edge_index([(0, 0)]).tolist() == [-1]


@pytest.mark.parametrize("form, loops", [(icosphere(1), 0), (cylinder(1.0, 1.0, 7), 2), (cap(1.0, 3), 1)])
def test_loops_cover_the_open_edges_with_the_surface_on_the_left(form, loops):
    surface = Surface(*form)
    assert len(surface.boundary_loops) == loops and sum(map(len, surface.boundary_loops)) == surface.open_edges.sum()
    directed = {(a, b) for tri in surface.triangles.tolist() for a, b in zip(tri, tri[1:] + tri[:1], strict=True)}
    for loop in surface.boundary_loops:
        for a, b in zip(loop.tolist(), np.roll(loop, -1).tolist(), strict=True):
            assert (a, b) in directed and (b, a) not in directed


def test_where_two_holes_share_a_point_the_walk_stays_on_one_side():
    """Two triangles removed that touch in one point leave one loop that passes the point twice without crossing."""
    points, faces = torus(1.0, 0.4, 12, 8)
    first = faces[0]
    touching = [t for t, face in enumerate(faces) if len(set(face) & set(first)) == 1][0]
    surface = Surface(points, np.delete(faces, [0, touching], axis=0))
    (loop,) = surface.boundary_loops
    assert len(loop) == 6 and len(np.unique(loop)) == 5
    divided = Form(surface.points, surface.triangles).surface
    assert [len(loop) for loop in divided.boundary_loops] == [6] and divided.euler == -1
