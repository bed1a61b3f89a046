"""Whether the streams can flow so: drops against what is allowed and available, velocities, regimes, distribution."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from engine.exchangers import standard_sizes
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.standard_sizes import Usual
from engine.findings import COMMON_PRACTICE, Finding, Missing, Subject, percent, rule, span
from engine.findings.validity import OWN
from engine.stated import Side

GAS_DROP = 0.1
"""Of the absolute inlet pressure."""
MACH = 0.3
"""Above which a gas is no longer nearly incompressible."""
FILM_SHARE = 0.7
"""Of the whole resistance."""
HEAT_LOSS = 0.02
"""Of the duty."""
VACUUM, HIGH_PRESSURE = 0.5e5, 10e5
"""Absolute pressures between which a gas is held for one near atmospheric [Pa] (common practice)."""


# --- drops ------------------------------------------------------------------------------------------------------------


@rule(
    "drop-over-allowance",
    title="The pressure drop passes its allowance",
    grades=("act", "watch"),
    needs="a rated case, and the side's allowed drop",
    source="the stated allowance",
    by_side=True,
)
def drop_over_allowance(s: Subject, side: Side) -> Iterator[Finding]:
    path = f"{side}.dp_allowed"
    allowed, dp = float(s.stated(path)), s.fouled.sides[side].dp
    if s.phase(side) == "condensing":
        raise Missing(f"a drop of the {s.name(side)}: that of condensing steam is not rated")
    low, high = s.interval(f"{side}.dp") or (dp, dp)
    if high <= allowed:
        return
    shown, limit = s.dp(dp), s.dp(allowed)
    over = dp > allowed
    straddles = low <= allowed
    doubt = " Its 95 % interval reaches from one side of the limit to the other." if straddles else ""
    parts = s.fouled.sides[side].drops
    largest = max(parts, key=lambda part: parts[part])
    because = {"drop, fouled": shown, "allowed": limit}
    if low < high:
        because["95 % interval"] = span(s.dp, low, high)
    because[f"largest part, {largest.replace('_', ' and ')}"] = s.dp(parts[largest])
    yield s.finding(
        "act" if over else "watch",
        where=path,
        says=f"The drop of the {s.name(side)} is {shown}, {'over' if over else 'under'} the allowed {limit}.{doubt}",
        because=because,
        do="Find out whether pump or header can give it; else less flow, or more pipes or tubes in parallel."
        if over
        else "Measure the drop and calibrate with it before relying on this allowance.",
    )


@rule(
    "drop-over-inlet-pressure",
    title="The pressure drop uses up the inlet pressure",
    grades=("stop", "watch"),
    needs="a rated case",
    source=OWN,
    by_side=True,
)
def drop_over_inlet_pressure(s: Subject, side: Side) -> Iterator[Finding]:
    if s.phase(side) == "condensing":
        raise Missing(f"a drop of the {s.name(side)}: that of condensing steam is not rated")
    p_in, dp = s.case.p_in(side), max(state.sides[side].dp for state in s.states.values())
    atmosphere = float(s.case.atmosphere)
    because = {"drop": s.dp(dp), "inlet": s.p(p_in)}
    if dp >= p_in:
        yield s.finding(
            "stop",
            says=f"The drop of the {s.name(side)}, {because['drop']}, is more than its whole inlet pressure of "
            f"{because['inlet']}: this flow cannot pass.",
            because=because,
            do="Check flow, bore and branches; the real flow is smaller than the stated one.",
        )
    elif p_in - dp < atmosphere <= p_in:
        p_out = s.p(p_in - dp)
        yield s.finding(
            "watch",
            says=f"The {s.name(side)} leaves at {p_out}, below the atmosphere's {s.p(atmosphere)}: it "
            "passes this flow only if something draws at its outlet.",
            because={**because, "outlet": p_out},
            do="Check the inlet pressure and the flow; air may be drawn in at leaks.",
        )


@rule(
    "gas-drop",
    title=f"A gas loses over {percent(GAS_DROP)} of its inlet pressure",
    grades=("watch",),
    needs="a rated case",
    source=COMMON_PRACTICE,
    by_side=True,
)
def gas_drop(s: Subject, side: Side) -> Iterator[Finding]:
    if s.phase(side) != "gas":
        return
    dp, p_in = s.fouled.sides[side].dp, s.case.p_in(side)
    if dp > GAS_DROP * p_in:
        yield s.finding(
            "watch",
            says=f"The gas in the {s.name(side)} loses {percent(dp / p_in)} of its inlet pressure: rated at its mean "
            "pressure, its drop is approximate.",
            because={
                "drop": s.dp(dp),
                "inlet": s.p(p_in),
            },
            do="Take the drop as an estimate; divide the exchanger into parts if it decides.",
        )


# --- velocities -------------------------------------------------------------------------------------------------------


@rule(
    "gas-near-sound",
    title=f"A gas leaves faster than {MACH:g} of the speed of sound",
    grades=("watch",),
    needs="a rated case",
    source=f"speed of sound of an ideal gas; incompressible up to Mach {MACH:g} ({COMMON_PRACTICE})",
    by_side=True,
)
def gas_near_sound(s: Subject, side: Side) -> Iterator[Finding]:
    if s.phase(side) != "gas":
        return
    at, p_in, p_out = s.fouled.sides[side], s.case.p_in(side), s.p_out(side)
    rho_mean = float(s.fluid(side).at(np.asarray((at.T_in + at.T_out) / 2)).rho)
    rho, cp = at.properties_out["rho"], at.properties_out["cp"]
    v = at.velocity * rho_mean / rho * p_in / p_out
    sound = speed_of_sound(p_in, rho, cp, at.T_out)
    if v > MACH * sound:
        yield s.finding(
            "watch",
            says=f"The gas leaves the {s.name(side)} at {s.velocity(v)}, {v / sound:.2f} of its speed of sound: "
            "films and drops of nearly incompressible flow do not hold.",
            because={
                "velocity at the outlet": s.velocity(v),
                "speed of sound": s.velocity(sound),
            },
            do="Check flow, pressure and bore; use more pipes or tubes in parallel.",
        )


def speed_of_sound(p: float, rho: float, cp: float, T: float) -> float:
    """Of an ideal gas [m/s]."""
    gas_constant = p / (rho * T)
    return float(np.sqrt(cp / (cp - gas_constant) * gas_constant * T))


@rule(
    "over-velocity-limit",
    title="A velocity passes its stated limit",
    grades=("act",),
    needs="a rated case, and the side's highest velocity",
    source="the stated limit",
    by_side=True,
)
def over_velocity_limit(s: Subject, side: Side) -> Iterator[Finding]:
    path = f"limits.{side}_velocity_max"
    limit = float(s.stated(path))
    if s.phase(side) == "condensing":
        raise Missing(f"one velocity of the {s.name(side)}: it condenses on its way")
    v = s.fouled.sides[side].velocity
    if v > limit:
        yield s.finding(
            "act",
            where=path,
            says=f"The {s.name(side)} flows at {s.velocity(v)}, over its limit of {s.velocity(limit)}.",
            because={"velocity": s.velocity(v), "limit": s.velocity(limit)},
            do="Cut the flow or use more pipes or tubes in parallel; the limit guards against erosion or vibration.",
        )


@rule(
    "unusual-velocity",
    title="A velocity outside its usual range",
    grades=("watch",),
    needs="a rated case",
    source=str(standard_sizes.SINNOTT_PRACTICE),
    by_side=True,
)
def unusual_velocity(s: Subject, side: Side) -> Iterator[Finding]:
    if s.phase(side) == "condensing":
        return
    usual_for = service(s, side)
    usual: Usual = standard_sizes.VELOCITIES[usual_for]
    v = s.fouled.sides[side].velocity
    if usual.low <= v <= usual.high:
        return
    slow = v < usual.low
    yield s.finding(
        "watch",
        says=f"The {s.name(side)} flows at {s.velocity(v)}; usual for {usual_for} is "
        f"{span(s.velocity, usual.low, usual.high)}.",
        because={"velocity": s.velocity(v), "usual": span(s.velocity, usual.low, usual.high)},
        do="Expect deposits and a poor film; fewer pipes or tubes in parallel or more flow help."
        if slow
        else "Check erosion, vibration and the drop; more pipes or tubes in parallel or less flow help.",
        source=str(usual.source),
    )


def service(s: Subject, side: Side) -> str:
    """Which row of the usual velocities applies: an annulus is a pipe, and only a shell is a shell."""
    if s.phase(side) == "gas":
        p = s.case.p_in(side)
        return (
            "vapour in vacuum"
            if p < VACUUM
            else ("vapour at atmospheric pressure" if p < HIGH_PRESSURE else "vapour at high pressure")
        )
    if s.is_shell(side):
        return "shell-side liquid"
    water = "water" in s.fluid(side).name.lower().split() and side == s.case.cold
    return "tube-side cooling water" if water else "tube-side process liquid"


# --- regimes and resistances ------------------------------------------------------------------------------------------


def _film_share(s: Subject, side: Side) -> float:
    return s.fouled.resistances[f"{side} film"] * s.fouled.U_dirty


@rule(
    "laminar-flow",
    title="Laminar flow",
    grades=("watch", "note"),
    needs="a rated case",
    source=OWN,
    by_side=True,
)
def laminar_flow(s: Subject, side: Side) -> Iterator[Finding]:
    share = s.regime_share(side, "laminar")
    if share == 0:
        return
    film, at = _film_share(s, side), s.fouled.sides[side]
    decides = film > 0.5
    helps = "inserts that stir the core, a warmer and so thinner liquid, more flow"
    if _branches(s, side) > 1:
        helps += ", fewer pipes or tubes in parallel"
    yield s.finding(
        "watch" if decides else "note",
        says=f"The {s.name(side)} flows laminar in {percent(share)} of the cells, and its film is {percent(film)} of "
        f"the resistance.",
        because={
            "mean Re": f"{at.Re:.4g}",
            "film": s.U(at.h),
            "share of the resistance": percent(film),
        },
        do=f"What would help: {helps}."
        if decides
        else "Little is to be gained: the other resistances are the larger part.",
    )


def _branches(s: Subject, side: Side) -> int:
    """Pipes or tubes in parallel that a side is split over."""
    exchanger = s.case.exchanger
    if isinstance(exchanger, DoublePipe):
        return exchanger.branches(side)
    of_a_shell = 1.0 if s.is_shell(side) else float(exchanger.tubes_per_pass(np.asarray(exchanger.tubes_plugged)))
    return round(of_a_shell) * exchanger.shells_in_parallel


@rule(
    "film-dominates",
    title=f"One film is over {percent(FILM_SHARE)} of the resistance",
    grades=("note",),
    needs="a rated case",
    source=OWN,
    by_side=True,
)
def film_dominates(s: Subject, side: Side) -> Iterator[Finding]:
    share = _film_share(s, side)
    if share > FILM_SHARE:
        yield s.finding(
            "note",
            says=f"The film of the {s.name(side)} is {percent(share)} of the resistance: what is done to the other "
            "side hardly shows.",
            because={
                "film": s.U(s.fouled.sides[side].h),
                "share of the resistance": percent(share),
                "U": s.U(s.fouled.U_dirty),
            },
            do=f"Work on the {s.name(side)} alone: its flow, its velocity, its surface.",
        )


@rule(
    "maldistribution",
    title="Laminar flow in parallel branches",
    grades=("watch",),
    needs="a rated case",
    source=COMMON_PRACTICE,
    by_side=True,
)
def maldistribution(s: Subject, side: Side) -> Iterator[Finding]:
    n, share = _branches(s, side), s.regime_share(side, "laminar")
    if n == 1 or share == 0:
        return
    cooled = side == s.case.hot
    yield s.finding(
        "watch",
        says=f"The {s.name(side)} is split over {n} branches in laminar flow"
        + (
            ": a branch that cools more thickens, takes less flow and cools further, so that the flows may part."
            if cooled
            else ", where small differences between the branches shift their flows."
        ),
        because={"branches": str(n), "laminar share of the cells": percent(share)},
        do="Compare the outlet temperatures of the branches where they can be read.",
    )


@rule(
    "heat-loss",
    title=f"The heat loss is over {percent(HEAT_LOSS)} of the duty",
    grades=("watch",),
    needs="a rated case",
    source=OWN,
)
def heat_loss(s: Subject) -> Iterator[Finding]:
    loss, duty = float(s.case.exchanger.heat_loss), s.fouled.duty
    if abs(loss) > HEAT_LOSS * duty:
        yield s.finding(
            "watch",
            where="exchanger.heat_loss",
            says=f"The stated heat loss of {s.duty(loss)} is {percent(abs(loss) / duty)} of the duty: the two "
            "streams no longer exchange the same heat.",
            because={"heat loss": s.duty(loss), "duty": s.duty(duty)},
            do="Judge the duty by the inside stream, which the loss does not touch.",
        )
