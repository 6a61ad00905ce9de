"""Settled or not: the fit, each test by itself, windows over a log, and why the rest is not settled."""

import numpy as np
import pytest

from engine.measurement import SteadyLimits, Unsettled, judge_window, settled_windows, trend
from engine.measurement.steadiness import window_trends
from engine.steam import InputError

RNG = np.random.default_rng(11)
TIME = np.arange(0.0, 3601.0, 10.0)
NOISE = 0.1 * RNG.standard_normal(len(TIME))
T_LIMITS = {"T_exhaust": SteadyLimits(change=0.5, scatter=0.5)}


def kinds(reasons):
    return {r.test for r in reasons}


def first_order(n, rho, rng=RNG):
    y = np.empty(n)
    y[0] = rng.standard_normal() / np.sqrt(1 - rho**2)
    for i in range(1, n):
        y[i] = rho * y[i - 1] + rng.standard_normal()
    return y


# --- the fit --------------------------------------------------------------------------------------
def test_fit_is_least_squares():
    y = 400 + 2e-4 * TIME + NOISE
    fit = trend(TIME, y)
    (slope, at_0), covariance = np.polyfit(TIME, y, 1, cov=True)
    assert fit.slope == pytest.approx(slope, rel=1e-9)
    assert fit.u_slope == pytest.approx(np.sqrt(covariance[0, 0]), rel=1e-9)
    assert (fit.mean, fit.scatter) == pytest.approx((y.mean(), y.std(ddof=1)), rel=1e-12)
    assert fit.change == pytest.approx(abs(slope) * 3600)
    residual = y - at_0 - slope * TIME
    raw = (residual[1:] * residual[:-1]).mean() / (residual**2).mean()
    assert fit.r1 == pytest.approx(raw + 2 * (1 + 2 * raw) / len(y), abs=1e-6)


def test_p_value_of_uncorrelated_readings_is_students():
    """Readings whose neighbours differ in sign leave the plain t test of the slope."""
    from scipy.stats import linregress

    y = np.array([1.0, -1.2, 1.4, -0.7, 1.9, -0.6, 1.5, -0.4])
    fit = trend(np.arange(8.0), y)
    assert fit.r1 < 0
    assert fit.p_value == pytest.approx(linregress(np.arange(8.0), y).pvalue, rel=1e-9)


def test_missing_readings_are_passed_over():
    y = 400 + 1e-4 * TIME + NOISE
    y[50:60] = np.nan
    there = np.isfinite(y)
    got, want = trend(TIME, y), trend(TIME[there], y[there])
    assert got.n == 351
    assert (got.slope, got.u_slope, got.scatter) == pytest.approx((want.slope, want.u_slope, want.scatter))


def test_perfect_line_and_perfect_rest():
    line, rest = trend(TIME, 400 + 1e-3 * TIME), trend(TIME, np.full(len(TIME), 400.0))
    assert (line.u_slope, line.p_value) == (0.0, 0.0)
    assert (rest.slope, rest.scatter, rest.p_value) == (0.0, 0.0, 1.0)


def test_windows_of_a_long_log_are_as_accurate_as_each_by_itself():
    time = np.cumsum(RNG.uniform(5, 15, 20_000))
    y = 9e5 + 1e3 * np.sin(time / 5000) + RNG.standard_normal(20_000)
    found = settled_windows(time, {"p": y}, {"p": SteadyLimits(change=100.0)}, 600)
    for i in (0, len(found.first) // 2, len(found.first) - 1):
        rows = slice(found.first[i], found.stop[i])
        reasons = found.why((i, i + 1))
        fit = trend(time[rows], y[rows])
        assert (fit.change > 100.0) == (Unsettled.DRIFT in kinds(reasons))
        for r in reasons:
            assert r.value == pytest.approx(fit.change, rel=1e-7)


def test_many_windows_equal_one_by_one():
    y = 400 + NOISE
    first, stop = np.array([0, 30, 200]), np.array([60, 100, 361])
    many = window_trends(TIME, y, first, stop)
    for i in range(3):
        one = trend(TIME[first[i]:stop[i]], y[first[i]:stop[i]])
        assert [float(a[i]) for a in many] == pytest.approx(list(one), rel=1e-9, abs=1e-12)


@pytest.mark.parametrize(("n", "rho", "most"), [(30, 0.0, 0.08), (30, 0.5, 0.10), (200, 0.8, 0.10)])
def test_false_alarms_of_the_trend_test(n, rho, most):
    """Near 5 % although the readings follow one another; a plain t test would give up to 50 %."""
    rng = np.random.default_rng(5)
    alarms = np.mean([trend(np.arange(float(n)), first_order(n, rho, rng)).p_value < 0.05 for _ in range(600)])
    assert 0.01 < alarms < most


# --- one window -------------------------------------------------------------------------------------
def test_two_tests_see_different_things():
    ramp, swing = 400 + TIME / 3600, 400 + 0.8 * np.sin(TIME / 20)
    assert kinds(judge_window(TIME, {"T_exhaust": ramp + NOISE}, T_LIMITS).reasons) == {
        Unsettled.DRIFT, Unsettled.SIGNIFICANT}  # scatter 0.3 K passes
    assert kinds(judge_window(TIME, {"T_exhaust": swing}, T_LIMITS).reasons) == {Unsettled.SCATTER}
    assert judge_window(TIME, {"T_exhaust": 400 + NOISE}, T_LIMITS).settled


def test_reason_carries_value_and_limit():
    (drift, significant) = judge_window(TIME, {"T_exhaust": 400 + TIME / 3600}, T_LIMITS).reasons
    assert (drift.channel, drift.test, drift.limit, significant.limit) == ("T_exhaust", Unsettled.DRIFT, 0.5, 0.25)
    assert drift.value == pytest.approx(1.0)


def test_slope_limit_is_per_second():
    limits = {"T": SteadyLimits(slope=0.05 / 60)}
    assert judge_window(TIME, {"T": 400 + 0.02 / 60 * TIME}, limits).settled
    steep = judge_window(TIME, {"T": 400 - 0.06 / 60 * TIME}, limits).reasons
    assert kinds(steep) == {Unsettled.SLOPE, Unsettled.SIGNIFICANT}
    assert steep[0].value == pytest.approx(0.001)


def test_significance_counts_only_above_what_is_negligible():
    creep = 400 + 0.2 * TIME / 3600  # 0.2 K in the hour, without noise: as significant as can be
    assert judge_window(TIME, {"T": creep}, {"T": SteadyLimits(change=0.5)}).settled
    for limits in (SteadyLimits(change=0.3), SteadyLimits(change=0.5, negligible=0.1), SteadyLimits(scatter=1.0)):
        assert kinds(judge_window(TIME, {"T": creep}, {"T": limits}).reasons) == {Unsettled.SIGNIFICANT}
    assert judge_window(TIME, {"T": creep}, {"T": SteadyLimits(change=0.3, risk=None)}).settled


def test_exactly_at_the_limit_is_within_it():
    swing = np.array([-1.0, 1.0, -1.0, 1.0, -1.0, 1.0, 1.0, -1.0, 1.0, -1.0, 1.0, -1.0])  # no slope
    s = swing.std(ddof=1)
    time = np.arange(12.0)
    assert judge_window(time, {"T": swing}, {"T": SteadyLimits(scatter=s * (1 + 1e-12))}).settled
    assert not judge_window(time, {"T": swing}, {"T": SteadyLimits(scatter=s * (1 - 1e-12))}).settled


def test_too_few_readings_and_pauses():
    y = 400 + NOISE
    y[:-4] = np.nan
    got = judge_window(TIME, {"T_exhaust": y}, T_LIMITS)
    assert kinds(got.reasons) == {Unsettled.TOO_FEW, Unsettled.GAP}
    few, pause = got.reasons
    assert (few.value, few.limit) == (4, 5) and pause.value == pytest.approx(3570) and pause.limit == 900
    y = 400 + NOISE
    y[100:200] = np.nan
    (pause,) = judge_window(TIME, {"T_exhaust": y}, T_LIMITS).reasons
    assert (pause.test, pause.value) == (Unsettled.GAP, pytest.approx(1010))
    got = judge_window(TIME, {"T_exhaust": np.full(len(TIME), np.nan)}, T_LIMITS)
    assert kinds(got.reasons) == {Unsettled.TOO_FEW, Unsettled.GAP} and np.isnan(got.trends["T_exhaust"].slope)


def test_channels_without_limits_are_not_tested():
    got = judge_window(TIME, {"T_exhaust": 400 + NOISE, "p_line": 1e6 + 100 * TIME}, T_LIMITS)
    assert got.settled and list(got.trends) == ["T_exhaust"]


# --- over a log --------------------------------------------------------------------------------------
def test_warm_up_then_settled():
    T = 394 - 60 * np.exp(-TIME / 360) + 0.02 * RNG.standard_normal(len(TIME))
    found = settled_windows(TIME, {"T_exhaust": T}, T_LIMITS, 600)
    (settled,) = found.settled
    assert 1500 < settled.begin < 2100 and settled.end == TIME[-1] and settled.stop == len(TIME)
    assert found.longest is settled
    reasons = found.why(found.unsettled[0].windows)
    assert kinds(reasons) == {Unsettled.DRIFT, Unsettled.SIGNIFICANT, Unsettled.SCATTER}
    assert found.why(settled.windows) == ()


def test_swinging_load_is_refused_for_its_trend_while_scatter_would_pass():
    """1.2 K down in 20 minutes, then flat: only the slope tells (0.06 K/min against 0.05).

    A window with a part f of itself on the ramp has the slope 0.06 f² (3 - 2 f): within the limit up
    to f = 0.74, so the first settled window starts no earlier than 20 min - 0.74 x 10 min.
    """
    time = np.arange(0.0, 45 * 60 + 1, 30.0)
    T = 392.25 - np.minimum(time, 1200) / 1200 * 1.2 + 0.03 * RNG.standard_normal(len(time))
    found = settled_windows(time, {"T": T}, {"T": SteadyLimits(slope=0.05 / 60, scatter=0.5)}, 600)
    assert 1200 - 0.75 * 600 <= found.longest.begin <= 1260 and found.longest.end == 2700
    assert kinds(found.why(found.unsettled[0].windows)) <= {Unsettled.SLOPE, Unsettled.SIGNIFICANT}


def test_every_window_inside_a_settled_interval_is_settled():
    y = 400 + NOISE + np.where((TIME > 1500) & (TIME < 1700), 2.0, 0.0)
    found = settled_windows(TIME, {"T_exhaust": y}, T_LIMITS, 600, step=1)
    assert len(found.settled) == 2 and found.settled[0].end < 1700 and found.settled[1].begin > 1500
    for interval in found.settled:
        for i in range(*interval.windows):
            rows = slice(found.first[i], found.stop[i])
            assert judge_window(TIME[rows], {"T_exhaust": y[rows]}, T_LIMITS).settled
    covered = sorted(w for i in found.settled + found.unsettled for w in range(*i.windows))
    assert covered == list(range(len(found.first)))


def test_worst_window_of_an_unsettled_run_is_named_with_its_channel():
    channels = {"T": 400 + NOISE, "p": 1e6 + np.where(TIME > 1800, 5e3, 0.0)}
    limits = {"T": SteadyLimits(change=0.5), "p": SteadyLimits(change=2e3, scatter=1e3)}
    found = settled_windows(TIME, channels, limits, 600)
    (run,) = found.unsettled
    reasons = {(r.channel, r.test): r.value for r in found.why(run.windows)}
    assert {channel for channel, _ in reasons} == {"p"}
    assert reasons["p", Unsettled.SCATTER] == pytest.approx(2.5e3, rel=0.02)  # the step in the middle


def test_a_pause_in_the_log_ends_an_interval():
    keep = (TIME < 1500) | (TIME > 2400)
    found = settled_windows(TIME[keep], {"T_exhaust": 400 + NOISE[keep]}, T_LIMITS, 600)
    assert [i.end for i in found.settled] == [pytest.approx(1490, abs=10), 3600.0]
    assert kinds(found.why(found.unsettled[0].windows)) >= {Unsettled.GAP}


def test_readings_every_two_minutes_by_hand():
    time = np.arange(0, 61, 2) * 60.0
    found = settled_windows(time, {"T": 400 + 0.1 * RNG.standard_normal(31)}, {"T": SteadyLimits(change=1.0)}, 600)
    assert found.longest.begin == 0 and found.longest.end == 3600 and len(found.first) == 26


def test_the_last_window_reaches_the_end_whatever_the_step():
    found = settled_windows(TIME, {"T_exhaust": 400 + NOISE}, T_LIMITS, 600, step=7)
    assert found.stop[-1] == len(TIME) and found.longest.end == TIME[-1]


def test_log_is_not_modified_and_progress_is_told():
    y, told = 400 + NOISE, []
    before = y.copy()
    settled_windows(TIME, {"T_exhaust": y}, T_LIMITS, 600, progress=told.append)
    assert np.array_equal(y, before) and told[-1] == 1.0


def test_longest_pause_table_against_a_plain_loop():
    keep = np.sort(RNG.choice(3000, 1200, replace=False))
    time, y = np.arange(3000.0), np.full(3000, np.nan)
    y[keep] = RNG.standard_normal(1200)
    found = settled_windows(time, {"T": y}, {"T": SteadyLimits(scatter=10.0, risk=None)}, 40, step=1)
    for i in range(0, len(found.first), 37):
        inside = keep[(keep >= found.first[i]) & (keep < found.stop[i])]
        edges = np.concatenate(([found.first[i]], inside, [found.first[i] + 40]))
        assert bool(found.flags["T"][i] & Unsettled.GAP) == (np.diff(edges).max() > 10)


def test_a_hundred_thousand_rows_take_no_time_and_little_memory():
    import tracemalloc

    time = np.arange(100_000.0)
    channels = {n: 400 + RNG.standard_normal(100_000) for n in "abc"}
    limits = {n: SteadyLimits(change=1.0) for n in "abc"}
    tracemalloc.start()
    settled_windows(time, channels, limits, 600)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak < 8e6  # a fraction of the log's own 3.2 MB a channel and more: one stretch at a time


# --- refusals -------------------------------------------------------------------------------------
@pytest.mark.parametrize(("call", "message"), [
    (lambda: trend([0, 1], [1.0, 2.0]), "number of readings: got 2, needs 3 or more"),
    (lambda: trend([0, 2, 1], [1.0, 2.0, 3.0]), "time at position 2: got 1 s, needs a time after the one before it"),
    (lambda: trend([0, 1, 1], [1.0, 2.0, 3.0]), "time at position 2"),
    (lambda: trend([np.nan, 1, 2], [1.0, 2.0, 3.0]), "time.*got nan s"),
    (lambda: trend([0, 1, 2], [1.0, 2.0]), r"channel 'values': got shape \(2,\), needs one value for each of the 3"),
    (lambda: SteadyLimits(change=0.0), "limit of change: got 0, needs a number above 0, or None"),
    (lambda: SteadyLimits(scatter=np.nan), "limit of scatter: got nan"),
    (lambda: SteadyLimits(risk=5), "risk: got 5, needs a number between 0 and 1, or None"),
    (lambda: SteadyLimits(negligible=-1.0), "negligible change: got -1"),
    (lambda: judge_window(TIME, {"T": NOISE}, {"T2": SteadyLimits()}), "limits: got T2, needs a channel of the log"),
    (lambda: judge_window(TIME, {"T": NOISE}, {}), "limits: got none, needs at least one channel to test"),
    (lambda: judge_window([], {"T": []}, {"T": SteadyLimits()}), "log: got no rows"),
    (lambda: judge_window(TIME, {"T": NOISE}, {"T": SteadyLimits()}, least=2), "needs 3 or more"),
    (lambda: settled_windows(TIME, {"T": NOISE}, {"T": SteadyLimits()}, 7200),
     "length of the window: got 7200 s, needs no more than 3600 s, the whole log"),
    (lambda: settled_windows(TIME, {"T": NOISE}, {"T": SteadyLimits()}, 0), "needs a time above 0"),
    (lambda: settled_windows(TIME, {"T": NOISE}, {"T": SteadyLimits()}, np.nan), "needs a time above 0"),
    (lambda: settled_windows(TIME, {"T": NOISE}, {"T": SteadyLimits()}, 600, step=0), "step: got 0, needs 1 or more"),
])
def test_refusals(call, message):
    with pytest.raises(InputError, match=message):
        call()
