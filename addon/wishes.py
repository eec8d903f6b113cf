"""The maker's wishes, kept on the object and in the .blend; the solver's `Wishes` says what each one means."""

import bpy


def _goods_names(_self, _context, edit_text):
    from seamwright import goods

    return [name for name in goods() if edit_text.lower() in name.lower()]


class WishesGroup(bpy.types.PropertyGroup):
    """What the maker asks for beside the form."""

    goods: bpy.props.StringProperty(
        name="Goods", description="The sheet material, which says how much stretch the pieces may take",
        default="canvas", search=_goods_names, search_options=set())
    own_goods: bpy.props.StringProperty(
        name="Own Goods", description="Your own goods as a TOML file; it is used instead of the built-in goods",
        subtype="FILE_PATH")
    comfort: bpy.props.FloatProperty(
        name="Comfort", description="How far inside the goods' hard limits the pieces stay: 0 at the hard limits, "
        "1 within the comfortable ones", default=0.5, min=0.0, max=1.0, subtype="FACTOR")
    choose_thrift: bpy.props.BoolProperty(
        name="Choose Thrift", description="Set the price of seams yourself; otherwise the cheapest seams that fit "
        "the goods are looked for")
    thrift: bpy.props.FloatProperty(
        name="Thrift", description="Price of one metre of seam on a form scaled to the area of a unit sphere: "
        "more gives fewer seams and more stretch", default=0.1, min=1e-6, soft_max=10.0, max=1e6, precision=4)
    pieces: bpy.props.IntProperty(
        name="Pieces", description="Wished number of pieces; 0 leaves it open", default=0, min=0, soft_max=50)
    route: bpy.props.EnumProperty(
        name="Route", description="Where seams may run", default="through", items=(
            ("through", "Through", "Seams run through faces; a covered copy with the seams cut in is made beside the form"),
            ("edges", "Edges", "Seams run along edges that exist; they are marked on this mesh, whose shape stays as it is"),
        ))
    symmetry: bpy.props.EnumProperty(
        name="Symmetry", description="Whether the pattern mirrors where the form does", default="auto", items=(
            ("auto", "Auto", "Find the form's planes of symmetry and keep to them"),
            ("none", "None", "Take no notice of symmetry"),
        ))
    thickness_side: bpy.props.EnumProperty(
        name="Form Is", description="Which side of thick goods the modelled surface is", default="none", items=(
            ("none", "Thin Goods", "Take no notice of the goods' thickness"),
            ("outside", "Outside", "The form is the outside of the goods"),
            ("inside", "Inside", "The form is the inside of the goods: the goods lie upon it"),
        ))
    seed: bpy.props.IntProperty(name="Seed", description="The same form, wishes and seed give the same pattern", min=0)

    def asked(self):
        """The wishes as plain keyword arguments for the solver, ready for JSON; `own_goods` is an absolute path or None."""
        return {
            "goods": self.goods,
            "own_goods": bpy.path.abspath(self.own_goods) if self.own_goods else None,
            "comfort": round(self.comfort, 6),
            "thrift": float(f"{self.thrift:.6g}") if self.choose_thrift else None,
            "pieces": self.pieces or None,
            "route": self.route,
            "symmetry": self.symmetry,
            "thickness_side": self.thickness_side,
            "seed": self.seed,
        }
