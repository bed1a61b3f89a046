"""Every rule has a case where it fires, one where it stays silent, and one where it is not possible if it can be so.

The cases are simple ones of which one knows beforehand how they must be judged.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import pytest

from engine.casefile import parse_case
from engine.findings import GRADES, Finding, Verdict, catalogue, findings, judge, rule, rules
from engine.rating import rate
from engine.states import Rating
from engine.uncertainty import Intervals, propagate
from tests.cases import OIL_TABLE, changed

WATER: dict[str, Any] = {
    "format": "countercheck-case",
    "version": 1,
    "inside": {"fluid": "Water", "flow": "2 kg/s", "T_in": "20 degC", "p_in": "4 barg"},
    "outside": {"fluid": "Water", "flow": "2 kg/s", "T_in": "50 degC", "p_in": "4 barg"},
    "exchanger": {
        "type": "double-pipe",
        "inner_pipe": {"nps": "2", "schedule": "40"},
        "outer_pipe": {"nps": "3", "schedule": "40"},
        "leg_length": "6 m",
        "legs_in_series": 4,
        "wall_conductivity": "50 W/mK",
    },
}
OIL = {"name": "lube oil", "table": OIL_TABLE}
RESIN = {"name": "resin", "constant": {"rho": "900 kg/m3", "cp": "2 kJ/kgK", "k": "0.1 W/mK", "mu": "1 Pa.s"}}
FLUE_GAS = {"name": "flue gas", "constant": {"rho": "2 kg/m3", "cp": "1 kJ/kgK", "k": "0.03 W/mK", "mu": "0.02 cP"}}
GLYCOL = {"solution": "ethylene glycol", "mass_fraction": "35 %"}
STEAM = {"steam": {"p": "3 barg"}}


@dataclass(frozen=True, kw_only=True)
class Look:
    """A rating to be judged, and the side that matters."""

    rating: Rating
    where: str = ""
    intervals: dict[str, Intervals] = field(default_factory=dict)

    def verdict(self, code: str, system: str = "si") -> Verdict:
        verdicts = [v for v in judge(self.rating, self.intervals, system=system) if v.rule.code == code]
        (verdict,) = (v for v in verdicts if not v.rule.by_side or v.where == self.where)
        return verdict

    def finding(self, code: str, system: str = "si") -> Finding:
        (finding,) = self.verdict(code, system).findings
        return finding


def look(where: str = "", doubt: bool = False, **changes: Any) -> Look:
    """Water against water in two hairpins, with some keys changed."""
    case = parse_case(changed(WATER, **changes))
    rating = rate(case)
    return Look(rating=rating, where=where, intervals=propagate(case, rating) if doubt else {})


def boiling(where: str = "") -> Look:
    """Cold water at atmospheric pressure against water of 150 °C: it boils at the wall, so there is no state."""
    return look(where, inside__T_in="95 degC", inside__p_in="0 barg", outside__T_in="150 degC", outside__p_in="9 barg")


def with_state(at: Look, **figures: Any) -> Look:
    """The same, with figures of the fouled state set by hand."""
    rating = at.rating
    fouled = replace(rating.fouled, **figures)
    return replace(at, rating=replace(rating, states={**rating.states, "fouled": fouled}))


def reversed_in_two_cells() -> Look:
    at = look()
    profile = at.rating.fouled.profile
    assert profile is not None
    T = {side: np.array(values) for side, values in profile.T.items()}
    for side, other in (("inside", "outside"), ("outside", "inside")):
        T[side][3:5] = profile.T[other][3:5]  # type: ignore[index]
    return with_state(at, profile=replace(profile, T=T))


def with_lost_doubt() -> Look:
    at = look(doubt=True)
    lost = replace(at.intervals["fouled"], not_propagated=("annulus flow",))
    return replace(at, intervals={**at.intervals, "fouled": lost})


def heater(**changes: Any) -> Look:
    """2 kg/s of water heated from 20 °C by steam of 3 bar gauge, which condenses at 143.7 °C."""
    steam = {"outside__T_in": None, "outside__p_in": None, "outside__flow": None, "inside__p_in": "6 barg"}
    return look(**{**steam, "outside__fluid": STEAM, **changes})


def steam_with(**keys: str) -> dict[str, Any]:
    return {"outside__fluid": {"steam": {**STEAM["steam"], **keys}}}


def boiling_heater(**changes: Any) -> Look:
    """The water's wall is above the 99.6 °C at which it boils."""
    return heater(inside__T_in="95 degC", inside__p_in="0 barg", **changes)


def oil_inside(where: str = "inside", **changes: Any) -> Look:
    """2 kg/s of oil at 40 °C in a bore of 52.5 mm: Re = 4·2/(π·0.0525·0.0396) = 1220."""
    base: dict[str, Any] = {"inside__fluid": OIL, "inside__flow": "2 kg/s", "inside__T_in": "40 degC"}
    return look(where, **{**base, "outside__T_in": "60 degC", **changes})


def air(where: str = "outside", **changes: Any) -> Look:
    base: dict[str, Any] = {"outside__fluid": "Air", "outside__flow": "0.1 kg/s", "outside__T_in": "80 degC"}
    return look(where, **{**base, **changes})


def bundle(where: str = "", **changes: Any) -> Look:
    """Water against water in one shell with fixed tubesheets and two tube passes."""
    exchanger = {
        "type": "shell-and-tube",
        "tema": "BEM",
        "shell_id": "591 mm",
        "tube_od": "19.05 mm",
        "gauge": "14 BWG",
        "tube_length": "4.88 m",
        "tube_pitch": "25.4 mm",
        "layout_angle": "30 deg",
        "tubes": 300,
        "tube_passes": 2,
        "baffle_cut": "25 %",
        "baffle_spacing": "250 mm",
        "wall_conductivity": "50 W/mK",
    }
    return look(where, **{"exchanger": exchanger, "inside__flow": "20 kg/s", "outside__flow": "20 kg/s", **changes})


STEEL = {"exchanger__wall_conductivity": None, "exchanger__material": "carbon steel"}
NOZZLES = {"exchanger__shell_nozzle_id": "203 mm", "exchanger__tube_nozzle_id": "154 mm"}


def boiling_bundle() -> Look:
    """As `boiling`, in a shell."""
    hot = {"outside__T_in": "150 degC", "outside__p_in": "9 barg"}
    return bundle(inside__T_in="95 degC", inside__p_in="0 barg", **hot, **STEEL, **NOZZLES)


def gas_bundle(**changes: Any) -> Look:
    """Air of 5 bar in the shell, water under more pressure in steel tubes."""
    air = {"outside__fluid": "Air", "outside__T_in": "150 degC", "outside__p_in": "5 barg", "inside__p_in": "9 barg"}
    return bundle(**{**STEEL, **air, "outside__flow": "1 kg/s", **changes})


def long_spans(**changes: Any) -> Look:
    """Four baffles 0.8 m apart in a shell of 0.591 m, four times the flow."""
    baffles = {"exchanger__baffle_spacing": "800 mm", "exchanger__baffles": 4}
    return bundle(**{**STEEL, **baffles, "outside__flow": "80 kg/s", **changes})


def all_stated() -> Look:
    streams = {f"{side}__R_fouling": "0 m2K/W" for side in ("inside", "outside")}
    exchanger = {
        "arrangement": "counter",
        "orientation": "horizontal",
        "inner_pipes": 1,
        "banks_in_parallel": {"inside": 1, "outside": 1},
        "inside_roughness": "0.05 mm",
        "outside_roughness": "0.05 mm",
        "bend_length": "0.3 m",
        "heat_loss": "0 kW",
    }
    return look(**streams, **{f"exchanger__{k}": v for k, v in exchanger.items()}, atmosphere="1 bara")


Case = Callable[[], Look]

CASES: dict[str, tuple[Case, Case, Case | None]] = {
    # validity
    "no-answer": (boiling, look, None),
    "not-converged": (lambda: with_state(look(), converged=False, residual=1e-3), look, boiling),
    "outside-published-range": (
        # Pr = 2000 · 1 / 0.1 = 20 000, published up to 1000.
        lambda: look("inside", inside__fluid=RESIN),
        lambda: look("inside"),
        lambda: boiling("inside"),
    ),
    "transitional-flow": (
        # Re = 4 · 0.2 / (π · 0.0525 · 0.001) = 4900
        lambda: look("inside", inside__flow="0.2 kg/s"),
        lambda: look("inside"),
        lambda: boiling("inside"),
    ),
    "mixed-convection": (
        # g β ΔT d / v² with 23 mm/s and at least 1 K: 9.81 · 2.1e-4 · 1 · 0.0525 / 0.023² = 0.2 a kelvin
        lambda: look("inside", inside__flow="0.05 kg/s", outside__T_in="80 degC"),
        oil_inside,  # at 1.07 m/s, 20 K: 9.81 · 7e-4 · 20 · 0.0525 / 1.07² = 0.006
        lambda: look("inside", inside__fluid=RESIN),
    ),
    "near-uniform-flux": (lambda: oil_inside(outside__flow="0.95 kg/s"), oil_inside, boiling),
    "gas-wall-factor": (air, lambda: look("outside"), lambda: air(outside__flow="2 kg/s")),
    "methods-disagree": (
        # Heated oil passes from laminar into transitional flow.
        lambda: oil_inside(outside__T_in="90 degC", exchanger__legs_in_series=30),
        lambda: look(inside__fluid=FLUE_GAS, inside__flow="0.1 kg/s"),
        lambda: look(exchanger__heat_loss="2 kW"),
    ),
    "table-exceeded": (
        lambda: oil_inside(
            inside__fluid={"name": "oil", "table": OIL_TABLE[1:]}, inside__T_in="45 degC", outside__T_in="20 degC"
        ),
        oil_inside,
        lambda: oil_inside(outside__fluid="Air", outside__flow="2 kg/s"),
    ),
    "property-note": (lambda: look("inside", inside__fluid=RESIN), lambda: look("inside"), None),
    "assumed": (look, all_stated, None),
    "doubt-not-stated": (
        look,
        lambda: look(
            inside__flow="2 kg/s ± 2 %",
            outside__flow="2 kg/s ± 2 %",
            inside__T_in="20 degC ± 0.5 K",
            outside__T_in="50 degC ± 0.5 K",
        ),
        None,
    ),
    "doubt-not-propagated": (with_lost_doubt, lambda: look(doubt=True), look),
    "wide-interval": (
        lambda: look(inside__flow="0.2 kg/s ± 40 %", doubt=True),
        lambda: look(doubt=True),
        look,
    ),
    # thermal
    "required-duty-missed": (
        # 2 kg/s of water from 50 to 22 °C would warm the other 2 kg/s to 48 °C: an effectiveness of 0.93.
        lambda: look(outside__T_out="22 degC"),
        lambda: look(outside__T_out="49.5 degC"),
        look,
    ),
    "requirement-impossible": (
        # 50 to 30 °C of 2 kg/s would warm 0.5 kg/s from 20 to 100 °C.
        lambda: look(outside__T_out="30 degC", inside__flow="0.5 kg/s"),
        lambda: look(outside__T_out="45 degC"),
        look,
    ),
    "stated-outlets-differ": (
        lambda: look(outside__T_out="40 degC", inside__T_out="25 degC"),
        lambda: look(outside__T_out="45 degC", inside__T_out="25 degC"),
        lambda: look(outside__T_out="45 degC"),
    ),
    "large-margin": (
        lambda: look(outside__T_out="49.5 degC"),
        lambda: look(outside__T_out="22 degC"),
        look,
    ),
    "outlet-overshoots": (
        lambda: look("outside", outside__T_out="49.5 degC"),
        lambda: look("outside", outside__T_out="22 degC"),
        lambda: look("outside"),
    ),
    "close-approach": (
        lambda: look(exchanger__legs_in_series=100, outside__flow="1 kg/s"),
        look,
        boiling,
    ),
    "reversed-heat-flow": (reversed_in_two_cells, look, boiling),
    "low-correction-factor": (
        # Both outlets at 40 °C and beyond in one shell with two passes.
        lambda: bundle(inside__flow="20 kg/s"),
        lambda: bundle(inside__flow="200 kg/s"),
        boiling,
    ),
    "near-ceiling": (lambda: look(exchanger__legs_in_series=100, outside__flow="1 kg/s"), look, boiling),
    "fouling-dominates": (
        lambda: look(inside__R_fouling="0.01 m2K/W"),
        lambda: look(inside__R_fouling="0.0001 m2K/W"),
        boiling,
    ),
    "scaling-surface": (
        lambda: look("inside", inside__T_in="65 degC", outside__T_in="90 degC"),
        lambda: look("inside"),
        lambda: boiling("inside"),
    ),
    "wall-limit": (
        # Every surface lies between the inlets, 20 and 50 °C.
        lambda: look("inside", limits__inside_wall_T_max="20 degC"),
        lambda: look("inside", limits__inside_wall_T_max="50 degC", limits__inside_wall_T_min="20 degC"),
        lambda: look("inside"),
    ),
    "near-freezing": (
        lambda: look("inside", inside__T_in="3 degC"),
        lambda: look("inside"),
        oil_inside,
    ),
    "near-boiling": (
        # Water boils at 143.6 °C under 4 bar (steam tables).
        lambda: look("outside", outside__T_in="140 degC", outside__p_in="3 barg"),
        lambda: look("outside"),
        oil_inside,
    ),
    "near-dew-point": (
        # Propane condenses at -5.5 °C under 4 bar.
        lambda: air(
            outside__fluid="n-propane",
            outside__T_in="20 degC",
            outside__p_in="3 barg",
            inside__fluid=GLYCOL,
            inside__T_in="-4 degC",
            inside__flow="4 kg/s",
        ),
        lambda: air(outside__fluid="n-propane", outside__p_in="3 barg"),
        lambda: air(outside__fluid=FLUE_GAS),
    ),
    "over-design-temperature": (
        lambda: look("outside", limits__outside_design_temperature="45 degC"),
        lambda: look("outside", limits__outside_design_temperature="50 degC"),
        lambda: look("outside"),
    ),
    "over-design-pressure": (
        lambda: look("inside", limits__inside_design_pressure="3.9 barg"),
        lambda: look("inside", limits__inside_design_pressure="4 barg"),
        lambda: look("inside"),
    ),
    "below-minimum-metal-temperature": (
        lambda: look(limits__minimum_metal_temperature="50 degC"),
        lambda: look(limits__minimum_metal_temperature="20 degC"),
        look,
    ),
    "cold-metal": (
        lambda: look(limits__minimum_metal_temperature="21 degC"),
        lambda: look(limits__minimum_metal_temperature="20 degC"),
        look,
    ),
    "thermal-shock": (lambda: look(outside__T_in="121 degC"), lambda: look(outside__T_in="119 degC"), None),
    "differential-expansion": (
        # Tubes at 20 °C beside a shell that has had water of nearly 90 °C.
        lambda: bundle(outside__T_in="90 degC", outside__flow="60 kg/s"),
        lambda: bundle(exchanger__tema="AES", outside__T_in="90 degC", outside__flow="60 kg/s"),
        lambda: bundle(inside__T_in="95 degC", inside__p_in="0 barg", outside__T_in="150 degC", outside__p_in="9 barg"),
    ),
    "tube-rupture": (
        lambda: look(
            limits__inside_design_pressure="10 barg",
            limits__outside_design_pressure="40 barg",
            limits__inside_test_pressure="15 barg",
        ),
        lambda: look(
            limits__inside_design_pressure="10 barg",
            limits__outside_design_pressure="14 barg",
            limits__inside_test_pressure="15 barg",
        ),
        lambda: look(limits__inside_design_pressure="10 barg", limits__outside_design_pressure="40 barg"),
    ),
    "blocked-in": (lambda: look(outside__T_in="51 degC"), lambda: look(outside__T_in="49 degC"), None),
    "leak-direction": (oil_inside, look, lambda: oil_inside(inside__p_in="0.01 bara")),
    "hot-surface": (lambda: look(outside__T_in="61 degC"), lambda: look(outside__T_in="59 degC"), None),
    # flow
    "drop-over-allowance": (
        lambda: look("inside", inside__dp_allowed="0.1 kPa"),
        lambda: look("inside", inside__dp_allowed="1000 kPa"),
        lambda: look("inside"),
    ),
    "drop-over-inlet-pressure": (
        # ρ v²/2 · f L/d of the oil, laminar: 862 · 1.07²/2 · 64/1220 · 24/0.0525 = 12 kPa
        lambda: oil_inside(inside__p_in="0.05 bara"),
        oil_inside,
        lambda: boiling("inside"),
    ),
    "gas-drop": (
        # 1 m of friction and ends at 100 m/s: some 25 kPa of 101 kPa
        lambda: air(
            outside__flow="0.2 kg/s", outside__p_in="0 barg", exchanger__leg_length="1 m", exchanger__legs_in_series=2
        ),
        lambda: air(outside__flow="0.02 kg/s"),
        lambda: air(outside__flow="2 kg/s"),
    ),
    "gas-near-sound": (
        # 0.2 kg/s through 21 cm² at 1 kg/m³ or less: 95 m/s or more
        lambda: air(
            outside__flow="0.2 kg/s", outside__p_in="0 barg", exchanger__leg_length="1 m", exchanger__legs_in_series=2
        ),
        lambda: air(outside__flow="0.02 kg/s"),
        lambda: air(outside__flow="2 kg/s"),
    ),
    "over-velocity-limit": (
        # 2 kg/s through a bore of 52.5 mm: 0.93 m/s
        lambda: look("inside", limits__inside_velocity_max="0.9 m/s"),
        lambda: look("inside", limits__inside_velocity_max="1 m/s"),
        lambda: look("inside"),
    ),
    "unusual-velocity": (
        lambda: look("inside"),  # 0.93 m/s of cooling water
        lambda: look("inside", inside__flow="4.3 kg/s"),
        lambda: boiling("inside"),
    ),
    "laminar-flow": (oil_inside, lambda: look("inside"), lambda: boiling("inside")),
    "film-dominates": (oil_inside, lambda: look("inside"), lambda: boiling("inside")),
    "maldistribution": (
        lambda: oil_inside(exchanger__banks_in_parallel={"inside": 2, "outside": 2}),
        oil_inside,
        lambda: boiling("inside"),
    ),
    "heat-loss": (
        lambda: look(exchanger__heat_loss="5 kW"),
        lambda: look(exchanger__heat_loss="0.1 kW"),
        boiling,
    ),
    # shell
    "tube-count": (
        # Ludwig and Kern hold 358 to 398 in two passes: 430 are 8 % more, 460 are 16 % more.
        lambda: bundle(exchanger__tubes=460),
        lambda: bundle(exchanger__tubes=380),
        None,
    ),
    "type-letters": (
        lambda: bundle(exchanger__tema="BEW", exchanger__tube_passes=4),
        lambda: bundle(exchanger__tema="BEP", exchanger__tube_passes=4),
        None,
    ),
    "mechanical-cleaning": (
        lambda: bundle("outside", outside__R_fouling="0.0005 m2K/W"),
        lambda: bundle(
            "outside",
            outside__R_fouling="0.0005 m2K/W",
            exchanger__tema="AES",
            exchanger__layout_angle="90 deg",
        ),
        None,
    ),
    "nozzle-momentum": (
        # 80 kg/s through 324 cm²: 2.5 m/s, ρv² = 6200
        lambda: bundle("outside", outside__flow="80 kg/s", **NOZZLES),
        lambda: bundle("outside", **NOZZLES),
        lambda: bundle("outside"),
    ),
    "bundle-entrance": (
        lambda: bundle(outside__flow="80 kg/s", **NOZZLES),
        lambda: bundle(**NOZZLES),
        bundle,
    ),
    "nozzle-over-spacing": (
        lambda: bundle(exchanger__baffle_spacing="150 mm", exchanger__inlet_spacing="150 mm", **NOZZLES),
        lambda: bundle(**NOZZLES),
        bundle,
    ),
    "erosion-velocity": (
        # 100 kg/s through 150 bores of 14.83 mm: 3.9 m/s
        lambda: bundle(inside__flow="100 kg/s", **STEEL),
        lambda: bundle(**STEEL),
        bundle,
    ),
    "allowance-unused": (
        # 20 kg/s through 150 bores of 14.83 mm: 0.77 m/s of cooling water
        lambda: bundle("inside", inside__R_fouling="0.0002 m2K/W", inside__dp_allowed="100 kPa"),
        lambda: bundle("inside", inside__R_fouling="0.0002 m2K/W", inside__dp_allowed="10 kPa"),
        lambda: bundle("inside", inside__R_fouling="0.0002 m2K/W"),
    ),
    "baffle-spacing": (
        # A fifth of 591 mm is 118 mm.
        lambda: bundle(exchanger__baffle_spacing="110 mm"),
        lambda: bundle(exchanger__baffle_spacing="120 mm"),
        None,
    ),
    "window-velocity": (long_spans, bundle, None),
    "leakage-and-bypass": (lambda: bundle(exchanger__tema="AET"), bundle, boiling_bundle),
    "unsupported-span": (
        # Tubes of 19.05 mm in steel: 1524 mm; two spacings of 800 mm are 1600 mm.
        long_spans,
        lambda: bundle(**STEEL),
        bundle,
    ),
    "temperature-cross": (bundle, lambda: bundle(exchanger__shells_in_series=2), boiling_bundle),
    "near-cliff": (bundle, lambda: bundle(exchanger__tube_length="2.44 m"), boiling_bundle),
    "tube-vibration": (long_spans, lambda: bundle(**STEEL), bundle),
    "vortex-resonance": (
        # 0.66 m/s past 19.05 mm: 0.2 to 0.5 of 35 Hz; spans of 1.6 m swing at 14 Hz.
        long_spans,
        lambda: bundle(**STEEL),
        bundle,
    ),
    "acoustic-resonance": (
        # At 2.5 kg/m³, 3 kg/s and 16 m/s: 0.2 to 0.5 of 830 Hz; half a wave across 0.59 m at 330 m/s: 280 Hz.
        lambda: gas_bundle(outside__flow="3 kg/s"),
        gas_bundle,
        lambda: gas_bundle(outside__flow="8 kg/s"),
    ),
    # steam
    "steam-hammer": (heater, look, None),
    "steam-stall": (
        # 2 kg/s from 20 to 30 °C take 84 kW of the hundreds that steam of 3 bar gauge gives.
        lambda: heater(inside__T_out="30 degC", **steam_with(back_pressure="0.5 barg")),
        look,
        heater,
    ),
    "steam-short": (
        # 0.02 kg/s of steam give some 45 kW: the chest settles far below the atmosphere.
        lambda: heater(outside__flow="0.02 kg/s"),
        lambda: heater(outside__flow="2 kg/s"),
        boiling_heater,
    ),
    "superheat-dry-wall": (
        # Between slow steam and as slow a gas that is nearly as warm the wall stands half-way to the superheat.
        lambda: heater(
            inside__fluid="Air",
            inside__flow="0.02 kg/s",
            inside__T_in="140 degC",
            inside__p_in="1 barg",
            **steam_with(superheat="50 K"),
        ),
        lambda: heater(**steam_with(superheat="50 K")),
        boiling_heater,
    ),
    "flooded-area": (lambda: heater(**steam_with(subcooling="10 K")), heater, boiling_heater),
    "gas-in-steam": (
        lambda: heater(**steam_with(noncondensable="1 %")),
        lambda: heater(**steam_with(vent_T="143.5 degC")),
        heater,
    ),
}
"""Where the rule fires, where it stays silent, where it is not possible (None: it can always be judged)."""


def test_every_rule_has_its_cases():
    assert set(CASES) == {one.code for one in rules()}
    for one in rules():
        assert (CASES[one.code][2] is None) == (one.needs == "nothing"), one.code


@pytest.mark.parametrize("code", CASES)
def test_fires(code):
    verdict = CASES[code][0]().verdict(code)
    assert verdict.outcome == "found"
    for finding in verdict.findings:
        assert finding.code == code
        assert finding.grade in verdict.rule.grades
        assert finding.says.endswith(".")
        assert finding.do.endswith(".")
        assert finding.source
        assert finding.grade == "note" or any(
            c.isdigit() for text in (finding.says, *finding.because.values()) for c in text
        )
        assert "nan" not in finding.says.lower().split()


@pytest.mark.parametrize("code", CASES)
def test_stays_silent(code):
    verdict = CASES[code][1]().verdict(code)
    assert (verdict.outcome, verdict.findings, verdict.missing) == ("clear", (), "")


@pytest.mark.parametrize("code", [code for code, (_, _, missing) in CASES.items() if missing])
def test_says_what_is_missing(code):
    at = CASES[code][2]
    assert at is not None
    verdict = at().verdict(code)
    assert (verdict.outcome, verdict.findings) == ("not possible", ())
    assert verdict.missing


# --- the register and the verdicts ------------------------------------------------------------------------------------


def test_the_catalogue_tells_every_rule():
    rows = catalogue()
    assert len({row["code"] for row in rows}) == len(rows) == len(rules())
    for row in rows:
        assert all(row[key] for key in ("code", "title", "grades", "needs", "source"))
        assert len(row["code"]) <= 32
        assert row["code"] == row["code"].lower().replace(" ", "-")
        assert set(row["grades"].split(", ")) <= set(GRADES)


def test_two_rules_cannot_share_a_code():
    with pytest.raises(ValueError, match="two rules are called no-answer"):
        rule("no-answer", title="", grades=("note",), needs="", source="")(lambda s: iter(()))


def test_a_rule_about_sides_is_judged_for_each():
    verdicts = judge(look().rating)
    for one in rules():
        places = [v.where for v in verdicts if v.rule is one]
        assert places == (["inside", "outside"] if one.by_side else [""])


def test_the_gravest_finding_comes_first():
    at = look(doubt=True, outside__T_out="22 degC", limits__inside_design_pressure="3 barg")
    grades = [list(GRADES).index(finding.grade) for finding in findings(judge(at.rating, at.intervals))]
    assert grades == sorted(grades)
    assert {0, 1, 3} <= set(grades)


def test_a_case_without_answer_has_one_stop_and_names_its_reason():
    at = boiling()
    verdicts = judge(at.rating)
    (stop,) = (finding for finding in findings(verdicts) if finding.grade == "stop")
    assert at.rating.problem in stop.says
    assert stop.where == "inside"
    for verdict in verdicts:
        if "a rated case" in verdict.rule.needs and verdict.outcome != "clear":
            assert verdict.outcome == "not possible"


@pytest.mark.parametrize("code", [code for code in CASES if code not in ("doubt-not-stated", "unusual-velocity")])
def test_figures_follow_the_system_of_units(code):
    for finding in CASES[code][0]().verdict(code, "us").findings:
        text = " ".join((finding.says, *finding.because.values()))
        for unit in ("°C", " K", " kPa", " bar", " kW", " m/s", " kg/h", " W/m²K", " mm"):
            assert unit not in text.replace(" kg/h·", "") or finding.code == "no-answer"


# --- what single findings say -----------------------------------------------------------------------------------------


def figure(text: str) -> float:
    return float(text.split()[0])


def test_the_shortfall_is_that_of_the_outlet():
    at = look(outside__T_out="22 degC")
    finding = at.finding("required-duty-missed")
    C = 2.0 * 4.18  # kW/K of water
    short = figure(finding.because["fouled, outlet of the annulus short by"])
    assert short == pytest.approx(at.rating.fouled.T_out["outside"] - 295.15, abs=0.05)
    assert figure(finding.because["fouled, duty short by"]) == pytest.approx(C * short, rel=0.005)
    assert figure(finding.because["required duty"]) == pytest.approx(C * 28.0, rel=0.005)
    assert "Cleaning alone does not" in finding.do


def test_a_duty_that_only_dirt_prevents_is_said_to_come_back():
    fouled = {"inside__R_fouling": "0.0005 m2K/W"}
    states = look(**fouled).rating.states
    between = (states["clean"].T_out["outside"] + states["fouled"].T_out["outside"]) / 2 - 273.15
    finding = look(outside__T_out=f"{between:.3f} degC", **fouled).finding("required-duty-missed")
    assert finding.says.startswith("Fouled, the exchanger gives")
    assert finding.do.startswith("Cleaning restores the duty")


@pytest.mark.parametrize(("share", "grade"), [(0.5, "act"), (0.97, "act"), (1.03, "watch"), (1.5, None)])
def test_an_allowance_inside_the_interval_of_the_drop_is_said_so(share, grade):
    # The drop in a tube carries 7 % standard deviation, hence some ± 14 % at 95 %.
    dp = look().rating.fouled.sides["inside"].dp
    at = look("inside", doubt=True, inside__dp_allowed=f"{share * dp:.6g} Pa")
    found = at.verdict("drop-over-allowance").findings
    assert [finding.grade for finding in found] == ([grade] if grade else [])
    if found:
        assert ("interval reaches from one side" in found[0].says) == (abs(share - 1) < 0.1)


def test_outlets_that_do_not_balance_name_the_flow_that_would():
    # 2 kg/s by 10 K against 2 kg/s by 5 K: twice the flow.
    finding = look(outside__T_out="40 degC", inside__T_out="25 degC").finding("stated-outlets-differ")
    assert figure(finding.because["flow of the inner pipe that would balance"]) == pytest.approx(4 * 3600, rel=0.01)


@pytest.mark.parametrize(("hot", "loss", "fires"), [("50 degC", "41.8 kW", False), ("50 degC", "0 kW", True)])
def test_a_stated_loss_belongs_to_the_balance(hot, loss, fires):
    # The hot outside stream gives 2 · 4.18 · 10 = 83.6 kW, of which the loss never reaches the inside.
    at = look(outside__T_in=hot, outside__T_out="40 degC", inside__T_out="25 degC", exchanger__heat_loss=loss)
    assert (at.verdict("stated-outlets-differ").outcome == "found") == fires


def test_crossing_outlets_in_co_current_flow_are_impossible():
    at = look(exchanger__arrangement="co-current", outside__T_out="30 degC", inside__T_out="40 degC")
    assert at.verdict("requirement-impossible").outcome == "found"


def test_buoyancy_of_an_ideal_gas():
    flow, d, p = 1e-3, 0.05248, 501325.0
    at = look(
        "inside", inside__fluid="Air", inside__flow="0.001 kg/s", outside__T_in="150 degC", outside__p_in="9 barg"
    )
    profile = at.rating.fouled.profile
    T, T_wall = profile.T["inside"], profile.surface_T["inside"]
    v = flow * 287.05 * T / (p * np.pi / 4 * d**2)
    richardson = np.max(9.80665 * (T_wall - T) / T * d / v**2)  # β = 1/T
    given = figure(at.finding("mixed-convection").because["Gr/Re²"].replace(",", ""))
    assert given == pytest.approx(richardson, rel=0.06)  # two digits shown


def test_the_speed_of_sound_is_that_of_an_ideal_gas():
    at = CASES["gas-near-sound"][0]()
    T_out = at.rating.fouled.T_out["outside"]
    sound = figure(at.finding("gas-near-sound").because["speed of sound"])
    assert sound == pytest.approx(np.sqrt(1.4 * 287.05 * T_out), rel=0.01)


def test_a_table_left_by_the_wall_says_which_row_to_add():
    short = {"name": "oil", "table": OIL_TABLE[1:]}  # from 40 °C on
    near = oil_inside(inside__fluid=short, inside__T_in="45 degC", outside__T_in="35 degC")
    far = oil_inside(inside__fluid=short, inside__T_in="45 degC", outside__T_in="20 degC")
    assert near.finding("table-exceeded").grade == "watch"
    finding = far.finding("table-exceeded")
    assert finding.grade == "act"
    assert "takes the properties at 30.0 °C" in finding.says
    coldest = far.rating.fouled.profile.surface_T["inside"].min() - 273.15
    assert figure(finding.do.removeprefix("Add a row at ")) == pytest.approx(coldest, abs=1.0)


def test_every_default_that_matters_is_told_once_and_no_stated_figure():
    told = [finding.where for finding in look().verdict("assumed").findings]
    assert told == sorted(set(told), key=told.index)
    assert {"atmosphere", "inside.R_fouling", "exchanger.arrangement", "exchanger.banks_in_parallel.inside"} <= set(
        told
    )
    absolute = look(inside__p_in="5 bara", outside__p_in="5 bara", inside__R_fouling="0 m2K/W")
    left = {finding.where for finding in absolute.verdict("assumed").findings}
    assert set(told) - left == {"atmosphere", "inside.R_fouling"}


def test_a_default_that_decides_nothing_is_not_told():
    def told(at: Look) -> set[str]:
        return {finding.where.removeprefix("exchanger.") for finding in at.verdict("assumed").findings}

    straight, single = told(bundle()), told(bundle(exchanger__tube_passes=1))
    others = {"u_bend_length", "u_bend_area", "long_baffle_leakage", "shell_inlets", "pass_lane_width", "orientation"}
    assert not others & (straight | single)
    assert "pass_lanes" in straight - single
    assert {"u_bend_length", "u_bend_area"} <= told(bundle(exchanger__tema="BEU"))
    assert "long_baffle_leakage" in told(bundle(exchanger__tema="BFM"))
    assert "orientation" in told(heater())


def test_gauge_and_absolute_limits_are_compared_as_one():
    # 15 barg is 16.013 bara.
    limits = {"limits__inside_design_pressure": "10 barg", "limits__inside_test_pressure": "15 barg"}
    assert look(**limits, limits__outside_design_pressure="16 bara").verdict("tube-rupture").outcome == "clear"
    assert look(**limits, limits__outside_design_pressure="16.1 bara").verdict("tube-rupture").outcome == "found"


def test_a_leak_runs_from_the_higher_pressure():
    assert "from the annulus into the inner pipe: water into lube oil" in (
        oil_inside(inside__p_in="1 barg").finding("leak-direction").says
    )
    assert "either way" in oil_inside(inside__p_in="4.001 barg").finding("leak-direction").says


def test_a_limit_left_names_span_limit_share_and_source():
    finding = look("inside", inside__fluid=RESIN).verdict("outside-published-range").findings[0]
    assert finding.because == {"Pr": "20000", "published": "0.1 to 1000", "share of the cells": "100 %"}
    assert finding.grade == "act"
    assert "VDI Heat Atlas" in finding.source
