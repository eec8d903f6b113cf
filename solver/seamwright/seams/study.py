"""The energy of a partition that is given: for study, comparison and tests."""

import numpy as np
from scipy.sparse import coo_matrix

from ..errors import WishError
from ..form.laplacian import Factor, cotangent_laplacian, smoothed_defects
from ..form.measure import open_points, total_area, vertex_areas
from ..form.nearest import closest_on_triangles
from ..form.surface import Surface
from .cut import cut_by_fields
from .energy import Cost, density, evaluate
from .fields import smoothed
from .level import Level, scaled


def log_scale(form, labels):
    """(n,) log scale u at the form's points of the least-stretch conformal flattening of a partition.

    labels (face_count,): the piece of every face. Seams run between the points of different pieces (see `seam_energy`).
    """
    level, cut = _cut(form, labels)
    return evaluate(level, cut, 0.0, "square", gradient=False).u


def seam_energy(form, labels, thrift=1.0, energy="square"):
    """(distortion, length, total) of a partition, on the form scaled to area 4 pi; total = distortion + thrift * length."""
    level, cut = _cut(form, labels)
    cost = evaluate(level, cut, thrift, energy, gradient=False)
    return cost.distortion, cost.length, cost.total


def network_cost(ladder, network, thrift, energy="square"):
    """Cost of an explicit Network of the Ladder's form, darts and slits included; u at its own points.

    Seams run along its edges, so u = 0 there. Load and price at points within the form's triangles are interpolated.
    """
    level = ladder.levels[-1]
    share = shares(level.surface, network, ladder.factor)
    corners = level.surface.triangles[network.source]
    surface = Surface(network.surface.points * ladder.factor, network.surface.triangles)
    load, price = (at_points(surface, corners, share, values) for values in (level.density, level.price))
    mass, fixed = vertex_areas(surface), open_points(surface)
    fixed[surface.edges[network.seam]] = True
    u, free = np.zeros(len(mass)), np.flatnonzero(~fixed)
    if len(free):
        u[free] = Factor(cotangent_laplacian(surface)[free][:, free].tocsc()).solve((load * mass)[free])
    pair = density(energy)
    distortion = 0.5 * float((load * mass) @ u) if pair is None else float(mass @ pair[0](u))
    length = float((surface.edge_lengths * price[surface.edges].mean(axis=1))[network.seam].sum())
    return Cost(distortion, length, distortion + thrift * length, u)


def shares(surface, network, factor):
    """(t, 3, 3) barycentric place of each corner of a Network's triangles in the Surface's triangle they come from.

    factor: lengths on the Surface over lengths of the Network.
    """
    places = network.surface.points[network.surface.triangles].reshape(-1, 3) * factor
    corners = surface.points[surface.triangles[np.repeat(network.source, 3)]]
    return closest_on_triangles(places, corners)[0].reshape(-1, 3, 3)


def at_points(fine, corners, share, values):
    """(n,) at the points of a Surface what values at points of another are there: its triangles' corners lie at shares
    (t, 3, 3) of triangles with corner points (t, 3)."""
    found = np.zeros(len(fine.points))
    found[fine.triangles] = (share * values[corners][:, None]).sum(axis=2)  # corners that meet in a point agree
    return found


def _cut(form, labels):
    labels = np.asarray(labels)
    if labels.shape != (form.face_count,):
        raise WishError(f"labels: {labels.size} for a form of {form.face_count} faces. Give one for each face.")
    if (labels != labels).any():
        raise WishError("labels: some are not a number. Give every face its piece.")
    numbers = np.unique(labels, return_inverse=True)[1].ravel()
    surface, _ = scaled(form.surface, total_area(form.surface))
    level = Level(surface, smoothed_defects(surface))
    # each piece's share of the area around every point: a seam along edges stays there, whatever the pieces' numbers
    at = surface.triangles.ravel(), np.repeat(numbers[form.polygon], 3)
    share = coo_matrix((np.repeat(level.areas / 3, 3), at)).toarray() / np.maximum(level.mass, 1e-30)[:, None]
    cut = cut_by_fields(surface, smoothed(level, share, 1.0))
    _refuse_closed(surface, cut)
    return level, cut


def _refuse_closed(surface, cut):
    """WishError where a connected part has neither seam nor open edge, so that nothing says how large it lies flat."""
    count, component = surface.triangle_components
    ends = surface.open_edges.copy()
    ends[cut.edge] = True
    sized = np.zeros(count, dtype=bool)
    sized[component[surface.edge_triangles[ends].max(axis=1)]] = True
    if not sized.all():
        first = np.flatnonzero(~sized[component])[0]
        raise WishError(f"labels: the part around triangle {first} is closed and all one piece, which cannot lie flat. "
                        "Give it at least two pieces.")
