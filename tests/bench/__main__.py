"""`python -m tests.bench` prints one table: what is timed, its floor, and the ratio of the medians of interleaved runs.

Read the ratio; the milliseconds are those of this machine in this hour.
"""

from __future__ import annotations

import argparse
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path
from statistics import median
from time import perf_counter

from planner.evaluate import evaluate
from planner.plan import Plan
from planner.planfile import load
from tests.bench import floor

DEMO = Path(__file__).parents[2] / "plans" / "sq6-03-drafted.toml"
MOST_AT_1000 = 2.0


def of_size(plan: Plan, count: int) -> Plan:
    """The demo with `count` qubits, repeating its six."""
    rows = tuple(replace(plan.qubit[index % 6], name=f"Q{index + 1}") for index in range(count))
    return replace(plan, qubit=rows)


def interleaved(first: Callable[[], object], second: Callable[[], object], runs: int) -> tuple[float, float]:
    """Median times of two calls in seconds, timed in turns so that both see the same machine."""
    times: tuple[list[float], list[float]] = ([], [])
    first(), second()
    for _ in range(runs):
        for call, taken in zip((first, second), times, strict=True):
            start = perf_counter()
            call()
            taken.append(perf_counter() - start)
    return median(times[0]), median(times[1])


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description="Example: python -m tests.bench --quick")
    parser.add_argument("--quick", action="store_true", help="a tenth of the runs")
    runs = 10 if parser.parse_args().quick else 100
    plan = replace(load(DEMO).plan, coil=(), phase_noise=(), stage=(), line=(), part=())  # what the floor has
    print(f"{'evaluation of':<16}{'ms':>9}{'bare numpy ms':>15}{'ratio':>8}")
    for count in (6, 100, 1000):
        many, given = of_size(plan, count), floor.arrays(count)
        ours, bare = interleaved(partial(evaluate, many, ranges=False), partial(floor.evaluation, given), runs)
        note = f"  at most {MOST_AT_1000:g} is wanted" if count == 1000 else ""
        print(f"{count:>5} qubits    {ours * 1e3:9.2f}{bare * 1e3:15.2f}{ours / bare:8.2f}{note}")


if __name__ == "__main__":
    main()
