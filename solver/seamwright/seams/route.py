"""Seams along edges that exist: every face goes whole to one region, the borders are shortened, then straightened."""

from dataclasses import replace

import numpy as np

from ..form.surface import Surface
from .fields import redistance
from .level import triangle_stiffness
from .network import Network
from .nodes import seam_nodes
from .opened import opened
from .straighten import corridor, mirrored, straightened

SWEEPS = 12


def cut_along(level, cut, polygon, diagonal, metric):
    """Network on the level's own edges. polygon (m,) the maker's face of each triangle; diagonal (e,) bool: edges that only
    triangulation made and that are never seams. metric: metres over lengths on the level."""
    surface = Surface(level.surface.points * metric, level.surface.triangles)
    gap = np.abs(redistance(level, cut, int(cut.labels.max()) + 1)).min(axis=1) * metric
    cost, near = corridor(surface, ~diagonal, level.price, gap)
    labels = shortened(surface, face_labels(level, cut, polygon), polygon, cost)
    one, other = labels[polygon[surface.edge_triangles]].T
    seam = ~surface.open_edges & (one != other)
    if cut.uncut is not None:
        seam &= ~cut.uncut[one, other]
    network = Network(surface, seam, np.arange(len(surface.triangles)))
    network = opened(_without_specks(network, level), ~diagonal)
    a, b = surface.edges[cut.edge].T
    wished = surface.points[a] + cut.place[:, None] * (surface.points[b] - surface.points[a])
    network = straightened(network, ~diagonal, cost, near, wished)
    network = opened(_without_specks(network, level), ~diagonal)
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        network = mirrored(network, mirror, ~diagonal)
    return replace(network, face=polygon)


def face_labels(level, cut, polygon):
    """(f,) the region that holds most of each of the maker's faces."""
    count, faces = int(cut.labels.max()) + 1, int(polygon.max()) + 1
    share = np.zeros((faces, count))
    whole = np.ones(len(polygon), dtype=bool)
    for kind in cut.kinds:
        whole[kind.face] = False
        nodes, corners = seam_nodes(level, cut, kind)
        lead = cut.labels[corners]
        for triangle in kind.table:
            corner = min(node for node in triangle if node < 3)
            area = triangle_stiffness(nodes[:, triangle])[0]
            np.add.at(share, (polygon[kind.face], lead[:, corner]), area)
    plain = cut.labels[level.surface.triangles[whole, 0]]
    np.add.at(share, (polygon[whole], plain), level.areas[whole])
    return share.argmax(axis=1)


def shortened(surface, labels, polygon, cost, fixed=()):
    """Labels after flips of single faces, but for those `fixed` (k,), that make the border cheaper, cost (e,); at most
    SWEEPS sweeps."""
    sides = polygon[surface.edge_triangles]
    inner = np.flatnonzero(~surface.open_edges & (sides[:, 0] != sides[:, 1]))
    around = {}
    for (a, b), length in zip(sides[inner].tolist(), cost[inner].tolist(), strict=True):
        around.setdefault(a, []).append((b, length))
        around.setdefault(b, []).append((a, length))
    labels = labels.copy()
    for _ in range(SWEEPS):
        border = labels[sides[inner, 0]] != labels[sides[inner, 1]]
        changed = False
        for face in np.setdiff1d(sides[inner[border]], fixed).tolist():
            total = {}
            for other, length in around[face]:
                total[labels[other]] = total.get(labels[other], 0.0) + length
            best = max(total, key=lambda label: (total[label], -label))
            if total[best] > total.get(labels[face], 0.0) * (1 + 1e-9) + 1e-12:
                labels[face], changed = best, True
        if not changed:
            break
    return labels


def _without_specks(network, level, share=0.005):
    """Pieces under a share of the area go to the neighbour with the longest common border."""
    while True:
        count, piece = network.pieces
        area = np.bincount(piece, level.areas, minlength=count)
        small = int(area.argmin())
        if count == 1 or area[small] > share * area.sum():
            return network
        sides = piece[network.surface.edge_triangles]
        border = np.flatnonzero(network.seam & (sides == small).any(axis=1) & (sides[:, 0] != sides[:, 1]))
        other = sides[border].sum(axis=1) - small
        length = np.bincount(other, network.surface.edge_lengths[border], minlength=count)
        seam = network.seam.copy()
        seam[border[other == length.argmax()]] = False
        seam[network.seam & (sides == small).all(axis=1)] = False
        network = Network(network.surface, seam, network.source)
