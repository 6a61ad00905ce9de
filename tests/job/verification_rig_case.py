"""Sizes of effects against IAPWS-95 (CoolProp, an independent formulation) and against handbook corrections."""

from __future__ import annotations

import CoolProp.CoolProp as CP
import pytest

from engine.job.case import BLANK
from engine.job.case.demo import DEMO
from engine.job.case.fields_path import BY_ALTITUDE, BY_KG, NONE
from engine.job.case.fields_rig import MERCURY
from engine.job.case.rows import Entry
from engine.job.rig import assess_rig
from engine.steam.units import to_si

P2 = 101_325.0
# IF97 meets the enthalpies of IAPWS-95 within a few J/kg where pressure and temperature differ as little as they do
# between two reductions of one reading: 10 J/kg are 5e-6 of the quality
SAME = 5e-6


def x_95(p_line, T_exhaust, q=0.0, p_exhaust=P2):
    """Quality by the energy balance with IAPWS-95 properties."""
    h = CP.PropsSI("H", "P", p_exhaust, "T", T_exhaust, "Water") + q
    h_f, h_g = (CP.PropsSI("H", "P", p_line, "Q", Q, "Water") for Q in (0, 1))
    return (h - h_f) / (h_g - h_f)


PLAIN = BLANK.with_(p_line=Entry(10.0, "bar", "absolute"), p_exhaust=Entry(P2, "Pa", "absolute"),
                    T_exhaust=Entry(403.15, "K"), heat_loss_method=NONE)


def size(case, name):
    return next(e.size for e in assess_rig(case).effects if e.name == name)


def test_heat_loss():
    case = PLAIN.with_(heat_loss_method=BY_KG, heat_loss=Entry(5.0, "kJ/kg"))
    assert size(case, "Heat loss") == pytest.approx(x_95(1e6, 403.15) - x_95(1e6, 403.15, 5e3), abs=SAME)


def test_water_leg():
    """One metre of water at 20 °C, 998.2 kg/m³ (IAPWS), adds 9789 Pa to a gauge below the tapping."""
    case = PLAIN.with_(leg_height=Entry(1.0, "m"))
    leg = 998.2 * 9.80665
    assert size(case, "Water leg of the gauge") == pytest.approx(x_95(1e6, 403.15) - x_95(1e6 - leg, 403.15), abs=SAME)


def test_barometer_taken_for_that_at_sea_level():
    """At 2600 m the standard atmosphere has 73.759 kPa (ISO 2533, geometric altitude)."""
    case = PLAIN.with_(p_line=Entry(7.0, "bar", "gauge"), p_exhaust=Entry(1.0, "kPa", "gauge"),
                       p_barometer=Entry(73.759, "kPa", "absolute"))

    def x(p_barometer):
        return x_95(7e5 + p_barometer, 403.15, p_exhaust=1e3 + p_barometer)

    assert size(case, "Barometer") == pytest.approx(x(101_325.0) - x(73_759.0), abs=SAME)
    by_altitude = case.with_(barometer_source=BY_ALTITUDE, altitude=Entry(2600.0, "m"))
    assert size(by_altitude, "Weather") == pytest.approx(abs(x(75_759.0) - x(73_759.0)), abs=SAME)


def test_back_pressure_not_noticed():
    """Left out, it makes the steam read drier: the volume of the steam decides how much a pipe holds back."""
    case = DEMO.with_(heat_loss_method=NONE, line_velocity=None, recovery=Entry(1.0, "1"), leg_height=Entry(0.0, "m"),
                      exhaust_bore=Entry(16.0, "mm"), exhaust_length=Entry(6.0, "m"))
    rig = assess_rig(case)
    p1, T, p = rig.point.si["p_line"], rig.point.si["T_exhaust"], rig.exhaust.value.pipe.value.p_exhaust
    wrong, right = x_95(p1, T, p_exhaust=102_100.0), x_95(p1, T, p_exhaust=p)
    assert p > 110e3 and wrong > right
    assert size(case, "Back pressure of the exhaust") == pytest.approx(wrong - right, abs=SAME)


def test_emergent_stem_of_the_handbook():
    """200 °F of stem at 85 °F, 400 °F read: 5.3 °F with 8.5e-5 per °F ("Steam: Its Generation and Use", 35th ed.
    1919). Mercury in glass has 1.6e-4 per K (NBS Monograph 150), which is 8.9e-5 per °F."""
    case = DEMO.with_(thermometer=MERCURY, T_exhaust=Entry(400.0, "°F"), exposed=Entry(200.0, "°F"),
                      T_stem=Entry(85.0, "°F"))
    error = assess_rig(case).thermometer.stem.value
    assert error * 1.8 == pytest.approx(-5.3 * 8.9 / 8.5, rel=0.01)


def test_line_velocity_and_kinetic_energy():
    """c²/2 over h_fg of 10 bar, 2014.6 kJ/kg (IAPWS-95): 50 m/s are 0.062 %pt."""
    fast = PLAIN.with_(line_velocity=Entry(50.0, "m/s"))
    h_fg = CP.PropsSI("H", "P", 1e6, "Q", 1, "Water") - CP.PropsSI("H", "P", 1e6, "Q", 0, "Water")
    assert size(fast, "Velocity in the line") == pytest.approx(1250.0 / h_fg, abs=SAME)
    assert 100 * size(fast, "Velocity in the line") == pytest.approx(0.062, abs=5e-4)


def test_isokinetic_entry_of_coarse_drops():
    """Ports of half the line's velocity take in twice the coarse drops: 2 % of water reads 3.9 %, and at twice the
    velocity 1.0 % (limits of the aspiration efficiency, Belyaev & Levin 1974, from memory)."""
    planned = DEMO.with_(question="expected", wetness=Entry(2.0, "%"), drop_diameter=Entry(2.0, "mm"))
    wanted = assess_rig(planned).nozzle.value.isokinetic_area.value
    for ratio, reads in ((2.0, 3.92), (0.5, 1.01)):
        bore = (4 * ratio * wanted / 6 / 3.141592653589793) ** 0.5
        error = size(planned.with_(port_bore=Entry(bore, "m")), "Nozzle entry")
        assert 100 * (0.02 - error) == pytest.approx(reads, abs=0.02)


def test_conductance_of_half_a_metre_dry_and_wet():
    """Series of resistances (Incropera & DeWitt, ch. 3), by hand for 0.5 m of DN25 under 25 mm of mineral wool:
    1/(100 pi 0.0272 0.5) = 0.2340, ln(83.7/33.7)/(2 pi k 0.5) = 5.265 dry (k = 0.055) and 0.5791 soaked (k = 0.5),
    1/(10 pi 0.0837 0.5) = 0.7606 K/W."""
    case = DEMO.with_(body_length=Entry(0.5, "m"), sampling_length=None)
    dry = assess_rig(case).geometry.value.whole
    wet = assess_rig(case.with_(lagging_state="wet")).geometry.value.whole
    assert (dry, wet) == pytest.approx((1 / 6.2596, 1 / 1.5737), rel=1e-3)


def test_bare_sampling_line():
    """0.3 m of bare DN15 at 180 °C in still air loses some 35 W: about a third of a %pt at 20 kg/h."""
    case = DEMO.with_(sampling_lagging="bare", sampling_length=Entry(0.3, "m"), sample_flow=Entry(20.0, "kg/h"))
    g = assess_rig(case).geometry.value
    watts = g.sampling * (453.0 - to_si(24.0, "°C", "temperature"))
    assert watts == pytest.approx(35.0, rel=0.15)
    assert 100 * watts / (20 / 3600) / 2.0146e6 == pytest.approx(0.3, abs=0.04)
