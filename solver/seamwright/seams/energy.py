"""What a seam network costs, and its exact gradient.

On the cut surface the least-stretch conformal flattening has log scale u with Laplace u = K, u = 0 on seams and open edges
(Springborn, Schroeder, Pinkall 2008; Sawhney, Crane 2018 for the zero boundary). The distortion is the integral of j(u).
The gradient differentiates the sub-triangles' energies with respect to the cut places (no estimate of normal derivatives):
for nodal values u, p and F = area grad u . grad p,
dF/dx_k = area ((grad u . grad p) grad phi_k - (grad phi_k . grad p) grad u - (grad phi_k . grad u) grad p).
"""

from dataclasses import dataclass

import numpy as np

from .cut import rises
from .edgewise import stepped
from .level import triangle_stiffness
from .nodes import Nodes


def _square(u):
    return u * u


def _square_slope(u):
    return 2 * u


def _hencky(u):
    return u * u * np.exp(2 * u)


def _hencky_slope(u):
    return 2 * u * (1 + u) * np.exp(2 * u)


# Hencky: squared logarithmic strain per area of the flat goods, whose area element is exp(2 u).
DENSITIES = {"square": (_square, _square_slope), "hencky": (_hencky, _hencky_slope), "dirichlet": None}


def density(energy):
    """(j, dj/du) of a wished energy, None for Dirichlet."""
    return DENSITIES[energy] if isinstance(energy, str) else tuple(energy)


@dataclass
class Cost:
    """distortion, length (priced), total; u (n,) log scale; each (K,) distortion of every region; slope (c,) of the total by
    each cut's place."""

    distortion: float
    length: float
    total: float
    u: np.ndarray
    each: np.ndarray | None = None
    slope: np.ndarray | None = None


def evaluate(level, cut, thrift, energy, weights=None, gradient=True, emphasis=None):
    """Cost of a Cut on a Level. weights (K,) factor on each region's distortion, default 1;
    emphasis (n,) the same at each point."""
    labels, nodes = cut.labels, Nodes(level, cut)
    count, unknown = len(labels), level.unknown
    area, stiffness, rise = triangle_stiffness(nodes.place[nodes.table])
    at = nodes.point[nodes.table]  # the level's points, `count` where there is none
    mass = level.mass + np.bincount(at.ravel(), np.repeat(area / 3, 3), count + 1)[:count]
    mass -= np.bincount(level.surface.triangles[nodes.faces].ravel(), np.repeat(level.areas[nodes.faces] / 3, 3), count)
    solve = np.copy  # a strip of faces has no inner point
    if len(unknown):
        solve = level.factor(nodes.faces, nodes.face, nodes.corner[nodes.table], stiffness).solve
    u = np.zeros(count)
    u[unknown] = solve((level.density * mass)[unknown])
    weight = np.ones(count) if weights is None else np.asarray(weights, dtype=float)[labels]
    weight = weight if emphasis is None else weight * emphasis
    pair = density(energy)
    p = np.zeros(count)
    if pair is None:
        per_point = 0.5 * weight * level.density * u
        share, p = 0.5, weight * u
        per_mass = weight * level.density * u
    else:
        value, slope_of = pair
        per_point = weight * value(u)
        share = 1.0
        if gradient:
            p[unknown] = solve((weight * mass * slope_of(u))[unknown])
        per_mass = per_point + p * level.density
    each = np.bincount(labels, per_point * mass)
    distortion = float(each.sum())
    price, gain = nodes.prices(level, cut)
    length, pull, dearer = _length(level, nodes, price)
    slope = None
    if gradient:
        at_nodes = [np.append(values, 0.0)[at] for values in (u, p, per_mass)]
        pull = nodes.gather(_pull(area, rise, share, *at_nodes)) + thrift * pull
        slope = nodes.by_place(pull, len(level.surface.edges))
        slope += np.bincount(nodes.edges, thrift * dearer[nodes.cuts] * gain, len(slope))
        slope = slope[cut.edge]
    return Cost(distortion, length, distortion + thrift * length, u, each, slope)


def _pull(area, rise, share, u, p, per_mass):
    """(t, 3, 2) gradient of the distortion by the corners of the sub-triangles: area (t,), rise (t, 3, 2) of their linear
    elements, values (t, 3) at their corners."""
    grad_u, grad_p = (np.einsum("ti,tid->td", values, rise) for values in (u, p))
    inner = per_mass.sum(axis=1) / 3 - share * (grad_u * grad_p).sum(axis=1)
    along_u, along_p = (np.einsum("tid,td->ti", rise, grad)[:, :, None] for grad in (grad_u, grad_p))
    turn = along_p * grad_u[:, None] + along_u * grad_p[:, None]
    return area[:, None, None] * (inner[:, None, None] * rise + share * turn)


def _steps(level, nodes):
    """(length (s,) of the seams' segments, along edges where the level counts so; (s, 2) length times its gradient by their
    heads)."""
    a, b = nodes.seams.T
    along = nodes.place[b] - nodes.place[a]
    if level.edgewise is not None:
        length, slope = stepped(along, level.edgewise[nodes.within])
        return length, length[:, None] * slope
    return np.maximum(np.linalg.norm(along, axis=1), 1e-30), along


def _length(level, nodes, price):
    """(priced seam length, (N, 2) its gradient by the nodes' positions, (N,) by the price at the cuts)."""
    a, b = nodes.seams.T
    length, along = _steps(level, nodes)
    mean = 0.5 * (price[a] + price[b])
    force = (mean / length)[:, None] * along
    both = np.append(a, b)
    pull = np.column_stack([np.bincount(both, np.append(-f, f), nodes.count) for f in force.T])
    dearer = np.bincount(both, 0.5 * np.append(length, length), nodes.count).astype(float)  # of nothing they are whole
    for k in range(3):
        dearer[nodes.around[:, k]] += dearer[nodes.middles] / 3
    return float((mean * length).sum()), pull, dearer


def borders(level, cut):
    """(K, K) priced length of the seam between every two regions."""
    nodes = Nodes(level, cut)
    a, b = nodes.seams.T
    price = nodes.prices(level, cut)[0]
    length = _steps(level, nodes)[0] * 0.5 * (price[a] + price[b])
    i, j = cut.labels[nodes.point[nodes.sides]].T
    count = int(cut.labels.max()) + 1
    found = np.bincount(i * count + j, length, minlength=count * count).reshape(count, count)
    return found + found.T


def field_gradient(level, cut, fields, slope):
    """(n, K) gradient by the fields from the slope (c,) by the cut places."""
    surface, labels, edge = level.surface, cut.labels, cut.edge
    tail, head = rises(surface, fields, labels, edge)
    total = np.maximum(tail + head, 1e-12)
    inside = (cut.place * total == tail) | (np.abs(cut.place * total - tail) <= 1e-9 * total)
    by_tail, by_head = slope * inside * head / total**2, -slope * inside * tail / total**2
    a, b = surface.edges[edge, 0], surface.edges[edge, 1]
    i, j = labels[a], labels[b]
    gradient = np.zeros_like(fields)
    np.add.at(gradient, (a, i), by_tail)
    np.add.at(gradient, (a, j), -by_tail)
    np.add.at(gradient, (b, j), by_head)
    np.add.at(gradient, (b, i), -by_head)
    return gradient
