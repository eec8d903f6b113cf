"""What a metre of seam costs where: the maker's keep-clear weights."""

import numpy as np

from ..errors import WishError

NEVER = 1e3  # price where a seam may never be: measured to leave none there that can be elsewhere


def seam_prices(form, wishes):
    """(n,) price factor at the form's points, 1 where nothing is said. Raises WishError on weights of the wrong length."""
    price = np.ones(len(form.points))
    if wishes.keep_clear is not None:
        weights = np.asarray(wishes.keep_clear, dtype=float)
        if weights.shape != form.point_of.shape:
            raise WishError(
                f"keep_clear: {weights.size} weights for a form of {len(form.point_of)} points. "
                "Paint the weights on this form."
            )
        kept = form.point_of >= 0
        np.maximum.at(price, form.point_of[kept], np.minimum(1 + weights[kept], NEVER))
    return price
