"""Fluids: published values, agreement with CoolProp between nodes, refusals in words, tables, threads, speed."""

from __future__ import annotations

import math
import re
import subprocess
import sys
import time
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from engine import fluids
from engine.fluids import Constant, FluidError, Pure, Solution, Table, TablePoint, fluid_at, offered, saturation
from engine.proofs.fluids import ROWS

K = 273.15
LUBE_OIL = Table(
    "lube oil",
    (
        TablePoint(T=40 + K, rho=862.0, cp=1950.0, k=0.131, mu=39.6e-3),
        TablePoint(T=100 + K, rho=824.0, cp=2190.0, k=0.127, mu=5.6e-3),
    ),
)
THREE_POINTS = Table(
    "slurry",
    (
        TablePoint(T=400.0, rho=900.0, cp=2400.0, k=0.10, mu=1e-3),
        TablePoint(T=300.0, rho=1000.0, cp=2000.0, k=0.20, mu=1e-2),
        TablePoint(T=350.0, rho=960.0, cp=2100.0, k=0.16, mu=4e-3),
    ),
)


@pytest.mark.parametrize("proof", ROWS, ids=lambda proof: proof.what)
def test_check_value_is_reproduced(proof):
    assert proof.holds(), f"off by {proof.difference():.3g}, allowed {proof.tolerance:g} ({proof.reason})"


NAMED = (
    ("water", "HEOS::Water", 4.2e5, 300.0, 274.0, 418.0),
    ("water", "HEOS::Water", 4.2e5, 450.0, 419.0, 900.0),
    ("Water", "HEOS::Water", 150e5, 300.0, 275.0, 610.0),
    ("air", "HEOS::Air", 2e5, 300.0, 240.0, 900.0),
    ("nitrogen", "HEOS::Nitrogen", 10e5, 300.0, 200.0, 700.0),
    ("carbon dioxide", "HEOS::CarbonDioxide", 10e5, 300.0, 240.0, 700.0),
    ("ammonia", "HEOS::Ammonia", 15e5, 280.0, 200.0, 311.0),
    ("R134a", "HEOS::R134a", 10e5, 280.0, 200.0, 312.0),
    ("R134a", "HEOS::R134a", 4e5, 330.0, 290.0, 440.0),
    ("toluene", "HEOS::Toluene", 2e5, 300.0, 200.0, 409.0),
    ("n-hexane", "HEOS::n-Hexane", 3e5, 300.0, 200.0, 380.0),
    ("ethanol", "HEOS::Ethanol", 2e5, 300.0, 200.0, 369.0),
    ("benzene", "HEOS::Benzene", 3e5, 300.0, 280.0, 390.0),
    ("methane", "HEOS::Methane", 30e5, 300.0, 230.0, 600.0),
    ("T66", "INCOMP::T66", 3e5, 300.0, 274.0, 640.0),
    (("ethylene glycol", 0.35), "INCOMP::MEG[0.35]", 3e5, 300.0, 256.0, 372.0),
    (("MPG", 0.5), "INCOMP::MPG[0.5]", 3e5, 300.0, 242.0, 372.0),
    (("calcium chloride", 0.2), "INCOMP::MCA[0.2]", 3e5, 300.0, 256.0, 312.0),
)


@pytest.mark.parametrize(("name", "code", "p", "T_in", "low", "high"), NAMED)
def test_interpolant_agrees_with_coolprop_off_its_nodes(name, code, p, T_in, low, high):
    fluid = fluid_at(Pure(name) if isinstance(name, str) else Solution(*name), p, T_in)
    T = np.random.default_rng(7).uniform(low, high, 60)
    from CoolProp.CoolProp import PropsSI

    ours = fluid.at(T)
    for key, mine in (("D", ours.rho), ("C", ours.cp), ("V", ours.mu), ("L", ours.k)):
        theirs = np.array([PropsSI(key, "T", t, "P", p, code) for t in T])
        np.testing.assert_allclose(mine, theirs, rtol=3e-8, err_msg=key)


def test_every_complete_fluid_on_offer_can_be_used():
    for offer in offered():
        if offer.missing:
            continue
        x = offer.fraction_high
        fluid = fluid_at(Pure(offer.name) if x is None else Solution(offer.name, x), 3e5)
        T = np.linspace(fluid.T_low, fluid.T_high, 50)
        for values in fluid.values(T, "rho", "cp", "mu", "k", "Pr"):
            assert np.isfinite(values).all(), offer.name
            assert (values > 0).all(), offer.name


def test_plain_names_lead_back_to_their_fluid():
    for offer in offered():
        if offer.kind == "solution":
            assert fluids._solution_code(offer.name) == offer.code
        else:
            assert fluids._pure_code(offer.name)[1] == offer.code


@pytest.mark.parametrize(
    ("typed", "plain"),
    [
        ("WATER", "water"),
        ("r134A", "R134a"),
        ("n hexane", "n-hexane"),
        ("Hexane", "n-hexane"),
        ("CO2", "carbon dioxide"),
    ],
)
def test_names_are_read_without_case_spaces_and_hyphens(typed, plain):
    assert fluid_at(Pure(typed), 3e5).name == plain


# Spans and sentences --------------------------------------------------------------------------------------------------


def test_a_liquid_ends_where_it_boils_and_says_so():
    water = fluid_at(Pure("water"), 4.2e5)
    assert water.phase == "liquid"
    assert water.T_high == pytest.approx(saturation(4.2e5).T_sat, rel=1e-12)
    assert water.problem(300.0, "inside fluid") == ""
    assert water.problem(152 + K, "inside fluid") == "inside fluid: water at 152 °C boils at 4.2 bar abs (145 °C)"
    assert water.problem(-3 + K, "outside fluid") == "outside fluid: water at -3 °C freezes (0 °C)"
    assert water.outside(np.array([270.0, 300.0, 430.0, np.nan])).tolist() == [True, False, True, True]
    assert "not a number" in water.problem(math.nan, "inside fluid")


def test_the_inlet_temperature_chooses_the_side_of_saturation():
    steam = fluid_at(Pure("water"), 4.2e5, 152 + K)
    assert steam.phase == "gas"
    assert steam.problem(140 + K, "inside fluid") == "inside fluid: water at 140 °C condenses at 4.2 bar abs (145 °C)"
    assert steam.at(160 + K).rho < 3


def test_solutions_end_at_freezing_and_boiling():
    glycol = fluid_at(Solution("ethylene glycol", 0.35), 0.5e5)
    assert glycol.name == "ethylene glycol 35 % in water"
    assert "freezes" in glycol.problem(250.0, "inside fluid")
    assert "may boil at 0.5 bar abs" in glycol.problem(360.0, "inside fluid")
    assert glycol.saturation_temperature(1e5) == pytest.approx(372.756, abs=1e-3)
    assert "not checked" in fluid_at(Solution("ethanol", 0.3), 3e5).notes[0]


def test_a_thermal_oil_ends_where_it_boils():
    assert "boils at 1 bar abs" in fluid_at(Pure("T66"), 1e5).problem(640.0, "inside fluid")
    assert "model's limit" in fluid_at(Pure("T66"), 20e5).problem(660.0, "inside fluid")
    oil = fluid_at(Pure("T66"), 20e5)
    assert oil.saturation_temperature(1e5) == pytest.approx(fluid_at(Pure("T66"), 1e5).T_high)
    assert oil.saturation_temperature(20e5) is None


def test_above_the_critical_pressure_one_phase_is_used_and_noted():
    water = fluid_at(Pure("water"), 250e5, 500.0)
    assert water.phase == "liquid"
    assert fluid_at(Pure("water"), 250e5, 800.0).phase == "gas"
    assert "above its critical pressure" in water.notes[0]
    from CoolProp.CoolProp import PropsSI

    T = np.linspace(640.0, 680.0, 37)
    theirs = [PropsSI("C", "T", t, "P", 250e5, "Water") for t in T]
    np.testing.assert_allclose(water.at(T).cp, theirs, rtol=3e-6)


@pytest.mark.parametrize(
    ("specification", "p", "says"),
    [
        (Pure("watr"), 1e5, "no fluid is called 'watr': the nearest name is water"),
        (Pure("qqqqqq"), 1e5, "no name is near it"),
        (Pure("ethylene glycol"), 1e5, "offered as a solution in water"),
        (Solution("toluene", 0.2), 1e5, "offered as a pure fluid"),
        (Solution("glycrol", 0.2), 1e5, "the nearest name is glycerol"),
        (Solution("ethylene glycol", 0.75), 1e5, "a mass fraction of 0.75 is outside the 0 to 0.6"),
        (Solution("ethylene glycol", math.nan), 1e5, "a mass fraction of nan is outside"),
        (Pure("acetone"), 1e5, "no viscosity and conductivity for acetone: type a property table"),
        (Pure("ethylene"), 1e5, "type a property table"),
        (Pure("sulfur dioxide"), 1e5, "type a property table"),
        (Pure("cyclohexane"), 1e5, "no conductivity for cyclohexane"),
        (Pure("propylene glycol"), 1e5, "type a property table"),
        (Pure("NaK"), 1e5, "NaK is not offered: its conductivity"),
        (Pure("water"), 0.0, "not above zero"),
        (Pure("water"), math.nan, "not above zero"),
        (Pure("water"), 2e9, "above the property model's limit"),
        (Solution("MEG", 0.2), 500.0, "no liquid state"),
        (Table("oil", LUBE_OIL.rows[:1]), 1e5, "at least two temperatures, 1 given"),
        (Table("oil", (LUBE_OIL.rows[0],) * 2), 1e5, "gives 40.00 °C twice"),
        (Constant(name="oil", rho=800.0, cp=0.0, k=0.1, mu=1e-3), 1e5, "a heat capacity of 0 is not above zero"),
        (Constant(name="oil", rho=800.0, cp=2e3, k=math.inf, mu=1e-3), 1e5, "a conductivity of inf"),
    ],
)
def test_refusal_says_why(specification, p, says):
    with pytest.raises(FluidError, match=re.escape(says)):
        fluid_at(specification, p)


def test_a_blend_between_bubble_and_dew_point_is_refused():
    with pytest.raises(FluidError, match="two-phase"):
        fluid_at(Pure("R407C"), 10e5, 295.0)


def test_no_property_of_a_spike_or_gap_in_the_library_gets_through():
    ammonia = fluid_at(Pure("ammonia"), 2e5, 300.0)
    assert ammonia.at(405.4).k == pytest.approx(0.0381, rel=0.01)
    R22 = fluid_at(Pure("R22"), 2e5, 300.0)
    assert "viscosity and conductivity models" in R22.problem(R22.T_high + 5, "inside fluid")


# Typed tables and constants -------------------------------------------------------------------------------------------


def test_table_follows_its_points_and_its_rule_between_them():
    oil = fluid_at(LUBE_OIL, 1e5)
    at = oil.at(np.array([40 + K, 70 + K, 100 + K]))
    np.testing.assert_allclose(at.rho, [862.0, 843.0, 824.0])
    np.testing.assert_allclose(at.cp, [1950.0, 2070.0, 2190.0])
    np.testing.assert_allclose(at.k, [0.131, 0.129, 0.127])
    share = (1 / 343.15 - 1 / 313.15) / (1 / 373.15 - 1 / 313.15)
    np.testing.assert_allclose(at.mu, [39.6e-3, 39.6e-3 * (5.6 / 39.6) ** share, 5.6e-3])
    assert oil.phase == "liquid"


def test_table_is_sorted_and_integrates_cp_exactly():
    slurry = fluid_at(THREE_POINTS, 1e5)
    np.testing.assert_allclose(slurry.at(325.0).rho, 980.0)
    h = slurry.enthalpy([300.0, 350.0, 375.0, 400.0])
    np.testing.assert_allclose(np.diff(h), [50 * 2050.0, 25 * 2175.0, 25 * 2325.0])


def test_table_goes_ten_kelvin_beyond_and_no_further():
    oil = fluid_at(LUBE_OIL, 1e5)
    assert oil.problem(109 + K, "outside fluid") == ""
    assert oil.extrapolated(np.array([35 + K, 70 + K, 109 + K, 115 + K])).tolist() == [True, False, True, False]
    np.testing.assert_allclose(oil.at(109 + K).rho, 824.0 - 9 * 38 / 60)
    says = "outside fluid: lube oil at 115 °C is more than 10 K above the typed table (110 °C)"
    assert oil.problem(115 + K, "outside fluid") == says
    np.testing.assert_array_equal(oil.at(500.0).rho, oil.at(110 + K).rho)


def test_a_table_that_turns_negative_when_continued_is_refused():
    steep = Table("odd", tuple(TablePoint(T=T, rho=800.0, cp=cp, k=0.1, mu=1e-3) for T, cp in ((300, 1e3), (310, 2e3))))
    with pytest.raises(FluidError, match=r"continued to 16\.9 °C is not above zero"):
        fluid_at(steep, 1e5)


def test_constant_properties_stay():
    oil = fluid_at(Constant(name="oil", rho=850.0, cp=2100.0, k=0.13, mu=0.02), 1e5)
    at = oil.at(np.full((2, 3), 350.0))
    assert at.rho.shape == (2, 3)
    assert at.Pr[1, 2] == pytest.approx(0.02 * 2100 / 0.13)
    assert np.diff(oil.enthalpy([300.0, 310.0]))[0] == pytest.approx(21000.0)
    assert oil.problem(2000.0, "inside fluid") == ""


# Laws -----------------------------------------------------------------------------------------------------------------

GAUSS = np.polynomial.legendre.leggauss(200)
FLUIDS = (Pure("water"), Pure("air"), Pure("n-hexane"), Solution("propylene glycol", 0.3), LUBE_OIL, THREE_POINTS)


@pytest.mark.parametrize("specification", FLUIDS, ids=lambda s: s.name)
@settings(max_examples=30, deadline=None)
@given(a=st.floats(0.02, 0.98), b=st.floats(0.02, 0.98))
def test_enthalpy_is_the_integral_of_cp(specification, a, b):
    fluid = fluid_at(specification, 3e5)
    T1, T2 = (fluid.T_low + s * (fluid.T_high - fluid.T_low) for s in (a, b))
    x, w = GAUSS
    integral = 0.5 * (T2 - T1) * np.sum(w * fluid.at(0.5 * (T1 + T2) + 0.5 * (T2 - T1) * x).cp)
    rise = np.diff(fluid.enthalpy([T1, T2]))[0]
    assert rise == pytest.approx(integral, rel=2e-6, abs=1e-3)
    if abs(T2 - T1) > 1:
        assert fluid.mean_cp(T1, T2) == pytest.approx(rise / (T2 - T1), rel=1e-9)
    assert fluid.mean_cp(T1, T1) == pytest.approx(float(fluid.at(T1).cp))


@pytest.mark.parametrize("specification", FLUIDS, ids=lambda s: s.name)
def test_values_beyond_the_span_are_those_of_its_end_and_enthalpy_goes_on(specification):
    fluid = fluid_at(specification, 3e5)
    np.testing.assert_array_equal(fluid.at(fluid.T_high + 50).mu, fluid.at(fluid.T_high).mu)
    step = np.diff(fluid.enthalpy([fluid.T_high, fluid.T_high + 50]))[0]
    assert step == pytest.approx(50 * float(fluid.at(fluid.T_high).cp), rel=1e-6)


@pytest.mark.parametrize("specification", FLUIDS, ids=lambda s: s.name)
def test_shape_and_order_do_not_matter(specification):
    fluid = fluid_at(specification, 3e5)
    T = np.random.default_rng(1).uniform(fluid.T_low - 5, fluid.T_high + 5, (40, 5, 3))
    whole = fluid.at(T)
    for name in ("rho", "cp", "mu", "k"):
        one_by_one = np.array([float(getattr(fluid.at(t), name)) for t in T[:, 2, 1]])
        np.testing.assert_allclose(getattr(whole, name)[:, 2, 1], one_by_one, rtol=1e-13)
    mu, Pr = fluid.values(T, "mu", "Pr")
    np.testing.assert_allclose(mu, whole.mu, rtol=1e-14)
    np.testing.assert_allclose(Pr, whole.Pr, rtol=1e-12)
    assert fluid.at(300.0).rho.shape == ()
    assert fluid.at([]).rho.shape == (0,)


@pytest.mark.parametrize("specification", FLUIDS, ids=lambda s: s.name)
def test_a_window_changes_nothing_inside_it(specification):
    fluid = fluid_at(specification, 3e5)
    low = fluid.T_low + 0.3 * (min(fluid.T_high, 600.0) - fluid.T_low)
    window = fluid.within(low, low + 40)
    T = np.linspace(low, low + 40, 101)
    for name in ("rho", "cp", "mu", "k", "Pr"):
        np.testing.assert_allclose(window.values(T, name)[0], fluid.values(T, name)[0], rtol=1e-6)
    np.testing.assert_allclose(np.diff(window.enthalpy(T)), np.diff(fluid.enthalpy(T)), rtol=1e-6)
    assert np.diff(window.enthalpy([low + 40, low + 45]))[0] > 0
    assert window.problem(fluid.T_high + 9, "x") == fluid.problem(fluid.T_high + 9, "x")


# Saturation -----------------------------------------------------------------------------------------------------------


def test_steam_gives_up_superheat_latent_heat_and_subcooling():
    steam = saturation(4e5)
    assert steam.heat() == steam.h_fg
    superheat = steam.vapour.mean_cp(steam.T_sat, steam.T_sat + 20) * 20
    subcooling = steam.liquid.mean_cp(steam.T_sat - 15, steam.T_sat) * 15
    assert steam.heat(20.0, 15.0) == pytest.approx(steam.h_fg + superheat + subcooling, rel=1e-12)
    with pytest.raises(FluidError, match="freezes"):
        steam.heat(0.0, 200.0)


@pytest.mark.parametrize(("p", "name", "says"), [(300e5, "water", "no saturation line"), (1e6, "R407C", "blends")])
def test_saturation_is_refused_where_there_is_none(p, name, says):
    with pytest.raises(FluidError, match=says):
        saturation(p, name)


# Threads, import, speed -----------------------------------------------------------------------------------------------


def test_eight_threads_give_the_serial_numbers():
    jobs = [(Pure(name), p) for p in np.linspace(2e5, 9e5, 12) for name in ("water", "R134a", "toluene", "air")]
    T = np.linspace(270.0, 340.0, 20)

    def work(job):
        return np.array(fluid_at(*job, 300.0).values(T, "rho", "cp", "mu", "k"))

    serial = [work(job) for job in jobs]
    fluids._pure.cache_clear()
    fluids._saturation.cache_clear()
    with ThreadPoolExecutor(8) as pool:
        threaded = list(pool.map(work, jobs * 2))
    for a, b in zip(serial * 2, threaded, strict=True):
        np.testing.assert_array_equal(a, b)


def run(code: str) -> str:
    return subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout


def test_importing_the_module_leaves_coolprop_alone():
    assert run("import sys, engine.fluids; print('CoolProp' in sys.modules)") == "False\n"


def test_using_it_writes_nothing_to_standard_output():
    assert run("from engine.fluids import *; fluid_at(Pure('water'), 1e5)") == ""


def test_speed_is_shown(capsys):
    T = np.random.default_rng(0).uniform(300.0, 380.0, 500_000)
    water = fluid_at(Pure("water"), 3e5)
    water.at(T)
    start = time.perf_counter()
    water.at(T)
    per_T = (time.perf_counter() - start) / T.size
    with capsys.disabled():
        print(f"\nfour properties of water: {per_T * 1e9:.0f} ns a temperature")
