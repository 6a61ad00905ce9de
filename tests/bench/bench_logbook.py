"""What reading a log costs, measured in one run against pandas merely parsing the same file.

    python -m tests.bench.bench_logbook [--rows 1000000] [--rounds 7]

Prints, for logs of five columns in several dialects, the time ``read_log`` takes over the time of
``pandas.read_csv`` and leaves with 1 if a clean log takes more than 3 times as long. ``read_log``
finds out the dialect, reads the stamps, converts to SI, lists what it refuses and looks for
suspicions; pandas makes numbers and leaves the stamps as text. Both are measured by turns, clock time
and processor time, and the least of the rounds counts, so that whatever else the machine does weighs
little. The peak memory is that of a process of its own, over what its imports take.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pandas as pd

from engine.measurement.logbook import propose_mapping, read_log

LIMIT = 3.0
ROOT = Path(__file__).resolve().parents[2]
HEADING = ["time", "p1 [bar g]", "p2 [bar g]", "T2 [°C]", "T1 [°C]"]
PEAK = """
import sys
import pandas as pd
from engine.measurement.logbook import read_log

def peak():
    return next(int(line.split()[1]) for line in open("/proc/self/status") if line.startswith("VmHWM")) / 1024

before = peak()
kept = eval(sys.argv[1])
print(peak() - before)
"""


def write(path: Path, rows: int, form: str, delimiter: str, decimal: str, spoiled: float = 0.0) -> None:
    """A steady run, logged every second; a part of the cells may hold dashes."""
    rng = np.random.default_rng(7)
    stamps = (pd.Timestamp("2024-05-16T07:08:09") + pd.to_timedelta(np.arange(rows), unit="s")).strftime(form)
    columns = [np.char.mod(digits, rng.normal(mean, spread, rows)) for digits, mean, spread in
               (("%.3f", 9.0, 0.05), ("%.4f", 0.02, 0.001), ("%.2f", 121.0, 0.3), ("%.2f", 180.0, 0.2))]
    for column in columns:
        column[rng.random(rows) < spoiled] = "---"
    table = [[c.replace(".", decimal) for c in column.tolist()] for column in columns]
    with path.open("w", encoding="utf-8", newline="\n") as file:
        file.write(delimiter.join(HEADING) + "\n")
        file.writelines(delimiter.join(row) + "\n" for row in zip(stamps, *table, strict=True))


def spent(call: Callable[[], object]) -> np.ndarray:
    """Clock and processor seconds of a call."""
    wall, cpu = time.perf_counter(), time.process_time()
    call()
    return np.array([time.perf_counter() - wall, time.process_time() - cpu])


def peak(expression: str) -> float:
    """MiB that evaluating an expression adds to a fresh process."""
    done = subprocess.run([sys.executable, "-c", PEAK, expression], cwd=ROOT, capture_output=True, text=True,
                          env={**os.environ, "PYTHONPATH": str(ROOT)}, check=True)
    return float(done.stdout)


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--rows", type=int, default=1_000_000)
    parser.add_argument("--rounds", type=int, default=7)
    told = parser.parse_args()
    missed = False
    dialects = {"ISO stamps, commas": ("%Y-%m-%d %H:%M:%S", ",", ".", 0.0),
                "d.m.y, semicolons, decimal commas": ("%d.%m.%Y %H:%M:%S", ";", ",", 0.0),
                "the first with 0.1 % of cells spoiled": ("%Y-%m-%d %H:%M:%S", ",", ".", 0.001)}
    with tempfile.TemporaryDirectory() as folder:
        for name, (form, delimiter, decimal, spoiled) in dialects.items():
            path = Path(folder) / "log.csv"
            write(path, told.rows, form, delimiter, decimal, spoiled)
            mapping = propose_mapping(path).mapping.answer(basis="gauge")
            parse, read = np.full(2, np.inf), np.full(2, np.inf)
            for _ in range(told.rounds):
                parse = np.minimum(parse, spent(lambda: pd.read_csv(path, sep=delimiter, decimal=decimal)))  # noqa: B023
                read = np.minimum(read, spent(lambda: read_log(path, mapping)))  # noqa: B023
            ratio = read / parse
            missed |= spoiled == 0 and ratio[0] > LIMIT
            print(f"{name}: {path.stat().st_size / 2**20:.0f} MiB, {told.rows} rows")
            print(f"  clock      pandas {parse[0]:.3f} s, read_log {read[0]:.3f} s, ratio {ratio[0]:.2f}")
            print(f"  processor  pandas {parse[1]:.3f} s, read_log {read[1]:.3f} s, ratio {ratio[1]:.2f}")
            by_pandas = peak(f"pd.read_csv({str(path)!r}, sep={delimiter!r}, decimal={decimal!r})")
            print(f"  peak memory  pandas {by_pandas:.0f} MiB, read_log {peak(f'read_log({str(path)!r})'):.0f} MiB, "
                  f"of which the result takes {told.rows * 8 * 6 / 2**20:.0f} MiB")
    print("missed" if missed else f"within {LIMIT:g} times")
    return int(missed)


if __name__ == "__main__":
    sys.exit(main())
