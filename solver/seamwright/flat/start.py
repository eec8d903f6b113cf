"""A flip-free first flattening: conformal where that holds, else an embedding that always does."""

import numpy as np
from scipy.sparse import coo_matrix, diags

from ..form.laplacian import Factor
from ..form.measure import angle_defects, angles
from .factor import factor
from .rest import solve_complex


def start(surface, rest, loop):
    """(flat (n,) complex without flips, note or None) of a disk whose boundary is `loop`, scaled to least strain."""
    conformal, _ = conformal_start(surface, rest, loop)
    if valid(rest, conformal):
        return conformal * best_scale(rest, conformal), None
    flat = embedded_start(surface, rest, loop)
    if flat is None:
        return None, "no start without flips was found"
    return flat * best_scale(rest, flat), "started from a round embedding, since the conformal one had flips"


def conformal_start(surface, rest, loop):
    """(flat, log scale), (n,) complex and (n,): conformal, boundary lengths kept (Springborn 2008; Sawhney, Crane 2017).

    The log scale u solves Laplace u = curvature with u = 0 on the boundary; the boundary then turns by its own turn on the
    form plus the flow of u; its lengths give way a little so that it closes; both coordinates are harmonic inside.
    """
    matrix = rest.laplacian(np.ones(len(rest.area))).tocsr()
    inner = np.ones(rest.count, dtype=bool)
    inner[loop] = False
    inner = np.flatnonzero(inner)
    turn = angle_defects(surface)
    flat, log_scale = np.zeros(rest.count, dtype=complex), np.zeros(rest.count)
    shared = matrix[inner][:, loop]
    if len(inner):
        factors = factor(matrix[inner][:, inner])
        log_scale[inner] = factors.solve(-turn[inner])
    sides = surface.points[np.roll(loop, -1)] - surface.points[loop]
    flat[loop] = closed_polygon(np.linalg.norm(sides, axis=1), turn[loop] + shared.T @ log_scale[inner])
    if len(inner):
        flat[inner] = solve_complex(factors, -(shared @ flat[loop]))
    return flat, log_scale


def closed_polygon(lengths, turns):
    """(q,) complex corners of a polygon with these sides, turned by turns[k] at corner k; lengths give way to close it.

    Least squares of change^2 / length under the two closing conditions.
    """
    heading = np.exp(1j * (np.cumsum(turns) - turns[0]))
    rows = np.stack([heading.real, heading.imag])
    share = np.linalg.lstsq((rows * lengths) @ rows.T, rows @ lengths, rcond=None)[0]
    lengths = lengths * (1 - share @ rows)
    steps = lengths * heading
    return np.concatenate([[0], np.cumsum(steps)[:-1]])


def embedded_start(surface, rest, loop, rounds=12):
    """(n,) complex embedding with the boundary on a circle; None if rounding still flips a triangle.

    Mean-value weights (Tutte 1963; Floater 2003). Long pieces shrink towards the middle until rounding flips a triangle,
    so the weights are divided by the local scale and the embedding made again (Yoshizawa, Belyaev, Seidel 2004).
    """
    sides = np.linalg.norm(surface.points[np.roll(loop, -1)] - surface.points[loop], axis=1)
    ring = np.exp(2j * np.pi * np.concatenate([[0], np.cumsum(sides)[:-1]]) / sides.sum())
    tail, head, weight = mean_value_weights(surface)
    scale = np.ones(rest.count)
    for _ in range(rounds):
        flat = _pulled(tail, head, weight / scale[head], loop, ring)
        if valid(rest, flat):
            return flat
        alpha, beta = rest.maps(flat)
        size = np.abs(alpha) ** 2 + np.abs(beta) ** 2
        at_point = np.bincount(rest.triangles.ravel(), np.repeat(rest.area * size, 3), rest.count)
        local = np.sqrt(at_point / np.bincount(rest.triangles.ravel(), np.repeat(rest.area, 3), rest.count))
        scale = scale * np.clip(local / np.median(local), 1e-3, 1e3) ** -1
    return None


def mean_value_weights(surface):
    """(tail, head, weight), each (6t,): how strongly each point is pulled to its neighbour; always positive."""
    half = np.tan(np.clip(angles(surface), 1e-3, np.pi - 1e-3) / 2)
    a, b, c = (surface.triangles[:, k] for k in range(3))
    points = surface.points
    tails, heads, weights = [], [], []
    for k, (p, q, r) in enumerate(((a, b, c), (b, c, a), (c, a, b))):
        for other in (q, r):
            length = np.linalg.norm(points[other] - points[p], axis=1)
            tails.append(p)
            heads.append(other)
            weights.append(half[:, k] / np.maximum(length, 1e-9 * length.max()))
    return np.concatenate(tails), np.concatenate(heads), np.concatenate(weights)


def _pulled(tail, head, weight, loop, ring):
    """Every inner point in the weighted mean of its neighbours, the loop on the ring."""
    count = tail.max() + 1
    pull = coo_matrix((weight, (tail, head)), shape=(count, count)).tocsr()
    pull = diags(1 / np.asarray(pull.sum(axis=1)).ravel()) @ pull
    inner = np.ones(count, dtype=bool)
    inner[loop] = False
    inner = np.flatnonzero(inner)
    flat = np.zeros(count, dtype=complex)
    flat[loop] = ring
    if len(inner):
        factors = Factor(diags(np.ones(len(inner))) - pull[inner][:, inner])
        flat[inner] = solve_complex(factors, pull[inner][:, loop] @ ring)
    return flat


def valid(rest, flat):
    """True when no triangle is flipped, nor so thin that only rounding keeps it from that."""
    alpha, beta = rest.maps(flat)
    return bool(np.isfinite(flat).all() and (np.abs(alpha) * (1 - 1e-9) > np.abs(beta)).all())


def best_scale(rest, flat):
    """Factor that makes the symmetric Dirichlet energy least."""
    a, b = (np.abs(m) ** 2 for m in rest.maps(flat))
    squares, area = a + b, a - b
    return ((rest.area @ (squares / area**2)) / (rest.area @ squares)) ** 0.25
