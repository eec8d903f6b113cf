"""The form: what the maker modelled, mended, and what can be measured on it."""

from .form import Form
from .surface import Surface

__all__ = ["Form", "Surface"]
