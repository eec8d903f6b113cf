"""Seamwright for the host: registration only."""

import bpy

from . import cli, names, operators, overlay, panel, properties

_command = None


def register():
    """Called by the host when the extension is switched on."""
    global _command
    properties.register()
    for each in (*operators.CLASSES, *panel.CLASSES):
        bpy.utils.register_class(each)
    overlay.register()
    _command = bpy.utils.register_cli_command(names.COMMAND, cli.main)


def unregister():
    """Called when it is switched off; a form that is being covered is dropped."""
    operators.cover.drop()
    bpy.utils.unregister_cli_command(_command)
    overlay.unregister()
    for each in reversed((*operators.CLASSES, *panel.CLASSES)):
        bpy.utils.unregister_class(each)
    properties.unregister()
