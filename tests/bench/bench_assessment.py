"""Cost of one full assessment of the Path page against one ``iapws`` state, interleaved in one run.

    python tests/bench/bench_assessment.py

The assessment is the answer, the data of the three diagrams and the velocities; the state is
``IAPWS97(P=.., T=..)``, the cheapest kind. Prints medians and their ratio; below 15 is wanted.
"""

import pathlib
import statistics
import sys
import time

sys.path.insert(0, str(pathlib.Path(__file__).resolve().parents[2]))

from iapws import IAPWS97  # noqa: E402

from engine.job.assessment import assess  # noqa: E402
from engine.job.assessment.answer import answer  # noqa: E402
from engine.job.assessment.tables import state_rows, velocity_rows  # noqa: E402
from engine.job.case.demo import DEMO  # noqa: E402
from engine.screen.charts.process import process_diagrams  # noqa: E402
from engine.screen.charts.speed import velocity_diagram  # noqa: E402
from engine.steam.units import SI  # noqa: E402

ROUNDS = 60


def seconds(call) -> float:
    start = time.process_time()  # of this process alone, whatever else the machine does
    call()
    return time.process_time() - start


def page():
    a = assess(DEMO)
    return answer(a, SI), process_diagrams(a, SI), velocity_diagram(a, SI), state_rows(a, SI), velocity_rows(a, SI)


def main() -> None:
    calls = {"one iapws state (p, T)": lambda: IAPWS97(P=0.1, T=420.0),
             "one iapws state (p, x)": lambda: IAPWS97(P=1.0, x=0.98),
             "assessment": lambda: assess(DEMO), "assessment and figures": page}
    times: dict[str, list[float]] = {name: [] for name in calls}
    for _ in range(ROUNDS):
        for name, call in calls.items():
            times[name].append(seconds(call))
    medians = {name: statistics.median(values[5:]) for name, values in times.items()}
    for name, median in medians.items():
        by_pT, by_px = (median / medians[f"one iapws state (p, {y})"] for y in "Tx")
        print(f"{name:28} {median * 1e6:8.0f} us   {by_pT:6.1f} of a (p, T) state, {by_px:6.1f} of a (p, x) state")


if __name__ == "__main__":
    main()
