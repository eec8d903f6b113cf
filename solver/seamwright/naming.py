"""Names of the pieces: a letter each, the largest first; mirrored pieces share a letter and are left and right.

Left and right are the maker's who stands in front of the form (at -y, looking along +y, z up): +x is on the right. Where a
plane of symmetry holds the x direction its sides are front and back (+y is the back), where it holds y too, lower and upper.
"""

import numpy as np

from .form.measure import areas
from .seams.twins import twin_pieces

LETTERS = "ABCDEFGHJKLMNPQRSTUVWXYZ"  # no I and O: on a cutting table they read as one and nought
SIDES = (("left", "right"), ("front", "back"), ("lower", "upper"))
LEAST = 0.1  # part of a plane's normal along an axis from which that axis tells its sides apart


def named(networks, planes):
    """(names, order, sets) for the pieces of several Networks, each with its list of mirror Planes.

    names: of all pieces, one network's after the other's. order: the same pieces by name, largest first. sets: lists of the
    names of pieces that are mirror images of each other.
    """
    sets, first = [], 0
    for network, mirrors in zip(networks, planes, strict=True):
        sets += [{first + piece: words for piece, words in one.items()} for one in _sets(network, mirrors)]
        first += network.pieces[0]
    area = np.concatenate([_areas(network) for network in networks])
    # six figures: mirror images count alike, and rounding elsewhere does not change the letters
    sets.sort(key=lambda one: (-float(f"{np.mean(area[list(one)]):.6g}"), min(one)))
    names, order, alike = [""] * first, [], []
    for number, one in enumerate(sets):
        members = sorted(one, key=lambda piece: one[piece])
        for piece in members:
            names[piece] = " ".join([letter(number), *one[piece]])
        order += members
        if len(members) > 1:
            alike.append([names[piece] for piece in members])
    return names, order, alike


def letter(index):
    """A, B, ... Z, A2, B2, ..."""
    turn = index // len(LETTERS)
    return LETTERS[index % len(LETTERS)] + (str(turn + 1) if turn else "")


def _areas(network):
    return np.bincount(network.pieces[1], areas(network.surface), minlength=network.pieces[0])


def _sets(network, planes):
    """List of {piece: words that tell it from its mirror images}, each piece in one of them."""
    count = network.pieces[0]
    root, words, taken = np.arange(count), [()] * count, []
    for plane in planes:
        axis = _axis(plane.normal, taken)
        taken.append(axis)
        twin, side = twin_pieces(network, plane)
        forward = side * (1 if plane.normal[axis] > 0 else -1)
        for piece in np.flatnonzero((twin >= 0) & (side != 0)):
            words[piece] += (SIDES[axis][int(forward[piece] > 0)],)
            root[root == root[twin[piece]]] = root[piece]
    sets = []
    for first in dict.fromkeys(root.tolist()):
        members = {int(piece): words[piece] for piece in np.flatnonzero(root == first)}
        clear = len(set(members.values())) == len(members) > 1
        sets += [members] if clear else [{piece: ()} for piece in members]
    return sets


def _axis(normal, taken):
    """The axis whose words tell a plane's sides apart: the first that is left and has a part in the normal."""
    left = [axis for axis in range(3) if axis not in taken]
    return next((axis for axis in left if abs(normal[axis]) > LEAST), left[0])
