"""Flat: pieces laid flat without a flip, with least strain, and whether they overlap."""

from .flatten import Flattening, flatten
from .overlap import overlaps
from .untangle import untangled

__all__ = ["Flattening", "flatten", "overlaps", "untangled"]
