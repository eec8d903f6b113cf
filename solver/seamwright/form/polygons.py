"""The maker's faces as flat arrays: every corner of every face in one row, whatever the number of corners."""

from functools import cached_property
from itertools import chain

import numpy as np

from ..errors import FormError


class Polygons:
    """Faces with any number of corners.

    corners (c,) point indices, face after face; sizes (m,) corners of each face; face (m,) the caller's index of each.
    Never changed once made, so the tables are kept.
    """

    def __init__(self, corners, sizes, face=None):
        self.corners = np.asarray(corners, dtype=np.int64)
        self.sizes = np.asarray(sizes, dtype=np.int64)
        self.face = np.arange(len(self.sizes)) if face is None else face

    @property
    def first(self):
        """(m,) place of each face's first corner."""
        return np.cumsum(self.sizes) - self.sizes

    @property
    def owner(self):
        """(c,) which of these faces each corner belongs to."""
        return np.repeat(np.arange(len(self.sizes)), self.sizes)

    @property
    def following(self):
        """(c,) place of the next corner around the same face."""
        after = np.arange(1, len(self.corners) + 1)
        real = self.sizes > 0
        after[(self.first + self.sizes - 1)[real]] = self.first[real]
        return after

    def keep(self, faces):
        """Only the faces where the mask (m,) is true."""
        if faces.all():
            return self
        return Polygons(self.corners[np.repeat(faces, self.sizes)], self.sizes[faces], self.face[faces])

    def turned(self, faces):
        """The faces where the mask (m,) is true run the other way round."""
        if not faces.any():
            return self
        place = np.arange(len(self.corners))
        first, size = np.repeat(self.first, self.sizes), np.repeat(self.sizes, self.sizes)
        place = np.where(np.repeat(faces, self.sizes), 2 * first + size - 1 - place, place)
        return Polygons(self.corners[place], self.sizes, self.face)

    def rows(self, size):
        """(indices of the faces with so many corners, their corners (k, size))."""
        which = np.flatnonzero(self.sizes == size)
        return which, self.corners[self.first[which][:, None] + np.arange(size)]

    @cached_property
    def edges(self):
        """(edges (e, 2) smaller first and ascending, (c,) edge from each corner to the next, (e,) faces at each)."""
        head = self.corners[self.following]
        low, high = np.minimum(self.corners, head), np.maximum(self.corners, head)
        base = int(self.corners.max()) + 1 if len(self.corners) else 1
        key, which, count = np.unique(low * base + high, return_inverse=True, return_counts=True)
        return np.column_stack([key // base, key % base]), which.ravel(), count

    @cached_property
    def twins(self):
        """(k, 2) places of the two corners from which the two faces run along each edge that has two faces."""
        _, which, count = self.edges
        order = np.argsort(which, kind="stable")
        start = np.cumsum(count) - count
        shared = start[count == 2]
        return np.column_stack([order[shared], order[shared + 1]])


def read_points(points, name):
    """The caller's points as (n, 3) floats, or FormError."""
    try:
        points = np.array(points, dtype=float)
    except (TypeError, ValueError) as fault:
        raise FormError(f"Form '{name}': the points must be rows of three numbers.") from fault
    if points.ndim != 2 or points.shape[1] != 3 or not len(points):
        raise FormError(f"Form '{name}': the points must be rows of three numbers; given: shape {points.shape}.")
    bad = np.flatnonzero(~np.isfinite(points).all(axis=1))
    if len(bad):
        raise FormError(f"Form '{name}': {number(len(bad), 'point')} with a coordinate that is not a finite number "
                        f"({few('point', bad)}). Delete or move them, and apply the modifiers that made them.")
    return points


def read_faces(faces, count, name):
    """The caller's faces as Polygons over `count` points, or FormError."""
    if isinstance(faces, np.ndarray) and faces.ndim == 2:
        sizes, corners = np.full(len(faces), faces.shape[1]), faces.ravel()
    else:
        try:
            faces = [tuple(face) for face in faces]
        except TypeError as fault:
            raise FormError(f"Form '{name}': every face must be a row of point numbers.") from fault
        sizes = np.array([len(face) for face in faces], dtype=np.int64)
        corners = np.array(list(chain.from_iterable(faces)))
    if not len(corners):
        raise FormError(f"Form '{name}' has no faces, only {number(count, 'point')}; there is nothing to cover. "
                        "Curves and loose edges need a surface first (convert to mesh, fill).")
    whole = corners.dtype.kind in "iu" or (corners.dtype.kind == "f" and (corners == np.floor(corners)).all())
    if not whole:
        raise FormError(f"Form '{name}': the corners of the faces must be whole numbers, the indices of points.")
    polygons = Polygons(corners, sizes)
    outside = np.flatnonzero((polygons.corners < 0) | (polygons.corners >= count))
    if len(outside):
        raise FormError(f"Form '{name}': {few('face', np.unique(polygons.owner[outside]))} asks for point "
                        f"{polygons.corners[outside[0]]}, but the points run from 0 to {count - 1}. "
                        "Rebuild the face or the points.")
    return polygons


def number(count, word):
    """'1 face', '1,204 faces'."""
    return f"{count:,} {word}{'' if count == 1 else 's'}"


def few(word, indices, most=5):
    """'face 3', 'faces 3, 7 and 12', 'faces 3, 7, 9, 11, 12 and 40 more'."""
    shown = [str(int(i)) for i in indices[:most]]
    if len(indices) == 1:
        return f"{word} {shown[0]}"
    if len(indices) > most:
        return f"{word}s {', '.join(shown)} and {len(indices) - most:,} more"
    return f"{word}s {', '.join(shown[:-1])} and {shown[-1]}"
