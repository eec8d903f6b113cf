"""What the report says about the fit: measured anew from the pieces as pattern.json has them, by nothing else."""

from dataclasses import dataclass

import numpy as np

from ..fit.measure import areas, stretches, utilisation, warp_weft_shear


@dataclass
class Reading:
    """Of t triangles: area and flat_area (t,) m2 (signed), middle (t, 3) metres on the form, stretch (t, 2) principal,
    threads (t, 3) warp, weft, shear, used (t,) share of the hard limits, eased (t,) the same of the comfortable ones."""

    area: np.ndarray
    flat_area: np.ndarray
    middle: np.ndarray
    stretch: np.ndarray
    threads: np.ndarray
    used: np.ndarray
    eased: np.ndarray


def read(piece, goods):
    """The Reading of a piece of pattern.json (see `data`)."""
    points, neutral, flat = (np.array(piece[key]) / 1000 for key in ("points", "neutral", "flat"))
    triangles = np.array(piece["triangles"])
    threads = warp_weft_shear(neutral, triangles, flat)
    u, v = (flat[triangles[:, k]] - flat[triangles[:, 0]] for k in (1, 2))
    flat_area = 0.5 * (u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0])
    return Reading(areas(neutral, triangles), flat_area, points[triangles].mean(axis=1),
                   stretches(neutral, triangles, flat), threads, utilisation(threads, goods),
                   utilisation(threads, goods, 1.0))


def together(readings):
    """One Reading of several."""
    return Reading(*(np.concatenate([getattr(reading, key) for reading in readings])
                     for key in Reading.__dataclass_fields__))


def figures(reading, goods):
    """Plain data on a Reading: areas, shares, stretch, utilisation, Sander's measures, the worst place (see `report`)."""
    area, whole = reading.area, reading.area.sum()
    comfortable, beyond = (float(area[inside].sum() / whole) for inside in (reading.eased <= 1, reading.used > 1))
    worst = int(reading.used.argmax())
    found = {
        "beyond": beyond, "area_m2": whole, "flat_area_m2": reading.flat_area.sum(),
        "shares": {"comfortable": comfortable, "tight": 1 - comfortable - beyond, "strained": beyond},
        "worst_place_mm": reading.middle[worst] * 1000,
        "stretch": {"p5": quantiles(reading.stretch[:, 1], area, 0.05), "p95": quantiles(reading.stretch[:, 0], area, 0.95),
                    "worst": farthest(reading.stretch)},
        "utilisation": {"p95": quantiles(reading.used, area, 0.95), "p99_5": quantiles(reading.used, area, 0.995),
                        "worst": reading.used[worst]},
        "sander": sander(reading),
    }
    if not goods.grain_free:
        for k, name in enumerate(("warp", "weft")):
            p5, p95 = quantiles(reading.threads[:, k], area, [0.05, 0.95])
            found[name] = {"p5": p5, "p95": p95, "worst": farthest(reading.threads[:, k])}
    if goods.shear is not None:
        shear = np.abs(np.degrees(reading.threads[:, 2]))
        found["shear_degrees"] = {"p95": quantiles(shear, area, 0.95), "worst": shear.max()}
    return found


def sander(reading):
    """{"l2", "linf"}: texture stretch of Sander, Snyder, Gortler, Hoppe 2001, 1 for an exact development.

    With G and g the largest and the smallest length on the form over length in the flat: the root of the mean of
    (G^2 + g^2) / 2 over the form's area, and the largest G, both at equal areas of form and flat.
    """
    scale = np.sqrt(reading.flat_area.sum() / reading.area.sum())
    squares = ((1 + reading.stretch) ** 2).sum(axis=1) / 2
    return {"l2": scale * np.sqrt(reading.area @ squares / reading.area.sum()), "linf": scale * (1 + reading.stretch.max())}


def quantiles(values, weights, shares):
    """Values (t,) at shares of the total weight, nearest from below."""
    order = np.argsort(values, kind="stable")
    total = np.cumsum(weights[order])
    place = np.searchsorted(total, np.asarray(shares) * total[-1] * (1 - 1e-12))
    return values[order][np.minimum(place, len(order) - 1)]


def farthest(values):
    """The value farthest from 0, with its sign."""
    return values.ravel()[np.argmax(np.abs(values))]
