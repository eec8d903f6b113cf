"""Levels parted into regions for the tests of the seams, and the slow twin: the cut mesh built and solved by plain loops."""

import numpy as np
from seamwright.form.form import Form
from seamwright.form.laplacian import smoothed_defects
from seamwright.form.measure import total_area
from seamwright.seams.cut import cut_by_fields
from seamwright.seams.fields import from_labels
from seamwright.seams.level import Level, scaled
from seamwright.seams.middle import LEAST, ROUND
from seamwright.seams.topology import voronoi

OWN = (lambda u: u**4 + np.cosh(u) - 1, lambda u: 4 * u**3 + np.sinh(u))
"""A caller's own density of distortion and its derivative."""


def level_of(form, price=None):
    """Level of a form's (points, faces), brought to area 4 pi."""
    surface = scaled(Form(*form).surface, total_area(Form(*form).surface))[0]
    return Level(surface, smoothed_defects(surface), price)


def fields_of_cells(level, count):
    """(n, count) fields of `count` round cells."""
    return from_labels(level, voronoi(level, count))


def cells(level, count):
    """Cut of a Level into `count` round cells."""
    return cut_by_fields(level.surface, fields_of_cells(level, count))


def middle_of(*cuts):
    """The place of the middle of three cuts: corners 1 / (cot + cot 60), rounded where an angle passes 120 degrees."""
    weights = []
    for k in range(3):
        a, b = cuts[(k + 1) % 3] - cuts[k], cuts[(k + 2) % 3] - cuts[k]
        x = 1 / np.tan(np.arctan2(np.linalg.norm(np.cross(a, b)), a @ b)) + 1 / np.tan(np.pi / 3)
        weights.append(2 / (x + np.hypot(x, ROUND)))
    return sum((LEAST + (1 - 3 * LEAST) * w / sum(weights)) * cut for w, cut in zip(weights, cuts, strict=True))


def cut_mesh(surface, cut):
    """(points, triangles, region of each triangle, seam segments, the cuts around each middle), built face by face.

    Every cut edge is a new point, and there is a middle where three regions meet.
    """
    points = surface.points.tolist()
    at_edge = {}
    for edge, place in zip(cut.edge.tolist(), cut.place.tolist(), strict=True):
        a, b = surface.edges[edge].tolist()
        at_edge[a, b] = len(points)
        points.append(((1 - place) * surface.points[a] + place * surface.points[b]).tolist())
    triangles, regions, segments, around = [], [], [], {}

    def between(a, b):
        return at_edge[min(a, b), max(a, b)]

    def sewn(one, other):
        return one != other and (cut.uncut is None or not cut.uncut[one, other])

    for face in surface.triangles.tolist():
        marks = [int(cut.labels[p]) for p in face]
        seams = [sewn(marks[k], marks[(k + 1) % 3]) for k in range(3)]
        if not any(seams):
            triangles.append(face)
            regions.append(marks[0])
        elif seams.count(True) == 1:  # a dart's end in the middle
            k = seams.index(True)
            a, b, c = face[k], face[(k + 1) % 3], face[(k + 2) % 3]
            p, q, r = between(a, b), between(b, c), between(c, a)
            middle = len(points)
            points.append(middle_of(*(np.array(points[k]) for k in (p, q, r))).tolist())
            triangles += [[a, p, middle], [p, b, middle], [b, c, middle], [c, a, middle]]
            regions += [int(cut.labels[a]), int(cut.labels[b]), int(cut.labels[b]), int(cut.labels[a])]
            segments.append((p, middle))
            around[middle] = p, q, r
        elif seams.count(True) == 2:
            k = (seams.index(False) + 2) % 3
            a, b, c = face[k], face[(k + 1) % 3], face[(k + 2) % 3]
            p, q = between(a, b), between(a, c)
            triangles += [[a, p, q], [p, b, c], [p, c, q]]
            regions += [marks[k], int(cut.labels[b]), int(cut.labels[b])]
            segments.append((p, q))
        else:
            a, b, c = face
            p, q, r = between(a, b), between(b, c), between(c, a)
            middle = len(points)
            points.append(middle_of(*(np.array(points[k]) for k in (p, q, r))).tolist())
            triangles += [[a, p, middle], [a, middle, r], [b, q, middle], [b, middle, p], [c, r, middle], [c, middle, q]]
            regions += [marks[0], marks[0], marks[1], marks[1], marks[2], marks[2]]
            segments += [(p, middle), (q, middle), (r, middle)]
            around[middle] = p, q, r
    return np.array(points), np.array(triangles), np.array(regions), segments, around


def dense(points, triangles):
    """(stiffness (n, n), mass (n,), [(triangle, its own stiffness)]) by one loop over the triangles."""
    stiffness, mass = np.zeros((len(points), len(points))), np.zeros(len(points))
    parts = []
    for triangle in triangles.tolist():
        a, b, c = points[triangle]
        area = 0.5 * np.linalg.norm(np.cross(b - a, c - a))
        local = np.zeros((3, 3))
        for k in range(3):  # corner k sees the side between the two others
            tip, one, two = points[triangle[k]], points[triangle[(k + 1) % 3]], points[triangle[(k + 2) % 3]]
            cotangent = np.dot(one - tip, two - tip) / (2 * area)
            i, j = (k + 1) % 3, (k + 2) % 3
            local[i, i] += cotangent / 2
            local[j, j] += cotangent / 2
            local[i, j] -= cotangent / 2
            local[j, i] -= cotangent / 2
        for i in range(3):
            mass[triangle[i]] += area / 3
            for j in range(3):
                stiffness[triangle[i], triangle[j]] += local[i, j]
        parts.append((triangle, local))
    return stiffness, mass, parts


def open_rim(triangles):
    """Set of the points on open edges."""
    seen = {}
    for triangle in triangles.tolist():
        for k in range(3):
            edge = tuple(sorted((triangle[k], triangle[(k + 1) % 3])))
            seen[edge] = seen.get(edge, 0) + 1
    return {p for edge, count in seen.items() if count == 1 for p in edge}


def slow_edges_cost(points, triangles, seams, load, price, thrift, pair):
    """(distortion, length, total, u) of seams along edges, pairs of points: one loop, one dense solve.

    load, price (n,): curvature by area and factor on length at the points.
    """
    stiffness, mass, parts = dense(points, triangles)
    held = open_rim(triangles) | {p for edge in seams for p in edge}
    free = [p for p in range(len(points)) if p not in held]
    u = np.zeros(len(points))
    u[free] = np.linalg.solve(stiffness[np.ix_(free, free)], (load * mass)[free])
    if pair is None:
        distortion = sum(0.5 * u[triangle] @ local @ u[triangle] for triangle, local in parts)
    else:
        distortion = sum(pair[0](u[p]) * mass[p] for p in range(len(points)))
    length = sum(0.5 * (price[p] + price[q]) * np.linalg.norm(points[q] - points[p]) for p, q in seams)
    return distortion, length, distortion + thrift * length, u


def slow_cost(level, cut, thrift, pair, weights):
    """(distortion, length, total, u) of a cut, on the cut mesh: one loop over its triangles, one dense solve.

    pair: (j, dj/du), None for half the integral of |grad u|^2, here taken from the gradients themselves.
    """
    surface = level.surface
    n = len(surface.points)
    points, triangles, regions, segments, around = cut_mesh(surface, cut)
    stiffness, mass, parts = dense(points, triangles)
    rim = open_rim(surface.triangles)
    held = rim | set(range(n, len(points)))
    free = [p for p in range(len(points)) if p not in held]
    density = np.concatenate([level.load / level.mass, np.zeros(len(points) - n)])
    u = np.zeros(len(points))
    u[free] = np.linalg.solve(stiffness[np.ix_(free, free)], (density * mass)[free])
    if pair is None:
        distortion = sum(
            0.5 * weights[region] * u[triangle] @ local @ u[triangle]
            for region, (triangle, local) in zip(regions.tolist(), parts, strict=True)
        )
    else:
        distortion = sum(weights[cut.labels[p]] * pair[0](u[p]) * mass[p] for p in range(n))
    price = level.price.tolist()
    for edge, place in zip(cut.edge.tolist(), cut.place.tolist(), strict=True):
        a, b = surface.edges[edge]
        price.append((1 - place) * level.price[a] + place * level.price[b])
    for middle in range(len(price), len(points)):
        price.append(np.mean([price[p] for p in around[middle]]))
    length = sum(0.5 * (price[p] + price[q]) * np.linalg.norm(points[q] - points[p]) for p, q in segments)
    return distortion, length, distortion + thrift * length, u[:n]
