"""Put the pattern together: pieces and seams with their names, verdicts measured anew, the sewing order."""

from math import ceil

import numpy as np

from . import pattern as pt
from .fit.measure import measure
from .seams.sides import joints
from .sheets.order import sewing_order

LETTERS = "ABCDEFGHJKLMNPQRSTUVWXYZ"  # no I and O: on a cutting table they read as one and nought


def assemble(form, goods, wishes, tailored, notes):
    """Pattern from the Tailored of every part of the form."""
    pieces, seams = [], []
    for part in tailored:
        network = part.network
        names = [piece_name(len(pieces) + k) for k in range(network.pieces[0])]
        for k, name in enumerate(names):
            pieces.append(_piece(name, network, k, part.judged[k], goods, wishes))
            if part.judged[k].crossings:
                notes.append(f"Piece {name} lies over itself in the flat; split it with a seam.")
        by_name = dict(zip(names, pieces[-len(names):], strict=True))
        seams += [_seam(joint, network, names, by_name) for joint in joints(network)]
    _name(seams)
    notes += _strain(pieces, goods) + _ease(seams, goods)
    from . import __version__

    return pt.Pattern(form, goods, pieces, seams, sewing_order(seams), notes, {"comfort": wishes.comfort}, __version__)


def _strain(pieces, goods):
    """List with a sentence on the strained pieces, or none."""
    strained = sorted((piece for piece in pieces if piece.fit == pt.STRAINED), key=lambda piece: -piece.beyond)
    if not strained:
        return []
    worst = strained[0]
    x, y, z = 1000 * (worst.points[worst.triangles].mean(axis=1)[worst.utilisation.argmax()])
    named = ", ".join(piece.name for piece in strained[:8]) + (", ..." if len(strained) > 8 else "")
    head = f"Piece {named} is" if len(strained) == 1 else f"{len(strained)} of {len(pieces)} pieces ({named}) are"
    return [
        f"{head} strained: {100 * worst.beyond:.1f} % of {worst.name} is beyond what {goods.name} takes, most near "
        f"({x:.0f}, {y:.0f}, {z:.0f}) mm. Goods that take more would help, or a rounder form there, or a seam of your own."
    ]


def _ease(seams, goods):
    """List with a sentence on the seams whose sides differ by more than the goods can be sewn with, or none."""
    most = goods.mismatch[1]
    uneven = sorted((seam for seam in seams if abs(seam.ease) > most), key=lambda seam: -abs(seam.ease))
    if not uneven:
        return []
    named = ", ".join(seam.name for seam in uneven[:8]) + (", ..." if len(uneven) > 8 else "")
    return [
        f"The sides of {len(uneven)} of {len(seams)} seams ({named}) differ by more than the {100 * most:g} % that {goods.name} "
        f"can be eased, {uneven[0].name} by {100 * abs(uneven[0].ease):.1f} %: goods that take more, or more seams, would help."
    ]


def piece_name(index):
    """A, B, ... Z, A2, B2, ..."""
    turn = index // len(LETTERS)
    return LETTERS[index % len(LETTERS)] + (str(turn + 1) if turn else "")


def _piece(name, network, index, judged, goods, wishes):
    surface, _, triangles = network.piece_surface(index)
    flat = judged.flat - judged.flat.min(axis=0)
    measured = measure(surface.points, surface.triangles, flat, goods, wishes.comfort)
    return pt.Piece(
        name, surface.points, flat, surface.triangles, network.source[triangles], surface.boundary_loops[0],
        measured.stretch, measured.warp_weft_shear, measured.utilisation, measured.fit, measured.beyond, goods.grain_free,
    )


def _seam(joint, network, names, by_name):
    path = network.surface.points[joint.chain]
    left = (names[joint.left.piece], joint.left.points)
    right = (None, joint.left.points) if joint.right is None else (names[joint.right.piece], joint.right.points)
    lengths = tuple(0.0 if name is None else _flat_length(by_name[name], along) for name, along in (left, right))
    return pt.Seam("", path, (left, right), lengths, joint.dart)


def _flat_length(piece, along):
    return float(np.linalg.norm(np.diff(piece.flat[along], axis=0), axis=1).sum())


def _name(seams):
    """Seams S1, S2, ... and hems H1, H2, ..., with enough digits to sort."""
    for letter, chosen in (("S", [s for s in seams if not s.open]), ("H", [s for s in seams if s.open])):
        digits = ceil(np.log10(len(chosen) + 1)) if chosen else 1
        for number, seam in enumerate(chosen, 1):
            seam.name = f"{letter}{number:0{digits}d}"
