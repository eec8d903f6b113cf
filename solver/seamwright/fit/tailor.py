"""From the foreseen to the real: flatten the pieces, learn where the foresight erred, search again, drop spare seams.

A middle rung decides, as coarser ones strain where the form does not; the form itself only confirms, and is corrected where
it does not.
"""

import numpy as np

from ..seams.network import cut_through
from ..seams.opened import edges_in, halves_border, opened
from .darts import darted
from .foresee import reach
from .lessons import lobes, piece_of_region, spread, worst
from .pairs import paired
from .resigned import resigned
from .search import Search
from .sewn import sewn, uneven
from .sizes import excess
from .spare import dropped, put_back, without_nearest
from .tailored import ENOUGH, Judges, Tailored

SEEKING = 1200  # points of the rung on which networks are sought: on coarser ones limbs are too angular
DECIDING = 3000  # points of the rung on which the network is settled: on a finer one it fits as well, or nearly
FINALISTS = 2  # networks that are settled
SHORTER = 0.97  # share of the length of one that fits, from which another is worth that
CONFIRMATIONS = 4  # most flattenings of a network on the rung that decides, with a lesson between
LAST_CONFIRMATIONS = 3  # and of the form itself, where that is finer
MORE = 2  # times that a network that does not fit is split and settled again
ROUNDS = 4  # rounds of the search after a lesson
AIM = 0.97  # use of the limits that a lesson aims at: the next flattening differs by some hundredths
BADLY = 1.1  # use from which a piece is split where lessons and darts did not do
CARRIED = (3,)  # flow steps on rungs finer than the one that decides
MARGIN = 1.03  # use under which a seam is dropped on the rung that decides: what a finer form needs is put back
MOST_SPLITS = 12  # of pieces that still lie over themselves at the end


class Tailor:
    """Runs the search for one connected part. explicit(cut) -> Network on the form itself; the rest as in Wishes."""

    def __init__(self, ladder, explicit, goods, comfort, grain=None):
        self.ladder, self.explicit = ladder, explicit
        self.judges = Judges(goods, comfort, grain)
        self.search = Search(ladder, reach(goods, comfort))

    @property
    def planes(self):
        """The planes of symmetry that seams keep, in metres."""
        return self.ladder.planes

    def run(self, tell):
        """The cheapest Tailored found whose pieces fit, or the least strained one met. tell(share, words) as it goes."""
        top = len(self.ladder.levels) - 1
        seeking, deciding = self.rung_with(SEEKING), self.rung_with(DECIDING)
        tell(0.0, "trying seams")
        pool = self.search.begin(seeking)
        tell(0.3, "fitting pieces")
        best = None
        for state in pool[:FINALISTS]:
            for rung in range(seeking + 1, deciding + 1):
                state = self.search.lifted(rung, state)
            if best is None or not best[0].fits or state.length < SHORTER * best[1].length:
                found = self.settled(deciding, state)
                best = min(best or found, found, key=_fits_first)
        for _ in range(MORE):
            if best[0].fits:
                break
            found = self.settled(deciding, self.parted(deciding, best[1], best[0]))
            best = min(best, found, key=_fits_first)
        met, state, spare = best
        if deciding < top:
            tell(0.7, "flattening pieces")
            for rung in range(deciding + 1, top + 1):
                state = self.search.lifted(rung, state, CARRIED)
            met = self.confirmed(top, state, spare, LAST_CONFIRMATIONS)[0]
            met = darted(self.judges, self.untangled(met), self.planes)
        # what a coarser rung thought needed, the form itself may not
        return met if deciding < top else self.dropped(met, parts=False)[0]

    def rung_with(self, points):
        """The first rung of so many points, or the last."""
        levels = self.ladder.levels
        return next((rung for rung, level in enumerate(levels) if len(level.free) >= points), len(levels) - 1)

    def dropped(self, met, limit=ENOUGH, parts=True):
        """(Tailored, places of what was left out): see `spare.dropped`."""
        return dropped(self.judges, met, self.planes, self.search.reach, limit, parts)

    def real(self, rung, cut, spare=()):
        """The Tailored of a cut, every piece flattened for the goods; spare: places (3, 3) of stretches to leave out."""
        if rung == len(self.ladder.levels) - 1:
            network = self.explicit(cut)
        else:
            network = opened(cut_through(self.ladder.levels[rung], cut, 1 / self.ladder.factor))
        for places in spare:
            network = without_nearest(network, places)
        return self.judges.all(network)

    def settled(self, rung, state):
        """(Tailored, its State, the places left out) of a State after its lessons, without spare seams; on the form itself
        with darts, as with them the dearer of two may be the one that fits."""
        top = rung == len(self.ladder.levels) - 1
        met, state, _ = self.confirmed(rung, state, [], CONFIRMATIONS)
        met, spare = self.dropped(met, ENOUGH if top else MARGIN)
        return darted(self.judges, self.untangled(met), self.planes) if top else met, state, spare

    def confirmed(self, rung, state, spare, most):
        """(Tailored, its State, the places left out), the best of at most so many, corrected while it does not fit."""
        best = None
        for turn in range(most):
            met, spare = self.with_needed(rung, state, spare)
            best = min(best or (met, state, spare), (met, state, spare), key=_fits_first)
            if best[0].fits or turn == most - 1:
                return best
            lesson = self.parted if turn == most - 2 else self.taught  # as weights alone did not do it
            state = self.search.rounds(rung, lesson(rung, state, met), ROUNDS)

    def with_needed(self, rung, state, spare):
        """(Tailored without the spare seams, what of them was spare indeed): where a piece does not fit for want of a seam
        that was dropped, the last such one is put back, and what is its mirror image."""
        met = self.real(rung, state.cut, spare)
        while True:
            wanting = [one.utilisation > ENOUGH or bool(one.crossings) for one in met.judged]
            needed = [at for at, places in enumerate(spare) if wanting[_piece_at(met.network, places[1])]]
            if not needed:
                return met, spare
            fewer = put_back(spare, needed[-1], self.planes)
            trial = self.real(rung, state.cut, fewer)
            if _fits_first([trial]) > _fits_first([met]):
                return met, spare
            met, spare = trial, fewer

    def taught(self, rung, state, met):
        """The State after what `met` teaches: weights by the real use of its pieces."""
        level = self.ladder.levels[rung]
        own = piece_of_region(level, state.cut.labels, met)
        use = np.array([one.utilisation for one in met.judged])
        return self.search.learnt(rung, state, use[own] / AIM, spread(level, met))

    def parted(self, rung, state, met):
        """The State, taught, with what lies over itself in `met` split between its lobes; where nothing does, what is beyond
        its limits by far through its worst place."""
        level = self.ladder.levels[rung]
        state = self.taught(rung, state, met)
        own = piece_of_region(level, state.cut.labels, met)
        crossed = [region for region, piece in enumerate(own) if met.judged[piece].crossings]
        parts = [met.network.piece_surface(own[region])[0] for region in crossed]
        places = [part.points[lobes(part, met.judged[own[region]])] * self.ladder.factor
                  for part, region in zip(parts, crossed, strict=True)]
        state = self.search.split(rung, state, crossed, places)
        if not crossed:
            state.peaks = worst(level, met)[own]
            use = np.array([one.utilisation for one in met.judged])
            state = self.search.split(rung, state, np.flatnonzero(use[own] > BADLY))
        return state

    def untangled(self, met):
        """Tailored in which no piece lies over itself: what still does is split on the mesh, between the lobes."""
        for _ in range(MOST_SPLITS):
            crossed = [piece for piece, one in enumerate(met.judged) if one.crossings]
            if not crossed:
                break
            network = met.network
            triangles = np.flatnonzero(network.pieces[1] == crossed[0])
            part = network.part_surface(triangles)[0]
            face = None if network.face is None else network.face[triangles]
            border = halves_border(part, lobes(part, met.judged[crossed[0]]), face)
            trial = opened(network.with_seams(edges_in(network, part, triangles)[border]))
            judged = []
            for piece in range(trial.pieces[0]):
                old = network.pieces[1][np.argmax(trial.pieces[1] == piece)]
                new = old == crossed[0]
                judged.append(self.judges.piece(trial.piece_surface(piece)[0]) if new else met.judged[old])
            met = Tailored(trial, judged)
        return met


def finished(met, planes, goods, comfort, grain=None):
    """The Tailored with twins about mirror Planes laid alike, and both sides of seams matched where the goods allow it.

    Before, what cannot fit is laid so that as little of it as can be is beyond the hard limits, where the goods hold it so.
    """
    wishes = goods, comfort, grain

    def over(one):
        return excess(one.flat, goods, goods.grain_free and grain is None)[0]

    judged = []
    for piece, one in enumerate(met.judged):
        now = one if one.utilisation <= ENOUGH else resigned(met.network.piece_surface(piece)[0], one, *wishes)
        judged.append(now if over(now) <= max(1.0, over(one)) else one)
    laid = Tailored(met.network, judged)
    alike = paired(laid, planes, *wishes)
    found = Tailored(met.network, sewn(met.network, alike.judged, *wishes))
    if not planes or uneven(found) <= goods.mismatch[0]:
        return found
    other = Tailored(met.network, sewn(met.network, laid.judged, *wishes))
    return min(found, other, key=uneven)  # seams that go together come first


def _fits_first(found):
    """The rank of a (Tailored, ...), those that fit first."""
    return not found[0].fits, found[0].rank


def _piece_at(network, place):
    """The piece nearest to a place (3,)."""
    near = np.linalg.norm(network.surface.points - place, axis=1).argmin()
    return network.pieces[1][np.argmax((network.surface.triangles == near).any(axis=1))]
