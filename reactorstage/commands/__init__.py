"""The command line. `main` is its entry; heavy libraries load only when a verb needs them."""

from reactorstage.commands.main import main

__all__ = ["main"]
