"""What a patternmaker would refuse: each a number measured on a pattern, a limit, and a sentence where it is passed.

The limits are shares of the form's size, the square root of its area (of each connected part's own); they come from
trials on many forms, the least tip angle from cutting-room practice.
"""

from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree
from shapely.geometry import Polygon

from ..form.measure import areas
from ..form.mirror import NEAR, Plane
from ..form.mirror import measured as plane_through
from .bends import sharpest_bends
from .bulges import metres_on_bulges
from .seen import Seen

STEP = 0.02  # resampling of a seam, and the reach over which its direction is taken, as a share of the size
STRIP = 0.035  # width under which a piece counts as narrow, as a share of the size
SMALL_FORM = 0.1  # share of the size that a strip's width never counts as more than: on small forms pieces are small
DETAILED = 8  # more tips than this make a detailed form, whose seams may wind more
HALVED = 0.01  # share of the size within which a plane that halves a part passes its middle
SMOOTH_JAG, DETAILED_JAG, EDGES_JAG = 1.012, 1.035, 1.10


@dataclass(frozen=True)
class Measure:
    """One predicate's outcome: name, the worst value met, its limit, whether it is refused, and then a sentence on where."""

    name: str
    value: float
    limit: float
    refused: bool
    sentence: str


def refused(pattern, planes=None):
    """List of sentences, one for each thing that a patternmaker would refuse; empty for a good pattern."""
    return [measure.sentence for measure in measured(pattern, planes) if measure.refused]


def measured(pattern, planes=None):
    """List of Measures of a Pattern, always the same ones in the same order. planes: mirror Planes it should keep to, by
    default those that it was made to keep."""
    seen = Seen(pattern)
    if planes is None:
        kept = pattern.details.get("planes", [])
        planes = [Plane(np.array(one["point"]), np.array(one["normal"]), one["error"]) for one in kept]
    found = [predicate(seen) for predicate in PREDICATES]
    return [*found, *(mirror_error(seen, plane) for plane in planes)]


def smallest_piece(seen, limit=0.01):
    """The smallest piece's share of its part's area."""
    share = seen.piece_area / seen.part_area[seen.piece_part]
    worst = int(share.argmin())
    return _least("smallest piece", share[worst], limit, f"Piece {seen.names[worst]} is a speck: {100 * share[worst]:.2g} "
                  "% of the form. Let a neighbour take it in.")


def broken_pieces(seen, limit=0):
    """How many pieces are no disks."""
    names = [name for name, disk in zip(seen.names, seen.disks, strict=True) if not disk]
    return _most("pieces that are no disks", len(names), limit,
                 f"Not one sheet with one outline: {', '.join(names)}. Cut open from edge to edge.")


def loose_seams(seen, limit=0):
    """How many bits of seam hang together with neither the rest of their part's seams nor its hems."""
    count = seen.loose_bits
    return _most("loose bits of seam", count, limit, f"{count} bits of seam are joined to no other seam. Drop or join them.")


def capped_tips(seen, limit=0, share=0.03, curvature=np.pi):
    """How many small caps: pieces under `share` of the area, without a hem, that hold more than `curvature`."""
    small = seen.piece_area < share * seen.part_area[seen.piece_part]
    bad = [seen.names[k] for k in np.flatnonzero(small & ~seen.hemmed) if seen.curvature(k) > curvature]
    return _most("caps on tips", len(bad), limit,
                 f"Caps on a tip: {', '.join(bad)}. Lead a seam through the tip instead of around it.")


def farthest_tip(seen, limit=0.04):
    """Distance from a tip of the form to the nearest seam or open edge, the largest."""
    if not len(seen.tips):
        return _most("tip off the seams", 0.0, limit, "")
    gap = seen.distances(seen.form.points[seen.tips]) / seen.size[seen.tip_part]
    worst = int(gap.argmax())
    return _most("tip off the seams", gap[worst], limit, f"The tip at {_place(seen.form.points[seen.tips[worst]])} is "
                 f"{_mm(gap[worst] * seen.size[seen.tip_part[worst]])} from the nearest seam. Lead a seam or a dart there.")


def jag(seen):
    """Length of all stitch lines over their length when resampled: in the flat, where relief of the form is no jag."""
    limit = EDGES_JAG if seen.along_edges else DETAILED_JAG if len(seen.tips) > DETAILED else SMOOTH_JAG
    whole, plain = seen.stitch_lengths(STEP)
    value = whole / plain if plain > 0 else 1.0
    return _most("jag", value, limit, f"The seams are {100 * (value - 1):.1f} % longer than smooth ones. Smooth them.")


def junction_angle(seen, limit=60.0):
    """The least angle between seams that meet, degrees."""
    return _sharpest("junction angle", [corner for corner in seen.corners(STEP) if corner.junction], limit)


def tip_angle(seen, limit=30.0):
    """The least angle at a corner of a piece, degrees, of those that other seams would avoid: where all corners at the place
    together leave so much to each of two or three."""
    corners, room = seen.corners(STEP), {}
    for corner in corners:
        room.setdefault(corner.node, []).append(corner.degrees)
    avoidable = [corner for corner in corners if sum(room[corner.node]) >= limit * min(3, len(room[corner.node]))]
    return _sharpest("tip angle", avoidable, limit)


def sharp_bend(seen, limit=60.0):
    """The sharpest turn of a seam within a short way, degrees: a hook or a jog, not the turn of a tip."""
    bends = sharpest_bends(seen)
    if not bends:
        return _most("sharp bend", 0.0, limit, "")
    worst = int(np.argmax([degrees for degrees, _ in bends]))
    degrees, way = bends[worst]
    return _most("sharp bend", degrees, limit, f"Seam {seen.seams[worst].name} turns by {degrees:.0f} degrees at once, "
                 f"{_mm(way)} from its start. Lead it straight.")


def on_bulges(seen, limit=0.02):
    """The share of all seams that runs over a bulge although a valley is right beside."""
    metres = metres_on_bulges(seen)
    share = metres.sum() / max(sum(seen.lengths), 1e-30)
    name = seen.seams[int(metres.argmax())].name if len(metres) else ""
    return _most("seam on a bulge", share, limit, f"{_mm(metres.sum())} of seam run over a bulge with a valley beside, most "
                 f"of it in {name}. Lead them through the valley.")


def shortest_link(seen, limit=0.04):
    """The shortest seam between two junctions."""
    links = [k for k in range(len(seen.seams)) if (seen.degree[seen.ends[k]] > 2).all()]
    share = np.array([seen.lengths[k] / seen.size[seen.seam_part[k]] for k in links])
    if not links:
        return _least("link between junctions", np.inf, limit, "")
    worst = int(share.argmin())
    return _least("link between junctions", share[worst], limit, f"Seam {seen.seams[links[worst]].name} is only "
                  f"{_mm(seen.lengths[links[worst]])} long, between two junctions. Let them meet in one.")


def dart_ends(seen, share=0.25):
    """How many darts end inside pieces, against a share of the tips; a seam on its own, around which a piece closes, has two
    ends that do not count."""
    count, limit = int((seen.degree[seen.ends] == 1).sum()) - 2 * seen.lone_pieces, max(1, int(share * len(seen.tips)))
    return _most("dart ends", count, limit, f"{count} darts end inside pieces; {limit} would do. Let a seam run through.")


def narrow_share(seen, limit=0.1):
    """The largest share of a piece that a strip's width does not fit into: what the eye or the goods ask, the wider one."""
    share = np.array([_narrow(seen, k) for k in range(len(seen.names))])
    worst = int(share.argmax())
    return _most("narrow share", share[worst], limit, f"{100 * share[worst]:.0f} % of piece {seen.names[worst]} is narrower "
                 f"than {_mm(_strip(seen, worst))}. Move its seams apart or let a neighbour take it in.")


def mirror_error(seen, plane, limit=0.005):
    """The largest distance of a seam from the mirror image of the seams, those of the parts that the plane halves.

    A form of revolution has more planes than the one given: the one through an axis and the middle of the seams will do.
    """
    halved = np.abs((seen.part_middle - plane.point) @ plane.normal) < HALVED * seen.size
    chosen = np.flatnonzero(halved[seen.seam_part])
    if not len(chosen):
        return _most("mirror error", 0.0, limit, "")
    size = float(np.sqrt(seen.part_area[halved].sum()))
    samples = np.concatenate([seen.resampled(k, 0.001) for k in chosen])
    gap = _mirror_gaps(samples, plane)
    if gap.max() > limit * size:
        others = [_mirror_gaps(samples, other) for other in _turned(seen, samples)]
        gap = min([gap, *others], key=np.max)
    worst = int(gap.argmax())
    return _most("mirror error", gap[worst] / size, limit, f"The seam at {_place(samples[worst])} is {_mm(gap[worst])} off "
                 "its mirror image. Hold seams alike on both sides.")


def _mirror_gaps(samples, plane):
    return cKDTree(samples).query(plane.mirrored(samples))[0]


def _turned(seen, samples):
    """Yield Planes of symmetry of a form of one part, through an axis of inertia and the middle of its seams."""
    if len(seen.size) != 1:
        return
    middle, surface = seen.part_middle[0], seen.form.surface
    off = surface.points[surface.triangles].mean(axis=1) - middle
    axes = np.linalg.eigh(off.T @ (off * areas(surface)[:, None]))[1].T
    for axis in axes:
        normal = np.cross(axis, samples.mean(axis=0) - middle)
        if np.linalg.norm(normal) > HALVED * seen.size[0]:
            plane = plane_through(surface, middle, normal)
            if plane.error <= NEAR * seen.size[0]:
                yield plane


PREDICATES = (smallest_piece, broken_pieces, loose_seams, capped_tips, farthest_tip, jag, sharp_bend, on_bulges,
              junction_angle, tip_angle, shortest_link, dart_ends, narrow_share)


def _sharpest(name, corners, limit):
    worst = min(corners, key=lambda corner: corner.degrees, default=None)
    if worst is None:
        return _least(name, np.inf, limit, "")
    return _least(name, worst.degrees, limit, f"Piece {worst.piece} has a corner of {worst.degrees:.0f} degrees at "
                  f"{_place(worst.point)}, under {limit:g}. Let its seams meet more squarely.")


def _narrow(seen, k):
    """Share of piece k's flat area that no disk of the strip's width inside it reaches."""
    piece, size = seen.pieces[k], seen.size[seen.piece_part[k]]
    outline = Polygon(piece.flat[piece.outline]).simplify(0.002 * size)
    if not outline.is_valid or not outline.area > 0:
        outline = outline.buffer(0)
    half = _strip(seen, k) / 2
    reached = outline.buffer(-half).buffer(half).intersection(outline)
    return 1 - reached.area / outline.area if outline.area > 0 else 1.0


def _strip(seen, k):
    """Metres under which piece k counts as narrow."""
    size, goods = seen.size[seen.piece_part[k]], seen.goods
    wanted = 0.0 if goods is None else goods.narrowest
    return max(STRIP * size, min(wanted, SMALL_FORM * size))


def _most(name, value, limit, sentence):
    bad = not value <= limit
    return Measure(name, float(value), float(limit), bad, sentence if bad else "")


def _least(name, value, limit, sentence):
    bad = not value >= limit
    return Measure(name, float(value), float(limit), bad, sentence if bad else "")


def _place(point):
    return "(" + ", ".join(f"{value:.3g}" for value in point) + ") m"


def _mm(metres):
    return f"{1000 * metres:.3g} mm"
