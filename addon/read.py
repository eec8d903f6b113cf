"""Reads a form out of the scene: the evaluated mesh, placed in the world, in metres."""

from dataclasses import dataclass

import numpy as np

from . import names


@dataclass(frozen=True)
class Reading:
    """One object's surface as the solver wants it.

    points (n, 3) metres; corners (c,) point indices of all faces, face after face; sizes (f,) corners of each face;
    keep_clear (n,), held, shut and start (k, 2), only (f,): the wishes of these names, empty where nothing is wished.
    """

    name: str
    points: np.ndarray
    corners: np.ndarray
    sizes: np.ndarray
    keep_clear: np.ndarray
    held: np.ndarray
    shut: np.ndarray
    only: np.ndarray
    start: np.ndarray

    @property
    def faces(self):
        """(m, 3) array where every face is a triangle, else a list of corner lists."""
        if (self.sizes == 3).all():
            return self.corners.reshape(-1, 3)
        return np.split(self.corners, np.cumsum(self.sizes)[:-1])

    def same(self, other):
        """True where `other` is the same surface to the last bit."""
        return (np.array_equal(self.points, other.points) and np.array_equal(self.corners, other.corners)
                and np.array_equal(self.sizes, other.sizes))


def read(thing, scene, depsgraph, keep_clear="", improve=False):
    """The Reading of object `thing`: modifiers and shape keys applied, in the world, scaled by the scene's units.

    keep_clear: name of the vertex group that is painted where seams are unwelcome; improve: the seams marked are a start.
    """
    evaluated = thing.evaluated_get(depsgraph)
    mesh = evaluated.to_mesh()
    try:
        points = positions(mesh).astype(float)
        corners, sizes = faces(mesh)
        clear = _keep_clear(mesh, evaluated.vertex_groups.get(keep_clear))
        held, shut = (edges(mesh)[flags(mesh, name, "EDGE")] for name in (names.HELD, names.SHUT))
        start = edges(mesh)[seams(mesh) & improve]
        only = flags(mesh, names.ONLY, "FACE") if names.ONLY in mesh.attributes else np.zeros(0, bool)
    finally:
        evaluated.to_mesh_clear()
    matrix = np.array(evaluated.matrix_world)
    points = (points @ matrix[:3, :3].T + matrix[:3, 3]) * scene.unit_settings.scale_length
    if thing.matrix_world.is_negative:
        corners = _turned(corners, sizes)
    return Reading(thing.name, points, corners, sizes, clear, held, shut, only, start)


def positions(mesh):
    """(n, 3) float32 coordinates of the mesh's own space."""
    points = np.empty((len(mesh.vertices), 3), np.float32)
    if len(points):
        mesh.attributes["position"].data.foreach_get("vector", points.ravel())
    return points


def edges(mesh):
    """(e, 2) points of the mesh's edges."""
    ends = np.empty((len(mesh.edges), 2), np.int32)
    if len(ends):
        mesh.attributes[".edge_verts"].data.foreach_get("value", ends.ravel())
    return ends


def seams(mesh):
    """(e,) bool: edges that are marked as seams."""
    flags = np.empty(len(mesh.edges), bool)
    mesh.edges.foreach_get("use_seam", flags)
    return flags


def flags(mesh, name, domain):
    """(k,) bool: the attribute `name` of the mesh's edges (domain "EDGE") or faces ("FACE"); False where there is none."""
    found = np.zeros(len(mesh.edges if domain == "EDGE" else mesh.polygons), bool)
    attribute = mesh.attributes.get(name)
    if attribute is not None and (attribute.domain, attribute.data_type) == (domain, "BOOLEAN"):
        attribute.data.foreach_get("value", found)
    return found


def selected(things):
    """(k,) bool: which of a mesh's edges or faces are selected."""
    found = np.empty(len(things), bool)
    things.foreach_get("select", found)
    return found


def faces(mesh):
    """(corners (c,), sizes (f,)) of the mesh: point of each corner, face after face, and corners of each face."""
    corners, sizes = np.empty(len(mesh.loops), np.int32), np.empty(len(mesh.polygons), np.int32)
    mesh.loops.foreach_get("vertex_index", corners)
    mesh.polygons.foreach_get("loop_total", sizes)
    return corners, sizes


def _keep_clear(mesh, group):
    """(n,) prices from painted weights: w / (1 - w), so that half the paint doubles the price and full paint is never."""
    weights = np.zeros(len(mesh.vertices) if group else 0)
    if group:
        for vertex in mesh.vertices:
            for element in vertex.groups:
                if element.group == group.index:
                    weights[vertex.index] = element.weight
    with np.errstate(divide="ignore"):
        return weights / (1 - weights)


def _turned(corners, sizes):
    """Corners with every face running the other way: a mirrored object shows its faces from behind."""
    ends = np.cumsum(sizes)
    face = np.repeat(np.arange(len(sizes)), sizes)
    return corners[ends[face] - 1 - (np.arange(len(corners)) - (ends - sizes)[face])]
