"""The case's energy balance over arrays: what a set of readings says about the line, however many there are.

One function serves the mean of a run, every row of a log, the differences of a budget and the draws
of Monte Carlo, so that these can differ by their readings only.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.calorimeter import Status, quality
from engine.job.assessment.terms import check_method, two_flow_conductance
from engine.job.case import Case, Resolved
from engine.job.case.fields_path import BY_CONDUCTANCE, BY_KG, BY_NORMAL, BY_TWO_FLOWS
from engine.steam import if97, saturated
from engine.steam.arrays import in_blocks
from engine.steam.saturation import p_in_range


@dataclass(frozen=True)
class Balance:
    """The parts of the balance that one case fixes; call it with readings to get (x, status).

    x is **not** cut off at 1: where the line comes out superheated it is the enthalpy above that of
    dry saturated steam, as a share of h_fg. A reading near x = 1 keeps its whole distribution by
    that, instead of piling up at the limit; what is above 1 says "superheated" by its status. NaN
    where the exhaust is not superheated, and where an input is missing or out of range.
    """

    method: str
    heat_loss: float
    conductance: float
    T_ambient: float
    line_velocity: float
    exhaust_bore: float

    def __call__(self, p_line, p_exhaust, T_exhaust, *, sample_flow=None, recovery=1.0, loss=1.0, T_normal=None,
                 T_ambient=None) -> tuple[np.ndarray, np.ndarray]:
        """Quality and status for 1-d arrays of readings.

        ``p_line`` at the tapping and ``p_exhaust`` [Pa, absolute], ``T_exhaust`` [K], ``sample_flow``
        [kg/s], ``recovery`` [1], ``loss`` a factor on the heat loss [1], ``T_normal`` [K]; ``T_ambient``
        [K] where it was read with the rest. Single values or arrays of one length.
        """
        q, c2 = self.terms(p_line, p_exhaust, T_exhaust, sample_flow=sample_flow, recovery=recovery, loss=loss,
                           T_normal=T_normal, T_ambient=T_ambient)
        got = quality(p_line, p_exhaust, T_exhaust, heat_loss=q, line_velocity=self.line_velocity,
                      exhaust_velocity=c2, recovery=recovery)
        x, status = got.x, got.status
        hot = status == Status.LINE_SUPERHEATED
        if hot.any():
            sat = saturated(np.broadcast_to(p_line, x.shape)[hot])
            x[hot] = (got.h_line[hot] - sat.h_f) / (sat.h_g - sat.h_f)
        return x, status

    def terms(self, p_line, p_exhaust, T_exhaust, *, sample_flow=None, recovery=1.0, loss=1.0, T_normal=None,
              T_ambient=None):
        """Heat loss per kg [J/kg] and exhaust velocity [m/s] for the same readings."""
        c2 = 0.0
        flow = None if sample_flow is None else np.where(np.asarray(sample_flow) > 0, sample_flow, np.nan)
        if flow is not None and self.exhaust_bore:
            c2 = flow * _exhaust_volume(p_exhaust, T_exhaust) / (0.25 * np.pi * self.exhaust_bore**2)
        return loss * self._heat_loss(p_line, p_exhaust, T_exhaust, flow, recovery, T_normal, T_ambient, c2), c2

    def _heat_loss(self, p_line, p_exhaust, T_exhaust, flow, recovery, T_normal, T_ambient, c2):
        if self.method == BY_KG:
            return self.heat_loss
        if self.method in (BY_CONDUCTANCE, BY_TWO_FLOWS):
            T_ambient = self.T_ambient if T_ambient is None else T_ambient
            return self.conductance * (T_exhaust - T_ambient) / flow
        if self.method == BY_NORMAL:
            # on dry steam the balance must give h_g of the line: what is missing was lost
            h_g, h_normal = _normal_enthalpies(p_line, p_exhaust, T_normal)
            return h_g + 0.5 * self.line_velocity**2 - 0.5 * (1.0 - recovery) * c2 * c2 - h_normal
        return 0.0


def balance_of(case: Case, si: Resolved) -> Balance:
    """The balance of a case. InputError where the chosen heat-loss method lacks an entry."""
    check_method(case)

    def known(name: str) -> float:
        return si[name] or 0.0

    method = case["heat_loss_method"]
    conductance = two_flow_conductance(case, si) if method == BY_TWO_FLOWS else known("conductance")
    return Balance(method, known("heat_loss"), conductance, known("T_ambient"), known("line_velocity"),
                   known("exhaust_bore"))


def _exhaust_volume(p_exhaust, T_exhaust):
    """v [m³/kg] of the exhaust, at saturation where the reading lies below it; NaN out of range."""
    def kernel(p, T):
        safe = np.where(p_in_range(p), p, 1e5)
        T = np.maximum(np.where(np.isfinite(T), T, 400.0), if97.saturation_T(safe))
        return (if97.vapour_hsv(safe, T)[2],)

    return in_blocks(kernel, 1, *np.broadcast_arrays(np.asarray(p_exhaust, float), np.asarray(T_exhaust, float)))[0]


def _normal_enthalpies(p_line, p_exhaust, T_normal):
    """h_g of the line and h of the normal reading [J/kg]."""
    def kernel(p1, p2, T):
        p1, p2 = (np.where(p_in_range(p), p, 1e5) for p in (p1, p2))
        return if97.enthalpy_2(p1, if97.saturation_T(p1)), if97.enthalpy_2(p2, np.maximum(T, if97.saturation_T(p2)))

    arrays = np.broadcast_arrays(*(np.asarray(a, float) for a in (p_line, p_exhaust, T_normal)))
    return in_blocks(kernel, 2, *arrays)
