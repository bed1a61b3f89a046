"""From a case to its rating: clean and fouled by the march, what is required against what is there, closed forms beside
it, and the frame of many points.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
import pandas as pd
from scipy.optimize import brentq

from engine import fluids
from engine.case import Case
from engine.closed_forms import correction, counter_lmtd, driving_force, mean_films, mean_flowing, mean_property_state
from engine.correlations import Array
from engine.exchangers import REGIMES, Film
from engine.exchangers.condenser import CondensingFilm
from engine.fluids import Fluid
from engine.points import Points, Texts, joined, points_of
from engine.refusals import over_pressure
from engine.solve import SETTLED, Solution, flowing_side, in_series, solve
from engine.stated import SIDES, Side, opposite
from engine.states import Chest, Profile, Rating, SideState, State, Zone
from engine.steam import Steam, steam_of

# --- the frame ------------------------------------------------------------------------------------------------------


def rate_points(case: Case, frame: pd.DataFrame) -> pd.DataFrame:
    """Rate each row of a frame in the fouled state; index and order kept.

    Columns by path in SI; what is absent comes from the case. Returned: duty [W], outlets [K], mtd [K], U [W/m²K],
    films [W/m²K], Re, drops [Pa] and `problem`, a sentence or empty; where steam condenses also `condensate` [kg/s] and
    `chest_p` [Pa absolute], and Re and drop of its side are NaN. A row with a problem has NaN figures and never spoils
    the others. Raises CaseError for an unknown column.
    """
    points, problem = points_of(case, frame)
    names = FIGURES if case.steam_side is None else (*FIGURES, *STEAM_FIGURES)
    found = tabulated(case, points, problem, names, figures_of)
    return found.set_index(frame.index)


def tabulated(
    case: Case,
    points: Points,
    problem: Texts,
    names: Sequence[str],
    columns: Callable[[Case, Solution], Mapping[str, Array]],
) -> pd.DataFrame:
    """Solve points and put the named columns of each solution in rows, beside `problem`, a sentence or empty.

    Points that have a problem from the start are not solved. A row with a problem has NaN figures.
    """
    figures = {name: np.full(len(points), np.nan) for name in names}
    problem = problem.copy()
    sound = np.flatnonzero(problem == "")
    for rows, solved in solve(case, points.part(sound)):
        at = sound[rows]
        unconverged = solved.residual > SETTLED
        problem[at] = np.where(
            (solved.problem == "") & unconverged, "the temperatures did not settle; no answer", solved.problem
        )
        for side in solved.flowing:
            # A single rating shows these figures under a finding that stops it; a row has only its sentence.
            dp, p_in = solved.drop(side), case.p_in(side)
            for i in np.flatnonzero((problem[at] == "") & (dp >= p_in)):
                problem[at[i]] = over_pressure(side, dp[i], p_in)
        good = problem[at] == ""
        values = columns(case, solved)
        for name in names:
            figures[name][at[good]] = values[name][good]
    return pd.DataFrame({**figures, "problem": problem.astype(str)})


FIGURES = (
    *("duty", "inside.T_out", "outside.T_out", "mtd", "U_clean", "U_dirty"),
    *(f"{side}.{name}" for name in ("h", "Re", "dp") for side in SIDES),
)
"""The columns of `figures_of`."""
STEAM_FIGURES = ("condensate", "chest_p")
"""Its columns beside them where steam condenses."""


def figures_of(case: Case, solved: Solution) -> dict[str, Array]:
    """What is said of many points, (P,) each, by column name."""
    R = solved.resistances
    mean = mean_films(case, solved)
    found: dict[str, Array] = {}
    dp = {side: solved.drop(side) for side in SIDES}
    if (condensed := solved.condensed) is not None:
        found = {"condensate": condensed.flow, "chest_p": condensed.steam.line.p(condensed.T_sat)}
        dp[condensed.steam.side] = np.full(len(solved.points), np.nan)
    return found | {
        "duty": solved.duty,
        "inside.T_out": solved.T_out["inside"],
        "outside.T_out": solved.T_out["outside"],
        "mtd": solved.duty / (solved.U * case.exchanger.area_at(solved.points.tubes_plugged)),
        "U_clean": solved.U_clean,
        "U_dirty": solved.U,
        "inside.h": case.exchanger.area_ratio / R["inside film"],
        "outside.h": 1.0 / R["outside film"],
        "inside.Re": mean["inside"].Re[:, 0],
        "outside.Re": mean["outside"].Re[:, 0],
        "inside.dp": dp["inside"],
        "outside.dp": dp["outside"],
    }


# --- one case -------------------------------------------------------------------------------------------------------


def rate(case: Case, *, fineness: int = 1) -> Rating:
    """Rate a case: clean and fouled by the march, and the fouled state by mean-property closed forms beside it."""
    point, problem = points_of(case)
    if problem[0]:
        return Rating(case=case, states={}, methods={}, problem=str(problem[0]))
    none = np.zeros(1)
    clean = replace(point, R_fouling={side: none for side in SIDES})
    both = joined([clean, point])
    [(_, solved)] = list(solve(case, both, fineness=fineness))
    trouble = next((text for text in solved.problem if text), "")
    if trouble:
        return Rating(case=case, states={}, methods={}, problem=str(trouble))
    states = {name: state_of(case, solved, i, name) for i, name in enumerate(("clean", "fouled"))}
    states, requirement = _with_requirement(case, states)
    states = _with_pressures(case, both, states, fineness)
    by_ntu = mean_property_state(case, point, "effectiveness_ntu", states["fouled"], fineness)
    near = states["fouled"] if isinstance(by_ntu, str) else by_ntu
    by_lmtd = mean_property_state(case, point, "lmtd", near, fineness)
    methods = {"march": states["fouled"], "effectiveness_ntu": by_ntu, "lmtd": by_lmtd}
    return Rating(case=case, states=states, methods=methods, requirement=requirement)


def state_of(case: Case, solved: Solution, i: int, name: str) -> State:
    """One solved point as a State."""
    exchanger = case.exchanger
    R = {key: float(value[i]) for key, value in solved.resistances.items()}
    area = float(exchanger.area_at(solved.points.tubes_plugged)[i])
    U, duty = float(solved.U[i]), float(solved.duty[i])
    mtd = duty / (U * area)
    T_in: dict[Side, Array] = {side: solved.points.T_in[side][i : i + 1] for side in SIDES}
    T_out: dict[Side, Array] = {side: solved.T_out[side][i : i + 1] for side in SIDES}
    if (condensed := solved.condensed) is not None:
        side = condensed.steam.side
        T_in[side] = T_out[side] = condensed.T_sat[i : i + 1]
    lmtd = counter_lmtd(case, T_in, T_out)
    mean = mean_films(case, solved)
    C = {side: duty / max(abs(float((T_out[side] - T_in[side])[0])), 1e-12) for side in SIDES}
    C_min = min(C.values())
    whole = exchanger.whole()
    surface: dict[Side, Array] = {side: solved.surface[side] @ solved.share for side in SIDES}
    flowing = mean_flowing(case, solved.points, solved.T_out, surface)
    sides: dict[Side, SideState] = {}
    one = solved.points.part(slice(i, i + 1))
    for side in SIDES:
        h = exchanger.area_ratio / R["inside film"] if side == "inside" else 1.0 / R["outside film"]
        surfaces = (float(solved.surface[side][i].min()), float(solved.surface[side][i].max()))
        if side not in flowing:
            sides[side] = _condensing_side(case, solved, i, h, surface[side], surfaces)
            continue
        film, fluid = solved.films[side], case.fluid(side)
        at = flowing_side(fluid, side, one, solved.mean[side][i : i + 1], solved.surface[side][i : i + 1])
        own = Film(
            **{k: getattr(film, k)[i : i + 1] for k in ("h", "Re", "Pr", "velocity", "regime")},
            relations=film.relations,
        )
        regimes = tuple(REGIMES[code] for code in np.unique(film.regime[i]))
        opinions = exchanger.second_opinions(side, whole, flowing[side])
        drops = exchanger.second_opinion_drops(side, whole, flowing[side])
        # As in the rating, a gas has its density at the mean pressure.
        left = 1.0 - 0.5 * float(solved.drop(side)[i]) / case.p_in(side) if fluid.phase == "gas" else 1.0
        sides[side] = SideState(
            flow=float(one.flow[side][0]),
            T_in=float(T_in[side][0]),
            T_out=float(T_out[side][0]),
            h=h,
            Re=float(mean[side].Re[i, 0]),
            Pr=float(mean[side].Pr[i, 0]),
            velocity=float(mean[side].velocity[i, 0]),
            regime=regimes[0] if len(regimes) == 1 else "mixed",
            drops={key: float(value[i]) for key, value in solved.drops[side].items()},
            R_fouling=float(solved.points.R_fouling[side][i]),
            relations=tuple(film.relations[code] for code in np.unique(film.regime[i])),
            excursions=exchanger.excursions(side, solved.cells, at, own),
            properties_in=_printed(fluid, float(T_in[side][0])),
            properties_out=_printed(fluid, float(T_out[side][0])),
            second_opinions={key: float(value[i]) for key, value in opinions.items()},
            surface_T=surfaces,
            second_opinion_drops={key: float(value[i]) / left for key, value in drops.items()},
        )
    return State(
        method="march",
        state=name,
        duty=duty,
        T_out={side: float(solved.T_out[side][i]) for side in SIDES},
        area=area,
        mtd=mtd,
        F=1.0 if case.steam_side else correction(mtd, lmtd),
        effectiveness=duty / (C_min * abs(float((T_in["inside"] - T_in["outside"])[0]))),
        NTU=U * area / C_min,
        U_clean=float(solved.U_clean[i]),
        U_dirty=U,
        resistances=R,
        sides=sides,
        profile=_profile(solved, i),
        chest=None if condensed is None else _chest_of(case, solved, i, area, duty),
        wall_R=R["wall"],
        surface_T={side: float(solved.surface[side][i] @ solved.share) for side in SIDES},
        converged=bool(solved.residual[i] <= SETTLED),
        iterations=int(solved.iterations[i]),
        residual=float(solved.residual[i]),
    )


def _condensing_side(
    case: Case, solved: Solution, i: int, h: float, T_surface: Array, surfaces: tuple[float, float]
) -> SideState:
    """The condensing side of one solved point; T_surface (P,) is the mean temperature of its surface."""
    condensed, points = solved.condensed, solved.points
    assert condensed is not None
    steam, side = condensed.steam, condensed.steam.side
    film = solved.films[side]
    assert isinstance(film, CondensingFilm)
    at = steam.at(condensed.T_sat, T_surface[:, None], condensed.flow, points.tubes_plugged, {})
    T_in = float(points.T_in[side][i]) + steam.superheat
    return SideState(
        flow=float(condensed.flow[i]),
        T_in=T_in,
        T_out=float(solved.T_out[side][i]),
        h=h,
        Re=np.nan,
        Pr=np.nan,
        velocity=np.nan,
        regime="condensing",
        drops={},
        R_fouling=float(points.R_fouling[side][i]),
        relations=film.relations_of(i),
        excursions=film.excursions_of(i),
        properties_in=_printed(fluids.saturation(case.p_in(side)).vapour, T_in),
        properties_out=_printed(case.fluid(side), float(solved.T_out[side][i])),
        second_opinions={key: float(value[i]) for key, value in steam.surface.second_opinions(at).items()},
        surface_T=surfaces,
    )


def _chest_of(case: Case, solved: Solution, i: int, area: float, duty: float) -> Chest:
    condensed, points = solved.condensed, solved.points
    assert condensed is not None
    steam, flow, side = condensed.steam, float(condensed.flow[i]), condensed.steam.side
    T_supply, T_sat = points.T_in[side], condensed.T_sat
    parts = {name: flow * float(heat[i]) for name, heat in steam.parts(T_supply, T_sat).items()}
    flooded = condensed.flooded
    share, below = (0.0, 0.0) if flooded is None else (float(flooded.share[i]), float(flooded.heat[i]))
    U = float(solved.U_local[i] @ solved.share)
    dry_area = (1 - share) * area
    # The steam's own loss to the surroundings is part of what it gives, not of what passes.
    zones = [
        Zone(name="desuperheating", duty=parts["desuperheating"]),
        Zone(
            name="condensing",
            duty=duty - below - parts["desuperheating"],
            area=dry_area,
            U=U,
            mtd=(duty - below) / (U * dry_area),
        ),
    ]
    if flooded is not None:
        zones.append(
            Zone(
                name="subcooling",
                duty=below,
                area=share * area,
                U=float(flooded.U[i]),
                mtd=float(flooded.mtd[i]),
            )
        )
    most = float(points.flow[side][i])
    above = float(parts["desuperheating"]) / flow / float(steam.line.vapour(T_sat[i]).cp)
    return Chest(
        side=side,
        p_supply=float(steam.line.p(T_supply[i])),
        p=float(steam.line.p(T_sat[i])),
        T_sat=float(T_sat[i]),
        flow=flow,
        flow_most=most if np.isfinite(most) else None,
        heat=float(steam.heat(T_supply, T_sat)[i]),
        zones=tuple(zone for zone in zones if abs(zone.duty) > 1e-6 * duty),
        T_vapour=float(T_sat[i]) + above,
        dry_surface=_dry_surface(case, solved, i, float(T_sat[i]) + above) if above > LEAST_SUPERHEAT else None,
    )


LEAST_SUPERHEAT = 1.0
"""Of vapour that enters a chest, for which it is asked whether the wall stays dry [K]."""


def _dry_surface(case: Case, solved: Solution, i: int, T_vapour: float) -> float:
    """Temperature of the surface beside the warmest cold fluid, touched by vapour that does not condense.

    Vapour flows as a gas, all of it: the film is that of the exchanger at the inlet.
    """
    condensed = solved.condensed
    assert condensed is not None
    steam, side = condensed.steam, condensed.steam.side
    one = solved.points.part(slice(i, i + 1))
    one = replace(one, flow={**one.flow, side: condensed.flow[i : i + 1]})
    vapour = fluids.saturation(case.p_in(side)).vapour
    T = np.array([[T_vapour]])
    h = float(steam.single_phase(case.exchanger.whole(), flowing_side(vapour, side, one, T, T))[0])
    cold = solved.mean[opposite(side)][i]
    warmest = int(np.argmax(cold))
    own = (case.exchanger.area_ratio if steam.surface.inside else 1.0) / h
    rest = float(1.0 / solved.U_local[i, warmest] - solved.r[f"{side} film"][i, warmest])
    return T_vapour - (T_vapour - float(cold[warmest])) * own / (own + rest)


def _printed(fluid: Fluid, T: float) -> dict[str, float]:
    at = fluid.at(np.asarray(T))
    return {name: float(getattr(at, name)) for name in ("rho", "cp", "mu", "k")}


def _profile(solved: Solution, i: int) -> Profile:
    whole = along(solved)
    regime: dict[Side, tuple[str, ...]] = {}
    for side in SIDES:
        codes = solved.films[side].regime[i]
        regime[side] = tuple(REGIMES[c] for c in (codes[0], *codes, codes[-1]))
    return Profile(
        x=whole.x,
        T={side: whole.T[side][i] for side in SIDES},
        wall_T={side: whole.wall_T[side][i] for side in SIDES},
        surface_T={side: whole.surface_T[side][i] for side in SIDES},
        regime=regime,
        heat_flux=np.abs(whole.heat_flux[i]),
    )


@dataclass(frozen=True, kw_only=True)
class Along:
    """The profiles of all points of a solution: x (n + 2,), the rest (P, n + 2); see `Profile`."""

    x: Array
    T: Mapping[Side, Array]
    wall_T: Mapping[Side, Array]
    surface_T: Mapping[Side, Array]
    heat_flux: Array
    """From the inside to the outside."""


def along(solved: Solution) -> Along:
    """Temperatures at both ends and in every cell of all points."""

    def ended(middle: Array, first: Array, last: Array) -> Array:
        return np.concatenate([first[:, None], middle, last[:, None]], axis=1)

    edges = np.concatenate([[0.0], np.cumsum(solved.share)])
    x = np.concatenate([[0.0], 0.5 * (edges[:-1] + edges[1:]), [1.0]])
    begin, end = solved.entry["outside"], solved.exit["outside"]
    if solved.cells.layout.chain == "counter":
        begin, end = end, begin
    T: dict[Side, Array] = {
        "inside": ended(solved.mean["inside"], solved.entry["inside"][:, 0], solved.exit["inside"][:, -1]),
        "outside": ended(solved.mean["outside"], begin[:, 0], end[:, -1]),
    }
    r = {name: ended(v, v[:, 0], v[:, -1]) for name, v in solved.r.items()}
    flux = (T["inside"] - T["outside"]) * in_series(r)
    surface: dict[Side, Array] = {
        "inside": T["inside"] - flux * r["inside film"],
        "outside": T["outside"] + flux * r["outside film"],
    }
    wall: dict[Side, Array] = {
        "inside": surface["inside"] - flux * r["inside fouling"],
        "outside": surface["outside"] + flux * r["outside fouling"],
    }
    return Along(x=x, T=T, wall_T=wall, surface_T=surface, heat_flux=flux)


def _with_requirement(case: Case, states: Mapping[str, State]) -> tuple[dict[str, State], str]:
    """The states with required duty, required U and margin, and why not where a stated outlet gives none."""
    wanted = {side: T for side in SIDES if (T := case.stream(side).T_out) is not None}
    if not wanted:
        return dict(states), ""
    duty = max(_wall_heat(case, side, float(T_out)) for side, T_out in wanted.items())
    steam, hot, cold = steam_of(case), case.hot, case.cold
    T_in: dict[Side, Array] = {side: np.array([case.T_in(side)]) for side in SIDES}
    T_out_required: dict[Side, Array] = {}
    for side in SIDES:
        if steam is not None and side == steam.side:
            T_in[side] = T_out_required[side] = np.array([steam.T_sat])
            if reason := _too_little(case, steam, duty):
                return dict(states), reason
            continue
        T = _outlet_for(case, side, duty)
        if T is None:
            return dict(states), f"the other stream cannot take up {duty / 1e3:.4g} kW within its usable temperatures"
        T_out_required[side] = np.array([T])
    if not (T_out_required[hot] > T_in[cold] and T_out_required[cold] < T_in[hot]):
        return dict(states), "the required outlets cross the other inlet: no area can give them"
    found = driving_force(case, T_in, T_out_required)
    if isinstance(found, str):
        return dict(states), found
    lmtd, F = (float(x[0]) for x in found)
    if not (np.isfinite(F) and F > 0 and np.isfinite(lmtd) and lmtd > 0):
        return dict(states), "the required outlets lie beyond what this arrangement can reach with any area"
    required = duty / (case.exchanger.area * F * lmtd)
    return {
        name: replace(state, U_required=required, margin=state.U_dirty / required - 1.0, required_duty=duty)
        for name, state in states.items()
    }, ""


def _lost(case: Case, side: Side) -> float:
    """Heat that a stream gives to the surroundings and not to the other [W]."""
    return float(case.exchanger.heat_loss) if side == "outside" else 0.0


def _wall_heat(case: Case, side: Side, T_out: float) -> float:
    """Heat through the wall with which a side leaves at T_out: what it takes up and loses, or gives up and keeps."""
    flow = case.flow(side)
    assert flow is not None
    gained = flow * _enthalpy_rise(case.fluid(side), case.T_in(side), T_out) + _lost(case, side)
    return gained if side == case.cold else -gained


def _too_little(case: Case, steam: Steam, duty: float) -> str:
    """Why the stated steam cannot give a duty; empty where it can."""
    flow, T = case.flow(steam.side), np.asarray(steam.T_sat)
    most = np.inf if flow is None else flow * float(steam.heat(T, T)) - steam.loss
    if duty <= most:
        return ""
    return f"the stated {flow:.4g} kg/s of steam give {most / 1e3:.4g} kW at most, and {duty / 1e3:.4g} kW are required"


def _enthalpy_rise(fluid: Fluid, T_in: float, T_out: float) -> float:
    h = fluid.enthalpy(np.array([T_in, T_out]))
    return float(h[1] - h[0])


def _outlet_for(case: Case, side: Side, duty: float) -> float | None:
    """Outlet of a side at which the duty has passed the wall, or None where it lies outside the fluid's usable span."""
    fluid, flow, T_in = case.fluid(side), case.flow(side), case.T_in(side)
    assert flow is not None
    gained = (duty if side == case.cold else -duty) - _lost(case, side)
    end = min(max(fluid.T_high if gained > 0 else fluid.T_low, 1.0), 5000.0)

    def over(T: float) -> float:
        return flow * _enthalpy_rise(fluid, T_in, T) - gained

    if over(end) * np.sign(gained) < 0:
        return None
    return float(brentq(over, *sorted((T_in, end)), xtol=1e-10)) if gained else T_in


def _with_pressures(case: Case, both: Points, states: Mapping[str, State], fineness: int) -> dict[str, State]:
    """The states with the chest pressure at which each would give just the required duty, and the duty at which its
    condensate would stall; as they are where no steam condenses or nothing is required."""
    steam, duty = steam_of(case), states["fouled"].required_duty
    if steam is None or duty is None:
        return dict(states)
    side, names = steam.side, list(states)

    def asked_for(T: float, duty_most: float) -> Points:
        P = len(both)
        flow = {**both.flow, side: np.full(P, np.inf)}
        return replace(both, flow=flow, chest_most=np.full(P, T), duty_most=np.full(P, duty_most))

    asked = [asked_for(steam.line.T_high, duty)]
    back = case.p_back(side)
    coldest = case.T_in(opposite(side)) + steam.subcooling
    T_back = None if back is None else float(steam.line.T(back))
    if T_back is not None and T_back > coldest:
        asked.append(asked_for(T_back, np.inf))
    [(_, solved)] = list(solve(case, joined(asked), fineness=fineness))
    condensed = solved.condensed
    assert condensed is not None
    found: dict[str, State] = {}
    for i, name in enumerate(names):
        chest = states[name].chest
        assert chest is not None
        problem = str(solved.problem[i])
        if not problem and solved.duty[i] < duty * (1 - 1e-4):
            problem = "no pressure of saturated steam gives the required duty"
        p = None if problem else float(steam.line.p(condensed.T_sat[i]))
        chest = replace(chest, p_required=p, p_required_problem=problem)
        at_back = len(names) + i
        if at_back < len(solved.points) and not solved.problem[at_back]:
            chest = replace(chest, stall_duty=float(solved.duty[at_back]))
        found[name] = replace(states[name], chest=chest)
    return found
