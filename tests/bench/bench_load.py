"""Twenty readers at once, and one for hours: how long a change takes, and how much memory the server holds.

    python tests/bench/bench_load.py [--sessions 20] [--changes 40] [--every 1.0 0.5] [--reruns 3000]

One server with the project's settings. First one reader alone, then all of them, each with a case of its own, moves
sliders of the Path page, a change every so many seconds (a slider sends one when it is let go, or by a key press);
each waits for its answer before the next. Times run from sending a change to the last message of its run. Wanted:
the slowest tenth of twenty within five times the median of one.

Then one reader turns from page to page and moves sliders, as fast as the server answers, for as many reruns as a
long day has. Wanted: memory that stays where it was after the first thousand. ``--reruns 0`` leaves this away.
"""

import argparse
import asyncio
import pathlib
import random
import statistics
import sys

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(pathlib.Path(__file__).resolve().parent))

from sessions import Session, resident, served  # noqa: E402

from engine.job.case.casefile import to_link  # noqa: E402
from engine.job.case.demo import DEMO  # noqa: E402

SLIDERS = {"Line pressure": (6.0, 14.0), "Exhaust pressure": (1.0, 1.3), "Measured temperature": (116.0, 135.0)}
TITLE = "Reader {}"


async def drag(address: str, number: int, changes: int, every: float) -> list[float]:
    """One reader at the sliders: the seconds that each change took."""
    chance, times = random.Random(number), []
    title = TITLE.format(number)
    async with Session(address, f"case={to_link(DEMO.with_(title=title))}") as reader:
        await reader.run()
        await asyncio.sleep(2.0 + every * chance.random())  # nobody begins together
        for _ in range(changes):
            name, (low, high) = chance.choice(list(SLIDERS.items()))
            took = await reader.run(slider=name, value=round(chance.uniform(low, high), 2))
            times.append(took)
            if not reader.says(title) or reader.faults:
                raise SystemExit(f"{title} was shown another case, or an exception")
            await asyncio.sleep(max(0.0, every - took) * chance.uniform(0.7, 1.3))
    return times


async def together(address: str, sessions: int, changes: int, every: float) -> list[float]:
    found = await asyncio.gather(*(drag(address, k, changes, every) for k in range(1, sessions + 1)))
    return [took for times in found for took in times]


def row(name: str, times: list[float], base: float) -> str:
    tenth = statistics.quantiles(times, n=10)[-1]
    return (f"{name:34}{1e3 * statistics.median(times):9.0f}{1e3 * tenth:9.0f}{1e3 * max(times):9.0f}"
            f"{tenth / base:9.1f}{len(times):9}")


async def load(address: str, options: argparse.Namespace) -> None:
    await together(address, 1, 10, 0.2)  # imports, caches
    print(f"{'ms from a change to its answer':34}{'median':>9}{'p90':>9}{'most':>9}{'p90/one':>9}{'changes':>9}")
    for every in options.every:
        one = await together(address, 1, options.changes, every)
        base = statistics.median(one)
        print(row(f"one reader, every {every:g} s", one, base), flush=True)
        many = await together(address, options.sessions, options.changes, every)
        print(row(f"{options.sessions} readers, every {every:g} s", many, base), flush=True)


async def long_day(address: str, pid: int, reruns: int) -> None:
    chance = random.Random(7)
    print(f"\n{'reruns':>8}{'MB':>8}")
    done = 0
    async with Session(address) as reader:
        await reader.run()
        while done <= reruns:
            for page in list(reader.pages):
                await reader.run(page=page)
                done += 1
                for _ in range(8):
                    if reader.sliders:
                        name, (low, high) = chance.choice(list(SLIDERS.items()))
                        await reader.run(slider=name, value=round(chance.uniform(low, high), 2))
                    else:
                        await reader.run()
                    done += 1
                    if done % max(1, reruns // 12) == 0:
                        print(f"{done:8}{resident(pid):8.0f}", flush=True)
        if reader.faults:
            raise SystemExit("a page showed an exception")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--sessions", type=int, default=20)
    parser.add_argument("--changes", type=int, default=40, help="of each reader")
    parser.add_argument("--every", type=float, nargs="*", default=[1.0, 0.5], help="seconds between two changes")
    parser.add_argument("--reruns", type=int, default=3000)
    options = parser.parse_args()
    with served() as (address, pid):
        asyncio.run(load(address, options))
        print(f"memory of the server then: {resident(pid):.0f} MB")
        if options.reruns:
            asyncio.run(long_day(address, pid, options.reruns))


if __name__ == "__main__":
    main()
