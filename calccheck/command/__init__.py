"""The commands, one module each, and what they share: the only place that touches disk, terminal and git."""
