"""Mending: harmless faults are put right and said, the others refused with what, where and what to do.

Every step takes and returns Polygons whose corners are the caller's point numbers; `separate` gives the final numbering.
"""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from ..errors import FormError
from .polygons import Polygons, few, number

NEAR = 1e-6
"""Points closer than this share of the form's size are one point, where an edge joins them or both are on open edges."""


def weld(points, polygons, mended):
    """(polygons, root (n,)): points that coincide become one, unless an edge would get three faces.

    Only open edges are closed and edges without length collapsed: two closed parts that touch stay two parts.
    """
    n = len(points)
    edges, _, count = polygons.edges
    near = NEAR * np.linalg.norm(np.ptp(points[np.unique(polygons.corners)], axis=0))
    pairs = edges[np.linalg.norm(points[edges[:, 1]] - points[edges[:, 0]], axis=1) <= near]
    loose = np.unique(edges[count == 1])
    if len(loose):
        pairs = np.concatenate([pairs, loose[cKDTree(points[loose]).query_pairs(near, output_type="ndarray")]])
    root = np.arange(n)
    if not len(pairs):
        return polygons, root
    _, cluster = connected_components(coo_matrix((np.ones(len(pairs)), pairs.T), shape=(n, n)), directed=False)
    _, first = np.unique(cluster, return_index=True)
    root = first[cluster]
    edges, _, count = drop_doubled(renumbered(polygons, root), []).edges
    crowded = np.zeros(n, dtype=bool)
    crowded[edges[count > 2]] = True
    apart = crowded[root] & (root != np.arange(n))
    root[apart] = np.flatnonzero(apart)
    if apart.any():
        apart = np.flatnonzero(apart)
        mended.append(f"{number(len(apart), 'point')} left apart from others in the same place, since joining them would "
                      f"put three or more faces on an edge ({few('point', apart)}).")
    return renumbered(polygons, root), root


def renumbered(polygons, root):
    """The polygons with each point replaced by its root; corners that follow themselves and faces left with two are gone."""
    moved = Polygons(root[polygons.corners], polygons.sizes, polygons.face)
    stays = moved.corners != moved.corners[moved.following]
    sizes = np.bincount(moved.owner[stays], minlength=len(moved.sizes))
    moved = Polygons(moved.corners[stays], sizes, moved.face)
    return moved.keep(sizes > 2)


def drop_collapsed(polygons, mended):
    """Without repeated corners, and without the faces that then have fewer than three."""
    kept = renumbered(polygons, np.arange(int(polygons.corners.max()) + 1))
    gone = np.setdiff1d(polygons.face, kept.face)
    if len(gone):
        mended.append(f"{number(len(gone), 'face')} with fewer than three different corners left out ({few('face', gone)}).")
    return kept


def drop_doubled(polygons, mended):
    """Without faces that have the very corners of an earlier one."""
    keep = np.ones(len(polygons.sizes), dtype=bool)
    for size in np.unique(polygons.sizes):
        which, rows = polygons.rows(size)
        rows = np.sort(rows, axis=1)
        order = np.lexsort(rows.T[::-1])
        again = (rows[order[1:]] == rows[order[:-1]]).all(axis=1)
        keep[which[order[1:][again]]] = False
    if not keep.all():
        gone = polygons.face[~keep]
        mended.append(f"{number(len(gone), 'face')} lying doubled on others left out ({few('face', gone)}).")
    return polygons.keep(keep)


def refuse_crowded_edges(polygons, name):
    """FormError where three or more faces share an edge."""
    edges, which, count = polygons.edges
    crowded = np.flatnonzero(count > 2)
    if len(crowded):
        at = edges[crowded[0]]
        faces = polygons.face[np.unique(polygons.owner[which == crowded[0]])]
        raise FormError(
            f"Form '{name}': {number(len(crowded), 'edge')} with three or more faces, such as the one from point {at[0]} to "
            f"point {at[1]} ({few('face', faces)}). Goods cannot branch: delete the faces inside the form, or split it "
            "there into separate parts. In the application, Select > Select All by Trait > Non Manifold shows these "
            "edges.")


def orient(points, polygons, mended, name):
    """All faces of a part agree, and closed parts face outward; FormError where that cannot be (one-sided surfaces).

    Parity is found as components of the double cover: face f as it is (2 f) and turned over (2 f + 1).
    """
    m = len(polygons.sizes)
    twins = polygons.twins
    a, b = polygons.owner[twins].T
    against = (polygons.corners[twins[:, 0]] == polygons.corners[twins[:, 1]]).astype(np.int64)
    rows = np.concatenate([2 * a, 2 * a + 1])
    columns = np.concatenate([2 * b + against, 2 * b + 1 - against])
    graph = coo_matrix((np.ones(len(rows)), (rows, columns)), shape=(2 * m, 2 * m))
    count, sheet = connected_components(graph, directed=False)
    as_is, over = sheet[0::2], sheet[1::2]
    one_sided = np.flatnonzero(as_is == over)
    if len(one_sided):
        raise FormError(
            f"Form '{name}' is one-sided, like a twisted band closed on itself ({few('face', polygons.face[one_sided])}): "
            "no inside and outside can be told apart. Cut the band along a row of edges (select them, Edge Split), or "
            "delete the faces that close it.")
    fewer = np.bincount(as_is, minlength=count)
    flip = (fewer[over] > fewer[as_is]) | ((fewer[over] == fewer[as_is]) & (over < as_is))
    polygons = polygons.turned(flip)
    if flip.any():
        mended.append(f"{number(flip.sum(), 'face')} turned over to agree with the neighbours "
                      f"({few('face', polygons.face[flip])}).")
    part = np.minimum(as_is, over)
    inward = inward_parts(points, polygons, part, twins)
    if inward.any():
        parts = len(np.unique(part[inward]))
        mended.append(f"{number(parts, 'closed part')} turned to face outward ({few('face', polygons.face[inward])}).")
    return polygons.turned(inward)


def inward_parts(points, polygons, part, twins):
    """(m,) bool: faces of closed parts whose signed volume is negative."""
    count = int(part.max()) + 1
    corner_part = np.repeat(part, polygons.sizes)
    paired = np.zeros(len(polygons.corners), dtype=bool)
    paired[twins] = True
    is_open = np.bincount(corner_part, ~paired, count) > 0
    middle = np.add.reduceat(points[polygons.corners], polygons.first) / polygons.sizes[:, None]
    anchor = np.zeros((count, 3))
    anchor[part] = middle
    at = points[polygons.corners] - anchor[corner_part]
    cones = np.einsum("ij,ij->i", np.cross(at, at[polygons.following]), middle[polygons.owner] - anchor[corner_part])
    volume = np.bincount(corner_part, cones, count)
    return ~is_open[part] & (volume[part] < 0)


def separate(polygons, root, used, mended):
    """(polygons in the final numbering, source (k,) caller's point of each, point_of (n,) or -1).

    Where sheets of faces touch in a single point, each sheet gets a point of its own; unused points are gone. Joining and
    dividing are told as they come out: what `weld` joined and this step divides again is not worth a word.
    """
    given = np.bincount(root[used], minlength=len(root))
    twins = polygons.twins
    after = polygons.following
    rows = np.concatenate([twins[:, 0], after[twins[:, 0]]])
    columns = np.concatenate([after[twins[:, 1]], twins[:, 1]])
    c = len(polygons.corners)
    _, fan = connected_components(coo_matrix((np.ones(len(rows)), (rows, columns)), shape=(c, c)), directed=False)
    _, first = np.unique(fan, return_index=True)
    place = polygons.corners[first]
    order = np.lexsort([first, place])
    copy = np.zeros(len(order), dtype=bool)
    copy[1:] = place[order[1:]] == place[order[:-1]]
    order = np.concatenate([order[~copy], order[copy]])
    new = np.empty(len(order), dtype=np.int64)
    new[order] = np.arange(len(order))
    source = place[order]
    kept = len(order) - copy.sum()
    point_of = np.full(len(root), -1)
    point_of[source[:kept]] = np.arange(kept)
    fans = np.bincount(source, minlength=len(root))
    joined, divided = np.flatnonzero(given > np.maximum(fans, 1)), np.flatnonzero(fans > given)
    if len(joined):
        mended.append(f"{number((given - fans)[joined].sum(), 'point')} lying on others joined with them "
                      f"({few('point', np.flatnonzero(np.isin(root, joined) & (root != np.arange(len(root)))))}).")
    if len(divided):
        mended.append(f"{number(len(divided), 'point')} where parts only touch divided, one for each part "
                      f"({few('point', divided)}).")
    unused = np.setdiff1d(np.arange(len(root)), used)
    if len(unused):
        mended.append(f"{number(len(unused), 'point')} without a face left out ({few('point', unused)}).")
    return Polygons(new[fan], polygons.sizes, polygons.face), source, point_of[root]
