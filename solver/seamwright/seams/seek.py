"""The network for a given thrift: several coarse starts, each flowed and simplified, the best carried up the ladder."""

from dataclasses import dataclass

import numpy as np

from .cut import recut
from .descend import descend
from .energy import evaluate
from .fields import from_labels, redistance
from .merging import merges
from .starts import starts, tidied
from .topology import through

REPAIRS = 3  # flows, as long as regions had to be put right after the last
PIECE_PRICE = 0.02  # fixed price of a piece, or specks pay
KEPT = (3, 2, 1)  # networks carried on from the first rungs; one after that
MOST_PIECES = 40
SPLIT_STEPS = 12  # of flow after a split
STEPS = (24, 16, 10, 8)  # steps by rung, coarse to fine; the form itself takes the last


@dataclass
class Found:
    """fields (n, K), cut and cost on a level; score = total + the price of the pieces; converged: the flow came to rest."""

    fields: np.ndarray
    cut: object
    cost: object
    score: float
    converged: bool = True


def flow(level, fields, thrift, energy="square", weights=None, steps=20):
    """Flow, then put the topology right (disks, no specks). Returns Found, its fields matching its cut."""
    for _ in range(REPAIRS):
        end = descend(level, fields, thrift, energy, weights, steps)
        labels = tidied(level, end.cut.labels)
        same = labels.max() + 1 == fields.shape[1]
        found = settle(level, end.cut, labels, thrift, energy, weights if same else None, end.converged)
        if np.array_equal(labels, end.cut.labels):
            break
        fields, weights = found.fields, None
    return found


def settle(level, cut, labels, thrift, energy="square", weights=None, converged=True):
    """Found for labels (n,) that differ from a cut's own in places."""
    cut = recut(level.surface, cut, labels)
    cost = evaluate(level, cut, thrift, energy, weights, gradient=False)
    fields = redistance(level, cut, int(labels.max()) + 1)
    return Found(fields, cut, cost, cost.total + PIECE_PRICE * fields.shape[1], converged)


def simplify(level, found, thrift, energy="square", pieces=None):
    """Merge neighbours while that lowers the score (or while there are more than the wished pieces)."""
    least = max(2 if level.free.all() else 1, pieces or 1)
    while True:
        labels = found.cut.labels
        count = int(labels.max()) + 1
        few = [trial for trial in merges(level, labels) if trial.max() + 1 >= least] if count > least else []
        trials = [settle(level, found.cut, trial, thrift, energy) for trial in few]
        best = min(trials, key=lambda trial: trial.score, default=None)
        if best is None or (best.score >= found.score and (pieces is None or count <= pieces)):
            return found
        found = best


def enriched(level, found, thrift, energy="square", pieces=None):
    """Split regions through the point of most stretch, one at a time, the best first, while that lowers the score (or while
    there are fewer than the wished pieces). Returns the flowed Found."""
    while True:
        count = found.fields.shape[1]
        if count >= (pieces or MOST_PIECES):
            return found
        fields = [from_labels(level, labels) for labels in _splits(level, found)]
        trials = [flow(level, one, thrift, energy, steps=SPLIT_STEPS) for one in fields]
        if pieces is None:
            trials = [simplify(level, trial, thrift, energy) for trial in trials]
            trials = [trial for trial in trials if trial.score < found.score]
        else:
            trials = [trial for trial in trials if count < trial.fields.shape[1] <= pieces]
        if not trials:
            return found
        found = min(trials, key=lambda trial: trial.score)


def _splits(level, found):
    """Labels (n,) after the split of one region, for each, the one with most distortion first."""
    labels, u = found.cut.labels, np.abs(found.cost.u)
    met = {labels.tobytes()}
    for region in np.argsort(-np.bincount(labels, level.mass * u * u), kind="stable"):
        inside = np.flatnonzero(labels == region)
        half = through(level, inside, inside[u[inside].argmax()])
        trial = labels.copy()
        trial[inside[half == 1]] = labels.max() + 1
        trial = tidied(level, trial)
        if trial.tobytes() not in met:
            met.add(trial.tobytes())
            yield trial


def seek(ladder, thrift, energy="square", pieces=None, progress=None):
    """Best Found on the ladder's last level, from several starts. pieces: a wished number, come as near to as can be."""
    levels = ladder.levels
    level = levels[0]
    cells = sorted({*(2, 3, 4, 5, 7, 10), *((pieces, pieces + 2) if pieces else ())})
    pool = []
    for labels in starts(level, cells):
        found = flow(level, from_labels(level, labels), thrift, energy, steps=STEPS[0])
        pool.append(simplify(level, found, thrift, energy, pieces))
    if pieces is not None and all(found.fields.shape[1] < pieces for found in pool):
        pool = [enriched(level, min(pool, key=lambda found: _rank(found, pieces)), thrift, energy, pieces)]
    for rung in range(1, len(levels)):
        pool = sorted(pool, key=lambda found: _rank(found, pieces))[: KEPT[min(rung - 1, 2)]]
        level, steps = levels[rung], STEPS[-1] if rung == len(levels) - 1 else STEPS[min(rung, 3)]
        pool = [
            simplify(level, flow(level, ladder.lift(found.fields, rung - 1, rung), thrift, energy, steps=steps),
                     thrift, energy, pieces)
            for found in pool
        ]
        if progress:
            progress((rung + 1) / len(levels), "seams")
    return min(pool, key=lambda found: _rank(found, pieces))


def _rank(found, pieces):
    return (0 if pieces is None else abs(found.fields.shape[1] - pieces), found.score)
