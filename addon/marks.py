"""Marks a pattern on a mesh: seam flags, the UV map, piece and stretch of each face. Vertices and faces stay as they are."""

import numpy as np

from . import names
from .lay import lay
from .read import edges, faces, flags


def mark(mesh, pattern):
    """Mark the mesh that the pattern's form was read from; the pattern runs along its edges. Returns metres across UVs."""
    form, (places, across) = pattern.form, lay(pattern)
    corners, sizes = faces(mesh)
    spot_of, count = _spots(form)
    piece_of, worst = np.full(len(form.triangles), -1), np.zeros(len(form.triangles))
    owner, at, uvs = [], [], []
    for index, (piece, place) in enumerate(zip(pattern.pieces, places, strict=True)):
        piece_of[piece.source], worst[piece.source] = index, worst_of(piece.stretch)
        owner.append(np.repeat(form.polygon[piece.source], 3))
        at.append(spot_of[form.triangles[piece.source]].ravel())
        uvs.append((piece.flat + place)[piece.triangles].reshape(-1, 2) / across)
    owner, at, uvs = map(np.concatenate, (owner, at, uvs))
    face, wanted = np.repeat(np.arange(len(sizes)), sizes), spot_of[form.point_of[corners]]
    anywhere = _look_up(at, uvs, wanted, np.zeros((len(corners), 2)))  # for faces without area, which the form left out
    set_uvs(mesh, _look_up(owner * count + at, uvs, face * count + wanted, anywhere))
    set_attribute(mesh, names.PIECE, "INT", _by_face(form, piece_of, len(sizes), -1))
    set_attribute(mesh, names.STRETCH, "FLOAT", _by_face(form, worst, len(sizes), 0.0))
    set_seams(mesh, _seam_edges(mesh, pattern))
    return across


def worst_of(stretch):
    """(t,) the principal stretch of each triangle that is farther from none, signed; from (t, 2)."""
    return np.where(np.abs(stretch[:, 0]) >= np.abs(stretch[:, 1]), stretch[:, 0], stretch[:, 1])


def set_uvs(mesh, spots):
    """Make (c, 2) the UV map of the corners, and the active one."""
    layer = mesh.uv_layers.get(names.UV_MAP) or mesh.uv_layers.new(name=names.UV_MAP, do_init=False)
    if layer is None:
        raise ValueError(f"{mesh.name}: it has as many UV maps as the host allows; remove one and cover again.")
    layer.uv.foreach_set("vector", spots.astype(np.float32).ravel())
    layer.active = True


def set_attribute(mesh, name, kind, values):
    """Make `values` the face attribute `name`; one of that name but of another kind or place is replaced."""
    old = mesh.attributes.get(name)
    if old is not None and (old.domain != "FACE" or old.data_type != kind):
        mesh.attributes.remove(old)
        old = None
    attribute = old or mesh.attributes.new(name, kind, "FACE")
    attribute.data.foreach_set("value", values.astype(np.int32 if kind == "INT" else np.float32))


def set_seams(mesh, flags):
    """Make (e,) the edges' seam flags."""
    mesh.edges.foreach_set("use_seam", flags)
    mesh.update()


def set_flags(mesh, name, domain, values):
    """Make (k,) bool the attribute `name` of the mesh's edges (domain "EDGE") or faces ("FACE")."""
    forget(mesh, name)
    mesh.attributes.new(name, "BOOLEAN", domain).data.foreach_set("value", values)


def forget(mesh, name):
    """Take an attribute off the mesh, where it has one of that name."""
    if attribute := mesh.attributes.get(name):
        mesh.attributes.remove(attribute)


def clear(mesh):
    """Take off everything `mark` puts on; held seams stay marked."""
    set_seams(mesh, flags(mesh, names.HELD, "EDGE"))
    if layer := mesh.uv_layers.get(names.UV_MAP):
        mesh.uv_layers.remove(layer)
    for name in (names.PIECE, names.STRETCH):
        forget(mesh, name)


def _spots(form):
    """((k,) number of the place of each of the form's points, count): points that mending divided share a place."""
    places, spot_of = np.unique(form.points, axis=0, return_inverse=True)
    return spot_of.ravel(), len(places)


def _look_up(keys, values, wanted, missing):
    """Rows of `values` whose key is wanted, or rows of `missing` where none is."""
    order = np.argsort(keys, kind="stable")
    keys, values = keys[order], values[order]
    at = np.minimum(np.searchsorted(keys, wanted), len(keys) - 1)
    return np.where((keys[at] == wanted)[:, None], values[at], missing)


def _by_face(form, values, count, missing):
    """(count,) per face of the mesh from (m,) per triangle: the value farthest from none of the face's triangles."""
    found = np.full(count, missing, values.dtype)
    order = np.argsort(np.abs(values), kind="stable")
    found[form.polygon[order]] = values[order]
    return found


def _seam_edges(mesh, pattern):
    """(e,) bool: the mesh's edges where two edges of pieces are joined, or where a piece ends before faces not covered."""
    form = pattern.form
    spot_of, count = _spots(form)

    def key(pairs):
        return np.sort(spot_of[pairs], axis=1) @ (count, 1)

    ends = form.point_of[edges(mesh)]
    outline = np.concatenate([_outline_in_form(form, piece) for piece in pattern.pieces])
    sewn = np.setdiff1d(key(outline), key(form.surface.edges[form.surface.open_edges]))
    return np.isin(key(ends), sewn) & (ends >= 0).all(axis=1)


def _outline_in_form(form, piece):
    """(q, 2) the piece's outline edges as points of the form."""
    point = np.empty(len(piece.points), np.int64)
    point[piece.triangles] = form.triangles[piece.source]
    around = point[piece.outline]
    return np.column_stack([around, np.roll(around, -1)])
