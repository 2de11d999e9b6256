"""calccheck."""
