"""Every identifier the add-on leaves in the host or in a file, declared once."""

COMMAND = "seamwright"
TAB = "Seamwright"

# on objects
PROPERTY = "seamwright"

# on meshes
UV_MAP = "Seamwright"
PIECE = "seamwright_piece"
STRETCH = "seamwright_stretch"
HELD = "seamwright_held"
SHUT = "seamwright_shut"
ONLY = "seamwright_only"

# materials of the covered copy, followed by a number
MATERIAL = "Seamwright"

# operators
COVER = "seamwright.cover"
STOP = "seamwright.stop"
CHECK = "seamwright.check"
SAVE = "seamwright.save_sheets"
CLEAR = "seamwright.clear"
HOLD = "seamwright.hold_seams"
LET_GO = "seamwright.let_go_seams"
SHUT_EDGES = "seamwright.shut_edges"
OPEN_EDGES = "seamwright.open_edges"
COVER_ONLY = "seamwright.cover_only"
COVER_ALL = "seamwright.cover_all"

# panels and lists
FORM_PANEL = "SEAMWRIGHT_PT_form"
WISHES_PANEL = "SEAMWRIGHT_PT_wishes"
FIT_PANEL = "SEAMWRIGHT_PT_fit"
PIECE_LIST = "SEAMWRIGHT_UL_pieces"
