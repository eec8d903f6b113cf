"""Put the pattern together: pieces and seams with their names, verdicts measured anew, the sewing order."""

from math import ceil

import numpy as np

from . import pattern as pt
from .fit.measure import measure
from .fit.sizes import upright
from .fit.springs import eased
from .form.offset import carried
from .naming import named
from .seams.sides import joints
from .sheets.order import sewing_order

FAR = 2.0  # times the hard limits from which a place is told of, though its piece may not be strained by it
SPOT = 1e-6  # m2 of such places in a piece under which it is not


def assemble(form, neutral, goods, wishes, parts, notes):
    """Pattern from (Tailored, planes of symmetry) of every part of the form; neutral: the Surface their networks lie on."""
    names, order, alike = named([part.network for part, _ in parts], [planes for _, planes in parts])
    pieces, seams = [], []
    for part, _ in parts:
        network = part.network
        on_form = carried(network.surface, network.source, neutral, form.surface)
        own = names[len(pieces) : len(pieces) + network.pieces[0]]
        for k, name in enumerate(own):
            pieces.append(_piece(name, network, k, on_form, part.judged[k], goods, wishes))
            if part.judged[k].crossings:
                notes.append(f"Piece {name} lies over itself in the flat; split it with a seam.")
        by_name = dict(zip(own, pieces[-len(own):], strict=True))
        seams += [_seam(joint, on_form, own, by_name, goods.ease) for joint in joints(network)]
    pieces = [pieces[k] for k in order]
    _number(seams)
    notes += _strain(pieces, goods) + _far_beyond(pieces, goods) + _ease(seams, goods)
    from . import __version__

    details = _details(wishes, [plane for _, planes in parts for plane in planes], alike)
    return pt.Pattern(form, goods, pieces, seams, sewing_order(seams), notes, details, __version__)


def _details(wishes, planes, alike):
    """Plain data on how the pattern came about: wishes by name, planes of symmetry in metres, sets of mirrored pieces."""
    return {
        "comfort": float(wishes.comfort),
        "thrift": None if wishes.thrift is None else float(wishes.thrift),
        "energy": wishes.energy if isinstance(wishes.energy, str) else "own",
        "route": wishes.route,
        "pieces": None if wishes.pieces is None else int(wishes.pieces),
        "thickness_side": wishes.thickness_side,
        "seed": int(wishes.seed),
        "planes": [{"point": plane.point.tolist(), "normal": plane.normal.tolist(), "error": float(plane.error)}
                   for plane in planes],
        "mirrored": alike,
    }


def _strain(pieces, goods):
    """List with a sentence on the strained pieces, or none."""
    strained = sorted((piece for piece in pieces if piece.fit == pt.STRAINED), key=lambda piece: -piece.beyond)
    if not strained:
        return []
    worst = strained[0]
    x, y, z = 1000 * (worst.points[worst.triangles].mean(axis=1)[worst.utilisation.argmax()])
    names = ", ".join(piece.name for piece in strained[:8]) + (", ..." if len(strained) > 8 else "")
    head = f"Piece {names} is" if len(strained) == 1 else f"{len(strained)} of {len(pieces)} pieces ({names}) are"
    return [
        f"{head} strained: {100 * worst.beyond:.1f} % of {worst.name} is beyond what {goods.name} takes, most near "
        f"({x:.0f}, {y:.0f}, {z:.0f}) mm. Goods that take more would help, or a rounder form there, or a seam of your own."
    ]


def _far_beyond(pieces, goods):
    """List with a sentence on places that ask more than FAR times what the goods take, however small; or none."""
    found = {piece.name: piece for piece in pieces if piece.areas[piece.utilisation > FAR].sum() > SPOT}
    if not found:
        return []
    worst = max(found.values(), key=lambda piece: piece.utilisation.max())
    at = int(worst.utilisation.argmax())
    x, y, z = 1000 * worst.points[worst.triangles[at]].mean(axis=0)
    small = 1e6 * sum(piece.areas[piece.utilisation > FAR].sum() for piece in found.values())
    others = [name for name in found if name != worst.name]
    more = f", on {', '.join(others[:8])}{', ...' if len(others) > 8 else ''} too" if others else ""
    threads = worst.warp_weft_shear[at]
    asked = f"{100 * max(worst.stretch[at] if goods.shear is None else threads[:2], key=abs):+.0f} %"
    if goods.shear is not None:
        asked += f" along the threads and {np.degrees(abs(threads[2])):.0f} degrees of shear"
    return [
        f"Worst place: near ({x:.0f}, {y:.0f}, {z:.0f}) mm piece {worst.name} asks for {asked}, {worst.utilisation[at]:.1f} "
        f"times what {goods.name} takes. {small:.0f} mm2 ask for more than twice that{more}. Expect a pucker there: clip or "
        "ease it by hand, round the form, or run a seam there."
    ]


def _ease(seams, goods):
    """List with a sentence on the seams whose sides differ by more than the goods can be sewn with, or none."""
    most = goods.mismatch[1]
    uneven = sorted((seam for seam in seams if abs(seam.ease) > most), key=lambda seam: -abs(seam.ease))
    if not uneven:
        return []
    names = ", ".join(seam.name for seam in uneven[:8]) + (", ..." if len(uneven) > 8 else "")
    return [
        f"The sides of {len(uneven)} of {len(seams)} seams ({names}) differ by more than the {100 * most:g} % that "
        f"{goods.name} can be eased, {uneven[0].name} by {100 * abs(uneven[0].ease):.1f} %: goods that take more, or more "
        "seams, would help."
    ]


def _piece(name, network, index, on_form, judged, goods, wishes):
    surface, points, triangles = network.piece_surface(index)
    flat = upright(judged.flat, goods, goods.grain_free and wishes.grain is None)
    flat = flat - flat.min(axis=0)
    measured = measure(surface.points, surface.triangles, flat, goods, wishes.comfort)
    return pt.Piece(
        name, on_form[points], flat, surface.triangles, network.source[triangles], surface.boundary_loops[0],
        measured.stretch, measured.warp_weft_shear, measured.utilisation,
        pt.STRAINED if judged.crossings else measured.fit, measured.beyond, goods.grain_free,
        surface.points,
    )


def _seam(joint, on_form, names, by_name, ease):
    path = on_form[joint.chain]
    left = (names[joint.left.piece], joint.left.points)
    right = (None, joint.left.points) if joint.right is None else (names[joint.right.piece], joint.right.points)
    lengths = tuple(0.0 if name is None else _flat_length(by_name[name], along) for name, along in (left, right))
    run = None
    if ease > 0 and joint.right is not None:
        one, other = by_name[left[0]], by_name[right[0]]
        apart = 0 if one is other else len(one.points)
        both = [np.concatenate([a, b]) for a, b in ((one.neutral, other.neutral), (one.flat, other.flat))]
        run = eased(*both, left[1], right[1] + apart)
    return pt.Seam("", path, (left, right), lengths, joint.dart, run)


def _flat_length(piece, along):
    return float(np.linalg.norm(np.diff(piece.flat[along], axis=0), axis=1).sum())


def _number(seams):
    """Seams S1, S2, ... and hems H1, H2, ..., with enough digits to sort."""
    for letter, chosen in (("S", [s for s in seams if not s.open]), ("H", [s for s in seams if s.open])):
        digits = ceil(np.log10(len(chosen) + 1)) if chosen else 1
        for number, seam in enumerate(chosen, 1):
            seam.name = f"{letter}{number:0{digits}d}"
