"""The maker's wishes, kept on the object and in the .blend; the solver's `Wishes` says what each one means."""

import bpy

OWN = "own"
"""What `goods` says where the maker's own file is to be used."""

_items = []  # the host needs the very strings it was given to stay alive


def goods_items(_self=None, _context=None):
    """Items of the goods' menu: the built-in goods by name, then the maker's own."""
    if not _items:
        from seamwright import goods

        for number, (name, each) in enumerate(goods().items()):
            warp, weft = (100 * pair[1] for pair in (each.stretch_warp, each.stretch_weft))
            _items.append((name, name.capitalize(), f"Takes {warp:g} % along the warp, {weft:g} % along the weft", number))
        _items.append((OWN, "Own Goods", "Your own goods, from a TOML file", len(_items)))
    return _items


def _chosen(group):
    from seamwright import WishError
    from seamwright.fit.goods import get

    try:
        name = OWN if group.goods == OWN else get(group.goods).name
    except WishError:
        return -1  # a name that only a newer version knows: the menu stays empty
    return next(number for key, _, _, number in goods_items() if key == name)


def _choose(group, number):
    group.goods = goods_items()[number][0]


class WishesGroup(bpy.types.PropertyGroup):
    """What the maker asks for beside the form."""

    goods: bpy.props.StringProperty(
        name="Goods", description="Name of the sheet material, or \"own\"", default="canvas")
    goods_menu: bpy.props.EnumProperty(
        name="Goods", description="The sheet material, which says how much stretch the pieces may take",
        items=goods_items, get=_chosen, set=_choose, options={"SKIP_SAVE"})
    own_goods: bpy.props.StringProperty(name="Goods File", description="Your own goods as a TOML file", subtype="FILE_PATH")
    comfort: bpy.props.FloatProperty(
        name="Comfort", description="How far inside the goods' hard limits the pieces stay: 0 at the hard limits, "
        "1 within the comfortable ones", default=0.5, min=0.0, max=1.0, subtype="FACTOR")
    route: bpy.props.EnumProperty(
        name="Route", description="Where seams may run", default="through", items=(
            ("through", "Through", "Seams run through faces; a covered copy with the seams cut in is made beside the form"),
            ("edges", "Edges", "Seams run along edges that exist; they are marked on this mesh, whose shape stays as it is"),
        ))
    cut_itself: bpy.props.BoolProperty(
        name="Cut the Mesh Itself", description="Cut the seams into this mesh, instead of making a covered copy beside it: "
        "its faces become triangles, and only what the pattern, its materials and vertex groups need is kept on it")
    symmetry: bpy.props.BoolProperty(
        name="Keep Symmetry", description="Where the form is its own mirror image the seams are too; otherwise they lie "
        "as is best for every part", default=True)
    grain: bpy.props.EnumProperty(
        name="Grain", description="The way the warp runs on the form, from foot to head", default="best", items=(
            ("best", "Best for Each Piece", "Every piece lies on the goods as it stretches least"),
            ("x", "Along X", "Along the object's X axis"),
            ("y", "Along Y", "Along the object's Y axis"),
            ("z", "Along Z", "Along the object's Z axis"),
        ))
    thickness_side: bpy.props.EnumProperty(
        name="Thickness", description="Where thick goods lie; their pieces are measured in the middle of their thickness",
        default="none", items=(
            ("none", "Does Not Count", "Pieces are measured on the form's own surface, as for thin goods"),
            ("outside", "Outside the Form", "The goods lie on the outside of the form"),
            ("inside", "Inside the Form", "The goods lie within the form, their outer face its surface"),
        ))
    keep_clear: bpy.props.StringProperty(
        name="Keep Clear", description="Vertex group painted where seams are unwelcome: a seam costs twice at weight 0.5, "
        "ten times at 0.9, and is never laid at 1")
    improve: bpy.props.BoolProperty(
        name="Improve Seams", description="Start from the edges that are marked as seams now, and make them shorter "
        "and the stretch less; with a thrift chosen, the sum of both")
    choose_pieces: bpy.props.BoolProperty(name="Choose Pieces", description="Wish for a number of pieces")
    pieces: bpy.props.IntProperty(name="Pieces", description="Wished number of pieces", default=4, min=1, soft_max=50)
    choose_thrift: bpy.props.BoolProperty(
        name="Choose Thrift", description="Set the price of seams yourself; otherwise the cheapest seams that fit "
        "the goods are looked for")
    thrift: bpy.props.FloatProperty(
        name="Thrift", description="Price of one metre of seam on a form scaled to the area of a unit sphere: "
        "more gives fewer seams and more stretch", default=0.1, min=1e-6, soft_max=10.0, max=1e6, precision=4)

    def asked(self):
        """The wishes as plain data, ready for JSON: keyword arguments of the solver's Wishes, and of our own
        `own_goods`, a path, and `cut_itself`.

        Those drawn on the mesh (worker.DRAWN) are not among them: they come with the Reading.
        """
        axis = {"x": 0, "y": 1, "z": 2}.get(self.grain)
        return {
            "goods": self.goods,
            "own_goods": bpy.path.abspath(self.own_goods) if self.goods == OWN else None,
            "comfort": round(self.comfort, 6),
            "route": self.route,
            "cut_itself": self.cut_itself,
            "symmetry": "auto" if self.symmetry else "none",
            "grain": None if axis is None else list(self.id_data.matrix_world.col[axis].xyz.normalized()),
            "thickness_side": self.thickness_side,
            "thrift": float(f"{self.thrift:.6g}") if self.choose_thrift else None,
            "pieces": self.pieces if self.choose_pieces else None,
        }
