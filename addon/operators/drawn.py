"""Wishes drawn on the mesh: seams that are held, edges that are shut, the only faces to cover. Kept as its attributes."""

from contextlib import contextmanager

import bpy

from .. import marks, names, read, target


class _OnMesh:
    """An operator that works on the active form's mesh, in Object Mode or Edit Mode."""

    bl_options = {"REGISTER", "UNDO"}

    @classmethod
    def poll(cls, context):
        """A form whose mesh can be written on."""
        thing = context.object
        if thing is None or not target.is_form(thing) or thing.mode not in ("OBJECT", "EDIT"):
            cls.poll_message_set("Make a mesh object that has faces the active one, in Object Mode or Edit Mode")
            return False
        return thing.data.library is None and thing.data.override_library is None

    @staticmethod
    @contextmanager
    def mesh(context):
        """The mesh; out of Edit Mode meanwhile, where the host keeps edges and faces elsewhere."""
        editing = context.object.mode == "EDIT"
        if editing:
            bpy.ops.object.mode_set(mode="OBJECT")
        try:
            yield context.object.data
        finally:
            if editing:
                bpy.ops.object.mode_set(mode="EDIT")


class _Draw(_OnMesh):
    """Keeps what `found` gives as the attribute of the mesh called `kept`."""

    def execute(self, context):
        """Remember it on the mesh."""
        with self.mesh(context) as mesh:
            flags = self.found(mesh)
            if flags.any():
                marks.set_flags(mesh, self.kept, self.domain, flags)
        done = self.done if flags.any() else self.missing
        self.report({"INFO" if flags.any() else "ERROR"}, f"{context.object.name}: {done.format(flags.sum())}")
        return {"FINISHED" if flags.any() else "CANCELLED"}


class _Forget(_OnMesh):
    """Takes the attribute `kept` off the mesh."""

    def execute(self, context):
        """Forget it."""
        with self.mesh(context) as mesh:
            marks.forget(mesh, self.kept)
        return {"FINISHED"}


class SEAMWRIGHT_OT_hold(_Draw, bpy.types.Operator):
    """Hold the edges that are marked as seams now: every pattern of this form has seams there"""

    bl_idname = names.HOLD
    bl_label = "Hold Marked Seams"
    kept, domain, found = names.HELD, "EDGE", staticmethod(read.seams)
    done = "{} edges are held seams."
    missing = "no edge is marked as a seam. In Edit Mode, select edges and use Edge > Mark Seam."


class SEAMWRIGHT_OT_let_go(_Forget, bpy.types.Operator):
    """Hold no seams any more"""

    bl_idname = names.LET_GO
    bl_label = "Let Go"
    kept = names.HELD


class SEAMWRIGHT_OT_shut_edges(_Draw, bpy.types.Operator):
    """Shut the edges that are selected in Edit Mode: no seam runs there, the faces beside them are in one piece"""

    bl_idname = names.SHUT_EDGES
    bl_label = "Shut Selected Edges"
    kept, domain, found = names.SHUT, "EDGE", staticmethod(lambda mesh: read.selected(mesh.edges))
    done = "{} edges are shut to seams."
    missing = "no edge is selected. In Edit Mode, select the edges where no seam may run."


class SEAMWRIGHT_OT_open_edges(_Forget, bpy.types.Operator):
    """Shut no edges any more"""

    bl_idname = names.OPEN_EDGES
    bl_label = "Shut No Edges"
    kept = names.SHUT


class SEAMWRIGHT_OT_cover_only(_Draw, bpy.types.Operator):
    """Cover only the faces that are selected in Edit Mode, and as much beside them as makes the edge of the goods smooth"""

    bl_idname = names.COVER_ONLY
    bl_label = "Cover Selected Faces Only"
    kept, domain, found = names.ONLY, "FACE", staticmethod(lambda mesh: read.selected(mesh.polygons))
    done = "{} faces are to be covered, and no others."
    missing = "no face is selected. In Edit Mode, select the faces to cover."


class SEAMWRIGHT_OT_cover_all(_Forget, bpy.types.Operator):
    """Cover the whole form again"""

    bl_idname = names.COVER_ALL
    bl_label = "Cover All Faces"
    kept = names.ONLY


CLASSES = (SEAMWRIGHT_OT_hold, SEAMWRIGHT_OT_let_go, SEAMWRIGHT_OT_shut_edges, SEAMWRIGHT_OT_open_edges,
           SEAMWRIGHT_OT_cover_only, SEAMWRIGHT_OT_cover_all)
