"""Condensing steam in whole exchangers: against printed examples, hand ratings and what must always hold."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from iapws import IAPWS97
from scipy.optimize import brentq

from engine.case import Case
from engine.casefile import load_case, parse_case
from engine.findings import judge
from engine.fluids import saturation, saturation_line
from engine.points import points_of
from engine.rating import rate, rate_points
from engine.result import result_json
from engine.solve import solve
from engine.stated import SIDES, CaseError
from engine.uncertainty import doubts, propagate
from tests.cases import CONSTANT_COLD, changed

DOUBLE_PIPE: dict[str, Any] = {
    "format": "countercheck-case",
    "version": 1,
    "inside": {"fluid": "Water", "flow": "2 kg/s", "T_in": "20 degC", "p_in": "9 barg"},
    "outside": {"fluid": {"steam": {"p": "3 barg"}}},
    "exchanger": {
        "type": "double-pipe",
        "inner_pipe": {"od": "48.3 mm", "id": "40.9 mm"},
        "outer_pipe": {"od": "88.9 mm", "id": "77.9 mm"},
        "leg_length": "3 m",
        "legs_in_series": 2,
        "wall_conductivity": "50 W/mK",
    },
}
BUNDLE = {
    "type": "shell-and-tube",
    "tema": "BEM",
    "shell_id": "489 mm",
    "tube_od": "19.05 mm",
    "tube_wall": "2.11 mm",
    "tube_length": "2.44 m",
    "tube_pitch": "25.4 mm",
    "layout_angle": "30 deg",
    "tubes": 188,
    "tube_passes": 2,
    "baffle_cut": "25 %",
    "baffle_spacing": "400 mm",
    "bundle_diameter": "457.2 mm",
    "wall_conductivity": "50 W/mK",
}
SHELL = changed(DOUBLE_PIPE, exchanger=BUNDLE, inside__flow="20 kg/s")
STEAM_INSIDE = changed(
    DOUBLE_PIPE,
    inside={"fluid": {"steam": {"p": "3 barg"}}},
    outside={"fluid": "Water", "flow": "2 kg/s", "T_in": "20 degC", "p_in": "9 barg"},
)


def heater(raw: dict[str, Any] = DOUBLE_PIPE, steam: dict[str, str] | None = None, **changes: Any) -> Case:
    """A case with keys of its steam and others changed."""
    side = "inside" if "steam" in raw["inside"]["fluid"] else "outside"
    keys = {f"{side}__fluid__steam__{name}": value for name, value in (steam or {}).items()}
    return parse_case(changed(raw, **keys, **changes))


def refused(raw: dict[str, Any], **changes: Any) -> dict[str, str]:
    with pytest.raises(CaseError) as error:
        parse_case(changed(raw, **changes))
    return {problem.path: problem.says for problem in error.value.problems}


# --- the saturation line ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("T", [280.0, 330.0, 373.15, 420.0, 500.0])
def test_the_saturation_line_agrees_with_the_industrial_formulation(T):
    line, liquid, vapour = saturation_line(), IAPWS97(T=T, x=0), IAPWS97(T=T, x=1)
    assert float(line.p(T)) == pytest.approx(liquid.P * 1e6, rel=5e-4)
    assert float(line.h_fg(T)) == pytest.approx(1e3 * (vapour.h - liquid.h), rel=5e-4)
    for ours, theirs in ((line.liquid(T), liquid), (line.vapour(T), vapour)):
        assert float(ours.rho) == pytest.approx(theirs.rho, rel=1e-3)
        assert float(ours.cp) == pytest.approx(1e3 * theirs.cp, rel=5e-3)
        assert float(ours.mu) == pytest.approx(theirs.mu, rel=5e-3)
        assert float(ours.k) == pytest.approx(theirs.k, rel=0.02)


def test_the_saturation_line_runs_both_ways():
    line = saturation_line()
    T = np.linspace(line.T_low + 0.1, line.T_high - 0.1, 200)
    assert line.T(line.p(T)) == pytest.approx(T, abs=1e-4)
    assert float(line.T(4e5)) == pytest.approx(saturation(4e5).T_sat, abs=1e-5)


# --- printed examples -------------------------------------------------------------------------------------------------


def with_U(raw: dict[str, Any], U: float) -> Any:
    """The fouled state with as much fouling as gives the printed U."""

    def off(R: float) -> float:
        return rate(parse_case(changed(raw, inside__R_fouling=f"{R:.12g} m2K/W"))).fouled.U_dirty - U

    R = brentq(off, 1e-6, 5e-3, rtol=1e-6)
    return rate(parse_case(changed(raw, inside__R_fouling=f"{R:.12g} m2K/W"))).fouled


def of_water(cp: float) -> dict[str, Any]:
    """Water with the specific heat of a printed example."""
    return changed(CONSTANT_COLD, constant__cp=f"{cp} J/kgK")


def test_water_heated_by_atmospheric_steam_in_a_double_pipe():
    """Theodore, L., Heat Transfer Applications for the Practicing Engineer (2011), Ill. Ex. 15.14 to 15.16: water of
    0.06333 kg/s from 25 to 73 °C by steam of 100 °C with U 2220 W/m²K on 1.49 m of a radius of 13 mm; Q 12 700 W,
    effectiveness 0.64, NTU 1.02. Here the heat passes the outer surface of that radius."""
    state = with_U(
        changed(
            DOUBLE_PIPE,
            inside={"fluid": of_water(4174), "flow": "0.0633333 kg/s", "T_in": "25 degC", "p_in": "4 barg"},
            outside__fluid__steam__p="101.42 kPa a",  # 100 °C
            exchanger__inner_pipe={"od": "26 mm", "id": "25 mm"},
            exchanger__leg_length="1.49 m",
            exchanger__legs_in_series=1,
            exchanger__film_factor={"inside": "10", "outside": "10"},
        ),
        2220.0,
    )
    assert state.T_out["inside"] - 273.15 == pytest.approx(73.0, abs=0.1)
    assert state.duty == pytest.approx(12700.0, rel=0.003)
    assert state.effectiveness == pytest.approx(0.64, rel=0.002)
    assert pytest.approx(1.02, rel=0.005) == state.NTU


def test_a_steam_condenser_by_its_mean_temperature_difference():
    """Çengel, Y. A., Heat Transfer, 2nd ed., Ex. 11-3: steam condenses at 30 °C on 45 m² with U 2100 W/m²K and heats
    water from 14 to 22 °C: 1087 kW, 32.5 kg/s of water, 0.45 kg/s of steam. The source rounds the mean difference of
    11.54 K to 11.5 K, and its flow with it."""
    tubes = 250
    state = with_U(
        changed(
            SHELL,
            inside={"fluid": of_water(4184), "flow": "32.585 kg/s", "T_in": "14 degC", "p_in": "4 barg"},
            outside__fluid__steam__p="4.247 kPa a",  # 30 °C
            exchanger__tubes=tubes,
            exchanger__tube_length=f"{45.0 / (tubes * np.pi * 0.01905):.9g} m",
            exchanger__shell_id="600 mm",
            exchanger__bundle_diameter="560 mm",
        ),
        2100.0,
    )
    assert state.T_out["inside"] - 273.15 == pytest.approx(22.0, abs=0.03)
    assert state.duty == pytest.approx(1.087e6, rel=0.006)
    assert state.sides["outside"].flow == pytest.approx(0.45, rel=0.006)
    assert state.effectiveness == pytest.approx(0.5, rel=0.003)


def test_the_u_that_a_steam_condenser_needs():
    """Lienhard, J. H., A Heat Transfer Textbook, Ex. 3.3: 0.4167 kg/s of steam of 60 °C heat 11.77 kg/s of water from
    20 to 40 °C on 12 m²: U 2838.4 W/m²K with 2358.7 kJ/kg and 4.174 kJ/kgK."""
    tubes = 60
    rating = rate(
        parse_case(
            changed(
                SHELL,
                inside={
                    "fluid": of_water(4174),
                    "flow": "11.7728 kg/s",
                    "T_in": "20 degC",
                    "T_out": "40 degC",
                    "p_in": "4 barg",
                },
                outside__fluid__steam__p="19.946 kPa a",  # 60 °C
                exchanger__tubes=tubes,
                exchanger__tube_length=f"{12.0 / (tubes * np.pi * 0.01905):.9g} m",
                exchanger__shell_id="300 mm",
                exchanger__bundle_diameter="280 mm",
            )
        )
    )
    fouled = rating.fouled
    assert fouled.U_required == pytest.approx(2838.4, rel=3e-4)
    assert fouled.required_duty / fouled.chest.heat == pytest.approx(0.416667, rel=1e-3)


# --- ratings by hand --------------------------------------------------------------------------------------------------


def gnielinski(Re: float, Pr: float, d_over_L: float) -> float:
    xi = (1.8 * np.log10(Re) - 1.5) ** -2
    turbulent = xi / 8 * Re * Pr / (1 + 12.7 * np.sqrt(xi / 8) * (Pr ** (2 / 3) - 1))
    return float(turbulent * (1 + d_over_L ** (2 / 3)))


def by_hand(
    *, od: float, id: float, leg: float, area: float, flow: float, passage: float, rows: float, p: float
) -> dict[str, float]:
    """Steam of p [MPa] outside lying tubes, the constant cold fluid of 20 °C inside: a mean U, ε = 1 - exp(-NTU),
    Nusselt's film at the mean surface with properties of IAPWS-IF97."""
    cold = {"rho": 990.0, "cp": 4100.0, "k": 0.62, "mu": 0.8e-3}
    Pr = cold["mu"] * cold["cp"] / cold["k"]
    Re = flow / passage * id / cold["mu"]
    h_i = gnielinski(Re, Pr, id / leg) * cold["k"] / id
    sat, vapour = IAPWS97(P=p, x=0), IAPWS97(P=p, x=1)
    T_in, h_fg, rho_v = 293.15, 1e3 * (vapour.h - sat.h), vapour.rho
    surface = sat.T - 10.0
    for _ in range(50):
        dT = sat.T - surface
        film = IAPWS97(T=sat.T - dT / 2, x=0)
        group = 9.80665 * film.rho * (film.rho - rho_v) * film.k**3 * (h_fg + 0.68 * 1e3 * film.cp * dT)
        h_o = 0.728 * (group / (film.mu * dT * od)) ** 0.25 * rows ** (-1 / 6)
        U = 1 / (1 / h_o + od * np.log(od / id) / 100.0 + od / id / h_i)
        NTU = U * area / (flow * cold["cp"])
        duty = (1 - np.exp(-NTU)) * flow * cold["cp"] * (sat.T - T_in)
        surface = sat.T - duty / area / h_o
    return {"h_o": h_o, "h_i": h_i, "U": U, "duty": duty, "flow": duty / h_fg}


def test_a_steam_heated_double_pipe_agrees_with_a_hand_rating():
    state = rate(parse_case(changed(DOUBLE_PIPE, inside__fluid=CONSTANT_COLD))).fouled
    od, id = 0.0483, 0.0409
    hand = by_hand(
        od=od, id=id, leg=3.0, area=np.pi * od * 6.0, flow=2.0, passage=np.pi / 4 * id**2, rows=1.0, p=0.401325
    )
    # The wall's correction of the inside film, (Pr/Pr_wall)^0.11, is 1 for constant properties.
    assert state.sides["outside"].h == pytest.approx(hand["h_o"], rel=0.01)
    assert state.sides["inside"].h == pytest.approx(hand["h_i"], rel=0.01)
    assert state.U_dirty == pytest.approx(hand["U"], rel=0.005)
    assert state.duty == pytest.approx(hand["duty"], rel=0.005)
    assert state.sides["outside"].flow == pytest.approx(hand["flow"], rel=0.005)


def test_a_one_two_steam_heater_agrees_with_a_hand_rating():
    state = rate(parse_case(changed(SHELL, inside__fluid=CONSTANT_COLD))).fouled
    od, id = 0.01905, 0.01483
    hand = by_hand(
        od=od,
        id=id,
        leg=2.44,
        area=188 * np.pi * od * 2.44,
        flow=20.0,
        passage=94 * np.pi / 4 * id**2,
        rows=2 / 3 * 457.2 / 25.4,
        p=0.401325,
    )
    assert state.sides["outside"].h == pytest.approx(hand["h_o"], rel=0.01)
    assert state.sides["inside"].h == pytest.approx(hand["h_i"], rel=0.01)
    assert state.U_dirty == pytest.approx(hand["U"], rel=0.005)
    assert state.duty == pytest.approx(hand["duty"], rel=0.01)
    assert state.sides["outside"].flow == pytest.approx(hand["flow"], rel=0.01)
    assert [r.name for r in state.sides["outside"].relations] == ["nusselt_horizontal", "kern_rows"]


def test_a_standing_bundle_takes_the_film_down_its_tubes():
    standing = rate(heater(SHELL, exchanger__orientation="vertical")).fouled.sides["outside"]
    assert standing.h > standing.second_opinions["nusselt_vertical"]
    assert {r.name for r in standing.relations} <= {"nusselt_vertical", "kutateladze_wavy", "labuntsov_turbulent"}
    slow = changed(
        DOUBLE_PIPE,
        inside__fluid=CONSTANT_COLD,
        exchanger__orientation="vertical",
        exchanger__leg_length="0.2 m",
        exchanger__legs_in_series=1,
        inside__T_in="143.5 degC",
        inside__p_in="9 barg",
    )
    side = rate(parse_case(slow)).fouled.sides["outside"]
    assert [r.name for r in side.relations] == ["nusselt_vertical"]


def test_steam_in_the_inner_pipe_takes_the_greater_of_both_films():
    slow = rate(heater(STEAM_INSIDE, outside__flow="0.05 kg/s", exchanger__leg_length="1 m")).fouled.sides["inside"]
    fast = rate(heater(STEAM_INSIDE)).fouled.sides["inside"]
    assert [r.name for r in slow.relations] == ["chato"]
    assert [r.name for r in fast.relations] == ["boyko_kruzhilin"]
    # Boyko and Kruzhilin for complete condensation, IAPWS-IF97 at the mean surface.
    sat, d = IAPWS97(P=0.401325, x=0), 0.0409
    film = IAPWS97(T=(sat.T + np.mean(fast.surface_T)) / 2, x=0)
    Re = 4 * fast.flow / (np.pi * d * film.mu)
    root = np.sqrt(film.rho / IAPWS97(P=0.401325, x=1).rho)
    h = 0.021 * film.k / d * Re**0.8 * film.Liquid.Prandt**0.43 * (1 + root) / 2
    assert fast.h == pytest.approx(h, rel=0.015)
    assert fast.h == pytest.approx(fast.second_opinions["shah_1979"], rel=0.2)


# --- what must always hold --------------------------------------------------------------------------------------------

FOUR = {
    "steam in the annulus": heater(),
    "steam in the inner pipe": heater(STEAM_INSIDE),
    "steam in the shell": heater(SHELL, {"superheat": "20 K", "subcooling": "8 K"}),
    "steam in the tubes": heater(
        changed(STEAM_INSIDE, exchanger=BUNDLE, outside__flow="20 kg/s"), {"superheat": "5 K", "subcooling": "5 K"}
    ),
}


@pytest.mark.parametrize("name", FOUR)
def test_balances(name):
    case = FOUR[name]
    side = case.steam_side
    cold = case.cold
    for state in rate(case).states.values():
        chest, at = state.chest, state.sides[side]
        assert state.converged
        assert chest.flow == at.flow
        assert chest.flow * chest.heat == pytest.approx(state.duty, rel=1e-9)
        h = case.fluid(cold).enthalpy(np.array([state.sides[cold].T_in, state.sides[cold].T_out]))
        assert case.flow(cold) * (h[1] - h[0]) == pytest.approx(state.duty, rel=1e-6)
        assert sum(zone.duty for zone in chest.zones) == pytest.approx(state.duty, rel=1e-9)
        assert sum(zone.area or 0.0 for zone in chest.zones) == pytest.approx(state.area, rel=1e-9)
        assert sum(state.resistances.values()) == pytest.approx(1 / state.U_dirty, rel=1e-12)
        assert state.U_dirty * state.area * state.mtd == pytest.approx(state.duty, rel=1e-12)
        for zone in chest.zones:
            if zone.area is not None and zone.name == "subcooling":
                assert zone.U * zone.area * zone.mtd == pytest.approx(zone.duty, rel=1e-9)
        assert pytest.approx(1.0, abs=0.005) == state.F
        assert at.regime == "condensing"
        assert at.T_out == pytest.approx(chest.T_sat - float(case.stream(side).fluid.steam.subcooling))


@pytest.mark.parametrize("name", FOUR)
def test_heat_of_a_kilogram_is_that_of_the_steam_tables(name):
    case = FOUR[name]
    steam = case.stream(case.steam_side).fluid.steam
    T = IAPWS97(P=0.401325, x=0).T
    vapour = IAPWS97(P=0.401325, T=T + steam.superheat) if steam.superheat else IAPWS97(P=0.401325, x=1)
    liquid = IAPWS97(T=T - float(steam.subcooling), x=0)
    assert rate(case).fouled.chest.heat == pytest.approx(1e3 * (vapour.h - liquid.h), rel=3e-4)


def test_the_three_methods_agree_where_nothing_varies():
    rating = rate(parse_case(changed(DOUBLE_PIPE, inside__fluid=CONSTANT_COLD)))
    march = rating.methods["march"]
    assert march.effectiveness == pytest.approx(1 - np.exp(-march.NTU), rel=1e-4)
    for name in ("effectiveness_ntu", "lmtd"):
        assert rating.methods[name].duty == pytest.approx(march.duty, rel=1e-3)
        assert pytest.approx(1.0, abs=1e-9) == rating.methods[name].F


@pytest.mark.parametrize("letter", ["E", "F", "G", "H", "J", "X"])
def test_no_arrangement_matters_beside_steam(letter):
    """A constant wall holds nearly all of the resistance, so that only the arrangement could tell."""
    keys = {"baffle_cut": None, "baffle_spacing": None} if letter == "X" else {}
    exchanger = changed(BUNDLE, tema=f"B{letter}M", tube_passes=4, wall_conductivity="0.5 W/mK", **keys)
    state = rate(parse_case(changed(SHELL, inside__fluid=CONSTANT_COLD, exchanger=exchanger))).fouled
    assert state.effectiveness == pytest.approx(1 - np.exp(-state.NTU), rel=2e-4)


@given(st.floats(1.2, 20.0), st.floats(1.02, 3.0), st.floats(0.3, 4.0))
@settings(max_examples=10, deadline=None)
def test_duty_and_condensate_rise_with_steam_pressure(p, ratio, flow):
    frame = pd.DataFrame(
        {"outside.fluid.steam.p": [p * 1e5, p * ratio * 1e5], "inside.flow": [flow, flow], "inside.T_in": [288.0] * 2}
    )
    found = rate_points(heater(inside__p_in="60 barg"), frame)
    assert (found["problem"] == "").all()
    assert found["duty"].is_monotonic_increasing
    assert found["condensate"].is_monotonic_increasing
    assert found["inside.T_out"].is_monotonic_increasing


def test_subcooling_takes_area_and_superheat_takes_steam():
    dry = rate(heater()).fouled
    superheated = rate(heater(steam={"superheat": "40 K"})).fouled
    cooled = [rate(heater(steam={"subcooling": f"{x} K"})).fouled for x in (5, 20, 40)]
    assert superheated.duty == pytest.approx(dry.duty, rel=1e-6)
    assert superheated.chest.flow < dry.chest.flow
    shares = [state.chest.zones[-1].area for state in cooled]
    assert shares == sorted(shares)
    assert [dry.duty, *(state.duty for state in cooled)] == sorted(
        [dry.duty, *(state.duty for state in cooled)], reverse=True
    )
    assert cooled[0].duty > 0.98 * dry.duty


def test_heat_that_steam_loses_costs_condensate_and_no_duty():
    tight, lossy = rate(heater()).fouled, rate(heater(exchanger__heat_loss="20 kW")).fouled
    assert lossy.duty == pytest.approx(tight.duty, rel=1e-6)
    assert (lossy.chest.flow - tight.chest.flow) * tight.chest.heat == pytest.approx(20e3, rel=1e-6)


@pytest.mark.parametrize("inlet", ["143.2 degC", "143.72 degC"])
def test_a_cold_side_that_is_nearly_as_hot_is_rated(inlet):
    state = rate(heater(inside__T_in=inlet)).fouled
    assert 0 < state.duty < 2000
    assert np.isfinite(state.sides["outside"].h)
    assert state.sides["inside"].T_out < state.chest.T_sat


def test_a_vanishing_flow_leaves_at_the_condensing_temperature():
    state = rate(heater(inside__flow="0.002 kg/s")).fouled
    assert state.T_out["inside"] == pytest.approx(state.chest.T_sat, abs=0.5)
    air = rate(heater(SHELL, inside__fluid="Air", inside__flow="0.002 kg/s")).fouled
    assert air.T_out["inside"] == pytest.approx(air.chest.T_sat, abs=1e-9)
    assert air.F == 1.0


# --- steam that falls short -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(("raw", "flow"), [(DOUBLE_PIPE, 0.06), (STEAM_INSIDE, 0.06), (SHELL, 1.2)])
def test_the_chest_settles_where_all_the_stated_steam_condenses(raw, flow):
    side = "inside" if raw is STEAM_INSIDE else "outside"
    free, short = rate(heater(raw)).fouled, rate(heater(raw, **{f"{side}__flow": f"{flow} kg/s"})).fouled
    assert short.chest.flow == pytest.approx(flow, rel=1e-6)
    assert short.chest.p < free.chest.p == pytest.approx(401325.0, rel=1e-6)
    assert short.duty < free.duty
    assert short.chest.throttled
    assert not free.chest.throttled
    # A supply at that pressure gives the same duty; inside tubes its film depends a little on how much condenses.
    again = rate(heater(raw, {"p": f"{short.chest.p:.9g} Pa a"})).fouled
    assert again.duty == pytest.approx(short.duty, rel=0.01 if raw is STEAM_INSIDE else 1e-6)


def test_more_steam_than_condenses_changes_nothing():
    assert rate(heater(outside__flow="5 kg/s")).fouled.duty == pytest.approx(rate(heater()).fouled.duty, rel=1e-9)


def test_steam_that_a_valve_lets_down_keeps_its_enthalpy():
    chest = rate(heater(outside__flow="0.06 kg/s")).fouled.chest
    h = IAPWS97(P=0.401325, x=1).h - IAPWS97(T=chest.T_sat, x=0).h
    assert chest.heat == pytest.approx(1e3 * h, rel=3e-4)
    assert chest.T_vapour == pytest.approx(IAPWS97(P=chest.p / 1e6, h=IAPWS97(P=0.401325, x=1).h).T, abs=1.5)


# --- the required duty ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("state", ["clean", "fouled"])
@pytest.mark.parametrize("raw", [DOUBLE_PIPE, STEAM_INSIDE, SHELL])
def test_at_the_pressure_needed_the_required_outlet_is_just_reached(raw, state):
    cold = "outside" if raw is STEAM_INSIDE else "inside"
    raw = changed(raw, **{f"{cold}__R_fouling": "0.0002 m2K/W"})
    asked = changed(raw, **{f"{cold}__T_out": "42 degC"})
    p = rate(parse_case(asked)).states[state].chest.p_required
    again = rate(heater(raw, {"p": f"{p:.9g} Pa a"})).states[state]
    assert again.T_out[cold] == pytest.approx(315.15, abs=0.1 if cold == "outside" else 0.001)


def test_at_the_back_pressure_the_duty_is_the_one_that_stalls():
    case = heater(SHELL, {"back_pressure": "0.5 barg"}, inside__T_out="60 degC")
    chest = rate(case).fouled.chest
    assert rate(heater(SHELL, {"p": "0.5 barg"})).fouled.duty == pytest.approx(chest.stall_duty, rel=1e-6)


def test_the_required_u_is_taken_at_the_steam_as_supplied():
    state = rate(heater(SHELL, inside__T_out="60 degC")).fouled
    T = state.chest.T_sat
    mtd = 40.0 / np.log((T - 293.15) / (T - 333.15))
    assert state.U_required == pytest.approx(state.required_duty / (state.area * mtd), rel=1e-9)
    assert state.margin == pytest.approx(state.U_dirty / state.U_required - 1)


def test_more_duty_than_the_stated_steam_holds_is_impossible():
    rating = rate(heater(SHELL, outside__flow="0.5 kg/s", inside__T_out="60 degC"))
    assert rating.fouled.U_required is None
    assert rating.requirement.startswith("the stated 0.5 kg/s of steam give 10")


@pytest.mark.parametrize("hot", [True, False], ids=["hot outside", "cold outside"])
def test_what_the_outside_stream_loses_counts_in_what_is_required(hot):
    """A case restated with its own outlet requires its own duty, for the outlet of either side."""
    raw = changed(
        DOUBLE_PIPE,
        inside__T_in="20 degC" if hot else "80 degC",
        outside={"fluid": "Water", "flow": "1.5 kg/s", "T_in": "80 degC" if hot else "20 degC", "p_in": "9 barg"},
        exchanger__heat_loss="6 kW",
    )
    state = rate(parse_case(raw)).fouled
    for side in SIDES:
        asked = rate(parse_case(changed(raw, **{f"{side}__T_out": f"{state.T_out[side]:.9g} K"}))).fouled
        assert asked.required_duty == pytest.approx(state.duty, rel=1e-6)
        assert asked.margin == pytest.approx(0.0, abs=0.02)


def test_what_condensate_is_needed_where_the_cold_side_loses_heat():
    raw = changed(STEAM_INSIDE, exchanger__heat_loss="6 kW")
    state = rate(parse_case(raw)).fouled
    asked = rate(parse_case(changed(raw, outside__T_out=f"{state.T_out['outside']:.9g} K"))).fouled
    assert asked.required_duty == pytest.approx(state.duty, rel=1e-6)


# --- many points ------------------------------------------------------------------------------------------------------


def test_points_are_the_ratings_of_their_cases():
    frame = pd.DataFrame(
        {
            "outside.fluid.steam.p": [2e5, 4e5, 4e5, 100.0],
            "outside.flow": [np.nan, 0.05, np.nan, np.nan],
            "inside.T_in": [290.0, 300.0, 420.0, 290.0],
        },
        index=["low", "short", "too warm", "vacuum"],
    )
    found = rate_points(heater(), frame)
    low = rate(heater(steam={"p": "2 bara"}, inside__T_in="290 K")).fouled
    short = rate(heater(steam={"p": "4 bara"}, inside__T_in="300 K", outside__flow="0.05 kg/s")).fouled
    for name, state in (("low", low), ("short", short)):
        assert found.loc[name, "duty"] == pytest.approx(state.duty, rel=1e-6)
        assert found.loc[name, "condensate"] == pytest.approx(state.chest.flow, rel=1e-6)
        assert found.loc[name, "chest_p"] == pytest.approx(state.chest.p, rel=1e-6)
        assert found.loc[name, "problem"] == ""
    assert np.isnan(found.loc["low", "outside.dp"])
    assert "colder than the other fluid enters" in found.loc["too warm", "problem"]
    assert "condenses at no temperature" in found.loc["vacuum", "problem"]
    assert found.loc[["too warm", "vacuum"], "duty"].isna().all()


def test_a_steam_temperature_may_stand_for_its_pressure():
    case = heater(steam={"superheat": "10 K"})
    found = rate_points(case, pd.DataFrame({"outside.T_in": [saturation(2e5).T_sat + 10.0]}))
    assert found["chest_p"].iloc[0] == pytest.approx(2e5, rel=1e-5)
    with pytest.raises(CaseError, match="one of the two decides the other"):
        rate_points(case, pd.DataFrame({"outside.T_in": [400.0], "outside.fluid.steam.p": [2e5]}))
    with pytest.raises(CaseError, match="is not a known column"):
        rate_points(case, pd.DataFrame({"inside.fluid.steam.p": [2e5]}))


def test_more_subcooling_than_the_area_holds_has_no_answer():
    rating = rate(heater(STEAM_INSIDE, {"subcooling": "115 K"}))
    assert not rating.states
    assert "would flood over 90 %" in rating.problem


def test_so_little_steam_that_its_condensate_would_freeze_has_no_answer():
    brine = {"solution": "ethylene glycol", "mass_fraction": "35 %"}
    rating = rate(heater(inside__fluid=brine, inside__T_in="-15 degC", outside__flow="0.0005 kg/s"))
    assert not rating.states
    assert "would be below 0.01 °C" in rating.problem


# --- intervals and the result file ------------------------------------------------------------------------------------


def test_the_scatter_of_the_condensing_relations_reaches_the_duty():
    case = heater(SHELL, {"p": "3 barg ± 0.2 bar"})
    rating = rate(case)
    names = {doubt.path for doubt in doubts(case, rating)}
    assert {"outside:nusselt_horizontal", "outside:kern_rows", "outside.T_in"} <= names
    intervals = propagate(case, rating)["fouled"]
    low, high = intervals.of["outside.h"]
    # 10 % and 15 % in quadrature, and up to 4/3 of it: a better film has a smaller difference and so less condensate.
    assert 1.0 < np.log(high / low) / (2 * 1.96) / np.hypot(0.10, 0.15) < 4 / 3
    assert "outside.dp" not in intervals.of
    sd = next(doubt.sd for doubt in doubts(case, rating) if doubt.path == "outside.T_in")
    T = [IAPWS97(P=p, x=0).T for p in (0.401325 - 0.02, 0.401325 + 0.02)]
    assert sd == pytest.approx((T[1] - T[0]) / 2, rel=1e-3)


def test_a_factor_on_a_relation_moves_its_film_only():
    case = heater(STEAM_INSIDE)
    point, _ = points_of(case)
    [(_, base)] = list(solve(case, point))
    for name, moves in (("boyko_kruzhilin", True), ("chato", False)):
        [(_, moved)] = list(solve(case, replace(point, factors={f"inside:{name}": np.array([1.2])})))
        assert (abs(moved.U[0] / base.U[0] - 1) > 1e-3) == moves


def test_the_result_file_tells_steam_without_inventing_numbers():
    rating = rate(heater(SHELL, {"subcooling": "5 K", "superheat": "5 K"}))
    result = json.loads(json.dumps(result_json(rating, {}, ()), allow_nan=False))
    side = result["states"]["fouled"]["outside"]
    assert side["regime"] == "condensing"
    assert [side[name] for name in ("Re", "Pr", "velocity", "dp")] == [None] * 4
    assert side["dp_parts"] == {}
    assert side["flow"] > 0
    assert [zone["name"] for zone in result["states"]["fouled"]["steam"]["zones"]] == [
        "desuperheating",
        "condensing",
        "subcooling",
    ]
    assert result["states"]["fouled"]["profile"]["outside_regime"][0] == "condensing"


# --- what is refused --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changes", "path", "says"),
    [
        ({"outside__T_in": "140 degC"}, "outside.T_in", "is not stated for steam"),
        ({"outside__p_in": "3 barg"}, "outside.p_in", "is not stated for steam"),
        ({"outside__T_out": "100 degC"}, "outside.T_out", "is not stated for steam"),
        ({"outside__flow": "1 m3/h"}, "outside.flow", "allowed for steam is a mass flow"),
        ({"outside__fluid__steam__p": "210 bara"}, "outside.fluid.steam.p", "no pressure at which steam condenses"),
        ({"outside__fluid__steam__p": "0.5 kPa a"}, "outside.fluid.steam.p", "0.0061 to 20"),
        ({"outside__fluid__steam__p": "-1.5 barg"}, "outside.fluid.steam.p", ""),
        ({"outside__fluid__steam__superheat": "-5 K"}, "outside.fluid.steam.superheat", ""),
        ({"outside__fluid__steam__superheat": "80 K"}, "outside.fluid.steam.superheat", "allowed is up to 50 K"),
        ({"outside__fluid__steam__subcooling": "130 K"}, "outside.fluid.steam.subcooling", "colder than the other"),
        (
            {"outside__fluid__steam__vent_T": "150 degC"},
            "outside.fluid.steam.vent_T",
            "hotter than the steam condenses",
        ),
        ({"inside__T_in": "150 degC"}, "outside.fluid.steam.p", "steam must be the hot side"),
        ({"inside__T_out": "145 degC"}, "inside.T_out", "against the second law"),
        ({"inside": {"fluid": {"steam": {"p": "1 barg"}}}}, "outside.fluid", "allowed is steam on one side"),
        (
            {
                "exchanger__fins": {
                    "count": 20,
                    "height": "8 mm",
                    "thickness": "0.9 mm",
                    "conductivity": "50 W/mK",
                }
            },
            "outside.fluid",
            "condensate bridges the fins",
        ),
    ],
)
def test_what_cannot_be_is_refused_with_a_sentence(changes, path, says):
    found = refused(DOUBLE_PIPE, **changes)
    assert path in found
    assert says in found[path]


@pytest.mark.parametrize(
    "raw",
    [
        changed(STEAM_INSIDE, exchanger__orientation="vertical"),
        changed(STEAM_INSIDE, exchanger=changed(BUNDLE, orientation="vertical"), outside__flow="20 kg/s"),
    ],
    ids=["legs in series", "tube passes"],
)
def test_condensate_does_not_rise(raw):
    assert "condensate cannot rise" in refused(raw)["inside.fluid"]


def test_steam_named_as_a_gas_that_would_condense_is_found():
    """A vapour that is not stated as condensing stays a gas, and the finding on its dew point speaks."""
    rating = rate(
        parse_case(
            changed(
                DOUBLE_PIPE,
                outside={"fluid": "steam", "flow": "0.05 kg/s", "T_in": "160 degC", "p_in": "3 barg"},
            )
        )
    )
    assert "condenses" in rating.problem


# --- the sample -------------------------------------------------------------------------------------------------------


def test_the_sample_stalls_clean_and_drains_fouled():
    case = load_case(Path(__file__).parents[1] / "sample_cases" / "steam-heater-that-stalls.json")
    rating = rate(case)
    back = case.p_back("outside")
    assert rating.clean.chest.p_required < back < rating.fouled.chest.p_required < rating.fouled.chest.p_supply
    assert rating.fouled.margin > 0
    intervals = propagate(case, rating)
    verdicts = {verdict.rule.code: verdict for verdict in judge(rating, intervals)}
    (stall,) = verdicts["steam-stall"].findings
    assert stall.grade == "watch"
    assert "(clean)" in stall.says
    names = [contributor.doubt.name for contributor in intervals["fouled"].contributors]
    assert names.index("shell side film (kern rows)") < names.index("tube side flow")
