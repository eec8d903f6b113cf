"""What is measured on a surface: angles, areas, normals, curvature, genus."""

import numpy as np


def edge_vectors(surface):
    """(m, 3, 3) metres; row k of a triangle runs from corner k to corner k+1."""
    corners = surface.points[surface.triangles]
    return corners[:, [1, 2, 0]] - corners


def area_vectors(surface):
    """(m, 3) square metres: the outward normal of each triangle, as long as its area."""
    return surface.area_vectors


def areas(surface):
    """(m,) square metres."""
    return surface.areas


def angles(surface):
    """(m, 3) radians at each corner, by the arc tangent of cross over dot (Kahan): right for needles too.

    A triangle without area counts 0, 0, pi (the pi where its longest side is seen from), one with two corners in one place
    pi/2, pi/2, 0: its sum stays pi.
    """
    sides = edge_vectors(surface)
    back = -np.roll(sides, 1, axis=1)
    dots = np.einsum("tkx,tkx->tk", sides, back)
    double_area = np.broadcast_to(2 * areas(surface)[:, None], dots.shape)
    return np.where((double_area == 0) & (dots == 0), np.pi / 2, np.arctan2(double_area, dots))


def triangle_normals(surface):
    """(m, 3) unit normals; zero where a triangle has no area."""
    return unit(area_vectors(surface))


def vertex_normals(surface):
    """(n, 3) unit normals, the triangles weighted by their area."""
    return unit(sum_at_points(surface, np.repeat(area_vectors(surface)[:, None], 3, axis=1)))


def unit(vectors):
    """The rows at length 1; rows of zeros stay."""
    length = np.linalg.norm(vectors, axis=1, keepdims=True)
    return vectors / np.where(length > 0, length, 1.0)


def sum_at_points(surface, values):
    """(n,) or (n, d): values given at the corners of the triangles, (m, 3) or (m, 3, d), summed at each point."""
    n, at = len(surface.points), surface.triangles.ravel()
    if values.ndim == 2:
        return np.bincount(at, values.ravel(), n)
    flat = values.reshape(len(at), -1)
    return np.column_stack([np.bincount(at, column, n) for column in flat.T])


def vertex_areas(surface):
    """(n,) square metres: a third of every triangle at each of its points."""
    return sum_at_points(surface, np.repeat(areas(surface)[:, None] / 3, 3, axis=1))


def open_points(surface):
    """(n,) bool: points on an open edge."""
    on_edge = np.zeros(len(surface.points), dtype=bool)
    on_edge[surface.edges[surface.open_edges]] = True
    return on_edge


def angle_defects(surface):
    """(n,) radians: 2 pi less the angles around an inner point, pi less them on an open edge.

    Inside this is the Gaussian curvature gathered at the point, on an edge the turn of the edge within the surface;
    all of them sum to 2 pi times the Euler characteristic (Gauss-Bonnet).
    """
    whole = np.where(open_points(surface), np.pi, 2 * np.pi)
    return whole - sum_at_points(surface, angles(surface))


def total_area(surface):
    """Square metres."""
    return float(areas(surface).sum())


def volume(surface):
    """Cubic metres inside a closed surface; negative when its triangles face inward."""
    a, b, c = (surface.points[surface.triangles[:, k]] - surface.points[surface.triangles[0, 0]] for k in range(3))
    return float(np.einsum("ij,ij->", a, np.cross(b, c))) / 6


def genus(surface):
    """List with the genus of each component, in the order of `surface.triangle_components`."""
    count, part = surface.triangle_components
    tri, edge = surface.triangles, surface.triangle_edges
    corners = np.unique(np.column_stack([np.repeat(part, 3), tri.ravel()]), axis=0)[:, 0]
    part_of_edge = np.empty(len(surface.edges), dtype=np.int64)
    part_of_edge[edge.ravel()] = np.repeat(part, 3)
    part_of_point = np.empty(len(surface.points), dtype=np.int64)
    part_of_point[tri.ravel()] = np.repeat(part, 3)
    euler = (np.bincount(corners, minlength=count) - np.bincount(part_of_edge, minlength=count)
             + np.bincount(part, minlength=count))
    loops = np.bincount([part_of_point[loop[0]] for loop in surface.boundary_loops], minlength=count)
    return [int((2 - e - b) // 2) for e, b in zip(euler, loops, strict=True)]
