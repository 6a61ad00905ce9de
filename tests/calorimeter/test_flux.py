"""Choked flow: contract, limits and directions (values: verification_throttle.py)."""

import numpy as np
import pytest

from engine.calorimeter import critical_flow, critical_mass_flux, flux_at
from engine.calorimeter.flux import P_LEAST
from engine.steam import P_SAT_MAX, P_TRIPLE, InputError, saturated


def test_scalars_arrays_shapes_and_empty():
    one = critical_flow(10e5, 0.98)
    assert type(one.mass_flux) is float and type(one.pressure_ratio) is float
    assert critical_mass_flux(10e5, 0.98) == one.mass_flux
    p, x = np.array([[2e5], [10e5], [40e5]]), np.array([0.9, 0.98])
    p.setflags(write=False)
    many = critical_flow(p, x)
    assert many.mass_flux.shape == many.pressure_ratio.shape == (3, 2)
    for i in range(3):
        for k in range(2):
            assert critical_flow(float(p[i, 0]), float(x[k])) == pytest.approx(
                (many.mass_flux[i, k], many.pressure_ratio[i, k]), rel=1e-9)
    assert critical_flow([], 1.0).mass_flux.shape == (0,)
    assert critical_flow(np.full(9000, 1e6), 1.0).mass_flux == pytest.approx(np.full(9000, 1444.0), rel=1e-3)


def test_refusals():
    with pytest.raises(InputError) as caught:
        critical_flow(np.nan, -0.1)
    assert str(caught.value) == (
        "line pressure: got nan Pa, needs 611.657 Pa to 16.529 MPa absolute\n"
        "  - the saturation properties used here end there\n  - check the unit, and gauge or absolute\n"
        "quality: got -0.1, needs 0 to 1\n"
        "  - it is the share of vapour in the mass\n  - give a fraction, not a percentage")
    with pytest.raises(InputError) as caught:
        critical_flow([1e6, 800.0], 1.0)
    assert str(caught.value) == (
        "line pressure at position 1: got 800 Pa, needs at least 1100 Pa\n"
        "  - the throat would be below the triple pressure, where ice forms\n"
        "  - check the unit, and that the pressure was meant absolute")


def test_the_throat_is_never_below_the_triple_pressure():
    flow = critical_flow(np.linspace(P_LEAST, 3e3, 50)[:, None], np.array([0.2, 0.6, 1.0]))
    assert (flow.pressure_ratio * np.linspace(P_LEAST, 3e3, 50)[:, None] > P_TRIPLE).all()
    assert (np.diff(flow.mass_flux, axis=0) > 0).all()  # no kink where the throat comes near it


def test_directions():
    p = np.geomspace(P_LEAST, P_SAT_MAX, 200)[:, None]
    x = np.linspace(0.0, 1.0, 21)
    flow = critical_flow(p, x)
    assert (np.diff(flow.mass_flux, axis=0) > 0).all()  # more with pressure
    assert (np.diff(flow.mass_flux[:, 4:], axis=1) < 0).all()  # less with quality: vapour takes room
    assert ((flow.pressure_ratio > 0.5) & (flow.pressure_ratio < 1)).all()
    assert (np.diff(flow.pressure_ratio[:, 4:], axis=1) < 1e-3).all()


def test_the_flux_is_the_greatest_along_the_isentrope():
    """The vertex of the last parabola is within 1e-8 of it."""
    flow = critical_flow(10e5, 0.95)
    around = flux_at(10e5, 0.95, 10e5 * flow.pressure_ratio * np.array([0.99, 0.999, 1.0, 1.001, 1.01]))
    assert around[2] == pytest.approx(flow.mass_flux, rel=1e-8)
    assert around.max() <= flow.mass_flux * (1 + 1e-8)
    assert (around[[0, 4]] < flow.mass_flux).all()


def test_nearly_all_liquid_chokes_where_it_starts_to_boil():
    """Saturated water flashes almost at once: the throat is near the line pressure, more so when cold."""
    ratio = critical_flow(np.array([2e3, 1e5, 50e5]), 0.0).pressure_ratio
    assert (np.diff(ratio) < 0).all() and ratio[0] > 0.9
    sat = saturated(50e5)
    assert critical_mass_flux(50e5, 0.0) < np.sqrt(2 * 50e5 * (1 - ratio[2]) / sat.v_f)  # less than all-liquid flow
