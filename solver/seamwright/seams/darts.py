"""Darts come and go: a stretch of a seam is left out where that pays, a dart where it does not.

So two pieces become one with a seam that ends inside it, and where it ends is then for the flow to find (see `panels`).
"""

from itertools import islice

import numpy as np
from scipy.sparse.csgraph import connected_components, dijkstra

from ..errors import CoverError
from ..flat import flatten, overlaps
from .fields import redistance
from .flow import flow, settle, slid
from .network import cut_through
from .panels import fused, panels
from .topology import graph_within

BLUR = 0.4  # length over which u is evened out to tell how useful a stretch of seam is, on the levels' scale
OPENED = 0.12  # share of half a ring of seam that is left out at first; the flow widens it
LEAST = 12  # points on both sides of a seam under which it is too short to leave out part of it
WORSE = 1.05  # times the score, above which a trial is not worth a flow
TRIED = 6  # most trials that flow
ENOUGH = 2  # of them that serve, unless all of those lie over themselves
STEPS = 8  # of their flow
ROUGHLY = 1e-2  # share of its energy to which a piece is flattened to see whether it lies over itself


def opened_up(level, found, thrift, energy="square", pieces=None):
    """The Found with stretches of seam left out, as long as that lowers the score (or comes nearer to the wished number of
    pieces) and no piece comes to lie over itself."""
    def rank(one):
        return 0 if pieces is None else abs(one.count - pieces), one.score

    while True:
        ahead, onward = _ahead(level, found, rank, thrift, energy), None
        while onward is None and (some := list(islice(ahead, ENOUGH))):
            onward = _lengthened(level, found, sorted(some, key=rank), rank, thrift, energy)
        if onward is None:
            return found
        found = onward


def _ahead(level, found, rank, thrift, energy):
    """Yield flowed networks with a stretch of seam left out that rank before a Found, the most promising first."""
    use = level.diffusion(BLUR).solve(level.mass * np.abs(found.cost.u))
    trials = [settle(level, found.cut, labels, thrift, energy, uncut=uncut)
              for labels, uncut in openings(level, found.cut, use) if panels(level.surface, labels, uncut).disk.all()]
    trials = sorted((trial for trial in trials if trial.score < WORSE * found.score), key=lambda trial: trial.score)
    for trial in trials[:TRIED]:
        flowed = flow(level, trial.fields, thrift, energy, steps=STEPS, uncut=trial.cut.uncut, slides=False)
        if rank(flowed) < rank(found):
            yield flowed


def _lengthened(level, found, trials, rank, thrift, energy):
    """The first of the trials, the ends of its darts slid, that ranks before a Found and lies flat; None for none."""
    for trial in trials:
        either, cut = [trial], slid(level, trial.cut, thrift, energy)
        if cut is not trial.cut:
            fields = redistance(level, cut, len(cut.uncut))
            either.append(flow(level, fields, thrift, energy, steps=STEPS, uncut=cut.uncut, slides=False))
        for one in sorted(either, key=rank):
            if rank(one) < rank(found) and lies_flat(level, one.cut):
                return one
    return None


def lies_flat(level, cut):
    """Whether the pieces around darts can be laid flat and none of them lies over itself then."""
    network = cut_through(level, cut, 1.0)
    one, other = network.pieces[1][network.surface.edge_triangles[network.seam]].T
    for piece in np.unique(one[one == other]):
        part = network.piece_surface(piece)[0]
        try:
            flat = flatten(part, ROUGHLY).flat
        except CoverError:
            return False
        if overlaps(flat, part.boundary_loops[0]):
            return False
    return True


def closed_up(level, found, thrift, energy="square"):
    """The Found without the darts whose loss lowers the score."""
    while found.cut.uncut is not None:
        labels, uncut = found.cut.labels, found.cut.uncut
        piece = panels(level.surface, labels, uncut).piece
        trials = [found]
        for i, j in np.argwhere(np.triu((piece[:, None] == piece) & ~uncut, 1)):
            fewer = uncut.copy()
            fewer[i, j] = fewer[j, i] = True
            at, left = fused(level, labels, fewer)
            trials.append(settle(level, found.cut, at, thrift, energy, found.converged, left))
        best = min(trials, key=lambda trial: trial.score)
        if best is found:
            break
        found = best
    return found


def openings(level, cut, use):
    """Yield (labels, uncut) after a stretch of one seam is left out, for every seam and either end of it.

    Of a seam that runs around it is left out where `use` (n,), what the points beside a seam gain by it, is least.
    """
    labels, surface = cut.labels, level.surface
    count = int(labels.max()) + 1
    old = np.zeros((count, count), dtype=bool) if cut.uncut is None else cut.uncut
    ends = np.sort(labels[surface.edges], axis=1)
    for i, j in np.unique(ends[ends[:, 0] != ends[:, 1]], axis=0):
        if old[i, j] or (level.symmetry is not None and _seen_before(level, labels, i, j)):
            continue
        inside = np.flatnonzero((labels == i) | (labels == j))
        between = surface.edges[(ends == (i, j)).all(axis=1)]
        for far in _stretches(level, labels, np.unique(between), use):
            yield _opened(level, labels, old, _nearest(level, inside, np.unique(between), far))


def _seen_before(level, labels, i, j):
    """Whether a pair of regions is the mirror image of one with smaller numbers."""
    for twins in level.symmetry.partners(labels, int(labels.max()) + 1):
        if tuple(sorted((twins[i], twins[j]))) < (i, j):
            return True
    return False


def _stretches(level, labels, band, use):
    """Yield points (k,) of the `band` (q,) beside a seam along which it is left out."""
    surface = level.surface
    graph = graph_within(level, band)
    component = connected_components(graph, directed=False)[1]
    touched = np.zeros(len(labels), dtype=bool)  # beside a third region or an open edge
    ends = labels[surface.edges]
    for side in (0, 1):
        other = ~np.isin(ends[:, 1 - side], np.unique(labels[band]))
        touched[surface.edges[other, side]] = True
    touched |= ~level.free
    for part in range(component.max() + 1):
        own = np.flatnonzero(component == part)
        if len(own) < LEAST:
            continue
        if touched[band[own]].any():
            first = own[dijkstra(graph, indices=own[0])[own].argmax()]
            way = dijkstra(graph, indices=first)[own]
            yield band[own[way > 0.5 * way.max()]]
            yield band[own[way < 0.5 * way.max()]]
        else:
            first = int(own[use[band[own]].argmin()])
            way = dijkstra(graph, indices=first)[own]
            second = int(own[np.abs(way - 2 / 3 * way.max()).argmin()])
            third = int(own[np.minimum(way, dijkstra(graph, indices=second)[own]).argmax()])
            for middle in dict.fromkeys([first, second, third, *_on_planes(level, graph, band, own, use)]):
                way = dijkstra(graph, indices=middle)[own]
                yield band[own[way < OPENED * way.max()]]


def _on_planes(level, graph, band, own, use):
    """Places in the band, one for each time it comes to a plane of symmetry: there what is left out is its own image."""
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        near = own[np.isin(band[own], mirror.near)]
        part = connected_components(graph[near][:, near], directed=False)[1]
        for number in range(part.max(initial=-1) + 1):
            there = near[part == number]
            yield int(there[use[band[there]].argmin()])


def _nearest(level, inside, band, far):
    """(k,) points of `inside` that are nearer to the points `far` than to others of the band."""
    number = np.full(len(level.mass), -1)
    number[inside] = np.arange(len(inside))
    _, _, source = dijkstra(graph_within(level, inside), indices=number[band], min_only=True,
                            return_predecessors=True)
    return inside[np.isin(source, number[far])]


def _opened(level, labels, uncut, opened):
    """(labels, uncut) with the points `opened` a region of one piece with those it came from; symmetric where due."""
    count, new = int(labels.max()) + 1, labels.copy()
    taken = np.zeros(len(labels), dtype=bool)
    taken[opened] = True
    images = [taken]
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        for one in list(images):
            image = one[mirror.image]
            shared = image & np.any(images, axis=0)
            if 2 * shared.sum() > image.sum():
                images = [one | image if (one & image).any() else one for one in images]
            else:
                images.append(image)
    sources = []
    for number, one in enumerate(images):
        sources.append(np.unique(labels[one & (new == labels)]))
        new[one & (new < count)] = count + number
    size = count + len(images)
    found = np.zeros((size, size), dtype=bool)
    found[:count, :count] = uncut
    for number, source in enumerate(sources):
        of_one = uncut[source].any(axis=0)
        of_one[source] = True
        found[count + number, :count] = found[:count, count + number] = of_one
    return new, found
