"""The main job: form and wishes in, pattern out. Runs the stages one after the other for every part of the form."""

from dataclasses import replace

import numpy as np

from .assemble import assemble
from .errors import CoverError, WishError
from .fit.goods import get
from .fit.tailor import Tailor
from .form.mirror import planes, reflection
from .form.surface import Surface
from .pattern import Pattern
from .seams.ladder import Ladder
from .seams.network import cut_through
from .seams.opened import opened
from .seams.prices import seam_prices
from .seams.route import cut_along
from .seams.seek import seek
from .seams.topology import point_labels
from .wishes import Wishes


def cover(form, wishes=None, progress=None):
    """Pattern for a Form and Wishes. progress(share 0..1, words) is told how far it is.

    Raises WishError on wishes that cannot be, CoverError where no pattern is found.
    """
    wishes = wishes or Wishes()
    goods = get(wishes.goods)
    _check(form, wishes)
    parts = list(_parts(form))
    tailored, notes = [], list(form.mended)
    for number, part in enumerate(parts):
        def tell(share, words, number=number):
            if progress:
                progress((number + 0.95 * share) / len(parts), words)

        try:
            tailored.append(_cover_part(form, part, wishes, goods, tell))
        except CoverError as error:
            where = f"{form.name}, part {number + 1} of {len(parts)}" if len(parts) > 1 else form.name
            raise CoverError(f"{where}: {error}") from error
    pattern = assemble(form, goods, wishes, tailored, notes)
    if progress:
        progress(1.0, "done")
    return pattern


class _Part:
    """One connected part of a form: its Surface and where its points and triangles are in the form."""

    def __init__(self, form, triangles):
        self.triangles = triangles
        self.points, local = np.unique(form.triangles[triangles], return_inverse=True)
        self.surface = Surface(form.points[self.points], local.reshape(-1, 3))
        self.polygon = np.unique(form.polygon[triangles], return_inverse=True)[1].ravel()
        whole = form.surface.triangle_edges[triangles]
        self.diagonal = np.zeros(len(self.surface.edges), dtype=bool)
        self.diagonal[self.surface.triangle_edges] = form.diagonal[whole]


def _parts(form):
    count, component = form.surface.triangle_components
    for index in range(count):
        yield _Part(form, np.flatnonzero(component == index))


def _cover_part(form, part, wishes, goods, tell):
    price = seam_prices(form, wishes)[part.points]
    ladder = Ladder(part.surface, price, _planes(part.surface, price, wishes))
    metric = 1 / ladder.factor

    def explicit(cut):
        level = ladder.levels[-1]
        if wishes.route == "edges":
            return cut_along(level, cut, part.polygon, part.diagonal, metric)
        return opened(cut_through(level, cut, metric))

    tailor = Tailor(ladder, explicit, goods, wishes.comfort, wishes.grain)
    if wishes.thrift is None and wishes.pieces is None and wishes.start is None:
        result = tailor.run(tell)
    else:
        found = seek(ladder, wishes.thrift or 0.1, wishes.energy, wishes.pieces, _begin(form, part, wishes), tell)
        result = tailor.real(len(ladder.levels) - 1, found.cut, fully=True)
        if wishes.pieces is None:
            result = tailor.dropped(result)[0]
        result = tailor.sewn(tailor.untangled(result))
    result.network = replace(result.network, source=part.triangles[result.network.source])
    return result


def _planes(surface, price, wishes):
    """Planes of symmetry that the network is to keep: none where the wishes are lopsided themselves."""
    if wishes.symmetry == "none" or wishes.start is not None:
        return []
    return [plane for plane in planes(surface) if np.abs(reflection(surface, plane) @ price - price).max() < 0.1]


def _begin(form, part, wishes):
    """(n,) labels of a part's points from the partition to improve, None without one."""
    if wishes.start is None:
        return None
    if isinstance(wishes.start, Pattern):
        labels = np.zeros(len(form.triangles), dtype=np.int64)
        for number, piece in enumerate(wishes.start.pieces):
            labels[piece.source] = number
    else:
        labels = np.asarray(wishes.start)
        if labels.shape != (form.face_count,):
            raise WishError(f"start: {labels.size} labels for a form of {form.face_count} faces. Give one for each face.")
        labels = np.unique(labels, return_inverse=True)[1].ravel()[form.polygon]
    return point_labels(part.surface, labels[part.triangles])


def _check(form, wishes):
    """Refuse what this version cannot do, rather than leave it undone in silence."""
    later = {"held": wishes.held, "shut": wishes.shut, "only": wishes.only}
    for name, value in later.items():
        if value is not None:
            raise WishError(f"{name}: not offered yet. Leave it out; keep_clear, pieces, thrift and start are there.")
    if not isinstance(wishes.symmetry, str):
        raise WishError("symmetry: planes of your own are not offered yet. Leave it at \"auto\" or \"none\".")
    if wishes.thickness_side != "none":
        raise WishError("thickness_side: not offered yet. Offset the form by half the goods' thickness in the application.")
