"""From the foreseen to the real: flatten the pieces, learn where the foresight erred, search again, drop spare seams.

The learning happens on a coarse rung, where a flattening costs little; the form itself only confirms, and is corrected
where it does not.
"""

from dataclasses import dataclass, replace

import numpy as np

from ..errors import CoverError
from ..form.measure import areas
from ..seams.network import cut_through
from ..seams.opened import edges_in, halves_border, opened
from ..seams.twins import twin_stretch
from .foresee import piece_use, reach
from .judge import judge
from .search import MOST_PIECES, Search
from .sewn import sewn

FINE_ENOUGH = 1200  # points of the rung on which the foresight learns: coarser ones strain where the form does not
FEW_CHAINS = 12  # of seam, up to which the form itself is asked what can be dropped
CANDIDATES = 2  # networks that learn
ENOUGH = 1.0  # real use of the limits that counts as fitting
NEARLY = 0.93  # a network that fits and has a piece this near its limits is not worth another lesson
LESSONS = (3, 5)  # most lessons on the learning rung: for every candidate, then for the best
ROUNDS = 5  # rounds after each
CONFIRMATIONS = 4  # most flattenings of the form itself, with a lesson between
SHAPED, SHAPED_WOVEN = 0.93, 0.65  # full shaping brings the use down to about this share of what the first stage reaches
DAMPED = 0.4  # power with which the spread of the real use within a piece is taken over
MARGIN = 0.97  # use under which a seam is dropped on the learning rung: the form itself may ask a little more
FAR = 4.0  # use after the first stage of shaping that more shaping cannot mend
MOST_SPLITS = 12  # of pieces that still lie over themselves at the end
HOPELESS = 1.6  # use without a chain above which half of it is not tried either, and foreseen, above which none is
NEAR = 0.15  # a chain on another rung is the same one when its middle is this near, as a share of the form's size


@dataclass
class Tailored:
    """network, judged: one Judged a piece, in the network's order."""

    network: object
    judged: list

    @property
    def use(self):
        """The largest real use of the limits."""
        return max(one.utilisation for one in self.judged)

    @property
    def fits(self):
        """True when no piece is beyond its limits or over itself."""
        return self.use <= ENOUGH and not any(one.crossings for one in self.judged)

    @property
    def rank(self):
        """Length, dearer the farther the worst piece is beyond its limits, and for every piece over itself."""
        over = sum(bool(one.crossings) for one in self.judged)
        return self.network.length() * max(1.0, self.use / ENOUGH) ** 3 * (1 + over)


class Tailor:
    """Runs the search for one connected part. explicit(cut) -> Network on the form itself; the rest as in Wishes."""

    def __init__(self, ladder, explicit, goods, comfort, grain=None):
        self.ladder, self.explicit = ladder, explicit
        self.goods, self.comfort, self.grain = goods, comfort, grain
        self.search = Search(ladder, reach(goods, comfort))
        symmetry = ladder.levels[-1].symmetry
        self.planes = [] if symmetry is None else [mirror.plane.scaled(1 / ladder.factor) for mirror in symmetry.mirrors]
        self.known = {}

    def run(self, tell):
        """The cheapest Tailored found whose pieces fit, or the least strained one met. tell(share, words) as it goes."""
        levels = self.ladder.levels
        top = len(levels) - 1
        learning = next((rung for rung, level in enumerate(levels) if len(level.free) >= FINE_ENOUGH), top)
        tell(0.0, "trying seams")
        pool = self.search.begin()[:CANDIDATES]
        for rung in range(1, learning + 1):
            pool = [self.search.lifted(rung, state) for state in pool]
        tell(0.3, "fitting pieces")
        state, met = min((self.schooled(learning, state, LESSONS[0]) for state in pool), key=lambda pair: pair[1].rank)
        if not met.fits and len(met.judged) < MOST_PIECES:
            state, met = self.schooled(learning, state, LESSONS[1])
        tell(0.5, "dropping spare seams")
        spare = self.dropped(met, MARGIN, fully=False)[1]
        for rung in range(learning + 1, top + 1):
            tell(0.5 + 0.1 * (rung - learning), "refining seams")
            state = self.search.lifted(rung, state)
        tell(0.8, "flattening pieces")
        met = self.confirmed(top, state, spare)
        if len(met.network.chains) <= FEW_CHAINS:  # what the coarse rung thought needed, the form itself may not
            met = self.dropped(met, ENOUGH, fully=True, halves=False)[0]
        return self.sewn(met)

    def sewn(self, met):
        """The Tailored with the two sides of its seams matched, where the goods allow it."""
        return Tailored(met.network, sewn(met.network, met.judged, self.goods, self.comfort, self.grain))

    def real(self, rung, cut, spare=(), fully=False):
        """The Tailored of a cut, every piece flattened for the goods; spare: places (3, 3) of stretches to leave out."""
        if rung == len(self.ladder.levels) - 1:
            network = self.explicit(cut)
        else:
            network = opened(cut_through(self.ladder.levels[rung], cut, 1 / self.ladder.factor))
        for places in spare:
            network = _without_nearest(network, places)
        return Tailored(network, [self.judge(network.piece_surface(k)[0], fully) for k in range(network.pieces[0])])

    def judge(self, surface, fully):
        """Judged for one piece: shaped for the goods fully, or so far that the rest can be foreseen. Remembered.

        What fits, or is far from fitting, after the first stage of shaping is not shaped further.
        """
        key = (fully, surface.points.tobytes(), surface.triangles.tobytes())
        if key not in self.known:
            one = judge(surface, self.goods, self.comfort, self.grain, stages=1)
            if fully and ENOUGH < one.utilisation < FAR:
                one = judge(surface, self.goods, self.comfort, self.grain, stages=None)
            share = 1.0 if fully else SHAPED if self.goods.shear is None else SHAPED_WOVEN
            self.known[key] = replace(one, utilisation=one.utilisation * share)
        return self.known[key]

    def schooled(self, rung, state, lessons):
        """(State, Tailored) best met while the foresight learns from real flattening, with at most so many lessons."""
        best, vain = None, 0
        for lesson in range(lessons):
            met = self.real(rung, state.cut)
            better = best is None or met.rank < best[1].rank
            best, vain = ((state, met), 0) if better else (best, vain + 1)
            done = (met.fits and met.use > NEARLY) or vain == 2 or len(met.judged) >= MOST_PIECES
            if done or lesson == lessons - 1:
                return best
            state = self.taught(rung, state, met, ROUNDS)

    def confirmed(self, rung, state, spare):
        """The best Tailored on the form itself, corrected while it does not fit."""
        best = None
        for turn in range(CONFIRMATIONS):
            met = self.real(rung, state.cut, spare, fully=True)
            needed = [places for places in spare if met.judged[_piece_at(met.network, places[1])].crossings]
            if needed:  # a piece lies over itself for want of a seam that was dropped: put it back
                spare = [places for places in spare if not any(places is one for one in needed)]
                met = min(met, self.real(rung, state.cut, spare, fully=True), key=lambda met: met.rank)
            if best is None or met.rank < best.rank:
                best = met
            if best.fits or turn == CONFIRMATIONS - 1 or len(met.judged) >= MOST_PIECES:
                return self.untangled(best)
            state = self.taught(rung, state, met, 2, insist=turn == CONFIRMATIONS - 2)

    def taught(self, rung, state, met, rounds, insist=False):
        """The State after what `met` teaches: weights by the real use; pieces that lie over themselves split, where they do."""
        own = self.piece_of_region(rung, state, met)
        use = np.array([one.utilisation for one in met.judged])
        state = self.search.learnt(rung, state, use[own], self.spread(rung, met))
        if insist:  # weights alone did not do it: a seam through the worst place
            state.peaks = self.worst(rung, met)[own]
            state = self.search.split(rung, state, np.flatnonzero(use[own] > ENOUGH))
            return self.search.rounds(rung, state, rounds)
        crossed = [region for region, piece in enumerate(own) if met.judged[piece].crossings]
        parts = [met.network.piece_surface(own[region])[0] for region in crossed]
        places = [part.points[lobes(part, met.judged[own[region]])] * self.ladder.factor
                  for part, region in zip(parts, crossed, strict=True)]
        state = self.search.split(rung, state, crossed, places)
        return self.search.rounds(rung, state, rounds)

    def untangled(self, met):
        """Tailored in which no piece lies over itself: what still does is split on the mesh, between the lobes."""
        for _ in range(MOST_SPLITS):
            crossed = [piece for piece, one in enumerate(met.judged) if one.crossings]
            if not crossed:
                break
            network = met.network
            triangles = np.flatnonzero(network.pieces[1] == crossed[0])
            part = network.part_surface(triangles)[0]
            border = halves_border(part, lobes(part, met.judged[crossed[0]]))
            trial = opened(network.with_seams(edges_in(network, part, triangles)[border]))
            judged = []
            for piece in range(trial.pieces[0]):
                old = network.pieces[1][np.argmax(trial.pieces[1] == piece)]
                judged.append(self.judge(trial.piece_surface(piece)[0], True) if old == crossed[0] else met.judged[old])
            met = Tailored(trial, judged)
        return met

    def spread(self, rung, met):
        """(n,) at the level's points, how the real use there compares with the typical one of its piece, damped."""
        surface = self.ladder.levels[rung].surface
        number, piece = met.network.pieces
        each = np.empty(len(piece))
        for index, one in enumerate(met.judged):
            typical = np.sqrt(np.mean(one.each**2))
            each[piece == index] = np.clip(one.each / max(typical, 1e-9), 0.5, 3.0)
        corners = surface.triangles[met.network.source].ravel()
        area = np.repeat(areas(met.network.surface), 3)
        n = len(surface.points)
        mean = np.bincount(corners, area * np.repeat(each, 3), minlength=n) / np.bincount(corners, area, minlength=n)
        return mean**DAMPED

    def worst(self, rung, met):
        """(P,) the level's point at the worst place of every piece."""
        triangles = self.ladder.levels[rung].surface.triangles[met.network.source]
        number, piece = met.network.pieces
        at = [np.flatnonzero(piece == index)[one.each.argmax()] for index, one in enumerate(met.judged)]
        return triangles[at, 0]

    def piece_of_region(self, rung, state, met):
        """(K,) the piece that most of every region's triangle corners lie in."""
        labels, count = state.cut.labels, len(state.use)
        corners = labels[self.ladder.levels[rung].surface.triangles[met.network.source]]
        number, piece = met.network.pieces
        votes = np.zeros((count, number))
        np.add.at(votes, (corners.ravel(), np.repeat(piece, 3)), 1)
        return votes.argmax(axis=1)

    def dropped(self, met, limit=ENOUGH, fully=True, halves=True):
        """(Tailored, what was left out): seam chains dropped, longest first, while the piece they leave is a disk, within
        the limit and not over itself; then halves of chains, so that darts are left. On a symmetric form a chain goes
        together with its mirror image. What was left out: for each the places (3, 3) of its begin, middle and end."""
        refused, spare = {}, []
        self.typical = self.foresight(met)
        while True:
            chains = sorted(met.network.chains, key=lambda chain: -_length(met.network, chain))
            for chain in chains + [half for whole in chains if halves for half in _halves(whole)]:
                key, whole = _key(chain), refused.get(_key(_whole(chain, chains)), 0.0)
                if key in refused or whole > HOPELESS:
                    continue
                group = self.with_images(met.network, chain)
                trial, use = self.without(met, group, limit, fully)
                if use == np.inf and len(group) > 1:  # of the two seams of a sleeve one has to stay
                    group = [chain]
                    trial, use = self.without(met, group, limit, fully)
                refused.update((_key(one), use) for one in group)
                if trial is not None:
                    spare += [_places(met.network, one) for one in group]
                    met = trial
                    break
            else:
                return met, spare

    def foresight(self, met):
        """The real use over the foreseen one, low among the pieces: what is foreseen at that rate will hardly be less."""
        rates = [one.utilisation / max(piece_use(met.network.piece_surface(piece)[0], self.search.reach), 1e-9)
                 for piece, one in enumerate(met.judged)]
        return float(np.quantile(rates, 0.25))

    def with_images(self, network, chain):
        """The chain, or half of one, and its mirror images, each once."""
        group = [chain]
        for plane in self.planes:
            group += [twin for twin in (twin_stretch(network, plane, one) for one in group) if twin is not None]
        return group

    def without(self, met, group, limit, fully):
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
        worst = 0.0
        for new in dict.fromkeys(now[first] for first in firsts):
            part = trial.part_surface(np.flatnonzero(now == new))[0]
            if not _is_disk(part):
                return None, np.inf
            if self.typical * piece_use(part, self.search.reach) > HOPELESS:
                return None, np.inf
            try:
                judged[new] = self.judge(part, fully)
            except CoverError:
                return None, np.inf
            worst = max(worst, judged[new].utilisation)
            if judged[new].crossings or worst > limit:
                return None, worst
        return Tailored(trial, judged), worst


def lobes(part, one):
    """(2,) two points of a piece that lie on each other in the flat: those farthest apart along its outline."""
    outline = part.boundary_loops[0]
    pairs = np.array(one.crossings)
    way = np.abs(pairs[:, 1] - pairs[:, 0])
    return outline[pairs[np.argmax(np.minimum(way, len(outline) - way))]]


def _halves(chain):
    """The two halves of a chain, each from its end inward, if it is long enough to leave a dart."""
    middle = len(chain) // 2
    return [chain[: middle + 1], chain[middle:]] if len(chain) >= 8 and chain[0] != chain[-1] else []


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


def _piece_at(network, place):
    """The piece nearest to a place (3,)."""
    near = np.linalg.norm(network.surface.points - place, axis=1).argmin()
    return network.pieces[1][np.argmax((network.surface.triangles == near).any(axis=1))]


def _without_nearest(network, places):
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
