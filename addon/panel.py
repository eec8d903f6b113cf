"""The sidebar tab: form, wishes, the button, and how each piece fits."""

import bpy

from . import names, target
from .operators import cover
from .wishes import OWN

FIT_ICONS = {"fits": "CHECKMARK", "tight": "ERROR", "strained": "CANCEL"}


class _Tab:
    bl_space_type = "VIEW_3D"
    bl_region_type = "UI"
    bl_category = names.TAB


def _form(context):
    """The form that the panel speaks of: the active object, or None."""
    thing = context.object
    return thing if thing is not None and target.is_form(thing) else None


class SEAMWRIGHT_PT_form(_Tab, bpy.types.Panel):
    """Which form, and the button."""

    bl_idname = names.FORM_PANEL
    bl_label = "Form"

    def draw(self, context):
        """Name, check, cover or progress."""
        layout = self.layout
        thing = _form(context)
        if thing is None:
            copy = context.object is not None and context.object.type == "MESH" and target.group(context.object).is_copy
            layout.label(text="This is a covered copy: select its form" if copy else "Select a mesh object with faces",
                         icon="INFO")
            return
        layout.label(text=thing.name, icon="OUTLINER_OB_MESH")
        layout.operator(names.CHECK, icon="VIEWZOOM")
        if cover.current is not None:
            layout.progress(factor=cover.current.share, text=f"{cover.current.reading.name}: {cover.current.words}")
            layout.operator(names.STOP, icon="CANCEL")


class SEAMWRIGHT_PT_wishes(_Tab, bpy.types.Panel):
    """What the maker asks for."""

    bl_idname = names.WISHES_PANEL
    bl_label = "Wishes"

    @classmethod
    def poll(cls, context):
        """With a form only."""
        return _form(context) is not None

    def draw(self, context):
        """All wishes, then the button that uses them."""
        layout, wishes = self.layout, target.group(context.object).wishes
        layout.use_property_split = True
        layout.use_property_decorate = False
        layout.prop(wishes, "goods_menu")
        if wishes.goods == OWN:
            layout.prop(wishes, "own_goods")
        layout.prop(wishes, "comfort")
        layout.prop(wishes, "grain")
        layout.prop(wishes, "thickness_side")
        layout.prop(wishes, "route", expand=True)
        if wishes.route == "through":
            layout.prop(wishes, "cut_itself")
        layout.prop(wishes, "symmetry")
        layout.prop_search(wishes, "keep_clear", context.object, "vertex_groups")
        for attribute, draw, icon, forget in (
                (names.HELD, names.HOLD, "PINNED", names.LET_GO),
                (names.SHUT, names.SHUT_EDGES, "LOCKED", names.OPEN_EDGES),
                (names.ONLY, names.COVER_ONLY, "FACESEL", names.COVER_ALL)):
            row = layout.row(align=True)
            row.operator(draw, icon=icon)
            if attribute in context.object.data.attributes:
                row.operator(forget, text="", icon="X")
        layout.prop(wishes, "improve")
        self._chosen(layout, wishes, "choose_pieces", "pieces")
        self._chosen(layout, wishes, "choose_thrift", "thrift")
        row = layout.row()
        row.scale_y = 1.4
        row.operator(names.COVER, icon="MOD_CLOTH")

    @staticmethod
    def _chosen(layout, wishes, choice, value):
        """A wish that may be left open: a box, and a field that counts when the box is ticked."""
        row = layout.column(heading=wishes.bl_rna.properties[value].name).row()
        row.prop(wishes, choice, text="")
        field = row.row()
        field.active = getattr(wishes, choice)
        field.prop(wishes, value, text="")


class SEAMWRIGHT_UL_pieces(bpy.types.UIList):
    """A line a piece: name, fit in a word, stretch in percent."""

    bl_idname = names.PIECE_LIST

    def draw_item(self, context, layout, data, item, icon, active_data, active_propname):
        """One piece."""
        _columns(layout, item.name, item.fit, f"{item.worst:+.1f} %", FIT_ICONS.get(item.fit, "QUESTION"))


def _columns(layout, name, fit, stretch, icon="NONE"):
    left = layout.split(factor=0.34)
    left.label(text=name)
    right = left.split(factor=0.58)
    right.label(text=fit, icon=icon)
    last = right.row()
    last.alignment = "RIGHT"
    last.label(text=stretch)


class SEAMWRIGHT_PT_fit(_Tab, bpy.types.Panel):
    """How each piece fits, and the way to the sheets."""

    bl_idname = names.FIT_PANEL
    bl_label = "Fit"

    @classmethod
    def poll(cls, context):
        """With a covered form only."""
        return _form(context) is not None and len(target.group(context.object).result.pieces) > 0

    def draw(self, context):
        """Table, notes, sheets."""
        layout, result = self.layout, target.group(context.object).result
        layout.label(text=f"{len(result.pieces)} pieces of {result.goods}, {result.seam:.2f} m of seam")
        _columns(layout, "Piece", "Fit", "Stretch")
        layout.template_list(names.PIECE_LIST, "", result, "pieces", result, "active", rows=min(8, len(result.pieces)))
        if result.active < len(result.pieces):
            piece = result.pieces[result.active]
            column = layout.column(align=True)
            column.label(text=f"{piece.name}: mostly {piece.low:+.1f} to {piece.high:+.1f} %")
            column.label(text=f"{piece.beyond:.1f} % of it beyond the limits")
        column = layout.column(align=True)
        for note in result.notes.split("\n") if result.notes else ():
            for line in _wrapped(note, context.region.width):
                column.label(text=line)
        layout.label(text=f"UV map: {1000 * result.across:.0f} mm across the square")
        layout.operator(names.SAVE, icon="FILE_TICK")
        layout.operator(names.CLEAR, icon="TRASH")


def _wrapped(text, width):
    import textwrap

    return textwrap.wrap(text, max(20, int(width / (7.5 * bpy.context.preferences.system.ui_scale))))


CLASSES = (SEAMWRIGHT_PT_form, SEAMWRIGHT_PT_wishes, SEAMWRIGHT_UL_pieces, SEAMWRIGHT_PT_fit)
