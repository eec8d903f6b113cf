"""Wishes held against the form: what cannot be is refused in a sentence, what is left is shared out among its parts."""

import numpy as np
from scipy.spatial import cKDTree

from .errors import WishError
from .form.measure import open_points, total_area
from .form.mirror import NEAR, measured, planes, reflection
from .form.surface import Surface
from .pattern import Pattern
from .seams.network import Network
from .seams.whole import is_disk

KEPT = 0.01  # of the form's size: a network that is this near to its mirror image is symmetric
LOPSIDED = 0.1  # difference of seam prices on the two sides of a plane from which they count as unlike


def check(form, wishes):
    """Refuse wishes that this form cannot be given."""
    _check_start(form, wishes.start)
    _check_only(form, wishes)
    if not isinstance(wishes.symmetry, str):
        size = np.sqrt(total_area(form.surface))
        for number, (point, normal) in enumerate(wishes.symmetry):
            error = measured(form.surface, point, normal).error
            if error > NEAR * size:
                raise WishError(
                    f"symmetry: the form is no mirror image of itself about plane {number}: the sides differ by "
                    f"{1000 * error:.3g} mm, {100 * error / size:.2g} % of its size, and {100 * NEAR:g} % may be. "
                    "Move the plane, or leave symmetry at \"auto\"."
                )


def _check_start(form, start):
    if start is None:
        return
    if isinstance(start, Pattern):
        if start.form.triangles.shape != form.triangles.shape or (start.form.triangles != form.triangles).any():
            raise WishError(f"start: the pattern is of another form ('{start.form.name}'). Give one of this form, or labels "
                            "of its faces.")
        return
    if np.ndim(start) == 2:
        edges_asked(form, "start", start)
        return
    labels = np.asarray(start)
    if labels.shape != (form.face_count,):
        raise WishError(f"start: {labels.size} labels for a form of {form.face_count} faces. Give one for each face.")
    if labels.dtype.kind not in "biuf" or not np.isfinite(labels).all():
        raise WishError("start: labels must be numbers. Give every face the number of its piece.")


def _check_only(form, wishes):
    if wishes.only is None:
        return
    given = np.asarray(wishes.only)
    if given.shape != (form.face_count,):
        raise WishError(f"only: {given.size} values for a form of {form.face_count} faces. Give true or false for each "
                        "face.")
    if given.dtype.kind not in "bi" or not np.isin(given, (0, 1)).all():
        raise WishError("only: give true or false for each face.")
    if not given[form.polygon].any():
        raise WishError("only: it holds no face of the form, so there is nothing to cover. Give the faces to cover.")
    if wishes.start is not None:
        raise WishError("only and start: what is there is improved as a whole, and only a part is to be covered. Leave one "
                        "of them out.")


def edges_asked(form, name, pairs):
    """(k,) edges of the form's surface that pairs (k, 2) of the caller's points are, each once. Raises WishError."""
    pairs = np.asarray(pairs).reshape(-1, 2).astype(np.int64)
    outside = (pairs < 0) | (pairs >= len(form.point_of))
    if outside.any():
        raise WishError(f"{name}: point {pairs[outside][0]} is none of this form, whose points run from 0 to "
                        f"{len(form.point_of) - 1}. Give the ends of edges of this form.")
    ends = form.point_of[pairs]
    edges = np.where((ends >= 0).all(axis=1), form.surface.edge_index(ends), -1)
    wrong = np.flatnonzero((edges < 0) | form.diagonal[edges])
    if len(wrong):
        a, b = pairs[wrong[0]]
        more = f", and {len(wrong) - 1} more pairs are none either" if len(wrong) > 1 else ""
        raise WishError(f"{name}: points {a} and {b} are not the ends of an edge of '{form.name}'{more}. Give the ends of "
                        "edges that are there; a line across a face is none.")
    return np.unique(edges)


def held_edges(form, wishes, never):
    """(e,) bool: edges of the form's surface that are held seams. never (n,) bool: points where no seam may be."""
    surface = form.surface
    held = np.zeros(len(surface.edges), dtype=bool)
    if wishes.held is None:
        return held
    held[edges_asked(form, "held", wishes.held)] = True
    held &= ~surface.open_edges  # there the goods end anyway
    ends = surface.edges[held]
    barred = ends[never[ends].all(axis=1)]
    if len(barred):
        raise WishError(f"held and keep_clear: the edge from {_given(form, barred[0])} is a held seam where there may never "
                        "be one. Leave it out of held, or take the paint off it.")
    loose = (np.bincount(ends.ravel(), minlength=len(never)) == 1) & ~open_points(surface)
    alone = ends[loose[ends].all(axis=1)]
    if len(alone):
        raise WishError(f"held: the edge from {_given(form, alone[0])} is alone, and one edge within a piece opens nothing. "
                        "Hold an edge beside it too.")
    return held


def shut_edges(form, wishes, held):
    """(e,) bool: edges of the form's surface that may be no seams. held (e,) bool: those that are."""
    shut = np.zeros(len(form.surface.edges), dtype=bool)
    if wishes.shut is None:
        return shut
    shut[edges_asked(form, "shut", wishes.shut)] = True
    both = form.surface.edges[shut & held]
    if len(both):
        raise WishError(f"held and shut: the edge from {_given(form, both[0])} is wished to be a seam and to be none. Leave "
                        "it out of one of them.")
    return shut & ~form.surface.open_edges  # there nothing is sewn


def patches_allow(form, part):
    """Refuse a part in which shut edges leave no place for a seam that has to be."""
    for number in range(0 if part.patch is None else int(part.patch.max()) + 1):
        inside = part.patch == number
        if is_disk(part.surface, inside):
            continue
        ends = part.surface.edges[part.shut & inside[part.surface.edges].all(axis=1)]
        raise WishError(f"shut: the edges around {_point(form, part.points[ends[0, 0]])} close a ring, and what has no seam "
                        "cannot lie flat there. Leave some edges out, so that a seam finds a way through where no face is "
                        "beside a shut edge.")


def _given(form, pair):
    """'point a to point b', a pair of the form's points by the caller's numbers."""
    return " to ".join(_point(form, point) for point in pair)


def _point(form, point):
    """'point 7', one of the form's points by the caller's number."""
    return f"point {np.flatnonzero(form.point_of == point)[0]}"


def prices_allow(form, part, never):
    """Refuse a part that needs seams and may have none; never: a price that counts as no seam there."""
    count, component = part.surface.triangle_components  # opened along held seams it may be several
    for index in range(count):
        points, local = np.unique(part.surface.triangles[component == index], return_inverse=True)
        alone = Surface(part.surface.points[points], local.reshape(-1, 3))
        inner = part.price[points][~open_points(alone)]
        if not len(inner) or (inner < never).any() or (alone.euler == 1 and len(alone.boundary_loops) == 1):
            continue
        if count == 1 and not part.held.edges.any():
            raise WishError(f"keep_clear: seams may never be anywhere on '{form.name}', and without a seam it cannot lie "
                            "flat. Leave a place for seams.")
        raise WishError(f"held and keep_clear: seams may never be anywhere around {_point(form, part.points[points[0]])}, "
                        "and the held seams leave there what cannot lie flat without another. Leave a place for seams.")


def planes_of(part, wishes, network=None, given=None):
    """List of Planes of symmetry that a part's network is to keep.

    The maker's own where they hold for the part; else those found, unless the seam prices, the edges held or shut, the
    network to start from, or the triangles given (t,) bool to be covered alone are lopsided themselves.
    """
    sides = part.surface.edge_triangles
    border = np.zeros(len(sides), dtype=bool) if given is None else given[sides[:, 0]] != given[sides[:, 1]]
    border = Network(part.surface, border & ~part.surface.open_edges, None)
    held, shut = Network(part.held.surface, part.held.edges, None), Network(part.surface, part.shut, None)
    if isinstance(wishes.symmetry, str):
        found = [] if wishes.symmetry == "none" else planes(part.held.surface)
        return [plane for plane in found if _unlike(part.surface, plane, part.price) < LOPSIDED and _keeps(held, plane)
                and _keeps(shut, plane) and _keeps(border, plane) and (network is None or _keeps(network, plane))]
    size = np.sqrt(total_area(part.surface))
    own = [measured(part.surface, point, normal) for point, normal in wishes.symmetry]
    own = [plane for plane in own if plane.error <= NEAR * size]
    for plane in own:
        if _unlike(part.surface, plane, part.price) >= LOPSIDED:
            raise WishError("keep_clear and symmetry: the weights are not alike on the two sides of a plane. Paint them "
                            "alike, or leave symmetry at \"auto\".")
        for name, edges in (("held", held), ("shut", shut), ("only", border)):
            if not _keeps(edges, plane):
                raise WishError(f"{name} and symmetry: {name} is not alike on the two sides of a plane. Make it so, "
                                "or leave symmetry at \"auto\".")
    return own


def _unlike(surface, plane, price):
    return np.abs(reflection(surface, plane) @ price - price).max()


def _keeps(network, plane):
    """Whether a network's seams lie on their own mirror image, within an edge or so."""
    edges = network.surface.edges[network.seam]
    if not len(edges):
        return True
    middles = network.surface.points[edges].mean(axis=1)
    reach = max(KEPT * np.sqrt(network.surface_area), 2 * network.surface.edge_lengths.mean())
    return cKDTree(middles).query(plane.mirrored(middles))[0].max() < reach


def shared_out(form, parts, pieces):
    """List with the wished number of pieces of every part, Nones without a wish: as many each, what is over to the largest.

    (What a part needs is a matter of its curvature, not of its area.)
    """
    if pieces is None:
        return [None] * len(parts)
    least = [part.surface.triangle_components[0] for part in parts]
    if pieces < len(parts):
        raise WishError(f"pieces: {pieces} for a form of {len(parts)} parts that are not joined. Wish for {len(parts)} or "
                        "more.")
    if pieces < sum(least):
        raise WishError(f"pieces and held: {pieces} pieces, and the held seams alone part '{form.name}' into {sum(least)}. "
                        f"Wish for {sum(least)} or more, or hold less.")
    if pieces > form.face_count:
        raise WishError(f"pieces: {pieces} for a form of {form.face_count} faces. Wish for fewer.")
    areas = [total_area(part.surface) for part in parts]
    wanted = list(least)
    for _ in range(int(pieces) - sum(least)):
        wanted[min(range(len(parts)), key=lambda number: (wanted[number], -areas[number]))] += 1
    return wanted
