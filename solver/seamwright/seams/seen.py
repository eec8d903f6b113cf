"""A pattern as the refusing eye sees it: who has a hem, where seams meet and end, how pieces turn their corners."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from ..form.measure import angle_defects, areas, open_points
from ..form.surface import Surface
from .tips import tips


@dataclass
class Corner:
    """A corner of a piece, where runs of its outline meet: number of the node, point (3,), degrees inside, whether it is at
    a junction of three seams or more."""

    piece: str
    node: int
    point: np.ndarray
    degrees: float
    junction: bool


class Seen:
    """Tables of a Pattern with at least one piece, made as they are asked for.

    seams: the sewn ones, hems: the open ones. size (c,) square root of the area of each connected part of the form,
    part_middle (c, 3) its centre of area.
    """

    def __init__(self, pattern):
        self.form, self.pieces, self.goods = pattern.form, pattern.pieces, pattern.goods
        self.seams = [seam for seam in pattern.seams if not seam.open]
        self.hems = [seam for seam in pattern.seams if seam.open]
        self.names = [piece.name for piece in self.pieces]
        self.number = {name: k for k, name in enumerate(self.names)}
        count, self._component = self.form.surface.triangle_components
        self.part_area = np.bincount(self._component, areas(self.form.surface), minlength=count)
        self.size = np.sqrt(self.part_area)
        middle = self.form.points[self.form.triangles].mean(axis=1) * areas(self.form.surface)[:, None]
        self.part_middle = np.column_stack([np.bincount(self._component, axis, count) for axis in middle.T])
        self.part_middle /= self.part_area[:, None]
        self.piece_area = np.array([piece.areas.sum() for piece in self.pieces])
        self.piece_part = np.array([self._component[piece.source[0]] for piece in self.pieces])
        self.lengths = [_length(seam.path) for seam in self.seams]
        self.seam_part = np.array([self.piece_part[self._owner(seam)] for seam in self.seams], dtype=np.int64)

    def _owner(self, seam):
        return next(self.number[name] for name, _ in seam.sides if name is not None)

    @cached_property
    def surfaces(self):
        """The Surface of every piece."""
        return [Surface(piece.points, piece.triangles) for piece in self.pieces]

    @cached_property
    def disks(self):
        """(K,) bool: one sheet whose outline is one closed run."""
        return [surface.euler == 1 and surface.triangle_components[0] == 1 and surface.open_edges.sum() == len(piece.outline)
                for surface, piece in zip(self.surfaces, self.pieces, strict=True)]

    def curvature(self, k):
        """Radians of curvature inside piece k."""
        surface = self.surfaces[k]
        return float(angle_defects(surface)[~open_points(surface)].sum())

    @cached_property
    def along_edges(self):
        """True where the seams cut no face of the form."""
        return sum(len(piece.triangles) for piece in self.pieces) == len(self.form.triangles)

    @cached_property
    def tips(self):
        """(k,) points of the form at its tips."""
        return tips(self.form.surface)

    @cached_property
    def tip_part(self):
        """(k,) the part of each tip."""
        part = np.empty(len(self.form.points), dtype=np.int64)
        part[self.form.triangles] = self._component[:, None]
        return part[self.tips]

    @cached_property
    def _nodes(self):
        """(ends (s + h, 2) node of every seam's and hem's ends, degree (n,) runs that end there, component (n,))."""
        runs = [*self.seams, *self.hems]
        ends = np.array([(run.path[0], run.path[-1]) for run in runs]).reshape(-1, 3)
        node = np.unique(ends, axis=0, return_inverse=True)[1].reshape(-1, 2)
        count = int(node.max()) + 1 if len(node) else 0
        graph = coo_matrix((np.ones(len(node)), tuple(node.T)), shape=(count, count))
        return node, np.bincount(node.ravel(), minlength=count), connected_components(graph, directed=False)[1]

    @property
    def ends(self):
        """(s, 2) node at each end of every seam."""
        return self._nodes[0][: len(self.seams)]

    @property
    def degree(self):
        """(n,) how many ends of seams and hems meet at each node; 1 where a dart ends."""
        return self._nodes[1]

    @cached_property
    def loose_bits(self):
        """How many connected bits of seams and hems there are beyond one to each part."""
        owner = [self.piece_part[self._owner(run)] for run in (*self.seams, *self.hems)]
        bits = {(int(part), int(self._nodes[2][node[0]])) for part, node in zip(owner, self._nodes[0], strict=True)}
        return len(bits) - len({part for part, _ in bits})

    @property
    def lone_pieces(self):
        """How many pieces cover a part without a hem alone."""
        return int((np.bincount(self.piece_part, ~self.hemmed)[self.piece_part[~self.hemmed]] == 1).sum())

    @cached_property
    def hemmed(self):
        """(K,) bool: pieces with an open edge."""
        hemmed = np.zeros(len(self.pieces), dtype=bool)
        hemmed[[self._owner(hem) for hem in self.hems]] = True
        return hemmed

    def resampled(self, k, share):
        """(q, 3) points along seam k at even steps of about `share` of the size."""
        return _even(self.seams[k].path, share * self.size[self.seam_part[k]])

    def stitch_lengths(self, share):
        """Metres of all sewn stitch lines in the flat, as they are and at even steps of about `share` of the size."""
        lines = [(self.pieces[self.number[name]].flat[points], share * self.size[part])
                 for seam, part in zip(self.seams, self.seam_part, strict=True) for name, points in seam.sides]
        return sum(_length(line) for line, _ in lines), sum(_length(_even(line, step)) for line, step in lines)

    def distances(self, points):
        """(k,) metres from points (k, 3) to the nearest seam or hem."""
        paths = [run.path for run in (*self.seams, *self.hems)]
        if not paths:
            return np.full(len(points), np.inf)
        a, b = np.concatenate([path[:-1] for path in paths]), np.concatenate([path[1:] for path in paths])
        near = cKDTree((a + b) / 2).query(points, k=min(12, len(a)))[1].reshape(len(points), -1)
        a, along = a[near], (b - a)[near]
        share = ((points[:, None] - a) * along).sum(2) / np.maximum((along * along).sum(2), 1e-300)
        nearest = a + np.clip(share, 0, 1)[:, :, None] * along
        return np.linalg.norm(points[:, None] - nearest, axis=2).min(axis=1)

    def corners(self, share):
        """List of Corners, the directions taken over `share` of the size, or as far as the run goes."""
        arrives, leaves = {}, {}
        for run, nodes in zip((*self.seams, *self.hems), self._nodes[0], strict=True):
            if nodes[0] == nodes[1] and self.degree[nodes[0]] == 2:  # a ring that meets nothing
                continue
            (first, along), (second, against) = run.sides
            for name, points, node in ((first, along, nodes[0]), (second, against[::-1], nodes[1])):
                if name is not None:
                    leaves[name, int(points[0])] = points, int(node)
                    arrives[name, int(points[-1])] = points
        found = []
        for (name, point), (points, node) in leaves.items():
            if self.degree[node] < 2:  # the end of a dart is no corner
                continue
            before = arrives[name, point]
            piece = self.pieces[self.number[name]]
            reach = share * self.size[self.piece_part[self.number[name]]]
            out = _toward(piece.flat[points], reach)
            back = _toward(piece.flat[before[::-1]], reach)
            turn = np.arctan2(out[0] * back[1] - out[1] * back[0], out @ back) % (2 * np.pi)
            found.append(Corner(name, node, piece.points[point], float(np.degrees(turn)), self._seams_at[node] > 2))
        return found

    @cached_property
    def _seams_at(self):
        return np.bincount(self.ends.ravel(), minlength=len(self.degree))


def _length(path):
    return float(np.linalg.norm(np.diff(path, axis=0), axis=1).sum())


def _even(path, step):
    """(q, d) points along a path at even steps of about `step` metres."""
    way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
    at = np.linspace(0, way[-1], max(1, round(way[-1] / step)) + 1)
    return np.column_stack([np.interp(at, way, axis) for axis in path.T])


def _toward(path, reach):
    """Vector from a path's start to its point `reach` along it, or half way if that is nearer."""
    way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
    at = min(reach, 0.5 * way[-1]) if len(path) > 2 else way[-1]
    return np.array([np.interp(at, way, axis) for axis in path.T]) - path[0]
