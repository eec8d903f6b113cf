"""The form: what the maker modelled, mended, and what can be measured on it."""

from .coarsen import Coarse, coarsen
from .form import Form
from .surface import Surface

__all__ = ["Coarse", "Form", "Surface", "coarsen"]
