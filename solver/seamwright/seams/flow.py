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
MOST_SLIDES = 10  # of each end
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


def flow(level, fields, thrift, energy="square", steps=20, emphasis=None, uncut=None, slides=None):
    """Flow, then put the topology right (disks, no specks), and flow again as long as that changed it. Returns Found.

    uncut (K, K) bool: pairs of regions that are of one piece, None for none; slides: whether the ends of darts are slid, by
    default on a coarse level.
    """
    cut, changed = in_order(level, cut_by_fields(level.surface, fields, level.labels(fields), uncut))
    sliding = len(level.mass) <= COARSE if slides is None else slides
    for _ in range(REPAIRS):
        if changed:
            fields = redistance(level, cut, int(cut.labels.max()) + 1)
        end = descend(level, fields, thrift, energy, steps=steps, emphasis=emphasis, uncut=cut.uncut)
        cut, changed = in_order(level, end.cut)
        if sliding and len(cut.end.face):
            still, cut = cut, slid(level, cut, thrift, energy, emphasis)
            changed, sliding = changed or cut is not still, False
        if not changed:
            return Found(level, cut, end.cost, end.converged)
    return settle(level, cut, cut.labels, thrift, energy, end.converged, cut.uncut)


def slid(level, cut, thrift, energy, emphasis=None):
    """The Cut with the ends of darts moved on or back, itself if none was.

    From face to face the total has small steps, as the mesh does not resolve what happens around an end; the descent stops
    at them, so here an end is tried a little farther on and a little farther back, for as long as that gains.
    """
    def total(cut):
        return evaluate(level, cut, thrift, energy, gradient=False, emphasis=emphasis).total

    least, number, slides, last = total(cut), 0, 0, 0.0
    while number < len(cut.end.face):
        fields, ends = redistance(level, cut, len(cut.uncut)), _ends(level, cut, number)
        onward = [last] * (last != 0) + [slide for slide in SLIDES if slide not in (last, -last)]  # never straight back
        for slide in onward if slides < MOST_SLIDES * (number + 1) else ():
            shifted, length = fields.copy(), slide * level.edge_length
            for beyond, gap in ends:
                shifted[:, beyond] -= length * np.exp(-0.5 * (gap / length) ** 2)
            trial = in_order(level, cut_by_fields(level.surface, shifted, level.labels(shifted), cut.uncut))[0]
            if len(trial.end.face) == len(cut.end.face) and (reached := total(trial)) < least:
                cut, least, slides, last = trial, reached, slides + 1, slide
                break
        else:
            number, last = number + 1, 0.0
    return cut


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
