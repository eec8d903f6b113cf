"""Tips of a form: where curvature gathers at the ends of limbs, fingers, ears."""

import numpy as np
from scipy.sparse import coo_matrix, csc_matrix
from scipy.sparse.csgraph import connected_components

from ..form.laplacian import Factor, cotangent_laplacian, smoothed_defects
from ..form.measure import angle_defects, open_points, total_area, vertex_areas

PERSISTENCE = 0.5  # how far the potential rises above the pass to a higher tip (measured: limbs yes, bulges no)
TOP = 0.1  # what lies within this of a tip's potential is the tip itself
EVEN = 0.005  # share of the form's size over which curvature is evened out first: what is finer is no limb
WIDEST = 0.25  # farthest that a tip reaches, as a share of the form's size: what reaches farther is a ridge


def tips(surface, persistence=PERSISTENCE, load=None):
    """(k,) points of a Surface, the highest first: maxima of the potential v, -Laplace v = curvature less its mean.

    load (n,): the curvature at the points; their angle defects, evened out, if not given.

    The mean is taken over each connected part; open edges bring no curvature and let nothing through. A maximum counts when
    it rises by `persistence` over the highest pass that leads to a higher one (Edelsbrunner, Letscher, Zomorodian 2002). The
    rim of a lid or of a ring is a ridge, not a tip.
    """
    load = smoothed_defects(surface, EVEN) if load is None else load
    points, potential = np.arange(len(surface.points)), curvature_potential(surface, load)
    peak = _peaks(surface, potential)
    ends = peak[surface.edges]
    across = ends[:, 0] != ends[:, 1]
    height = potential[surface.edges[across]].min(axis=1)
    order = np.argsort(-height, kind="stable")
    root, lasting = points.copy(), potential - np.inf
    tops = np.unique(peak)
    lasting[tops] = np.inf

    def find(point):
        while root[point] != point:
            root[point] = root[root[point]]
            point = root[point]
        return point

    for (a, b), saddle in zip(ends[across][order].tolist(), height[order].tolist(), strict=True):
        a, b = find(a), find(b)
        if a != b:
            low, high = (a, b) if potential[a] < potential[b] else (b, a)
            root[low] = high
            lasting[low] = potential[low] - saddle
    kept = tops[lasting[tops] >= persistence]
    # the highest point of a part lasts for ever: it is a tip only where the part is not even all over
    lowest = _lowest(surface, potential)
    kept = kept[potential[kept] - lowest[kept] >= persistence]
    kept = kept[np.argsort(-potential[kept], kind="stable")]
    reach = WIDEST * np.sqrt(total_area(surface))
    return kept[np.array([_width(surface, potential, tip) <= reach for tip in kept.tolist()], dtype=bool)]


def curvature_potential(surface, load=None):
    """(n,) the potential v of `tips`, zero at the first point of each part; load (n,), the angle defects if not given."""
    part, first = _parts(surface)
    mass = vertex_areas(surface)
    load = np.where(open_points(surface), 0.0, angle_defects(surface) if load is None else load)
    mean = np.bincount(part, load) / np.bincount(part, mass)
    pins = csc_matrix((np.ones(len(first)), (first, first)), shape=(len(mass),) * 2)
    potential = Factor(cotangent_laplacian(surface) + pins).solve(load - mean[part] * mass)
    return potential - potential[first][part]


def _parts(surface):
    """((n,) connected part of each point, (c,) first point of each part)."""
    part = np.empty(len(surface.points), dtype=np.int64)
    part[surface.triangles] = surface.triangle_components[1][:, None]
    return part, np.unique(part, return_index=True)[1]


def _lowest(surface, potential):
    """(n,) the least potential of each point's part."""
    part, first = _parts(surface)
    least = np.full(len(first), np.inf)
    np.minimum.at(least, part, potential)
    return least[part]


def _width(surface, potential, tip):
    """Distance from a tip to the farthest point of its top."""
    high = potential > potential[tip] - TOP
    a, b = surface.edges[high[surface.edges].all(axis=1)].T
    graph = coo_matrix((np.ones(len(a)), (a, b)), shape=(len(high),) * 2)
    component = connected_components(graph, directed=False)[1]
    top = surface.points[component == component[tip]]
    return np.linalg.norm(top - surface.points[tip], axis=1).max()


def _peaks(surface, values):
    """(n,) the maximum that each point reaches by stepping to its highest neighbour."""
    n = len(values)
    rank = np.empty(n, dtype=np.int64)
    rank[np.argsort(values, kind="stable")] = np.arange(n)
    a, b = surface.edges.T
    rows, columns = np.concatenate([a, b, np.arange(n)]), np.concatenate([b, a, np.arange(n)])
    highest = coo_matrix((rank[columns] + 1, (rows, columns)), shape=(n, n)).tocsr().max(axis=1).toarray().ravel() - 1
    up = np.argsort(values, kind="stable")[highest]
    while (up[up] != up).any():
        up = up[up]
    return up
