"""The command line. `main` is its entry; heavy libraries load only when a verb needs them."""

import os

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # matrices are small, and the starts have threads

from reactorstage.commands.main import main

__all__ = ["main"]
