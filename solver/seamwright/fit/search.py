"""The cheapest network that fits the goods: weights per piece, so that each piece uses its limits fully and no more.

One price for stretch cannot serve a whole form: a limb and a back need different ones. So every piece has its own weight on
its distortion, raised while the piece asks too much of the goods and lowered while it asks little; pieces far beyond are
split, neighbours whose union still fits are merged. All on coarse levels, by the foreseen use; the real flattening
calibrates later (`judge`).
"""

from dataclasses import dataclass, replace

import numpy as np

from ..seams.cut import cut_by_fields, recut
from ..seams.descend import descend
from ..seams.energy import evaluate
from ..seams.fields import from_labels, redistance
from ..seams.merging import merges
from ..seams.starts import starts, tidied
from ..seams.topology import nearer, regions, through
from .foresee import largest, stretch_weight

STEPS = 6  # flow steps in a round
RESTS = (12, 6)  # flow steps after a lift, which leaves the seams as rough as the rung below, and after weighing anew
HALVINGS = (2, 2, 4)  # rounds on the first rung, before each but the first of which the worse half of the starts is left out
CELLS = (2, 3, 4, 6, 9)  # sizes of the cells among the starts
TOO_MUCH = 3.0  # use of the limits at which a piece is split at once
PATIENCE = 4  # rounds running that a piece may be beyond its limits before it is split
ROOM = 0.97  # foreseen use under which a union may be merged
OVER = 1.02  # foreseen use that counts as beyond
MOST_PIECES = 40
SMALLEST_SPLIT = 0.02  # share of the form's area under which a piece is not split
HURRY = 1.5  # power of the use by which a weight changes in a round
SWAY = (0.6, 1.8)  # bounds on one change of a weight
LEARNT = (0.4, 3.0)  # bounds on the real use over the foreseen one
BLUR = 0.12  # length over which what is learnt is smoothed, on the levels' scale: sharper, it makes seams wiggle


@dataclass
class State:
    """A network on a level: cut, fields (n, K), weights (K,), use (K,) of the limits as foreseen, length of seam;
    strictness (n of the form,) factor on the use at each point, learnt from real flattening."""

    cut: object
    fields: np.ndarray
    weights: np.ndarray
    use: np.ndarray
    length: float
    strictness: np.ndarray
    peaks: np.ndarray  # (K,) point of every region at which the most is foreseen
    strained: int = 0  # rounds running in which some piece was beyond its limits

    @property
    def rank(self):
        """Length, dearer the farther the worst piece is beyond its limits."""
        return self.length * max(1.0, self.use.max() / OVER) ** 2 + 0.05 * len(self.use)


class Search:
    """Search on a ladder, for goods that a log scale of `reach` uses fully."""

    def __init__(self, ladder, reach):
        self.ladder, self.reach = ladder, reach

    def begin(self):
        """The States of the first rung, best first."""
        level = self.ladder.levels[0]
        weight = stretch_weight(self.reach)
        strictness = np.ones(len(self.ladder.owners[0]))
        pool = []
        for labels in starts(level, CELLS):
            cut = cut_by_fields(level.surface, from_labels(level, labels))
            pool.append(self._state(0, cut, labels, np.full(len(labels), weight), strictness))
        for turn, count in enumerate(HALVINGS):
            pool = pool[: (len(pool) + 1) // 2] if turn else pool
            pool = sorted((self.rounds(0, state, count) for state in pool), key=lambda state: state.rank)
        return pool

    def lifted(self, rung, state, rests=RESTS):
        """The State one rung up, after so many flow steps and weighing anew, time after time."""
        fields = self.ladder.lift(state.fields, rung - 1)
        for steps in rests:
            state = self._after(rung, state, self._flow(rung, fields, state, steps).cut)
            state.weights = state.weights * np.clip(state.use**HURRY, *SWAY)
            fields = state.fields
        return state

    def learnt(self, rung, state, real, local):
        """The State after the real use (K,) of its pieces is known, and (n of the level,) how it is spread within them.

        Stricter where the foresight was too mild, and most where the strain is.
        """
        level = self.ladder.levels[rung]
        local = level.diffusion(BLUR).solve(level.mass * local)
        owner = self.ladder.owners[rung]
        u = evaluate(level, state.cut, 1.0, "square", gradient=False).u
        use = self._use(rung, state.cut.labels, u, local[owner])[0]
        factor = np.clip(real / np.maximum(use, 1e-6), *LEARNT)[state.cut.labels]
        strictness = (local * np.exp(level.diffusion(BLUR).solve(level.mass * np.log(factor))))[owner]
        state = self._state(rung, state.cut, state.cut.labels, state.weights[state.cut.labels], strictness, state.strained)
        state.weights = state.weights * np.clip(real**HURRY, *SWAY)
        return state

    def rounds(self, rung, state, count):
        """Flow, weigh, split and merge for `count` rounds; the best State met."""
        best = None
        for turn in range(count):
            if turn == 0 or turn < count - 2:  # what is split needs a round or two to settle
                state = self.split(rung, state, self._overdone(rung, state)[:1])
            end = self._flow(rung, state.fields, state)
            state = self._merge(rung, self._after(rung, state, end.cut))
            if best is None or state.rank < best.rank:
                best = replace(state)
            state.strained = state.strained + 1 if state.use.max() > OVER else 0
            state.weights = state.weights * np.clip(state.use**HURRY, *SWAY)
        return best

    def _after(self, rung, state, cut):
        """The State after a flow from `state` has ended in `cut`."""
        labels = tidied(self.ladder.levels[rung], cut.labels)
        return self._state(rung, cut, labels, state.weights[cut.labels], state.strictness, state.strained)

    def _on(self, rung, values):
        """(N,) mean of values at the form's points over each of the level's points."""
        owner, count = self.ladder.owners[rung], len(self.ladder.levels[rung].surface.points)
        return np.bincount(owner, values, minlength=count) / np.bincount(owner, minlength=count)

    def _flow(self, rung, fields, state, steps=STEPS):
        """Descent with the state's weights; where more strain was met than foreseen, distortion counts for more."""
        emphasis = self._on(rung, state.strictness) ** 2
        for region in range(len(state.weights)):  # relative within each region: its level is in the weight
            inside = state.cut.labels == region if len(state.cut.labels) == len(emphasis) else emphasis > 0
            emphasis[inside] /= np.exp(np.log(emphasis[inside]).mean())
        level = self.ladder.levels[rung]
        return descend(level, fields, 1.0, "square", state.weights, steps, emphasis=emphasis)

    def _use(self, rung, labels, u, strictness):
        """((K,) use of the limits as foreseen, (K,) the point of each region that asks most)."""
        level = self.ladder.levels[rung]
        asked = self._on(rung, strictness) * np.abs(u)
        order = np.lexsort((-asked, labels))
        return largest(level, labels, asked) / self.reach, order[np.unique(labels[order], return_index=True)[1]]

    def _state(self, rung, cut, labels, point_weights, strictness, strained=0):
        level = self.ladder.levels[rung]
        cut = recut(level.surface, cut, labels)
        count = int(labels.max()) + 1
        cost = evaluate(level, cut, 1.0, "square", gradient=False)
        size = np.bincount(labels, minlength=count)
        weights = np.exp(np.bincount(labels, np.log(point_weights), minlength=count) / size)
        use, peaks = self._use(rung, labels, cost.u, strictness)
        if level.symmetry is not None:
            for twins in level.symmetry.partners(labels, count):
                weights = np.sqrt(weights * weights[twins])
                use = np.maximum(use, use[twins])
        return State(cut, redistance(level, cut, count), weights, use, cost.length, strictness, peaks, strained)

    def _overdone(self, rung, state):
        """Regions far beyond their limits, or beyond them for long, worst first."""
        areas = regions(self.ladder.levels[rung], state.cut.labels).area
        limit = TOO_MUCH if state.strained < PATIENCE else 1.15
        beyond = np.flatnonzero((state.use > limit) & (areas > SMALLEST_SPLIT * areas.sum()))
        return beyond[np.argsort(-state.use[beyond], kind="stable")]

    def split(self, rung, state, which, places=None):
        """The State with the regions `which` cut in two, as far as MOST_PIECES allows.

        places: for each region the two points (2, 3), on the level's scale, that are to be parted; without, the
        new seam runs through the point that asks most.
        """
        level, labels = self.ladder.levels[rung], state.cut.labels
        which, places = self._with_twins(level, state, which, places)
        trial = labels.copy()
        for number, region in enumerate(which[: max(0, MOST_PIECES - len(state.use))]):
            inside = np.flatnonzero(labels == region)
            if places is None:
                half = through(level, inside, state.peaks[region])
            else:
                half = nearer(level, inside, places[number])
            trial[inside] = np.where(half == 1, trial.max() + 1, region)
        if np.array_equal(trial, labels):
            return state
        return self._state(rung, state.cut, tidied(level, trial), state.weights[labels], state.strictness)

    def _with_twins(self, level, state, which, places):
        """The regions and places together with their mirror images, each once."""
        which = list(which)
        places = None if places is None else list(places)
        for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
            twins = mirror.partners(state.cut.labels, len(state.use))
            for number, region in enumerate(list(which)):
                if twins[region] not in which:
                    which.append(int(twins[region]))
                    if places is not None:
                        places.append(mirror.plane.mirrored(places[number]))
        return which, places

    def _merge(self, rung, state):
        """Merge neighbours, longest border first, whose union is a disk and still fits (with their mirror images)."""
        level = self.ladder.levels[rung]
        least = 2 if level.free.all() else 1
        refused = set()
        while len(state.use) > least:
            labels = state.cut.labels
            for trial in merges(level, labels):
                if trial.max() + 1 < least or trial.tobytes() in refused:
                    continue
                grown = _grown(labels, trial)
                if state.use[np.unique(labels[np.isin(trial, grown)])].max() > ROOM:
                    continue
                cut = recut(level.surface, state.cut, trial)
                cost = evaluate(level, cut, 1.0, "square", gradient=False)
                if self._use(rung, trial, cost.u, state.strictness)[0][grown].max() <= ROOM:
                    state = self._state(rung, cut, trial, state.weights[labels], state.strictness, state.strained)
                    break
                refused.add(trial.tobytes())
            else:
                return state
        return state


def _grown(labels, trial):
    """Regions of `trial` that hold more than one of `labels`."""
    pairs = np.unique(np.column_stack([trial, labels]), axis=0)
    number, parts = np.unique(pairs[:, 0], return_counts=True)
    return number[parts > 1]
