"""A network on a level with what it costs, and its flow downhill with the topology put right."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from .cut import cut_by_fields, recut
from .descend import descend
from .energy import evaluate
from .fields import redistance
from .panels import attached, carried, fused, panels
from .starts import tidied

SLIDES = (4.0, -4.0, 2.0, -2.0)  # edge lengths that a dart's end is moved on in a trial
MOST_SLIDES = 6  # of each kind
COARSE = 3000  # most points of a level where that is tried: on a finer one the ends are about right
REPAIRS = 3  # flows, as long as regions had to be put right after the last
PIECE_PRICE = 0.02  # fixed price of a piece, or specks pay
DART_PRICE = 0.03  # fixed price of the end of a dart, or dashed seams pay


@dataclass
class Found:
    """cut and cost on a level; score = total + the price of the pieces and darts; converged: the flow came to rest."""

    level: object
    cut: object
    cost: object
    converged: bool = True

    @cached_property
    def count(self):
        """Number of pieces."""
        if self.cut.uncut is None:
            return int(self.cut.labels.max()) + 1
        return len(panels(self.level.surface, self.cut.labels, self.cut.uncut).disk)

    @property
    def score(self):
        """Total and the price of the pieces and of the darts."""
        return self.cost.total + PIECE_PRICE * self.count + DART_PRICE * len(self.cut.end.face)

    @cached_property
    def fields(self):
        """(n, K) signed distances from the regions' borders."""
        return redistance(self.level, self.cut, int(self.cut.labels.max()) + 1)


def flow(level, fields, thrift, energy="square", steps=20, emphasis=None, uncut=None):
    """Flow, then put the topology right (disks, no specks), and flow again as long as that changed it. Returns Found.

    uncut (K, K) bool: pairs of regions that are of one piece, None for none.
    """
    cut, changed = in_order(level, cut_by_fields(level.surface, fields, level.labels(fields), uncut))
    for _ in range(REPAIRS):
        if changed:
            fields = redistance(level, cut, int(cut.labels.max()) + 1)
        end = descend(level, fields, thrift, energy, steps=steps, emphasis=emphasis, uncut=cut.uncut)
        cut, changed = in_order(level, end.cut)
        if len(cut.end.face) and len(level.mass) <= COARSE:
            cut, cost = slid(level, cut, thrift, energy, emphasis)
            changed = changed or cost is not None
        if not changed:
            return Found(level, cut, end.cost, end.converged)
    return settle(level, cut, cut.labels, thrift, energy, end.converged, cut.uncut)


def slid(level, cut, thrift, energy, emphasis=None):
    """(Cut with the ends of darts moved on or back, its total or None if none moved).

    From face to face the total has small steps, as the mesh does not resolve what happens around an end; the descent stops
    at them, so here an end is tried a little farther on and a little farther back, for as long as that gains.
    """
    best, moved = evaluate(level, cut, thrift, energy, gradient=False, emphasis=emphasis).total, None
    for number in range(len(cut.end.face)):
        for slide in SLIDES:
            for _ in range(MOST_SLIDES):
                if number >= len(cut.end.face):
                    break
                fields = redistance(level, cut, len(cut.uncut))
                for beyond, gap in _ends(level, cut, number):
                    length = slide * level.edge_length
                    fields[:, beyond] -= length * np.exp(-0.5 * (gap / length) ** 2)
                trial, _ = in_order(level, cut_by_fields(level.surface, fields, level.labels(fields), cut.uncut))
                if trial.uncut is None or len(trial.end.face) != len(cut.end.face):
                    break
                total = evaluate(level, trial, thrift, energy, gradient=False, emphasis=emphasis).total
                if total >= best:
                    break
                cut, best, moved = trial, total, total
    return cut, moved


def _ends(level, cut, number):
    """List of (the region beyond, (n,) the distance from it) for the end of a dart and its mirror images."""
    surface, face, corner = level.surface, cut.end.face[number], cut.end.corners[number, 2]
    found = [(cut.labels[surface.triangles[face, corner]], surface.points[surface.triangles[face]].mean(axis=0))]
    for mirror in level.symmetry.mirrors if level.symmetry is not None else ():
        twins = mirror.partners(cut.labels, len(cut.uncut))
        images = [(twins[beyond], mirror.plane.mirrored(place[None])[0]) for beyond, place in found]
        found += [image for image, one in zip(images, found, strict=True)
                  if np.linalg.norm(image[1] - one[1]) > level.edge_length]
    return [(beyond, np.linalg.norm(surface.points - place, axis=1)) for beyond, place in found]


def in_order(level, cut):
    """(Cut whose pieces are disks and no specks, whether it differs)."""
    labels, uncut = cut.labels, cut.uncut
    if uncut is not None:
        labels = attached(level.surface, cut)
    labels = tidied(level, labels)
    if uncut is not None:
        labels, uncut = fused(level, labels, carried(level, uncut, cut.labels, labels))
    same = np.array_equal(labels, cut.labels) and (uncut is cut.uncut or np.array_equal(uncut, cut.uncut))
    return (cut, False) if same else (recut(level.surface, cut, labels, uncut), True)


def settle(level, cut, labels, thrift, energy="square", converged=True, uncut=None):
    """Found for labels (n,) that differ from a cut's own in places."""
    cut = recut(level.surface, cut, labels, uncut)
    return Found(level, cut, evaluate(level, cut, thrift, energy, gradient=False), converged)
