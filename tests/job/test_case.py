"""The case: frozen, as entered, resolved to SI in one place, and every fault in words."""

import pickle
from dataclasses import FrozenInstanceError

import pytest

from engine.job.case import (
    BLANK,
    Case,
    as_entered,
    barometer,
    describe,
    entry_fault,
    entry_si,
    faults_of,
    resolve,
)
from engine.job.case.demo import DEMO
from engine.job.case.fields import FIELDS
from engine.job.case.rows import CHOICE, QUANTITY, TEXT, Entry
from engine.steam.errors import InputError
from engine.steam.units import UNITS

QUANTITIES = [field for field in FIELDS.values() if field.form == QUANTITY]


def texts(case):
    """The message of every fault, by the name of its entry."""
    return {fault.name: str(fault) for fault in faults_of(case)}


# ---- the record


def test_a_case_cannot_be_changed():
    with pytest.raises(FrozenInstanceError):
        DEMO.values = {}
    with pytest.raises(TypeError):
        DEMO.values["title"] = "another"
    with pytest.raises(FrozenInstanceError):
        DEMO["p_line"].value = 3.0


def test_a_changed_copy_leaves_the_original():
    changed = DEMO.with_(title="Other", p_line=Entry(12.0, "bar", "gauge"))
    assert (changed["title"], changed["p_line"]) == ("Other", Entry(12.0, "bar", "gauge"))
    assert (DEMO["title"], DEMO["p_line"]) == ("Factory main at 10 bar", Entry(9.0, "bar", "gauge"))
    assert changed["T_exhaust"] == DEMO["T_exhaust"]


def test_the_mapping_a_case_was_made_of_may_change_afterwards():
    values = {"title": "before"}
    case = Case(values)
    values["title"] = "after"
    assert case["title"] == "before"


def test_a_new_case_holds_what_the_table_says():
    assert dict(BLANK.values) == {name: field.blank for name, field in FIELDS.items()}
    assert resolve(BLANK)["p_line"] == 10e5


def test_equal_entries_make_equal_cases():
    twin = Case(dict(DEMO.values))
    assert twin == DEMO and hash(twin) == hash(DEMO) and twin is not DEMO
    assert DEMO.with_(note="") != DEMO
    assert DEMO != "Factory main at 10 bar"
    assert DEMO.with_(p_line=Entry(0.9, "MPa", "gauge")) != DEMO  # as entered, not as resolved


def test_a_case_survives_the_way_to_another_process():
    assert pickle.loads(pickle.dumps(DEMO)) == DEMO


def test_an_unknown_entry_is_refused():
    with pytest.raises(InputError, match="case: got colour, shape, needs entries that a case has"):
        Case({"shape": "round", "title": "x", "colour": "red"})


@pytest.mark.parametrize(("entry", "words"), [
    (Entry(9.0, "bar", "gauge"), "9 bar gauge"),
    (Entry(1.0215, "bar", "absolute"), "1.0215 bar absolute"),
    (Entry(0.97, "1"), "0.97"),
    (Entry(121.100000001, "°C"), "121.1 °C"),
], ids=lambda value: value if isinstance(value, str) else "")
def test_an_entry_in_words(entry, words):
    assert describe(entry) == words


# ---- to SI


def test_gauge_barometer_and_water_leg_by_hand():
    # 9 bar + 100.8 kPa - 0.8 m of water: 900 000 + 100 800 - 0.8 * 9.80665 * 998.2 (water at 20 °C, CRC Handbook)
    si = resolve(DEMO)
    assert si["p_line"] == pytest.approx(900_000 + 100_800 - 7831.2, abs=1.0)
    assert si["p_exhaust"] == pytest.approx(102_100)
    assert si.p_barometer == si["p_barometer"] == 100_800.0


def test_a_gauge_above_its_tapping_reads_low():
    above = resolve(DEMO.with_(leg_height=Entry(-0.8, "m")))
    assert above["p_line"] == pytest.approx(900_000 + 100_800 + 7831.2, abs=1.0)


def test_no_leg_no_correction():
    assert resolve(DEMO.with_(leg_height=Entry(0.0, "m")))["p_line"] == 1_000_800.0


def test_the_leg_is_taken_off_an_absolute_gauge_too():
    si = resolve(DEMO.with_(p_line=Entry(10.0, "bar", "absolute")))
    assert si["p_line"] == pytest.approx(1_000_000 - 7831.2, abs=1.0)


def test_barometer_from_the_altitude():
    # U.S. Standard Atmosphere 1976, geometric altitude 2000 m: 795.01 mbar (from memory)
    case = DEMO.with_(barometer_source="altitude", altitude=Entry(2000.0, "m"), leg_height=Entry(0.0, "m"))
    assert barometer(case) == pytest.approx(79_501, abs=1)
    assert resolve(case)["p_line"] == pytest.approx(979_501, abs=1)
    in_feet = case.with_(altitude=Entry(2000 / 0.3048, "ft"))
    assert barometer(in_feet) == pytest.approx(barometer(case), rel=1e-12)


def test_an_unused_barometer_source_does_not_count():
    assert barometer(DEMO.with_(altitude=Entry(2000.0, "m"))) == 100_800.0


@pytest.mark.parametrize(("name", "entry", "si"), [
    ("p_line", Entry(100.0, "psi", "gauge"), 689_475.7 + 101_325),  # 1 psi = 6894.757 Pa, NIST SP 811
    ("p_line", Entry(114.696, "psi", "absolute"), 790_801.1),
    ("p_exhaust", Entry(-1.0, "inHg", "gauge"), 101_325 - 3386.389),  # NIST SP 811
    ("T_exhaust", Entry(250.0, "°F"), (250 - 32) / 1.8 + 273.15),
    ("T_exhaust", Entry(400.0, "K"), 400.0),
    ("wetness", Entry(2.8, "%"), 0.028),
    ("sample_flow", Entry(36.0, "kg/h"), 0.01),
    ("sample_flow", Entry(100.0, "lb/h"), 45.359237 / 3600),
    ("exhaust_bore", Entry(1.0, "in"), 0.0254),
    ("heat_loss", Entry(1.0, "Btu/lb"), 2326.0),  # exact
    ("least_superheat", Entry(9.0, "°F"), 5.0),
], ids=lambda value: value.unit if isinstance(value, Entry) else str(value))
def test_entries_in_other_units(name, entry, si):
    assert resolve(BLANK.with_(**{name: entry}))[name] == pytest.approx(si, rel=2e-6)


def test_what_was_not_entered_stays_unknown():
    si = resolve(BLANK)
    assert si["sample_flow"] is si["T_normal"] is None


@pytest.mark.parametrize("field", QUANTITIES, ids=lambda field: field.name)
def test_an_entry_comes_back_as_entered(field):
    for unit in UNITS[field.kind]:
        for basis in ("gauge", "absolute") if field.kind == "pressure" else ("",):
            like = Entry(0.0, unit, basis)
            again = entry_si(field, as_entered(field, 0.7 * field.high, like, 95e3), 95e3)
            assert again == pytest.approx(0.7 * field.high, rel=1e-12)


# ---- faults


@pytest.mark.parametrize("field", QUANTITIES, ids=lambda field: field.name)
@pytest.mark.parametrize("unit", [0, -1], ids=["first unit", "last unit"])
def test_every_limit(field, unit):
    """At its limits an entry is taken, beyond them refused by name, value, limits, reason and remedy."""
    unit = list(UNITS[field.kind])[unit]
    basis = "absolute" if field.kind == "pressure" else ""

    def entered(si):
        return as_entered(field, si, Entry(0.0, unit, basis), 0.0)

    for si in (field.low, field.high):
        assert entry_fault(field, entered(si), 101_325.0) is None
    beyond = 1e-3 * (field.high - field.low)
    for si in (field.low - beyond, field.high + beyond, float("inf"), float("nan")):
        entry = entered(si)
        message = str(entry_fault(field, entry, 101_325.0))
        where = " ".join(filter(None, (unit if unit != "1" else "", basis)))
        lines = message.splitlines()
        assert lines[0].startswith(f"{field.label}: got {entry.value:.7g} {where}".rstrip() + ", needs ")
        assert " to " in lines[0] and lines[0].endswith(where)
        assert lines[1:] == [f"  - {line}" for line in (field.why, field.hint) if line]


@pytest.mark.parametrize("field", QUANTITIES, ids=lambda field: field.name)
def test_every_quantity_needs_a_value_with_a_unit_and_a_basis(field):
    pressure = field.kind == "pressure"
    other = "furlong" if pressure else "bar/s"
    basis = "gauge" if pressure else ""
    wrong = [("12", f"{field.label}: got 12, needs a value with its unit"),
             (Entry(1.0, other, basis), f"unit of {field.label.lower()}: got {other}, needs one of: "
                                        + ", ".join(UNITS[field.kind])),
             (Entry(1.0, None, basis), f"unit of {field.label.lower()}: got nothing, needs one of: "
                                       + ", ".join(UNITS[field.kind])),
             (Entry(1.0, next(iter(UNITS[field.kind])), "" if pressure else "gauge"),
              f"basis of {field.label.lower()}: got nothing, needs gauge or absolute" if pressure else
              f"basis of {field.label.lower()}: got gauge, needs none")]
    if field.blank is not None:
        wrong.append((None, f"{field.label}: got nothing, needs a value with its unit"))
    for value, message in wrong:
        assert texts(DEMO.with_(**{field.name: value}))[field.name] == message


@pytest.mark.parametrize("field", [f for f in FIELDS.values() if f.form == CHOICE], ids=lambda field: field.name)
def test_every_choice_is_one_of_its_options(field):
    message = f"{field.label}: got perhaps, needs one of: " + ", ".join(field.options)
    assert texts(DEMO.with_(**{field.name: "perhaps"})) == {field.name: message}
    assert field.name in texts(DEMO.with_(**{field.name: None}))


@pytest.mark.parametrize("field", [f for f in FIELDS.values() if f.form == TEXT], ids=lambda field: field.name)
def test_words_are_words(field):
    assert texts(DEMO.with_(**{field.name: 5})) == {field.name: f"{field.label}: got 5, needs text"}


def test_the_text_of_a_refusal_in_full():
    with pytest.raises(InputError) as caught:
        resolve(DEMO.with_(p_line=Entry(-5.0, "bar", "gauge")))
    assert str(caught.value).splitlines() == [
        "Line pressure: got -5 bar gauge, needs 0.042 to 163.99 bar gauge",
        "  - below it nothing flows to an exhaust near the atmosphere; above it saturation leaves the equations used "
        "here",
        "  - check the unit, and whether it was meant gauge or absolute"]


def test_the_limits_of_a_gauge_move_with_the_barometer():
    low = DEMO.with_(p_line=Entry(200.0, "bar", "gauge"), p_barometer=Entry(60.0, "kPa", "absolute"))
    assert "needs 0.45 to 164.4 bar gauge" in texts(low)["p_line"]


def test_a_share_over_one_prints_plainly():
    assert texts(DEMO.with_(x_limit=Entry(97.0, "1")))["x_limit"].startswith("Quality limit: got 97, needs 0 to 1")


def test_all_faults_at_once_in_the_order_of_the_table():
    with pytest.raises(InputError) as caught:
        resolve(DEMO.with_(wetness=Entry(120.0, "%"), p_line=Entry(900.0, "bar", "gauge"), question="why",
                           p_barometer=Entry(5.0, "kPa", "absolute"), T_exhaust=Entry(float("nan"), "°C")))
    assert [fault.name for fault in caught.value.faults] == ["question", "p_line", "T_exhaust", "wetness",
                                                             "p_barometer"]


def test_the_exhaust_must_lie_below_the_line():
    case = DEMO.with_(p_exhaust=Entry(1.5, "bar", "gauge"), p_line=Entry(20.0, "psi", "gauge"),
                      leg_height=Entry(0.0, "m"))
    assert texts(case) == {"p_exhaust": "Exhaust pressure: got 1.5 bar gauge, needs less than the line pressure, "
                                        "1.37895 bar gauge\n"
                                        "  - steam only flows and expands towards a lower pressure\n"
                                        "  - check the unit of both, and gauge or absolute"}
    level = DEMO.with_(p_exhaust=Entry(2.0, "bar", "absolute"), p_line=Entry(2.0, "bar", "absolute"),
                       leg_height=Entry(0.0, "m"))
    assert set(texts(level)) == {"p_exhaust"}


def test_the_exhaust_must_lie_below_the_line_at_the_tapping():
    case = DEMO.with_(p_exhaust=Entry(1.95, "bar", "absolute"), p_line=Entry(2.0, "bar", "absolute"))
    assert "less than the line pressure at the tapping, 1.92169 bar absolute" in texts(case)["p_exhaust"]


@pytest.mark.parametrize(("height", "left"), [(95.0, "-0.299183 bar gauge"), (-100.0, "10.7989 bar gauge")])
def test_a_water_leg_that_cannot_be(height, left):
    p_line = Entry(9.0, "bar", "gauge") if height > 0 else Entry(163.0, "bar", "gauge")
    message = texts(DEMO.with_(p_line=p_line, leg_height=Entry(height, "m")))["leg_height"].splitlines()
    assert message[0] == (f"Gauge below tapping: got {height:g} m, needs a water leg that leaves 0.042 bar gauge to "
                          "163.992 bar gauge at the tapping")
    assert message[1].startswith("  - this one leaves ") and message[1].endswith(" bar gauge")
    assert message[2] == "  - negative where the gauge stands above the tapping"
    if height > 0:
        assert left in message[1]


def test_the_comfortable_superheat_is_at_least_the_least():
    message = texts(DEMO.with_(comfortable_superheat=Entry(4.0, "K")))["comfortable_superheat"]
    assert message == "Comfortable superheat: got 4 K, needs at least the least readable superheat, 5 K"
    assert not faults_of(DEMO.with_(comfortable_superheat=Entry(9.0, "°F")))  # 5 K
