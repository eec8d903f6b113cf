"""Strain energy that knows the goods: steep beyond what they take along warp, weft and bias, flat within.

With alpha and beta the map from form to flat (see `flat.rest`), everything follows from ln|alpha| and w = beta/conj(alpha):
warp log strain ln|1 + w| - ln|alpha| - ln(1 - |w|^2), weft the same with 1 - w, shear atan2(2 Im w, 1 - |w|^2); and the
log tensor m + (Q, conj Q) with m = -ln|alpha| - ln(1 - |w|^2)/2, Q = -atanh(|w|) w/|w|, real part weft less warp.
Signs as everywhere: strain is form over flat.
"""

import numpy as np


class GoodsEnergy:
    """Sum over channels of (cosh(k x) - 1) / k^2, where a channel x is a strain over its limit times `level`.

    Woven goods have three channels (warp, weft, shear); others four (the two principal stretches against their limits,
    the two principal ease-ins), each counted where positive. Beyond k x = k + 1 the cosh goes on as its parabola, so that
    a needle cannot outweigh the piece. Methods as in `flat.strain`; the Hessian is Gauss-Newton's.
    """

    def __init__(self, goods, comfort, exponent, level):
        self.warp, self.weft, self.ease_in, self.shear = (limit and limit * level for limit in goods.limits(comfort))
        self.exponent = exponent

    def density(self, alpha, beta):
        """(t,) energy per area; infinite where a triangle is flipped."""
        inside = np.abs(alpha) > np.abs(beta)
        log, w = log_and_ratio(np.where(inside, alpha, 1.0), np.where(inside, beta, 0.0))
        return np.where(inside, self._steep(self._values(log, w))[0].sum(axis=0), np.inf)

    def first(self, alpha, beta):
        """Gradients with respect to alpha and beta, two (t,) complex."""
        values, at_alpha, at_beta, _ = self._channels(alpha, beta)
        slope = self._steep(values)[1]
        return (slope * at_alpha).sum(axis=0), (slope * at_beta).sum(axis=0)

    def second(self, alpha, beta):
        """Gauss-Newton's Hessian, as in `flat.strain`; for principal stretches with the turning of their directions."""
        values, at_alpha, at_beta, turning = self._channels(alpha, beta)
        _, slope, bend = self._steep(values)
        if turning:
            radius, turn_alpha, turn_beta = turning
            apart = np.abs(slope[::2] - slope[1::2]) / np.maximum(radius, 1e-9)
            bend = np.concatenate([bend, np.where(radius > 1e-9, apart, bend[::2] + bend[1::2])])
            at_alpha, at_beta = np.concatenate([at_alpha, turn_alpha]), np.concatenate([at_beta, turn_beta])
        return bend, at_alpha, at_beta

    def used(self, log, w):
        """(t,) largest channel, utilisation over `level`, from `log_and_ratio` of a flat piece."""
        return np.abs(self._values(log, w)).max(axis=0)

    def _values(self, log, w):
        """(c, t) channels; those of principal stretches positive or 0."""
        left = 1 - np.abs(w) ** 2
        if self.shear is not None:
            warp, weft, shear = _threads(log, w, left)
            warp, weft = (e / np.where(e > 0, limit, self.ease_in) for e, limit in ((warp, self.warp), (weft, self.weft)))
            return np.stack([warp, weft, shear / self.shear])
        size = np.abs(w)
        middle, spread = log - 0.5 * np.log(left), -np.arctanh(size) * w / np.maximum(size, 1e-300)
        weft, warp = (middle + spread.real) / self.weft, (middle - spread.real) / self.warp
        mean, radius = 0.5 * (weft + warp), np.hypot(0.5 * (weft - warp), spread.imag / np.sqrt(self.warp * self.weft))
        eased, apart = -middle / self.ease_in, np.abs(spread) / self.ease_in
        return np.maximum(np.stack([mean + radius, mean - radius, eased - apart, eased + apart]), 0)

    def _steep(self, x):
        """(cosh(k x) - 1) / k^2 with its first and second derivative, all over e^k."""
        k = self.exponent
        top = 1 + 1 / k
        held = np.clip(x, -top, top)
        over = x - held
        up, down = np.exp(k * (held - 1)), np.exp(k * (-held - 1))
        bend = 0.5 * (up + down)
        slope = 0.5 * (up - down) / k
        return (bend - np.exp(-k)) / k**2 + over * (slope + 0.5 * over * bend), slope + over * bend, bend * (x != 0)

    def _channels(self, alpha, beta):
        """Values (c, t), gradients with respect to alpha and beta, (c, t) complex, and how directions turn, or None."""
        log, w = log_and_ratio(alpha, beta)
        left = 1 - np.abs(w) ** 2

        def back(by_log, by_w):
            # d ln|alpha| = Re(d alpha / alpha); d w = d beta / conj(alpha) - w d conj(alpha) / conj(alpha)
            return (-by_log - by_w.conj() * w) / alpha.conj(), by_w / alpha

        if self.shear is not None:
            values, by_log, by_w = self._woven(log, w, left)
            return values, *back(by_log, by_w), None
        values, by_log, by_w, radius, turn_log, turn_w = self._principal(log, w, left)
        return values, *back(by_log, by_w), (radius, *back(turn_log, turn_w))

    def _woven(self, log, w, left):
        """Warp, weft and shear over their limits, with their derivatives by the log and by w."""
        warp, weft, shear = _threads(log, w, left)
        share = [1 / np.where(e > 0, limit, self.ease_in) for e, limit in ((warp, self.warp), (weft, self.weft))]
        share = np.stack([*share, np.full_like(log, 1 / self.shear)])
        by_w = np.stack([1 / (1 + w).conj() + 2 * w / left, -1 / (1 - w).conj() + 2 * w / left,
                         (2j * left + 4 * w.imag * w) / (4 * w.imag**2 + left**2)])
        return share * np.stack([warp, weft, shear]), share * np.array([[1.0], [1.0], [0.0]]), share * by_w

    def _principal(self, log, w, left):
        """Eigenvalues of the log tensor over the stretch limits, and of its negative over that of ease-in.

        Larger and smaller of each, with derivatives by the log and by w; then the half difference of each pair and the
        derivatives of the direction across it, which it takes to turn the pair.
        """
        r2 = np.abs(w) ** 2
        r = np.sqrt(r2)
        small = r2 < 1e-6
        h = np.where(small, 1 + r2 / 3, np.arctanh(r) / np.where(small, 1, r))
        bend = np.where(small, 2 / 3 + 0.8 * r2, (1 / left - h) / np.where(small, 1, r2))
        middle, spread = log - 0.5 * np.log(left), -h * w

        def by_log_and_w(by_middle, by_spread):
            return by_middle, by_middle * w / left - h * by_spread - bend * (by_spread.conj() * w).real * w

        values, rows, radii, turns = [], [], [], []
        for warp, weft, sign in ((1 / self.warp, 1 / self.weft, 1), (1 / self.ease_in, 1 / self.ease_in, -1)):
            both, half, mixed = 0.5 * (weft + warp), 0.5 * (weft - warp), np.sqrt(weft * warp)
            mean, across, along = both * middle + half * spread.real, half * middle + both * spread.real, mixed * spread.imag
            radius = np.hypot(across, along)
            c, s = np.where(radius > 0, across / np.where(radius > 0, radius, 1), 1), along / np.where(radius > 0, radius, 1)
            for side in (1, -1):
                value = sign * (mean + side * radius)
                on = sign * (value > 0)
                values.append(np.maximum(value, 0))
                rows.append(by_log_and_w(on * (both + side * half * c), on * (half + side * (both * c + 1j * mixed * s))))
            radii.append(radius)
            turns.append(by_log_and_w(-s * half, -s * both + 1j * mixed * c))
        by_log, by_w = (np.stack(part) for part in zip(*rows, strict=True))
        turn_log, turn_w = (np.stack(part) for part in zip(*turns, strict=True))
        return np.stack(values), by_log, by_w, np.stack(radii), turn_log, turn_w


def log_and_ratio(alpha, beta):
    """(-ln|alpha|, w): sizing the flat piece up by a factor takes its log from the first, turning it by t turns w by 2t."""
    return -np.log(np.abs(alpha)), beta / alpha.conj()


def _threads(log, w, left):
    """Log strain of warp and weft, and the shear, radians; left is 1 - |w|^2."""
    smaller = log - np.log(left)
    return smaller + np.log(np.abs(1 + w)), smaller + np.log(np.abs(1 - w)), np.arctan2(2 * w.imag, left)
