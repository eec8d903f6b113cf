"""Check the form: can it be covered, how large is it, what would be mended."""

import bpy

from .. import names, target


def sentences(reading):
    """(sound, list of sentences) about a Reading. Never raises on a faulty form: says what is wrong with it."""
    import seamwright as sw

    try:
        form = sw.Form(reading.points, reading.faces, name=reading.name)
    except sw.FormError as error:
        return False, [str(error)]
    size = form.surface.points.max(axis=0) - form.surface.points.min(axis=0)
    across = " x ".join(f"{1000 * length:.0f}" for length in size)
    loops = len(form.surface.boundary_loops)
    parts = form.surface.triangle_components[0]
    return True, [
        f"{len(reading.points)} points, {len(reading.sizes)} faces, {across} mm",
        f"{parts} {'part' if parts == 1 else 'parts'}, {loops or 'no'} open {'edge' if loops == 1 else 'edges'}",
        *form.mended,
    ]


class SEAMWRIGHT_OT_check(bpy.types.Operator):
    """Say whether the form can be covered, how large it is, and what would be mended"""

    bl_idname = names.CHECK
    bl_label = "Check Form"

    @classmethod
    def poll(cls, context):
        """A mesh object with faces."""
        return context.object is not None and target.is_form(context.object)

    def execute(self, context):
        """Report, and show the sentences where there is a window."""
        thing = context.object
        thing.update_from_editmode()
        sound, lines = sentences(target.read_form(thing, context.scene, context.evaluated_depsgraph_get()))
        self.report({"INFO" if sound else "WARNING"}, f"{thing.name}: {'; '.join(lines)}")
        if not bpy.app.background:
            context.window_manager.popup_menu(
                lambda menu, _: [menu.layout.label(text=line) for line in lines],
                title=f"{thing.name} can be covered" if sound else f"{thing.name} cannot be covered",
                icon="CHECKMARK" if sound else "ERROR")
        return {"FINISHED"}
