"""Does the sample hold the water the line holds? Isokinetic entry, drops that miss, water on the wall.

Steam follows the streamlines into a port; drops do not. A port that draws slower than the line
collects too many drops, one that draws faster too few, and water running on the wall never
reaches a port in the middle. Nothing here can be seen in the exhaust temperature: it is a bias of
the sample itself, and belongs on the sampling line of the uncertainty budget.

Source of the aspiration efficiency: Belyaev & Levin, J. Aerosol Sci. 5 (1974) 325, from memory;
measured for R = 0.17 to 5.6 and Stk = 0.18 to 2.03 in a thin-walled port facing the flow. Outside
it runs to the right limits (small drops: no bias; large drops: R) but is an estimate.
The line is taken as homogeneous, without slip between vapour and drops.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from engine.calorimeter.friction import steam_viscosity
from engine.calorimeter.rig_inputs import admit, require
from engine.calorimeter.wet import wet_steam
from engine.steam import saturated
from engine.steam.arrays import give_back


class SampleBias(NamedTuple):
    """What the port does to the sample; every field has the broadcast shape of the inputs."""

    line_velocity: float  # m/s
    port_velocity: float  # m/s
    velocity_ratio: float  # line over port
    stokes: float
    aspiration: float  # drops caught over drops there
    wetness_read: float  # what a perfect calorimeter would find in the sample
    bias: float  # wetness_read - wetness; negative when the sample is drier than the line


def pipe_area(pipe_bore):
    """Cross-section of a round bore [m²].

    >>> pipe_area(0.150) * 1e6
    17671.
    """
    (D,), scalar = admit(pipe_bore=pipe_bore)
    return give_back(np.pi / 4 * D * D, scalar)


def pipe_velocity(line_flow, pipe_bore, p_line, x):
    """Velocity of wet steam in a pipe [m/s]: flow times specific volume over area.

    ``line_flow`` [kg/s], ``pipe_bore`` [m], ``p_line`` [Pa], ``x`` [1]: scalars or arrays.

    8 t/h in a DN150 pipe at 10 bar:

    >>> pipe_velocity(8000 / 3600, 0.154, 1e6, 0.98)
    22.7
    """
    (m, D, p, x), scalar = admit(line_flow=line_flow, pipe_bore=pipe_bore, p_line=p_line, x=x)
    return give_back(m * np.asarray(wet_steam(p, x).v) / (np.pi / 4 * D * D), scalar)


def isokinetic_port_area(sample_flow, line_flow, pipe_bore):
    """Total port area [m²] at which the sample enters with the velocity of the line.

    A_port = A_pipe x sample flow / line flow; the density cancels.

    >>> isokinetic_port_area(25 / 3600, 8000 / 3600, 0.154) * 1e6
    58.2
    """
    (m, m_line, D), scalar = admit(sample_flow=sample_flow, line_flow=line_flow, pipe_bore=pipe_bore)
    require("sample_flow", m, m < m_line, "less than the line flow", hint="check the units of both flows")
    return give_back(np.pi / 4 * D * D * m / m_line, scalar)


def isokinetic_sample_flow(port_area, line_flow, pipe_bore):
    """Sample flow [kg/s] that makes existing ports [m²] isokinetic; the inverse of the port area.

    >>> isokinetic_sample_flow(58.2e-6, 8000 / 3600, 0.154) * 3600
    25.0
    """
    (A, m_line, D), scalar = admit(port_area=port_area, line_flow=line_flow, pipe_bore=pipe_bore)
    pipe = np.pi / 4 * D * D
    require("port_area", A, pipe > A, "less than the area of the line", hint="areas inside are in square metres")
    return give_back(m_line * A / pipe, scalar)


def stokes_number(drop_diameter, velocity, port_bore, p_line):
    """Stokes number of a drop at a port: rho_f d² U / (18 mu_g D), [1].

    ``drop_diameter`` [m], line ``velocity`` [m/s], ``port_bore`` [m], ``p_line`` [Pa]: scalars or
    arrays. Well below 0.1 drops follow the steam, well above 10 they fly straight.

    >>> import numpy as np
    >>> stokes_number(np.array([1e-6, 5e-6, 10e-6, 50e-6]), 25.0, 0.004, 1e6)
    array([2.06e-02, 5.14e-01, 2.06e+00, 5.14e+01])
    """
    (d, U, D, p), scalar = admit(drop_diameter=drop_diameter, velocity=velocity, port_bore=port_bore, p_line=p_line)
    sat = saturated(p)
    mu = np.asarray(steam_viscosity(1 / np.asarray(sat.v_g), sat.T))
    return give_back(d * d * U / (18 * mu * D * np.asarray(sat.v_f)), scalar)


def aspiration_efficiency(velocity_ratio, stokes):
    """Drops caught over drops in the stream tube of the port (Belyaev & Levin 1974), [1].

    1 + (R - 1)(1 - 1/(1 + k Stk)), k = 2 + 0.617/R, R = line velocity over port velocity.
    1 for equal velocities whatever the drops, 1 for the finest drops, R for the coarsest.

    >>> aspiration_efficiency(2.0, 1e6)
    2.00
    """
    (R, Stk), scalar = admit(velocity_ratio=velocity_ratio, stokes=stokes)
    k = 2 + 0.617 / R
    return give_back(1 + (R - 1) * (1 - 1 / (1 + k * Stk)), scalar)


def wetness_sampled(wetness, aspiration, *, wall_film=0.0):
    """Wetness of the sample for the wetness of the line, [1]: y' A / (1 - y + y' A), y' = y (1 - wall_film).

    ``wall_film``: part of the line's water that runs on the wall and is not sampled.

    >>> wetness_sampled(0.02, 0.5), wetness_sampled(0.02, 1.0, wall_film=0.5)
    (0.0101, 0.0101)
    """
    (y, A, f), scalar = admit(wetness=wetness, aspiration=aspiration, wall_film=wall_film)
    drops = y * (1 - f) * A
    return give_back(drops / (1 - y + drops), scalar)


def wetness_in_line(wetness_read, aspiration, *, wall_film=0.0):
    """Wetness of the line behind the wetness of a sample, [1]; the inverse of ``wetness_sampled``.

    >>> wetness_in_line(0.0101, 0.5)
    0.0200
    """
    (y, A, f), scalar = admit(wetness_read=wetness_read, aspiration=aspiration, wall_film=wall_film)
    caught = A * (1 - f)
    return give_back(y / (caught * (1 - y) + y), scalar)


def sample_bias(wetness, p_line, line_flow, pipe_bore, sample_flow, port_area, port_bore, drop_diameter,
                *, wall_film=0.0) -> SampleBias:
    """Velocities, Stokes number, aspiration and the wetness the sample would show, in one record.

    ``wetness`` of the line [1], ``p_line`` [Pa], flows [kg/s], ``pipe_bore`` and the bore of one
    port [m], total ``port_area`` [m²], ``drop_diameter`` [m]: scalars or arrays that broadcast.
    Raises InputError with every bad input.

    Ports of half the isokinetic speed collect twice the coarse drops:

    >>> area = isokinetic_port_area(25 / 3600, 8000 / 3600, 0.154)
    >>> sample_bias(0.02, 1e6, 8000 / 3600, 0.154, 25 / 3600, 2 * area, 0.004, 50e-6).wetness_read
    0.0390
    """
    (y, p, m_line, D, m, A, D_port, d, f), scalar = admit(
        wetness=wetness, p_line=p_line, line_flow=line_flow, pipe_bore=pipe_bore, sample_flow=sample_flow,
        port_area=port_area, port_bore=port_bore, drop_diameter=drop_diameter, wall_film=wall_film)
    v = np.asarray(wet_steam(p, 1 - y).v)
    line, port = m_line * v / (np.pi / 4 * D * D), m * v / A
    ratio = line / port
    stokes = np.asarray(stokes_number(d, line, D_port, p))
    aspiration = np.asarray(aspiration_efficiency(ratio, stokes))
    read = np.asarray(wetness_sampled(y, aspiration, wall_film=f))
    return SampleBias(*(give_back(a, scalar) for a in (line, port, ratio, stokes, aspiration, read, read - y)))
