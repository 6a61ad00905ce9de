"""What a million draws cost, against reducing a million readings, measured in one run.

    python tests/bench/bench_montecarlo.py [--draws 1000000]

Prints the ratios asked for and leaves with 1 if one is missed. What counts is the processor time of
this process over all its threads, the least of several rounds taken by turns.

* Monte Carlo of the demo case, with all its instruments, heat loss, velocities and sampling, against
  ``quality`` of as many readings: under 4 times.
* The same seed gives the same answer, in another number of blocks of progress too.
* The memory at its peak: at most 48 bytes a draw and 16 MB.
"""

from __future__ import annotations

import argparse
import pathlib
import sys
import time
import tracemalloc
from collections.abc import Callable

import numpy as np

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parents[2]))

from engine.calorimeter import quality  # noqa: E402
from engine.job.assessment import assess  # noqa: E402
from engine.job.case.demo import DEMO  # noqa: E402
from engine.job.uncertainty import Measurement, measurement_of  # noqa: E402
from engine.measurement import monte_carlo  # noqa: E402

ALLOWED, BYTES_PER_DRAW, ROOM = 4.0, 48, 16e6


def readings(count: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Readings that scatter about those of the demo case, as its draws do."""
    si, rng = assess(DEMO).si, np.random.default_rng(3)
    return (si["p_line"] + 1e4 * rng.standard_normal(count), si["p_exhaust"] + 300 * rng.standard_normal(count),
            si["T_exhaust"] + 0.2 * rng.standard_normal(count))


def drawn(m: Measurement, draws: int, **how):
    return monte_carlo(m.model, m.inputs, on_result=m.on_result, coverage=m.coverage, draws=draws, **how)


def least_by_turns(functions: list[Callable[[], object]], rounds: int = 5) -> list[float]:
    """Processor seconds of each, the least of the rounds."""
    costs = [float("inf")] * len(functions)
    for _ in range(rounds):
        for k, function in enumerate(functions):
            start = time.process_time()
            function()
            costs[k] = min(costs[k], time.process_time() - start)
    return costs


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--draws", type=int, default=1_000_000)
    draws = parser.parse_args().draws
    missed, columns, measurement = False, readings(draws), measurement_of(assess(DEMO))

    def line(what: str, value: float, met: bool, target: str) -> None:
        nonlocal missed
        missed |= not met
        print(f"{what:<52}{value:>10.2f}   {'met' if met else 'MISSED'} ({target})")

    reduced, monte = least_by_turns([lambda: quality(*columns), lambda: drawn(measurement, draws)])
    print(f"{draws:,} readings {reduced:.2f} s, {draws:,} draws {monte:.2f} s of processor time")
    line("Monte Carlo / quality", monte / reduced, monte < ALLOWED * reduced, f"under {ALLOWED:g}")

    one, again = drawn(measurement, draws, seed=7), drawn(measurement, draws, seed=7, progress=lambda done: None)
    same = one.symmetric == again.symmetric and bool((one.quantiles == again.quantiles).all())
    line("same seed, same answer", float(same), same, "1")

    tracemalloc.start()
    drawn(measurement, draws)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    line("memory at the peak, bytes a draw", peak / draws, peak <= BYTES_PER_DRAW * draws + ROOM,
         f"at most {BYTES_PER_DRAW} and {ROOM / 1e6:g} MB")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
