"""Springs along the seams: they pull both sides of every stretch of a seam to one length."""

import numpy as np
from scipy.sparse import csr_matrix

SPACING = 0.1
"""Metres between the marks that must meet, at most an eighth of the seam: about the trade's distance of notches."""
EXACT = 5e-4
"""A stretch of seam whose sides differ by less is matched: 0.05 mm in 100."""
CLEAR = 0.025
"""Metres from a junction within which no seam is eased [common practice]."""
LEAST, MOST = 8, 16
"""Stretches of a seam."""


class Gaps:
    """Every joint cut into stretches, whose sides differ by a gap: the log of the length of one side over the other.

    joints: (points (q,), points (q,)) a seam, both ways along it; points (n, 3) on the form. ends (j,): the number of
    stretches up to the end of each joint; count of all; inner (s,) bool: stretches that keep clear of a seam's ends, and
    are not of a dart: where ease has its place; wanted (s,): gaps that are wanted, 0 until they are set.
    """

    def __init__(self, points, joints):
        tails, heads, stretches, sides, self.ends, self.count = [], [], [], [], [], 0
        inner = []
        for one, other in joints:
            stretch = self.count + _stretches(points[one])
            dart = one[0] == other[0] or one[-1] == other[-1]
            inner.append(_inner(points[one], stretch - self.count) & ~dart)
            self.count = int(stretch[-1]) + 1
            self.ends.append(self.count)
            for side, path in ((1, one), (-1, other)):
                tails.append(path[:-1])
                heads.append(path[1:])
                stretches.append(stretch)
                sides.append(np.full(len(stretch), side))
        self.tail, self.head, self.stretch, self.side = (np.concatenate(part) for part in (tails, heads, stretches, sides))
        self.inner, self.wanted = np.concatenate(inner), np.zeros(self.count)

    def sizes(self, flat):
        """((s,) gaps, (q, 2) points of every side, (q,) complex derivative of its stretch's gap by its second point)."""
        step = flat[self.head] - flat[self.tail]
        length = np.abs(step)
        one, other = (np.bincount(self.stretch, length * (self.side == side), self.count) for side in (1, -1))
        pull = self.side * step / length / np.where(self.side > 0, one[self.stretch], other[self.stretch])
        return np.log(one / other) - self.wanted, np.column_stack([self.tail, self.head]), pull

    def ease(self, flat, most):
        """(s,) the gaps that may stay, up to `most`: on the side of each seam that is longer in all, off its ends."""
        gap = self.sizes(flat)[0] + self.wanted
        length = np.bincount(self.stretch, np.abs(flat[self.head] - flat[self.tail]), self.count)
        found = np.zeros(self.count)
        for own in np.split(np.arange(self.count), self.ends[:-1]):
            side = np.sign(gap[own] @ length[own])
            found[own] = side * np.clip(side * gap[own], 0, most) * self.inner[own]
        return found


class Springs:
    """What acts on the gaps `beside` the strain of a State. stiffness: energy per square of a gap, times 2."""

    def __init__(self, gaps, stiffness):
        self.gaps, self.stiffness = gaps, stiffness

    def worth(self, flat):
        """Energy of the springs."""
        return 0.5 * self.stiffness * np.sum(self.gaps.sizes(flat)[0] ** 2)

    def slope(self, flat):
        """(n,) complex gradient."""
        gap, ends, pull = self.gaps.sizes(flat)
        slope = np.zeros(len(flat), dtype=complex)
        np.add.at(slope, ends, ((self.stiffness * gap)[self.gaps.stretch] * pull)[:, None] * [-1, 1])
        return slope

    def rows(self, flat):
        """The gaps as rows that resist change."""
        _, ends, pull = self.gaps.sizes(flat)
        entries = (pull[:, None] * [-1, 1]).ravel()
        rows = csr_matrix((entries, (np.repeat(self.gaps.stretch, 2), ends.ravel())), shape=(self.gaps.count, len(flat)))
        return rows, np.full(self.gaps.count, 1 / self.stiffness)


def eased(points, flat, one, other):
    """(begin, end) as shares of a seam's length, the run of stretches whose sides are not equally long; None without one.

    points (n, 3), flat (n, 2) of both pieces; one, other (q,) the points along the two sides.
    """
    gaps = Gaps(points, [(one, other)])
    uneven = np.flatnonzero(np.abs(gaps.sizes(flat[:, 0] + 1j * flat[:, 1])[0]) > EXACT)
    if not len(uneven) or not gaps.inner.any():
        return None
    steps = np.linalg.norm(np.diff(points[one], axis=0), axis=1)
    inside = (gaps.stretch[: len(steps)] >= uneven[0]) & (gaps.stretch[: len(steps)] <= uneven[-1])
    at = np.append(0.0, np.cumsum(steps)) / steps.sum()
    return float(at[:-1][inside][0]), float(at[1:][inside][-1])


def _inner(path, stretch):
    """(s,) bool: stretches of a path (q, 3) that keep CLEAR of its ends; all of a closed one."""
    steps = np.linalg.norm(np.diff(path, axis=0), axis=1)
    if np.array_equal(path[0], path[-1]):
        return np.ones(stretch[-1] + 1, dtype=bool)
    begin = (np.cumsum(steps) - steps)[np.searchsorted(stretch, np.arange(stretch[-1] + 1))]
    return (begin >= CLEAR) & (np.append(begin[1:], steps.sum()) <= steps.sum() - CLEAR)


def _stretches(path):
    """(q - 1,) number of the stretch, from 0, that each side of a path (q, 3) lies in: about equal lengths, none empty."""
    steps = np.linalg.norm(np.diff(path, axis=0), axis=1)
    number = int(np.clip(steps.sum() / SPACING, LEAST, MOST))
    stretch = np.minimum(((np.cumsum(steps) - 0.5 * steps) / steps.sum() * number).astype(int), number - 1)
    return np.cumsum(np.concatenate([[0], np.diff(stretch) > 0]))
