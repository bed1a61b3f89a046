"""Group E: pressures and temperatures of the design, expansion, turndown, and what a sheet says of itself."""

from __future__ import annotations

from engine.case import absolute
from engine.datasheet import Line, Remark, check, within
from engine.datasheet.figures import (
    Figures,
    Missing,
    Subject,
    half_width,
    mass_flow,
    mean_T,
    passage,
    pressure,
    property_of,
    single_phase,
)
from engine.sheet import sheet_fields
from engine.stated import SIDES, Figure, Side, Stated, Words

TEST_RATIO = (1.25, 1.55)
TUBE_RUPTURE = 10 / 13
EXPANSION_NOTE, EXPANSION = 30.0, 50.0
FIXED_HEADS = "LMN"
CASE = "stands in our case"
RE_LAMINAR, RE_TURBULENT = 2300.0, 1e4


def _side(where: str) -> Side:
    return "inside" if where.startswith("inside") else "outside"


@check(
    "E1",
    title="Design pressure and temperature hold the operation",
    grade="act",
    needs="a design pressure or temperature and the operating one",
    source="equipment is operated within its design limits",
    ask="The {where} of the design is {recomputed}, the operation has {sheet}. Which is right?",
    over=tuple(f"{side}.{what}" for side in SIDES for what in ("pressure", "temperature", "minimum")),
)
def design(v: Figures, where: str) -> Line:
    name, _, what = where.partition(".")
    if what == "pressure":
        limit = pressure(v, f"{name}.design_pressure")
        return within(pressure(v, f"{name}.p_in"), "pressure_absolute", high=limit, of=f"{name}.p_in")
    path = f"{name}.design_temperature" if what == "temperature" else f"{name}.minimum_temperature"
    limit = float(v[path])
    T = [float(T) for end in ("T_in", "T_out") if (T := v.get(f"{name}.{end}")) is not None]
    if not T:
        raise Missing(f"{name}.T_in or {name}.T_out")
    if what == "temperature":
        return within(max(T), "temperature", high=limit, name="the hottest")
    return within(min(T), "temperature", low=limit, name="the coldest")


@check(
    "E2",
    title="Test pressure",
    grade="watch",
    needs="design and test pressure of a side",
    source="ASME VIII-1: 1.3 times the design pressure, 1.5 in older editions (printed page not checked)",
    ask="Test over design pressure is {sheet} for the {where}; {recomputed} is the end of what the codes ask. To which "
    "code was it tested?",
    over=SIDES,
    share=0.01,
)
def test_pressure(v: Figures, where: str) -> Line:
    ratio = float(v[f"{where}.test_pressure"]) / float(v[f"{where}.design_pressure"])
    return within(ratio, "dimensionless", low=TEST_RATIO[0], high=TEST_RATIO[1], name="test over design pressure")


@check(
    "E3",
    title="Tube rupture",
    grade="watch",
    needs="design pressures of both sides",
    source="API 521: a low side designed for 10/13 of the high side needs no relief for a broken tube; flagged only, "
    "nothing is sized",
    ask="The low-pressure side is designed for {sheet}, below {recomputed}, 10/13 of the high side. Was a broken tube "
    "considered for the whole low side with its piping?",
)
def tube_rupture(v: Figures, _: str) -> Line:
    design = {side: pressure(v, f"{side}.design_pressure") for side in SIDES}
    low, high = sorted(SIDES, key=lambda side: design[side])
    if f"{low}.test_pressure" in v and pressure(v, f"{low}.test_pressure") >= design[high]:
        return within(design[low], "pressure_absolute", of=f"{low}.design_pressure")
    return within(design[low], "pressure_absolute", low=TUBE_RUPTURE * design[high], of=f"{low}.design_pressure")


@check(
    "E4",
    title="Expansion between shell and tubes",
    grade="watch",
    needs="type letters of a fixed tubesheet and all four temperatures",
    source="mean metal temperatures more than 30 K apart are noted, more than 50 K watched (common practice)",
    ask="Shell and tubes of the fixed tubesheets are {sheet} apart ({where}), over {recomputed}. Is an expansion joint "
    "provided?",
    over=("running", "one side lost"),
)
def expansion(v: Figures, where: str) -> Line:
    if str(v["tema"])[2:3].upper() not in FIXED_HEADS or v.get("expansion_joint") == "yes":
        raise Missing("fixed tubesheets without an expansion joint")
    shell, tubes = mean_T(v, "outside"), mean_T(v, "inside")
    apart = abs(shell - tubes) / 2
    if where == "one side lost":
        # The tubes take the temperature of the side that is left.
        apart = max(abs(float(v["inside.T_in"]) - shell), abs(float(v["outside.T_in"]) - tubes))
    return within(
        apart,
        "temperature_difference",
        high=EXPANSION_NOTE,
        name="shell and tubes apart",
        noted=EXPANSION - EXPANSION_NOTE,
    )


@check(
    "E5",
    title="Corrosion allowance on the tubes",
    grade="note",
    needs="the corrosion allowance of the tubes",
    source="tubes have none as a rule",
    ask="Is the corrosion allowance really put on the tubes?",
)
def tube_allowance(v: Figures, _: str) -> Remark:
    allowance = float(v["tube_corrosion_allowance"])
    return (
        Remark(says=f"A corrosion allowance of {1e3 * allowance:.3g} mm stands on the tubes.")
        if allowance
        else Remark()
    )


@check(
    "E6",
    title="Turndown",
    grade="note",
    needs="flow at turndown, viscosity, bore, tubes and passes",
    source="flow in tubes is laminar below Re 2300 and turbulent above 10,000",
    ask="Were films and duty checked at the least flow?",
)
def turndown(v: Figures, _: str) -> Remark:
    single_phase(v, "inside")
    area, d, _length = passage(v, "inside")
    mu = property_of(v, "inside", "mu")
    full, least = (float(v[path]) * d / (area * mu) for path in ("inside.flow", "inside.flow_min"))
    limit = RE_TURBULENT if full >= RE_TURBULENT else RE_LAMINAR
    if least < limit <= full:
        kind = "laminar" if least < RE_LAMINAR else "transitional"
        return Remark(
            says=f"At turndown the tubes run at Re {least:.0f}, which is {kind}; at full flow Re is {full:.0f}."
        )
    return Remark()


@check(
    "E7",
    title="What the sheet says of itself",
    grade="note",
    needs="revision, date, status or guarantee",
    source="an old or estimated sheet describes a plant that may no longer exist",
    ask="Which revision and date has this sheet, are its figures estimated or guaranteed, and for which fluid and "
    "tolerance?",
)
def self_description(v: Figures, _: str) -> Remark:
    names = ("revision", "date", "status", "guarantee")
    stated = [name for name in names if name in v]
    if not stated:
        raise Missing(" or ".join(names))
    if v.get("status") == "estimated":
        return Remark(says="The figures are estimated.")
    lacking = [name for name in names if name not in stated]
    return Remark(says=f"Not stated: {', '.join(lacking)}.") if lacking else Remark()


def _stated_twice(subject: Subject) -> tuple[str, ...]:
    fields = sheet_fields()
    both = (path for path in subject.sheet_values if path in subject.case_values)
    return tuple(path for path in both if not isinstance(fields[path], Words) and not path.endswith("R_fouling"))


@check(
    "E8",
    title="Sheet and case state the same",
    grade="watch",
    needs="a figure that both the sheet and the case state; fouling is compared by C9",
    source="one exchanger in one service; 0.5 % beside the rounding of both",
    ask="The sheet prints {sheet}, our own data have {recomputed} ({where}). Which is right?",
    over=_stated_twice,
    share=0.005,
    closes=True,
)
def same_as_case(v: Figures, where: str) -> Line | Remark:
    if not where:
        raise Missing("a figure that both the sheet and the case state")
    asked = v.subject.case_values[where]
    side, _, name = where.rpartition(".")
    if isinstance(asked, str):
        label = v.subject.label(where)
        return Remark(says=f"{label}: the sheet has {v[where]}, the case {asked}.") if v[where] != asked else Remark()
    if isinstance(asked, int):
        return Line(
            sheet=float(v[where]), recomputed=float(asked), quantity="dimensionless", of=where, by=CASE, share=0.0
        )
    declared = sheet_fields()[where]
    assert isinstance(declared, Stated)
    quantity = asked.quantity if isinstance(asked, Figure) else declared.quantities[0]
    _, rounding = half_width(where, asked)
    case = v.subject.case
    assert case is not None
    if name == "flow":
        own = case.flow(_side(side))
        assert own is not None
        return Line(
            sheet=mass_flow(v, _side(side)), recomputed=own, quantity="mass_flow", of=where, by=CASE, share=0.01
        )
    if quantity == "temperature":
        return Line(
            sheet=float(v[where]),
            recomputed=float(asked),
            quantity="temperature",
            of=where,
            by=CASE,
            share=0,
            absolute=rounding,
        )
    if quantity in ("pressure_absolute", "pressure_gauge"):
        own = absolute(asked, float(case.atmosphere))
        return Line(
            sheet=pressure(v, where), recomputed=own, quantity="pressure_absolute", of=where, by=CASE, absolute=rounding
        )
    share = 0.005 + rounding / abs(asked) if asked else 0.0
    return Line(sheet=float(v[where]), recomputed=float(asked), quantity=quantity, of=where, by=CASE, share=share)
