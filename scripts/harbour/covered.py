"""A covered form as objects of the host, read from its pattern.json: pieces in colour, seams as dark tubes, piece names."""

import json

import bpy
import numpy as np
from mathutils import Vector
from seamwright.sheets.colours import piece_colour

from . import studio

SEAM_COLOUR, HEM_COLOUR, LETTER_COLOUR = "#1a1a1a", "#6b6b6b", "#101010"
SAMPLES = 400  # triangles of a piece that are tried for its name


def read(path):
    """The pattern's document, with every length in metres where the host wants it: pieces' `points` become (k, 3) arrays."""
    document = json.loads(path.read_text(encoding="utf-8"))
    for piece in document["pieces"]:
        piece["points"] = np.array(piece["points"]) / 1000
        piece["triangles"] = np.array(piece["triangles"])
    return document


def build(scene, document):
    """Put the covered form into the scene where the form stands; returns its points (n, 3), metres."""
    points = np.concatenate([piece["points"] for piece in document["pieces"]])
    thickness = 0.0035 * np.linalg.norm(np.ptp(points, axis=0)) + 0.0005
    for order, piece in enumerate(document["pieces"]):
        _piece(scene, piece, piece_colour(order))
    by_name = {piece["name"]: piece["points"] for piece in document["pieces"]}
    for seam in document["seams"]:
        side = next(side for side in seam["sides"] if side["piece"])
        joined = all(side["piece"] for side in seam["sides"])
        _tube(scene, by_name[side["piece"]][side["points"]], thickness if joined else 0.6 * thickness,
              SEAM_COLOUR if joined else HEM_COLOUR)
    return points


def label(scene, document, size):
    """Write every piece's name where the scene's camera sees the middle of it, `size` metres high on the form."""
    scene.view_layers[0].update()
    eye = np.array(scene.camera.location)
    for piece in document["pieces"]:
        spot = _broadest(scene, piece, eye, size)
        if spot is not None:
            _letters(scene, piece["name"], spot, eye, size)


def _piece(scene, piece, colour):
    mesh = bpy.data.meshes.new(piece["name"])
    mesh.from_pydata(piece["points"], (), piece["triangles"])
    mesh.polygons.foreach_set("use_smooth", [True] * len(mesh.polygons))
    mesh.materials.append(studio.material(colour))
    scene.collection.objects.link(bpy.data.objects.new(piece["name"], mesh))


def _tube(scene, path, radius, colour):
    curve = bpy.data.curves.new("Seam", "CURVE")
    curve.dimensions, curve.bevel_depth, curve.bevel_resolution, curve.use_fill_caps = "3D", radius, 2, True
    line = curve.splines.new("POLY")
    line.points.add(len(path) - 1)
    line.points.foreach_set("co", np.column_stack([path, np.ones(len(path))]).ravel())
    curve.materials.append(studio.material(colour))
    scene.collection.objects.link(bpy.data.objects.new("Seam", curve))


def _broadest(scene, piece, eye, size):
    """The point of the piece with most of it in sight around it, seen from `eye`; None where letters would not fit."""
    a, b, c = (piece["points"][piece["triangles"][:, k]] for k in range(3))
    middles, normals = (a + b + c) / 3, np.cross(b - a, c - a) / 2
    toward = eye - middles
    toward /= np.linalg.norm(toward, axis=1)[:, None]
    breadth = np.einsum("ij,ij->i", normals, toward)  # area as the camera sees it
    facing = np.flatnonzero(breadth > 0)
    every = max(1, len(facing) // SAMPLES)
    graph = scene.view_layers[0].depsgraph

    def hidden(t):
        return scene.ray_cast(graph, Vector(middles[t] + 1e-3 * toward[t]), Vector(toward[t]))[0]

    seen = np.array([t for t in facing[::every] if not hidden(t)], dtype=int)
    if every * breadth[seen].sum() < 3 * size * size:
        return None
    apart = np.linalg.norm(middles[seen][:, None] - middles[seen], axis=2)
    return middles[seen[np.argmax(np.exp(-((apart / (4 * size)) ** 2)) @ breadth[seen])]]


def _letters(scene, words, spot, eye, size):
    """Letters that face the camera, half way to it and half as large, so that nothing of the form hides them."""
    letters = bpy.data.curves.new(words, "FONT")
    letters.body, letters.size = words, size / 2
    letters.align_x, letters.align_y = "CENTER", "CENTER"
    letters.materials.append(studio.material(LETTER_COLOUR))
    thing = bpy.data.objects.new(words, letters)
    thing.location = (spot + eye) / 2
    thing.rotation_euler = scene.camera.rotation_euler
    thing.visible_shadow = False
    scene.collection.objects.link(thing)
