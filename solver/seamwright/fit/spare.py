"""Seams that are not needed: chains, and halves of chains, whose want leaves pieces that still fit."""

import numpy as np

from ..errors import CoverError
from ..seams.twins import twin_stretch
from .foresee import piece_use
from .tailored import ENOUGH, Tailored

HOPELESS = 1.2  # use without a chain above which half of it is not tried either, and foreseen, above which none is
LOPSIDED = 0.05  # share of all seam from which one of two that are mirror images goes, where both cannot
NEAR = 0.15  # a chain on another rung is the same one when its middle is this near, as a share of the form's size


def dropped(judges, met, planes, reach, limit=ENOUGH, parts=True):
    """(Tailored, what was left out): seam chains dropped, longest first, while the piece they leave is a disk, within
    the limit and not over itself; then halves of chains, so that darts are left. On a symmetric form a chain goes
    together with its mirror image. What was left out: for each the places (3, 3) of its begin, middle and end."""
    refused, spare = {}, []
    most = HOPELESS / _typical(met, reach) * reach  # log scale above which no piece is worth a try
    while True:
        chains = sorted(met.network.chains, key=lambda chain: -_length(met.network, chain))
        for chain in chains + [half for whole in chains if parts for half in halves(whole)]:
            key, whole = _key(chain), refused.get(_key(_whole(chain, chains)), 0.0)
            if key in refused or whole > HOPELESS:
                continue
            group = with_images(met.network, chain, planes)
            trial, use = _without(judges, met, group, limit, most)
            alone = _length(met.network, chain) > LOPSIDED * met.network.length()
            if use == np.inf and len(group) > 1 and alone:  # of the two seams of a sleeve one has to stay
                group = [chain]
                trial, use = _without(judges, met, group, limit, most)
            refused.update((_key(one), use) for one in group)
            if trial is not None:
                spare += [_places(met.network, one) for one in group]
                met = trial
                break
        else:
            return met, spare


def _typical(met, reach):
    """The real use over the foreseen one, low among the pieces: what is foreseen at that rate will hardly be less."""
    rates = [one.utilisation / max(piece_use(met.network.piece_surface(piece)[0], reach), 1e-9)
             for piece, one in enumerate(met.judged)]
    return float(np.clip(np.quantile(rates, 0.25), 0.1, 5.0))


def with_images(network, chain, planes):
    """The chain, or half of one, and its mirror images, each once."""
    group = [chain]
    for plane in planes:
        group += [twin for twin in (twin_stretch(network, plane, one) for one in group) if twin is not None]
    return group


def _without(judges, met, group, limit, most):
    """(Tailored without some chains, the worst use that leaves), or (None, that use; infinite where no disk is left)."""
    network = met.network
    surface = network.surface
    firsts = [surface.edge_triangles[surface.edge_index(chain[:2][None])[0]][0] for chain in group]
    number, piece = network.pieces
    trial = network
    for chain in group:
        trial = trial.without(chain)
    now = trial.pieces[1]
    judged = [None] * trial.pieces[0]
    for old in range(number):  # the others keep their verdicts under their new numbers
        judged[now[np.argmax(piece == old)]] = met.judged[old]
    changed = list(dict.fromkeys(now[first] for first in firsts))
    if max(met.judged[old].utilisation for old in np.unique(piece[np.isin(now, changed)])) > limit:
        return None, np.inf  # what is beyond its limits will not come within them so
    worst = 0.0
    for new in changed:
        part = trial.part_surface(np.flatnonzero(now == new))[0]
        if not _is_disk(part):
            return None, np.inf
        if piece_use(part, most) > 1:
            return None, np.inf
        try:
            judged[new] = judges.piece(part, limit, senseless=0.0)  # to lay it apart costs more than it brings
        except CoverError:
            return None, np.inf
        worst = max(worst, judged[new].utilisation)
        if judged[new].crossings or worst > limit:
            return None, worst
    return Tailored(trial, judged), worst


def halves(chain):
    """The halves of a chain, each from its end inward, so that darts are left; of a closed one, parted at two places and at
    two between them. None of a short one."""
    half = len(chain) // 2
    if len(chain) < 8:
        return []
    if chain[0] != chain[-1]:
        return [chain[: half + 1], chain[half:]]
    return [np.roll(chain[:-1], -turn)[: half + 1] for turn in (0, half // 2, half, half + half // 2)]


def _whole(half, chains):
    """The chain that `half` is a half of, or is."""
    for chain in chains:
        if len(chain) > len(half) and (np.array_equal(chain[: len(half)], half) or np.array_equal(chain[-len(half):], half)):
            return chain
    return half


def _key(chain):
    return min(chain[0], chain[-1]), max(chain[0], chain[-1]), len(chain)


def _length(network, chain):
    return float(np.linalg.norm(np.diff(network.surface.points[chain], axis=0), axis=1).sum())


def _is_disk(part):
    return part.euler == 1 and len(part.boundary_loops) == 1


def _places(network, chain):
    """(3, 3) where a chain begins, its middle, its end."""
    points = network.surface.points[chain]
    way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(points, axis=0), axis=1))])
    middle = [np.interp(0.5 * way[-1], way, axis) for axis in points.T]
    return np.array([points[0], middle, points[-1]])


def put_back(spare, at, planes):
    """The list `spare` of places (3, 3) without the one at an index, nor its mirror images."""
    back = [spare[at]]
    for plane in planes:
        back += [plane.mirrored(places) for places in back]
    near = NEAR * max(np.ptp(spare[at], axis=0).max(), 1e-9)
    return [places for places in spare
            if not any(min(np.abs(places - one).max(), np.abs(places[::-1] - one).max()) < near for one in back)]


def without_nearest(network, places):
    """The network without the stretch of seam nearest to places (3, 3) met on another rung, if a disk is left."""
    points = network.surface.points

    def gap(chain, place):
        return np.linalg.norm(points[chain] - place, axis=1)

    chain = min(network.chains, key=lambda chain: gap(chain, places[1]).min())
    if gap(chain, places[1]).min() > NEAR * np.sqrt(network.surface_area):
        return network
    ends = sorted(int(gap(chain, place).argmin()) for place in (places[0], places[2]))
    ends = [0 if ends[0] <= 2 else ends[0], len(chain) - 1 if ends[1] >= len(chain) - 3 else ends[1]]
    if chain[0] == chain[-1] or ends[0] >= ends[1]:
        ends = [0, len(chain) - 1]
    chain = chain[ends[0] : ends[1] + 1]
    trial = network.without(chain)
    first = trial.surface.edge_triangles[trial.surface.edge_index(chain[:2][None])[0]][0]
    now = trial.pieces[1]
    return trial if _is_disk(trial.part_surface(np.flatnonzero(now == now[first]))[0]) else network
