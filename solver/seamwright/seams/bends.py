"""How sharply seams turn, told from the turn of a tip: on a limb's end the two sides of a seam turn apart in the flat, where
a seam winds they turn alike."""

import numpy as np

REACH = 0.03  # the turn is between the directions over this share of the size before a place and after it
STEPS = 3  # places looked at within the reach


def sharpest_bends(seen):
    """List of (degrees, metres along it) for each seam of a Seen: where it turns most, both sides the same way."""
    return [_sharpest(seen, k) for k in range(len(seen.seams))]


def _sharpest(seen, k):
    seam = seen.seams[k]
    way = np.concatenate([[0], np.cumsum(np.linalg.norm(np.diff(seam.path, axis=0), axis=1))])
    reach = REACH * seen.size[seen.seam_part[k]]
    if way[-1] < 3 * reach:
        return 0.0, 0.0
    at = np.arange(reach, way[-1] - reach, reach / STEPS)
    turns = []
    for name, points in seam.sides:
        flat = seen.pieces[seen.number[name]].flat[points]
        before, here, after = (np.column_stack([np.interp(at + shift, way, axis) for axis in flat.T])
                               for shift in (-reach, 0, reach))
        come, go = here - before, after - here
        turns.append(np.arctan2(come[:, 0] * go[:, 1] - come[:, 1] * go[:, 0], (come * go).sum(axis=1)))
    left, right = turns
    alike = np.where(left * right > 0, np.minimum(np.abs(left), np.abs(right)), 0.0)
    worst = int(alike.argmax())
    return float(np.degrees(alike[worst])), float(at[worst])
