"""`python -m keptair` is the command `keptair`."""

from keptair.cli import entry

if __name__ == "__main__":
    entry()
