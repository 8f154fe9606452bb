"""How long the command line takes from the shell: first use, later starts."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable, Sequence
from functools import partial
from pathlib import Path
from tempfile import TemporaryDirectory

from tests.benchmarks.lead import LEAD
from tests.benchmarks.timing import WALL, Timing, interleaved, seconds

ROOT = LEAD.parents[1]


def start_times(rounds: int = 5) -> dict[str, Timing]:
    """Second and later starts of four calls, by their words."""
    with TemporaryDirectory() as folder:
        out = ["--out", str(Path(folder) / "out")]
        calls: dict[str, Sequence[str]] = {
            "rate --json --no-figures": ["rate", str(LEAD), "--json", "--no-figures", *out],
            "rate with figures": ["rate", str(LEAD), *out],
            "check": ["check", str(LEAD)],
            "--help": ["--help"],
        }
        tasks: dict[str, Callable[[], object]] = {name: partial(call, words) for name, words in calls.items()}
        return interleaved(tasks, rounds, slot=0.0, clock=WALL)


def first_use() -> tuple[float, float]:
    """Seconds of the first start with an empty cache, and of those what the compilation took."""
    with TemporaryDirectory() as cache:
        words = ["rate", str(LEAD), "--json", "--no-files"]
        first = seconds(lambda: call(words, {"NUMBA_CACHE_DIR": cache}))
        second = min(seconds(lambda: call(words, {"NUMBA_CACHE_DIR": cache})) for _ in range(2))
    return first, first - second


def call(words: Sequence[str], extra: dict[str, str] | None = None) -> None:
    """The command line in a process of its own; it may say that limits are broken, but not fail."""
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **(extra or {})}
    command = [sys.executable, "-m", "reactorstage", *words]
    done = subprocess.run(command, capture_output=True, env=environment, check=False)
    assert done.returncode in (0, 5), done.stderr.decode()
