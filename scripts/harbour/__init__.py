"""The demo scene: soft props of a stage harbour, modelled with the host's own tools, in metres."""
