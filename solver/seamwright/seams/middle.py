"""Where three seams meet within a face: near the point with the least way to its three cuts (Torricelli, 1640s).

With the mean of the cuts instead, seams would have to lengthen before their junction may leave the face, and junctions
stay where the mesh holds them. Torricelli's point has the shares 1 / (cot A + cot 60) in the triangle of the cuts, up to a
factor; beyond 120 degrees at a cut it is the cut itself.
"""

import numpy as np

ROUND = 0.05  # cotangents within which the change to a cut itself is rounded, so that the gradient is smooth
LEAST = 0.02  # share that every cut keeps, so that no sub-triangle vanishes
NEXT, LAST = [1, 2, 0], [2, 0, 1]  # the cut after each, and before


def shares(cuts, least=LEAST):
    """(k, 3) shares of the three cuts (k, 3, d), counter-clockwise around their face, in the place of its middle."""
    rounded = _rounded(*_cotangents(cuts)[:2])[0]
    weight = 1 / rounded
    return least + (1 - 3 * least) * weight / weight.sum(axis=1, keepdims=True)


def middles(cuts, least=LEAST):
    """(k, d) the middles."""
    return np.einsum("kc,kcd->kd", shares(cuts, least), cuts)


def pulled(cuts, pull):
    """(k, 3, 2) gradient by the cuts in the plane, from the gradient (k, 2) by the middle."""
    dot, twice, sides = _cotangents(cuts)
    rounded, rise = _rounded(dot, twice)
    weight = 1 / rounded
    total = weight.sum(axis=1, keepdims=True)
    share = weight / total
    own = np.einsum("kc,kcd->kd", share, cuts)
    gain = np.einsum("kd,kcd->kc", pull, cuts - own[:, None]) / total  # by each weight
    gain *= -(weight**2) * rise / twice  # by each corner's dot product; by twice the area it is - dot / twice of that
    ahead, back = sides  # to the next cut, to the one before
    answer = -gain[:, :, None] * (ahead + back)
    answer += (gain[:, :, None] * back)[:, LAST] + (gain[:, :, None] * ahead)[:, NEXT]
    across = cuts[:, NEXT] - cuts[:, LAST]
    turned = np.stack([across[..., 1], -across[..., 0]], axis=2)  # of twice the area by each cut
    answer -= (gain * dot).sum(axis=1)[:, None, None] / twice[:, :, None] * turned
    return (LEAST + (1 - 3 * LEAST) * share)[:, :, None] * pull[:, None] + (1 - 3 * LEAST) * answer


def _cotangents(cuts):
    """(dot (k, 3) of the sides at each cut, twice (k, 1) the area, the sides): cotangents are dot / twice."""
    ahead, back = cuts[:, NEXT] - cuts, cuts[:, LAST] - cuts
    dot = (ahead * back).sum(axis=2)
    a, b = ahead[:, :1], back[:, :1]
    twice = np.sqrt(np.maximum((a * a).sum(2) * (b * b).sum(2) - dot[:, :1] ** 2, 0))
    return dot, np.maximum(twice, 1e-12 * np.abs(dot).max(axis=1, keepdims=True) + 1e-300), (ahead, back)


def _rounded(dot, twice):
    """(cot + cot 60, kept above 0, (k, 3), its rise with the cotangent)."""
    x = dot / twice + 1 / np.sqrt(3)
    root = np.sqrt(x * x + ROUND**2)
    rounded = np.where(x > 0, (x + root) / 2, ROUND**2 / 2 / (root + np.abs(x)))
    return rounded, rounded / root
