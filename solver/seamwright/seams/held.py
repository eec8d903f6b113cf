"""Held seams: a surface opened along them before seams are sought, and a network on it sewn together again at the end.

Opened, the two sides of a held seam are open edges, and no stage moves an open edge. The seams found meet it from either
side where they like; sewn together, each side gets the other's points.
"""

from collections import defaultdict
from dataclasses import replace

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

from ..form.surface import Surface
from .network import Network
from .study import shares

ALIKE = 0.15  # share of a held edge within which cuts from its two sides become one: nearer ones would make needles
SAME = 1e-6  # the same for points that are one already


class Held:
    """surface: a Surface; edges (e,) bool: those held; opened: the Surface with its points doubled along them, its
    triangles in the same order; origin (n',): the surface's point of each of the opened one's."""

    def __init__(self, surface, edges):
        self.surface, self.edges = surface, edges
        self.opened, self.origin = surface, np.arange(len(surface.points))
        if edges.any():
            corners = Network(surface, edges, None).corner_points
            first = np.unique(corners, return_index=True)[1]
            self.origin = surface.triangles.ravel()[first]
            self.opened = Surface(surface.points[self.origin], corners)
        self.whole_edge = self.at_opened(np.arange(len(surface.edges)))

    def at_opened(self, values):
        """(e',) at the opened surface's edges of values (e,) at the surface's."""
        found = np.empty(len(self.opened.edges), dtype=values.dtype)
        found[self.opened.triangle_edges] = values[self.surface.triangle_edges]
        return found

    def evened(self, cut):
        """The Cut of the opened surface with cuts that are ALIKE on the two sides of a held edge in one place."""
        if not self.edges.any():
            return cut
        whole = self.whole_edge[cut.edge]
        turned = self.origin[self.opened.edges[cut.edge, 0]] != self.surface.edges[whole, 0]
        place = np.where(turned, 1 - cut.place, cut.place)
        order = np.argsort(whole, kind="stable")
        first, second = order[:-1], order[1:]
        both = (whole[first] == whole[second]) & (np.abs(place[first] - place[second]) < ALIKE)
        mean = 0.5 * (place[first] + place[second])[both]
        place[first[both]] = place[second[both]] = mean
        return replace(cut, place=np.where(turned, 1 - place, place))

    def along(self, network):
        """((t, 3) held edge that each side of a Network's triangles lies along, -1 for none; (t, 3, 3) the triangles'
        corners as shares of the surface's triangles that they lie in)."""
        share = shares(self.surface, network, 1.0)
        farther = np.maximum(share, np.roll(share, -1, axis=1))  # of the two ends of each side
        edge = np.full(share.shape[:2], -1)
        for k in range(3):
            whole = self.surface.triangle_edges[network.source, k]
            on = (farther[:, :, (k + 2) % 3] < SAME) & self.edges[whole][:, None]
            edge = np.where(on, whole[:, None], edge)
        return edge, share

    def opened_network(self, network):
        """A Network of the surface as one of the opened surface: its edges along held ones are open."""
        on = np.zeros(len(network.surface.edges), dtype=bool)
        on[network.surface.triangle_edges[self.along(network)[0] >= 0]] = True
        again = Held(network.surface, on & ~network.surface.open_edges)
        return Network(again.opened, again.at_opened(network.seam & ~on), network.source, network.face)

    def sewn_together(self, network, values):
        """(Network of the surface, the held edges among its seams; (t',) the network's triangle that each of its triangles
        comes from; (t', 3, d) values at their corners).

        network: of the opened surface, or of a part of it; values (t, 3, d), linear within its triangles.
        """
        sewing = _Sewing(self, network, values)
        pairs = [pair for edge in np.flatnonzero(self.edges).tolist() for pair in sewing.join(edge)]
        pairs, points = np.array(pairs, dtype=np.int64).reshape(-1, 2), np.array(sewing.points)
        same = coo_matrix((np.ones(len(pairs)), tuple(pairs.T)), shape=(len(points),) * 2)
        number = connected_components(same, directed=False)[1]
        first = np.unique(number, return_index=True)[1]
        whole = Surface(points[first], number[np.array(sewing.triangles)])
        seam = np.zeros(len(whole.edges), dtype=bool)
        seam[whole.edge_index(number[network.surface.edges[network.seam]])] = True
        seam[whole.edge_index(number[np.array(sewing.sewn, dtype=np.int64).reshape(-1, 2)])] = True
        came = np.array(sewing.came)
        face = None if network.face is None else network.face[came]
        return Network(whole, seam, network.source[came], face), came, np.array(sewing.values)


class _Sewing:
    """A network's triangles as lists that grow, and where their sides lie along held edges."""

    def __init__(self, held, network, values):
        self.points, self.triangles = list(network.surface.points), network.surface.triangles.tolist()
        self.values, self.came, self.sewn = list(values), list(range(len(self.triangles))), []
        edge, share = held.along(network)
        edge = np.where(network.surface.open_edges[network.surface.triangle_edges], edge, -1)
        self.stretches = defaultdict(lambda: ([], []))  # of an edge, for both directions: [begin, end, triangle, its side]
        self.on_side = {}
        for triangle, k in np.argwhere(edge >= 0).tolist():
            head = held.surface.edges[edge[triangle, k], 1]
            corner = int(np.flatnonzero(held.surface.triangles[network.source[triangle]] == head)[0])
            begin, end = share[triangle, [k, (k + 1) % 3], corner].tolist()
            stretch = [min(begin, end), max(begin, end), triangle, k]
            self.stretches[edge[triangle, k]][int(begin > end)].append(stretch)
            self.on_side[triangle, k] = stretch
        for sides in self.stretches.values():
            for side in sides:
                side.sort()

    def join(self, edge):
        """Give the two sides of an edge each other's points, and have it sewn. Returns pairs of points that are one."""
        sides = self.stretches[edge]
        if not all(sides):  # the other side is none of the network's
            return []
        inner = [[end for _, end, _, _ in side[:-1]] for side in sides]
        for against, (side, others) in enumerate(zip(sides, inner[::-1], strict=True)):
            for place in others:
                at = next(number for number, stretch in enumerate(side) if place < stretch[1] - SAME)
                if place > side[at][0] + SAME:
                    side[at : at + 1] = self._split(side[at], place, against)
        chains = [self._chain(side, against) for against, side in enumerate(sides)]
        self.sewn += list(zip(chains[0][:-1], chains[0][1:], strict=True))
        return list(zip(*chains, strict=True))

    def _split(self, stretch, place, against):
        """The two stretches, in order, of one whose triangle is split at a place between its ends."""
        begin, end, triangle, k = stretch
        share, head = (place - begin) / (end - begin), (k + 1) % 3
        share = 1 - share if against else share
        more, point = len(self.triangles), len(self.points)
        corners, values = self.triangles[triangle], self.values[triangle]
        self.points.append((1 - share) * self.points[corners[k]] + share * self.points[corners[head]])
        self.triangles.append(corners.copy())
        self.values.append(values.copy())
        self.came.append(self.came[triangle])
        value = (1 - share) * values[k] + share * values[head]
        self.values[triangle] = values.copy()
        for one, corner in ((triangle, head), (more, k)):
            self.triangles[one][corner], self.values[one][corner] = point, value
        beyond = self.on_side.pop((triangle, head), None)  # the side after this one is now the new triangle's
        if beyond is not None:
            beyond[2] = more
            self.on_side[more, head] = beyond
        low, high = (more, triangle) if against else (triangle, more)
        halves = [begin, place, low, k], [place, end, high, k]
        self.on_side.update({(half[2], k): half for half in halves})
        return halves

    def _chain(self, side, against):
        """The points along a side, from the edge's first point to its last."""
        tail, head = (1, 0) if against else (0, 1)
        points = [self.triangles[triangle][(k + tail) % 3] for _, _, triangle, k in side]
        _, _, triangle, k = side[-1]
        return [*points, self.triangles[triangle][(k + head) % 3]]
