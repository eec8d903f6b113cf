"""Merges that keep every region a disk, and the network symmetric where it is to be."""

import numpy as np

from .symmetric import merged_alike
from .topology import merged, regions


def merges(level, labels):
    """Labels (n,) after every merge of two neighbours whose union is a disk, longest border first, one at a time."""
    tables = regions(level, labels)
    order = np.argsort(-tables.border, kind="stable")
    met = set()
    for at in order:
        i, j = tables.pairs[at]
        if level.symmetry is not None:
            trial = merged_alike(level, level.symmetry, labels, i, j)
        else:
            trial = merged(labels, i, j) if tables.pair_euler[at] == 1 else None
        if trial is not None and trial.tobytes() not in met:
            met.add(trial.tobytes())
            yield trial
