"""Sample flow through the orifice: from bore, discharge coefficient and line state, or weighed.

The flow is C_d A G. For G the choked flux of wet steam in homogeneous equilibrium comes from
``flux``; where the exhaust pressure is above the critical one, the same model gives the flux at
that pressure. Three old engineering formulas for dry steam stand beside it. They agree within a few
per cent, and steam that has no time to condense in a short orifice passes 3 to 5 % more than
equilibrium says, so the discharge coefficient decides: **a weighed flow overrides all of it**, and
then yields the coefficient.

Sources: Napier, W = p A/70 and W = (p2 A/42) sqrt(3 (p1 - p2)/(2 p2)) from p2 = 0.6 p1 on, lb/s,
psi absolute, in²; Grashof, W = A p^0.97/60; Rateau, W = A p (16.367 - 0.96 log10 p)/1000 (Marks'
Standard Handbook for Mechanical Engineers, from memory); high-pressure factor, API 520 part I (from
memory).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.flux import critical_flow
from engine.calorimeter.rig_inputs import LEAST, admit, require
from engine.calorimeter.wet import wet_steam
from engine.steam import state_ps
from engine.steam.arrays import give_back
from engine.steam.units import to_si

# Discharge coefficients, for want of a weighed flow (common practice)
DISCHARGES = {"sharp edge": 0.60, "square edge, plate as thick as the bore": 0.85, "rounded inlet": 0.97}

_PSI = to_si(1.0, "psi", "pressure")
_LB_PER_S_IN2 = to_si(3600.0, "lb/h", "mass flow") / to_si(1.0, "in²", "area")  # kg/(m² s)
NAPIER = _LB_PER_S_IN2 / _PSI / 70  # 1.457e-3 kg/(m² s Pa)


class OrificeFlow(NamedTuple):
    """A sample flow and what it rests on; the three formulas carry the same discharge coefficient."""

    sample_flow: float  # kg/s: the weighed flow where there is one, else the computed
    computed: float  # kg/s, homogeneous equilibrium with the coefficient given
    napier: float  # kg/s
    grashof: float  # kg/s, only for choked flow
    rateau: float  # kg/s, only for choked flow
    discharge: float  # the coefficient given, or implied by the weighed flow
    choked: bool


def napier_mass_flux(p_line, p_exhaust):
    """Mass flux of dry saturated steam by Napier [kg/(m² s)]: 1.457e-3 p_line, less above 0.6 p_line.

    ``p_line``, ``p_exhaust`` [Pa, absolute]: scalars or arrays that broadcast.

    >>> napier_mass_flux(1e6, 101_325.0)
    1456.7
    """
    (p1, p2), scalar = _pressures(p_line, p_exhaust)
    beyond = 70 / 42 * p2 * np.sqrt(1.5 * (p1 - p2) / p2)
    return give_back(NAPIER * np.where(p2 > 0.6 * p1, beyond, p1), scalar)


def grashof_mass_flux(p_line):
    """Choked mass flux of dry saturated steam by Grashof [kg/(m² s)] at ``p_line`` [Pa, absolute].

    >>> grashof_mass_flux(1e6)
    1463.8
    """
    (p,), scalar = admit(p_line=p_line)
    return give_back(_LB_PER_S_IN2 / 60 * (p / _PSI) ** 0.97, scalar)


def rateau_mass_flux(p_line):
    """Choked mass flux of dry saturated steam by Rateau [kg/(m² s)] at ``p_line`` [Pa, absolute].

    >>> rateau_mass_flux(1e6)
    1457.4
    """
    (p,), scalar = admit(p_line=p_line)
    psi = p / _PSI
    return give_back(_LB_PER_S_IN2 / 1000 * psi * (16.367 - 0.96 * np.log10(psi)), scalar)


def high_pressure_factor(p_line):
    """Factor on Napier's choked flow above 10.339 MPa [1] (API 520): there it passes too little.

    1 below; the standard's own step at the limit is 0.4 %.

    >>> high_pressure_factor(15e6)
    1.041
    """
    (p,), scalar = admit(p_line=p_line)
    kPa = p / 1000
    return give_back(np.where(p > 10.339e6, (0.02764 * kPa - 1000) / (0.03324 * kPa - 1061), 1.0), scalar)


def flux_at(p_line, x, p_throat):
    """Mass flux [kg/(m² s)] of line steam expanded to ``p_throat`` [Pa]: rho sqrt(2 (h - h_throat)).

    Homogeneous equilibrium at constant entropy from rest; largest at the critical throat pressure.

    >>> flux_at(1e6, 1.0, 576_600.0)
    1444.0
    """
    (p, x, p_t), scalar = admit(p_line=p_line, x=x, p_throat=p_throat)
    return give_back(_flux_at(p, x, p_t), scalar)


def orifice_mass_flux(p_line, x, p_exhaust):
    """Ideal mass flux through the orifice [kg/(m² s)] and whether it is choked.

    ``p_line`` [Pa], ``x`` [1], ``p_exhaust`` [Pa]: scalars or arrays that broadcast. Raises
    InputError, also unless p_exhaust is less than p_line.

    >>> orifice_mass_flux(1e6, 0.98, 101_325.0)
    (1457.5, True)
    """
    (p, p2, x), scalar = _pressures(p_line, p_exhaust, x=x)
    critical = critical_flow(p, x)
    choked = p2 <= critical.pressure_ratio * p
    flux = np.where(choked, critical.mass_flux, _flux_at(p, x, p2))
    return give_back(flux, scalar), bool(choked) if scalar else choked


def weighed_flow(mass, duration):
    """Sample flow [kg/s] from the condensate ``mass`` [kg] caught in ``duration`` [s].

    >>> weighed_flow(5.0, 600.0) * 3600
    30.0
    """
    (M, t), scalar = admit(mass=mass, duration=duration)
    require("duration", t, t >= LEAST, "more than 0 s")
    return give_back(M / t, scalar)


def orifice_flow(p_line, x, p_exhaust, bore, discharge, *, weighed=None) -> OrificeFlow:
    """Sample flow of a ``bore`` [m] with a ``discharge`` coefficient, and the old formulas beside it.

    ``weighed`` [kg/s], where given, is the flow, and the coefficient it implies is returned in place
    of the one given. Other arguments as for ``orifice_mass_flux``; scalars or arrays that broadcast.

    >>> flow = orifice_flow(1e6, 0.98, 101_325.0, 0.003, 0.85)
    >>> flow.sample_flow * 3600, flow.napier * 3600
    (31.5, 31.5)
    >>> orifice_flow(1e6, 0.98, 101_325.0, 0.003, 0.85, weighed=30.0 / 3600).discharge
    0.809
    """
    known = {} if weighed is None else {"weighed": weighed}
    (p, p2, x, d, Cd, *flow), scalar = _pressures(p_line, p_exhaust, x=x, bore=bore, discharge=discharge, **known)
    area = np.pi / 4 * d * d
    flux, choked = orifice_mass_flux(p, x, p2)
    computed = Cd * area * flux
    others = [Cd * area * np.asarray(G) for G in (napier_mass_flux(p, p2), grashof_mass_flux(p), rateau_mass_flux(p))]
    adopted, implied = (flow[0], flow[0] / (area * flux)) if flow else (computed, Cd)
    numbers = [give_back(np.array(a, dtype=float), scalar) for a in (adopted, computed, *others, implied)]
    return OrificeFlow(*numbers, choked)


def bore_for_flow(sample_flow, p_line, x, p_exhaust, discharge):
    """Orifice bore [m] for a wanted ``sample_flow`` [kg/s]; other arguments as for ``orifice_flow``.

    >>> bore_for_flow(31.5 / 3600, 1e6, 0.98, 101_325.0, 0.85) * 1000
    3.0
    """
    (p, p2, x, m, Cd), scalar = _pressures(p_line, p_exhaust, x=x, sample_flow=sample_flow, discharge=discharge)
    flux = np.asarray(orifice_mass_flux(p, x, p2)[0])
    return give_back(np.sqrt(4 * m / (np.pi * Cd * flux)), scalar)


def discharge_from_flow(sample_flow, p_line, x, p_exhaust, bore):
    """Discharge coefficient [1] implied by a weighed ``sample_flow`` [kg/s] through a ``bore`` [m].

    A fall from test to test is an orifice clogging; well above 1 the bore, the pressure or the
    weighing is wrong.

    >>> discharge_from_flow(30.0 / 3600, 1e6, 0.98, 101_325.0, 0.003)
    0.809
    """
    (p, p2, x, m, d), scalar = _pressures(p_line, p_exhaust, x=x, sample_flow=sample_flow, bore=bore)
    flux = np.asarray(orifice_mass_flux(p, x, p2)[0])
    return give_back(m / (np.pi / 4 * d * d * flux), scalar)


def _pressures(p_line, p_exhaust, **others):
    """All inputs checked together, the exhaust pressure also against that of the line."""
    arrays, scalar = admit(p_line=p_line, p_exhaust=p_exhaust, **others)
    require("p_exhaust", arrays[1], arrays[1] < arrays[0], "less than the line pressure",
            why="steam flows only towards a lower pressure", hint="check that both are absolute")
    return arrays, scalar


def _flux_at(p, x, p_throat):
    line = wet_steam(p, x)
    throat = state_ps(p_throat, line.s)
    return np.sqrt(np.maximum(2 * (line.h - np.asarray(throat.h)), 0.0)) / np.asarray(throat.v)
