"""What a metre of seam costs where: the maker's keep-clear weights, and two helpers that make such weights."""

import numpy as np
from scipy.sparse import diags

from ..errors import WishError
from ..form.laplacian import Factor, cotangent_laplacian
from ..form.measure import area_vectors, sum_at_points, total_area, triangle_normals, unit, vertex_areas

NEVER = 1e3  # price where a seam may never be: measured to leave none there that can be elsewhere
PIXELS = 256  # of the depth buffer, along the form's longer side as it is seen
BIAS = 2.0  # pixels by which a place may lie behind what is seen in its pixel and still be seen, on a slope of one to one
SHARP = np.radians(40)  # turn at an edge from which it is a crease
EVEN = 0.02  # of the form's size, over which its bend is evened out


def seam_prices(form, wishes):
    """(n,) price factor at the form's points, 1 where nothing is said. Raises WishError on weights of the wrong length."""
    price = np.ones(len(form.points))
    if wishes.keep_clear is not None:
        weights = np.asarray(wishes.keep_clear, dtype=float)
        if weights.shape != form.point_of.shape:
            raise WishError(
                f"keep_clear: {weights.size} weights for a form of {len(form.point_of)} points. "
                "Paint the weights on this form."
            )
        kept = form.point_of >= 0
        np.maximum.at(price, form.point_of[kept], np.minimum(1 + weights[kept], NEVER))
    return price


def seen_weights(form, directions):
    """(n,) weights for `keep_clear` at the caller's points: 1 where the form is looked at squarely, 0 where it is hidden.

    directions (k, 3): from the form to each eye, which is far away. Between the two it is the area that shows over the area
    that is there, from the eye that sees most of it; what stands before it hides it. Multiply to keep clearer.
    """
    eyes = np.asarray(directions, dtype=float).reshape(-1, 3)
    if not len(eyes) or not np.isfinite(eyes).all() or not eyes.any(axis=1).all():
        raise WishError("directions: give at least one of three numbers, not all of them zero.")
    eyes /= np.linalg.norm(eyes, axis=1, keepdims=True)
    return _as_given(form, np.max([_seen(form.surface, eye) for eye in eyes], axis=0))


def crease_weights(form):
    """(n,) weights for `keep_clear` at the caller's points: 0 on sharp edges and in deep valleys, 1 where the form bends as
    it mostly does, up to 2 on high ridges. Multiply to make more of it.

    The bend is the mean curvature, evened out over 2 % of the form's size and counted against that of a ball of its area.
    """
    surface = form.surface
    size, mass = np.sqrt(total_area(surface)), vertex_areas(surface)
    inner = np.flatnonzero(~surface.open_edges)
    normals, ends = triangle_normals(surface), surface.edges[inner]
    first, second = (normals[side] for side in surface.edge_triangles[inner].T)
    along = unit(surface.points[ends[:, 1]] - surface.points[ends[:, 0]])
    turn = np.arctan2((np.cross(first, second) * along).sum(axis=1), (first * second).sum(axis=1))
    sharp = np.abs(turn) > SHARP
    # an edge holds half its length times its turn of mean curvature (Steiner); a crease is no ridge, so it counts for none
    share = np.where(sharp, 0.0, 0.25 * turn * surface.edge_lengths[inner])
    load = np.bincount(ends.ravel(), np.repeat(share, 2), len(mass))
    evening = Factor((diags(mass) + (EVEN * size) ** 2 * cotangent_laplacian(surface)).tocsc())
    bend = evening.solve(load) * size / np.sqrt(4 * np.pi)
    order = np.argsort(bend, kind="stable")
    usual = bend[order][np.searchsorted(np.cumsum(mass[order]), 0.5 * mass.sum())]
    weights = 1 + np.tanh(bend - usual)
    weights[ends[sharp]] = 0.0
    return _as_given(form, weights)


def _as_given(form, values):
    """Values at the caller's points from those at the form's; 0 at points that were left out."""
    return np.where(form.point_of >= 0, values[form.point_of], 0.0)


def _seen(surface, eye):
    """(n,) share of the area around each point that shows from the direction `eye` (3,)."""
    across = np.cross(eye, np.eye(3)[np.abs(eye).argmin()])
    across /= np.linalg.norm(across)
    axes = np.array([across, np.cross(eye, across), eye])
    places = surface.points @ axes.T
    low, span = places[:, :2].min(axis=0), np.ptp(places[:, :2], axis=0).max()
    pixel = max(span, 1e-300) / PIXELS
    places[:, :2] = (places[:, :2] - low) / pixel
    places[:, 2] /= pixel
    depth = _depths(places[surface.triangles])
    i, j = np.minimum(places[:, :2].astype(np.int64), PIXELS - 1).T
    facing = np.maximum(area_vectors(surface) @ eye, 0.0)
    shows = sum_at_points(surface, np.repeat(facing[:, None] / 3, 3, axis=1)) / np.maximum(vertex_areas(surface), 1e-300)
    slope = np.sqrt(np.maximum(1 - shows**2, 0)) / np.maximum(shows, 0.1)
    return np.where(places[:, 2] >= depth[i, j] - BIAS * (1 + slope), np.minimum(shows, 1.0), 0.0)


def _depths(corners):
    """(PIXELS, PIXELS) the height nearest to the eye in the middle of every pixel; corners (m, 3, 3) in pixels."""
    depth = np.full((PIXELS, PIXELS), -np.inf)
    first = np.ceil(corners[:, :, :2].min(axis=1) - 0.5).astype(np.int64).clip(0, PIXELS - 1)
    last = np.floor(corners[:, :, :2].max(axis=1) - 0.5).astype(np.int64).clip(0, PIXELS - 1)
    wide, high = (last - first + 1).clip(min=0).T
    row = np.repeat(np.arange(len(corners)), wide * high)
    cell = np.arange(len(row)) - np.repeat(np.cumsum(wide * high) - wide * high, wide * high)
    i, j = first[row, 0] + cell // high[row], first[row, 1] + cell % high[row]
    a, b, c = (corners[row, k] for k in range(3))
    x, y = i + 0.5 - a[:, 0], j + 0.5 - a[:, 1]
    b, c = b - a, c - a
    twice = b[:, 0] * c[:, 1] - b[:, 1] * c[:, 0]
    with np.errstate(all="ignore"):  # a triangle seen on edge fills no pixel
        v, w = (x * c[:, 1] - y * c[:, 0]) / twice, (y * b[:, 0] - x * b[:, 1]) / twice
        inside = (v >= 0) & (w >= 0) & (v + w <= 1)
        height = a[:, 2] + v * b[:, 2] + w * c[:, 2]
    np.maximum.at(depth, (i[inside], j[inside]), height[inside])
    return depth
