"""10,000 ratings of the lead case with sampled kinetics, in a process of their own for its peak memory."""

from __future__ import annotations

import json
import resource
import subprocess
import sys
import time
from dataclasses import dataclass

import numpy as np

COUNT = 10_000


@dataclass(frozen=True)
class BatchRun:
    """Wall seconds, processor seconds of all threads, peak memory in MB, settings without an answer."""

    seconds: float
    processor: float
    peak: float
    failed: int


def measured(count: int = COUNT) -> BatchRun | None:
    """The run in a fresh process, after one that compiles if need be; None without `rate_many`."""
    import reactorstage

    if not hasattr(reactorstage, "rate_many"):
        return None
    return [in_a_process(count) for count in (2, count)][-1]


def in_a_process(count: int) -> BatchRun:
    command = [sys.executable, "-m", "tests.benchmarks.batch", str(count)]
    done = subprocess.run(command, capture_output=True, text=True, check=True)
    return BatchRun(**json.loads(done.stdout))


def run(count: int) -> BatchRun:
    """Rate constants spread by 10 %, activation energies by 3 kJ/mol, activity of every bed by 5 %."""
    from reactorstage import compile, rate_many
    from tests.benchmarks.lead import lead_case

    programme, rng = compile(lead_case()), np.random.default_rng(1)
    reactions, beds = programme.model.chemistry.reactions, programme.model.layout.beds
    spread = {f"reaction {name}.ln rate constant": rng.normal(0.0, 0.1, count) for name in reactions}
    spread |= {f"reaction {name}.activation energy": rng.normal(0.0, 3e3, count) for name in reactions}
    spread |= {f"{bed.owner}.catalyst activity": rng.normal(1.0, 0.05, count) for bed in beds}
    wanted = ["money.total", *dict.fromkeys(limit.quantity for limit in programme.limits)]
    rate_many(programme, {name: column[:2] for name, column in spread.items()}, quantities=wanted)
    wall, processor = time.perf_counter(), time.process_time()
    found = rate_many(programme, spread, quantities=wanted)
    wall, processor = time.perf_counter() - wall, time.process_time() - processor
    kilobytes = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    scale = 1e-6 if sys.platform == "darwin" else 1e-3
    return BatchRun(wall, processor, kilobytes * scale, sum(map(bool, found.failures)))


if __name__ == "__main__":
    print(json.dumps(vars(run(int(sys.argv[1])))))
