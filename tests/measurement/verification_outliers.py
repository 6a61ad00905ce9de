"""Published critical values and the worked example of an outlier test."""

import numpy as np
import pytest

from engine.measurement import flag_outliers, grubbs_critical, thompson_tau


@pytest.mark.parametrize(("n", "tau"), [  # ASME PTC 19.1 and tables after it; from memory but for n = 10
    (3, 1.1511), (4, 1.4250), (5, 1.5712), (10, 1.7984), (20, 1.8853), (50, 1.9314),
])
def test_modified_thompson_tau(n, tau):
    assert thompson_tau(n) == pytest.approx(tau, abs=1e-4)


@pytest.mark.parametrize(("n", "side", "critical"), [  # tables in analytical chemistry texts, risk 0.05
    (4, "both", 1.481), (6, "both", 1.887), (10, "both", 2.290), (12, "both", 2.412),
    (10, "high", 2.18), (20, "high", 2.56),
])
def test_grubbs(n, side, critical):
    assert grubbs_critical(n, side=side) == pytest.approx(critical, abs=0.005)


SPECTROMETER = [199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57]


def test_nist_example():
    """NIST/SEMATECH e-Handbook 1.3.5.17.1, eight values, upper test: G = 2.468765, critical 2.032 (from memory)."""
    got = flag_outliers(SPECTROMETER, side="high")
    assert got.distance.max() == pytest.approx(2.468765, abs=1e-6)
    assert got.grubbs == pytest.approx(2.032, abs=1e-3)
    assert np.flatnonzero(got.by_grubbs).tolist() == [7]


def test_false_alarms_on_clean_data():
    """Grubbs keeps its 5 % a run; tau, 5 % a reading, flags something in 78 % of runs of 20 (simulated)."""
    rng = np.random.default_rng(7)
    runs = [flag_outliers(rng.standard_normal(20)) for _ in range(2000)]
    assert np.mean([r.by_grubbs.any() for r in runs]) == pytest.approx(0.05, abs=0.02)  # 4 standard errors
    assert np.mean([r.by_tau.any() for r in runs]) == pytest.approx(0.78, abs=0.04)
