"""The parts of a form that are covered one by one, each opened along the seams that the maker holds."""

from dataclasses import dataclass, replace

import numpy as np

from .form.surface import Surface
from .seams.held import Held
from .seams.network import cut_through
from .seams.opened import opened
from .seams.route import cut_along
from .seams.study import at_points, shares
from .seams.whole import bound_faces, kept_whole, patches


@dataclass
class Ground:
    """What seams are sought on: a Surface and, of its points (n,), triangles (t,) and edges (e,), what Part says of them."""

    surface: Surface
    price: np.ndarray
    polygon: np.ndarray
    diagonal: np.ndarray
    patch: np.ndarray | None
    bound: np.ndarray | None
    held: Held

    def network(self, level, cut, route, metric):
        """The Network, all disks, of a Cut of its Level; metric: metres over lengths on the level."""
        if route == "edges":
            return cut_along(level, cut, self.polygon, self.diagonal, metric)
        return opened(self.kept_whole(cut_through(level, self.held.evened(cut), metric), route))

    def kept_whole(self, network, route):
        """A Network on this ground in which the faces stay whole that have to."""
        if route == "edges":
            return replace(network, face=self.polygon[network.source])
        return network if self.bound is None else kept_whole(network, self.bound)

    def cut_out(self, network, inside):
        """(Ground of the triangles `inside` (t,) bool of a Network of this one, which seams part from the others; (t',) the
        triangle of this one that each of its triangles lies in)."""
        surface, points, triangles = network.part_surface(np.flatnonzero(inside))
        source = network.source[triangles]
        share = shares(self.surface, network, 1.0)
        price = at_points(network.surface, self.surface.triangles[network.source], share, self.price)[points]
        polygon = np.unique(self.polygon[source], return_inverse=True)[1].ravel()
        patch = bound = None
        if self.bound is not None and (self.bound[source] >= 0).any():
            patch = patches(surface, self.bound[source] >= 0)
            bound = bound_faces(surface, patch, polygon)
        held = Held(surface, np.zeros(len(surface.edges), dtype=bool))
        return Ground(surface, price, polygon, _within(surface, polygon), patch, bound, held), source


class Part(Ground):
    """One connected part of a Form.

    triangles (t,): the form's triangles in it, ascending; held: a Held of its Surface in the middle of the goods; on_form:
    the same triangles on the form itself; surface: that of `held` opened along the held seams, on which everything runs;
    points (n,): the form's point of each of its points; price (n,) of seams there; polygon (t,): the maker's face of each
    triangle, numbered from 0, faces that stay whole together as one; diagonal (e,) bool: edges within those. Where edges are
    shut, patch (n,) and bound (t,) tell the patches of points and of faces that stay whole (see `seams.whole`); else they
    are None.
    """

    def __init__(self, form, neutral, triangles, held, shut, prices):
        self.triangles = triangles
        points, local = np.unique(form.triangles[triangles], return_inverse=True)
        whole = self.on_form = Surface(neutral.points[points], local.reshape(-1, 3))
        if neutral is not form.surface:
            self.on_form = Surface(form.points[points], whole.triangles)
        self.held = Held(whole, _edges_of_part(form, triangles, whole, held))
        self.surface = self.held.opened
        self.points = points[self.held.origin]
        self.price = prices[self.points]
        self.polygon = np.unique(form.polygon[triangles], return_inverse=True)[1].ravel()
        self.shut = self.edges_of(form, shut)
        self.patch = self.bound = None
        if self.shut.any():
            beside = self.polygon[self.surface.edge_triangles[self.shut]]
            self.patch = patches(self.surface, np.isin(self.polygon, beside))
            self.bound = bound_faces(self.surface, self.patch, self.polygon)
            one = np.where(self.bound < 0, self.polygon, self.polygon.max() + 1 + self.bound)
            self.polygon = np.unique(one, return_inverse=True)[1].ravel()
        self.diagonal = _within(self.surface, self.polygon)

    def edges_of(self, form, values):
        """(e,) of this part's surface: what values (k,) say of the edges of the form's own."""
        return self.held.at_opened(_edges_of_part(form, self.triangles, self.held.surface, values))


def _within(surface, polygon):
    """(e,) bool: edges within one of the faces (t,)."""
    sides = polygon[surface.edge_triangles]
    return ~surface.open_edges & (sides[:, 0] == sides[:, 1])


def parts_of(form, neutral, held, shut, prices):
    """List of the Parts of a form; neutral: its Surface in the middle of the goods; held, shut (e,) bool: edges of the
    form's surface that are held seams, and that may be none; prices (n,) of seams at its points."""
    count, component = form.surface.triangle_components
    return [Part(form, neutral, np.flatnonzero(component == index), held, shut, prices) for index in range(count)]


def _edges_of_part(form, triangles, surface, values):
    """(e',) of values (e,) at the form's edges, for the edges of the Surface of some of its triangles."""
    found = np.empty(len(surface.edges), dtype=values.dtype)
    found[surface.triangle_edges] = values[form.surface.triangle_edges[triangles]]
    return found
