"""A network with the verdict on every piece of it, and who gives the verdicts."""

from dataclasses import dataclass, replace

import numpy as np

from .judge import SENSELESS, judge

ENOUGH = 1.0  # real use of the limits that counts as fitting
BEYOND = 2.0  # power of the use by which a piece beyond its limits makes the seam around it dearer: that much more is needed
KNOT = 2.0  # by how much a piece that lies over itself does
SHAPED, SHAPED_WOVEN = 0.93, 0.57  # full shaping brings the use down to about this share of what the first stage reaches
MENDED, MENDED_WOVEN = 1.25, 2.3  # times the limit: more use after the first stage than more shaping can mend


@dataclass
class Tailored:
    """network, judged: one Judged a piece, in the network's order."""

    network: object
    judged: list

    @property
    def use(self):
        """The largest real use of the limits."""
        return max(one.utilisation for one in self.judged)

    @property
    def fits(self):
        """True when no piece is beyond its limits or over itself, and no seam where there must be none."""
        barred = self.network.seam & ~self.network.allowed
        return self.use <= ENOUGH and not any(one.crossings for one in self.judged) and not barred.any()

    @property
    def rank(self):
        """Length of seam, dearer around a piece the farther it is beyond its limits, and where it lies over itself."""
        surface, (number, piece) = self.network.surface, self.network.pieces
        seam = np.flatnonzero(self.network.seam)
        around = np.zeros(number)
        for side in surface.edge_triangles[seam].T:
            np.add.at(around, piece[side[side >= 0]], 0.5 * surface.edge_lengths[seam[side >= 0]])
        dearer = [max(1.0, one.utilisation / ENOUGH) ** BEYOND * (KNOT if one.crossings else 1) for one in self.judged]
        return float(around @ dearer)


class Judges:
    """Judge pieces for the same goods, comfort and grain, and remember what they said."""

    def __init__(self, goods, comfort, grain=None):
        self.goods, self.comfort, self.grain = goods, comfort, grain
        self.known = {}

    def piece(self, surface, limit=ENOUGH, senseless=SENSELESS):
        """Judged for one piece. Remembered.

        What keeps the limit after the first stage of shaping is not shaped further, nor is what is far from it: its use is
        foreseen. What lies over itself is laid apart only where it asks no more than `senseless` of the goods' limits.
        """
        key = (limit, senseless, surface.points.tobytes(), surface.triangles.tobytes())
        if key not in self.known:
            woven = self.goods.shear is not None
            common = surface, self.goods, self.comfort, self.grain
            one = judge(*common, stages=1, senseless=min(limit, senseless))
            if one.utilisation > limit * (MENDED_WOVEN if woven else MENDED):
                one = replace(one, utilisation=one.utilisation * (SHAPED_WOVEN if woven else SHAPED))
            elif one.utilisation > limit and not (one.crossings and senseless <= 0):
                one = judge(*common, stages=None, start=one.flat, done=1, senseless=senseless)
            self.known[key] = one
        return self.known[key]

    def all(self, network):
        """Tailored for a Network, every piece judged."""
        return Tailored(network, [self.piece(network.piece_surface(k)[0]) for k in range(network.pieces[0])])
