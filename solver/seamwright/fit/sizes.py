"""Sizes that the goods allow: what roll, hide or sheet cannot hold is cut across, what is too narrow to sew is joined."""

from dataclasses import replace

import numpy as np
from shapely.geometry import Polygon

from ..form.mirror import reflection
from ..form.surface import Surface
from ..seams.cut import cut_by_fields, recut
from ..seams.held import Held
from ..seams.level import Level
from ..seams.network import Network
from ..seams.starts import tidied
from ..seams.twins import twin_pieces
from .darts import darted
from .join import without
from .sewn import closed, corner_flats
from .tailored import ENOUGH, Tailored

MOST = 40  # pieces cut into strips
SPARE = 0.96  # share of the goods that a piece may fill: matching its seams changes it a little
SMALL_FORM = 0.1  # share of the form's size from which no width counts as narrow: a small form has small pieces
QUARTER = np.array([[0.0, 1.0], [-1.0, 0.0]])


def excess(flat, goods, free):
    """(how many times as large as the goods hold a flat (n, 2) is, (2,) the direction in which it is, (2,) the direction
    that lies across the goods). The grain is upright; `free`: it may lie in any direction, and does in the best."""
    angle = np.radians(np.arange(0, 180, 2) if free else [0.0])
    across = np.column_stack([np.cos(angle), np.sin(angle)])
    sides = across, across @ QUARTER
    over = np.array([np.ptp(flat @ axes.T, axis=0) / room for axes, room in zip(sides, goods.room, strict=True)])
    best = int(over.max(axis=0).argmin())
    side = int(over[:, best].argmax())
    return float(over[side, best]), sides[side][best], across[best]


def upright(flat, goods, free):
    """The flat (n, 2), turned where the goods hold it only so; `free`: it may lie in any direction."""
    if not free or excess(flat, goods, False)[0] <= 1:
        return flat
    across = excess(flat, goods, True)[2]
    return flat @ np.column_stack([across, across @ QUARTER])


def narrowest(goods, area):
    """Metres: the least width of a piece of the goods on a form of so many square metres."""
    return min(goods.narrowest, SMALL_FORM * np.sqrt(area))


def is_strip(outline, width):
    """Whether a piece with an outline (q, 2) is nowhere as wide as `width`, metres."""
    return bool(Polygon(outline).buffer(-width / 2).is_empty)


def sized(ground, tailor, met, route):
    """The Tailored with too narrow pieces joined to others, and too large ones cut across, as far as that can be."""
    judges = tailor.judges
    free = judges.goods.grain_free and judges.grain is None
    held = met = _without_strips(tailor, met, free)
    for _ in range(MOST):
        over, axis, _ = max((excess(one.flat, judges.goods, free) for one in met.judged), key=lambda found: found[0])
        if over <= SPARE:
            break
        piece = next(k for k, one in enumerate(met.judged) if excess(one.flat, judges.goods, free)[0] == over)
        met = _parted(ground, tailor, met, piece, axis, int(np.ceil(over / SPARE)), route)
    return met if met is held else darted(judges, _merged(tailor, met, free), tailor.planes)


def _alike(surface, along, planes):
    """(n,) values that run along a surface, made symmetric about the planes that it lies across: even or odd, as they are
    nearer to."""
    along = along - along.mean()
    for plane in planes:
        image = reflection(surface, plane) @ along
        along = 0.5 * (along + np.sign(image @ along) * image)
    return along


def _legal(trial, met, goods, free):
    """Whether the pieces of a Tailored that are not another's fit, and the goods hold them."""
    known = {id(one) for one in met.judged}
    new = [one for one in trial.judged if id(one) not in known]
    return all(one.utilisation <= ENOUGH and excess(one.flat, goods, free)[0] <= SPARE for one in new)


def _merged(tailor, met, free):
    """The Tailored without seams that nothing needs: what is joined fits and is held by the goods; longest first."""
    refused = set()
    while True:
        chains = sorted(met.network.chains, key=lambda chain: -len(chain))
        for chain in chains:
            key = min(chain[0], chain[-1]), max(chain[0], chain[-1]), len(chain)
            if key in refused:
                continue
            trials = [trial for trial in without(tailor, met, chain)
                      if _legal(trial, met, tailor.judges.goods, free)]
            if trials:
                met = min(trials, key=lambda trial: trial.network.length())
                break
            refused.add(key)
        else:
            return met


def _without_strips(tailor, met, free):
    """The Tailored with each strip joined to a piece beside it, where what is joined fits."""
    goods = tailor.judges.goods
    width = narrowest(goods, met.network.surface_area)
    while met.network.pieces[0] > 1:
        network, own = met.network, met.network.pieces[1]
        outlines = [network.piece_surface(piece)[0].boundary_loops[0] for piece in range(network.pieces[0])]
        strip = np.array([is_strip(one.flat[outline], width) for one, outline in zip(met.judged, outlines, strict=True)])
        trials = []
        for chain in network.chains if strip.any() else ():
            beside = own[network.surface.edge_triangles[network.surface.edge_index(chain[:2][None])[0]]]
            if beside[0] != beside[1] and strip[beside].any():
                trials += without(tailor, met, chain)
        trials = [trial for trial in trials if _legal(trial, met, goods, free)]
        if not trials:
            break
        met = min(trials, key=lambda trial: trial.network.length())
    return met


def _parted(ground, tailor, met, piece, axis, count, route):
    """The Tailored with a piece cut straight across `axis` (2,) of its flat into so many strips of one width."""
    judges, network, own = tailor.judges, met.network, met.network.pieces[1]
    part, source = ground.cut_out(network, own == piece)
    level = Level(part.surface, np.zeros(len(part.surface.points)), part.price, patch=part.patch)
    twins = [twin_pieces(network, plane)[0][piece] for plane in tailor.planes]
    own_planes = [plane for plane, twin in zip(tailor.planes, twins, strict=True) if twin == piece]
    along = _alike(part.surface, met.judged[piece].flat @ axis, own_planes)
    middles = along.min() + np.ptp(along) * (np.arange(count) + 0.5) / count
    fields = -np.abs(along[:, None] - middles)
    cut = cut_by_fields(part.surface, fields, level.labels(fields))
    strips = part.network(level, recut(part.surface, cut, tidied(level, cut.labels)), route, 1.0)
    # every piece apart, the strips in the place of the one; then all are sewn together again
    apart = Held(network.surface, network.seam & ~network.surface.open_edges)
    kept = np.flatnonzero(own != piece)
    first = len(apart.opened.points)
    triangles = np.concatenate([apart.opened.triangles[kept], strips.surface.triangles + first])
    points, triangles = np.unique(triangles, return_inverse=True)
    both = Surface(np.concatenate([apart.opened.points, strips.surface.points])[points], triangles.reshape(-1, 3))
    seam = np.zeros(len(both.edges), dtype=bool)
    seam[both.edge_index(np.searchsorted(points, strips.surface.edges[strips.seam] + first))] = True
    trial = Network(both, seam, np.concatenate([kept, np.flatnonzero(own == piece)[strips.source]]))
    corners, judged = corner_flats(met), []
    for new in range(trial.pieces[0]):
        surface, _, inside = trial.piece_surface(new)
        if inside[0] >= len(kept):
            judged.append(judges.piece(surface))
            continue
        flat = np.empty((len(surface.points), 2))
        flat[surface.triangles] = corners[trial.source[inside]]
        judged.append(replace(met.judged[own[trial.source[inside[0]]]], flat=flat))
    found = closed(apart, Tailored(trial, judged))
    whole = replace(found.network, source=network.source[found.network.source])
    return Tailored(ground.kept_whole(whole, route), found.judged)
