"""Join pieces on the explicit mesh until there are as few as wished."""

import numpy as np

from ..errors import CoverError
from .spare import halves, with_images
from .tailored import Tailored


def joined(tailor, met, pieces):
    """The Tailored with seams left out, each time the one whose loss the goods feel least, until it has `pieces` pieces.

    It has more where no seam between two pieces can go: the piece that would be left were no disk or lay over itself.
    """
    while met.network.pieces[0] > pieces:
        trials = []
        for chain in met.network.chains:
            trials += [trial for trial in without(tailor, met, chain) if trial.network.pieces[0] >= pieces]
        if not trials:
            return met
        met = min(trials, key=lambda trial: (trial.use, trial.network.length()))
    return met


def without(tailor, met, chain):
    """Tailored without a chain, or where that leaves no disk without part of it (a dart is then left)."""
    for some in ([chain], halves(chain)):
        trials = [_trial(tailor, met, with_images(met.network, one, tailor.planes)) for one in some]
        trials = [trial for trial in trials if trial is not None]
        if trials:
            return trials
    return []


def _trial(tailor, met, group):
    """The Tailored without a group of chains, None where that joins no pieces or leaves what cannot be laid flat."""
    network = met.network
    for chain in group:
        network = network.without(chain)
    count, piece = network.pieces
    old = met.network.pieces[1]
    if count == met.network.pieces[0]:
        return None
    judged = []
    for new in range(count):
        inside = np.flatnonzero(piece == new)
        before = np.unique(old[inside])
        part = network.part_surface(inside)[0]
        if part.euler != 1 or len(part.boundary_loops) != 1:
            return None
        try:
            judged.append(met.judged[before[0]] if len(before) == 1 else tailor.judges.piece(part))
        except CoverError:
            return None
    trial = Tailored(network, judged)
    return None if any(one.crossings for one in judged) else trial
