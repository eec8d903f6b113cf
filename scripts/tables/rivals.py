"""What our networks are compared with: seams that general-purpose tools give.

Every rival is a family of networks, from short seams to long ones, opened to disks, its distortion measured as ours is.
Seams along edges would be longer than need be, so every length is that of the seams drawn tight, which favours the rivals.
"""

from dataclasses import dataclass, replace

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra
from seamwright.form.measure import open_points, vertex_areas
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.network import Network, trace_chains
from seamwright.seams.opened import opened
from seamwright.seams.study import network_cost
from seamwright.seams.tips import tips

from .drawn import network_of
from .geodesics import Heat, exact

LLOYD = 10  # steps of every partition
CELLS = (2, 3, 4, 5, 6, 8, 10, 12, 16, 20, 26, 32)
BRANCHES = 40  # most that a tree grows beyond the tips
TIGHT = 0.03  # of the form's size: even steps in which seams are drawn tight


@dataclass
class Rival:
    """One network: length and distortion on the form scaled to area 4 pi, ends: how many of its seams end inside a piece."""

    length: float
    distortion: float
    ends: int


def tight(ladder, network, seam=None):
    """Length of a Network's seams, or of its edges `seam` (e,) bool, drawn tight, on the form scaled to area 4 pi."""
    surface, step = network.surface, TIGHT * np.sqrt(network.surface_area)
    total = 0.0
    for chain in trace_chains(surface, network.seam if seam is None else seam):
        path = surface.points[chain]
        way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
        at = np.linspace(0, way[-1], max(1, round(way[-1] / step)) + 1)
        places = np.column_stack([np.interp(at, way, axis) for axis in path.T])
        total += float(np.linalg.norm(np.diff(places, axis=0), axis=1).sum())
    return total * ladder.factor


def partitions(ladder, networks):
    """Yield Rivals: `voronoi` partitions as they are."""
    for network in networks:
        yield Rival(tight(ladder, network), network_cost(ladder, network, 0.0).distortion, dart_ends(network))


def tipped(ladder, surface, networks):
    """Yield Rivals: the same after every tip of the form is joined to the nearest seam by a shortest path."""
    ends = tips(surface)
    for network in networks:
        length = tight(ladder, network)
        for tip in ends:
            network, more = joined(network, int(tip))
            length += more * ladder.factor
        yield Rival(length, network_cost(ladder, network, 0.0).distortion, dart_ends(network))


def trees(ladder, surface):
    """Yield Rivals: trees of shortest paths: through the tips, nearest first, then by way of the place of largest |u|,
    again and again (Gu, Gortler, Hoppe 2002). A form with holes is opened before the tree grows on."""
    ends = [int(tip) for tip in tips(surface)]
    network = Network(surface, np.zeros(len(surface.edges), dtype=bool), np.arange(len(surface.triangles)))
    length, root = 0.0, None
    if not surface.open_edges.any():
        middle = surface.points.mean(axis=0)
        root = ends.pop(0) if ends else int(np.linalg.norm(surface.points - middle, axis=1).argmax())
        gap = _ways(network, [root])[0]
        ends = ends or [int(gap.argmax())]
    while ends:
        gap = _ways(network, _reached(network, root))[0]
        network, more = joined(network, ends.pop(int(gap[ends].argmin())), root)
        length += more * ladder.factor
    disks = opened(network)
    length += tight(ladder, disks, disks.seam & ~network.seam)
    network = disks
    for _ in range(BRANCHES):
        cost = network_cost(ladder, network, 0.0)
        yield Rival(length, cost.distortion, dart_ends(network))
        network, more = joined(network, int(np.abs(cost.u).argmax()))
        length += more * ladder.factor


def dart_ends(network):
    """How many seams end inside a piece."""
    surface = network.surface
    degree = np.bincount(surface.edges[network.seam].ravel(), minlength=len(surface.points))
    return int(((degree == 1) & ~open_points(surface)).sum())


def joined(network, point, root=None):
    """(Network with a shortest path from a point to its seams or open edges, or to the point `root` while it has none,
    metres of that path through faces)."""
    surface, reached = network.surface, _reached(network, root)
    before = _ways(network, reached)[1]
    path = [point]
    while before[path[-1]] >= 0:
        path.append(int(before[path[-1]]))
    if len(path) == 1:
        return network, 0.0
    seam = network.seam.copy()
    seam[surface.edge_index(np.column_stack([path[:-1], path[1:]]))] = True
    return replace(network, seam=seam), exact(surface, reached, point)


def _reached(network, root):
    surface = network.surface
    at = open_points(surface)
    at[surface.edges[network.seam]] = True
    return np.flatnonzero(at) if at.any() else np.array([root])


def _ways(network, sources):
    """(distance (n,) along edges from the nearest of the sources, the point before each on the way from there)."""
    surface = network.surface
    graph = coo_matrix((surface.edge_lengths, tuple(surface.edges.T)), shape=(len(surface.points),) * 2).tocsr()
    return dijkstra(graph, directed=False, indices=sources, min_only=True, return_predecessors=True)[:2]


def voronoi(ladder, surface):
    """Yield Networks: geodesic Voronoi partitions of a Surface into more and more cells.

    Seeds as far apart as can be, then Lloyd's steps: each seed goes to the point of its cell nearest to the cell's middle.
    """
    heat, mass, points = Heat(surface), vertex_areas(surface), surface.points
    middle = mass @ points / mass.sum()
    for count in CELLS:
        seeds = [int(np.linalg.norm(points - middle, axis=1).argmax())]
        gaps = heat.from_points(seeds)
        while len(seeds) < count:
            seeds.append(int(gaps.min(axis=1).argmax()))
            gaps = np.column_stack([gaps, heat.from_points(seeds[-1:])])
        for _ in range(LLOYD):
            owner = gaps.argmin(axis=1)
            for cell in np.unique(owner):
                inside = np.flatnonzero(owner == cell)
                centre = mass[inside] @ points[inside] / mass[inside].sum()
                seeds[cell] = int(inside[np.linalg.norm(points[inside] - centre, axis=1).argmin()])
            gaps = heat.from_points(seeds)
        yield network_of(ladder, cut_by_fields(surface, -gaps))
