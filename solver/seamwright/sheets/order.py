"""The order in which seams are closed."""

import numpy as np


def sewing_order(seams):
    """List of seam names: darts first, then seams that join parts, straight ones before closed rings and short before long,
    each part growing as it is sewn; last the seams that close what is already one, the longest at the very end.

    The cutting room's usual order (common practice).
    """
    sewn = [seam for seam in seams if not seam.open]
    part = {}

    def root(name):
        while part.setdefault(name, name) != name:
            name = part[name]
        return name

    def key(seam):
        return bool(np.array_equal(seam.path[0], seam.path[-1])), _length(seam), seam.name

    darts = sorted((s for s in sewn if s.dart), key=key)
    joining, closing = [], []
    for seam in sorted((s for s in sewn if not s.dart), key=key):
        a, b = (root(name) for name, _ in seam.sides)
        if a == b:
            closing.append(seam)
        else:
            part[b] = a
            joining.append(seam)
    return [seam.name for seam in (*darts, *joining, *closing)]


def _length(seam):
    return float(np.linalg.norm(np.diff(seam.path, axis=0), axis=1).sum())
