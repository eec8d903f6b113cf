"""The network for a given thrift: several coarse starts, each flowed and simplified, the best carried up the ladder."""

import numpy as np

from .cut import cut_by_fields
from .darts import closed_up, opened_up
from .fields import from_labels
from .flow import COARSE, PIECE_PRICE, flow, settle
from .merging import Merging, joined, unions
from .pointed import MORE, Points
from .starts import starts, tidied
from .topology import through

TRIALS = ((0, 7), (6, 3))  # on the first rung: steps of flow for every network, then how many of the best go on
MOST_PIECES = 40
SPLIT_STEPS = 12  # of flow after a split
LEAST = 1.5  # length of seam, on the levels' scale, that distortion has to be worth before a split is tried
STEPS = ((1000, 24), (3000, 12), (12000, 6))  # points up to which a level takes so many steps; a finer one takes
LAST_STEPS = 1
FLOWS = 4  # more of as many steps, as long as the seams are not at rest and the score falls; on a fine level but one
LOPSIDED = 0.95  # share of the score down to which seams may become cheaper by keeping but one plane of two
TWINS = 0.98  # times the score with a left and a right piece: of a seam between them part can be left out alone
DEAR = 1.05  # share of the score up to which seams may become dearer by running through tips


def simplify(level, found, thrift, energy="square", pieces=None):
    """Merge neighbours while that lowers the score (or while there are more than the wished pieces).

    Where there are darts already, they are left out while that lowers the score.
    """
    if found.cut.uncut is not None:
        return closed_up(level, found, thrift, energy)
    least = max(2 if level.free.all() else 1, pieces or 1)
    merging = Merging(level, thrift, energy, found.count)
    while found.count > least:
        labels = found.cut.labels
        roots = [root for root in unions(level, labels) if len(np.unique(root)) >= least]
        if not roots:
            return found
        gains = merging.gains(found.cut, found.cost, roots)
        rise = [gain + PIECE_PRICE * len(np.unique(root)) for gain, root in zip(gains, roots, strict=True)]
        best = roots[int(np.argmin(rise))]
        trial = settle(level, found.cut, joined(labels, best), thrift, energy, found.converged)
        if trial.score >= found.score and (pieces is None or found.count <= pieces):
            return found
        found = trial
        merging.merge(best)
    return found


def enriched(level, found, thrift, energy="square", pieces=None):
    """Split regions through the point of most stretch, one at a time, that with most distortion first, while that lowers the
    score (or while there are fewer than the wished pieces, then the best of them). Returns the flowed Found."""
    while found.count < (pieces or MOST_PIECES):
        better = []
        for labels in _splits(level, found, 0.0 if pieces else LEAST * thrift):
            trial = flow(level, from_labels(level, labels), thrift, energy, steps=SPLIT_STEPS)
            if pieces is None:
                trial = simplify(level, trial, thrift, energy)
            if found.count < trial.count <= pieces if pieces else trial.score < found.score:
                better.append(trial)
            if better and pieces is None:
                break
        if not better:
            break
        found = min(better, key=lambda trial: trial.score)
    return found


def _splits(level, found, least):
    """Labels (n,) after the split of one region, for each of more than the least distortion, the one with most first."""
    labels, u = found.cut.labels, np.abs(found.cost.u)
    met = {labels.tobytes()}
    for region in (one for one in np.argsort(-found.cost.each, kind="stable") if found.cost.each[one] > least):
        inside = np.flatnonzero(labels == region)
        half = through(level, inside, inside[u[inside].argmax()])
        trial = labels.copy()
        trial[inside[half == 1]] = labels.max() + 1
        trial = tidied(level, trial)
        if trial.tobytes() not in met:
            met.add(trial.tobytes())
            yield trial


def seek(ladder, thrift, energy="square", pieces=None, progress=None, darts=True):
    """Best Found on the ladder's last level, from several starts.

    pieces: a wished number, come as near to as can be; darts: whether seams may end inside a piece.
    """
    levels = ladder.levels
    level = levels[0]
    cells = sorted({*(2, 3, 4, 5, 7, 10), *((pieces, pieces + 2) if pieces else ())})
    pool = _begun(level, cells, thrift, energy, pieces)
    if level.edgewise is not None:  # its grid hinders seams on their way, so here they are sought without it, too
        pool += _begun(level.plain(), cells, thrift, energy, pieces)
    if pieces is not None and all(found.count < pieces for found in pool):
        pool = [enriched(level, pool[0], thrift, energy, pieces)]
    points, emphasis = Points(ladder), [None] * len(levels)
    for_darts = max(rung for rung, level in enumerate(levels) if rung == 0 or len(level.mass) <= COARSE)
    for rung, level in enumerate(levels):
        top = rung == len(levels) - 1
        if rung or top:  # the first rung is done, unless it is the form itself
            begun = [(ladder.lift(found.fields, rung - 1) if rung else found.fields, found.cut.uncut) for found in pool]
            common = dict(thrift=thrift, energy=energy, emphasis=emphasis[rung])
            pool = [flow(level, fields, steps=steps_on(level), uncut=uncut, **common) for fields, uncut in begun]
            if pieces is not None:  # the price of seams may dissolve what is wished: then as few steps as can be
                pool += [flow(level, fields, steps=1, uncut=uncut, **common)
                         for (fields, uncut), found in zip(begun, pool, strict=True) if found.count < pieces]
            if not top or pieces is not None:
                pool = [simplify(level, found, thrift, energy, pieces) for found in pool]
            pool = [_rested(_best(pool, pieces)[0], steps=steps_on(level), **common)]
        if darts and rung == for_darts:
            pool = [_with_darts(ladder, rung, pool[0], thrift, energy, pieces)]
        if rung == points.rung:
            pool[0], emphasis = through_tips(points, pool[0], thrift, energy, pieces)
        if progress:
            progress((rung + 1) / len(levels), "seams")
    found = pool[0]
    if emphasis[-1] is not None:  # the cost without it
        found = settle(found.level, found.cut, found.cut.labels, thrift, energy, found.converged, found.cut.uncut)
    return found


def _begun(level, cells, thrift, energy, pieces):
    """List of the best Founds of the first level, from several starts; cells (k,): how many regions these have."""
    pool = [settle(level, cut_by_fields(level.surface, from_labels(level, labels)), labels, thrift, energy)
            for labels in starts(level, cells)]
    for steps, kept in TRIALS:
        if steps:
            pool = [simplify(level, flow(level, found.fields, thrift, energy, steps=steps), thrift, energy, pieces)
                    for found in pool]
        pool = _best(pool, pieces)[:kept]
    return pool


def _rested(found, steps, **common):
    """The Found after more flow where it had not come to rest."""
    for _ in range(FLOWS if len(found.level.mass) <= COARSE else 1):
        if found.converged:
            break
        more = flow(found.level, found.fields, steps=steps, uncut=found.cut.uncut, **common)
        if more.score >= found.score or more.count != found.count:
            break
        found = more
    return found


def _with_darts(ladder, rung, found, thrift, energy, pieces):
    """The Found opened up, as symmetric as pays: the seam of a lampshade need not be there twice."""
    level = ladder.levels[rung]
    whole = level.symmetry
    best, kept = opened_up(level, found, thrift, energy, pieces), None
    most = LOPSIDED * best.score
    fewer = whole is not None and len(whole.mirrors) > 1 and not ladder.strict
    for number in range(len(whole.mirrors)) if fewer else ():
        level.symmetry = whole.only(number)
        trial = opened_up(level, found, thrift, energy, pieces)
        if trial.score < most and (pieces is None or abs(trial.count - pieces) <= abs(best.count - pieces)):
            best, kept, most = trial, number, trial.score
    level.symmetry = whole
    if kept is not None:
        ladder.keep(kept)
    return best


def through_tips(points, found, thrift, energy, pieces=None):
    """(Found whose seams run through more of the tips that `found` misses, the emphasis on every level that keeps them
    there); where that costs too much, or a wished number of pieces, the last that does not."""
    level, rung = found.level, points.rung
    emphasis, amount, trial, most = [None] * len(points.ladder.levels), np.zeros(len(points.tips)), found, DEAR * found.score
    for more in MORE:
        missed = points.missed(trial)
        if not missed.any():
            break
        amount[missed] = more
        weight = points.emphasis(amount)
        trial = flow(level, trial.fields, thrift, energy, steps_on(level), weight[rung], trial.cut.uncut, slides=True)
        fewer = points.missed(trial).sum() < points.missed(found).sum()
        if fewer and (pieces is None or trial.count == found.count):
            plain = settle(level, trial.cut, trial.cut.labels, thrift, energy, trial.converged, trial.cut.uncut)
            if plain.score <= most:
                found, emphasis = plain, weight
    return found, emphasis


def steps_on(level):
    """Steps of flow that pay on a level after a lift."""
    return next((steps for most, steps in STEPS if len(level.mass) <= most), LAST_STEPS)


def _best(pool, pieces):
    """The networks, the best first, of those alike only one; a seam on a plane of symmetry is worth a little."""
    def rank(found):
        labels, symmetry, score = found.cut.labels, found.level.symmetry, found.score
        if symmetry is not None:
            regions = np.arange(int(labels.max()) + 1)
            if any((partner != regions).any() for partner in symmetry.partners(labels, len(regions))):
                score *= TWINS
        return 0 if pieces is None else abs(found.count - pieces), score

    first = {}
    for found in sorted(pool, key=rank):
        first.setdefault(found.cut.labels.tobytes(), found)
    return list(first.values())
