"""Distances along a surface, by libigl: exact ones (Mitchell, Mount, Papadimitriou 1987) and quick smooth ones from heat
flow (Crane, Weischedel, Wardetzky 2013)."""

import igl
import numpy as np

NONE = np.zeros(0, dtype=np.int64)


def exact(surface, sources, target):
    """Length of the shortest way through faces from any of the points `sources` (k,) of a Surface to its point `target`."""
    faces = np.ascontiguousarray(surface.triangles, dtype=np.int64)
    return float(np.ravel(igl.exact_geodesic(np.ascontiguousarray(surface.points), faces, np.asarray(sources), NONE,
                                             np.array([target]), NONE))[0])


class Heat:
    """Quick distances on one Surface, its factors kept."""

    def __init__(self, surface):
        self._data = igl.HeatGeodesicsData()
        faces = np.ascontiguousarray(surface.triangles, dtype=np.int64)
        igl.heat_geodesics_precompute(np.ascontiguousarray(surface.points), faces, self._data)

    def from_points(self, points):
        """(n, k) distance of every point from each of the points (k,)."""
        return np.column_stack([igl.heat_geodesics_solve(self._data, np.array([point])) for point in points])
