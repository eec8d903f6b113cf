"""The one property group that the add-on gives to objects."""

from contextlib import contextmanager

import bpy

from . import names
from .result import PieceRow, ResultGroup
from .wishes import WishesGroup


class ObjectGroup(bpy.types.PropertyGroup):
    """Wishes and result of one form."""

    wishes: bpy.props.PointerProperty(type=WishesGroup)
    result: bpy.props.PointerProperty(type=ResultGroup)
    is_copy: bpy.props.BoolProperty(description="This is a covered copy, made from a form")


CLASSES = (WishesGroup, PieceRow, ResultGroup, ObjectGroup)


def register():
    """Give objects the group."""
    for each in CLASSES:
        bpy.utils.register_class(each)
    setattr(bpy.types.Object, names.PROPERTY, bpy.props.PointerProperty(type=ObjectGroup))


def unregister():
    """Take the group away; what is stored in files stays there."""
    delattr(bpy.types.Object, names.PROPERTY)
    for each in reversed(CLASSES):
        bpy.utils.unregister_class(each)


@contextmanager
def there():
    """The group for as long as the command line needs it; the installed extension has given it already."""
    missing = not hasattr(bpy.types.Object, names.PROPERTY)
    if missing:
        register()
    try:
        yield
    finally:
        if missing:
            unregister()  # left to the end of the process it would hang there
