"""Where the seams go: energy, flow, topology, and the network they end up as."""

from .prices import crease_weights, seen_weights
from .study import log_scale, seam_energy

__all__ = ["crease_weights", "log_scale", "seam_energy", "seen_weights"]
