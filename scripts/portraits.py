"""Pictures of covered forms without a drawing library: triangles and seams as dots, the nearest dot on a pixel wins.

Every form is seen from the front and from the back, its pieces in colours and its log scale u, blue where the goods would
have to ease in, orange-brown where they would have to stretch.
"""

import html
import struct
import zlib

import numpy as np
from seamwright.seams.begun import network_of_pattern
from seamwright.seams.ladder import Ladder
from seamwright.seams.study import network_cost
from seamwright.sheets.colours import piece_colour, stretch_colour

SIDE = 380  # pixels of a picture
LEAST = 0.01  # u that is shown in full colour at least: what is less is rounding on a form that lies flat by itself
FRONT = np.array([0.45, -1.0, 0.55])


def page(folder, shown):
    """Path of a page with a front and a back picture of every (words, Pattern)."""
    folder.mkdir(parents=True, exist_ok=True)
    parts = []
    for number, (words, pattern) in enumerate(shown):
        scales = log_scales(pattern)
        most = max(LEAST, *(float(np.abs(u).max()) for u in scales))
        hues = [rgb(stretch_colour(u[piece.triangles].mean(axis=1) / most))
                for u, piece in zip(scales, pattern.pieces, strict=True)]
        names = []
        for what, colours in (("seams", None), ("u", hues)):
            for view, direction in (("front", FRONT), ("back", -FRONT)):
                name = f"{number:02d}-{pattern.form.name.replace(' ', '-')}-{what}-{view}.png"
                (folder / name).write_bytes(png(portrait(pattern, direction, colours)))
                names.append(name)
        pictures = "".join(f'<img src="{name}" alt="{html.escape(name[3:-4])}">' for name in names)
        words = html.escape(f"{words}\nu from {-most:.3f} to {most:.3f}")
        parts.append(f"<figure><figcaption><pre>{words}</pre></figcaption>{pictures}</figure>")
    path = folder / "index.html"
    path.write_text("<!doctype html><meta charset=utf-8><title>Bench</title><style>figure{display:inline-block;margin:8px}"
                    "img{border:1px solid #ddd}</style>" + "\n".join(parts) + "\n", encoding="utf-8")
    return path


def log_scales(pattern):
    """The log scale u (k,) at the points of each piece of a Pattern whose form is one part."""
    form, pieces = pattern.form, pattern.pieces
    network = network_of_pattern(pieces, np.arange(len(form.triangles)))
    u = network_cost(Ladder(form.surface, rungs=()), network, 0.0).u
    every = np.concatenate([piece.points for piece in pieces])
    at = np.unique(every, axis=0, return_inverse=True)[1].ravel()  # as the network numbers them
    return np.split(u[at], np.cumsum([len(piece.points) for piece in pieces])[:-1])


def rgb(words):
    """(k, 3) shares of red, green and blue of hex colours."""
    return np.array([list(bytes.fromhex(word[1:])) for word in words]) / 255


def portrait(pattern, direction, hues=None):
    """(SIDE, SIDE, 3) picture, 0 to 1, of a Pattern seen from `direction`, seams black, hems grey.

    hues: for each piece the colours (t, 3) of its triangles; by default each piece has one.
    """
    toward = direction / np.linalg.norm(direction)
    right = np.cross([0.0, 0.0, 1.0], toward)
    right /= np.linalg.norm(right)
    frame = np.stack([right, np.cross(toward, right), toward], axis=1)
    seen = pattern.form.points @ frame
    middle, scale = (seen.max(0) + seen.min(0)) / 2, 0.94 * SIDE / np.ptp(seen[:, :2], axis=0).max()

    def placed(points):
        return (points @ frame - middle) * scale * [1, -1, 1] + [SIDE / 2, SIDE / 2, 0]

    places, colours = [], []
    for number, piece in enumerate(pattern.pieces):
        corners = placed(piece.points)[piece.triangles]
        normals = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
        light = 0.5 + 0.5 * np.abs(normals[:, 2]) / np.maximum(np.linalg.norm(normals, axis=1), 1e-12)
        dots, owner = _dots(corners)
        places.append(dots)
        colours.append(((rgb([piece_colour(number)]) if hues is None else hues[number]) * light[:, None])[owner])
    for seam in pattern.seams:
        line = _dense(placed(seam.path)) + [0, 0, 3.0]  # a little in front of the surface it lies on
        for shift in ((0, 0), (1, 0), (0, 1), (1, 1)):
            places.append(line + [*shift, 0])
            colours.append(np.full((len(line), 3), 0.45 if seam.open else 0.0))
    return _nearest(np.concatenate(places), np.concatenate(colours))


def _dots(corners):
    """Dots less than a pixel apart over every triangle (t, 3, 3), and the triangle of each."""
    longest = np.linalg.norm((corners - np.roll(corners, 1, axis=1))[:, :, :2], axis=2).max(axis=1)
    steps = np.clip(np.ceil(1.6 * longest), 1, 400).astype(int)
    dots, owner = [], []
    for count in np.unique(steps):
        which = np.flatnonzero(steps == count)
        i, j = (a.ravel() for a in np.meshgrid(np.arange(count + 1), np.arange(count + 1), indexing="ij"))
        keep = i + j <= count
        a, b = i[keep] / count, j[keep] / count
        shares = np.column_stack([1 - a - b, a, b])
        dots.append(np.einsum("qk,tkd->tqd", shares, corners[which]).reshape(-1, 3))
        owner.append(np.repeat(which, len(shares)))
    return np.concatenate(dots), np.concatenate(owner)


def _dense(path):
    way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(path, axis=0), axis=1))])
    at = np.arange(0, way[-1] + 0.4, 0.4)
    return np.column_stack([np.interp(at, way, axis) for axis in path.T])


def _nearest(places, colours):
    """The picture: of all dots on a pixel the one nearest to the eye."""
    column, row = (np.clip(places[:, k].astype(int), 0, SIDE - 1) for k in (0, 1))
    order = np.argsort(places[:, 2], kind="stable")
    picture = np.ones((SIDE * SIDE, 3))
    picture[(row * SIDE + column)[order]] = colours[order]  # later dots, the nearer ones, stay
    return picture.reshape(SIDE, SIDE, 3)


def png(picture):
    """Bytes of a PNG file (ISO/IEC 15948) of a (h, w, 3) picture, 0 to 1."""
    h, w, _ = picture.shape
    rows = np.zeros((h, 1 + 3 * w), dtype=np.uint8)
    rows[:, 1:] = np.round(255 * np.clip(picture, 0, 1)).astype(np.uint8).reshape(h, -1)

    def chunk(kind, data):
        return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))

    head = struct.pack(">IIBBBBB", w, h, 8, 2, 0, 0, 0)
    body = zlib.compress(rows.tobytes(), 9)
    return b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", head) + chunk(b"IDAT", body) + chunk(b"IEND", b"")
