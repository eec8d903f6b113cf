"""Seamwright: form and wishes in, pattern out. The names below are the whole public face."""

from .cover import cover
from .errors import CoverError, FormError, SeamwrightError, WishError
from .fit.goods import Goods, goods, read_goods, write_goods
from .fit.swatch import goods_from_swatch
from .form.form import Form
from .pattern import Pattern, Piece, Seam
from .seams import crease_weights, log_scale, seam_energy, seen_weights
from .wishes import Wishes

__version__ = "0.1.0"

__all__ = [
    "CoverError", "Form", "FormError", "Goods", "Pattern", "Piece", "Seam", "SeamwrightError", "WishError", "Wishes",
    "cover", "crease_weights", "goods", "goods_from_swatch", "log_scale", "read_goods", "seam_energy", "seen_weights",
    "write_goods",
]
