"""Camera, lamps, materials and the render: everything that turns a scene into a picture file."""

from math import radians

import bpy
from mathutils import Vector

BACKGROUND = "#dfe4e8"
SAMPLES = 16
BOUNCES = 3


def linear(colour):
    """(r, g, b, 1) in the renderer's linear light, of "#rrggbb" in sRGB (IEC 61966-2-1)."""
    shares = (int(colour[k:k + 2], 16) / 255 for k in (1, 3, 5))
    return (*(s / 12.92 if s <= 0.04045 else ((s + 0.055) / 1.055) ** 2.4 for s in shares), 1.0)


def material(colour, roughness=0.8, metallic=0.0):
    """The plain material of that "#rrggbb" colour, made once."""
    name = f"{colour} {roughness:g} {metallic:g}"
    if name in bpy.data.materials:
        return bpy.data.materials[name]
    made = bpy.data.materials.new(name)
    made.use_nodes = True
    made.diffuse_color = linear(colour)
    surface = made.node_tree.nodes["Principled BSDF"]
    surface.inputs["Base Color"].default_value = linear(colour)
    surface.inputs["Roughness"].default_value = roughness
    surface.inputs["Metallic"].default_value = metallic
    return made


def light(scene, strength=1.0):
    """An even sky and one sun from the left front."""
    sky = bpy.data.worlds.new("Sky")
    sky.use_nodes = True
    sky.node_tree.nodes["Background"].inputs["Color"].default_value = linear(BACKGROUND)
    sky.node_tree.nodes["Background"].inputs["Strength"].default_value = 0.75 * strength
    scene.world = sky
    lamp = bpy.data.lights.new("Sun", "SUN")
    lamp.energy, lamp.angle = 2.2 * strength, radians(12)
    sun = bpy.data.objects.new("Sun", lamp)
    sun.rotation_euler = (radians(42), radians(-18), radians(-20))
    scene.collection.objects.link(sun)


def camera(scene, direction, lens=80.0):
    """The scene's camera, far along `direction` from the origin and looking at it; returns the camera object."""
    view = bpy.data.objects.new("Camera", bpy.data.cameras.new("Camera"))
    view.data.lens, view.data.clip_start = lens, 0.01
    away = Vector(direction).normalized()
    view.location = 10 * away
    view.rotation_euler = away.to_track_quat("Z", "Y").to_euler()
    scene.collection.objects.link(view)
    scene.camera = view
    return view


def frame(scene, points, margin=1.12):
    """Move the scene's camera, keeping its direction, so that it just sees all `points` (n, 3), metres."""
    view, layer = scene.camera, scene.view_layers[0]
    layer.update()
    centre = sum(map(Vector, points), Vector()) / len(points)
    # the host fits the points tightly; a little larger about their centre leaves a margin
    wide = [c for point in points for c in centre + margin * (Vector(point) - centre)]
    view.location, _ = view.camera_fit_coords(layer.depsgraph, wide)
    layer.update()


def resolution(scene, size):
    """Make pictures of the scene `size` (width, height) pixels large."""
    scene.render.resolution_x, scene.render.resolution_y = size
    scene.render.resolution_percentage = 100


def render(scene, path):
    """Write the scene as its camera sees it to `path` (PNG), on one thread: pictures are made side by side."""
    scene.render.engine = "CYCLES"
    scene.cycles.device = "CPU"
    scene.cycles.samples, scene.cycles.seed = SAMPLES, 0
    scene.cycles.max_bounces = BOUNCES
    scene.cycles.use_denoising = False
    scene.render.threads_mode, scene.render.threads = "FIXED", 1
    scene.view_settings.view_transform = "Standard"
    scene.render.image_settings.file_format = "PNG"
    scene.render.filepath = str(path)
    bpy.ops.render.render(write_still=True, scene=scene.name)
