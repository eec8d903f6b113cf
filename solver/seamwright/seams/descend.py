"""Downhill flow of a seam network: L-BFGS on the region fields, in a smoothing metric, with the exact gradient."""

from collections import deque
from dataclasses import dataclass

import numpy as np

from .cut import cut_by_fields
from .energy import evaluate, field_gradient
from .fields import redistance

MEMORY = 6
FARTHEST = 2.0  # edge lengths a seam may move in one step
ROUND = 8  # steps between two redistancings
LAST = 4  # steps at the end by which it is told whether the flow came to rest:
REST = 0.005  # they lower the total by less than this share; what many more steps would gain is then less, too (measured)


@dataclass
class Descent:
    """Where the flow ended: fields (n, K), cut, cost; steps; converged (False: the steps ran out before it came to rest);
    history of totals."""

    fields: np.ndarray
    cut: object
    cost: object
    steps: int
    converged: bool
    history: list


def descend(level, fields, thrift, energy="square", weights=None, steps=30, tolerance=1e-4, emphasis=None, uncut=None):
    """Flow until a step gains less than `tolerance` of the total twice running, or for `steps` steps. Returns a Descent.

    uncut (K, K) bool: pairs of regions that are of one piece, None for none.
    Nocedal, Wright: Numerical Optimization, 7.2 (two-loop recursion); the metric is (M + l^2 L)^-1 on each field.
    """
    count = fields.shape[1]
    cut = cut_by_fields(level.surface, fields, level.labels(fields), uncut)
    history, taken, small, stuck = [], 0, 0, 0
    while taken < steps and small < 2 and stuck < 2:
        fields, twins = _fields(level, cut, count)
        cut = cut_by_fields(level.surface, fields, level.labels(fields), uncut)
        cost = evaluate(level, cut, thrift, energy, weights, emphasis=emphasis)
        history.append(cost.total)
        gradient = _gradient(level, cut, fields, cost, twins)
        pairs = deque(maxlen=MEMORY)
        for _ in range(min(ROUND, steps - taken)):
            taken += 1
            direction = _two_loop(level, gradient, pairs)
            if (direction * gradient).sum() >= 0:
                direction, pairs = -_metric(level, gradient), deque(maxlen=MEMORY)
            if twins is not None:
                direction = level.symmetry.project_move(direction, twins)
            direction *= _allowed(level, cut, direction, first=not pairs)
            step = _backtrack(level, fields, direction, gradient, cost, thrift, energy, weights, emphasis, uncut)
            if step is None:
                stuck += 1
                break
            new_fields, cut, new_cost = step
            new_gradient = _gradient(level, cut, new_fields, new_cost, twins)
            moved, bent = new_fields - fields, new_gradient - gradient
            if (moved * bent).sum() > 1e-12 * np.linalg.norm(moved) * np.linalg.norm(bent):
                pairs.append((moved, bent))
            gain = (cost.total - new_cost.total) / max(cost.total, 1e-300)
            small = small + 1 if gain < tolerance else 0
            stuck = 0
            fields, gradient, cost = new_fields, new_gradient, new_cost
            history.append(cost.total)
            if small == 2:
                break
    before = history[max(len(history) - 1 - LAST, 0)]
    resting = before - history[-1] < REST * before
    return Descent(fields, cut, cost, taken, small >= 2 or stuck >= 2 or resting, history)


def _fields(level, cut, count):
    """(fields redistanced and, where the level is to be symmetric, made so; the regions' partners or None)."""
    fields = redistance(level, cut, count)
    if level.symmetry is None:
        return fields, None
    twins = level.symmetry.partners(cut.labels, count)
    return level.symmetry.project(fields, twins), twins


def _gradient(level, cut, fields, cost, twins):
    gradient = field_gradient(level, cut, fields, cost.slope)
    return gradient if twins is None else level.symmetry.pull_back(gradient, twins)


def _metric(level, gradient):
    return level.smoother.solve(gradient)


def _two_loop(level, gradient, pairs):
    q, factors = gradient.copy(), []
    for moved, bent in reversed(pairs):
        rho = 1.0 / (moved * bent).sum()
        a = rho * (moved * q).sum()
        q -= a * bent
        factors.append((a, rho))
    direction = _metric(level, q)
    if pairs:
        moved, bent = pairs[-1]
        direction *= (moved * bent).sum() / (bent * _metric(level, bent)).sum()
    for (moved, bent), (a, rho) in zip(pairs, reversed(factors), strict=True):
        direction += (a - rho * (bent * direction).sum()) * moved
    return -direction


def _allowed(level, cut, direction, first):
    """Factor that keeps every cut within FARTHEST edge lengths; a first step is stretched to one edge length."""
    a, b = level.surface.edges[cut.edge].T
    i, j = cut.labels[a], cut.labels[b]
    rows = np.concatenate([a, b])
    own, other = np.concatenate([i, i]), np.concatenate([j, j])
    move = 0.5 * np.abs(direction[rows, own] - direction[rows, other]).max(initial=1e-300)
    limit = FARTHEST * level.edge_length / move
    return min(limit, 0.5 * level.edge_length / move) if first else min(limit, 1.0)


def _backtrack(level, fields, direction, gradient, cost, thrift, energy, weights, emphasis, uncut):
    slope = (direction * gradient).sum()
    share = 1.0
    for _ in range(8):
        trial = fields + share * direction
        cut = cut_by_fields(level.surface, trial, level.labels(trial), uncut)
        new = evaluate(level, cut, thrift, energy, weights, emphasis=emphasis)
        if new.total <= cost.total + 1e-4 * share * slope:
            return trial, cut, new
        share *= 0.4
    return None
