"""The props at their places, each with its goods, and the quay they belong to.

Two scenes in one file: "Props" holds the forms to cover and nothing else, "Quay" shows them in their setting.

    python -m harbour.scene FILE.blend
"""

import sys
from dataclasses import dataclass
from math import radians
from types import ModuleType

import bpy

from addon import names, properties

from . import bollard_pad, cushion, fender, lantern_shade, lifebuoy, quay, seal_pup, souwester, studio


@dataclass(frozen=True)
class Prop:
    """A prop to make: its module, goods, colour, and where it lies on the quay (metres, degrees about x, y, z)."""

    module: ModuleType
    goods: str
    colour: str
    place: tuple
    turn: tuple = (0, 0, 0)


PROPS = (
    Prop(lifebuoy, "canvas", "#efe7d6", (-0.15, 0.93, 0.90), (90, 0, 0)),
    Prop(souwester, "knit-back vinyl", "#e2ad1f", (-1.32, 0.42, 0.42), (0, 0, 150)),
    Prop(seal_pup, "wool felt", "#c3c6c9", (0.05, -0.10, 0.0), (0, 0, -28)),
    Prop(cushion, "upholstery cloth", "#8f4038", (-0.68, 0.42, 0.42)),
    Prop(lantern_shade, "card", "#f3e2b6", (1.25, 0.62, 1.12)),
    Prop(fender, "neoprene", "#3d6a92", (-0.80, -0.85, -0.62)),
    Prop(bollard_pad, "eva foam", "#6f9a82", (0.95, -0.10, 0.10)),
)


def build():
    """Make both scenes in an emptied file; returns the seven objects, each with its goods in the add-on's property."""
    bpy.ops.wm.read_factory_settings(use_empty=True)
    properties.register()
    props = bpy.context.scene
    props.name = "Props"
    things = []
    for prop in PROPS:
        thing = prop.module.make()
        thing.location, thing.rotation_euler = prop.place, [radians(angle) for angle in prop.turn]
        thing.data.materials.append(studio.material(prop.colour))
        getattr(thing, names.PROPERTY).wishes.goods = prop.goods
        things.append(thing)
    setting = bpy.data.scenes.new("Quay")
    quay.furnish(setting)
    studio.light(setting)
    for thing in things:
        setting.collection.objects.link(thing)
    return things


if __name__ == "__main__":
    build()
    bpy.ops.wm.save_as_mainfile(filepath=sys.argv[1], check_existing=False)
    properties.unregister()  # the host's module may not end while they are there
