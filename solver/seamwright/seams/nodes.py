"""The cut faces of a network laid out flat: every cut face brings its own nodes, in its own plane."""

import numpy as np

from .middle import middles, pulled


class Nodes:
    """The N nodes of all cut faces, first each face's corners, then its cuts, then its middle where it has one.

    place (N, 2) in the face's plane; point (N,) the level's point there, n at cuts and middles; corner (N,) which corner of
    its face, 3 at cuts and middles. faces (f,) cut; face (t,), table (t, 3): sub-triangles over the nodes. seams (s, 2)
    segments over the nodes, within (s,) the face of each, sides (s, 2) a corner on either side. cuts (c,) nodes, edges (c,)
    the edge each lies on, ends (c, 2) the corners its share counts from and to, sign (c,) -1 where it counts from the edge's
    larger point. middles (q,) nodes, around (q, 3) the cuts each lies between.
    """

    def __init__(self, level, cut):
        parts, count = [], 0
        for kind in cut.kinds:
            parts.append(_laid_out(level, cut, kind, count))
            count += parts[-1]["point"].size
        for name, shape in SHAPES.items():
            found = [part[name].reshape(-1, *shape) for part in parts]
            setattr(self, name, np.concatenate(found) if found else np.zeros((0, *shape), dtype=DTYPES.get(name, np.int64)))
        self.count = count

    def gather(self, values):
        """(N, 2) at the nodes: sums of values (t, 3, 2) at the sub-triangles' corners."""
        return np.column_stack([np.bincount(self.table.ravel(), values[:, :, d].ravel(), self.count) for d in (0, 1)])

    def by_place(self, pull, edges):
        """(edges,) gradient by the cut places, from that by the nodes' positions (N, 2)."""
        at_cuts = pull.astype(float)  # sums of nothing are whole numbers
        if len(self.middles):
            at_cuts[self.around] += pulled(self.place[self.around], pull[self.middles])
        start, end = self.place[self.ends[:, 0]], self.place[self.ends[:, 1]]
        return np.bincount(self.edges, self.sign * (at_cuts[self.cuts] * (end - start)).sum(axis=1), edges)

    def prices(self, level, cut):
        """((N,) seam price at cuts and middles, (c,) its rise along each cut edge)."""
        low, high = level.price[level.surface.edges[self.edges]].T
        price = np.zeros(self.count)
        price[self.cuts] = low + place_on_edges(level, cut)[self.edges] * (high - low)
        price[self.middles] = price[self.around].mean(axis=1)
        return price, high - low


SHAPES = {"place": (2,), "point": (), "corner": (), "faces": (), "face": (), "table": (3,), "seams": (2,), "within": (),
          "sides": (2,), "cuts": (), "edges": (), "ends": (2,), "sign": (), "middles": (), "around": (3,)}
DTYPES = {"place": float, "sign": float}


def _laid_out(level, cut, kind, first):
    """The arrays of `Nodes` for one kind of cut face, its nodes numbered from `first`."""
    place, whole = seam_nodes(level, cut, kind)
    faces, nodes = place.shape[:2]
    cuts = kind.edges.shape[1]
    middle = cuts == 3
    base = first + nodes * np.arange(faces)[:, None]
    point = np.full((faces, nodes), len(level.mass))
    point[:, :3] = whole
    corner = np.full((faces, nodes), 3)
    corner[:, :3] = kind.corners
    sides = seam_sides(kind)
    return {
        "place": place, "point": point, "corner": corner, "faces": kind.face,
        "face": np.repeat(kind.face, len(kind.table)), "table": base[:, :, None] + kind.table,
        "seams": base[:, :, None] + kind.seams, "within": np.repeat(kind.face, len(kind.seams)),
        "sides": base[:, :, None] + np.array(sides),
        "cuts": base + 3 + np.arange(cuts), "edges": kind.edges, "ends": base[:, :, None] + np.array(cut_ends(kind)).T,
        "sign": np.where(kind.tails == level.surface.edges[kind.edges, 0], 1.0, -1.0),
        "middles": base[:, 0] + 6 if middle else np.zeros(0, dtype=np.int64),
        "around": base + np.array([3, 4, 5]) if middle else np.zeros((0, 3), dtype=np.int64),
    }


def seam_nodes(level, cut, kind):
    """(coordinates (k, q, 2) of a kind's nodes in their face's plane, the points (k, 3) at its corners)."""
    rows = np.arange(len(kind.face))[:, None]
    corners = level.frames[kind.face][rows, kind.corners]
    whole = level.surface.triangles[kind.face][rows, kind.corners]
    place = place_on_edges(level, cut)[kind.edges]
    share = np.where(kind.tails == level.surface.edges[kind.edges, 0], place, 1 - place)
    start, end = cut_ends(kind)
    points = corners[:, start] + share[:, :, None] * (corners[:, end] - corners[:, start])
    nodes = np.concatenate([corners, points], axis=1)
    if kind.edges.shape[1] == 3:
        nodes = np.concatenate([nodes, middles(points)[:, None]], axis=1)
    return nodes, whole


def seam_sides(kind):
    """(s, 2) a corner on either side of each seam."""
    return [[a - 3, (a - 2) % 3] for a, _ in kind.seams] if kind.edges.shape[1] == 3 else [[0, 1]]


def cut_ends(kind):
    """(start, end) node of the corner each cut's share counts from and to."""
    return ([0, 0], [1, 2]) if kind.edges.shape[1] == 2 else ([0, 1, 2], [1, 2, 0])


def place_on_edges(level, cut):
    """(e,) the cut's place on every edge of the level, NaN where it is not cut."""
    place = np.full(len(level.surface.edges), np.nan)
    place[cut.edge] = cut.place
    return place
