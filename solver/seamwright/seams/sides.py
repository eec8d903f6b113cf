"""Who meets whom along the seams: every chain of the network with its two sides, as points of the opened pieces."""

from dataclasses import dataclass

import numpy as np

from .network import trace_chains


@dataclass
class Side:
    """One side of a chain: the piece's number and its points (q,) along the chain, numbered within the piece."""

    piece: int
    points: np.ndarray


@dataclass
class Joint:
    """chain (q,) points of the network; left and right Side, right None at an open edge; dart: one end is inside a piece."""

    chain: np.ndarray
    left: Side
    right: Side | None
    dart: bool


def joints(network):
    """List of Joint: the seams first, then the open edges, each in the order of their first point."""
    surface = network.surface
    local = np.empty_like(network.corner_points)
    for piece in range(network.pieces[0]):
        part, _, triangles = network.piece_surface(piece)
        local[triangles] = part.triangles
    degree = np.bincount(surface.edges[network.seam].ravel(), minlength=len(surface.points))
    on_open = np.zeros(len(surface.points), dtype=bool)
    on_open[surface.edges[surface.open_edges].ravel()] = True
    found = []
    for chain in network.chains:
        closed = chain[0] == chain[-1]
        dart = not closed and any(degree[end] == 1 and not on_open[end] for end in (chain[0], chain[-1]))
        left, right = _side(network, local, chain), _side(network, local, chain[::-1])
        right.points = right.points[::-1]
        found.append(Joint(chain, left, right, dart and left.piece == right.piece))
    meets = np.flatnonzero(on_open & (degree > 0))
    for chain in trace_chains(surface, surface.open_edges, meets):
        edge = surface.edge_index(chain[:2][None])[0]
        along = surface.edge_triangles[edge, 0 if chain[0] < chain[1] else 1] >= 0
        chain = chain if along else chain[::-1]
        found.append(Joint(chain, _side(network, local, chain), None, False))
    return found


def _side(network, local, chain):
    """The Side on the left of a chain, seen from outside."""
    surface = network.surface
    pairs = np.column_stack([chain[:-1], chain[1:]])
    edge = surface.edge_index(pairs)
    triangle = surface.edge_triangles[edge, np.where(pairs[:, 0] < pairs[:, 1], 0, 1)]
    corner = (surface.triangles[triangle] == pairs[:, :1]).argmax(axis=1)
    start = local[triangle, corner]
    end = local[triangle[-1], (corner[-1] + 1) % 3]
    return Side(int(network.pieces[1][triangle[0]]), np.append(start, end))
