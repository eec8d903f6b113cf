"""Cover the form: in the window beside the maker's other work, without one straight through."""

import time

import bpy

from .. import names, target, words
from ..job import Job, JobError

TICK = 0.1
"""Seconds between two looks at the child process."""

current = None
"""The Job that is running in the window, or None; the panel shows it."""


def drop():
    """End what is running, if anything is; its operator then leaves by itself."""
    if current is not None:
        current.stop_wanted = True


class SEAMWRIGHT_OT_cover(bpy.types.Operator):
    """Find seams and flat pieces for the form, as its wishes say"""

    bl_idname = names.COVER
    bl_label = "Cover"
    bl_options = {"REGISTER", "UNDO"}

    @classmethod
    def poll(cls, context):
        """A mesh object with faces, and no other form under way."""
        thing = context.object
        if thing is None or not target.is_form(thing):
            cls.poll_message_set("Make a mesh object that has faces the active one")
            return False
        if current is not None:
            cls.poll_message_set(f"{current.reading.name} is being covered; stop that first")
            return False
        return True

    def execute(self, context):
        """Straight through."""
        if not self._start(context):
            return {"CANCELLED"}
        while self.job.running():
            time.sleep(TICK)
        return self._finish(context)

    def invoke(self, context, event):
        """In the window: start, and look again at every tick."""
        if bpy.app.background:
            return self.execute(context)
        if not self._start(context):
            return {"CANCELLED"}
        global current
        current = self.job
        self.timer = context.window_manager.event_timer_add(TICK, window=context.window)
        context.window_manager.modal_handler_add(self)
        return {"RUNNING_MODAL"}

    def modal(self, context, event):
        """Show how far it is; Esc ends it; everything else stays the maker's."""
        if event.type == "ESC" and event.value == "PRESS" or self.job.stop_wanted:
            self.cancel(context)
            self.report({"INFO"}, f"{self.form_name}: stopped, nothing was changed.")
            return {"CANCELLED"}
        if event.type != "TIMER":
            return {"PASS_THROUGH"}
        self._show(context, f"Covering {self.form_name}: {self.job.words} ({100 * self.job.share:.0f} %)     Esc: Stop")
        if not self.job.running():
            thing = bpy.data.objects.get(self.form_name)
            if thing is not None and thing.mode == "EDIT":
                self._show(context, f"{self.form_name} is done: leave Edit Mode (Tab) and it is laid in     Esc: Drop It")
                return {"PASS_THROUGH"}
            self._leave(context)
            return self._finish(context)
        return {"PASS_THROUGH"}

    def cancel(self, context):
        """End the child; also when the host ends the operator, as on loading a file."""
        self.job.stop()
        self._leave(context)

    def _start(self, context):
        thing = context.object
        self.form_name, self.asked = thing.name, target.group(thing).wishes.asked()
        depsgraph = context.evaluated_depsgraph_get()
        try:
            target.check(thing, self.asked, depsgraph)
        except target.Refused as refused:
            self.report({"ERROR"}, str(refused))
            return False
        self.job = Job(target.read_form(thing, context.scene, depsgraph), self.asked)
        return True

    def _finish(self, context):
        try:
            pattern = self.job.pattern()
            thing = bpy.data.objects.get(self.form_name)
            if thing is None:
                raise JobError(f"{self.form_name}: it is gone or has another name now, so the pattern was dropped.")
            depsgraph = context.evaluated_depsgraph_get()
            target.check(thing, self.asked, depsgraph)
            if not target.read_form(thing, context.scene, depsgraph).same(self.job.reading):
                raise JobError(f"{self.form_name}: it was changed meanwhile, so the pattern was dropped. Cover it again.")
        except (JobError, target.Refused) as error:
            self.report({"ERROR"}, str(error))
            return {"CANCELLED"}
        summary = target.lay_in(thing, pattern, self.job.path, self.asked, context.scene)
        self.report({"INFO" if summary["fits"] else "WARNING"}, f"{self.form_name}: {words.of_pattern(summary)}.")
        return {"FINISHED"}

    def _leave(self, context):
        global current
        current = None
        if hasattr(self, "timer"):
            context.window_manager.event_timer_remove(self.timer)
        self._show(context, None)

    def _show(self, context, text):
        context.workspace.status_text_set(text)
        for window in context.window_manager.windows:
            for area in window.screen.areas:
                if area.type == "VIEW_3D":
                    area.tag_redraw()


class SEAMWRIGHT_OT_stop(bpy.types.Operator):
    """Stop covering; nothing is changed"""

    bl_idname = names.STOP
    bl_label = "Stop"

    def execute(self, context):
        """Ask the running operator to end."""
        drop()
        return {"FINISHED"}
