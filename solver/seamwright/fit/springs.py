"""Springs along the seams: they pull both sides of every stretch of a seam to one length."""

import numpy as np
from scipy.sparse import csr_matrix

SPACING = 0.1
"""Metres between the marks that must meet, at most an eighth of the seam: about the trade's distance of notches."""
LEAST, MOST = 8, 16
"""Stretches of a seam."""


class Gaps:
    """Every joint cut into stretches, whose sides differ by a gap: the log of the length of one side over the other.

    joints: (points (q,), points (q,)) a seam, both ways along it; points (n, 3) on the form. ends (j,): the number of
    stretches up to the end of each joint; count of all.
    """

    def __init__(self, points, joints):
        tails, heads, stretches, sides, self.ends, self.count = [], [], [], [], [], 0
        for one, other in joints:
            stretch = self.count + _stretches(points[one])
            self.count = int(stretch[-1]) + 1
            self.ends.append(self.count)
            for side, path in ((1, one), (-1, other)):
                tails.append(path[:-1])
                heads.append(path[1:])
                stretches.append(stretch)
                sides.append(np.full(len(stretch), side))
        self.tail, self.head, self.stretch, self.side = (np.concatenate(part) for part in (tails, heads, stretches, sides))

    def sizes(self, flat):
        """((s,) gaps, (q, 2) points of every side, (q,) complex derivative of its stretch's gap by its second point)."""
        step = flat[self.head] - flat[self.tail]
        length = np.abs(step)
        one, other = (np.bincount(self.stretch, length * (self.side == side), self.count) for side in (1, -1))
        pull = self.side * step / length / np.where(self.side > 0, one[self.stretch], other[self.stretch])
        return np.log(one / other), np.column_stack([self.tail, self.head]), pull


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


def _stretches(path):
    """(q - 1,) number of the stretch, from 0, that each side of a path (q, 3) lies in: about equal lengths, none empty."""
    steps = np.linalg.norm(np.diff(path, axis=0), axis=1)
    number = int(np.clip(steps.sum() / SPACING, LEAST, MOST))
    stretch = np.minimum(((np.cumsum(steps) - 0.5 * steps) / steps.sum() * number).astype(int), number - 1)
    return np.cumsum(np.concatenate([[0], np.diff(stretch) > 0]))
