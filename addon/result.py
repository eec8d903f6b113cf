"""What the panel shows of a finished pattern, kept on the object: undone, copied and saved together with it."""

import bpy


class PieceRow(bpy.types.PropertyGroup):
    """One line of the fit table; `name` is the piece's."""

    fit: bpy.props.StringProperty()
    worst: bpy.props.FloatProperty(description="The stretch farthest from none, in percent")
    low: bpy.props.FloatProperty(description="5 % of the piece stretch less than this, in percent")
    high: bpy.props.FloatProperty(description="5 % of the piece stretch more than this, in percent")
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


def keep(result, summary, path):
    """Fill `result` from the summary of the pattern whose file is `path`."""
    result.pieces.clear()
    for piece in summary["pieces"]:
        row = result.pieces.add()
        row.name, row.fit, row.beyond = piece["name"], piece["fit"], 100.0 * piece["beyond"]
        row.worst, row.low, row.high = (100.0 * piece["stretch"][key] for key in ("worst", "p5", "p95"))
    result.active = 0
    result.goods = summary["goods"]["name"]
    result.seam = summary["seam_metres"]
    result.notes = "\n".join(summary["notes"])
    result.path = str(path)


def forget(result):
    """Empty `result`."""
    result.pieces.clear()
    for name in ("active", "goods", "seam", "notes", "across", "copy", "path"):
        result.property_unset(name)
