"""Clear: take the pattern off a form again."""

import bpy

from .. import names, target


class SEAMWRIGHT_OT_clear(bpy.types.Operator):
    """Take seams, UV map, face attributes and the covered copy away; the wishes stay"""

    bl_idname = names.CLEAR
    bl_label = "Clear Pattern"
    bl_options = {"REGISTER", "UNDO"}

    @classmethod
    def poll(cls, context):
        """A form that has a pattern, out of Edit Mode."""
        thing = context.object
        return thing is not None and thing.mode == "OBJECT" and len(target.group(thing).result.pieces) > 0

    def execute(self, context):
        """Take it off."""
        target.take_off(context.object)
        return {"FINISHED"}
