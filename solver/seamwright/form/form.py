"""The form as the rest of the project sees it: read, mended, cut into triangles."""

import numpy as np

from ..errors import FormError
from . import mend
from .measure import total_area
from .needles import flip_needles
from .polygons import read_faces, read_points
from .surface import Surface
from .triangulate import triangulate


class Form:
    """What is to be covered.

    points (n, 3) metres; faces an (m, 3) or (m, 4) array or a list of corner lists (n-gons, concave ones too), as seen
    counter-clockwise from outside. Harmless faults are put right and listed in `mended`, one sentence each; FormError says
    what is wrong with any other.

    surface: the mended Surface; points, triangles: its tables; polygon (t,): the caller's face of each triangle;
    point_of (n,): the surface's point for each given point, -1 where it was left out; face_count: faces given.
    """

    def __init__(self, points, faces, name="form"):
        self.name = str(name)
        self.mended = []
        points = read_points(points, self.name)
        polygons = read_faces(faces, len(points), self.name)
        self.face_count = len(polygons.sizes)
        used = np.unique(polygons.corners)
        polygons = mend.drop_collapsed(polygons, self.mended)
        polygons, root = mend.weld(points, polygons, self.mended)
        polygons = mend.drop_doubled(polygons, self.mended)
        if not len(polygons.sizes):
            raise FormError(f"Form '{self.name}' has no face with an area; its points lie on top of each other. "
                            "Check its scale.")
        mend.refuse_crowded_edges(polygons, self.name)
        polygons = mend.orient(points, polygons, self.mended, self.name)
        polygons, source, self.point_of = mend.separate(polygons, root, used, self.mended)
        triangles, which = triangulate(points[source], polygons)
        triangles, which = flip_needles(points[source], triangles, which, self.mended)
        self.surface = Surface(points[source], triangles)
        self.polygon = polygons.face[which]
        if not total_area(self.surface) > 0:
            raise FormError(f"Form '{self.name}' has no area: all its faces are lines or points. "
                            "Check its scale along every axis.")

    @property
    def points(self):
        """(k, 3) metres, after mending."""
        return self.surface.points

    @property
    def triangles(self):
        """(t, 3) point indices, after mending."""
        return self.surface.triangles

    @property
    def diagonal(self):
        """(e,) bool: edges of the surface that only cut one of the caller's faces into triangles."""
        sides = self.surface.edge_triangles
        return (sides >= 0).all(axis=1) & (self.polygon[sides[:, 0]] == self.polygon[sides[:, 1]])
