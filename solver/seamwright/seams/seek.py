"""The network for a given thrift: several coarse starts, each flowed and simplified, the best carried up the ladder."""

from dataclasses import dataclass

import numpy as np

from .cut import recut
from .descend import descend
from .energy import evaluate
from .fields import from_labels, redistance
from .merging import merges
from .starts import starts, tidied

REPAIRS = 3  # flows, as long as regions had to be put right after the last
PIECE_PRICE = 0.02  # fixed price of a piece, or specks pay
KEPT = (3, 2, 1)  # networks carried on from the first rungs; one after that
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
    while True:
        labels = found.cut.labels
        count = int(labels.max()) + 1
        trials = [
            settle(level, found.cut, trial, thrift, energy) for trial in merges(level, labels)
        ] if count > max(2 if level.free.all() else 1, pieces or 1) else []
        best = min(trials, key=lambda trial: trial.score, default=None)
        if best is None or (best.score >= found.score and (pieces is None or count <= pieces)):
            return found
        found = best


def seek(ladder, thrift, energy="square", pieces=None, begin=None, progress=None):
    """Best Found on the ladder's last level. begin: (n,) labels of the form's points to improve, instead of the starts."""
    levels = ladder.levels
    if begin is not None:
        level = levels[-1]
        return flow(level, from_labels(level, tidied(level, begin)), thrift, energy, steps=3 * STEPS[-1])
    level = levels[0]
    cells = sorted({*(2, 3, 4, 5, 7, 10), *((pieces, pieces + 2) if pieces else ())})
    pool = []
    for labels in starts(level, cells):
        found = flow(level, from_labels(level, labels), thrift, energy, steps=STEPS[0])
        found = simplify(level, found, thrift, energy, pieces)
        pool.append(found)
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
    return (pieces is not None and found.fields.shape[1] != pieces, found.score)
