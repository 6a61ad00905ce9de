"""Outliers are flagged, counted and never removed."""

import numpy as np
import pytest

from engine.measurement import flag_outliers, grubbs_critical, thompson_tau
from engine.steam import InputError

CLEAN = np.array([400.1, 399.9, 400.0, 400.2, 399.8, 400.1, 399.9, 400.0])


def test_readings_are_kept_and_not_modified():
    y = np.append(CLEAN, 406.0)
    before = y.copy()
    got = flag_outliers(y)
    assert np.array_equal(y, before) and len(got.distance) == 9
    assert got.by_tau.nonzero()[0].tolist() == got.by_grubbs.nonzero()[0].tolist() == [8]
    assert (got.mean_kept, got.s_kept) == pytest.approx((CLEAN.mean(), CLEAN.std(ddof=1)))
    assert got.mean > got.mean_kept and got.s > got.s_kept


def test_sides():
    y = np.append(CLEAN, 406.0)
    assert flag_outliers(y, side="high").by_grubbs[8] and not flag_outliers(y, side="low").by_grubbs.any()
    assert flag_outliers(2 * 400 - y, side="low").by_grubbs[8]
    assert grubbs_critical(10, side="high") < grubbs_critical(10)


def test_missing_readings_are_passed_over():
    y = np.append(CLEAN, [np.nan, 406.0])
    got, without = flag_outliers(y), flag_outliers(y[np.isfinite(y)])
    assert (got.tau, got.mean, got.s) == (without.tau, without.mean, without.s)
    assert not got.used[8] and not got.by_tau[8] and got.distance[8] == 0.0


def test_equal_readings_have_no_outlier():
    got = flag_outliers([0.1 + 0.2, 0.3, 0.3, 0.3])
    assert got.s == 0.0 and not got.by_tau.any() and not got.by_grubbs.any()


def test_flagging_does_not_depend_on_unit_or_origin():
    y = np.append(CLEAN, 403.0)
    for scaled in (y * 1.8 - 459.67, y * 1e5, -y):
        assert flag_outliers(scaled).distance == pytest.approx(flag_outliers(y).distance, rel=1e-9, abs=1e-9)


def test_critical_distances_grow_with_n_and_fall_with_risk():
    n = np.arange(3, 2000)
    assert (np.diff(thompson_tau(n)) > 0).all() and (np.diff(grubbs_critical(n)) > 0).all()
    assert thompson_tau(1e6) == pytest.approx(1.959964, abs=1e-4)  # Student's t becomes normal
    assert grubbs_critical(20, 0.01) > grubbs_critical(20, 0.05)
    assert (grubbs_critical(n) < (n - 1) / np.sqrt(n)).all()  # no reading can lie farther


def test_scalar_and_array():
    assert isinstance(thompson_tau(5), float)
    assert thompson_tau(np.array([[5, 10]])).tolist() == [[thompson_tau(5), thompson_tau(10)]]


@pytest.mark.parametrize("readings", [[], [1.0], [1.0, 2.0], [1.0, 2.0, np.nan]])
def test_fewer_than_three_are_refused(readings):
    with pytest.raises(InputError, match="number of readings: got [012], needs 3 or more"):
        flag_outliers(readings)


@pytest.mark.parametrize("call", [
    lambda: thompson_tau(10, 0.0), lambda: grubbs_critical(10, 1.0), lambda: flag_outliers(CLEAN, np.nan),
])
def test_risk_is_a_probability(call):
    with pytest.raises(InputError, match="risk: got .*, needs a number between 0 and 1"):
        call()


def test_unknown_side():
    with pytest.raises(InputError, match="side: got up, needs one of: both, high, low"):
        grubbs_critical(10, side="up")
