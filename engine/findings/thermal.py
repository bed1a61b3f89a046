"""Whether the duty is met, and what the temperatures do to fluids, metal and people."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from engine.case import absolute
from engine.correlations import Array
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.findings import COMMON_PRACTICE, Finding, Missing, Subject, percent, rule, span
from engine.findings.validity import OWN, capacities
from engine.stated import SIDES, Side
from engine.states import State
from engine.studies import SCALING_SURFACE, scales

OUTLETS_APART = 0.02
"""Of the heat that two stated outlets mean."""
LARGE_MARGIN = 0.25
CLOSE_APPROACH = 3.0
OVERSHOOT = 0.05
"""Of the stated temperature change of a side."""
LOW_F = 0.8
NEAR_CEILING = 0.95
FOULING_SHARE = 0.5
"""Of the whole resistance."""
BURNS = 333.15
PHASE_MARGIN = 5.0
"""Between a surface and the freezing, boiling or dew point of the fluid that touches it [K]."""
BLOCKED_IN = 30.0
"""From the cold to the hot inlet [K]: enough to raise the pressure of a liquid that is shut in by hundreds of bar."""
SHOCK = 100.0
"""Between the inlets [K]."""
EXPANSION = (30.0, 50.0)
"""Between mean metal temperatures of tubes and shell: from where to note and from where to watch [K]."""
FIXED_HEADS = "LMN"


# --- duty -------------------------------------------------------------------------------------------------------------


def _stated_outlets(s: Subject) -> dict[Side, float]:
    wanted: dict[Side, float] = {}
    for side in SIDES:
        T_out = s.case.stream(side).T_out
        if T_out is not None:
            wanted[side] = float(T_out)
    if not wanted:
        raise Missing("a required outlet: neither inside.T_out nor outside.T_out is stated")
    return wanted


@rule(
    "required-duty-missed",
    title="The required duty is not met",
    grades=("act",),
    needs="a rated case, and a stated outlet that can be reached",
    source=OWN,
)
def required_duty_missed(s: Subject) -> Iterator[Finding]:
    wanted = _stated_outlets(s)
    margins = {name: state.margin for name, state in s.states.items() if state.margin is not None}
    if not margins:
        raise Missing(f"a required U: {s.rating.requirement}")
    short = [name for name, margin in margins.items() if margin < 0]
    if not short:
        return
    worst = s.states[min(short, key=lambda name: margins[name])]
    required = worst.required_duty or 0.0
    because = {"required duty": s.duty(required)}
    for name in short:
        state = s.states[name]
        because[f"{name}, duty"] = s.duty(state.duty)
        because[f"{name}, duty short by"] = s.duty(required - state.duty)
        for side, T_out in wanted.items():
            lacking = (state.T_out[side] - T_out) * (1 if side == s.case.hot else -1)
            because[f"{name}, outlet of the {s.name(side)} short by"] = s.dT(lacking)
        because[f"{name}, margin on U"] = f"{100 * margins[name]:+.1f} %"
    doubt = ""
    interval = s.interval("duty", worst.state)
    if interval is not None:
        because[f"{worst.state}, 95 % interval of the duty"] = span(s.duty, *interval)
        inside = interval[0] <= required <= interval[1]
        doubt = f" The required duty lies {'inside' if inside else 'outside'} the 95 % interval."
    outlets = " and ".join(
        f"the {s.name(side)} leaves at {s.T(worst.T_out[side])} instead of {s.T(T_out)}"
        for side, T_out in wanted.items()
    )
    cleaning = "clean" not in short
    yield s.finding(
        "act",
        says=f"{' and '.join(short).capitalize()}, the exchanger gives {s.duty(worst.duty)} of the required "
        f"{s.duty(required)}: {outlets}.{doubt}",
        because=because,
        do="Cleaning restores the duty: weigh its cost against the loss."
        if cleaning
        else "Cleaning alone does not restore it: check flows and inlet temperatures first, then compare "
        f"{s.U(worst.U_dirty)} with the required "
        f"{s.U(worst.U_required or 0.0)}.",
    )


@rule(
    "requirement-impossible",
    title="The stated outlet cannot be reached",
    grades=("stop",),
    needs="a rated case, and a stated outlet",
    source="first and second law",
)
def requirement_impossible(s: Subject) -> Iterator[Finding]:
    wanted = _stated_outlets(s)
    if s.states and s.rating.requirement:
        yield s.finding(
            "stop",
            where=", ".join(f"{side}.T_out" for side in wanted),
            says=f"What is stated as outlet cannot be reached: {s.rating.requirement}.",
            because={
                **{f"{s.name(side)}, inlet": s.T(s.case.T_in(side)) for side in SIDES},
                **{f"{s.name(side)}, stated outlet": s.T(T) for side, T in wanted.items()},
            },
            do="Check the stated outlet, the flows and the inlets; no exchanger of this arrangement reaches it.",
        )


@rule(
    "stated-outlets-differ",
    title=f"The two stated outlets differ by over {percent(OUTLETS_APART)} in heat",
    grades=("act",),
    needs="both outlets and both flows stated",
    source="heat balance",
)
def stated_outlets_differ(s: Subject) -> Iterator[Finding]:
    heat: dict[Side, float] = {}
    flow: dict[Side, float] = {}
    for side in SIDES:
        T_out, flow[side] = s.stated(f"{side}.T_out"), s.stated(f"{side}.flow") and (s.case.flow(side) or 0.0)
        h = s.fluid(side).enthalpy(np.array([s.case.T_in(side), float(T_out)]))
        heat[side] = flow[side] * abs(float(h[1] - h[0]))
    loss = float(s.case.exchanger.heat_loss)
    heat["outside"] += -loss if s.case.hot == "outside" else loss
    low, high = sorted(SIDES, key=lambda side: heat[side])
    apart = heat[high] / heat[low] - 1
    if apart > OUTLETS_APART:
        closing = s.show(flow[low] * heat[high] / heat[low], "mass_flow")
        yield s.finding(
            "act",
            where="inside.T_out, outside.T_out",
            says=f"The stated outlets do not balance: the {s.name(high)} exchanges {s.duty(heat[high])}, the "
            f"{s.name(low)} {s.duty(heat[low])}, {percent(apart)} apart; the larger is taken as required.",
            because={
                **{f"{s.name(side)}, heat": s.duty(heat[side]) for side in SIDES},
                "heat loss": s.duty(loss),
                f"flow of the {s.name(low)} that would balance": closing,
            },
            do=f"Check the flows and outlets; {closing} in the {s.name(low)} would close the balance.",
        )


@rule(
    "large-margin",
    title=f"The margin on U is over {percent(LARGE_MARGIN)}",
    grades=("watch",),
    needs="a rated case, and a stated outlet that can be reached",
    source=COMMON_PRACTICE,
)
def large_margin(s: Subject) -> Iterator[Finding]:
    _stated_outlets(s)
    state = s.fouled
    if state.margin is None or state.U_required is None:
        raise Missing(f"a required U: {s.rating.requirement}")
    if state.margin > LARGE_MARGIN:
        yield s.finding(
            "watch",
            says=f"Fouled, U is {percent(state.margin)} over the required one: the exchanger gives more than is asked, "
            "and will be throttled or foul at low velocity.",
            because={
                "U, fouled": s.U(state.U_dirty),
                "U, required": s.U(state.U_required),
            },
            do="Check how the outlet is controlled, and the velocities that remain when a flow is cut back.",
        )


@rule(
    "outlet-overshoots",
    title="A fluid leaves beyond its stated outlet",
    grades=("watch",),
    needs="a rated case, and the side's outlet stated",
    source=OWN,
    by_side=True,
)
def outlet_overshoots(s: Subject, side: Side) -> Iterator[Finding]:
    stated = float(s.stated(f"{side}.T_out"))
    T_out, T_in = s.fouled.T_out[side], s.case.T_in(side)
    if abs(T_out - T_in) <= (1 + OVERSHOOT) * abs(stated - T_in):
        return
    because = {"stated": s.T(stated), "calculated, fouled": s.T(T_out)}
    beyond = f"{s.dT(abs(T_out - stated))} {'colder' if side == s.case.hot else 'hotter'}"
    interval = s.interval(f"{side}.T_out")
    doubt = ""
    if interval is not None:
        because["95 % interval"] = span(s.T, *interval)
        doubt = ", though within the 95 % interval" if interval[0] <= stated <= interval[1] else ""
    yield s.finding(
        "watch",
        where=f"{side}.T_out",
        says=f"Fouled, the {s.name(side)} leaves at {s.T(T_out)} where {s.T(stated)} is stated, {beyond}{doubt}.",
        because=because,
        do="If this outlet is a wish, see how it is controlled; if it was read, look for fouling or a wrong flow.",
    )


# --- temperatures -----------------------------------------------------------------------------------------------------


@rule(
    "close-approach",
    title=f"The fluids come closer than {CLOSE_APPROACH:g} K",
    grades=("watch",),
    needs="a rated case",
    source=COMMON_PRACTICE,
)
def close_approach(s: Subject) -> Iterator[Finding]:
    name = min(s.states, key=lambda each: float(np.min(_differences(s, s.states[each]))))
    profile, apart = s.states[name].profile, _differences(s, s.states[name])
    assert profile is not None
    i = int(np.argmin(apart))
    if 0 < apart[i] < CLOSE_APPROACH:
        within = s.dT(max(apart[i], 0.01))
        yield s.finding(
            "watch",
            says=f"The fluids come within {within} of each other ({name} state): small errors of flow or temperature "
            "move the outlets more than fouling does.",
            because={
                "smallest difference": f"within {within}",
                "where": f"{percent(profile.x[i])} of the area from the inlet of the {s.name('inside')}",
            },
            do="Expect little from cleaning or more area here; more comes from flow.",
        )


def _differences(s: Subject, state: State) -> Array:
    """Hot less cold temperature along the profile [K]."""
    assert state.profile is not None
    return state.profile.T[s.case.hot] - state.profile.T[s.case.cold]


@rule(
    "reversed-heat-flow",
    title="The cold fluid is warmer than the hot one over part of the area",
    grades=("watch",),
    needs="a rated case",
    source="second law",
)
def reversed_heat_flow(s: Subject) -> Iterator[Finding]:
    apart = _differences(s, s.fouled)
    share = float(np.mean(apart[1:-1] < 0))
    if share > 0:
        yield s.finding(
            "watch",
            says=f"In {percent(share)} of the cells the cold fluid is warmer than the hot one and gives heat back: "
            "part of the area works against the duty.",
            because={"share of the cells": percent(share), "largest reversal": s.dT(-apart.min())},
            do="Consider shells in series or fewer passes: more area of this kind lowers the duty.",
        )


@rule(
    "low-correction-factor",
    title=f"F is under {LOW_F:g}",
    grades=("watch",),
    needs="a rated case",
    source=f"F of 0.75 to 0.8 as the least ({COMMON_PRACTICE})",
)
def low_correction_factor(s: Subject) -> Iterator[Finding]:
    F = s.fouled.F
    if F < LOW_F:
        yield s.finding(
            "watch",
            says=f"F is {F:.3f}: the arrangement wastes {percent(1 - F)} of the counter-current driving force, and a "
            "small change of temperatures may leave none.",
            because={
                "F": f"{F:.3f}, against {LOW_F:g}",
                **{f"{s.name(side)}, outlet": s.T(s.fouled.T_out[side]) for side in SIDES},
            },
            do="Consider shells in series or another arrangement before adding area.",
        )


@rule(
    "near-ceiling",
    title=f"The effectiveness is over {percent(NEAR_CEILING)} of what this arrangement can reach",
    grades=("watch",),
    needs="a rated case, and a closed form of its arrangement",
    source="exact effectiveness of the arrangement at boundless NTU",
)
def near_ceiling(s: Subject) -> Iterator[Finding]:
    state = s.fouled
    C = capacities(state)
    Cr = min(C.values()) / max(C.values())
    boundless = s.case.exchanger.effectiveness(np.array([1e6]), np.array([Cr]), np.array([C["inside"] <= C["outside"]]))
    if isinstance(boundless, str):
        raise Missing(f"the ceiling of the effectiveness: {boundless}")
    ceiling = float(boundless[0])
    if state.effectiveness > NEAR_CEILING * ceiling:
        yield s.finding(
            "watch",
            says=f"The effectiveness of {state.effectiveness:.3f} is near the ceiling of {ceiling:.3f} for this "
            "arrangement and these flows: more area or a cleaner surface adds next to nothing.",
            because={
                "effectiveness": f"{state.effectiveness:.3f}",
                "ceiling": f"{ceiling:.3f}",
                "NTU": f"{state.NTU:.3g}",
                "heat capacity ratio": f"{Cr:.3f}",
            },
            do="Change a flow or an inlet temperature for more duty; fouling cannot be judged from the duty here.",
        )


@rule(
    "fouling-dominates",
    title=f"Fouling is over {percent(FOULING_SHARE)} of the resistance",
    grades=("watch",),
    needs="a rated case",
    source=COMMON_PRACTICE,
)
def fouling_dominates(s: Subject) -> Iterator[Finding]:
    state = s.fouled
    parts = {side: state.resistances[f"{side} fouling"] * state.U_dirty for side in SIDES}
    share = sum(parts.values())
    if share > FOULING_SHARE:
        yield s.finding(
            "watch",
            says=f"The stated fouling makes {percent(share)} of the resistance: the rating is mostly an assumption "
            "about deposits, and clean the exchanger gives far more.",
            because={
                **{f"share of fouling, {s.name(side)}": percent(part) for side, part in parts.items()},
                "U, clean": s.U(s.states["clean"].U_dirty),
                "U, fouled": s.U(state.U_dirty),
            },
            do="Replace the stated fouling resistance by one found from readings of this exchanger.",
        )


# --- what surfaces do to fluids ---------------------------------------------------------------------------------------


@rule(
    "scaling-surface",
    title=f"Heated water touches a surface above {SCALING_SURFACE - 273.15:g} °C",
    grades=("watch",),
    needs="a rated case",
    source=f"cooling water scales at surfaces above about 60 °C ({COMMON_PRACTICE})",
    by_side=True,
)
def scaling_surface(s: Subject, side: Side) -> Iterator[Finding]:
    if not scales(s.case, side):
        return
    hottest = s.extremes("surface_T", side)[1]
    if hottest > SCALING_SURFACE:
        limit = s.T(SCALING_SURFACE)
        yield s.finding(
            "watch",
            says=f"The water in the {s.name(side)} touches a surface of {s.T(hottest)}: above about "
            f"{limit} hard water scales, whatever its bulk temperature.",
            because={
                "hottest surface": s.T(hottest),
                "hottest bulk": s.T(s.extremes("T", side)[1]),
                "limit": limit,
            },
            do="Check hardness and treatment of this water, or raise its flow; treated closed-loop water may allow it.",
        )


@rule(
    "wall-limit",
    title="A surface passes its stated temperature limit",
    grades=("act",),
    needs="a rated case, and a wall temperature limit of the side",
    source="the stated limit",
    by_side=True,
)
def wall_limit(s: Subject, side: Side) -> Iterator[Finding]:
    limits = {end: getattr(s.case.limits, f"{side}_wall_T_{end}") for end in ("min", "max")}
    if limits["min"] is None and limits["max"] is None:
        raise Missing(f"limits.{side}_wall_T_min and limits.{side}_wall_T_max: neither is stated")
    coldest, hottest = s.extremes("surface_T", side)
    for end, T, sign in (("min", coldest, -1), ("max", hottest, 1)):
        if limits[end] is not None and sign * (T - limits[end]) > 0:
            how = "below its lowest" if sign < 0 else "above its highest"
            yield s.finding(
                "act",
                where=f"limits.{side}_wall_T_{end}",
                says=f"The surface of the {s.name(side)} reaches {s.T(T)}, "
                f"{s.dT(abs(T - limits[end]))} {how} allowed temperature.",
                because={"surface": s.T(T), "limit": s.T(limits[end])},
                do="Change a flow or an inlet temperature so that the surface stays inside its limit, in both states.",
            )


@rule(
    "near-freezing",
    title=f"A liquid comes within {PHASE_MARGIN:g} K of freezing",
    grades=("act",),
    needs="a rated case, and the liquid's freezing point",
    source=COMMON_PRACTICE,
    by_side=True,
)
def near_freezing(s: Subject, side: Side) -> Iterator[Finding]:
    fluid = s.fluid(side)
    if s.phase(side) != "liquid":
        return
    T_freeze = fluid.freezing_temperature
    if T_freeze is None:
        raise Missing(f"the freezing point of {fluid.name}; limits.{side}_wall_T_min may state a limit")
    coldest = min(s.extremes("surface_T", side)[0], s.extremes("T", side)[0])
    if coldest < T_freeze + PHASE_MARGIN:
        yield s.finding(
            "act",
            says=f"{fluid.name.capitalize()} in the {s.name(side)} cools to {s.T(coldest)}, "
            f"{s.dT(coldest - T_freeze)} above its freezing point.",
            because={"coldest": s.T(coldest), "freezing point": s.T(T_freeze)},
            do="Raise the coldest surface: a warmer or smaller flow on the cold side, or more flow on the other.",
        )


@rule(
    "near-boiling",
    title=f"A liquid comes within {PHASE_MARGIN:g} K of boiling at its outlet pressure",
    grades=("act",),
    needs="a rated case, and the liquid's saturation line",
    source=COMMON_PRACTICE,
    by_side=True,
)
def near_boiling(s: Subject, side: Side) -> Iterator[Finding]:
    fluid = s.fluid(side)
    if s.phase(side) != "liquid":
        return
    p_out = s.p_out(side)
    T_sat = fluid.saturation_temperature(p_out)
    if T_sat is None:
        raise Missing(f"a saturation line of {fluid.name} at its outlet pressure")
    hottest = max(s.extremes("surface_T", side)[1], s.extremes("T", side)[1])
    if hottest > T_sat - PHASE_MARGIN:
        yield s.finding(
            "act",
            says=f"{fluid.name.capitalize()} in the {s.name(side)} reaches {s.T(hottest)}, "
            f"{s.dT(T_sat - hottest)} below boiling at its outlet pressure of "
            f"{s.p(p_out)}.",
            because={
                "hottest": s.T(hottest),
                "boiling point": s.T(T_sat),
                "outlet pressure": s.p(p_out),
            },
            do="Raise the pressure of this side or its flow; the rating holds for liquid only.",
        )


@rule(
    "near-dew-point",
    title=f"A gas comes within {PHASE_MARGIN:g} K of condensing",
    grades=("act",),
    needs="a rated case, and the gas's saturation line",
    source=COMMON_PRACTICE,
    by_side=True,
)
def near_dew_point(s: Subject, side: Side) -> Iterator[Finding]:
    fluid, p = s.fluid(side), s.case.p_in(side)
    if s.phase(side) != "gas":
        return
    T_dew = fluid.saturation_temperature(p)
    if T_dew is None:
        raise Missing(f"a saturation line of {fluid.name} at its pressure")
    coldest = min(s.extremes("surface_T", side)[0], s.extremes("T", side)[0])
    if coldest < T_dew + PHASE_MARGIN:
        yield s.finding(
            "act",
            says=f"{fluid.name.capitalize()} in the {s.name(side)} cools to {s.T(coldest)}, "
            f"{s.dT(coldest - T_dew)} above condensing at {s.p(p)}.",
            because={"coldest": s.T(coldest), "condensing point": s.T(T_dew)},
            do="Keep this surface warmer, or see to draining and corrosion; the rating holds for gas only.",
        )


# --- metal, pressure and people ---------------------------------------------------------------------------------------


@rule(
    "over-design-temperature",
    title="A fluid passes its side's design temperature",
    grades=("stop",),
    needs="the side's design temperature, and a rated case for a side that is heated",
    source="the stated design temperature",
    by_side=True,
)
def over_design_temperature(s: Subject, side: Side) -> Iterator[Finding]:
    path = f"limits.{side}_design_temperature"
    limit = float(s.stated(path))
    T = s.case.T_in(side)
    over = T - limit
    if over <= 0 and side == s.case.cold:
        over = max(state.T_out[side] for state in s.states.values()) - limit
    if over > 0:
        yield s.finding(
            "stop",
            where=path,
            says=f"The {s.name(side)} runs at {s.T(limit + over)}, "
            f"{s.dT(over)} above its design temperature: outside the stamped limits.",
            because={"hottest": s.T(limit + over), "design temperature": s.T(limit)},
            do="Do not operate so; an authorised inspector and the code in force decide on any re-rate.",
        )


@rule(
    "over-design-pressure",
    title="An inlet pressure passes its side's design pressure",
    grades=("stop",),
    needs="the side's design pressure",
    source="the stated design pressure",
    by_side=True,
)
def over_design_pressure(s: Subject, side: Side) -> Iterator[Finding]:
    path = f"limits.{side}_design_pressure"
    limit, p = absolute(s.stated(path), s.case.atmosphere), s.case.p_in(side)
    if p > limit:
        yield s.finding(
            "stop",
            where=path,
            says=f"The {s.name(side)} is fed at {s.p(p)}, "
            f"{s.dp(p - limit)} above its design pressure: outside the stamped limits.",
            because={"inlet": s.p(p), "design pressure": s.p(limit)},
            do="Do not operate so; an authorised inspector and the code in force decide on any re-rate.",
        )


@rule(
    "below-minimum-metal-temperature",
    title="The metal is colder than its minimum design temperature",
    grades=("stop",),
    needs="a rated case, and the minimum metal temperature",
    source="the stated minimum metal temperature",
)
def below_minimum_metal_temperature(s: Subject) -> Iterator[Finding]:
    path = "limits.minimum_metal_temperature"
    limit = float(s.stated(path))
    coldest = min(s.extremes("wall_T", side)[0] for side in SIDES)
    if coldest < limit:
        yield s.finding(
            "stop",
            where=path,
            says=f"The tube metal runs at {s.T(coldest)}, "
            f"{s.dT(limit - coldest)} below its minimum temperature: outside the stamped "
            "limits, brittle fracture is possible.",
            because={"coldest metal": s.T(coldest), "minimum": s.T(limit)},
            do="Do not operate so; an authorised inspector and the code in force decide.",
        )


@rule(
    "cold-metal",
    title="The cold inlet lies below the minimum metal temperature",
    grades=("act",),
    needs="the minimum metal temperature",
    source=COMMON_PRACTICE,
)
def cold_metal(s: Subject) -> Iterator[Finding]:
    path = "limits.minimum_metal_temperature"
    limit, cold = float(s.stated(path)), s.case.T_in(s.case.cold)
    if cold < limit:
        yield s.finding(
            "act",
            where=path,
            says=f"When the hot side stops, the metal goes to the cold inlet's {s.T(cold)}, "
            f"{s.dT(limit - cold)} below its minimum: hot fluid or pressure on metal that cold "
            "may break it.",
            because={"cold inlet": s.T(cold), "minimum": s.T(limit)},
            do="Have start-up, stand-still and loss of the hot side reviewed for brittle fracture.",
        )


@rule(
    "thermal-shock",
    title=f"The inlets are over {SHOCK:g} K apart",
    grades=("watch",),
    needs="nothing",
    source=COMMON_PRACTICE,
)
def thermal_shock(s: Subject) -> Iterator[Finding]:
    apart = abs(s.case.T_in("inside") - s.case.T_in("outside"))
    if apart > SHOCK:
        shown = s.dT(apart)
        yield s.finding(
            "watch",
            says=f"The inlets are {shown} apart: metal that one fluid has soaked meets the other at start-up or when a "
            "flow fails.",
            because={f"{s.name(side)}, inlet": s.T(s.case.T_in(side)) for side in SIDES},
            do="Have start-up and loss of one flow reviewed for thermal shock and differential expansion.",
        )


@rule(
    "differential-expansion",
    title=f"Fixed tubesheets, metal of tubes and shell over {EXPANSION[0]:g} K apart",
    grades=("watch", "note"),
    needs="a rated case",
    source=f"{EXPANSION[0]:g} and {EXPANSION[1]:g} K ({COMMON_PRACTICE})",
)
def differential_expansion(s: Subject) -> Iterator[Finding]:
    exchanger = s.case.exchanger
    if not isinstance(exchanger, ShellAndTube) or exchanger.rear_letter not in FIXED_HEADS:
        return
    apart: dict[str, float] = {}
    for name, state in s.states.items():
        assert state.profile is not None
        shell = float(state.profile.T["outside"][1:-1].mean())
        tubes = float(np.mean([state.profile.wall_T[side][1:-1] for side in SIDES]))
        apart[f"in the {name} state"] = abs(tubes - shell)
        # Tubes take the temperature of their fluid long before the shell follows.
        apart[f"when the flow in the shell fails ({name})"] = abs(s.case.T_in("inside") - shell)
    worst = max(apart, key=lambda when: apart[when])
    if apart[worst] > EXPANSION[0]:
        yield s.finding(
            "watch" if apart[worst] > EXPANSION[1] else "note",
            says=f"Between fixed tubesheets the mean metal of tubes and shell is {s.dT(apart[worst])} apart {worst}.",
            because={f"tubes against shell, {when}": s.dT(x) for when, x in apart.items()},
            do="Check the expansion joint or the tube-to-tubesheet joints for this difference, start-up included.",
        )


@rule(
    "tube-rupture",
    title="The high side's design pressure is above the low side's test pressure",
    grades=("act",),
    needs="both design pressures, and the low side's test pressure",
    source="tube-rupture criterion of API 521 (printed page not checked); a flag only, no relief is sized",
)
def tube_rupture(s: Subject) -> Iterator[Finding]:
    design: dict[Side, float] = {}
    for side in SIDES:
        design[side] = absolute(s.stated(f"limits.{side}_design_pressure"), s.case.atmosphere)
    low, high = sorted(SIDES, key=lambda side: design[side])
    if design[low] == design[high]:
        return
    path = f"limits.{low}_test_pressure"
    test = absolute(s.stated(path), s.case.atmosphere)
    if design[high] > test:
        yield s.finding(
            "act",
            where=path,
            says=f"The {s.name(high)} is designed for {s.p(design[high])}, above the test pressure of "
            f"the {s.name(low)}, {s.p(test)}: a broken tube could overpressure the low side and its "
            "piping.",
            because={
                f"{s.name(high)}, design pressure": s.p(design[high]),
                f"{s.name(low)}, design pressure": s.p(design[low]),
                f"{s.name(low)}, test pressure": s.p(test),
            },
            do="Have the tube-rupture case evaluated; it is not sized here.",
        )


@rule(
    "blocked-in",
    title=f"A liquid-full cold side with the hot inlet over {BLOCKED_IN:g} K hotter",
    grades=("note",),
    needs="nothing",
    source=COMMON_PRACTICE,
)
def blocked_in(s: Subject) -> Iterator[Finding]:
    cold, hot = s.case.cold, s.case.hot
    apart = s.case.T_in(hot) - s.case.T_in(cold)
    if s.phase(cold) == "liquid" and apart > BLOCKED_IN:
        yield s.finding(
            "note",
            where=cold,
            says=f"If the {s.name(cold)} can be shut in full of liquid while the hot side flows, it is heated towards "
            f"{s.T(s.case.T_in(hot))} and its pressure rises steeply.",
            because={"hot inlet over cold inlet": s.dT(apart)},
            do="Check that the cold side has thermal relief, or cannot be isolated.",
        )


@rule(
    "leak-direction",
    title="Where a leak would run",
    grades=("note",),
    needs="a rated case",
    source="pressures of the case",
)
def leak_direction(s: Subject) -> Iterator[Finding]:
    if s.fluid("inside").name == s.fluid("outside").name:
        return
    p_in = {side: s.case.p_in(side) for side in SIDES}
    p_out = {side: s.p_out(side) for side in SIDES}
    low, high = sorted(SIDES, key=lambda side: p_in[side])
    if p_out[high] > p_in[low]:
        to = f"from the {s.name(high)} into the {s.name(low)}: {s.fluid(high).name} into {s.fluid(low).name}"
    else:
        to = "either way, since the pressures of the two sides overlap"
    yield s.finding(
        "note",
        says=f"A leak of the tube would run {to}.",
        because={f"{s.name(side)}, pressure": span(s.p, p_out[side], p_in[side]) for side in SIDES},
        do="Check what this mixture does: hazard, product quality, where it would be noticed.",
    )


@rule(
    "hot-surface",
    title=f"Surfaces above {BURNS - 273.15:g} °C within reach",
    grades=("note",),
    needs="nothing",
    source=COMMON_PRACTICE,
)
def hot_surface(s: Subject) -> Iterator[Finding]:
    T = s.case.T_in(s.case.hot)
    if T > BURNS:
        yield s.finding(
            "note",
            where=s.case.hot,
            says=f"Bare parts of the {s.name(s.case.hot)} and its nozzles stand at up to {s.T(T)}: burns on touch.",
            because={"hot inlet": s.T(T), "limit": s.T(BURNS)},
            do="Insulate or guard what can be touched.",
        )
