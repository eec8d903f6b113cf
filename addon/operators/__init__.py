"""What the maker can do, one operator a file."""

from .check import SEAMWRIGHT_OT_check
from .clear import SEAMWRIGHT_OT_clear
from .cover import SEAMWRIGHT_OT_cover, SEAMWRIGHT_OT_stop
from .hold import SEAMWRIGHT_OT_hold, SEAMWRIGHT_OT_let_go
from .save import SEAMWRIGHT_OT_save_sheets

CLASSES = (SEAMWRIGHT_OT_check, SEAMWRIGHT_OT_hold, SEAMWRIGHT_OT_let_go, SEAMWRIGHT_OT_cover, SEAMWRIGHT_OT_stop,
           SEAMWRIGHT_OT_save_sheets, SEAMWRIGHT_OT_clear)
