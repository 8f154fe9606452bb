"""Work in threads that stops at Ctrl-C and keeps what is finished. Results come in the order of the tasks."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable, Sequence
from concurrent.futures import FIRST_COMPLETED, Future, ThreadPoolExecutor, wait
from typing import TypeVar

Result = TypeVar("Result")
WAIT = 0.2


def usable_jobs(jobs: int | None) -> int:
    """The number of threads: `jobs`, or as many as there are processors for this process."""
    if jobs is not None:
        return max(1, jobs)
    if hasattr(os, "sched_getaffinity"):
        return max(1, len(os.sched_getaffinity(0)))
    return os.cpu_count() or 1


def run(
    tasks: Sequence[Callable[[], Result]],
    jobs: int | None,
    stop: threading.Event,
    finished: Callable[[int, Result], None] = lambda index, result: None,
) -> list[Result | None]:
    """Results of the tasks in their order; None for those that never began.

    Ctrl-C sets `stop`: tasks that run are expected to notice it and return, others do not begin.
    `finished(index, result)` is called from the calling thread as tasks end.
    """
    results: list[Result | None] = [None] * len(tasks)
    with ThreadPoolExecutor(usable_jobs(jobs)) as pool:
        futures = {pool.submit(task): k for k, task in enumerate(tasks)}
        try:
            _collect(futures, results, stop, finished)
        except KeyboardInterrupt:
            stop.set()
            _collect(futures, results, stop, lambda index, result: None)
        finally:
            for future in futures:
                future.cancel()
    return results


def _collect(
    futures: dict[Future[Result], int],
    results: list[Result | None],
    stop: threading.Event,
    finished: Callable[[int, Result], None],
) -> None:
    """Wait for the futures, in short waits so that Ctrl-C is noticed."""
    pending = {future for future, k in futures.items() if results[k] is None and not future.cancelled()}
    while pending:
        if stop.is_set():
            pending = {future for future in pending if not future.cancel()}
        done, pending = wait(pending, timeout=WAIT, return_when=FIRST_COMPLETED)
        for future in sorted(done, key=lambda item: futures[item]):
            results[futures[future]] = future.result()
            finished(futures[future], future.result())
