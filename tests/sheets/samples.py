"""Patterns whose development is known in closed form, made by hand: what the sheets are tested on."""

from types import SimpleNamespace

import numpy as np
from seamwright.fit.goods import Goods, get
from seamwright.pattern import Pattern, Piece, Seam


def goods(name="canvas", **changes):
    """A built-in goods with some of its figures changed."""
    base = get(name)
    return Goods(**{key: changes.get(key, getattr(base, key)) for key in base.__dataclass_fields__})


def grid_piece(name, across, up, place, develop, **more):
    """A piece from a grid of (across + 1) x (up + 1) parameters in the unit square.

    place(s, t) -> (k, 3) metres on the form, develop(s, t) -> (k, 2) metres flat. Returns the piece and its indices by row.
    """
    t, s = np.meshgrid(np.linspace(0, 1, up + 1), np.linspace(0, 1, across + 1), indexing="ij")
    points, flat = place(s.ravel(), t.ravel()), develop(s.ravel(), t.ravel())
    at = np.arange((across + 1) * (up + 1)).reshape(up + 1, across + 1)
    a, b, c, d = at[:-1, :-1], at[:-1, 1:], at[1:, 1:], at[1:, :-1]
    triangles = np.concatenate([np.stack([a, b, c], -1).reshape(-1, 3), np.stack([a, c, d], -1).reshape(-1, 3)])
    outline = np.concatenate([at[0, :-1], at[:-1, -1], at[-1, :0:-1], at[:0:-1, 0]])
    return piece(name, points, flat, triangles, outline, **more), at


def piece(name, points, flat, triangles, outline, principal=None, fit="fits", beyond=0.0):
    """A Piece with the stretches given, (t, 2), or none at all."""
    count = len(triangles)
    principal = np.zeros((count, 2)) if principal is None else principal
    shear = np.column_stack([principal, np.zeros(count)])
    worst = np.abs(principal).max(axis=1) / 0.02
    return Piece(name, points, flat, triangles, np.arange(count), outline, principal, shear, worst, fit, beyond)


def seam(name, pieces, sides, **more):
    """A Seam through the points of its first side. sides: two of (piece name or None, indices or None)."""
    by_name = {p.name: p for p in pieces}
    own, indices = next(side for side in sides if side[0] is not None)
    lengths = [length(by_name[n].flat[i]) if n is not None else 0.0 for n, i in sides]
    lengths = tuple(value or max(lengths) for value in lengths)
    return Seam(name, by_name[own].points[indices], tuple(sides), lengths, **more)


def length(points):
    return float(np.linalg.norm(np.diff(points, axis=0), axis=1).sum())


def pattern(name, goods_, pieces, seams, **more):
    order = [s.name for s in seams if not s.open]
    return Pattern(SimpleNamespace(name=name, mended=[]), goods_, pieces, seams, order, **more)


def cylinder(radius=0.1, height=0.3, goods_=None):
    """An open tube: one rectangle 2 pi r x h, closed by a seam along its length, hems at both ends."""
    def place(s, t):
        return np.column_stack([radius * np.cos(2 * np.pi * s), radius * np.sin(2 * np.pi * s), height * t])

    def develop(s, t):
        return np.column_stack([2 * np.pi * radius * s, height * t])

    body, at = grid_piece("A", 72, 12, place, develop)
    seams = [seam("s1", [body], [("A", at[:, 0]), ("A", at[:, -1])]),
             seam("s2", [body], [("A", at[0]), (None, None)]), seam("s3", [body], [("A", at[-1]), (None, None)])]
    return pattern("fender", goods_ or goods(), [body], seams)


def frustum(low=0.1, high=0.06, height=0.08, goods_=None):
    """A cone frustum: a sector of outer radius r1 s / (r1 - r2) and angle 2 pi (r1 - r2) / s, s the slant height."""
    slant = np.hypot(low - high, height)
    outer, angle = low * slant / (low - high), 2 * np.pi * (low - high) / slant
    start = np.pi / 2 - angle / 2 + np.pi

    def place(s, t):
        r, turn = low + (high - low) * t, 2 * np.pi * s
        return np.column_stack([r * np.cos(turn), r * np.sin(turn), height * t])

    def develop(s, t):
        r, turn = outer - slant * t, start + angle * s
        return np.column_stack([r * np.cos(turn), r * np.sin(turn)])

    body, at = grid_piece("shade", 90, 8, place, develop)
    seams = [seam("closing", [body], [("shade", at[:, 0]), ("shade", at[:, -1])]),
             seam("rim", [body], [("shade", at[0]), (None, None)]), seam("top", [body], [("shade", at[-1]), (None, None)])]
    return pattern("lamp shade", goods_ or goods("card"), [body], seams)


def cube(side=0.2, goods_=None):
    """Six squares and twelve seams."""
    corner = np.array([[x, y, z] for x in (0, side) for y in (0, side) for z in (0, side)], dtype=float)
    centre = np.full(3, side / 2)
    pieces, owner = [], {}
    for axis, high in ((a, h) for a in range(3) for h in (0, 1)):
        on = [k for k in range(8) if corner[k][axis] == side * high]
        normal = np.eye(3)[axis] * (1 if high else -1)
        first = corner[on[1]] - corner[on[0]]
        u, v = first / side, np.cross(normal, first / side)
        flat = np.column_stack([(corner[on] - centre) @ u, (corner[on] - centre) @ v])
        ring = np.argsort(np.arctan2(flat[:, 1], flat[:, 0]))
        name = "ABCDEF"[len(pieces)]
        pieces.append(piece(name, corner[on], flat, ring[[[0, 1, 2], [0, 2, 3]]], ring))
        for i, j in zip(ring, np.roll(ring, -1), strict=True):
            owner.setdefault(tuple(sorted((on[i], on[j]))), []).append((name, {on[i]: i, on[j]: j}))
    seams = []
    for (a, b), sides in sorted(owner.items()):
        seams.append(seam(f"s{len(seams) + 1}", pieces, [(n, np.array([where[a], where[b]])) for n, where in sides]))
    return pattern("crate cover", goods_ or goods("upholstery cloth"), pieces, seams)


def pouch(radius=0.25, half=0.18, goods_=None):
    """Two flat lenses (two arcs of one radius over a chord), sewn face to face along both arcs."""
    turn, count = np.arcsin(half / radius), 40
    rise = radius * np.cos(turn)
    angle = np.linspace(-turn, turn, count)
    lower = np.column_stack([radius * np.sin(angle), rise - radius * np.cos(angle)])
    upper = np.column_stack([radius * np.sin(angle), radius * np.cos(angle) - rise])
    ring = np.vstack([lower[:-1], upper[:0:-1]])
    flat = np.vstack([ring, np.zeros(2)])
    q = len(ring)
    outline = np.arange(q)
    fan = np.column_stack([outline, np.roll(outline, -1), np.full(q, q)])
    front = piece("front", np.column_stack([flat, np.zeros(q + 1)]), flat, fan, outline)
    mirror = flat * [-1, 1]
    back = piece("back", np.column_stack([flat, np.zeros(q + 1)]), mirror, fan[:, ::-1], outline[::-1])
    arcs = [np.arange(count), np.r_[np.arange(count - 1, q), 0]]
    seams = [seam(f"s{k + 1}", [front, back], [("front", arc), ("back", arc)]) for k, arc in enumerate(arcs)]
    return pattern("pouch", goods_ or goods("wool felt"), [front, back], seams)


def cap(polar=np.pi / 3, radius=0.2, goods_=None):
    """A spherical cap laid flat at true distance from its pole: stretch 0 outward, sin a / a - 1 around (Milnor 1969)."""
    rings, around = 24, 96
    a = np.r_[0, np.repeat(np.arange(1, rings + 1) / rings * polar, around)]
    turn = np.r_[0, np.tile(np.arange(around) * 2 * np.pi / around, rings)]
    points = radius * np.column_stack([np.sin(a) * np.cos(turn), np.sin(a) * np.sin(turn), np.cos(a)])
    flat = radius * a[:, None] * np.column_stack([np.cos(turn), np.sin(turn)])
    k = np.arange(around)
    triangles = [np.column_stack([np.zeros(around, int), 1 + k, 1 + (k + 1) % around])]
    for ring in range(rings - 1):
        low, high = 1 + ring * around, 1 + (ring + 1) * around
        b = (k + 1) % around
        triangles += [np.column_stack([low + k, high + k, high + b]), np.column_stack([low + k, high + b, low + b])]
    triangles = np.concatenate(triangles)
    middle = a[triangles].mean(axis=1)
    principal = np.column_stack([np.zeros(len(middle)), np.sin(middle) / middle - 1])
    outline = 1 + (rings - 1) * around + k
    strained = middle > np.pi / 4
    dome = piece("dome", points, flat, triangles, outline, principal, "strained", float(strained.mean()))
    dome.utilisation = np.where(strained, 1.4, 0.6)
    seams = [seam("edge", [dome], [("dome", np.r_[outline, outline[0]]), (None, None)])]
    return pattern("buoy top", goods_ or goods("wool felt"), [dome], seams, notes=["The dome is beyond what felt takes."])


def tapered_strip(goods_=None):
    """A long narrow piece with a point too fine for any lettering, beside one that is only 9 mm wide: the hard cases."""
    def place(s, t):
        return np.column_stack([0.9 * s, (0.02 + 0.05 * (1 - s)) * (t - 0.5), 0 * s])

    def thin(s, t):
        return np.column_stack([0.009 * s, 0.05 * t, 0 * s])

    band, at = grid_piece("long band with a long name", 30, 4, place, lambda s, t: place(s, t)[:, :2])
    chip, at2 = grid_piece("chip", 2, 6, thin, lambda s, t: thin(s, t)[:, :2])
    seams = [seam("h1", [band], [(band.name, at[0]), (None, None)]), seam("h2", [chip], [("chip", at2[:, 0]), (None, None)])]
    return pattern("strip <&> of \u041f", goods_ or goods("neoprene"), [band, chip], seams)


ALL = {"cylinder": cylinder, "frustum": frustum, "cube": cube, "pouch": pouch, "cap": cap, "tapered strip": tapered_strip}
