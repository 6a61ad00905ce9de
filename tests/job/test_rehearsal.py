"""A rehearsal: what is stopped, what is recorded, what comes back, and what the verdict says."""

import base64
import io
import zlib
from dataclasses import FrozenInstanceError, replace
from functools import cache

import numpy as np
import pytest

from engine.job.case.demo import DEMO
from engine.job.case.examples import BOILER_OUTLET
from engine.job.case.fields_instruments import LIMIT
from engine.job.case.rows import Entry
from engine.job.rehearsal import (
    Event,
    Finding,
    Kind,
    Rehearsal,
    Statement,
    act,
    advance,
    begin,
    last_sight,
    look,
    sight_of,
    state,
    take_reading,
    take_readings,
)
from engine.job.rehearsal.demo_log import demo_log
from engine.job.rehearsal.link import from_link, to_link
from engine.job.rehearsal.looks import LOOK_WORDS, Look
from engine.job.rehearsal.readings import Way, reckoned, typed, weighed_flow
from engine.job.rehearsal.said import clock, cost, headline, journal, judged, truth
from engine.job.rehearsal.scenario import HiddenFault, Load, Scenario
from engine.job.rehearsal.simulation import LONGEST, by_the_sheet
from engine.job.rehearsal.valves import COLD_AGAIN, DEED_WORDS, DONE_WORDS, Deed, Valves, refusal, valves_after
from engine.job.rehearsal.verdict import SIGNS, verdict_of
from engine.job.result import reduce
from engine.job.result.runs import run_of_log, runs_typed
from engine.measurement.logbook import read_log
from engine.steam.errors import InputError
from engine.steam.units import SI, US

IN_ORDER = ((Deed.PERMIT, 60), (Deed.WALK_EXHAUST, 60), (Deed.OPEN_DRAIN, 120), (Deed.CRACK_STOP, 60),
            (Deed.CLOSE_DRAIN, 20), (Deed.OPEN_STOP, 2700))


def started(*faults, seed=1, **more):
    r = begin(Scenario(DEMO, frozenset(faults), seed, **more))
    for deed, wait in IN_ORDER:
        r = advance(act(r, deed), wait)
    return r


@cache
def read(*faults, seed=1, case=DEMO):
    """A test by the book: warm, 25 sets over 25 minutes, everything looked at, shut down."""
    r = begin(Scenario(case, frozenset(faults), seed))
    for deed, wait in IN_ORDER:
        r = advance(act(r, deed), wait)
    r = take_readings(r, 25, 60.0)
    for where in Look:
        r = look(r, where)
    return act(act(r, Deed.CLOSE_STOP), Deed.OPEN_DRAIN)


def stated(r, *suspected, way=None):
    """The trainee states whatever the program makes of the readings."""
    way = way or Way()
    x = reckoned(r, way).x
    finding = Finding.CANNOT if x is None else Finding.QUALITY
    return state(r, Statement(finding, x, frozenset(HiddenFault(s) for s in suspected)))


# ---- what would hurt someone is stopped


def after(*deeds):
    return valves_after(deeds)


@pytest.mark.parametrize(("valves", "time", "deed", "why"), [
    (Valves(), 0, Deed.OPEN_DRAIN, "permit"),
    (Valves(), 0, Deed.CRACK_STOP, "permit"),
    (Valves(), 0, Deed.OPEN_BODY, "permit"),
    (Valves(permit=True), 0, Deed.OPEN_DRAIN, "someone may stand in front of the end"),
    (Valves(permit=True), 0, Deed.CRACK_STOP, "fills up to line pressure"),
    (Valves(permit=True, exhaust_free=True), 0, Deed.CRACK_STOP, "has not been blown down: cold water"),
    (Valves(permit=True, exhaust_free=True), 0, Deed.OPEN_STOP, "has not been blown down"),
    (Valves(True, True, drain=True, drain_changed=100), 130, Deed.CRACK_STOP, "less than a minute"),
    (Valves(True, True, drain=True, drain_changed=100), 300, Deed.OPEN_STOP, "never thrown open"),
    (Valves(True, True, stop=0.3, stop_changed=100), 110, Deed.OPEN_STOP, "Listen for half a minute"),
    (Valves(True, True, stop=1.0, stop_changed=0), 900, Deed.BLANK_EXHAUST, "under line pressure"),
    (Valves(True, True, stop=1.0, stop_changed=0), 900, Deed.OPEN_BODY, "full of live steam"),
    (Valves(True, True, drain=True, drain_changed=0), 900, Deed.OPEN_BODY, "still blows"),
    (Valves(True, False), 900, Deed.OPEN_BODY, "blank"),
    (Valves(True, True, body_open=True, blown=100), 900, Deed.CRACK_STOP, "body is open"),
])
def test_a_deed_that_would_hurt_someone_is_refused_with_the_reason(valves, time, deed, why):
    assert why in refusal(valves, time, deed)


def test_the_order_of_the_sheet_is_not_refused():
    valves = Valves()
    for time, deed in by_the_sheet():
        assert refusal(valves, time, deed) == "", deed
        valves = valves.after(time, deed)
    assert valves.stop == 1.0 and not valves.drain and valves.blown == 210


@pytest.mark.parametrize("deed", [Deed.PERMIT, Deed.CLOSE_DRAIN, Deed.CLOSE_STOP])
def test_what_makes_safe_is_never_refused(deed):
    for valves in (Valves(), after(*by_the_sheet()), Valves(body_open=True)):
        assert refusal(valves, 5000, deed) == ""


def test_a_branch_that_stood_closed_has_to_be_blown_again():
    deeds = (*by_the_sheet(), (1000, Deed.CLOSE_STOP))
    assert refusal(after(*deeds), 1100, Deed.CRACK_STOP) == ""
    late = 1000 + COLD_AGAIN + 5
    assert "has not been blown down" in refusal(after(*deeds), late, Deed.CRACK_STOP)
    again = after(*deeds, (late, Deed.OPEN_DRAIN))
    assert "less than a minute" in refusal(again, late + 30, Deed.CRACK_STOP)
    assert refusal(again, late + 60, Deed.CRACK_STOP) == ""


def test_a_refused_deed_changes_nothing_but_the_record():
    r = begin(Scenario(DEMO))
    tried = act(r, Deed.CRACK_STOP)
    assert tried.valves == Valves() and tried.now == 0 and tried.deeds == ()
    assert tried.of(Kind.REFUSED) == (Event(0, Kind.REFUSED, Deed.CRACK_STOP),)
    assert last_sight(tried)[1].text(SI).startswith("Refused: crack the stop valve. No valve is touched without")


def test_no_words_grant_a_permission():
    """Deeds are told as practice; nothing here says that a valve may be opened."""
    words = " ".join([*DEED_WORDS.values(), *DONE_WORDS.values(), *LOOK_WORDS.values()]).lower()
    assert not any(grant in words for grant in ("you may", "safe to", "allowed", "permitted"))
    assert set(DEED_WORDS) == set(DONE_WORDS) == set(Deed) and set(LOOK_WORDS) == set(Look)


# ---- the record


def test_a_rehearsal_cannot_be_changed():
    r = begin(Scenario(DEMO))
    with pytest.raises(FrozenInstanceError):
        r.now = 60
    with pytest.raises(FrozenInstanceError):
        r.scenario.seed = 2


def test_the_same_deeds_show_the_same_however_time_was_advanced():
    strides, leap = started(seed=3), started(seed=3)
    for _ in range(30):
        strides = advance(strides, 60)
    leap = advance(leap, 1800)
    assert strides == leap
    assert np.array_equal(strides.course.shown["exhaust thermometer"], leap.course.shown["exhaust thermometer"])


def test_other_seeds_are_other_rigs():
    rigs = [begin(Scenario(DEMO, seed=s)).rig for s in (1, 2)]
    assert rigs[0].x != rigs[1].x and rigs[0].gauges["line"].error != rigs[1].gauges["line"].error


def test_time_runs_forward_and_ends():
    r = begin(Scenario(DEMO))
    assert advance(r, 62).now == 60  # whole steps
    for wrong in (-60, LONGEST + 60):
        with pytest.raises(InputError, match="time of the rehearsal"):
            advance(r, wrong)


def test_a_second_reading_at_the_same_moment_adds_nothing():
    r = take_reading(started())
    assert take_reading(r) is r
    assert take_readings(r, 3, 60.0).readings == (r.now, r.now + 60, r.now + 120, r.now + 180)


def test_looking_takes_its_time_and_is_recorded():
    r = started()
    later = look(r, Look.WEIGH)
    assert later.now == r.now + 300 and later.looked(Look.WEIGH) == later.now and r.looked(Look.WEIGH) is None
    assert weighed_flow(later) == pytest.approx(float(later.course.flow[-1]), rel=0.06)
    assert weighed_flow(r) is None


@pytest.mark.parametrize(("fault", "where", "sound", "hidden"), [
    ("wet lagging", Look.LAGGING, "dry and closed", "drips"),
    ("thermometer not immersed", Look.IMMERSION, "It is 60.0 mm deep", "it should be 60.0 mm"),
    ("wet exhaust", Look.EXHAUST_END, "what comes out is dry", "what comes out is wet"),
    ("water slugs", Look.EXHAUST_END, "what comes out is dry", "spits water"),
    ("back pressure", Look.EXHAUST_END, "then white: what comes out is dry.", "hangs on it"),
    ("gauge read as absolute", Look.GAUGE_FACE, "enters it as gauge", "enters it as absolute"),
    ("barometer assumed", Look.BAROMETER, "on the sheet stands", "on the sheet stands"),
    ("clogged orifice", Look.WEIGH, "31.7 kg/h", "31.7 kg/h"),
])
def test_whoever_looks_sees_what_is_wrong(fault, where, sound, hidden):
    def shows(*faults):
        r = read(*faults)
        return sight_of(r, next(e for e in r.events if e.what is where)).text(SI)

    clean, wrong = shows(), shows(fault)
    assert sound in clean and hidden in wrong and clean != wrong


def test_a_second_thermometer_shows_what_the_first_hides():
    r = read("thermometer offset", seed=2)
    offset = r.rig.gauges["exhaust thermometer"].error
    x = {second: reckoned(r, Way(second_read=second)).x for second in (False, True)}
    assert abs(x[False] - r.rig.x) > 0.0015 and abs(offset) > 1.4
    assert x[True] == pytest.approx(r.rig.x, abs=0.0008)


def test_a_clogged_orifice_is_seen_when_the_body_is_opened_and_only_then():
    r = read("clogged orifice")
    assert "The drain still blows" in last_sight(act(r, Deed.OPEN_BODY))[1].text(SI)
    opened = act(act(r, Deed.CLOSE_DRAIN), Deed.OPEN_BODY)
    assert "about 25 % of its area is left" in last_sight(opened)[1].text(SI)
    clean = act(act(read(), Deed.CLOSE_DRAIN), Deed.OPEN_BODY)
    assert "clean" in last_sight(clean)[1].text(SI)


# ---- the truth comes back


@pytest.mark.parametrize("seed", range(8))
def test_without_faults_the_truth_comes_back_within_its_uncertainty(seed):
    r = read(seed=seed)
    result = reckoned(r, Way())
    assert result.final
    assert abs(result.x - r.rig.x) <= result.instruments.U
    verdict = verdict_of(stated(r))
    assert verdict.right and verdict.all_named and not verdict.U_common
    assert verdict.lessons == () and verdict.costs == ()
    assert headline(verdict) == "● The answer is right and nothing was hidden."


def test_the_truth_comes_back_at_another_rig_too():
    case = BOILER_OUTLET.with_(thermometer_kind="IEC 60751", thermometer_grade="AA", line_gauge_kind=LIMIT,
                               line_gauge_U=Entry(0.1, "bar"), exhaust_gauge_kind=LIMIT,
                               exhaust_gauge_U=Entry(0.5, "kPa"), heat_loss_tolerance=Entry(20.0, "%"))
    for seed in (1, 2, 3):
        verdict = verdict_of(stated(read(seed=seed, case=case)))
        assert verdict.right and verdict.error is not None


@pytest.mark.parametrize(("fault", "way"), [
    ("back pressure", Way()),
    ("clogged orifice", Way(flow_weighed=True)),
    ("gauge read as absolute", Way(line_absolute=False)),
    ("barometer assumed", Way(barometer_read=True)),
    ("thermometer not immersed", Way(second_read=True)),
    ("thermometer offset", Way(second_read=True)),
])
def test_whoever_notices_and_reckons_by_it_gets_the_truth(fault, way):
    r = read(fault, seed=4)
    verdict = verdict_of(stated(r, fault, way=way), way)
    assert verdict.right and verdict.all_named, verdict.error
    assert headline(verdict) == "● The answer is right and every hidden fault was named."


@pytest.mark.parametrize(("fault", "way"), [
    ("back pressure", Way(exhaust_read=False)), ("wet lagging", Way()), ("thermometer not immersed", Way()),
    ("gauge read as absolute", Way()), ("barometer assumed", Way()), ("thermometer offset", Way()),
    ("clogged orifice", Way()),
])
def test_whoever_does_not_notice_is_off_by_what_the_fault_costs(fault, way):
    r = read(fault, seed=4)
    verdict = verdict_of(stated(r, way=way), way)
    told = next(c.size for c in verdict.costs if c.fault == fault)
    assert verdict.error == pytest.approx(told, abs=0.0011)  # the instruments' own errors are in it as well
    assert verdict.missed == {HiddenFault(fault)} and not verdict.all_named
    assert any(s.text(SI).startswith(f"Overlooked: {fault}") and "You looked" in s.text(SI) for s in verdict.lessons)


def test_wet_steam_and_a_superheated_line_have_no_quality():
    wet = read("wet exhaust")
    assert verdict_of(state(wet, Statement(Finding.CANNOT, None, frozenset(wet.scenario.faults)))).right
    claimed = verdict_of(state(wet, Statement(Finding.QUALITY, 0.955)))
    assert not claimed.right and claimed.error is None
    assert "no value could be read" in truth(claimed).text(SI)
    hot = read("superheated line")
    assert verdict_of(state(hot, Statement(Finding.SUPERHEATED))).right
    assert not verdict_of(state(hot, Statement(Finding.CANNOT))).right


def test_readings_spoilt_by_slugs_may_be_given_up_by_whoever_names_them():
    r = read("water slugs")
    named = Statement(Finding.CANNOT, None, frozenset({HiddenFault.WATER_SLUGS}))
    assert verdict_of(state(r, named)).right
    assert not verdict_of(state(r, Statement(Finding.CANNOT))).right


def test_faults_that_are_not_there_are_told_apart():
    verdict = verdict_of(stated(read(), "wet lagging"))
    assert verdict.right and verdict.imagined == {HiddenFault.WET_LAGGING}
    assert headline(verdict) == "◐ The answer is right; not there: wet lagging."


def test_haste_is_told():
    r = begin(Scenario(DEMO))
    r = act(r, Deed.CRACK_STOP)
    for deed, wait in (*IN_ORDER[:-1], (Deed.OPEN_STOP, 120)):
        r = advance(act(r, deed), wait)
    r = take_readings(r, 4, 60.0)
    told = " ".join(s.text(SI) for s in verdict_of(state(r, Statement(Finding.QUALITY, 0.97))).lessons)
    assert "Stopped: crack the stop valve." in told
    assert "Only 4 sets of readings" in told
    assert "of 4 sets were read while the body still took heat" in told
    assert "The stop valve was left open." in told


def test_a_valve_half_open_is_told():
    r = begin(Scenario(DEMO))
    for deed, wait in (*IN_ORDER[:4], (Deed.CLOSE_DRAIN, 3000)):
        r = advance(act(r, deed), wait)
    r = take_readings(r, 12, 60.0)
    told = " ".join(s.text(SI) for s in verdict_of(state(r, Statement(Finding.QUALITY, 0.97))).lessons)
    assert "12 of 12 sets were read with the stop valve not fully open" in told


def test_a_common_uncertainty_stands_in_where_the_case_states_no_instruments():
    bare = DEMO.with_(thermometer_kind="not stated")
    verdict = verdict_of(stated(read(case=bare)))
    assert verdict.U_common and verdict.U == 0.002


def test_a_statement_needs_a_quality_or_a_reason():
    for x in (None, 0.0, 1.2, float("nan")):
        with pytest.raises(InputError, match="Quality stated"):
            Statement(Finding.QUALITY, x)
    with pytest.raises(InputError, match="nothing stated"):
        verdict_of(read())


def test_every_fault_has_its_sign():
    assert set(SIGNS) == set(HiddenFault)


# ---- in words


def test_the_verdict_is_told_in_the_reader_s_units():
    verdict, r = verdict_of(stated(read("back pressure"))), stated(read("back pressure"))
    assert " K of superheat" in truth(verdict).text(SI) and " °F of superheat" in truth(verdict).text(US)
    assert "%pt" in judged(verdict, r).text(SI) and "that of these instruments" in judged(verdict, r).text(SI)
    assert "costs nothing but margin" in cost(verdict.costs[0]).text(SI)


def test_the_journal_has_everything_in_order():
    rows = journal(read(), SI)
    assert rows[0] == (clock(0), "Permit in hand",
                       "The permit is in hand and the control room knows of the test.")
    assert any(what == "25 sets of readings" for _, what, _ in rows)
    assert len(rows) == len(IN_ORDER) + 1 + len(Look) + 2


# ---- links


@pytest.mark.parametrize("r", [
    begin(Scenario(DEMO)), begin(Scenario(DEMO, frozenset(HiddenFault) - {HiddenFault.WET_EXHAUST}, 99, 0.981,
                                          Load.SWINGING, True))])
def test_a_scenario_comes_back_from_its_link(r):
    assert from_link(to_link(r)) == r


def test_a_whole_rehearsal_comes_back_from_its_link():
    r = stated(act(read("wet lagging"), Deed.BLANK_EXHAUST), "wet lagging")
    back = from_link(to_link(r))
    assert back == r and verdict_of(back) == verdict_of(r)
    assert len(to_link(r)) < 2000


def test_no_fault_can_be_read_in_a_link():
    word = to_link(begin(Scenario(DEMO, frozenset({HiddenFault.WET_LAGGING}))))
    packed = base64.urlsafe_b64decode(word + "=" * (-len(word) % 4))
    for text in (word, packed.decode("latin-1"), zlib.decompress(packed).decode()):
        assert not any(fault.value in text or fault.name in text for fault in HiddenFault)


def packed(text):
    return base64.urlsafe_b64encode(zlib.compress(text.encode())).decode().rstrip("=")


def test_a_link_that_is_none_is_refused_with_the_reason():
    good = to_link(begin(Scenario(DEMO)))
    inner = zlib.decompress(base64.urlsafe_b64decode(good + "=" * (-len(good) % 4))).decode()
    for word in ("", "x", "äöü", good[:-9], good[:40]):
        with pytest.raises(InputError):
            from_link(word)
    for text in ("[]", "{}", "null", "[1,2,3]", "[" * 20_000, "[2" + inner[2:]):
        with pytest.raises(InputError):
            from_link(packed(text))
    head, tail = ",[],1,null", ",0,[],null]"
    assert head in inner and inner.endswith(tail)
    for wrong in (",[77],1,null", ",[],-1,null", ",[],1,7", ',[],1,"x"'):
        with pytest.raises(InputError):
            from_link(packed(inner.replace(head, wrong)))
    for wrong in (",3,[],null]", ",NaN,[],null]", ",-5,[],null]", ',0,[[0,"q",null]],null]', ",0,[],[0,2,[]]]",
                  ",0,[],[9,0.9,[]]]", ",0,7,null]"):
        with pytest.raises(InputError):
            from_link(packed(inner.replace(tail, wrong)))


@pytest.mark.parametrize("events", [
    '[[0,"d","crack"]]',  # steam before anything
    '[[0,"d","permit"],[10,"d","walk"],[20,"d","drain"],[30,"d","crack"]]',  # before it was blown down
    '[[0,"x","permit"]]',  # what is never refused
    '[[60,"d","permit"],[0,"d","walk"]]',  # backwards
])
def test_no_link_brings_a_deed_that_would_have_been_stopped(events):
    good = to_link(begin(Scenario(DEMO)))
    inner = zlib.decompress(base64.urlsafe_b64decode(good + "=" * (-len(good) % 4))).decode()
    assert inner.endswith(",0,[],null]")
    with pytest.raises(InputError, match="rehearsal in the link"):
        from_link(packed(inner.removesuffix(",0,[],null]") + f",600,{events},null]"))


# ---- logs and typed readings


@pytest.mark.parametrize(("seed", "load"), [(0, Load.STEADY), (1, Load.STEADY), (2, Load.SWINGING), (3, Load.FALLING)])
def test_a_log_of_a_known_truth_gives_that_truth_back(seed, load):
    file = io.BytesIO()
    hidden = demo_log(file, DEMO, seed=seed, load=load, duration=9000.0)
    log = read_log(io.BytesIO(file.getvalue()))
    result = reduce(DEMO, [run_of_log(log)])
    assert abs(result.x - hidden.x) <= result.instruments.U
    assert log.basis["p_line"] == "gauge"


def test_a_log_says_what_was_done_and_is_written_as_read():
    file = io.StringIO()
    demo_log(file, DEMO, duration=1200.0, every=30.0, start="2025-03-04T08:00:00")
    lines = file.getvalue().splitlines()
    assert len(lines) == 42
    assert lines[1].startswith("2025-03-04T08:00:00,") and "Permit in hand" in lines[1]
    assert max(len(cell) for line in lines[1:] for cell in line.split(",")[1:7]) <= 9


def test_a_hidden_fault_is_in_the_log_as_it_would_be_at_the_rig():
    def heading(*faults):
        file = io.StringIO()
        truth_ = demo_log(file, DEMO, faults, duration=600.0)
        return file.getvalue().splitlines()[0], truth_

    assert "line pressure [bar absolute]" in heading("gauge read as absolute")[0]
    assert heading("superheated line")[1].line_superheat > 5.0


def test_a_log_is_the_same_for_the_same_seed_and_may_start_late(tmp_path):
    one, two = (tmp_path / name for name in ("one.csv", "two.csv"))
    for target in (one, two):
        demo_log(target, DEMO, seed=8, duration=1800.0, skip=600.0)
    assert one.read_bytes() == two.read_bytes()
    assert len(one.read_text().splitlines()) == 1 + 121


def test_a_log_without_rows_is_refused():
    for wrong in ({"duration": 0.0}, {"every": -1.0}, {"duration": 1e9}, {"skip": 1e5}):
        with pytest.raises(InputError, match="rows of the log"):
            demo_log(io.StringIO(), DEMO, **wrong)


def test_readings_typed_into_the_case_give_the_same_answer():
    r = read()
    by_case = reduce(typed(r), runs_typed(typed(r)))
    assert by_case.x == pytest.approx(reckoned(r, Way()).x, abs=2e-7)


def test_all_sets_can_be_used_whether_settled_or_not():
    r = take_readings(replace_time(started(), -2400), 15, 60.0)
    assert reckoned(r, Way()).x is None
    assert reckoned(r, Way(settled_only=False)).x is not None


def replace_time(r: Rehearsal, by: int) -> Rehearsal:
    """The same rehearsal earlier, nothing having happened since."""
    return replace(r, now=r.now + by)
