"""How long the command line takes from the shell: first use, later starts."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from tests.benchmarks.lead import LEAD
from tests.benchmarks.timing import Timing, children

ROOT = LEAD.parents[1]


@dataclass(frozen=True)
class Start:
    """Wall and processor seconds of one call of the command line."""

    wall: Timing
    processor: Timing


def start_times(rounds: int = 5) -> dict[str, Start]:
    """Second and later starts of four calls, by their words."""
    with TemporaryDirectory() as folder:
        out = ["--out", str(Path(folder) / "out")]
        calls: dict[str, Sequence[str]] = {
            "rate --json --no-figures": ["rate", str(LEAD), "--json", "--no-figures", *out],
            "rate with figures": ["rate", str(LEAD), *out],
            "check": ["check", str(LEAD)],
            "--help": ["--help"],
        }
        for words in calls.values():
            call(words)
        samples = [{name: timed(words) for name, words in calls.items()} for _ in range(rounds)]
    return {name: started([one[name] for one in samples]) for name in calls}


def first_use() -> tuple[Start, Start]:
    """The first start with an empty cache, and what of it the compilation took."""
    with TemporaryDirectory() as cache:
        words = ["rate", str(LEAD), "--json", "--no-files"]
        first, second = (timed(words, {"NUMBA_CACHE_DIR": cache}) for _ in range(2))
    compilation = first[0] - second[0], first[1] - second[1]
    return started([first]), started([compilation])


def started(samples: Sequence[tuple[float, float]]) -> Start:
    return Start(*(Timing(column) for column in zip(*samples, strict=True)))


def timed(words: Sequence[str], extra: dict[str, str] | None = None) -> tuple[float, float]:
    """Wall and processor seconds of one call."""
    wall, processor = time.perf_counter(), children()
    call(words, extra)
    return time.perf_counter() - wall, children() - processor


def call(words: Sequence[str], extra: dict[str, str] | None = None) -> None:
    """The command line in a process of its own; it may say that limits are broken, but not fail."""
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **(extra or {})}
    command = [sys.executable, "-m", "reactorstage", *words]
    done = subprocess.run(command, capture_output=True, env=environment, check=False)
    assert done.returncode in (0, 5), done.stderr.decode()
