"""pattern.json: the whole pattern as data, for the maker's own tools.

One object, lengths in millimetres, stretch as shares, angles in degrees where a key says so:

    format      "seamwright pattern 1"
    summary     the summary (see `report.summary`)
    pieces      [{name, number,
                  outline   [[x, y], ...] stitch line, counter-clockwise, face side up, warp along +y,
                  cut       [[[x, y], ...], ...] cut line, then any openings,
                  notches   [{seam, at: [x, y], share}] share of the seam's length on the form,
                  flat      [[x, y], ...] every point laid flat,
                  points    [[x, y, z], ...] the same points on the form,
                  neutral   [[x, y, z], ...] the same in the middle of the goods, which `flat` is measured against,
                  triangles [[i, j, k], ...] indices into both,
                  source    [t, ...] the form's triangle each came from,
                  border    [i, ...] the outline as indices into flat,
                  stretch   [[larger, smaller], ...] principal, a pair a triangle,
                  warp_weft_shear_degrees [[warp, weft, degrees], ...] a triangle,
                  utilisation [share, ...] of the hard limit, a triangle}]
    seams       [{name, dart, ease, lengths_mm: [a, b], eased: null or [begin, end] as shares of the seam,
                  sides [{piece: name or null, points: [i, ...]}, ...] mates in step: the k-th points meet}]
    order       [seam name, ...] the sewing order
"""

import json

import numpy as np

FORMAT = "seamwright pattern 1"


def pieces(pattern, drafts):
    """The pieces of pattern.json, as they are read from it."""
    return json.loads(json.dumps([_piece(piece, d) for piece, d in zip(pattern.pieces, drafts, strict=True)]))


def write(pattern, saved, summary):
    """Bytes of pattern.json; saved: its `pieces`."""
    document = {
        "format": FORMAT,
        "summary": summary,
        "pieces": saved,
        "seams": [_seam(seam) for seam in pattern.seams],
        "order": list(pattern.order),
    }
    return (json.dumps(document, ensure_ascii=False, separators=(",", ":"), allow_nan=False) + "\n").encode("utf-8")


def _piece(piece, d):
    bend = piece.warp_weft_shear * [1.0, 1.0, np.degrees(1.0)]
    return {
        "name": piece.name,
        "number": d.number,
        "outline": _mm(piece.flat[piece.outline]),
        "cut": [np.round(ring.coords[:-1], 4).tolist() for ring in (d.cut.exterior, *d.cut.interiors)],
        "notches": [{"seam": n.seam, "at": np.round(n.at, 4).tolist(), "share": round(n.share, 9)} for n in d.notches],
        "flat": _mm(piece.flat),
        "points": _mm(piece.points),
        "neutral": _mm(piece.neutral),
        "triangles": piece.triangles.tolist(),
        "source": piece.source.tolist(),
        "border": piece.outline.tolist(),
        "stretch": np.round(piece.stretch, 6).tolist(),
        "warp_weft_shear_degrees": np.round(bend, 6).tolist(),
        "utilisation": np.round(piece.utilisation, 6).tolist(),
    }


def _seam(seam):
    sides = [{"piece": name, "points": None if name is None else np.asarray(at).tolist()} for name, at in seam.sides]
    return {"name": seam.name, "dart": bool(seam.dart), "ease": round(float(seam.ease), 9),
            "eased": None if seam.eased is None else [round(share, 9) for share in seam.eased],
            "lengths_mm": [round(float(length) * 1000, 4) for length in seam.lengths], "sides": sides}


def _mm(points):
    return np.round(points * 1000, 4).tolist()
