"""Where the flow begins: halves and quarters by the form's main planes, and cells of several sizes."""

import numpy as np

from .symmetric import symmetrised
from .topology import absorb, make_disks, regions, split_components, voronoi

CELLS = (2, 3, 4, 5, 7, 10)
SPECK = 0.01  # share of the form's area under which a region is no piece


def starts(level, cells=CELLS):
    """List of (n,) labels, every region a disk, none smaller than a speck."""
    points, mass = level.surface.points, level.mass
    off = points - (points * mass[:, None]).sum(0) / mass.sum()
    axes = np.linalg.eigh(off.T @ (off * mass[:, None]))[1].T  # shortest first
    sides = [(off @ axis > 0).astype(np.int64) for axis in axes]
    raw = [*sides, 2 * sides[0] + sides[1], 2 * sides[0] + sides[2], 2 * sides[1] + sides[2]]
    raw += [voronoi(level, count) for count in cells if count * 4 < len(points)]
    if level.symmetry is not None:
        raw += [mirror.right.astype(np.int64) for mirror in level.symmetry.mirrors]
    tidy = [tidied(level, labels) for labels in raw]
    return list({labels.tobytes(): labels for labels in tidy}.values())  # some of them are the same by now


def tidied(level, labels):
    """Labels whose regions are connected disks of a sensible size, symmetric where the level is to be."""
    labels = split_components(level.surface, level.united(labels))
    tables, speck = regions(level, labels), SPECK * level.mass.sum()
    if (tables.euler != 1).any():
        labels = make_disks(level, labels)
    if (tables.euler != 1).any() or tables.area.min() < speck:
        labels = absorb(level, labels, speck)
    if level.symmetry is None:
        return labels
    labels = symmetrised(level, level.symmetry, labels)
    return labels if level.patch is None else make_disks(level, level.united(labels))
