"""Flat: pieces laid flat without a flip, with least strain, and whether they overlap."""

from .flatten import Flattening, flatten
from .overlap import overlaps

__all__ = ["Flattening", "flatten", "overlaps"]
