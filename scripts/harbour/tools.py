"""What several props are modelled with: a dome of quads, rows added to an open rim, modifiers made final."""

import bmesh
import bpy
from mathutils import Matrix, Vector


def rounded_cube(cuts):
    """A bmesh: a unit sphere of quads, made of a cube whose edges are cut in `cuts` + 1 parts; no pole anywhere."""
    bm = bmesh.new()
    bmesh.ops.create_cube(bm, size=2.0)
    bmesh.ops.subdivide_edges(bm, edges=bm.edges[:], cuts=cuts, use_grid_fill=True)
    for vert in bm.verts:
        x, y, z = (c * c for c in vert.co)
        # the even map from a cube to a sphere: far less crowded at the corners than plain normalising
        vert.co = Vector((
            vert.co.x * (1 - y / 2 - z / 2 + y * z / 3) ** 0.5,
            vert.co.y * (1 - z / 2 - x / 2 + z * x / 3) ** 0.5,
            vert.co.z * (1 - x / 2 - y / 2 + x * y / 3) ** 0.5,
        ))
    return bm


def dome(cuts):
    """A bmesh: the upper half of `rounded_cube` with an even number of parts; returns it and its open rim's edges."""
    assert cuts % 2 == 1, "the rim must run along edges"
    bm = rounded_cube(cuts)
    low = [face for face in bm.faces if face.calc_center_median().z < 0]
    bmesh.ops.delete(bm, geom=low, context="FACES")
    return bm, [edge for edge in bm.edges if edge.is_boundary]


def add_row(bm, rim, place):
    """Extrude the rim's edges and put every new point where `place(co)` says; returns the new rim's edges."""
    new = bmesh.ops.extrude_edge_only(bm, edges=rim)["geom"]
    for vert in (item for item in new if isinstance(item, bmesh.types.BMVert)):
        vert.co = place(vert.co.copy())
    return [item for item in new if isinstance(item, bmesh.types.BMEdge) and item.is_boundary]


def _number_by_place(bm):
    """Put points in order of their places, edges and faces in order of their points.

    An extrusion numbers what is new by chance, anew in every run, and the patterns would differ with it. This is done once,
    when the modelling is over: references to points, edges and faces are void after a sort.
    """
    for rank, vert in enumerate(sorted(bm.verts, key=lambda vert: tuple(vert.co))):
        vert.index = rank
    bm.verts.sort()
    for items in (bm.edges, bm.faces):
        for rank, item in enumerate(sorted(items, key=lambda item: sorted(vert.index for vert in item.verts))):
            item.index = rank
        items.sort()


def to_object(bm, name):
    """The bmesh as an object in the scene, numbered by place, with faces turned outward and shaded smooth."""
    _number_by_place(bm)
    bmesh.ops.recalc_face_normals(bm, faces=bm.faces[:])
    mesh = bpy.data.meshes.new(name)
    bm.to_mesh(mesh)
    bm.free()
    for edge in mesh.edges:
        edge.vertices = sorted(edge.vertices)  # modifiers number what they add along an edge from its first end
    thing = bpy.data.objects.new(name, mesh)
    bpy.context.scene.collection.objects.link(thing)
    smooth(thing)
    return thing


def smooth(thing):
    """Shade every face smooth."""
    thing.data.polygons.foreach_set("use_smooth", [True] * len(thing.data.polygons))


def modify(thing, kind, **settings):
    """Add a modifier and make it final: the mesh becomes what the modifier shows."""
    modifier = thing.modifiers.new(kind.title(), kind)
    for key, value in settings.items():
        setattr(modifier, key, value)
    seen = thing.evaluated_get(bpy.context.evaluated_depsgraph_get())
    mesh = bpy.data.meshes.new_from_object(seen)
    thing.modifiers.clear()
    old, thing.data = thing.data, mesh
    mesh.name = thing.name
    bpy.data.meshes.remove(old)
    smooth(thing)


def on_ground(thing):
    """Shift the mesh so that the object, standing at height 0, touches the ground; returns the object."""
    low = min(vert.co.z for vert in thing.data.vertices)
    thing.data.transform(Matrix.Translation((0, 0, -low)))
    return thing
