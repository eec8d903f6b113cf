"""Straighten seams along edges: every chain again, window by window, by the best path between the window's ends, and every
junction of three seams moved to where they are shortest.

A path counts its length, dearer the farther it strays from the seam through the faces, and its turns. It is sought on the
surface opened along all other seams and meets them at its ends only: so what it parts are disks, as they were before.
"""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import dijkstra
from scipy.spatial import cKDTree

from ..form.measure import total_area
from ..form.surface import Surface
from .network import Network

STRAYING = 0.3  # price 1 + STRAYING x^2 where a seam is x edge lengths beyond what is free to either side of the one wished
FREE = 0.04  # free, as a share of the form's size, so that a fine grid lets seams find its lines, ...
FREE_EDGES = (0.75, 3.0)  # ... within these numbers of edge lengths
TURNING = 1.0  # edge lengths that a right turn costs
CORRIDOR = 2.0  # edge lengths beyond that within which seams are led anew; what is farther off was not wished there
WINDOW = 12  # most edges led anew at once: longer paths would leap from limb to limb
RINGS = 5  # of points around a window, in which the path is sought
LEAP = 1.0  # edge lengths within which a seam follows the one wished
SLIDING = 2.0  # edge lengths by which the end of a seam may move along an open edge
GAIN = 1e-6  # share by which a new path has to be better
PASSES = 3


def corridor(surface, allowed, price, gap):
    """(cost (e,) of the edges, near (n,) bool: points in the corridor) around seams wished at a distance gap (n,).

    allowed (e,) bool: edges that may be seams; price (n,) factor on length.
    """
    lengths, ends = surface.edge_lengths, surface.edges
    count = np.bincount(ends[allowed].ravel(), minlength=len(gap))
    step = np.bincount(ends[allowed].ravel(), np.repeat(lengths[allowed], 2), minlength=len(gap)) / np.maximum(count, 1)
    step = np.maximum(step, 1e-9 * lengths.max())
    off = gap / step - np.clip(FREE * np.sqrt(total_area(surface)) / step, *FREE_EDGES)
    straying = 1 + STRAYING * np.maximum(off, 0) ** 2
    return lengths * (price * straying)[ends].mean(axis=1), off < CORRIDOR


def straightened(network, allowed, cost, near, wished):
    """Network on the same surface, its seams straightened. Every piece has to be a disk, and stays one.

    allowed (e,) bool: edges that may be seams; cost (e,) and near (n,) as `corridor` gives them; wished (k, 3) points on
    the seams wished.
    """
    ways = _Ways(network, allowed, cost, near, wished)
    for turn in range(PASSES):
        before = ways.seam.copy()
        for chain in ways.chains():
            _led_anew(ways, chain, turn)
        for junction in ways.junctions():
            ways.move(junction)
        if np.array_equal(before, ways.seam):
            break
    return Network(network.surface, ways.seam, network.source)


def _led_anew(ways, chain, turn):
    """Lead a chain anew window by window, each overlapping the next by half."""
    if chain[0] == chain[-1]:  # another start each time
        chain = np.roll(chain[:-1], turn * (len(chain) // PASSES))
        chain = np.append(chain, chain[0])
    begin = 0
    while begin < len(chain) - 1:
        end = min(begin + WINDOW, len(chain) - 1)
        if chain[begin] == chain[end]:
            return
        path = ways.lead(chain, begin, end)
        chain = np.concatenate([chain[:begin], path, chain[end + 1 :]])
        end = begin + len(path) - 1
        if end == len(chain) - 1:
            return
        begin = max(begin + 1, end - WINDOW // 2)


class _Ways:
    """The seams of one surface, seam (e,) bool, and paths along its allowed edges."""

    def __init__(self, network, allowed, cost, near, wished):
        self.surface, self.seam = network.surface, network.seam.copy()
        surface = self.surface
        self.allowed, self.cost, self.near = allowed & ~surface.open_edges, cost, near
        self.step = float(surface.edge_lengths[allowed].mean())
        self.wished = cKDTree(wished)
        self.open_point = np.zeros(len(surface.points), dtype=bool)
        self.open_point[surface.edges[surface.open_edges].ravel()] = True

    def chains(self):
        """The chains as they are now, longest first."""
        return sorted(Network(self.surface, self.seam, None).chains, key=lambda chain: -len(chain))

    def junctions(self):
        """Points where three seams meet, off the open edges."""
        degree = self._degree()
        degree[self.open_point] = 0
        return np.flatnonzero(degree == 3).tolist()

    def _degree(self):
        return np.bincount(self.surface.edges[self.seam].ravel(), minlength=len(self.surface.points))

    def _edges(self, path):
        return self.surface.edge_index(np.column_stack([path[:-1], path[1:]]))

    def lead(self, chain, begin, end):
        """The stretch chain[begin : end + 1] of seam led along the best path between its ends, or left; the path."""
        stretch = chain[begin : end + 1]
        if not self.near[stretch].all():  # not wished there, such as a slit that opens a sleeve
            return stretch
        patch = _Patch(self, [stretch])
        lead, follow = chain[max(begin - 1, 0) : begin], chain[end + 1 : end + 2]
        path = patch.path(patch.local(stretch[0], stretch[1]), self._stops(patch, stretch), lead, follow)
        if path is None:
            return stretch
        old, new = (self._worth(np.concatenate([lead, one, follow])) for one in (stretch, path))
        if new > old * (1 - GAIN) or self._leaps(stretch, path):
            return stretch
        self.seam[self._edges(stretch)] = False
        self.seam[self._edges(path)] = True
        return path

    def _leaps(self, old, new):
        """Whether the new points leave out some of the wished seam that the old ones followed."""
        places = self.surface.points
        followed = sorted(set().union(*self.wished.query_ball_point(places[old], LEAP * self.step)))
        if not followed:
            return False
        return cKDTree(places[new]).query(self.wished.data[followed])[0].max() > (LEAP + FREE_EDGES[0]) * self.step

    def _stops(self, patch, stretch):
        """Points of the patch where the path may end: the stretch's end, and those beside it along an open edge."""
        end = patch.local(stretch[-1], stretch[-2])
        if not self.open_point[stretch[-1]] or self._degree()[stretch[-1]] > 1:
            return [end]
        off = np.linalg.norm(patch.part.points - patch.part.points[end], axis=1)
        taken = self._degree()[patch.points] > 0
        beside = (off <= SLIDING * self.step) & self.open_point[patch.points] & ~taken
        beside[end] = True
        return np.flatnonzero(beside).tolist()

    def move(self, junction):
        """Move a junction of three seams to where they are shortest, if that is elsewhere."""
        met = [chain for chain in self.chains() if junction in (chain[0], chain[-1])]
        runs = [(chain if chain[0] == junction else chain[::-1])[: WINDOW // 2 + 1] for chain in met]
        if len(runs) != 3 or not all(self.near[run].all() for run in runs):
            return
        patch = _Patch(self, runs)
        ends = [patch.local(run[-1], run[-2]) for run in runs]
        if len(set(ends)) < 3:
            return
        paths = patch.star(ends)
        if paths is None:
            return
        old, new = (sum(self.cost[self._edges(path)].sum() for path in some) for some in (runs, paths))
        if new > old * (1 - GAIN) or self._leaps(np.concatenate(runs), np.concatenate(paths)):
            return
        for run in runs:
            self.seam[self._edges(run)] = False
        for path in paths:
            self.seam[self._edges(path)] = True

    def turn(self, a, b, c):
        """(k,) cost of the turn at point b from a to c: none straight on, TURNING edge lengths at a right angle."""
        places = self.surface.points
        u, v = places[b] - places[a], places[c] - places[b]
        along = (u * v).sum(axis=-1) / np.maximum(np.linalg.norm(u, axis=-1) * np.linalg.norm(v, axis=-1), 1e-300)
        return TURNING * self.step * (1 - along)

    def _worth(self, path):
        """Cost of a path given by points of the surface."""
        return float(self.cost[self._edges(path)].sum() + self.turn(path[:-2], path[1:-1], path[2:]).sum())


class _Patch:
    """The surface around some runs of seam, opened along all others.

    part: its Surface; points (k,) the surface's point of each of its points; edge_of (e,) the same for its edges.
    """

    def __init__(self, ways, runs):
        self.ways, surface = ways, ways.surface
        inside = np.zeros(len(surface.points), dtype=bool)
        inside[np.concatenate(runs)] = True
        for _ in range(RINGS):
            inside[surface.edges[inside[surface.edges].any(axis=1)]] = True
        triangles = np.flatnonzero(inside[surface.triangles].all(axis=1))
        points, local = np.unique(surface.triangles[triangles], return_inverse=True)
        whole = Surface(surface.points[points], local.reshape(-1, 3))
        seam = ways.seam.copy()
        for run in runs:
            seam[ways._edges(run)] = False
        edge_of = np.empty(len(whole.edges), dtype=np.int64)
        edge_of[whole.triangle_edges] = surface.triangle_edges[triangles]
        opened = Network(whole, seam[edge_of], None)
        self.part, mine, _ = opened.part_surface(np.arange(len(triangles)))
        self.points = points[mine]
        self.edge_of = np.empty(len(self.part.edges), dtype=np.int64)
        self.edge_of[self.part.triangle_edges] = surface.triangle_edges[triangles]
        self.place = {triangle: k for k, triangle in enumerate(triangles.tolist())}
        self.border = np.zeros(len(self.part.points), dtype=bool)
        self.border[self.part.edges[self.part.open_edges].ravel()] = True
        self.use = ways.allowed[self.edge_of] & ~self.part.open_edges

    def local(self, point, beside):
        """The patch's point for an end of a run, given the run's point beside it."""
        surface = self.ways.surface
        triangle = int(surface.edge_triangles[surface.edge_index([[point, beside]])[0]].max())
        return int(self.part.triangles[self.place[triangle], np.flatnonzero(surface.triangles[triangle] == point)[0]])

    def star(self, ends):
        """Three paths from the point where they are shortest in all to the ends, the surface's points; None if none."""
        n = len(self.part.points)
        total, ways = np.zeros(n), []
        for end in ends:
            shut = self.border.copy()
            shut[end] = False
            kept = self.use & ~shut[self.part.edges].any(axis=1)
            pairs = self.part.edges[kept]
            graph = coo_matrix((self.ways.cost[self.edge_of[kept]], tuple(pairs.T)), shape=(n, n)).tocsr()
            gaps, before = dijkstra(graph, directed=False, indices=end, return_predecessors=True)
            total += gaps
            ways.append(before)
        total[self.border] = np.inf
        total[ends] = np.inf
        best = int(np.argmin(total))
        if not np.isfinite(total[best]):
            return None
        return [self.points[_back(best, before)] for before in ways]

    def path(self, start, stops, lead, follow):
        """The surface's points along the best path from start to one of the stops that meets the border nowhere else; None
        if none. lead, follow: the surface's points before and after it, none or one each, for the turns there."""
        shut = self.border.copy()
        shut[[start, *stops]] = False
        last = np.zeros(len(self.part.points), dtype=bool)
        last[stops] = True
        use = np.flatnonzero(self.use & ~shut[self.part.edges].any(axis=1))
        pairs = np.concatenate([self.part.edges[use], self.part.edges[use, ::-1]])
        cost = np.tile(self.ways.cost[self.edge_of[use]], 2)
        kept = ~last[pairs[:, 0]] & (pairs[:, 1] != start)
        order = np.lexsort((pairs[kept, 1], pairs[kept, 0]))
        pairs, cost = pairs[kept][order], cost[kept][order]
        count = len(pairs)
        leaving = np.searchsorted(pairs[:, 0], np.arange(len(self.part.points) + 1))
        fan = leaving[pairs[:, 1] + 1] - leaving[pairs[:, 1]]
        came = np.repeat(np.arange(count), fan)
        goes = np.arange(len(came)) - np.repeat(np.cumsum(fan) - fan, fan) + np.repeat(leaving[pairs[:, 1]], fan)
        turned = pairs[goes, 1] != pairs[came, 0]
        came, goes = came[turned], goes[turned]
        tail, head = self.points[pairs].T
        begin = np.arange(leaving[start], leaving[start + 1])
        first, turn = cost[begin], self.ways.turn
        if len(lead):
            first = first + turn(lead[0], self.points[start], head[begin])
        weight = np.concatenate([cost[goes] + turn(tail[came], head[came], head[goes]), first])
        ends = np.concatenate([came, np.full(len(begin), count)]), np.concatenate([goes, begin])
        gap, before = dijkstra(coo_matrix((weight, ends), shape=(count + 1,) * 2).tocsr(), indices=count,
                               return_predecessors=True)
        gap = gap[:count] + (turn(tail, head, follow[0]) if len(follow) else 0.0)
        gap[~last[pairs[:, 1]]] = np.inf
        if not np.isfinite(gap).any():
            return None
        steps = _back(int(np.argmin(gap)), before)[-2::-1]
        path = self.points[np.append(pairs[steps, 0], pairs[steps[-1], 1])]
        return path if len(np.unique(path)) == len(path) else None  # where a loop saves a turn


def _back(at, before):
    """The way back from `at` to where it began."""
    path = [at]
    while before[path[-1]] >= 0:
        path.append(int(before[path[-1]]))
    return np.array(path)


def mirrored(network, mirror, allowed):
    """The network whose seams left of a Mirror's plane are the images of those right of it, where the mesh has such edges,
    allowed (e,) bool to be seams, and as many pieces, all disks, come of it; else as it is."""
    surface, image = network.surface, mirror.image
    height = mirror.height[surface.edges].sum(axis=1)
    right = network.seam & (height > -1e-6 * np.ptp(height))
    images = surface.edge_index(image[surface.edges[right]])
    if (images < 0).any() or not allowed[images].all():
        return network
    seam = right.copy()
    seam[images] = True
    trial = Network(surface, seam, network.source)
    if trial.pieces[0] != network.pieces[0]:
        return network
    parts = [trial.piece_surface(piece)[0] for piece in range(trial.pieces[0])]
    return trial if all(part.euler == 1 and len(part.boundary_loops) == 1 for part in parts) else network
