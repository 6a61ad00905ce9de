"""What reading a log costs, measured in one run against pandas merely parsing the same file.

    python -m tests.bench.bench_logbook [--rows 1000000] [--rounds 7] [--sheet-rows 100000]

Prints, for logs of five columns in several dialects, the time ``read_log`` takes over the time of
``pandas.read_csv`` and leaves with 1 if it takes more than 3 times as long. ``read_log`` finds out the
dialect, reads the stamps, converts to SI, lists what it refuses and looks for suspicions; pandas makes
numbers and leaves the stamps as text.

Where cells are spoiled, pandas leaves their columns as text, and so has not made numbers of them. The
limit is held there against pandas told beforehand which word stands for a missing number, the least it
needs to give numbers; beside it stand pandas leaving text, and pandas told nothing, which has to go over
the text once more (``to_numeric``).

A workbook is held against openpyxl's streaming mode merely walking its values: it is to take no longer.

All are measured by turns, clock time and processor time, and the least of the rounds counts, so that
whatever else the machine does weighs little. The peak memory is that of a process of its own, over what
its imports take.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

import numpy as np
import openpyxl
import pandas as pd

from engine.measurement.logbook import propose_mapping, read_log

LIMIT = 3.0
ROOT = Path(__file__).resolve().parents[2]
HEADING = ["time", "p1 [bar g]", "p2 [bar g]", "T2 [°C]", "T1 [°C]"]
DIALECTS = (  # name, form of the stamps, delimiter, decimal sign, part of the cells that is spoiled
    ("ISO stamps, commas", "%Y-%m-%d %H:%M:%S", ",", ".", 0.0),
    ("d.m.y, semicolons, decimal commas", "%d.%m.%Y %H:%M:%S", ";", ",", 0.0),
    ("the first with 0.1 % of cells spoiled", "%Y-%m-%d %H:%M:%S", ",", ".", 0.001))
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


def least(rounds: int, *calls: Callable[[], object]) -> list[np.ndarray]:
    """Clock and processor seconds of each call, taken by turns, the least of the rounds."""
    costs = [np.full(2, np.inf) for _ in calls]
    for _ in range(rounds):
        costs = [np.minimum(cost, spent(call)) for cost, call in zip(costs, calls, strict=True)]
    return costs


def say(name: str, other: np.ndarray, ours: np.ndarray) -> None:
    print(f"  {name:<42} clock {other[0]:.3f} s, ratio {ours[0] / other[0]:.2f}; "
          f"processor {other[1]:.3f} s, ratio {ours[1] / other[1]:.2f}")


def numbers(path: Path, **told) -> pd.DataFrame:
    """Pandas told nothing of what stands for a missing number, and asked for numbers."""
    table = pd.read_csv(path, **told)
    return table.assign(**{c: pd.to_numeric(table[c], errors="coerce") for c in table.columns[1:]})


def texts(folder: Path, rows: int, rounds: int) -> bool:
    """Whether every dialect keeps the limit."""
    kept = True
    for name, form, delimiter, decimal, spoiled in DIALECTS:
        path, told = folder / "log.csv", {"sep": delimiter, "decimal": decimal}
        write(path, rows, form, delimiter, decimal, spoiled)
        mapping = propose_mapping(path).mapping.answer(basis="gauge")
        calls = {"pandas": partial(pd.read_csv, path, **told)}
        if spoiled:
            calls = {"pandas, told the missing word": partial(pd.read_csv, path, na_values="---", **told),
                     "pandas, leaving the columns as text": calls["pandas"],
                     "pandas, told nothing, then to_numeric": partial(numbers, path, **told)}
        ours, *others = least(rounds, partial(read_log, path, mapping), *calls.values())
        kept &= bool(ours[0] <= LIMIT * others[0][0])
        print(f"{name}: {path.stat().st_size / 2**20:.0f} MiB, {rows} rows\n"
              f"  {'read_log':<42} clock {ours[0]:.3f} s; processor {ours[1]:.3f} s")
        for what, other in zip(calls, others, strict=True):
            say(what, other, ours)
        by_pandas = peak(f"pd.read_csv({str(path)!r}, sep={delimiter!r}, decimal={decimal!r})")
        print(f"  peak memory: pandas {by_pandas:.0f} MiB, read_log {peak(f'read_log({str(path)!r})'):.0f} MiB, "
              f"of which the result takes {rows * 8 * 6 / 2**20:.0f} MiB")
    return kept


def workbook(folder: Path, rows: int, rounds: int) -> bool:
    """Whether a workbook takes no longer than openpyxl walking its values."""
    path = folder / "log.xlsx"
    book = openpyxl.Workbook(write_only=True)
    sheet, start = book.create_sheet(), pd.Timestamp("2024-05-16T07:08:09")
    sheet.append(HEADING)
    readings = np.random.default_rng(7).normal([9.0, 0.02, 121.0, 180.0], [0.05, 0.001, 0.3, 0.2], (rows, 4))
    for k, values in enumerate(readings.round(4).tolist()):
        sheet.append([(start + pd.Timedelta(seconds=k)).to_pydatetime(), *values])
    book.save(path)

    def walk() -> None:
        sheet = openpyxl.load_workbook(path, read_only=True, data_only=True).worksheets[0]
        for _ in sheet.iter_rows(values_only=True):
            pass

    mapping = propose_mapping(path).mapping
    ours, bare = least(rounds, partial(read_log, path, mapping), walk)
    print(f"workbook: {path.stat().st_size / 2**20:.0f} MiB, {rows} rows\n  {'read_log':<42} clock {ours[0]:.3f} s; "
          f"processor {ours[1]:.3f} s, {1e6 * ours[1] / rows:.0f} µs a row")
    say("openpyxl, walking the values", bare, ours)
    print(f"  peak memory: read_log {peak(f'read_log({str(path)!r})'):.0f} MiB, "
          f"of which the result takes {rows * 8 * 6 / 2**20:.0f} MiB")
    return bool(ours[1] <= bare[1])


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--rows", type=int, default=1_000_000)
    parser.add_argument("--rounds", type=int, default=7)
    parser.add_argument("--sheet-rows", type=int, default=100_000)
    told = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        kept = texts(Path(folder), told.rows, told.rounds)
        kept &= workbook(Path(folder), told.sheet_rows, min(told.rounds, 2))
    print(f"within {LIMIT:g} times" if kept else "missed")
    return int(not kept)


if __name__ == "__main__":
    sys.exit(main())
