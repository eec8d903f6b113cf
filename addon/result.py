"""What the panel shows of a finished pattern, kept on the object: undone, copied and saved together with it."""

import bpy


class PieceRow(bpy.types.PropertyGroup):
    """One line of the fit table; `name` is the piece's."""

    fit: bpy.props.StringProperty()
    most: bpy.props.FloatProperty(description="Largest stretch, in percent")
    least: bpy.props.FloatProperty(description="Smallest stretch, in percent")
    beyond: bpy.props.FloatProperty(description="Share of the area beyond the goods' hard limits, in percent")


class ResultGroup(bpy.types.PropertyGroup):
    """The last pattern of a form."""

    pieces: bpy.props.CollectionProperty(type=PieceRow)
    active: bpy.props.IntProperty(name="Piece")
    goods: bpy.props.StringProperty()
    seam: bpy.props.FloatProperty(description="Length of all seams, in metres")
    notes: bpy.props.StringProperty(description="What the maker should know, one sentence a line")
    across: bpy.props.FloatProperty(description="Metres across the unit square of the UV map")
    copy: bpy.props.PointerProperty(type=bpy.types.Object, name="Covered Copy")
    path: bpy.props.StringProperty(description="The pattern's file, as long as this session lasts")


def keep(result, pattern, path, notes=()):
    """Fill `result` from the pattern whose file is `path`; `notes` are added to the pattern's own."""
    result.pieces.clear()
    for piece in pattern.pieces:
        row = result.pieces.add()
        row.name, row.fit, row.beyond = piece.name, piece.fit, 100.0 * piece.beyond
        row.most, row.least = 100.0 * piece.stretch.max(), 100.0 * piece.stretch.min()
    result.active = 0
    result.goods = pattern.goods.name
    result.seam = sum(seam.lengths[0] for seam in pattern.seams if not seam.open)
    result.notes = "\n".join([*notes, *pattern.form.mended, *pattern.notes])
    result.path = str(path)


def forget(result):
    """Empty `result`."""
    result.pieces.clear()
    for name in ("active", "goods", "seam", "notes", "across", "copy", "path"):
        result.property_unset(name)
