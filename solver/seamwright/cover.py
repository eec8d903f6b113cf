"""The main job: form and wishes in, pattern out. Runs the stages one after the other for every part of the form."""

from dataclasses import replace

import numpy as np
from threadpoolctl import threadpool_limits

from .asked import check, edges_asked, held_edges, patches_allow, planes_of, prices_allow, shared_out, shut_edges
from .assemble import assemble
from .errors import CoverError
from .fit.darts import shortest, without_stubs
from .fit.foresee import reach, stretch_weight
from .fit.goods import get
from .fit.improve import improve, less_in_all, rank
from .fit.join import joined
from .fit.sewn import closed
from .fit.sizes import is_strip, narrowest, sized
from .fit.tailor import Tailor, finished
from .form.measure import areas, total_area
from .form.offset import carried, offset
from .form.surface import Surface
from .parts import parts_of
from .pattern import Pattern
from .seams.begun import network_of_labels, network_of_pattern, triangle_labels
from .seams.ladder import Ladder
from .seams.network import Network
from .seams.only import BORDER, along_edges, grown, through_faces
from .seams.opened import opened
from .seams.prices import NEVER, seam_prices
from .seams.refuse import mirror_error
from .seams.seek import seek
from .seams.seen import Seen
from .seams.whole import kept_whole, united
from .wishes import Wishes

MIRRORED = 0.005  # share of the form's size within which seams are symmetric
RESTLESS = ("Seams: they were still moving when the steps for that ran out, so less seam or stretch may be had. Improve the "
            "seams of this pattern, or try another thrift.")
PLAIN_THRIFT = 0.1  # price of a metre of seam where a number of pieces is wished and no thrift


def cover(form, wishes=None, progress=None):
    """Pattern for a Form and Wishes. progress(share 0..1, words) is told how far it is.

    Raises WishError on wishes that cannot be, CoverError where no pattern is found.
    """
    with threadpool_limits(1, "blas"):  # small systems gain nothing from more, and sums must not depend on the machine
        return _covered(form, wishes or Wishes(), progress)


def _covered(form, wishes, progress):
    goods = get(wishes.goods)
    check(form, wishes)
    prices = seam_prices(form, wishes)
    neutral, said = _neutral(form, goods, wishes)
    held = held_edges(form, wishes, prices >= NEVER)
    parts = parts_of(form, neutral, held, shut_edges(form, wishes, held), prices)
    if wishes.only is not None:
        parts = [part for part in parts if _given(form, part, wishes).any()]
    wanted = shared_out(form, parts, wishes.pieces)
    covered, notes = [], list(form.mended) + said
    for number, (part, pieces) in enumerate(zip(parts, wanted, strict=True)):
        def tell(share, words, number=number):
            if progress:
                progress((number + 0.95 * share) / len(parts), words)

        try:
            covered.append(_cover_part(form, part, wishes, goods, pieces, tell, notes))
        except CoverError as error:
            where = f"{form.name}, part {number + 1} of {len(parts)}" if len(parts) > 1 else form.name
            raise CoverError(f"{where}: {error}") from error
    pattern = assemble(form, neutral, goods, wishes, covered, notes)
    pattern.notes += _unmet(pattern, wishes, prices) + _lopsided(pattern, covered, wishes.route)
    if progress:
        progress(1.0, "done")
    return pattern


def _neutral(form, goods, wishes):
    """(Surface in the middle of the goods' thickness, the form's own where that is not wished for; list of sentences)."""
    if wishes.thickness_side == "none" or goods.thickness == 0:
        return form.surface, []
    found = offset(form.surface, goods.thickness / 2 * (1 if wishes.thickness_side == "outside" else -1))
    if found.capped == 0:
        return found.surface, []
    x, y, z = 1000 * found.worst
    return found.surface, [
        f"Thickness: on {100 * found.capped:.1f} % of the form, most near ({x:.0f}, {y:.0f}, {z:.0f}) mm, it is too finely "
        f"curved for goods {1000 * goods.thickness:g} mm thick to lie {wishes.thickness_side} it; there the pieces are "
        "measured nearer to its surface. Thinner goods would help, or a smoother form."
    ]


def _cover_part(form, part, wishes, goods, pieces, tell, notes):
    """(Tailored, planes of symmetry it keeps) of one part; what the maker should know goes to notes."""
    patches_allow(form, part)
    begun = _begun(form, part, wishes, notes)
    planes = planes_of(part, wishes, begun, _given(form, part, wishes))
    if wishes.only is None:
        prices_allow(form, part, NEVER)
        result, planes = _sought(part, planes, begun, wishes, goods, pieces, tell, notes)
    else:
        ground, source = _only(form, part, planes, wishes, goods)
        result, planes = _sought(ground, planes, None, wishes, goods, pieces, tell, notes)
        result.network = replace(result.network, source=source[result.network.source])
    _check_shut(part, result.network)
    return _placed(finished(closed(part.held, result), planes, goods, wishes.comfort, wishes.grain), part), planes


def _sought(ground, planes, begun, wishes, goods, pieces, tell, notes):
    """(Tailored of a Ground, the planes it keeps), from scratch or from a Network begun with; pieces: a wished number."""
    for_thrift = begun is None and (wishes.thrift is not None or pieces is not None)
    # the search for the goods counts lengths through faces on either route: as edges count them, it ended with more metres
    along = ~ground.diagonal if for_thrift and wishes.route == "edges" else None
    ladder = Ladder(ground.surface, ground.price, planes, seed=int(wishes.seed), patch=ground.patch,
                    strict=not isinstance(wishes.symmetry, str), along=along)

    def explicit(cut):
        return ground.network(ladder.levels[-1], cut, wishes.route, 1 / ladder.factor)

    tailor = Tailor(ladder, explicit, goods, wishes.comfort, wishes.grain)
    if begun is not None:
        result, found = improve(tailor, begun, wishes.thrift, wishes.energy, pieces, tell)
        if found is None:
            notes.append("Start: no better seams were found from there, so they are as they were.")
    elif for_thrift:
        result, found = _for_thrift(ladder, tailor, wishes, pieces, tell)
    else:
        result = without_stubs(tailor.judges, sized(ground, tailor, tailor.run(tell), wishes.route), tailor.planes)
        found = None
    if found is not None and not found.converged:
        notes.append(RESTLESS)
    return (result if pieces is None else joined(tailor, result, pieces)), ladder.planes


def _for_thrift(ladder, tailor, wishes, pieces, tell):
    """(Tailored, Found) of the best network for a thrift; without darts, where they make a piece lie over itself."""
    for darts in (True, False):
        thrift = wishes.thrift or PLAIN_THRIFT
        found = seek(ladder, thrift, wishes.energy, pieces, tell, darts)
        if darts and not found.converged:  # what fell to bits on its way is another start
            again = less_in_all(ladder, found.cut.labels, found.cut.uncut, thrift, wishes.energy, pieces)
            found = min(found, again, key=lambda one: rank(one, pieces))
        met = tailor.real(len(ladder.levels) - 1, found.cut)
        if found.cut.uncut is None or not any(one.crossings for one in met.judged):
            break
    return without_stubs(tailor.judges, tailor.untangled(met), tailor.planes), found


def _given(form, part, wishes):
    """(t,) bool: triangles of a part that `only` wishes covered, None without that wish."""
    return None if wishes.only is None else np.asarray(wishes.only, dtype=bool)[form.polygon[part.triangles]]


def _only(form, part, planes, wishes, goods):
    """(Ground of the patch that covers the given faces of a part, (t,) the part's triangle of each of its triangles)."""
    ladder = Ladder(part.surface, part.price, planes, seed=int(wishes.seed), patch=part.patch)
    level, given, metric = ladder.levels[-1], _given(form, part, wishes), 1 / ladder.factor
    points = np.zeros(len(part.points), dtype=bool)
    points[part.surface.triangles[given]] = True
    if wishes.thrift is None:
        cut = grown(ladder, points, BORDER, "square", stretch_weight(reach(goods, wishes.comfort)))
    else:
        cut = grown(ladder, points, wishes.thrift, wishes.energy, 1.0)
    if cut is None:
        return part, np.arange(len(part.triangles))
    if wishes.route == "edges":
        return part.cut_out(*along_edges(level, cut, part.polygon, part.diagonal, given, metric))
    return part.cut_out(*through_faces(level, part.held.evened(cut), metric))


def _check_shut(part, network):
    """CoverError where a seam runs within faces that shut edges keep whole."""
    barred = network.seam & ~network.allowed
    if part.bound is not None and barred.any():
        x, y, z = 1000 * network.surface.points[network.surface.edges[barred][0]].mean(axis=0)
        raise CoverError(f"Shut: no seams were found that leave the shut edges near ({x:.0f}, {y:.0f}, {z:.0f}) mm free. "
                         "Shut fewer edges.")


def _placed(result, part):
    """The Tailored, its sources the form's triangles."""
    result.network = replace(result.network, source=part.triangles[result.network.source])
    return result


def _begun(form, part, wishes, notes):
    """The Network that a part begins with, None without one; what the maker should know goes to notes."""
    if wishes.start is None:
        return None
    if isinstance(wishes.start, Pattern):
        network = network_of_pattern(wishes.start.pieces, part.triangles)
        points = carried(network.surface, network.source, part.on_form, part.held.surface)
        network = replace(network, surface=Surface(points, network.surface.triangles))
        if part.held.edges.any():
            network = opened(part.held.opened_network(network))
    elif np.ndim(wishes.start) == 2:
        marked = np.zeros(len(form.surface.edges), dtype=bool)
        marked[edges_asked(form, "start", wishes.start)] = True
        seam = part.edges_of(form, marked) & ~part.surface.open_edges
        network = opened(Network(part.surface, seam, np.arange(len(part.triangles))), ~part.diagonal)
    else:
        labels = np.unique(wishes.start, return_inverse=True)[1].ravel()[form.polygon][part.triangles]
        network = network_of_labels(part.surface, labels, ~part.diagonal)
    if part.bound is None:
        return network
    network = kept_whole(network, part.bound)
    if not (network.seam & ~network.allowed).any():
        return network
    notes.append("Start: its seams along shut edges, or in the faces beside them, were left out before it was improved.")
    labels = united(triangle_labels(network, len(part.triangles)), part.bound, areas(part.surface))
    return kept_whole(network_of_labels(part.surface, labels, ~part.diagonal), part.bound)


def _unmet(pattern, wishes, prices):
    """Sentences on wishes that are not met."""
    found = []
    if wishes.pieces is not None and len(pattern.pieces) != wishes.pieces:
        found.append(f"Pieces: {wishes.pieces} were wished, the pattern has {len(pattern.pieces)}; no seams were found that "
                     "give as many.")
    if wishes.energy != "square" and wishes.thrift is wishes.pieces is wishes.start is None:
        found.append("Energy: it had no say, as the seams were sought for the goods. It counts with thrift, pieces or "
                     "start.")
    width = narrowest(pattern.goods, sum(piece.areas.sum() for piece in pattern.pieces))
    strips = [piece.name for piece in pattern.pieces if is_strip(piece.flat[piece.outline], width)]
    if strips:
        found.append(f"Narrow: {', '.join(strips[:8])}{', ...' if len(strips) > 8 else ''} nowhere as wide as the "
                     f"{1000 * width:.0f} mm that are easily sewn; what they could be joined to would not fit with them.")
    least = shortest(sum(piece.areas.sum() for piece in pattern.pieces))
    stubs = [seam for seam in pattern.seams if seam.dart and max(seam.lengths) < least]
    if stubs:
        found.append(f"Short darts: {', '.join(seam.name for seam in stubs[:8])}{', ...' if len(stubs) > 8 else ''} shorter "
                     f"than {1000 * least:.0f} mm; the fullness there may be eased in instead.")
    never = (prices >= NEVER)[pattern.form.triangles].all(axis=1)
    length = _metres_in(pattern, never)
    if length > 0:
        found.append(f"Keep clear: {1000 * length:.0f} mm of seam run where there should never be any, as without them the "
                     "form could not be covered so.")
    return found


def _lopsided(pattern, covered, route):
    """Sentences on seams that are not their own mirror image about the planes that they should keep, by more than meshes
    whose triangles are not alike on the two sides make of it: a quarter of an edge through faces, an edge along them."""
    planes = [plane for _, kept in covered for plane in kept]
    edge = pattern.form.surface.edge_lengths.mean() / np.sqrt(total_area(pattern.form.surface))
    limit = max(MIRRORED, (1.0 if route == "edges" else 0.25) * edge)
    found = [mirror_error(Seen(pattern), plane, limit) for plane in planes]
    return [f"Symmetry: the two sides are not sewn alike. {one.sentence}" for one in found if one.refused]


def _metres_in(pattern, triangles):
    """Metres of seam that run within triangles (t,) bool of the form."""
    total = 0.0
    for piece in pattern.pieces:
        inside = triangles[piece.source]
        edges = np.sort(np.concatenate([piece.triangles[inside][:, [k, (k + 1) % 3]] for k in range(3)]), axis=1)
        n = len(piece.points)
        inner = np.unique(edges @ [n, 1])
        for seam in pattern.seams:
            for name, along in seam.sides:
                if name == piece.name and not seam.open:
                    ends = np.sort(np.column_stack([along[:-1], along[1:]]), axis=1)
                    length = np.linalg.norm(np.diff(piece.points[along], axis=0), axis=1)
                    total += length[np.isin(ends @ [n, 1], inner)].sum() / 2
    return float(total)
