"""Where the seams go: energy, flow, topology, and the network they end up as."""

from .study import log_scale, seam_energy

__all__ = ["log_scale", "seam_energy"]
