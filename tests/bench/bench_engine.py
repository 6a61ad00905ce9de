"""What a reading costs, measured in one run against the libraries one would use instead.

    python -m tests.bench.bench_engine [--readings 200000] [--largest 10000000]

Prints the ratios asked for and leaves with 1 if one is missed. What counts is the processor time of
this process over all its threads, the least of several rounds; what is compared is measured by
turns, so that whatever else the machine does falls on both.

* ``quality`` against CoolProp's array calls of IF97 for the same three properties: h(p_exhaust,
  T_exhaust), and h of saturated liquid and vapour at p_line. At least 5 times as fast.
* ``quality`` against a loop over ``iapws`` for the same, scaled up from a few hundred readings. At
  least 300 times as fast.
* The cost per reading from a thousand to ten million: flat, so largest over smallest is at most 2.
* The memory a call takes at its peak, over that of its inputs and outputs: at most 1.5.
"""

from __future__ import annotations

import argparse
import sys
import time
import tracemalloc
from collections.abc import Callable

import CoolProp.CoolProp as CP
import numpy as np
from iapws import IAPWS97

from engine.calorimeter import Status, quality
from engine.steam import saturation_temperature

LOOPED = 200  # readings of the iapws loop


def readings(count: int) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Wet lines of 4 to 100 bar, exhausts of 0.7 to 1.2 bar with 5 to 20 K of superheat."""
    rng = np.random.default_rng(20)
    p_line, p_exhaust = np.exp(rng.uniform(np.log(4e5), np.log(1e7), count)), rng.uniform(0.7e5, 1.2e5, count)
    return p_line, p_exhaust, saturation_temperature(p_exhaust) + rng.uniform(5.0, 20.0, count)


def by_coolprop(p_line, p_exhaust, T_exhaust, zeros, ones):
    h = CP.PropsSI("H", "P", p_exhaust, "T", T_exhaust, "IF97::Water")
    h_f = CP.PropsSI("H", "P", p_line, "Q", zeros, "IF97::Water")
    h_g = CP.PropsSI("H", "P", p_line, "Q", ones, "IF97::Water")
    return (h - h_f) / (h_g - h_f)


def by_iapws(p_line, p_exhaust, T_exhaust):
    x = []
    for p1, p2, T2 in zip((p_line * 1e-6).tolist(), (p_exhaust * 1e-6).tolist(), T_exhaust.tolist(), strict=True):
        h_f, h_g = IAPWS97(P=p1, x=0).h, IAPWS97(P=p1, x=1).h
        x.append((IAPWS97(P=p2, T=T2).h - h_f) / (h_g - h_f))
    return np.array(x)


def seconds(function: Callable[[], object]) -> float:
    start = time.process_time()
    function()
    return time.process_time() - start


def least_by_turns(functions: list[Callable[[], object]], rounds: int) -> list[float]:
    return [min(times) for times in zip(*([seconds(f) for f in functions] for _ in range(rounds)), strict=True)]


class Report:
    """Lines of results; remembers whether a target was missed."""

    def __init__(self):
        self.missed = False

    def line(self, what: str, value: float, met: bool, target: str) -> None:
        self.missed |= not met
        print(f"{what:<52}{value:>10.2f}   {'met' if met else 'MISSED'} ({target})")


def compare(report: Report, count: int) -> None:
    columns = readings(count)
    few = tuple(c[:LOOPED] for c in columns)
    zeros, ones = np.zeros(count), np.ones(count)
    result = quality(*columns)
    assert (result.status == Status.OK).all()
    np.testing.assert_allclose(result.x, by_coolprop(*columns, zeros, ones), rtol=0, atol=1e-9)
    np.testing.assert_allclose(result.x[:LOOPED], by_iapws(*few), rtol=0, atol=1e-9)

    ours, coolprop, iapws = least_by_turns(
        [lambda: quality(*columns), lambda: by_coolprop(*columns, zeros, ones), lambda: by_iapws(*few)], rounds=7)
    ours, coolprop, iapws = ours / count, coolprop / count, iapws / LOOPED
    print(f"a reading: quality {ours * 1e9:.0f} ns, CoolProp {coolprop * 1e9:.0f} ns, iapws {iapws * 1e6:.0f} µs")
    report.line(f"CoolProp arrays / quality, {count:,} readings", coolprop / ours, coolprop / ours >= 5, "at least 5")
    report.line("iapws loop / quality", iapws / ours, iapws / ours >= 300, "at least 300")


def flatness(report: Report, largest: int) -> None:
    whole = readings(largest)
    counts = [n for n in (10**k for k in range(3, 10)) if n <= largest]
    # every size in every round, the small ones often enough to be seen at all
    costs = dict.fromkeys(counts, np.inf)
    for _ in range(3):
        for n in counts:
            columns = tuple(c[:n] for c in whole)
            costs[n] = min(costs[n], *(seconds(lambda c=columns: quality(*c)) / n
                                       for _ in range(max(1, 100_000 // n))))
    for n, cost in costs.items():
        print(f"{n:>12,} readings: {cost * 1e9:6.0f} ns each")
    spread = max(costs.values()) / min(costs.values())
    report.line("cost of a reading, largest / smallest", spread, spread <= 2, "at most 2")


def memory(report: Report, largest: int) -> None:
    for count in sorted({min(n, largest) for n in (100_000, 1_000_000, largest)}):
        columns = readings(count)
        quality(*columns)
        tracemalloc.start()
        result = quality(*columns)
        peak = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        held = sum(a.nbytes for a in (*columns, *result))
        ratio = (sum(a.nbytes for a in columns) + peak) / held
        report.line(f"memory at the peak / inputs and outputs, {count:,}", ratio, ratio <= 1.5, "at most 1.5")


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--readings", type=int, default=200_000)
    parser.add_argument("--largest", type=int, default=10_000_000)
    options = parser.parse_args()
    report = Report()
    compare(report, options.readings)
    flatness(report, options.largest)
    memory(report, options.largest)
    return int(report.missed)


if __name__ == "__main__":
    sys.exit(main())
