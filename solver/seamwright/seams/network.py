"""The seam network on an explicit mesh: edges that are seams, the chains they form, the pieces they leave.

This is the state that ends up on the cutting table: slits, darts and seams that close one piece are all just seam edges.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components

from ..form.measure import total_area
from ..form.nearest import closest_on_triangles
from ..form.surface import Surface, components_through
from .cut import recut
from .middle import middles

OTHER_DIAGONAL = np.array([[0, 3, 4], [3, 1, 4], [1, 2, 4]])
"""The sub-triangles of a face with two regions, its four-sided part cut along the diagonal that `cut.TWO` leaves."""
TURNS = 8  # of bringing the ends of darts to their mirror images
NEAREST = 0.1  # share of an edge that a cut keeps from its ends: less makes needles, more makes the seam zigzag


@dataclass
class Network:
    """surface: the form with the seams as edges; seam (e,) bool; source (m,) the form's triangle each triangle lies in;
    face (m,): the maker's face of each triangle where faces must stay whole, None where seams may run through them."""

    surface: Surface
    seam: np.ndarray
    source: np.ndarray
    face: np.ndarray | None = None

    @cached_property
    def allowed(self):
        """(e,) bool: edges that may be seams."""
        sides = self.surface.edge_triangles
        return self.surface.open_edges | (True if self.face is None else self.face[sides[:, 0]] != self.face[sides[:, 1]])

    @cached_property
    def pieces(self):
        """(count, (m,) piece of each triangle)."""
        return components_through(self.surface, ~self.seam)

    @cached_property
    def corner_points(self):
        """(m, 3) point of the opened surface at each corner, numbered apart on the two sides of every seam."""
        surface = self.surface
        m = len(surface.triangles)
        joined = np.flatnonzero(~self.seam & ~surface.open_edges)
        first, second = surface.edge_triangles[joined].T
        rows = np.arange(len(joined))
        k = (surface.triangle_edges[first] == joined[:, None]).argmax(axis=1)
        q = (surface.triangle_edges[second] == joined[:, None]).argmax(axis=1)
        # the edge runs corner k to k+1 in its first triangle and against that in its second
        a = np.concatenate([3 * first + k, 3 * first + (k + 1) % 3])
        b = np.concatenate([3 * second + (q + 1) % 3, 3 * second + q])
        assert len(rows) == 0 or (surface.triangles.ravel()[a] == surface.triangles.ravel()[b]).all()
        graph = coo_matrix((np.ones(len(a)), (a, b)), shape=(3 * m, 3 * m))
        return connected_components(graph, directed=False)[1].reshape(m, 3)

    def piece_surface(self, piece):
        """(Surface of one piece opened along its seams, (k,) points of the network, (t,) triangles of the network)."""
        triangles = np.flatnonzero(self.pieces[1] == piece)
        return self.part_surface(triangles)

    def part_surface(self, triangles):
        """The same for the given triangles (t,)."""
        corners = self.corner_points[triangles]
        unique, first, local = np.unique(corners, return_index=True, return_inverse=True)
        points = self.surface.triangles[triangles].ravel()[first]
        return Surface(self.surface.points[points], local.reshape(-1, 3)), points, triangles

    @cached_property
    def chains(self):
        """List of (q,) point indices: maximal runs of seam edges between their ends, junctions and the open edges.

        A closed run without a junction repeats its first point at the end.
        """
        return trace_chains(self.surface, self.seam)

    def without(self, chain):
        """The network with one chain's edges no longer seams."""
        seam = self.seam.copy()
        seam[self.surface.edge_index(np.column_stack([chain[:-1], chain[1:]]))] = False
        return replace(self, seam=seam)

    def with_seams(self, edges):
        """The network with more edges (k,) as seams."""
        seam = self.seam.copy()
        seam[edges] = True
        return replace(self, seam=seam)

    @cached_property
    def surface_area(self):
        """Square metres of the form."""
        return total_area(self.surface)

    def length(self):
        """Metres of seam."""
        return float(self.surface.edge_lengths[self.seam].sum())


def trace_chains(surface, marked, nodes=None):
    """Runs of marked edges (e,) bool as lists of points; cut at points of degree other than two, and at `nodes` (k,), by
    default the points of open edges."""
    ends = surface.edges[marked]
    n = len(surface.points)
    stop = np.bincount(ends.ravel(), minlength=n) != 2
    if nodes is None:
        stop[surface.edges[surface.open_edges].ravel()] = True
    else:
        stop[nodes] = True
    around = {}
    for index, (a, b) in enumerate(ends.tolist()):
        around.setdefault(a, []).append((b, index))
        around.setdefault(b, []).append((a, index))
    used = np.zeros(len(ends), dtype=bool)
    chains = []
    starts = [p for p in around if stop[p]] + list(around)  # what is left after the first part are closed runs
    for start in starts:
        for neighbour, index in around[start]:
            if used[index]:
                continue
            used[index] = True
            chain = [start, neighbour]
            while not stop[chain[-1]] and chain[-1] != start:
                onward = [(q, i) for q, i in around[chain[-1]] if not used[i]]
                if not onward:
                    break
                used[onward[0][1]] = True
                chain.append(onward[0][0])
            chains.append(np.array(chain))
    return chains


def cut_through(level, cut, metric):
    """(Network with the cut's seams as edges, (m,) region of each triangle): the route through faces.

    metric: metres over lengths on the level. Cuts keep NEAREST of the edge from its ends, but for seams on a plane of
    symmetry, which run through the points that lie on it.
    """
    surface, cut = level.surface, _one_sided(level, cut)
    mirrors = [] if level.symmetry is None else level.symmetry.mirrors
    place = np.clip(cut.place, NEAREST, 1 - NEAREST)
    a, b = surface.edges[cut.edge].T
    through = _points_on_planes(level, cut)
    cuts = np.flatnonzero(through < 0)
    number = np.full(len(surface.edges), -1)
    number[cut.edge] = through
    number[cut.edge[cuts]] = len(surface.points) + np.arange(len(cuts))
    points = np.concatenate([
        surface.points, (surface.points[a] + place[:, None] * (surface.points[b] - surface.points[a]))[cuts]])
    middle = {}
    for kind in (cut.three, cut.end):
        middle[len(kind.seams)] = _middles(surface, kind, number, len(points))
        points = np.concatenate([points, middles(points[number[kind.edges]], NEAREST)])
    points = _ends_alike(level, cut, middle[len(cut.end.seams)], points)
    keep = np.ones(len(surface.triangles), dtype=bool)
    triangles, source, owner = [], [], []
    seamed = np.zeros(len(points), dtype=bool)  # points that a seam may run through
    for kind in cut.kinds:
        keep[kind.face] = False
        whole = surface.triangles[kind.face[:, None], kind.corners]
        nodes = [whole, number[kind.edges]] + ([] if kind is cut.two else [middle[len(kind.seams)][:, None]])
        nodes = np.concatenate(nodes, axis=1)
        seamed[nodes[:, kind.seams]] = True
        parts = nodes[:, kind.table]
        if mirrors and kind is cut.two:
            other = _by_other_diagonal(surface, kind, points[nodes], mirrors)
            parts[other] = nodes[other][:, OTHER_DIAGONAL]
        triangles += list(parts.transpose(1, 0, 2))
        source += [kind.face] * len(kind.table)
        owner += list(whole[:, kind.table.min(axis=1)].T)
    triangles = np.concatenate([surface.triangles[keep], *triangles])
    source = np.concatenate([np.flatnonzero(keep), *source])
    owner = np.concatenate([surface.triangles[keep, 0], *owner])
    region = cut.labels[owner]
    for mirror in mirrors:  # what hangs on a point of the plane is its own side's
        left = (points[triangles].mean(axis=1) - mirror.plane.point) @ mirror.plane.normal < 0
        partner = mirror.partners(cut.labels, int(cut.labels.max()) + 1)
        region = np.where(mirror.on[owner] & left, partner[region], region)
    whole = (triangles != np.roll(triangles, 1, axis=1)).all(axis=1)
    triangles, source, region = triangles[whole], source[whole], region[whole]
    used, triangles = np.unique(triangles, return_inverse=True)
    fine = Surface(points[used] * metric, triangles.reshape(-1, 3))
    one, other = region[fine.edge_triangles].T
    seam = ~fine.open_edges & (one != other)
    if cut.uncut is not None:
        seam &= ~cut.uncut[one, other] & seamed[used][fine.edges].all(axis=1)
    return Network(fine, seam, source)


def _ends_alike(level, cut, middle, points):
    """Points (n, 3) with the ends of darts, `middle` (k,), where their mirror images are, as far as their faces reach.

    By turns each goes to the place of its face that is nearest to half the way to the other's image.
    """
    corners = level.surface.points[level.surface.triangles[cut.end.face]]
    for mirror in level.symmetry.mirrors if level.symmetry is not None and len(middle) else ():
        gap = np.linalg.norm(points[middle][:, None] - mirror.plane.mirrored(points[middle]), axis=2)
        twin, near = gap.argmin(axis=1), gap.min(axis=1) < 2 * level.edge_length
        for _ in range(TURNS):
            wanted = 0.5 * (points[middle] + mirror.plane.mirrored(points[middle[twin]]))
            share = np.maximum(closest_on_triangles(wanted, corners)[0], NEAREST / 2)
            place = np.einsum("kc,kcd->kd", share / share.sum(axis=1, keepdims=True), corners)
            points[middle] = np.where(near[:, None], place, points[middle])
    return points


def _middles(surface, kind, number, first):
    """(k,) number of the point in the middle of each of a kind's faces: `first` and on, or that of a cut already there.

    Where one of the seams lies on a plane, the other two are one seam, and meet it where that reaches the plane.
    """
    middle, edges = first + np.arange(len(kind.face)), kind.edges
    for k in range(3):
        on = number[edges[:, k]] < len(surface.points)
        for other in (edges[:, (k + 1) % 3], edges[:, (k + 2) % 3]):
            meets = on & (surface.edges[other] == number[edges[:, k]][:, None]).any(axis=1)
            middle = np.where(meets, number[other], middle)
    return middle


def _by_other_diagonal(surface, kind, places, mirrors):
    """(k,) bool: faces with two regions to be cut as OTHER_DIAGONAL says, the same as in their mirror images.

    Along the shorter diagonal of the four-sided part, the higher one where they are equal; from the cut on a plane or
    beside it where there is one, as there the mirror image may have a third region and no choice.
    """
    b, c, p, q = places[:, 1:].transpose(1, 0, 2)
    one, two = np.linalg.norm(p - c, axis=1), np.linalg.norm(b - q, axis=1)
    across = np.ones(3) - sum(mirror.plane.normal.sum() * mirror.plane.normal for mirror in mirrors)
    other = np.where(np.abs(one - two) < 1e-9 * one, (q - p) @ across > 0, two < one)
    for mirror in mirrors:
        on = mirror.on[surface.edges[kind.edges]]
        for first, second in (on.any(axis=2).T, on.all(axis=2).T):
            other = np.where(first ^ second, second, other)
    return other


def _one_sided(level, cut):
    """The Cut in which points on a plane of symmetry, where a region and its mirror image are equal, have the right one."""
    labels = cut.labels
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        count = int(labels.max()) + 1
        lean = np.bincount(labels, np.sign(mirror.height) * ~mirror.on, minlength=count)
        partner = mirror.partners(labels, count)
        right = np.where(lean[partner] > lean, partner, np.arange(count))
        labels = np.where(mirror.on, right[labels], labels)
    cut = recut(level.surface, cut, labels, cut.uncut)
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        cut.place = _as_on_the_right(level.surface, cut, mirror)
    return cut


def _as_on_the_right(surface, cut, mirror):
    """(c,) places of the cuts; of edges from a point of the plane to its left, as far from it as on their mirror images.

    There the point counts for its right region, as if that reached over the plane.
    """
    ends, place = surface.edges[cut.edge], cut.place.copy()
    at = np.full(len(surface.edges), -1)
    at[cut.edge] = np.arange(len(cut.edge))
    for k in (0, 1):
        point, far = ends[:, k], ends[:, 1 - k]
        image = mirror.image[far]
        same = np.linalg.norm(mirror.plane.mirrored(surface.points[far]) - surface.points[image], axis=1)
        left = mirror.on[point] & (mirror.height[far] < 0) & (same <= 1e-9 * np.ptp(mirror.height))
        other = np.where(left, surface.edge_index(np.column_stack([point, image])), -1)
        other = np.where(other >= 0, at[other], -1)
        share = np.where(surface.edges[cut.edge[other], 0] == point, cut.place[other], 1 - cut.place[other])
        place = np.where(other >= 0, share if k == 0 else 1 - share, place)
    return place


def _points_on_planes(level, cut):
    """(c,) the end of each cut edge that the cut goes through, -1 where it lies between the ends.

    A seam between a region and its mirror image lies on the plane: where an edge has one end on it, there and nowhere else.
    """
    ends, found = level.surface.edges[cut.edge], np.full(len(cut.edge), -1)
    labels = cut.labels[ends]
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        partner = mirror.partners(cut.labels, int(cut.labels.max()) + 1)
        on = mirror.on[ends] & (partner[labels[:, 0]] == labels[:, 1])[:, None]
        found = np.where(on[:, 0] & ~on[:, 1], ends[:, 0], np.where(on[:, 1] & ~on[:, 0], ends[:, 1], found))
    return found
