"""Darts where a piece is strained at one place: a seam from its edge to the point that asks most of the goods.

A dart is sewn from some length on; a shorter one is left out, or made so long. A symmetric form gets the same on both sides.
"""

import numpy as np
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components, dijkstra

from ..errors import CoverError
from ..form.measure import angle_defects, areas, open_points, sum_at_points
from ..seams.opened import edges_in
from ..seams.twins import twin_pieces
from .spare import with_images
from .tailored import ENOUGH, Tailored

MOST = 3  # darts a piece
GAIN = 0.9  # share of what a piece is beyond its limits that darts must bring it down to
SHORTEST = 0.025  # metres [common practice: what is shorter is eased in; a dart ends 10 mm or more before its point]
SMALL_FORM = 0.1  # share of the form's size from which no dart counts as short
FLAT = 1e-6  # radians of curvature at a point, under which the form is flat there and a dart that ends there does not open
NARROWEST = 3  # points: a way to the edge of fewer makes no dart
SMALL = 0.1  # share of what a piece is beyond its limits, from which a stretch of it gets a dart of its own
APART = 0.1  # share of the form's size: a place that is nearer to its mirror image gets one dart, not two


def shortest(area):
    """Metres: the least length of a dart on a form of so many square metres."""
    return min(SHORTEST, SMALL_FORM * np.sqrt(area))


def darted(judges, met, planes=()):
    """Tailored with darts in the pieces that are beyond their limits, as long as each brings the use down."""
    for _ in range(MOST):
        found = {}
        for piece, group in _groups(met, planes):
            # the one side alone, and one place alone, where the others do not gain by it
            for wanted in (group, *({piece: places} for places in (group[piece], *([one] for one in group[piece])))):
                trials = {one: _with_darts(judges, met, one, places) for one, places in wanted.items()}
                if None not in trials.values():
                    found.update(trials)
                    break
        if not found:
            break
        met = _sewn_in(met, found)
    return met


def without_stubs(judges, met, planes=()):
    """Tailored in which a dart too short to sew is left out, where its piece still fits or asks no more than before, or
    else is made so long that it can be sewn. One that can be neither stays."""
    kept = set()
    while True:
        stubs = {_key(chain): chain for chain in met.network.chains if _is_stub(met.network, chain)}
        left = [key for key in stubs if key not in kept]
        if not left:
            return met
        images = [_key(image) for image in with_images(met.network, stubs[left[0]], planes)]
        group = [key for key in dict.fromkeys(images) if key in stubs]
        kept.update(group)
        met = _without(judges, met, [stubs[key] for key in group])


def _key(chain):
    return min(chain[0], chain[-1]), max(chain[0], chain[-1]), len(chain)


def _is_stub(network, chain):
    """Whether a chain ends inside a piece and is too short to sew."""
    points = network.surface.points[chain]
    length = np.linalg.norm(np.diff(points, axis=0), axis=1).sum()
    return length < shortest(network.surface_area) and _tip(network, chain) is not None


def _tip(network, chain):
    """The end of a chain that lies inside a piece, None without one."""
    surface = network.surface
    ends = surface.edges[network.seam | surface.open_edges]
    return next((end for end in (chain[0], chain[-1]) if (ends == end).sum() == 1), None)


def _without(judges, met, stubs):
    """The Tailored without the chains `stubs`, or with longer darts for them; as it was where neither will do."""
    network, judged, places = met.network, list(met.judged), {}
    for chain in stubs:
        network = network.without(chain)
    for chain in stubs:
        edge = network.surface.edge_index(chain[:2][None])[0]
        piece = int(network.pieces[1][network.surface.edge_triangles[edge, 0]])
        places.setdefault(piece, []).append(network.surface.points[_tip(met.network, chain)])
    most = {piece: max(ENOUGH, judged[piece].utilisation) for piece in places}
    for piece in places:
        part = network.piece_surface(piece)[0]
        if part.euler != 1 or len(part.boundary_loops) != 1:
            return met
        judged[piece] = judges.piece(part)
    plain = Tailored(network, judged)
    longer = {piece: _with_darts(judges, plain, piece, places[piece]) for piece in places
              if judged[piece].crossings or judged[piece].utilisation > most[piece]}
    if any(dart is None or dart[1].utilisation > most[piece] for piece, dart in longer.items()):
        return met
    return _sewn_in(plain, longer) if longer else plain


def _groups(met, planes):
    """List of (piece, {piece: places}): a piece beyond its limits, the worst first, and where darts are to end in it and in
    those that are its mirror images."""
    network, judged = met.network, met.judged
    beyond = sorted((piece for piece, one in enumerate(judged) if one.utilisation > ENOUGH),
                    key=lambda piece: -judged[piece].utilisation)
    twins = [(plane, twin_pieces(network, plane)[0]) for plane in planes] if beyond else []
    near, groups, had = APART * np.sqrt(network.surface_area), [], set()
    for piece in beyond:
        if piece in had:
            continue
        group = {piece: _worst_places(network.piece_surface(piece)[0], judged[piece].each)}
        for plane, twin in twins:
            for one, places in [(int(twin[one]), list(places)) for one, places in group.items() if twin[one] >= 0]:
                theirs = group.setdefault(one, [])
                images = plane.mirrored(np.array(places))
                theirs += [image for image in images if all(np.linalg.norm(image - other) > near for other in theirs)]
        groups.append((piece, group))
        had |= set(group)
    return groups


def _with_darts(judges, met, piece, places):
    """(edges of the network that become darts to near the places (3,), Judged with them), or None where they do not help."""
    network, old = met.network, met.judged[piece]
    part, _, triangles = network.piece_surface(piece)
    edge_of = edges_in(network, part, triangles)
    ways = _ways_from_edge(part, places, network.allowed[edge_of], shortest(network.surface_area))
    ways = [way for way in ways if len(way) >= NARROWEST]
    if not ways:
        return None
    edges = np.concatenate([edge_of[part.edge_index(np.column_stack([way[:-1], way[1:]]))] for way in ways])
    cut = network.with_seams(edges).part_surface(triangles)[0]
    if cut.euler != 1 or len(cut.boundary_loops) != 1:
        return None
    try:
        one = judges.piece(cut)
    except CoverError:
        return None
    gains = _beyond(part, one.each) < GAIN * _beyond(part, old.each)
    return (edges, one) if gains and not one.crossings else None


def _beyond(part, each):
    """Square metres of a piece, weighted by what its triangles (t,) use beyond the limits."""
    return float(areas(part) @ np.maximum(each - ENOUGH, 0))


def _sewn_in(met, found):
    """The Tailored with darts, {piece: (edges, Judged)}; they divide no piece, so the numbers stay."""
    judged = list(met.judged)
    for piece, (_, one) in found.items():
        judged[piece] = one
    return Tailored(met.network.with_seams(np.concatenate([edges for edges, _ in found.values()])), judged)


def _worst_places(part, each):
    """List of (3,): the inner points around which the triangles (t,) use most of the limits, one for every strained stretch
    of the piece, the worst first."""
    area = areas(part)
    around = sum_at_points(part, np.repeat((area * each)[:, None], 3, axis=1))
    mean = np.where(open_points(part), 0.0, around / sum_at_points(part, np.repeat(area[:, None], 3, axis=1)))
    mass = sum_at_points(part, np.repeat(area[:, None] / 3, 3, axis=1))
    strained = mean > ENOUGH
    within = strained[part.edges].all(axis=1)
    graph = _graph(len(mean), part.edges[within], part.edge_lengths[within])
    stretch = connected_components(graph, directed=False)[1]
    beyond = np.bincount(stretch, mass * np.maximum(mean - ENOUGH, 0))
    found = [np.argmax(np.where(stretch == one, mean, -1.0)) for one in np.argsort(-beyond, kind="stable")
             if beyond[one] > SMALL * beyond.sum()]
    return [part.points[one] for one in found] or [part.points[mean.argmax()]]


def _ways_from_edge(part, places, allowed, least):
    """List of (q,): for each place (3,) the points of the shortest way along the allowed edges (e,) from the piece's edge to
    the point nearest to it; where that is no `least` metres away from that edge, on to one that is, unless the form is
    flat there. Empty without one."""
    rim, ends = open_points(part), part.edges[allowed]
    inside = ~rim[ends].any(axis=1)
    every, inner = (_graph(len(rim), one, length) for one, length in
                    ((ends, part.edge_lengths[allowed]), (ends[inside], part.edge_lengths[allowed][inside])))
    gap, back, _ = dijkstra(every, directed=False, indices=np.flatnonzero(rim), min_only=True, return_predecessors=True)
    far, reached = np.isfinite(gap) & (gap >= least), np.isfinite(gap) & ~rim
    flat = np.abs(angle_defects(part)) < FLAT
    ways = []
    for place in places if far.any() else ():
        point = np.where(reached, np.linalg.norm(part.points - place, axis=1), np.inf).argmin()
        on, before = dijkstra(inner, directed=False, indices=point, return_predecessors=True)
        tip = np.where(far, on, np.inf).argmin()
        if flat[tip]:  # the two sides of a dart would lie on each other there
            tip = point
        way = _followed(back, point)[::-1] + _followed(before, tip)[::-1][1:]
        ways.append(np.array(way if len(set(way)) == len(way) else _followed(back, tip)[::-1]))
    return ways or [np.zeros(0, dtype=np.int64)]


def _graph(count, ends, lengths):
    return coo_matrix((lengths, tuple(ends.T)), shape=(count, count)).tocsr()


def _followed(before, point):
    """List of points from one on, each the one before the last; a negative number ends it."""
    way = [int(point)]
    while before[way[-1]] >= 0:
        way.append(int(before[way[-1]]))
    return way
