"""``python -m calccheck``."""

from calccheck.cli import entry

if __name__ == "__main__":  # also imported by processes that share the work
    entry()
