"""What a rehearsal hides: the case it is played on, the faults, the load, and the seed that fixes all chance."""

from __future__ import annotations

import zlib
from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np

from engine.job.case import Case
from engine.job.case.fields import FIELDS
from engine.job.case.rows import TABLE
from engine.steam.errors import Fault, InputError

MOST_SEED = 2**31 - 1


class HiddenFault(StrEnum):
    """What can be wrong with a rig, or with the sheet it is read on."""

    WET_EXHAUST = "wet exhaust"
    BACK_PRESSURE = "back pressure"
    WET_LAGGING = "wet lagging"
    SHALLOW_THERMOMETER = "thermometer not immersed"
    CLOGGED_ORIFICE = "clogged orifice"
    SUPERHEATED_LINE = "superheated line"
    WATER_SLUGS = "water slugs"
    GAUGE_AS_ABSOLUTE = "gauge read as absolute"
    BAROMETER_ASSUMED = "barometer assumed"
    THERMOMETER_OFFSET = "thermometer offset"


class Load(StrEnum):
    """What the line pressure does: hardly anything, swings, or a fall of 5 % once the rig is warm."""

    STEADY = "steady"
    SWINGING = "swinging"
    FALLING = "falling"


@dataclass(frozen=True)
class Scenario:
    """A rig to practise on; equal scenarios behave alike to the last digit.

    case        the rig as it should be; its expected range of wetness is where the truth is drawn from.
                Its tables (readings, ticks, windows) are left out
    faults      what is wrong with it
    seed        fixes the truth, the sizes of the faults, the instruments' own errors and all noise
    x           quality of the line steam; None has it drawn
    load        what the line pressure does
    ideal       no swings, no noise, no scale steps, and instruments without error: for checks
    """

    case: Case
    faults: frozenset[HiddenFault] = frozenset()
    seed: int = 1
    x: float | None = None
    load: Load = Load.STEADY
    ideal: bool = False

    def __post_init__(self):
        entries = {n: v for n, v in self.case.values.items() if FIELDS[n].form != TABLE}
        object.__setattr__(self, "case", Case(entries))
        object.__setattr__(self, "faults", frozenset(fault_named(f) for f in self.faults))
        wrong = []
        if not (isinstance(self.seed, int) and not isinstance(self.seed, bool) and 0 <= self.seed <= MOST_SEED):
            wrong.append(Fault("seed", self.seed, "", f"a whole number from 0 to {MOST_SEED}", name="seed"))
        if self.x is not None and not (isinstance(self.x, float | int) and 0.5 <= self.x <= 1.0):
            wrong.append(Fault("quality of the line", self.x, "", "0.5 to 1, or nothing to have it drawn",
                               "a throttling calorimeter is not built for wetter steam", name="x"))
        if {HiddenFault.WET_EXHAUST, HiddenFault.SUPERHEATED_LINE} <= self.faults:
            wrong.append(Fault("faults", "wet exhaust, superheated line", "", "one of the two",
                               "superheated steam does not arrive wet", name="faults"))
        if not isinstance(self.load, Load):
            try:
                object.__setattr__(self, "load", Load(self.load))
            except ValueError:
                wrong.append(Fault("load", str(self.load), "", "one of: " + ", ".join(Load), name="load"))
        if wrong:
            raise InputError(*wrong)

    def has(self, fault: HiddenFault) -> bool:
        """Whether this fault is hidden in it."""
        return fault in self.faults

    def random(self, purpose: str) -> np.random.Generator:
        """Chance for one purpose alone, so that hiding another fault changes nothing else."""
        return np.random.default_rng([self.seed, zlib.crc32(purpose.encode())])


def fault_named(name: str) -> HiddenFault:
    """A hidden fault by its name, however it is spelt; InputError names all there are.

    >>> fault_named("Wet-lagging")
    <HiddenFault.WET_LAGGING: 'wet lagging'>
    """
    try:
        return HiddenFault(" ".join(str(name).lower().replace("-", " ").replace("_", " ").split()))
    except ValueError:
        raise InputError(Fault("hidden fault", str(name)[:60], "", "one of: " + ", ".join(HiddenFault),
                               name="fault")) from None


def faults_named(names: Iterable[str]) -> frozenset[HiddenFault]:
    """Several of them; InputError for all that are unknown at once."""
    found, wrong = set(), []
    for name in names:
        try:
            found.add(fault_named(name))
        except InputError as error:
            wrong += error.faults
    if wrong:
        raise InputError(*wrong)
    return frozenset(found)


def surprise(case: Case, seed: int) -> Scenario:
    """A scenario with one hidden fault, or one time in five with none, by chance of the seed."""
    scenario = Scenario(case, seed=seed)
    chance = scenario.random("surprise")
    if chance.random() < 0.2:
        return scenario
    return Scenario(case, frozenset({list(HiddenFault)[int(chance.integers(len(HiddenFault)))]}), seed)
