"""What a flattening will ask of the goods, foreseen from the log scale u alone (no flattening).

Measured on smooth forms: the worst principal log strain of the least-strain map is about 0.73 of the range of u, for wovens
the shear about 2.3 of it. A compass for the search, never the verdict.
"""

import numpy as np

from ..form.laplacian import Factor, cotangent_laplacian
from ..form.measure import angle_defects, open_points, vertex_areas

QUANTILE = 0.97  # share of a piece's area that is to keep the limits as foreseen: what tips ask beyond, darts give
STRAIN_SHARE = 0.73
SHEAR_SHARE = 1.17


def reach(goods, comfort):
    """The u that uses the goods' limits fully, at a comfort from 0 to 1."""
    warp, weft, ease_in, shear = goods.limits(comfort)
    plain = (min(warp, weft) + ease_in) / STRAIN_SHARE
    return plain if shear is None else max(plain, 0.5 * shear / SHEAR_SHARE)


def stretch_weight(reach):
    """Of a piece's distortion against seams of price 1, to begin with: the two then weigh alike on a quarter of a sphere."""
    return 4.0 / reach**2


def largest(level, labels, u):
    """(K,) the QUANTILE by area of |u| in every region."""
    return area_quantile(np.abs(u), level.mass, labels, int(labels.max()) + 1)


def piece_log_scale(surface):
    """(n,) log scale u of the least-stretch conformal flattening of one piece: Laplace u = K inside, 0 on its edge."""
    inner = ~open_points(surface)
    u = np.zeros(len(surface.points))
    if inner.any():
        laplacian = cotangent_laplacian(surface)[inner][:, inner]
        u[inner] = Factor(laplacian).solve(angle_defects(surface)[inner])
    return u


def piece_use(surface, reach):
    """The use of the limits foreseen for one piece; `reach` is the u that uses them fully."""
    u = np.abs(piece_log_scale(surface))
    return area_quantile(u, vertex_areas(surface), np.zeros(len(u), dtype=np.int64), 1)[0] / reach


def area_quantile(values, area, group, count):
    """(count,) by group the smallest value that QUANTILE of the group's area does not exceed."""
    order = np.lexsort((values, group))
    group, values, area = group[order], values[order], area[order]
    total = np.bincount(group, area, minlength=count)
    before = np.concatenate([[0], np.cumsum(total)[:-1]])
    share = (np.cumsum(area) - before[group]) / total[group]
    last = np.concatenate([group[1:] != group[:-1], [True]])
    reached = (share >= QUANTILE) | last
    places = np.flatnonzero(reached)
    first = np.unique(group[places], return_index=True)
    out = np.zeros(count)
    out[first[0]] = values[places[first[1]]]
    return out
