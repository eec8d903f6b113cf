"""A network with the verdict on every piece of it, and who gives the verdicts."""

from dataclasses import dataclass, replace

from .judge import SENSELESS, judge
from .resigned import resigned

ENOUGH = 1.0  # real use of the limits that counts as fitting
SHAPED, SHAPED_WOVEN = 0.93, 0.65  # full shaping brings the use down to about this share of what the first stage reaches
FAR = 4.0  # use after the first stage of shaping that more shaping cannot mend


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
        """True when no piece is beyond its limits or over itself."""
        return self.use <= ENOUGH and not any(one.crossings for one in self.judged)

    @property
    def rank(self):
        """Length, dearer the farther the worst piece is beyond its limits, and for every piece over itself."""
        over = sum(bool(one.crossings) for one in self.judged)
        return self.network.length() * max(1.0, self.use / ENOUGH) ** 3 * (1 + over)


class Judges:
    """Judge pieces for the same goods, comfort and grain, and remember what they said."""

    def __init__(self, goods, comfort, grain=None):
        self.goods, self.comfort, self.grain = goods, comfort, grain
        self.known = {}

    def piece(self, surface, fully, senseless=SENSELESS):
        """Judged for one piece: shaped for the goods fully, or so far that the rest can be foreseen. Remembered.

        What fits, or is far from fitting, after the first stage of shaping is not shaped further. What lies over itself is
        laid apart only where it asks no more than `senseless` of the limits.
        """
        key = (fully, senseless, surface.points.tobytes(), surface.triangles.tobytes())
        if key not in self.known:
            share = 1.0 if fully else SHAPED if self.goods.shear is None else SHAPED_WOVEN
            common = surface, self.goods, self.comfort, self.grain
            one = judge(*common, stages=1, senseless=ENOUGH if fully else min(SENSELESS, senseless / share))
            if fully and (one.crossings or one.utilisation > ENOUGH) and one.utilisation < FAR:
                one = judge(*common, stages=None, senseless=senseless)
            if fully and one.utilisation > ENOUGH:
                one = resigned(surface, one, self.goods, self.comfort, self.grain)
            self.known[key] = replace(one, utilisation=one.utilisation * share)
        return self.known[key]

    def all(self, network, fully):
        """Tailored for a Network, every piece judged."""
        return Tailored(network, [self.piece(network.piece_surface(k)[0], fully) for k in range(network.pieces[0])])
