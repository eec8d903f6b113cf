"""The sidebar tab: form, wishes, the button, and how each piece fits."""

import bpy

from . import names, target
from .operators import cover

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
        row = layout.row()
        row.active = not wishes.own_goods
        row.prop(wishes, "goods")
        layout.prop(wishes, "own_goods")
        layout.prop(wishes, "comfort")
        layout.prop(wishes, "route", expand=True)
        layout.prop(wishes, "pieces")
        layout.prop(wishes, "symmetry")
        layout.prop(wishes, "thickness_side")
        column = layout.column(heading="Thrift")
        row = column.row()
        row.prop(wishes, "choose_thrift", text="")
        field = row.row()
        field.active = wishes.choose_thrift
        field.prop(wishes, "thrift", text="")
        row = layout.row()
        row.scale_y = 1.4
        row.operator(names.COVER, icon="MOD_CLOTH")


class SEAMWRIGHT_UL_pieces(bpy.types.UIList):
    """A line a piece: name, fit in a word, stretch in percent."""

    bl_idname = names.PIECE_LIST

    def draw_item(self, context, layout, data, item, icon, active_data, active_propname):
        """One piece."""
        row = layout.split(factor=0.3)
        row.label(text=item.name)
        row = row.split(factor=0.45)
        row.label(text=item.fit, icon=FIT_ICONS.get(item.fit, "QUESTION"))
        row.label(text=f"{item.least:+.1f} to {item.most:+.1f} %")


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
        layout.template_list(names.PIECE_LIST, "", result, "pieces", result, "active", rows=min(8, len(result.pieces)))
        if result.active < len(result.pieces) and result.pieces[result.active].beyond > 0.05:
            piece = result.pieces[result.active]
            layout.label(text=f"{piece.name}: {piece.beyond:.1f} % of it beyond the goods' limits", icon="INFO")
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
