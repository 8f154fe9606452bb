"""Benchmarks: python -m tests.benchmarks [--only PART ...] [--markdown] [--figures FOLDER]."""

from __future__ import annotations

import os

os.environ.setdefault("OMP_NUM_THREADS", "1")
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import argparse
from collections.abc import Iterator
from pathlib import Path

from tests.benchmarks import batch, scaling, search, start_up
from tests.benchmarks.lead_rows import LeadRoutes, gradient_rows, rating_rows
from tests.benchmarks.table import Row, markdown, plain, timed
from tests.benchmarks.timing import Timing, load, machine

PARTS = ("pass", "search", "batch", "start", "scaling")


def main() -> None:
    options = arguments()
    print(
        machine(),
        f"{load()} at the beginning; time of one core unless processors or wall are named",
        sep="\n",
        flush=True,
    )
    lead = LeadRoutes() if {"pass", "search"} & set(options.only) else None
    rows: list[Row] = []
    for part in options.only:
        if part == "scaling":
            continue
        found = list(rows_of(part, lead, options.rounds))
        rows += found
        print("", *plain(found), load(), sep="\n", flush=True)
    if "scaling" in options.only:
        found_growths = scaling.growths(options.rounds)
        print(*scaling.lines(found_growths), load(), sep="\n")
        if options.figures:
            print(f"written: {scaling.draw(found_growths, options.figures)}")
    if options.markdown:
        print("", *markdown(rows), "", f"{machine()}.", sep="\n")


def arguments() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks", description="Times of the lead case.")
    parser.add_argument("--only", nargs="+", choices=PARTS, default=PARTS, help="parts to measure")
    parser.add_argument("--rounds", type=int, default=15, help="rounds of the short measurements")
    parser.add_argument("--markdown", action="store_true", help="the rows as a Markdown table at the end")
    parser.add_argument("--figures", type=Path, metavar="FOLDER", help="where the plot of the scaling goes")
    return parser.parse_args()


def rows_of(part: str, lead: LeadRoutes | None, rounds: int) -> Iterator[Row]:
    """The rows of one part."""
    if part == "batch":
        yield from batch_rows()
    elif part == "start":
        yield from start_rows()
    elif lead is not None:
        yield from gradient_rows(lead, rounds) if part == "pass" else search_rows(lead)
        if part == "pass":
            yield from rating_rows(lead, rounds)


def search_rows(lead: LeadRoutes) -> Iterator[Row]:
    local = search.local_optima(lead.programme)
    ended = f"{local.ended} of {len(local.endings)} starts ended at a local optimum"
    yield timed("one local optimum, median over 20 starts, one core", local.timing, at_most=50.0, note=ended)
    scipy = search.scipy_optimum(lead.programme, lead.scipy.route, lead.programme.now)
    ours = local.endings[0].cost
    note = f"{scipy.points} points, cost {3600 * scipy.cost:.2f} per h, violation {scipy.violation:.0e}"
    if ours is not None:
        note += f"; this project's from there {3600 * ours:.2f}"
    what = "the same by SciPy with forward differences, once from today's setting"
    yield Row(what, scipy.seconds, "s", note=note)
    many = search.many_starts(lead.programme)
    cores = f"wall, {os.cpu_count()} processors"
    yield timed("40 starts", many["search"], "s", at_most=1.5, note=cores)
    yield timed("40 starts with the explanation of the best", many["with explanation"], "s", note=cores)


def batch_rows() -> Iterator[Row]:
    name = f"{batch.COUNT:,} ratings with sampled kinetics"
    run = batch.measured()
    if run is None:
        yield Row(name, None, "s", note="no rate_many in this version")
        return
    note = f"wall, {os.cpu_count()} processors; {run.processor:.1f} s of processor time; {run.failed} failed"
    yield Row(name, run.seconds, "s", target=("at most", 6.0), note=note)
    yield Row("peak memory of that process", run.peak, "MB", target=("at most", 500.0))


def start_rows() -> Iterator[Row]:
    targets = {"rate --json --no-figures": 1.5, "rate with figures": 3.0, "check": 1.0, "--help": 0.25}
    for name, start in start_up.start_times().items():
        yield timed(f"later start of `{name}`", start.wall, "s", targets[name], used(start.processor))
    first, compilation = start_up.first_use()
    yield timed("first start with an empty cache", first.wall, "s", note=used(first.processor))
    yield timed("of that the compilation", compilation.wall, "s", 20.0, used(compilation.processor))


def used(processor: Timing) -> str:
    return f"wall; processor {processor.median:.2f} s"


if __name__ == "__main__":
    main()
