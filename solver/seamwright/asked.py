"""Wishes held against the form: what cannot be is refused in a sentence, what is left is shared out among its parts."""

import numpy as np
from scipy.spatial import cKDTree

from .errors import WishError
from .form.measure import total_area
from .form.mirror import NEAR, measured, planes, reflection
from .pattern import Pattern

KEPT = 0.01  # of the form's size: a network that is this near to its mirror image is symmetric
LOPSIDED = 0.1  # difference of seam prices on the two sides of a plane from which they count as unlike


def check(form, wishes):
    """Refuse wishes that this form cannot be given, and those that this version cannot do, rather than leave them undone."""
    later = {"held": wishes.held, "shut": wishes.shut, "only": wishes.only}
    for name, value in later.items():
        if value is not None:
            raise WishError(f"{name}: not offered yet. Leave it out; keep_clear, pieces, thrift and start are there.")
    _check_start(form, wishes.start)
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
    labels = np.asarray(start)
    if labels.shape != (form.face_count,):
        raise WishError(f"start: {labels.size} labels for a form of {form.face_count} faces. Give one for each face.")
    if labels.dtype.kind not in "biuf" or not np.isfinite(labels).all():
        raise WishError("start: labels must be numbers. Give every face the number of its piece.")


def prices_allow(form, part, price, never):
    """Refuse a part that needs seams and may have none. price (n,) at its points, never: what counts as no seam there."""
    surface = part.surface
    if (price >= never).all() and (surface.euler != 1 or len(surface.boundary_loops) != 1):
        raise WishError(f"keep_clear: seams may never be anywhere on '{form.name}', and without a seam it cannot lie flat. "
                        "Leave a place for seams.")


def planes_of(part, price, wishes, network=None):
    """List of Planes of symmetry that a part's network is to keep.

    The maker's own where they hold for the part; else those found, unless the seam prices (n,) or the network to start from
    are lopsided themselves.
    """
    if isinstance(wishes.symmetry, str):
        found = [] if wishes.symmetry == "none" else planes(part.surface)
        return [plane for plane in found if _unlike(part.surface, plane, price) < LOPSIDED
                and (network is None or _keeps(network, plane))]
    size = np.sqrt(total_area(part.surface))
    own = [measured(part.surface, point, normal) for point, normal in wishes.symmetry]
    own = [plane for plane in own if plane.error <= NEAR * size]
    for plane in own:
        if _unlike(part.surface, plane, price) >= LOPSIDED:
            raise WishError("keep_clear and symmetry: the weights are not alike on the two sides of a plane. Paint them "
                            "alike, or leave symmetry at \"auto\".")
    return own


def _unlike(surface, plane, price):
    return np.abs(reflection(surface, plane) @ price - price).max()


def _keeps(network, plane):
    """Whether a network's seams lie on their own mirror image, within an edge or so."""
    edges = network.surface.edges[network.seam]
    middles = network.surface.points[edges].mean(axis=1)
    if not len(middles):
        return True
    reach = max(KEPT * np.sqrt(network.surface_area), 2 * network.surface.edge_lengths.mean())
    return cKDTree(middles).query(plane.mirrored(middles))[0].max() < reach


def shared_out(form, parts, pieces):
    """List with the wished number of pieces of every part, Nones without a wish: as many each, what is over to the largest.

    (What a part needs is a matter of its curvature, not of its area.)
    """
    if pieces is None:
        return [None] * len(parts)
    if pieces < len(parts):
        raise WishError(f"pieces: {pieces} for a form of {len(parts)} parts that are not joined. Wish for {len(parts)} or "
                        "more.")
    if pieces > form.face_count:
        raise WishError(f"pieces: {pieces} for a form of {form.face_count} faces. Wish for fewer.")
    each, more = divmod(int(pieces), len(parts))
    larger = np.argsort([-total_area(part.surface) for part in parts], kind="stable")[:more]
    return [each + (number in larger) for number in range(len(parts))]
