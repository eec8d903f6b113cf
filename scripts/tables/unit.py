"""The unit of time of every table: one factorisation of the form's own cotangent Laplacian, measured in the same run."""

import statistics
import time

import gallery
import seamwright as sw
from scipy.sparse import diags_array
from seamwright.form.laplacian import Factor, cotangent_laplacian
from seamwright.form.measure import vertex_areas


def form_of(name, count):
    """The Form of the gallery called `name`, of about `count` points."""
    return sw.Form(*gallery.FORMS[name](count), name=name)


def one_factorisation(surface, repeats=3):
    """Processor seconds that the sparse factors of a Surface's cotangent Laplacian take, the middle of some repeats."""
    matrix = (cotangent_laplacian(surface) + 1e-6 * diags_array(vertex_areas(surface))).tocsc()
    times = []
    for _ in range(repeats):
        begin = time.process_time()
        Factor(matrix)
        times.append(time.process_time() - begin)
    return statistics.median(times)


def refusals(measures):
    """(names of the refused Measures, {name: value}) as plain JSON data; an infinite value is None."""
    values = {one.name: one.value if abs(one.value) < float("inf") else None for one in measures}
    return [one.name for one in measures if one.refused], values
