"""Hold: the seams that the maker has marked on the mesh stay seams, to the last edge."""

import bpy

from .. import marks, names, read, target


class _OnMesh:
    bl_options = {"REGISTER", "UNDO"}

    @classmethod
    def poll(cls, context):
        """A form whose mesh can be written on."""
        thing = context.object
        if thing is None or not target.is_form(thing) or thing.mode != "OBJECT":
            cls.poll_message_set("Make a mesh object that has faces the active one, in Object Mode")
            return False
        return thing.data.library is None and thing.data.override_library is None


class SEAMWRIGHT_OT_hold(_OnMesh, bpy.types.Operator):
    """Hold the edges that are marked as seams now: every pattern of this form has seams there"""

    bl_idname = names.HOLD
    bl_label = "Hold Marked Seams"

    def execute(self, context):
        """Remember them on the mesh."""
        mesh = context.object.data
        flags = read.seams(mesh)
        if not flags.any():
            self.report({"ERROR"}, f"{context.object.name}: no edge is marked as a seam. In Edit Mode, select edges and use "
                                   "Edge > Mark Seam.")
            return {"CANCELLED"}
        marks.set_held(mesh, flags)
        self.report({"INFO"}, f"{context.object.name}: {flags.sum()} edges are held seams.")
        return {"FINISHED"}


class SEAMWRIGHT_OT_let_go(_OnMesh, bpy.types.Operator):
    """Hold no seams any more"""

    bl_idname = names.LET_GO
    bl_label = "Let Go"

    def execute(self, context):
        """Forget them."""
        marks.set_held(context.object.data, None)
        return {"FINISHED"}
