"""Colours: a published colour-blind-safe set for pieces, a published perceptually uniform diverging map for stretch."""

import numpy as np

PIECES = ("#E69F00", "#56B4E9", "#009E73", "#F0E442", "#0072B2", "#D55E00", "#CC79A7")
"""The set of Okabe and Ito, Color Universal Design (2008), without its black. [from memory]"""

VIK = np.array([
    (0, 18, 97), (2, 43, 113), (3, 68, 129), (12, 94, 146), (48, 125, 166), (97, 158, 189), (148, 190, 210), (198, 219, 230),
    (236, 229, 224), (233, 202, 184), (219, 170, 141), (207, 140, 102), (194, 112, 65), (178, 81, 29), (145, 45, 6),
    (115, 20, 6), (89, 0, 8)], dtype=float)
"""Every sixteenth colour of the map "vik" (Crameri, Scientific colour maps, version 8, doi:10.5281/zenodo.1243862, MIT
licence), read from its table of 256: blue for slack through pale to orange-brown for strain."""


def piece_colour(order):
    """Hex colour of the piece in place `order`, in turn."""
    return PIECES[order % len(PIECES)]


def stretch_colour(share):
    """Hex colours of a list of shares from -1 (most slack) through 0 to 1 (most strained); beyond is held at the ends."""
    place = (np.clip(share, -1, 1) + 1) / 2 * (len(VIK) - 1)
    rgb = np.column_stack([np.interp(place, np.arange(len(VIK)), VIK[:, k]) for k in range(3)])
    return ["#{:02X}{:02X}{:02X}".format(*row) for row in np.rint(rgb).astype(int)]
