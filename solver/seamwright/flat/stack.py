"""Several pieces as one: what a State asks of a rest shape, piece after piece."""

import numpy as np


class Stack:
    """The Rests of several pieces; their points and triangles numbered on from piece to piece.

    begin (p + 1,): the first point of every piece, and their count; owner (t,): the piece of each triangle.
    """

    def __init__(self, rests):
        self.rests = rests
        self.begin = np.cumsum([0] + [rest.count for rest in rests])
        self.count = int(self.begin[-1])
        self.owner = np.repeat(np.arange(len(rests)), [len(rest.area) for rest in rests])
        self.area = np.concatenate([rest.area for rest in rests])
        self.total = self.area.sum()
        faces = np.cumsum([0] + [len(rest.area) for rest in rests])
        self._points = [slice(a, b) for a, b in zip(self.begin[:-1], self.begin[1:], strict=True)]
        self._faces = [slice(a, b) for a, b in zip(faces[:-1], faces[1:], strict=True)]

    def split(self, flat):
        """List of every piece's own points, out of (n, ...)."""
        return [flat[own] for own in self._points]

    def split_faces(self, values):
        """List of every piece's own triangles' values, out of (t, ...)."""
        return [values[own] for own in self._faces]

    def maps(self, flat):
        """(alpha, beta), each (t,) complex, as a Rest's."""
        maps = [rest.maps(part) for rest, part in zip(self.rests, self.split(flat), strict=True)]
        return tuple(np.concatenate(part) for part in zip(*maps, strict=True))

    def gather(self, at_alpha, at_beta):
        """(n,) complex gradient at the points, as a Rest's."""
        return np.concatenate([rest.gather(at_alpha[own], at_beta[own])
                               for rest, own in zip(self.rests, self._faces, strict=True)])

    def stiffness(self, bend, at_alpha, at_beta, floor):
        """[(slice of the points, factors)], one a piece, as a Rest's."""
        return [(points, rest.stiffness(bend[:, own], at_alpha[:, own], at_beta[:, own], floor[own])[0][1])
                for rest, points, own in zip(self.rests, self._points, self._faces, strict=True)]
