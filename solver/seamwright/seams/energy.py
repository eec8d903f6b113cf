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
from .level import triangle_stiffness


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
    labels = cut.labels
    kinds = [Pieces.of(level, cut, kind) for kind in (cut.two, cut.three) if len(kind.face)]
    mass = level.mass.copy()
    changed, change = [], []
    for pieces in kinds:
        face, corners = pieces.kind.face, pieces.kind.corners
        np.add.at(mass, pieces.whole, pieces.corner_mass() - level.areas[face, None] / 3)
        local = np.zeros((len(face), 3, 3))
        rows = np.arange(len(face))[:, None, None]
        local[rows, corners[:, :, None], corners[:, None, :]] = pieces.corner_stiffness()
        changed.append(face)
        change.append(local - level.stiffness[face])
    changed = np.concatenate(changed) if changed else np.zeros(0, dtype=np.int64)
    change = np.concatenate(change) if change else np.zeros((0, 3, 3))
    unknown = level.unknown
    solve = level.factor(changed, change).solve if len(unknown) else np.copy  # a strip of faces has no inner point
    u = np.zeros(len(mass))
    u[unknown] = solve((level.density * mass)[unknown])
    weight = np.ones(len(mass)) if weights is None else np.asarray(weights, dtype=float)[labels]
    weight = weight if emphasis is None else weight * emphasis
    pair = density(energy)
    p = np.zeros(len(mass))
    if pair is None:
        per_point = 0.5 * weight * level.density * u
        share, p = 0.5, weight * u
        per_mass = weight * level.density * u
    else:
        value, rise = pair
        per_point = weight * value(u)
        share = 1.0
        if gradient:
            p[unknown] = solve((weight * mass * rise(u))[unknown])
        per_mass = per_point + p * level.density
    length, slope = 0.0, np.zeros(len(level.surface.edges)) if gradient else None
    for pieces in kinds:
        length += _lengths(level, cut, pieces.kind, pieces.nodes, thrift, slope)
        if gradient:
            _slopes(level, pieces, u, p, per_mass, share, slope)
    each = np.bincount(labels, per_point * mass)
    distortion = float(each.sum())
    return Cost(distortion, length, distortion + thrift * length, u, each, None if slope is None else slope[cut.edge])


def borders(level, cut):
    """(K, K) priced length of the seam between every two regions."""
    count = int(cut.labels.max()) + 1
    found = np.zeros(count * count)
    for kind in (cut.two, cut.three):
        nodes, whole = seam_nodes(level, cut, kind)
        price = _prices(level, cut, kind)[0]
        around = cut.labels[whole]
        for a, b in kind.seams:
            i, j = (0, 1) if len(kind.seams) == 1 else (a - 3, (a - 2) % 3)
            length = np.linalg.norm(nodes[:, b] - nodes[:, a], axis=1) * 0.5 * (price[:, a - 3] + price[:, b - 3])
            found += np.bincount(around[:, i] * count + around[:, j], length, minlength=count * count)
    found = found.reshape(count, count)
    return found + found.T


def _place_of(level, cut):
    place = np.full(len(level.surface.edges), np.nan)
    place[cut.edge] = cut.place
    return place


def seam_nodes(level, cut, kind):
    """(coordinates (k, q, 2) of a kind's nodes in their face's plane, the points (k, 3) at its corners)."""
    rows = np.arange(len(kind.face))[:, None]
    corners = level.frames[kind.face][rows, kind.corners]
    whole = level.surface.triangles[kind.face][rows, kind.corners]
    place = _place_of(level, cut)[kind.edges]
    share = np.where(kind.tails == level.surface.edges[kind.edges, 0], place, 1 - place)
    start, end = cut_ends(kind)
    points = corners[:, start] + share[:, :, None] * (corners[:, end] - corners[:, start])
    nodes = np.concatenate([corners, points], axis=1)
    if len(kind.seams) == 3:
        nodes = np.concatenate([nodes, points.mean(axis=1, keepdims=True)], axis=1)
    return nodes, whole


@dataclass
class Pieces:
    """The sub-triangles of one kind of cut face: kind, nodes (k, q, 2), whole (k, 3) points at the corners, area (k, r),
    gradients (k, r, 3, 2) of the linear elements, stiffness (k, r, 3, 3)."""

    kind: object
    nodes: np.ndarray
    whole: np.ndarray
    area: np.ndarray
    gradients: np.ndarray
    stiffness: np.ndarray

    @classmethod
    def of(cls, level, cut, kind):
        """The sub-triangles of `kind` as the cut places them."""
        nodes, whole = seam_nodes(level, cut, kind)
        k, r = len(nodes), len(kind.table)
        area, stiffness, gradients = triangle_stiffness(nodes[:, kind.table].reshape(-1, 3, 2))
        return cls(kind, nodes, whole, area.reshape(k, r), gradients.reshape(k, r, 3, 2), stiffness.reshape(k, r, 3, 3))

    def corner_stiffness(self):
        """(k, 3, 3) of the face's own corners; what a cut parts is zero."""
        spread = _incidence(self.kind)[:, :, :3]
        both = np.einsum("ria,rjb->rijab", spread, spread).reshape(-1, 9)
        return (self.stiffness.reshape(len(self.nodes), -1) @ both).reshape(-1, 3, 3)

    def corner_mass(self):
        """(k, 3) a third of the sub-triangles at each of the face's own corners."""
        return self.area @ (_incidence(self.kind)[:, :, :3].sum(axis=1) / 3)

    def at_nodes(self, values):
        """(k, r, 3) values (n,) of the points at the sub-triangles' corners, zero at the cuts."""
        padded = np.zeros(self.nodes.shape[:2])
        padded[:, :3] = values[self.whole]
        return padded[:, self.kind.table]

    def gather(self, pull):
        """(k, q, 2) at the nodes: sums of pulls (k, r, 3, 2) at the sub-triangles' corners."""
        return np.tensordot(pull, _incidence(self.kind), axes=([1, 2], [0, 1])).transpose(0, 2, 1)


def _incidence(kind):
    """(r, 3, q): 1 where corner i of sub-triangle r is node q."""
    return (kind.table[:, :, None] == np.arange(kind.table.max() + 1)).astype(float)


def cut_ends(kind):
    """(start, end) node of the corner each cut's share counts from and to."""
    return ([0, 0], [1, 2]) if len(kind.seams) == 1 else ([0, 1, 2], [1, 2, 0])


def _pull(level, kind, nodes, pull, slope):
    """Bring a gradient by node positions (k, q, 2) down to the cut places; adds into slope (e,)."""
    cuts = pull[:, 3 : 3 + kind.edges.shape[1]]
    if len(kind.seams) == 3:
        cuts = cuts + pull[:, 6:7] / 3
    start, end = cut_ends(kind)
    along = nodes[:, end] - nodes[:, start]
    sign = np.where(kind.tails == level.surface.edges[kind.edges, 0], 1.0, -1.0)
    np.add.at(slope, kind.edges, sign * (cuts * along).sum(axis=2))


def _slopes(level, pieces, u, p, per_mass, share, slope):
    """Adds the distortion's gradient by the cut places into slope (e,)."""
    rise = pieces.gradients
    grad_u = np.einsum("kri,krid->krd", pieces.at_nodes(u), rise)
    grad_p = np.einsum("kri,krid->krd", pieces.at_nodes(p), rise)
    inner = pieces.at_nodes(per_mass).sum(axis=2) / 3 - share * (grad_u * grad_p).sum(axis=2)
    along_u, along_p = ((rise * grad[:, :, None]).sum(axis=3)[..., None] for grad in (grad_u, grad_p))
    turn = along_p * grad_u[:, :, None] + along_u * grad_p[:, :, None]
    pull = pieces.area[:, :, None, None] * (inner[:, :, None, None] * rise + share * turn)
    _pull(level, pieces.kind, pieces.nodes, pieces.gather(pull), slope)


def _prices(level, cut, kind):
    """(price (k, c or c + 1) at the cuts of a kind and at its middle, (k, c) its rise along the cut edges)."""
    low, high = level.surface.edges[kind.edges, 0], level.surface.edges[kind.edges, 1]
    gain = level.price[high] - level.price[low]
    price = level.price[low] + _place_of(level, cut)[kind.edges] * gain
    if len(kind.seams) == 3:
        price = np.concatenate([price, price.mean(axis=1, keepdims=True)], axis=1)
    return price, gain


def _lengths(level, cut, kind, nodes, thrift, slope):
    """Priced seam length of a kind; adds thrift times its gradient into slope (e,) unless that is None."""
    price, gain = _prices(level, cut, kind)
    total, pull, pull_price = 0.0, np.zeros_like(nodes), np.zeros_like(price)
    for a, b in kind.seams:
        along = nodes[:, b] - nodes[:, a]
        length = np.maximum(np.linalg.norm(along, axis=1), 1e-30)
        mean = 0.5 * (price[:, a - 3] + price[:, b - 3])
        total += float((mean * length).sum())
        if slope is not None:
            force = thrift * (mean / length)[:, None] * along
            pull[:, b] += force
            pull[:, a] -= force
            for node in (a, b):
                pull_price[:, node - 3] += 0.5 * thrift * length
    if slope is not None:
        _pull(level, kind, nodes, pull, slope)
        cuts = pull_price[:, : kind.edges.shape[1]]
        if len(kind.seams) == 3:
            cuts = cuts + pull_price[:, 3:4] / 3
        np.add.at(slope, kind.edges, cuts * gain)
    return total


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
