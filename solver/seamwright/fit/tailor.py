"""From the foreseen to the real: flatten the pieces, learn where the foresight erred, search again, drop what is not needed."""

from dataclasses import dataclass

import numpy as np

from ..errors import CoverError
from .foresee import reach
from .judge import judge
from .search import Search

LEARNT = (0.5, 2.5)  # bounds on one correction of the foresight
CORRECTIONS = 3
ENOUGH = 1.0  # real use of the limits that counts as fitting
SPLIT_SIGN = 1.7  # the correction where a piece lies over itself in the flat


@dataclass
class Tailored:
    """network, judged: one Judged a piece, in the network's order; use: the largest real use; corrections made."""

    network: object
    judged: list
    use: float
    corrections: int


def tailor(ladder, explicit, goods, comfort, grain=None, progress=None):
    """The cheapest network found whose pieces fit, or the least strained one met. explicit(cut) -> Network on the form."""
    tell = progress or (lambda share, words: None)
    search = Search(ladder, reach(goods, comfort))
    top = len(ladder.levels) - 1
    tell(0.05, "trying seams")
    pool = search.begin()
    tell(0.35, "refining seams")
    state = search.climb(pool, top)
    best = None
    for turn in range(CORRECTIONS + 1):
        tell(0.5 + 0.1 * turn, "flattening pieces")
        network = explicit(state.cut)
        judged = [_judged(network, piece, goods, comfort, grain) for piece in range(network.pieces[0])]
        met = Tailored(network, judged, max(one.utilisation for one in judged), turn)
        if best is None or _rank(met) < _rank(best):
            best = met
        if turn == CORRECTIONS or (met.use <= ENOUGH and turn > 0):
            break
        search.strictness = search.strictness * _lesson(ladder, state, network, judged)
        state = search.rounds(top, search.restated(top, state), 2)
    tell(0.9, "dropping seams that are not needed")
    return dropped(best, goods, comfort, grain)


def _judged(network, piece, goods, comfort, grain):
    return judge(network.piece_surface(piece)[0], goods, comfort, grain)


def _rank(met):
    crossings = sum(bool(one.crossings) for one in met.judged)
    return (crossings, met.network.length() * max(1.0, met.use / ENOUGH) ** 3)


def _lesson(ladder, state, network, judged):
    """(n,) factor for the strictness at the form's points: real use over foreseen use of the piece they lie in."""
    labels = state.cut.labels
    real = np.ones(len(labels))
    count, piece = network.pieces
    source = ladder.levels[-1].surface.triangles[network.source]
    # a piece of the network is known by the region most of its corners lie in
    for index in range(count):
        region = np.bincount(labels[source[piece == index]].ravel()).argmax()
        use = judged[index].utilisation / state.use[region]
        use = max(use, SPLIT_SIGN) if judged[index].crossings else use
        real[labels == region] = np.clip(use, *LEARNT)
    return real


def dropped(met, goods, comfort, grain):
    """Drop seam chains, longest first, while the piece they leave is a disk, fits and does not lie over itself."""
    network, judged = met.network, met.judged
    refused = set()
    while True:
        for chain in sorted(network.chains, key=lambda chain: -_length(network, chain)):
            key = (min(chain[0], chain[-1]), max(chain[0], chain[-1]), len(chain))
            if key in refused:
                continue
            trial = _drop(network, judged, chain, goods, comfort, grain)
            if trial is not None:
                network, judged = trial
                break
            refused.add(key)
        else:
            return Tailored(network, judged, max(one.utilisation for one in judged), met.corrections)


def _drop(network, judged, chain, goods, comfort, grain):
    surface = network.surface
    edge = surface.edge_index(chain[:2][None])[0]
    sides = network.pieces[1][surface.edge_triangles[edge]]
    use = [judged[side] for side in set(sides.tolist())]
    fine = all(one.utilisation <= ENOUGH for one in use)
    trial = network.without(chain)
    triangles = np.flatnonzero(trial.pieces[1] == trial.pieces[1][surface.edge_triangles[edge][0]])
    part = trial.part_surface(triangles)[0]
    if part.euler != 1 or len(part.boundary_loops) != 1:
        return None
    try:
        one = judge(part, goods, comfort, grain)
    except CoverError:
        return None
    if one.crossings or one.utilisation > (ENOUGH if fine else max(item.utilisation for item in use)):
        return None
    # the other pieces keep their verdicts under their new numbers
    first = {int(trial.pieces[1][np.flatnonzero(network.pieces[1] == old)[0]]): verdict for old, verdict in enumerate(judged)}
    first[int(trial.pieces[1][triangles[0]])] = one
    return trial, [first[index] for index in range(trial.pieces[0])]


def _length(network, chain):
    points = network.surface.points[chain]
    return float(np.linalg.norm(np.diff(points, axis=0), axis=1).sum())
