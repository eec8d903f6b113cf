"""Planes of symmetry, and how a field on a surface looks in the mirror.

Candidate planes through the centre of area are scored on points spread evenly over the surface, so the triangulation does
not matter; the best are refined by matching the mirrored points with the nearest ones, in the least squares of the distances
along the normal (Chen, Medioni 1992), far matches counting little; then they are measured against the surface itself.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import csr_matrix
from scipy.spatial import cKDTree

from .measure import areas, open_points, total_area, triangle_normals, vertex_areas, vertex_normals
from .nearest import Nearest

NEAR = 0.003
"""Largest mirror error, as a share of the form's size (square root of its area)."""
SHARE = 0.99
"""Share of the area that has to lie within it: a few stray points do no harm."""
SPREAD, SOURCES = 4000, 250
"""Points spread over the surface, and how many of them are mirrored in a trial."""
AXES = 6
"""Axes that are always tried: of the coordinates, and of inertia."""
FEW, KEPT = 50, 80
"""Points that are mirrored first where there are many directions, and how many of these go on to the real trial."""
ALIKE = 0.15
"""Moments of inertia nearer than this share are taken as equal: every direction between their axes is tried."""
FAN, GLOBE = 60, 240
"""Directions tried around an axis, and over the half globe when all moments are alike."""
BENT = 0.03
"""Mirror error, as such a share, up to which bent faces may be the reason."""
TWIN = 0.2
"""Gap, over the mean edge, within which a point counts as the mirror image of another."""
TRIALS = 8
"""Candidates refined for a plane."""
APART = 0.1
"""Radians between directions worth refining both."""
SQUARE = 0.1
"""Largest cosine between planes that count as at right angles."""
UPRIGHT, SIDEWAYS = 0.3, 0.1
"""What a level plane costs against an upright one, and one across y against one across x, in units of the tolerance."""
DRAWN = 0.5
"""How far points on open edges are drawn toward the middle of their triangles before they are looked for in the mirror."""
EVEN = 0.3
"""Misfits under this share of the tolerance are taken as equal."""


@dataclass
class Plane:
    """point (3,) metres, normal (3,) unit; error: metres within which SHARE of the area finds its mirror image."""

    point: np.ndarray
    normal: np.ndarray
    error: float

    def mirrored(self, points):
        """(k, 3) mirror images."""
        return points - 2 * ((points - self.point) @ self.normal)[:, None] * self.normal

    def turned(self, vectors):
        """(k, 3) mirror images of directions."""
        return vectors - 2 * (vectors @ self.normal)[:, None] * self.normal

    def scaled(self, factor):
        """The Plane after all lengths are multiplied by a factor about the origin."""
        return Plane(self.point * factor, self.normal, self.error * factor)


def planes(surface, most=1):
    """List of at most `most` Planes of symmetry of a connected Surface, best first, each at right angles to the others.

    Reflections at right angles commute, so a field can be made symmetric in one after the other. Of equally good planes the
    upright one comes first (it holds the z direction), then the one across x. The result depends on the surface alone.
    """
    spread = _Spread(surface)
    nearest = Nearest(surface)
    tolerance = NEAR * spread.size
    normals = _directions(spread)
    if len(normals) > KEPT:  # the axes stay: of a ball's planes the level one would never be among the best
        rough = np.maximum(spread.misfit(normals, FEW) / tolerance, EVEN) + _dislike(normals)
        normals = normals[np.union1d(np.argsort(rough, kind="stable")[:KEPT], np.arange(AXES))]
    fine = np.maximum(spread.misfit(normals, SOURCES) / tolerance, EVEN) + _dislike(normals)
    normals = normals[np.argsort(fine, kind="stable")]
    found = []

    def rank(plane):
        return max(plane.error / tolerance, EVEN) + _dislike(plane.normal)

    while len(found) < most:
        square = [normal for normal in normals if _square(normal, found)]
        likely = [plane for plane in _refined(spread, square, tolerance)
                  if plane.error <= tolerance and _square(plane.normal, found)]
        best = None
        for plane in sorted(likely, key=rank):
            if best is None or EVEN + _dislike(plane.normal) < rank(best):  # else it cannot be better
                plane.error = _error(spread, nearest, plane)
                if plane.error <= tolerance and (best is None or rank(plane) < rank(best)):
                    best = plane
        if best is None:
            break
        found.append(_between_points(surface, best))
    return found


def _between_points(surface, plane):
    """The Plane halfway between the points and their mirror images, to rounding, where the mesh is its own mirror image.

    Otherwise the plane as it was, good to a small share of an edge.
    """
    points, step = surface.points, surface.edge_lengths.mean()
    better = plane
    for _ in range(3):
        gap, at = cKDTree(points).query(better.mirrored(points))
        if np.quantile(gap, SHARE) > TWIN * step:
            return plane
        near = gap <= TWIN * step
        apart, middle = (points - points[at])[near], 0.5 * (points + points[at])[near]
        normal = np.linalg.eigh(apart.T @ apart)[1][:, -1]
        normal *= np.sign(normal @ plane.normal)
        better = Plane(plane.point + ((middle - plane.point) @ normal).mean() * normal, normal, plane.error)
    return better


def measured(surface, point, normal):
    """The Plane through a point (3,) with a normal (3,) of any length, its error measured on a Surface."""
    normal = np.asarray(normal, dtype=float)
    plane = Plane(np.asarray(point, dtype=float), normal / np.linalg.norm(normal), np.inf)
    plane.error = _error(_Spread(surface), Nearest(surface), plane)
    return plane


def mirrored_points(surface, plane):
    """(triangle (n,), barycentric (n, 3)): where on the Surface each point's mirror image lies."""
    nearest, normals = Nearest(surface), plane.turned(vertex_normals(surface))
    triangle, share, _ = nearest.places(plane.mirrored(drawn_in(surface)), normals)
    rim = np.flatnonzero(open_points(surface))
    triangle[rim], share[rim] = nearest.around(plane.mirrored(surface.points[rim]), normals[rim], triangle[rim])
    return triangle, share


def drawn_in(surface):
    """(n, 3) the points, those on open edges moved a little inward: so the two sides of a slit can be told apart."""
    points, rim = surface.points.copy(), open_points(surface)
    middles = points[surface.triangles].mean(axis=1)
    count = np.bincount(surface.triangles.ravel(), minlength=len(points))
    inward = np.column_stack([np.bincount(surface.triangles.ravel(), np.repeat(axis, 3), minlength=len(points))
                              for axis in middles.T]) / np.maximum(count, 1)[:, None]
    points[rim] += DRAWN * (inward - points)[rim]
    return points


def reflection(surface, plane):
    """(n, n) csr matrix R: R @ f is the field f (n,) or (n, k) seen in the mirror, linear within triangles."""
    triangle, share = mirrored_points(surface, plane)
    n = len(triangle)
    return csr_matrix((share.ravel(), surface.triangles[triangle].ravel(), 3 * np.arange(n + 1)), shape=(n, n))


class _Spread:
    """Points spread evenly over a surface, with normals and a tree."""

    def __init__(self, surface):
        area = areas(surface)
        self.size = np.sqrt(total_area(surface))
        # equal steps of area; within the triangle a low-discrepancy sequence (Roberts 2018: powers of the plastic number)
        steps = np.cumsum(area) / area.sum()
        triangle = np.searchsorted(steps, (np.arange(SPREAD) + 0.5) / SPREAD).clip(max=len(area) - 1)
        u, v = np.modf(np.arange(1, SPREAD + 1)[:, None] * [0.7548776662466927, 0.5698402909980532])[0].T
        over = u + v > 1
        u, v = np.where(over, 1 - u, u), np.where(over, 1 - v, v)
        a, b, c = (surface.points[surface.triangles[triangle, k]] for k in range(3))
        self.points = a + u[:, None] * (b - a) + v[:, None] * (c - a)
        self.normals = triangle_normals(surface)[triangle]
        self.middle = self.points.mean(axis=0)
        self._weight = 0.05 * self.size
        self._tree = cKDTree(np.column_stack([self.points, self._weight * self.normals]))
        self._some = np.random.default_rng(0).permutation(SPREAD)[:SOURCES]

    def _match(self, points, normals):
        gap, at = self._tree.query(np.column_stack([points, self._weight * normals]))
        return gap, at

    def misfit(self, normals, sources):
        """(k,) metres: mean distance of so many mirrored points to their match for planes through the middle, far ones cut
        off."""
        gaps, some = np.empty(len(normals)), self._some[:sources]
        for k, normal in enumerate(normals):
            plane = Plane(self.middle, normal, np.inf)
            image = plane.mirrored(self.points[some])
            gap, at = self._match(image, plane.turned(self.normals[some]))
            off = np.abs(np.einsum("kx,kx->k", image - self.points[at], self.normals[at]))
            gaps[k] = np.where(gap < 2 * self.size / np.sqrt(SPREAD), off, np.minimum(gap, 0.1 * self.size)).mean()
        return gaps

    def refined(self, normal, tolerance):
        """The Plane near a candidate through the middle that matches best; its error the middle one of some points, which
        are known to a curve between their neighbours."""
        plane = Plane(self.middle, normal, np.inf)
        points, normals = self.points[self._some], self.normals[self._some]
        for _ in range(12):
            image = plane.mirrored(points)
            at = self._match(image, plane.turned(normals))[1]
            facing = self.normals[at]
            off = np.einsum("kx,kx->k", image - self.points[at], facing)
            spread = max(tolerance, 2 * np.median(np.abs(off)))
            weight = 1 / (1 + (off / spread) ** 2)
            # image = p - 2 h n with h = (p - point) . n; unknown: n's turn in the two directions across it, a shift along it
            across = _across(plane.normal)
            height = (points - plane.point) @ plane.normal
            along = facing @ plane.normal
            turn = -2 * ((points - plane.point) @ across.T * along[:, None] + height[:, None] * (facing @ across.T))
            rows = np.column_stack([turn / self.size, 2 * along]) * weight[:, None]
            change = np.linalg.lstsq(rows, -off * weight, rcond=0.02)[0]
            turned = plane.normal + (change[:2] / self.size) @ across
            turned /= np.linalg.norm(turned)
            plane = Plane(plane.point + change[2] * plane.normal, turned, np.inf)
            if np.abs(change).max() < 1e-6 * self.size:
                break
        point = self.middle + ((plane.point - self.middle) @ plane.normal) * plane.normal
        return Plane(point, plane.normal, float(np.median(np.abs(off))))


def _error(spread, nearest, plane):
    """Metres within which SHARE of the area finds its mirror image: on the surface, or point for point.

    Faces with more than three corners may be bent, and their triangles' diagonals run otherwise on the two sides: then the
    points match while the triangles do not.
    """
    points, normals = spread.points[::4], spread.normals[::4]
    turned = plane.turned(normals)
    triangle, _, gap = nearest.places(plane.mirrored(points), turned)
    facing = np.einsum("kx,kx->k", turned, nearest.normals[triangle])
    error = float(np.quantile(np.where(facing > 0, gap, spread.size), SHARE))
    if NEAR < error / spread.size < BENT:
        surface = nearest.surface
        gap = cKDTree(surface.points).query(plane.mirrored(surface.points))[0]
        order = np.argsort(gap, kind="stable")
        reached = np.cumsum(vertex_areas(surface)[order])
        error = min(error, float(gap[order][np.searchsorted(reached, SHARE * reached[-1])]))
    return error


def _directions(spread):
    """(k, 3) candidate normals: the coordinate axes, those of inertia, and all directions between axes of like moments."""
    centred = spread.points - spread.middle
    moments, axes = np.linalg.eigh(centred.T @ centred)
    found = [np.eye(3), axes.T]
    like = moments[1:] - moments[:-1] < ALIKE * moments[1:]
    if like.all():
        k = np.arange(GLOBE) + 0.5
        z, turn = 1 - k / GLOBE, np.pi * (1 + 5**0.5) * k  # an even spiral over the half globe
        flat = np.sqrt(1 - z * z)
        found.append(np.column_stack([flat * np.cos(turn), flat * np.sin(turn), z]))
    for k in np.flatnonzero(like):
        angle = np.arange(FAN) * np.pi / FAN
        found.append(np.cos(angle)[:, None] * axes[:, k] + np.sin(angle)[:, None] * axes[:, k + 1])
    normals = np.concatenate(found)
    return normals * np.where(normals[:, :1] < 0, -1.0, 1.0)


def _refined(spread, normals, tolerance):
    """List of Planes, measured roughly, from the first TRIALS of the candidate normals that lie apart."""
    planes, tried = [], []
    for normal in normals:
        if len(planes) == TRIALS:
            break
        if all(abs(normal @ other) < np.cos(APART) for other in tried):
            plane = spread.refined(normal, tolerance)
            planes.append(plane)
            tried += [normal, plane.normal]
    return planes


def _square(normal, found):
    return all(abs(normal @ plane.normal) < SQUARE for plane in found)


def _dislike(normals):
    """What upright planes (z in the plane), and of them those across x, are preferred by; normals (..., 3)."""
    return UPRIGHT * np.abs(normals[..., 2]) + SIDEWAYS * (1 - np.abs(normals[..., 0]))


def _across(normal):
    """(2, 3) unit directions at right angles to a normal and to each other."""
    first = np.cross(normal, np.eye(3)[np.abs(normal).argmin()])
    first /= np.linalg.norm(first)
    return np.array([first, np.cross(normal, first)])
