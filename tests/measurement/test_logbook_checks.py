"""Suspicions: what a log can be read with and still not mean; a sound log raises none."""

import numpy as np
import pytest

from engine.measurement.logbook.checks import Checked, suspicions
from engine.measurement.logbook.mapping import Column
from engine.steam import saturation_temperature
from engine.steam.units import P_STANDARD, from_si, to_si

N = 400
UNITS = {"p_line": "bar", "p_exhaust": "bar", "T_exhaust": "°C", "T_line": "°C", "p_barometer": "kPa",
         "T_ambient": "°C", "sample_flow": "kg/h"}
KINDS = {"p": "pressure", "T": "temperature", "s": "mass flow"}


def sound(rng=None, p_line=9.0e5):
    """SI channels of a steady run at 9 bar gauge, as a logger with fine steps would hold them."""
    rng = rng or np.random.default_rng(4)
    p = p_line + rng.normal(0, 2e3, N)
    return {
        "p_line": p, "p_exhaust": 1.5e3 + rng.normal(0, 50, N), "T_exhaust": 394.3 + rng.normal(0, 0.2, N),
        "T_line": saturation_temperature(p + P_STANDARD) + rng.normal(0, 0.1, N),
        "p_barometer": 1.008e5 + rng.normal(0, 10, N), "T_ambient": 297.0 + rng.normal(0, 0.3, N),
        "sample_flow": 31.7 / 3600 + rng.normal(0, 1e-5, N)}


def checked(channels, *, basis=None, units=None, time=None, dated=False):
    basis = {"p_line": "gauge", "p_exhaust": "gauge", "p_barometer": "absolute", **(basis or {})}
    units = {**UNITS, **(units or {})}
    columns = {n: Column(k, n, n, units[n], basis.get(n, "")) for k, n in enumerate(channels)}
    size = next(iter(channels.values())).size
    time = 5.0 * np.arange(size) if time is None else time
    return suspicions(Checked(time, np.arange(size) + 2, channels, columns, dated))


def the_one(found, kind):
    assert [s.kind for s in found] == [kind], [str(s) for s in found]
    return found[0]


def mislabel(values, kind, meant, said):
    """SI values as they come out when numbers written in ``meant`` are taken to be in ``said``."""
    return to_si(from_si(values, meant, kind), said, kind)


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("p_line", [2e5, 9e5, 40e5, 100e5])
def test_a_sound_log_raises_none(seed, p_line):
    assert checked(sound(np.random.default_rng(seed), p_line)) == ()


def test_a_warm_up_and_a_superheated_line_raise_none():
    channels = sound()
    warm = 1 - np.exp(-np.arange(N) / 40)
    channels["T_exhaust"] = 295.0 + (394.3 - 295.0) * warm
    channels["T_line"] = channels["T_line"] + 12.0
    channels["p_line"] = channels["p_line"] * warm
    channels["T_line"][:20] = 300.0
    assert checked(channels) == ()


def test_time_running_backwards():
    time = 5.0 * np.arange(N)
    time[100:] -= 60.0
    found = the_one(checked(sound(), time=time), "time backwards")
    assert found.rows == ((102, 102),)
    assert "by up to 55 s" in found.sentence
    assert "two logs joined" in found.remedy


def test_the_hour_written_twice_in_autumn():
    time = 5.0 * np.arange(N)
    time[100:] -= 3600.0
    assert "summer time" in the_one(checked(sound(), time=time, dated=True), "time backwards").remedy
    assert "summer time" not in the_one(checked(sound(), time=time), "time backwards").remedy


def test_duplicated_stamps_and_gaps():
    time = 5.0 * np.arange(N)
    time[[10, 11, 12]] = time[9]
    time[200:] += 1000.0
    found = checked(sound(), time=time)
    assert [s.kind for s in found] == ["duplicated stamps", "gap"]
    assert (found[0].rows, found[0].count) == (((12, 14),), 3)
    assert found[1].rows == ((202, 202),)
    assert "1005 s" in found[1].sentence


@pytest.mark.parametrize("name", ["p_line", "T_exhaust", "p_exhaust", "T_line", "sample_flow"])
def test_a_stuck_channel(name):
    channels = sound()
    channels[name][150:250] = channels[name][150]
    found = the_one(checked(channels), "stuck channel")
    assert (found.channel, found.rows, found.count) == (name, ((152, 251),), 100)
    channels[name][:] = channels[name][0]
    assert "same in all 400 rows" in the_one(checked(channels), "stuck channel").sentence


def test_a_coarse_gauge_and_slow_channels_are_not_stuck():
    channels = sound()
    channels["p_line"] = np.repeat(9e5 + 1e4 * (np.arange(N // 20) % 3), 20)
    channels["T_line"] = saturation_temperature(channels["p_line"] + P_STANDARD)
    channels["p_barometer"][:] = 1.008e5
    channels["T_ambient"][:] = 297.0
    assert checked(channels) == ()
    assert checked({n: v[:20] * 0 + v[0] for n, v in sound().items()}) == ()  # too few rows to say


def test_missing_readings_are_not_stuck_readings():
    channels = sound()
    channels["T_line"][50:350] = np.nan
    channels["p_barometer"][:] = np.nan
    assert checked(channels) == ()


@pytest.mark.parametrize(("name", "meant", "said"), [
    ("T_exhaust", "°F", "°C"), ("T_exhaust", "°C", "°F"), ("T_exhaust", "K", "°C"), ("T_exhaust", "°C", "K"),
    ("T_line", "°F", "°C"), ("T_line", "°C", "°F"), ("T_line", "K", "°C"), ("T_ambient", "°F", "°C"),
    ("T_ambient", "K", "°C"),
])
def test_a_temperature_in_another_unit_than_said(name, meant, said):
    channels = sound()
    channels[name] = mislabel(channels[name], "temperature", meant, said)
    found = the_one(checked(channels, units={name: said}), f"{meant} in a {said} column")
    assert found.channel == name
    assert found.rows == ((2, N + 1),)
    assert found.mend == ("unit", meant)


def test_a_unit_switched_within_the_log():
    channels = sound()
    channels["T_exhaust"][120:180] = mislabel(channels["T_exhaust"][120:180], "temperature", "°F", "°C")
    found = the_one(checked(channels), "°F in a °C column")
    assert found.rows == ((122, 181),)
    assert "in these rows" in found.sentence
    assert found.mend == ()  # no one unit is that of the whole column


def test_without_pressures_a_temperature_is_held_against_an_exhaust_to_air():
    values = {"T_exhaust": mislabel(sound()["T_exhaust"], "temperature", "°F", "°C")}
    assert the_one(checked(values), "°F in a °C column").channel == "T_exhaust"


def test_a_gauge_exhaust_pressure_taken_for_absolute():
    found = the_one(checked(sound(), basis={"p_exhaust": "absolute"}), "gauge taken for absolute")
    assert found.channel == "p_exhaust"
    assert "stands at 0.01" in found.sentence and found.mend == ("basis", "gauge")
    channels = sound()
    channels["p_exhaust"] = 0.2e5 + channels["p_exhaust"]
    channels["T_exhaust"] = channels["T_exhaust"] - 45.0
    channels["T_exhaust"][:] = 338.0 + np.arange(N) / 100  # a condenser: 0.2 bar absolute boils at 60 °C
    assert checked(channels, basis={"p_exhaust": "absolute"}) == ()


def test_an_absolute_exhaust_pressure_taken_for_gauge():
    channels = sound()
    channels["p_exhaust"] = channels["p_exhaust"] + P_STANDARD
    assert the_one(checked(channels), "absolute taken for gauge").channel == "p_exhaust"


@pytest.mark.parametrize("said", ["absolute", "gauge"])
def test_the_line_s_basis_is_held_against_its_temperature(said):
    channels = sound()
    if said == "gauge":
        channels["p_line"] = channels["p_line"] + P_STANDARD
    found = the_one(checked(channels, basis={"p_line": said}),
                    "gauge taken for absolute" if said == "absolute" else "absolute taken for gauge")
    assert found.channel == "p_line"
    assert f"{'below' if said == 'absolute' else 'above'} the line temperature" in found.sentence
    assert "unless the line is superheated" in found.remedy


@pytest.mark.parametrize(("name", "meant", "said"), [
    ("p_line", "kPa", "bar"), ("p_exhaust", "mbar", "bar"), ("p_barometer", "mbar", "kPa"),
    ("p_barometer", "mmHg", "kPa"),
    ("sample_flow", "kg/h", "kg/s"),
])
def test_a_unit_that_no_such_channel_has(name, meant, said):
    channels = {name: mislabel(sound()[name], KINDS[name[0]], meant, said)}
    found = the_one(checked(channels, units={name: said}), "unit")
    assert found.channel == name
    assert meant in found.sentence.split("; in ")[1]
    assert "e+" not in found.sentence


@pytest.mark.parametrize(("meant", "said"), [("psi", "bar"), ("bar", "kPa"), ("bar", "MPa"), ("bar", "psi"),
("MPa", "bar")])
def test_the_line_s_unit_is_held_against_its_temperature(meant, said):
    channels = sound()
    channels["p_line"] = mislabel(channels["p_line"], "pressure", meant, said)
    found = the_one(checked(channels, units={"p_line": said}), "unit")
    assert found.channel == "p_line"
    assert meant in found.sentence.split("; in ")[1]


def test_line_and_exhaust_interchanged():
    channels = sound()
    channels["p_line"], channels["p_exhaust"] = channels["p_exhaust"], channels["p_line"]
    channels["T_line"], channels["T_exhaust"] = channels["T_exhaust"], channels["T_line"]
    found = checked(channels)
    assert {"p_exhaust"} == {s.channel for s in found if s.kind == "swapped"}
    channels = sound()
    channels["T_line"], channels["T_exhaust"] = channels["T_exhaust"], channels["T_line"]
    assert "T_exhaust" in {s.channel for s in checked(channels) if s.kind == "swapped"}


def test_an_exhaust_too_cold_for_flowing_steam():
    channels = sound()
    channels["T_exhaust"] = channels["T_exhaust"] - 40.0
    found = the_one(checked(channels), "below saturation")
    assert "by 19" in found.sentence
    channels["T_exhaust"] = channels["T_exhaust"] + 21.0  # 1 K above
    assert checked(channels) == ()


def test_a_suspicion_reads_as_a_sentence_with_rows_and_remedy():
    time = 5.0 * np.arange(N)
    time[[5, 50, 51]] = time[[4, 49, 49]]
    found = the_one(checked(sound(), time=time), "duplicated stamps")
    assert str(found).startswith("3 rows carry the same time as the row before (rows 7, 52–53): see whether")


def test_nothing_to_look_at():
    assert checked({"T_exhaust": np.empty(0)}) == ()
    assert checked({"T_exhaust": np.array([394.0])}) == ()
