"""What the maker can do, one operator a file."""

from . import drawn
from .check import SEAMWRIGHT_OT_check
from .clear import SEAMWRIGHT_OT_clear
from .cover import SEAMWRIGHT_OT_cover, SEAMWRIGHT_OT_stop
from .save import SEAMWRIGHT_OT_save_sheets

CLASSES = (SEAMWRIGHT_OT_check, *drawn.CLASSES, SEAMWRIGHT_OT_cover, SEAMWRIGHT_OT_stop, SEAMWRIGHT_OT_save_sheets,
           SEAMWRIGHT_OT_clear)
