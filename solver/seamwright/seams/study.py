"""The energy of a partition that is given: for study, comparison and tests."""

import numpy as np
from scipy.sparse import coo_matrix

from ..errors import WishError
from ..form.laplacian import smoothed_defects
from ..form.measure import total_area
from .cut import cut_by_fields
from .energy import evaluate
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
