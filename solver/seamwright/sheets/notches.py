"""Notches: marks across the allowance that show where two sides of a seam meet."""

from dataclasses import dataclass
from math import ceil, radians

import numpy as np

SPACING = 125.0
"""Millimetres between notches on an easy seam [common practice: 100-150]."""
TIGHT_SPACING = 45.0
"""Millimetres between notches where the seam turns tightly [common practice: 30-60]."""
TIGHT_RADIUS = 150.0
"""A seam whose mean radius of turning, in mm, is less than this counts as tight (our choice)."""
DOUBLE_GAP = 5.0
"""Millimetres between the two ticks of a double notch."""
SLIT_DEPTH = 4.0
"""Deepest slit in mm; never more than half the allowance [common practice: 3-4 mm]."""
PEN_TICK = 4.0
"""Length in mm of a pen tick where there is no allowance to cross."""
FREE_THREADS = radians(20)
"""Cloth that shears this far is uncoated and takes a slit; leather, vinyl, knits and foam tear from one and get a tick."""


@dataclass(frozen=True)
class Notch:
    """One tick on one side of a seam: `at` (2,) on the stitch line in mm, `outward` normal, `share` of the seam's path."""

    seam: str
    at: np.ndarray
    outward: np.ndarray
    share: float


def takes_slits(goods):
    """True when notches may be cut into the allowance of these goods."""
    return goods.shear is not None and goods.shear[1] >= FREE_THREADS and goods.allowance > 0


def seam_notches(seam, lines, normals):
    """Two lists of Notch, one a side, the mates at the same point of the form; empty for an open edge.

    lines: the seam on each side, (q, 2) mm on the stitch line; normals: (q - 1, 2) outward, one for each step of it. The
    first notch is double, and a lone one stands off the middle, so that a seam matched the wrong way round shows. A closed
    seam has at least its quarter points.
    """
    if seam.open:
        return [], []
    places = path_places(seam.path) * 1000
    nudge = DOUBLE_GAP / 2 / places[-1]
    shares = []
    plain = _shares(seam.path, places[-1], max(_turning(line) for line in lines))
    for order, share in enumerate(_with_ends_of_ease(plain, seam.eased, places[-1])):
        shares += [share] if order else [share - nudge, share + nudge]
    return tuple([Notch(seam.name, *_at(line, normal, places, share), share) for share in shares]
                 for line, normal in zip(lines, normals, strict=True))


def _with_ends_of_ease(shares, eased, length):
    """The shares with one at either end of the ease [common practice], in the place of any that is near."""
    ends = [share for share in eased or () if 0 < share < 1]
    return sorted([share for share in shares if all(abs(share - end) * length > 2 * DOUBLE_GAP for end in ends)] + ends)


def _shares(path, length, turning):
    closed = len(path) > 2 and np.allclose(path[0], path[-1])
    spacing = TIGHT_SPACING if turning > 0 and length / turning < TIGHT_RADIUS else SPACING
    count = max(ceil(length / spacing), 4 if closed else 1)
    return [0.4] if count == 2 else [k / count for k in range(1, count)]


def path_places(path):
    """(q,) length along a path (q, any) up to each of its points, in its own unit."""
    return np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])


def _at(line, normals, places, share):
    wanted = share * places[-1]
    k = int(np.clip(np.searchsorted(places, wanted, side="right") - 1, 0, len(line) - 2))
    step = places[k + 1] - places[k]
    t = (wanted - places[k]) / step if step > 0 else 0.0
    return line[k] + t * (line[k + 1] - line[k]), normals[k]


def _turning(line):
    """Total turning of a polyline, radians, read off some 20 chords so that the mesh's own small zigzag does not count."""
    places = path_places(line)
    at = np.linspace(0, places[-1], min(len(line), 20))
    coarse = np.column_stack([np.interp(at, places, line[:, k]) for k in (0, 1)])
    heading = np.unwrap(np.arctan2(*np.diff(coarse, axis=0).T[::-1]))
    return float(np.abs(np.diff(heading)).sum())
