"""Improve the network that the maker begins with, and never make it worse."""

import numpy as np

from ..seams.begun import regions_of
from ..seams.darts import opened_up
from ..seams.fields import from_labels
from ..seams.flow import PIECE_PRICE, flow
from ..seams.panels import panels
from ..seams.seek import enriched, simplify, steps_on
from ..seams.starts import tidied
from ..seams.study import network_cost

TRY = 8  # steps of flow on the form itself in a try
TRIES = 6  # prices tried until length and distortion both fall
FACTOR = 4.0  # by which the price changes at first
COARSE = 1  # rung on which splits are tried


def improve(tailor, network, thrift, energy, pieces, tell):
    """(Tailored, its Found or None where it is still what was there) for a Network on the tailor's part.

    pieces: a wished number. With a thrift the total, the price of the pieces with it, is not higher than before; without one
    neither length nor distortion is. A wished number of pieces that was not there before goes before that.
    """
    ladder = tailor.ladder
    tell(0.1, "improving seams")
    price = 0.0 if thrift is None else thrift
    before = network_cost(ladder, network, price, energy)
    begin, uncut = regions_of(ladder.levels[-1], network, ladder.factor)
    if thrift is None and pieces is None:
        found = _less_of_both(ladder.levels[-1], begin, uncut, energy, before)
    else:
        found = less_in_all(ladder, begin, uncut, thrift or before.distortion / before.length, energy, pieces)
    tell(0.7, "flattening pieces")
    if found is not None:
        met = tailor.untangled(tailor.real(len(ladder.levels) - 1, found.cut))
        after = network_cost(ladder, met.network, price, energy)
        if pieces is not None and network.pieces[0] != pieces:
            better = True
        elif thrift is None:
            better = after.length <= before.length and after.distortion <= before.distortion
        else:
            more = met.network.pieces[0] - network.pieces[0]
            better = after.total + PIECE_PRICE * more <= before.total
        if better:
            return met, found
    return tailor.untangled(tailor.judges.all(network)), None


def _less_of_both(level, begin, uncut, energy, before):
    """The Found with less length and less distortion than a Cost, by trying prices; None where none was met."""
    price, factor, way = before.distortion / max(before.length, 1e-12), FACTOR, 0
    fields = from_labels(level, begin)
    for _ in range(TRIES):
        found = flow(level, fields, price, energy, steps=TRY, uncut=uncut)
        longer, worse = found.cost.length > before.length, found.cost.distortion > before.distortion
        if not longer and not worse:
            return found
        turn = 1 if longer else -1
        factor = factor**0.5 if turn == -way else factor
        price, way, fields = price * factor**turn, turn, found.fields
        uncut = found.cut.uncut
    return None


def less_in_all(ladder, begin, uncut, thrift, energy, pieces):
    """The Found of least score on a Ladder, begun with labels (n,) of the form's points and uncut (K, K) as in `Cut`: from
    there on, or from coarse copies of its pieces with splits, merges and darts."""
    levels = ladder.levels
    top, rung = len(levels) - 1, min(COARSE, len(levels) - 1)
    level = levels[top]
    found = flow(level, from_labels(level, begin), thrift, energy, steps=3 * TRY, uncut=uncut)
    pool = [simplify(level, found, thrift, energy, pieces)]
    if uncut is not None:
        begin = panels(level.surface, begin, uncut).piece[begin]  # coarse, darts are found anew
    level = levels[rung]
    votes = np.zeros((len(level.surface.points), int(begin.max()) + 1))
    np.add.at(votes, (ladder.owners[rung], begin), levels[top].mass)
    coarse = flow(level, from_labels(level, tidied(level, votes.argmax(axis=1))), thrift, energy, steps=steps_on(level))
    coarse = simplify(level, coarse, thrift, energy, pieces)
    richer = opened_up(level, enriched(level, coarse, thrift, energy, pieces), thrift, energy, pieces)
    if richer is not coarse:
        for higher in range(rung + 1, top + 1):
            fields = ladder.lift(richer.fields, higher - 1)
            richer = flow(levels[higher], fields, thrift, energy, steps=TRY, uncut=richer.cut.uncut)
        pool.append(simplify(levels[top], richer, thrift, energy, pieces))
    return min(pool, key=lambda one: rank(one, pieces))


def rank(found, pieces):
    """What a Found is sorted by: how far it is from the wished number of pieces, if any, then its score."""
    return 0 if pieces is None else abs(found.count - pieces), found.score
