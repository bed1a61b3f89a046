"""Group A: flows, heat balance, pressures and properties of each side."""

from __future__ import annotations

import numpy as np

from engine.datasheet import Line, Remark, check, within
from engine.datasheet.figures import (
    FLUID_PROPERTIES,
    Figures,
    Missing,
    changes_phase,
    condensed_heat,
    gas,
    heat,
    mean_T,
    pressure,
    property_of,
    side_heat,
    sides,
    single_phase,
    specific_heat,
)
from engine.sheet import PARTS
from engine.stated import SIDES, Figure, Side

LIQUID_DUTY, GAS_DUTY = 0.02, 0.03
OWN_BALANCE, PHASE_BALANCE = 0.01, 0.05
PHASE_MARGIN = 5.0
ATMOSPHERES = (101325.0, 1e5)
PROPERTY_SHARES = {"rho": 0.02, "cp": 0.03, "k": 0.05, "mu": 0.10}


def _side(where: str) -> Side:
    return "inside" if where.startswith("inside") else "outside"


# --- flows ------------------------------------------------------------------------------------------------------------


def _parts(v: Figures, side: Side, end: str) -> float:
    """Sum of the parts of a side's flow at one end [kg/s]; a part that is not printed is none."""
    stated = [v.get(f"{side}.{part}_{end}") for part in PARTS]
    if all(part is None for part in stated):
        raise Missing(" or ".join(f"{side}.{part}_{end}" for part in PARTS))
    return float(sum(part or 0.0 for part in stated))


@check(
    "A1",
    title="Phases sum to the total flow",
    grade="stop",
    needs="a total flow by mass and the phases at that end",
    source="mass balance; bookkeeping alone, so 0.1 %",
    ask="The phases sum to {recomputed} ({where}), the total flow is printed as {sheet}. Which figure is right?",
    over=("inside.in", "inside.out", "outside.in", "outside.out"),
    share=0.001,
    closes=True,
)
def phases_sum(v: Figures, where: str) -> Line:
    side, _, end = where.partition(".")
    parts = _parts(v, _side(where), end)
    total = v[f"{side}.flow"]
    kind = v.subject.values[f"{side}.flow"]
    if isinstance(kind, Figure) and kind.quantity == "volume_flow":
        raise Missing(f"{side}.flow by mass")
    return Line(sheet=float(total), recomputed=parts, quantity="mass_flow", of=f"{side}.flow")


@check(
    "A2",
    title="What enters a side leaves it",
    grade="stop",
    needs="the phases of a side at both ends",
    source="mass balance; no reaction and no leak, so 0.1 %",
    ask="{sheet} enter the {where} and {recomputed} leave it. Which phase is misprinted?",
    over=SIDES,
    share=0.001,
    closes=True,
)
def mass_balance(v: Figures, where: str) -> Line:
    side = _side(where)
    return Line(sheet=_parts(v, side, "in"), recomputed=_parts(v, side, "out"), quantity="mass_flow", name="flow in")


@check(
    "A7",
    title="Noncondensables stay the same",
    grade="stop",
    needs="the noncondensables at both ends",
    source="mass balance; what does not condense leaves as it entered, so 0.1 %",
    ask="{sheet} of noncondensables enter the {where} and {recomputed} leave it. Where does the rest go?",
    over=SIDES,
    share=0.001,
    closes=True,
)
def noncondensables(v: Figures, where: str) -> Line:
    ends = (float(v[f"{where}.noncondensables_{end}"]) for end in ("in", "out"))
    return Line(sheet=next(ends), recomputed=next(ends), quantity="mass_flow", name="noncondensables in")


# --- heat -------------------------------------------------------------------------------------------------------------

DUTY_ASK = (
    "Flow, specific heat and temperatures of the {where} give {recomputed}, the heat exchanged is printed as {sheet}. "
    "Which figure belongs to this revision?"
)
DUTY_SOURCE = "heat balance; 2 % for a liquid and 3 % for a gas, whose specific heat bends over the range"


def _duty(v: Figures, side: Side) -> Line:
    share = GAS_DUTY if gas(v, side) else LIQUID_DUTY
    return Line(sheet=float(v["duty"]), recomputed=heat(v, side), quantity="heat_flow", of="duty", share=share)


@check(
    "A3",
    title="Duty of the hot side",
    grade="stop",
    needs="duty, and flow, specific heat and both temperatures of the hot side",
    source=DUTY_SOURCE,
    ask=DUTY_ASK.replace("{where}", "hot side"),
    share=LIQUID_DUTY,
    bears="duty",
    closes=True,
)
def duty_hot(v: Figures, _: str) -> Line:
    return _duty(v, sides(v)[0])


@check(
    "A4",
    title="Duty of the cold side",
    grade="stop",
    needs="duty, and flow, specific heat and both temperatures of the cold side",
    source=DUTY_SOURCE,
    ask=DUTY_ASK.replace("{where}", "cold side"),
    share=LIQUID_DUTY,
    bears="duty",
    closes=True,
)
def duty_cold(v: Figures, _: str) -> Line:
    return _duty(v, sides(v)[1])


@check(
    "A5",
    title="Both sides and the printed duty agree",
    grade="stop",
    needs="flow, specific heat and both temperatures of both sides",
    source="heat balance; a sheet is a calculation and closes to 1 % on its own specific heats, 5 % with a change of "
    "phase, and with specific heats of the library by the allowances of both sides",
    ask="Hot side, cold side and heat exchanged spread from {recomputed} to {sheet}. Which outlet, flow or specific "
    "heat was left over from an earlier revision?",
    share=OWN_BALANCE,
    bears="duty",
    closes=True,
)
def balance(v: Figures, _: str) -> Line:
    heats = [side_heat(v, side) for side in sides(v)]
    share = OWN_BALANCE
    if any(changes_phase(v, side) for side in SIDES):
        share = PHASE_BALANCE
    elif not all(specific_heat(v, side)[1] for side in SIDES):
        share = sum(GAS_DUTY if gas(v, side) else LIQUID_DUTY for side in SIDES)
    if "duty" in v:
        heats.append(float(v["duty"]))
    return Line(
        sheet=max(heats), recomputed=min(heats), quantity="heat_flow", name="the largest of the heats", share=share
    )


@check(
    "A6",
    title="Duty of a side that changes its phase",
    grade="stop",
    needs="duty, the vapour or steam that changes, and its latent heat",
    source="heat balance; 5 %, since the latent heat of a mixture is an average",
    ask="The latent and sensible heat of the {where} come to {recomputed}, the heat exchanged is printed as {sheet}. "
    "Which of flow, latent heat and duty is right?",
    over=SIDES,
    share=PHASE_BALANCE,
    bears="duty",
    closes=True,
)
def duty_of_phase_change(v: Figures, where: str) -> Line:
    recomputed = condensed_heat(v, _side(where))
    return Line(sheet=float(v["duty"]), recomputed=recomputed, quantity="heat_flow", of="duty")


# --- pressures --------------------------------------------------------------------------------------------------------


def _outlet_pressure(v: Figures, side: Side) -> Line:
    left = pressure(v, f"{side}.p_in") - float(v[f"{side}.dp"])
    p_out = pressure(v, f"{side}.p_out")
    return Line(sheet=p_out, recomputed=left, quantity="pressure_absolute", of=f"{side}.p_out")


@check(
    "A8",
    title="Outlet pressure is inlet pressure less the drop",
    grade="stop",
    needs="both pressures and the calculated drop of a side",
    source="definition; 1 kPa",
    ask="Inlet pressure less pressure drop is {recomputed} absolute for the {where}, the outlet is printed as {sheet} "
    "absolute. Which is gauge and which absolute, and which figure holds?",
    over=SIDES,
    absolute=1e3,
    closes=True,
)
def outlet_pressure(v: Figures, where: str) -> Line:
    return _outlet_pressure(v, _side(where))


@check(
    "A9",
    title="Gauge and absolute pressures mixed up",
    grade="watch",
    needs="both pressures and the calculated drop of a side",
    source="one atmosphere, 1.013 or 1 bar, is the mark of a gauge pressure read as absolute",
    ask="Are all pressures of this side gauge, or absolute? One seems to be the other.",
    over=SIDES,
)
def gauge_for_absolute(v: Figures, where: str) -> Remark:
    line = _outlet_pressure(v, _side(where))
    if any(abs(abs(line.misfit) - atmosphere) < 0.02 * atmosphere for atmosphere in ATMOSPHERES):
        return Remark(says=f"The pressures of the {v.subject.side_name(where)} miss each other by one atmosphere.")
    return Remark()


# --- properties -------------------------------------------------------------------------------------------------------


@check(
    "A10",
    title="Properties against the library",
    grade="watch",
    needs="a fluid of the property library or a typed table, its temperatures, and the printed property",
    source="scatter of library and data: density 2 %, specific heat 3 %, conductivity 5 %, viscosity 10 %",
    ask="For the {where} the sheet prints {sheet} where the property library has {recomputed} at the mean temperature. "
    "For which fluid, composition and temperature does the printed figure hold?",
    over=tuple(f"{side}.{name}" for side in SIDES for name in FLUID_PROPERTIES),
    closes=True,
)
def against_library(v: Figures, where: str) -> Line:
    side, _, name = where.partition(".")
    printed = property_of(v, _side(where), name)
    T = mean_T(v, _side(where))
    fluid = v.subject.fluid(_side(where))
    if fluid.outside(np.asarray(T)):
        raise Missing(f"{side}.fluid that the library knows at the mean temperature")
    known = float(fluid.values(T, name)[0])
    return Line(
        sheet=printed,
        recomputed=known,
        quantity=FLUID_PROPERTIES[name],
        of=where,
        by="is what the library has",
        share=PROPERTY_SHARES[name],
    )


@check(
    "A11",
    title="Properties change the way they must",
    grade="watch",
    needs="a property at both ends of a side, and both temperatures",
    source="viscosity and density of a liquid fall as it warms, viscosity of a gas rises; density of a gas follows its "
    "pressure and temperature within 5 %",
    ask="Are the columns of inlet and outlet swapped for these properties?",
    over=SIDES,
)
def trends(v: Figures, where: str) -> Remark:
    side = _side(where)
    rise = float(v[f"{side}.T_out"] - v[f"{side}.T_in"])
    is_gas = gas(v, side)
    expected = {"mu": 1 if is_gas else -1} | ({} if is_gas else {"rho": -1})
    seen, wrong = False, []
    for name, sign in expected.items():
        if f"{side}.{name}_in" in v and f"{side}.{name}_out" in v:
            seen = True
            ends = [float(v[f"{side}.{name}_{end}"]) for end in ("in", "out")]
            # Water is densest at 4 °C; a thousandth is no trend.
            if (ends[1] - ends[0]) * rise * sign < 0 and abs(ends[1] / ends[0] - 1) > 1e-3:
                wrong.append(v.subject.label(f"{side}.{name}_in").partition(",")[0])
    if not seen and not is_gas:
        raise Missing(" or ".join(f"{side}.{name}_in and {side}.{name}_out" for name in expected))
    if is_gas:
        wrong += _gas_density(v, side, needed=not seen)
    if wrong:
        return Remark(says=f"Of the {v.subject.side_name(side)}, {' and '.join(wrong)} changes the wrong way.")
    return Remark()


def _gas_density(v: Figures, side: Side, needed: bool) -> list[str]:
    """Density at inlet and outlet against p M/(Z R T) with a common Z."""
    paths = [f"{side}.{name}" for name in ("rho_in", "rho_out", "p_in", "p_out")]
    lacking = [path for path in paths if path not in v]
    if lacking:
        if needed:
            raise Missing(" and ".join(lacking))
        return []
    T = [float(v[f"{side}.T_{end}"]) for end in ("in", "out")]
    p = [pressure(v, f"{side}.p_{end}") for end in ("in", "out")]
    rho = [float(v[f"{side}.rho_{end}"]) for end in ("in", "out")]
    apart = (rho[1] / rho[0]) / (p[1] / p[0] * T[0] / T[1]) - 1
    return ["density, for its pressure and temperature,"] if abs(apart) > 0.05 else []


PRANDTL = {"gas": (0.65, 1.1), "water": (1.0, 13.5), "liquid": (1.5, 1e5)}
WATERS = ("water", "steam")


@check(
    "A12",
    title="Prandtl number",
    grade="watch",
    needs="specific heat, viscosity and conductivity of a side",
    source="gases 0.65 to 1.1, water 1 to 13.5 between freezing and 180 °C, other liquids from 1.5 up "
    "(common practice)",
    ask="Specific heat, viscosity and conductivity of the {where} give a Prandtl number of {sheet}; {recomputed} is "
    "the end of what such a fluid has. In which units are they?",
    over=SIDES,
    share=0.05,
    closes=True,
)
def prandtl(v: Figures, where: str) -> Line:
    side = _side(where)
    single_phase(v, side)
    Pr = property_of(v, side, "cp") * property_of(v, side, "mu") / property_of(v, side, "k")
    name = str(v.get(f"{side}.fluid") or "").lower()
    kind = "gas" if gas(v, side) else "water" if name in WATERS else "liquid"
    low, high = PRANDTL[kind]
    return within(Pr, "dimensionless", low=low, high=high, name="Prandtl number")


@check(
    "A13",
    title="The fluid keeps its phase",
    grade="watch",
    needs="a fluid of the property library, its temperatures and inlet pressure",
    source="saturation and freezing of the library, with 5 K of margin",
    ask="At {sheet} the {where} comes within 5 K of changing its phase ({recomputed}). Is that intended?",
    over=tuple(f"{side}.{limit}" for side in SIDES for limit in ("boiling", "freezing")),
)
def keeps_phase(v: Figures, where: str) -> Line:
    name, _, limit = where.partition(".")
    side = _side(where)
    single_phase(v, side)
    fluid = v.subject.fluid(side)
    T = [float(v[f"{side}.T_{end}"]) for end in ("in", "out")]
    if limit == "freezing":
        if fluid.phase == "gas" or fluid.freezing_temperature is None:
            raise Missing(f"{name}.fluid with a known freezing point")
        return within(min(T), "temperature", low=fluid.freezing_temperature + PHASE_MARGIN, name="the coldest")
    p = pressure(v, f"{side}.p_in") - float(v.get(f"{side}.dp") or 0.0)
    saturated = fluid.saturation_temperature(p) if p > 0 else None
    if saturated is None:
        raise Missing(f"{name}.fluid with a known boiling point at its outlet pressure")
    if fluid.phase == "gas":
        return within(min(T), "temperature", low=saturated + PHASE_MARGIN, name="the coldest")
    return within(max(T), "temperature", high=saturated - PHASE_MARGIN, name="the hottest")


@check(
    "A14",
    title="A failure looks like a slip of units",
    grade="watch",
    needs="any check that compares two figures",
    source="misfits of failed checks against factors between units, within 2 % and what rounding allows",
    ask="In which unit is this figure?",
)
def slip_test(v: Figures, _: str) -> Remark:
    """Only says whether there is anything to test; the audit fills in what the failures look like."""
    figures = [path for path, value in v.subject.sheet_values.items() if isinstance(value, Figure)]
    if len(figures) < 2:
        raise Missing("two figures or more")
    return Remark()
