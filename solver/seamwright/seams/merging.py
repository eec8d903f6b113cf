"""Merges that keep every region a disk, and the network symmetric where it is to be."""

import numpy as np

from .cut import recut
from .energy import borders, evaluate
from .symmetric import alike
from .topology import regions


def unions(level, labels):
    """List of (K,) arrays, for every merge of two neighbours whose union is a disk the region that each becomes part of;
    longest border first."""
    tables = regions(level, labels)
    found = {}
    for at in np.argsort(-tables.border, kind="stable"):
        i, j = tables.pairs[at]
        if level.symmetry is not None:
            root = alike(level, level.symmetry, labels, i, j)
        else:
            root = np.where(np.arange(len(tables.euler)) == j, i, np.arange(len(tables.euler)))
            root = root if tables.pair_euler[at] == 1 else None
        if root is not None:
            found.setdefault(root.tobytes(), root)
    return list(found.values())


def joined(labels, root):
    """Labels (n,) after the merge `root` (K,), numbered without a gap."""
    return np.unique(root, return_inverse=True)[1].ravel()[labels]


def merges(level, labels):
    """Labels (n,) after every merge, longest border first, one at a time."""
    for root in unions(level, labels):
        yield joined(labels, root)


class Merging:
    """What merges would cost, as their regions' numbers change from one merge to the next.

    The distortion of a union is its own affair, so unions that share no region are evaluated together, and kept. count: of
    regions to begin with.
    """

    def __init__(self, level, thrift, energy, count):
        self.level, self.thrift, self.energy = level, thrift, energy
        self.parts, self.known = [frozenset([region]) for region in range(count)], {}

    def merge(self, root):
        """Tell that the merge `root` (K,) was made."""
        self.parts = [frozenset().union(*(self.parts[k] for k in np.flatnonzero(root == one))) for one in np.unique(root)]

    def gains(self, cut, cost, roots):
        """List with the rise of distortion + thrift * length for each merge, to first order at junctions."""
        groups = [_groups(root) for root in roots]
        self._evaluate(cut, [group for one in groups for group in one])
        border = borders(self.level, cut)
        return [sum(self.known[self._key(group)] - cost.each[group].sum()
                    - self.thrift * 0.5 * border[np.ix_(group, group)].sum() for group in one) for one in groups]

    def _key(self, group):
        return frozenset().union(*(self.parts[region] for region in group))

    def _evaluate(self, cut, groups):
        wanted = {self._key(group): group for group in groups if self._key(group) not in self.known}
        while wanted:
            taken, root, batch = set(), np.arange(len(self.parts)), []
            for key, group in wanted.items():
                if taken.isdisjoint(group.tolist()):
                    taken.update(group.tolist())
                    root[group] = group[0]
                    batch.append((key, group[0]))
            number = np.unique(root, return_inverse=True)[1].ravel()
            trial = recut(self.level.surface, cut, number[cut.labels])
            each = evaluate(self.level, trial, self.thrift, self.energy, gradient=False).each
            for key, first in batch:
                self.known[key] = each[number[first]]
                del wanted[key]


def _groups(root):
    """List of (q,) regions that become one."""
    return [np.flatnonzero(root == one) for one in np.unique(root) if (root == one).sum() > 1]
