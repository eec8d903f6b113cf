"""What holds for the pieces of every pattern: flat disks that cover their form once and leave nothing of it out."""

import numpy as np
from seamwright.form.measure import areas
from seamwright.form.surface import Surface


def share_covered(form, pattern):
    """(t,) share of each of the form's triangles that the pieces cover."""
    source = np.concatenate([piece.source for piece in pattern.pieces])
    sizes = np.concatenate([piece.areas for piece in pattern.pieces])
    return np.bincount(source, sizes, minlength=len(form.triangles)) / areas(form.surface)


def check_tiled(form, pattern):
    """Assert that the pieces are disks without a flip, and tile the form."""
    for piece in pattern.pieces:
        part = Surface(piece.points, piece.triangles)
        assert part.euler == 1 and part.triangle_components[0] == 1 and len(part.boundary_loops) == 1
        assert piece.flat_areas.min() > 0
    np.testing.assert_allclose(share_covered(form, pattern), 1, rtol=1e-9)
