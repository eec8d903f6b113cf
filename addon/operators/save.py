"""Save the sheets of the form's pattern into a folder."""

from pathlib import Path

import bpy

from .. import names, target
from ..job import load


class SEAMWRIGHT_OT_save_sheets(bpy.types.Operator):
    """Write the cutting sheets into a folder that is named after the form, within the folder you choose"""

    bl_idname = names.SAVE
    bl_label = "Save Sheets"

    directory: bpy.props.StringProperty(name="Folder", subtype="DIR_PATH")

    @classmethod
    def poll(cls, context):
        """A form whose pattern is of this session."""
        thing = context.object
        if thing is None or not target.group(thing).result.pieces:
            cls.poll_message_set("Cover the form first")
            return False
        if not Path(target.group(thing).result.path).is_file():
            cls.poll_message_set("Cover the form again: patterns are kept while the application runs")
            return False
        return True

    def invoke(self, context, event):
        """Ask for the folder, first offering that of the .blend."""
        self.directory = self.directory or bpy.path.abspath("//") or str(Path.home())
        context.window_manager.fileselect_add(self)
        return {"RUNNING_MODAL"}

    def execute(self, context):
        """Write them."""
        from seamwright.sheets import safe_name

        pattern = load(target.group(context.object).result.path)
        folder = Path(bpy.path.abspath(self.directory)) / safe_name(context.object.name)
        try:
            paths = pattern.save(folder)
        except (ValueError, OSError) as error:
            self.report({"ERROR"}, f"{context.object.name}: the sheets could not be written. {error}")
            return {"CANCELLED"}
        self.report({"INFO"}, f"{len(paths)} files written to {folder}")
        return {"FINISHED"}
