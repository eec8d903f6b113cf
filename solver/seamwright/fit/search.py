"""The cheapest network that fits the goods: weights per piece, so that each piece uses its limits fully and no more.

It begins with what the seam stage finds. One price for stretch cannot serve a whole form: a limb and a back need different
ones. So every piece has its own weight on its distortion, raised while the piece asks too much of the goods and lowered
while it asks little: the multiplier of its limit, and a piece beyond it is split as soon as that pays under its weight.
Neighbours whose union still fits are merged. All on a coarse level, by the foreseen use; the real flattening calibrates
later (`judge`).
"""

from dataclasses import dataclass, replace

import numpy as np

from ..seams.cut import recut
from ..seams.descend import descend
from ..seams.energy import evaluate
from ..seams.fields import redistance
from ..seams.merging import merges
from ..seams.seek import enriched, seek
from ..seams.starts import tidied
from ..seams.topology import nearer, through
from .foresee import largest

THRIFTS = (1.0, 0.4, 0.15)  # of the seam stage, where a piece that uses the limits everywhere has a distortion of its area
ROUNDS = 6  # rounds before the networks are compared
STEPS = 6  # flow steps in a round
RESTS = (12, 6)  # flow steps after a lift, which leaves the seams as rough as the rung below, and after weighing anew
ROOM = 0.97  # foreseen use under which a union may be merged
OVER = 1.02  # foreseen use that counts as beyond
MOST_PIECES = 40
PIECE = 0.2  # length of seam, on the levels' scale, that a piece more is worth
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

    @property
    def rank(self):
        """Length, dearer the farther the worst piece is beyond its limits."""
        return self.length * max(1.0, self.use.max() / OVER) ** 2 + 0.05 * len(self.use)


class Search:
    """Search on a ladder, for goods that a log scale of `reach` uses fully."""

    def __init__(self, ladder, reach):
        self.ladder, self.reach = ladder, reach

    def begin(self, rung):
        """The States on a rung to go on from, best first: what the seam stage finds for several prices of seam, then weighed
        until every piece uses its limits."""
        pool = [self.rounds(rung, self.sought(rung, thrift), ROUNDS) for thrift in THRIFTS]
        return sorted(pool, key=lambda state: state.rank)

    def sought(self, rung, thrift):
        """The State of the network that the seam stage finds on a rung."""
        ladder = self.ladder.up_to(rung)
        energy = (lambda u: (u / self.reach) ** 2, lambda u: 2 * u / self.reach**2)
        found = enriched(ladder.levels[-1], seek(ladder, thrift, energy, darts=False), thrift, energy)
        labels = found.cut.labels
        weights = np.full(len(labels), 1 / (thrift * self.reach**2))
        return self._state(rung, found.cut, labels, weights, np.ones(len(self.ladder.owners[rung])))

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
        state = self._state(rung, state.cut, state.cut.labels, state.weights[state.cut.labels], strictness)
        state.weights = state.weights * np.clip(real**HURRY, *SWAY)
        return state

    def rounds(self, rung, state, count):
        """Flow, merge, weigh and split for `count` rounds; the best State met."""
        best = None
        for turn in range(count):
            if 0 < turn < count - 2:  # what is split needs a round or two to settle
                state = self._split_if_paid(rung, state)
            end = self._flow(rung, state.fields, state)
            state = self._merge(rung, self._after(rung, state, end.cut))
            if best is None or state.rank < best.rank:
                best = replace(state)
            state.weights = state.weights * np.clip(state.use**HURRY, *SWAY)
        return best

    def _split_if_paid(self, rung, state):
        """The State with a region split that is beyond its limits, where that brings down the total."""
        beyond = [region for region in np.argsort(-state.use, kind="stable") if state.use[region] > OVER]
        total = self._flow(rung, state.fields, state).cost.total if beyond else 0.0
        for region in beyond:
            trial = self.split(rung, state, [region])
            end = self._flow(rung, trial.fields, trial)
            if end.cost.total + PIECE * (len(trial.use) - len(state.use)) < total:
                return self._after(rung, trial, end.cut)
        return state

    def _after(self, rung, state, cut):
        """The State after a flow from `state` has ended in `cut`."""
        labels = tidied(self.ladder.levels[rung], cut.labels)
        return self._state(rung, cut, labels, state.weights[cut.labels], state.strictness)

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

    def _state(self, rung, cut, labels, point_weights, strictness):
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
        return State(cut, redistance(level, cut, count), weights, use, cost.length, strictness, peaks)

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
                    state = self._state(rung, cut, trial, state.weights[labels], state.strictness)
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
