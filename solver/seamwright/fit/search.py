"""The cheapest network that fits the goods: weights per piece, so that each piece uses its limits fully and no more.

One price for stretch cannot serve a whole form: a limb and a back need different ones. So every piece has its own weight on
its distortion, raised while the piece asks too much of the goods and lowered while it asks little; pieces far beyond are
split, neighbours whose union still fits are merged. All on coarse levels, by the foreseen use; the real flattening
calibrates later (`judge`).
"""

from dataclasses import dataclass

import numpy as np

from ..seams.cut import recut
from ..seams.energy import evaluate
from ..seams.fields import from_labels, redistance
from ..seams.descend import descend
from ..seams.starts import starts, tidied
from ..seams.topology import merged, regions, voronoi
from .foresee import largest

ROUNDS = (8, 4, 2)  # rounds by rung, the last for every rung beyond
STEPS = 6  # flow steps in a round
KEPT = (2, 1, 1)
TOO_MUCH = 1.5  # use of the limits at which a piece is split at once
ROOM = 0.97  # foreseen use under which a union may be merged
MOST_PIECES = 40


@dataclass
class State:
    """A network on a level: cut, fields (n, K), weights (K,), use (K,) of the limits as foreseen, length of seam."""

    cut: object
    fields: np.ndarray
    weights: np.ndarray
    use: np.ndarray
    length: float
    strained: int = 0  # rounds running in which some piece was beyond its limits

    @property
    def rank(self):
        """Length, dearer the farther the worst piece is beyond its limits."""
        return self.length * max(1.0, self.use.max() / 1.02) ** 2 + 0.05 * len(self.use)


class Search:
    """Search on a ladder for the u that the goods reach. strictness (n,) on the form's points: factor on the use there,
    learnt from real flattening; 1 to begin with."""

    def __init__(self, ladder, reach, strictness=None):
        self.ladder, self.reach = ladder, reach
        self.strictness = np.ones(len(ladder.owners[-1])) if strictness is None else strictness

    def begin(self, progress=None):
        """Best State on the first rung that is worth it, from all starts."""
        level = self.ladder.levels[0]
        begin_weight = 4.0 / self.reach**2
        pool = []
        sizes = (2, 3, 4, 6, 9)
        for labels in starts(level, sizes):
            fields = from_labels(level, labels)
            state = self._state(0, descend(level, fields, 1.0, "square", np.full(fields.shape[1], begin_weight), STEPS).cut, labels,
                                np.full(len(labels), begin_weight))
            pool.append(self.rounds(0, state, ROUNDS[0]))
        return sorted(pool, key=lambda state: state.rank)

    def climb(self, pool, top, progress=None):
        """Carry the best of the pool (States of rung 0) up to the rung `top`."""
        for rung in range(1, top + 1):
            pool = sorted(pool, key=lambda state: state.rank)[: KEPT[min(rung - 1, 2)]]
            pool = [self.rounds(rung, self.lifted(rung, state), ROUNDS[min(rung, 2)]) for state in pool]
        return min(pool, key=lambda state: state.rank)

    def lifted(self, rung, state):
        """The State one rung up."""
        level = self.ladder.levels[rung]
        fields = self.ladder.lift(state.fields, rung - 1, rung)
        end = descend(level, fields, 1.0, "square", state.weights, STEPS)
        return self._state(rung, end.cut, tidied(level, end.cut.labels), state.weights[end.cut.labels])

    def restated(self, rung, state):
        """The State with its use foreseen anew, after the strictness has changed."""
        return self._state(rung, state.cut, state.cut.labels, state.weights[state.cut.labels])

    def rounds(self, rung, state, count):
        """Flow, weigh, split and merge for `count` rounds; the best State met."""
        level = self.ladder.levels[rung]
        best = None
        for turn in range(count):
            state = self._split(rung, state, last=turn >= count - 2)
            end = descend(level, state.fields, 1.0, "square", state.weights, STEPS)
            state = self._state(rung, end.cut, tidied(level, end.cut.labels), state.weights[end.cut.labels], state.strained)
            state = self._merge(rung, state)
            if best is None or state.rank < best.rank:
                best = state
            state.strained = state.strained + 1 if state.use.max() > 1.02 else 0
            state.weights = state.weights * np.clip(state.use**2, 0.6, 1.8)
        return best

    def _use(self, rung, labels, u):
        level, owner = self.ladder.levels[rung], self.ladder.owners[rung]
        count = len(level.surface.points)
        strictness = np.bincount(owner, self.strictness, minlength=count) / np.bincount(owner, minlength=count)
        return largest(level, labels, strictness * u) / self.reach

    def _state(self, rung, cut, labels, point_weights, strained=0):
        level = self.ladder.levels[rung]
        cut = recut(level.surface, cut, labels)
        count = int(labels.max()) + 1
        cost = evaluate(level, cut, 1.0, "square", gradient=False)
        size = np.bincount(labels, minlength=count)
        weights = np.exp(np.bincount(labels, np.log(point_weights), minlength=count) / size)
        return State(cut, redistance(level, cut, count), weights, self._use(rung, labels, cost.u), cost.length, strained)

    def _split(self, rung, state, last):
        """Split what is far beyond its limits, or beyond them for long."""
        level, labels = self.ladder.levels[rung], state.cut.labels
        limit = TOO_MUCH if state.strained < 2 else 1.1
        areas = regions(level, labels).area
        beyond = np.flatnonzero((state.use > limit) & (areas > 0.04 * areas.sum()))
        if last or not len(beyond) or len(state.use) >= MOST_PIECES:
            return state
        trial = labels.copy()
        for region in beyond[np.argsort(-state.use[beyond], kind="stable")][: MOST_PIECES - len(state.use)]:
            inside = np.flatnonzero(labels == region)
            trial[inside] = np.where(voronoi(level, 2, inside) == 1, trial.max() + 1, region)
        return self._state(rung, state.cut, tidied(level, trial), state.weights[labels])

    def _merge(self, rung, state):
        """Merge neighbours, longest border first, whose union is a disk and still fits."""
        level = self.ladder.levels[rung]
        least = 2 if level.free.all() else 1
        refused = set()
        while len(state.use) > least:
            labels = state.cut.labels
            tables = regions(level, labels)
            order = np.argsort(-tables.border, kind="stable")
            for at in order:
                i, j = tables.pairs[at]
                key = (int(np.flatnonzero(labels == i)[0]), int(np.flatnonzero(labels == j)[0]))
                if tables.pair_euler[at] != 1 or key in refused or state.use[[i, j]].max() > ROOM:
                    continue
                trial = merged(labels, i, j)
                cut = recut(level.surface, state.cut, trial)
                cost = evaluate(level, cut, 1.0, "square", gradient=False)
                use = self._use(rung, trial, cost.u)
                if use[trial[labels == i][0]] <= ROOM:
                    state = self._state(rung, cut, trial, state.weights[labels], state.strained)
                    break
                refused.add(key)
            else:
                return state
        return state
