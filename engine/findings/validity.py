"""Whether the calculation may be believed: its answer, the limits of its relations, its properties, what it assumed."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from scipy.constants import g

from engine.case import ConstantFluid, TableFluid
from engine.findings import COMMON_PRACTICE, Finding, Missing, Subject, percent, rule, span
from engine.stated import SIDES, Choice, Count, Figure, Side, Stated
from engine.states import State

OWN = "this calculation"

DISAGREEMENT = 0.02
"""Of the duty between the march and a closed form."""
RICHARDSON = 0.3
"""Gr/Re² above which buoyancy changes a laminar film."""
UNIFORM_FLUX_CR = 0.8
"""Heat capacity ratio from which a counter-current profile is nearer to uniform flux than to uniform temperature."""
WIDE = 0.3
"""Of U, from its value to an end of the 95 % interval."""

STATE_IT = "State it where it is known."


@rule("no-answer", title="The physics leaves no answer", grades=("stop",), needs="nothing", source=OWN)
def no_answer(s: Subject) -> Iterator[Finding]:
    problem = s.rating.problem
    if not problem:
        return
    inlets = {f"{s.name(side)}, inlet": f"{s.T(s.case.T_in(side))} at {s.p(s.case.p_in(side))}" for side in SIDES}
    yield s.finding(
        "stop",
        where=next((side for side in SIDES if problem.startswith(side)), ""),
        says=f"The case cannot be rated: {problem}.",
        because=inlets,
        do="Change the figure that this sentence names, and rate again.",
    )


@rule(
    "not-converged",
    title="The temperatures did not settle",
    grades=("stop",),
    needs="a rated case",
    source=OWN,
)
def not_converged(s: Subject) -> Iterator[Finding]:
    span = abs(s.case.T_in("inside") - s.case.T_in("outside"))
    for name, state in s.states.items():
        if not state.converged:
            moved = s.show(state.residual * span, "temperature_difference", 2)
            yield s.finding(
                "stop",
                says=f"The temperatures of the {name} state still moved by {moved} after {state.iterations} rounds: "
                "its figures are no result.",
                because={
                    "largest change over the inlet difference": f"{state.residual:.1e}",
                    "rounds": str(state.iterations),
                },
                do="Look for a stated figure that is far from the others, such as a flow in another unit.",
            )


@rule(
    "outside-published-range",
    title="A relation is used outside its published range",
    grades=("act", "watch"),
    needs="a rated case",
    source="the relation's own source",
    by_side=True,
)
def outside_published_range(s: Subject, side: Side) -> Iterator[Finding]:
    excursions = {
        (e.correlation, e.limit.argument): e
        for name in ("clean", "fouled")
        for e in s.states[name].sides[side].excursions
    }
    for e in excursions.values():
        argument, published = e.limit.name, e.limit.span
        relation = e.correlation.replace("_", " ")
        low, high = (s.show(x, "dimensionless") for x in (e.lowest, e.highest))
        ends = low if low == high else f"{low} to {high}"
        yield s.finding(
            "act" if e.share > 0.5 else "watch",
            says=f"The {s.name(side)} runs at {argument} {ends}, outside the published {published} of the relation "
            f"{relation} in {percent(e.share)} of the cells.",
            because={argument: ends, "published": published, "share of the cells": percent(e.share)},
            do="Trust this film as far as the second opinions beside it agree, or calibrate it with a clean test.",
            source=str(e.source),
        )


@rule(
    "transitional-flow",
    title="Transitional flow",
    grades=("watch",),
    needs="a rated case",
    source="published forms of the transition: VDI Heat Atlas 2010, section G1, and Gnielinski 2013",
    by_side=True,
)
def transitional_flow(s: Subject, side: Side) -> Iterator[Finding]:
    share = s.regime_share(side, "transitional")
    if share == 0 or s.is_shell(side):
        return
    at = s.fouled.sides[side]
    because = {"share of the cells": percent(share), "mean Re": s.show(at.Re, "dimensionless")}
    spread = ""
    variant = at.second_opinions.get("transition_2013")
    if variant is not None:
        here, other = (s.U(h) for h in (at.h, variant))
        because |= {"film, this calculation": here, "film, the other published form": other}
        spread = f" Here they give {here} and {other}."
    yield s.finding(
        "watch",
        says=f"The {s.name(side)} flows between laminar and turbulent in {percent(share)} of the cells, where "
        f"published forms differ.{spread}",
        because=because,
        do="Read the interval of U rather than its value, and keep away from this flow in operation where there is a "
        "choice.",
    )


@rule(
    "mixed-convection",
    title=f"Buoyancy in laminar flow (Gr/Re² above {RICHARDSON:g})",
    grades=("watch",),
    needs="a rated case, and a density that changes with temperature",
    source=COMMON_PRACTICE,
    by_side=True,
)
def mixed_convection(s: Subject, side: Side) -> Iterator[Finding]:
    at, profile, fluid = s.fouled.sides[side], s.fouled.profile, s.fluid(side)
    if profile is None or s.regime_share(side, "laminar") == 0:
        return
    if s.is_shell(side):
        raise Missing("a criterion of buoyancy across a bank of tubes")
    if isinstance(s.case.stream(side).fluid, ConstantFluid):
        raise Missing(f"the expansion of {fluid.name}: its density is stated as constant")
    laminar = np.array([regime == "laminar" for regime in profile.regime[side]])
    T, T_wall = profile.T[side][laminar], profile.surface_T[side][laminar]
    mean = fluid.at(np.asarray((at.T_in + at.T_out) / 2))
    d = at.Re * float(mean.mu) / (float(mean.rho) * at.velocity)
    step = 0.5
    rho_low, rho, rho_high = (fluid.at(T + shift).rho for shift in (-step, 0.0, step))
    beta = -np.log(rho_high / rho_low) / (2 * step)
    v = at.velocity * mean.rho / rho
    # Gr/Re² = g β ΔT d/v², free of the viscosity.
    richardson = float(np.max(g * np.abs(beta * (T_wall - T)) * d / v**2))
    if richardson > RICHARDSON:
        yield s.finding(
            "watch",
            says=f"Gr/Re² reaches {richardson:.2g} in the laminar flow of the {s.name(side)}: buoyancy stirs it, and "
            "the true film may be well above the forced laminar one, or uneven over the section.",
            because={
                "Gr/Re²": f"{richardson:.2g}, against {RICHARDSON:g}",
                "wall against bulk, at most": s.dT(float(np.abs(T_wall - T).max())),
                "velocity": s.velocity(at.velocity),
                "hydraulic diameter": s.show(d, "length", 3),
            },
            do="Take the laminar film as the careful side: no gain from buoyancy is credited.",
        )


@rule(
    "near-uniform-flux",
    title=f"Laminar counter-current flow with a heat capacity ratio above {UNIFORM_FLUX_CR:g}",
    grades=("note",),
    needs="a rated case",
    source="limits of the fully developed laminar Nusselt number, 3.66 at uniform wall temperature and 4.36 at "
    "uniform flux",
)
def near_uniform_flux(s: Subject) -> Iterator[Finding]:
    share = s.regime_share("inside", "laminar")
    counter = s.case.exchanger.arrangement == "counter" and getattr(s.case.exchanger, "tube_passes", 1) == 1
    C = capacities(s.fouled)
    Cr = min(C.values()) / max(C.values())
    if counter and share > 0 and Cr > UNIFORM_FLUX_CR:
        yield s.finding(
            "note",
            where="inside",
            says=f"With a heat capacity ratio of {Cr:.2f} the {s.name('inside')} is heated or cooled almost uniformly "
            "along its length, while its laminar film is that of a uniform wall temperature: far from the entrance it "
            "is up to 16 % low (3.66 against 4.36).",
            because={"heat capacity ratio": f"{Cr:.2f}", "laminar share of the cells": percent(share)},
            do="Take the laminar film as the careful side.",
        )


def capacities(state: State) -> dict[Side, float]:
    """flow·cp of each side [W/K], as the rating's own duty and temperatures give it; boundless where it condenses."""
    return {
        side: np.inf if at.regime == "condensing" else state.duty / max(abs(at.T_out - at.T_in), 1e-12)
        for side, at in state.sides.items()
    }


@rule(
    "gas-wall-factor",
    title="No wall correction of a gas film",
    grades=("note",),
    needs="a rated case",
    source="Gnielinski, V., in: VDI Heat Atlas, section G1 (printed page not checked)",
    by_side=True,
)
def gas_wall_factor(s: Subject, side: Side) -> Iterator[Finding]:
    if s.phase(side) != "gas":
        return
    laminar, cooled = s.regime_share(side, "laminar") > 0, side == s.case.hot
    if not (laminar or cooled):
        return
    low, high = s.extremes("surface_T", side)
    yield s.finding(
        "note",
        says=f"The gas in the {s.name(side)} {'is cooled' if cooled else 'flows laminar'}: its film carries no "
        "correction for the temperature of the wall.",
        because={"surface": span(s.T, low, high), "inlet": s.T(s.case.T_in(side))},
        do="Nothing, unless wall and gas are hundreds of kelvin apart.",
    )


@rule(
    "methods-disagree",
    title=f"March and closed form differ by over {percent(DISAGREEMENT)} in duty",
    grades=("watch",),
    needs="a rated case, and a closed form of its arrangement",
    source=OWN,
)
def methods_disagree(s: Subject) -> Iterator[Finding]:
    march = s.fouled
    closed = [m for name, m in s.rating.methods.items() if name != "march" and isinstance(m, State)]
    if not closed:
        reasons = dict.fromkeys(str(m) for name, m in s.rating.methods.items() if name != "march")
        raise Missing(f"a closed form: {'; '.join(reasons)}")
    other = max(closed, key=lambda state: abs(np.log(state.duty / march.duty)))
    off = other.duty / march.duty - 1
    if abs(off) <= DISAGREEMENT:
        return
    off_U, off_mtd = other.U_dirty / march.U_dirty - 1, other.mtd / march.mtd - 1
    yield s.finding(
        "watch",
        says=f"With one mean U the duty is {percent(abs(off))} {'higher' if off > 0 else 'lower'} than cell by cell: "
        f"{_why(s, abs(off_U) > abs(off_mtd))}.",
        because={
            "duty, cell by cell": s.duty(march.duty),
            "duty, one mean U": s.duty(other.duty),
            "U of the closed form": f"{100 * off_U:+.1f} %",
            "mean temperature difference of the closed form": f"{100 * off_mtd:+.1f} %",
        },
        do="Use the march: a single U and one mean temperature difference do not describe this exchanger.",
    )


def _why(s: Subject, U_differs: bool) -> str:
    """What lets one mean U and the cells part, as half a sentence."""
    profile = s.fouled.profile
    assert profile is not None
    factor: dict[Side, float] = {}
    for side in SIDES:
        mu = s.fluid(side).at(profile.T[side]).mu
        factor[side] = float(mu.max() / mu.min())
    side = max(SIDES, key=lambda each: factor[each])
    reasons = [f"the viscosity in the {s.name(side)} changes by a factor of {factor[side]:.3g} along the way"]
    for each in SIDES:
        if len(set(profile.regime[each])) > 1:
            reasons.append(f"the flow in the {s.name(each)} changes its regime")
        elif s.regime_share(each, "transitional") == 1:
            reasons.append(f"the flow in the {s.name(each)} is transitional, where the film follows Re steeply")
    if not U_differs:
        reasons.append("U or the heat capacity differs so much between the ends that one LMTD with F misleads")
    return ", and ".join(reasons)


@rule(
    "table-exceeded",
    title="Temperatures beyond a typed property table",
    grades=("act", "watch"),
    needs="a rated case",
    source=OWN,
    by_side=True,
)
def table_exceeded(s: Subject, side: Side) -> Iterator[Finding]:
    stated, fluid = s.case.stream(side).fluid, s.fluid(side)
    if not isinstance(stated, TableFluid):
        return
    rows = [float(row.T) for row in stated.table]
    bulk, wall = s.extremes("T", side), s.extremes("surface_T", side)
    for sign, end, usable, last in ((-1, 0, fluid.T_low, min(rows)), (1, 1, fluid.T_high, max(rows))):
        reached = sign * max(sign * bulk[end], sign * wall[end])
        if sign * (reached - last) <= 0:
            continue
        kept = sign * (reached - usable) > 0
        where = "in the bulk" if sign * (bulk[end] - last) > 0 else "at the wall"
        typed, edge = s.T(last), s.T(usable)
        how = (
            f"the wall takes the properties at {edge}, the furthest that the table may be stretched"
            if kept
            else "the table's end interval is continued"
        )
        yield s.finding(
            "act" if kept else "watch",
            where=f"{side}.fluid.table",
            says=f"{stated.name} in the {s.name(side)} reaches {s.T(reached)} {where}, and its typed table "
            f"ends at {typed}: {how}.",
            because={
                "bulk": span(s.T, *bulk),
                "wall": span(s.T, *wall),
                "end of the table": typed,
            },
            do=f"Add a row at {s.T(reached)} or {'below' if sign < 0 else 'above'}.",
        )


@rule(
    "property-note",
    title="What to know about the properties",
    grades=("note",),
    needs="nothing",
    source="the fluid's own property source",
    by_side=True,
)
def property_note(s: Subject, side: Side) -> Iterator[Finding]:
    fluid = s.fluid(side)
    notes = fluid.notes
    if isinstance(s.case.stream(side).fluid, ConstantFluid):
        notes = (
            *notes,
            f"the properties of {fluid.name} are the same at every temperature, so its wall has no influence",
        )
    for note in notes:
        yield s.finding(
            "note",
            where=f"{side}.fluid",
            says=f"{note[0].upper()}{note[1:]}.",
            because={"properties": fluid.origin, "inlet": s.T(s.case.T_in(side))},
            do="Check that this suits the temperatures of the case.",
            source=fluid.origin,
        )


@rule("assumed", title="A figure is assumed", grades=("note",), needs="nothing", source=OWN)
def assumed(s: Subject) -> Iterator[Finding]:
    for path, stated, declared, value in s.case.leaves():
        if stated or not getattr(declared, "assumed", "") or path in s.case.idle_fields:
            continue
        assert isinstance(declared, (Stated, Count, Choice))
        shown = s.show(value, declared.quantities[0]) if isinstance(declared, Stated) and value is not None else value
        taken = f"{declared.name.lower()} {shown}" if value is not None else declared.name.lower()
        yield s.finding(
            "note",
            where=path,
            says=f"Not stated, so taken: {taken} ({declared.assumed}).",
            because={} if value is None else {declared.name: str(shown)},
            do=STATE_IT,
            source=declared.assumed,
        )
    exchanger = s.case.exchanger
    for derived in exchanger.derived():
        if derived.size or derived.path in exchanger.model_fields_set:
            continue
        title = type(exchanger).declared()[derived.path].name
        shown = s.show(derived.value, derived.quantity) if derived.quantity else f"{derived.value:.0f}"
        yield s.finding(
            "note",
            where=f"exchanger.{derived.path}",
            says=f"Not stated, so taken: {title.lower()} {shown}.",
            because={title: shown},
            do=STATE_IT,
            source=str(derived.source),
        )


@rule(
    "doubt-not-stated",
    title="Flows or temperatures without their ±",
    grades=("note",),
    needs="nothing",
    source=OWN,
)
def doubt_not_stated(s: Subject) -> Iterator[Finding]:
    stated = {f"{side}.{name}": getattr(s.case.stream(side), name) for side in SIDES for name in ("flow", "T_in")}
    bare = [path for path, figure in stated.items() if figure is not None and not getattr(figure, "sd", None)]
    if bare:
        yield s.finding(
            "note",
            says=f"No ± is stated for {', '.join(bare)}: the intervals hold them for exact.",
            because={path: _typed(s, path, stated[path]) for path in bare},
            do='State one standard deviation behind the figure, such as "42 m3/h ± 3 %".',
        )


def _typed(s: Subject, path: str, figure: float) -> str:
    """A figure as it was typed, else as it is shown."""
    if isinstance(figure, Figure) and figure.text:
        return figure.text
    return s.show(figure, "temperature" if path.endswith("T_in") else "mass_flow")


@rule(
    "doubt-not-propagated",
    title="A doubt that could not be propagated",
    grades=("watch",),
    needs="a rated case, and its intervals",
    source=OWN,
)
def doubt_not_propagated(s: Subject) -> Iterator[Finding]:
    for state in s.states:
        _need_intervals(s)
        lost = s.intervals[state].not_propagated
        if lost:
            yield s.finding(
                "watch",
                says=f"The intervals of the {state} state leave out {', '.join(lost)}: one standard deviation away "
                "the case has no answer.",
                because={f"doubts left out, {state}": str(len(lost))},
                do="Read the intervals as too narrow: the case stands near a limit of its fluids.",
            )


def _need_intervals(s: Subject) -> None:
    if not s.intervals:
        raise Missing("the intervals: they were not propagated")


@rule(
    "wide-interval",
    title=f"The 95 % interval of U is wider than ± {percent(WIDE)}",
    grades=("watch",),
    needs="a rated case, and its intervals",
    source=OWN,
)
def wide_interval(s: Subject) -> Iterator[Finding]:
    U = s.fouled.U_dirty
    _need_intervals(s)
    low, high = s.intervals["fouled"].of["U_dirty"]
    if max(high / U - 1, 1 - low / U) <= WIDE:
        return
    largest = s.intervals["fouled"].contributors[:3]
    yield s.finding(
        "watch",
        says=f"U of the fouled state lies from {span(s.U, low, high)} at 95 %; the largest part of "
        f"it comes from the {largest[0].doubt.name}.",
        because={
            "U": s.U(U),
            **{f"share of the doubt in duty, {c.doubt.name}": percent(c.share) for c in largest},
        },
        do=f"{largest[0].doubt.shrink[0].upper()}{largest[0].doubt.shrink[1:]}.",
    )
