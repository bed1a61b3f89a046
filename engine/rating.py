"""From a case to its rating: clean and fouled by the march, closed forms at mean properties beside it, the frame of
many points.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace

import numpy as np
import pandas as pd
from scipy.optimize import brentq

from engine import effectiveness as exact
from engine import fluids
from engine.case import Case
from engine.correlations import Array, Correlation, Excursion
from engine.exchangers import REGIMES, Film, Flowing
from engine.exchangers.condenser import CondensingFilm
from engine.fluids import Fluid
from engine.points import (
    SETTLED,
    Points,
    Solution,
    Texts,
    film_spread,
    flowing_side,
    in_series,
    joined,
    points_of,
    resistances,
    solve,
)
from engine.stated import SIDES, Side, opposite
from engine.steam import Steam, steam_of


@dataclass(frozen=True, kw_only=True)
class Profile:
    """Temperatures along the exchanger of one point; x is the area fraction from the inside inlet on, both ends and
    the cell centres; of the rest of the area where part of it is flooded by condensate. Wall temperatures are those of
    the metal's two faces; `surface` those the fluids touch."""

    x: Array
    T: Mapping[Side, Array]
    wall_T: Mapping[Side, Array]
    surface_T: Mapping[Side, Array]
    regime: Mapping[Side, tuple[str, ...]]
    heat_flux: Array
    """On the outside bare area, hot to cold [W/m²]."""


@dataclass(frozen=True, kw_only=True)
class SideState:
    """One side of a solved state. Re, Pr, velocity and drop of condensing steam are not rated: NaN here, null in the
    result file."""

    flow: float
    """Of the whole stream [kg/s]; of condensing steam what condenses."""
    T_in: float
    T_out: float
    h: float
    Re: float
    Pr: float
    velocity: float
    regime: str
    drops: Mapping[str, float]
    R_fouling: float
    relations: tuple[Correlation, ...]
    excursions: tuple[Excursion, ...]
    properties_in: Mapping[str, float]
    properties_out: Mapping[str, float]
    second_opinions: Mapping[str, float]
    surface_T: tuple[float, float]
    """Lowest and highest temperature of the surface that the fluid touches [K]."""
    second_opinion_drops: Mapping[str, float] = field(default_factory=dict)
    """By other published relations and coefficients, by name [Pa]."""

    @property
    def dp(self) -> float:
        return sum(self.drops.values()) if self.drops else np.nan


@dataclass(frozen=True, kw_only=True)
class Zone:
    """Part of what condensing steam gives. Desuperheating has no area of its own: it condenses on the wet wall."""

    name: str
    """desuperheating, condensing or subcooling."""
    duty: float
    area: float | None = None
    U: float | None = None
    mtd: float | None = None


@dataclass(frozen=True, kw_only=True)
class Chest:
    """The condensing side of one state. Pressures are absolute."""

    side: Side
    p_supply: float
    p: float
    """At which the chest settles: as supplied, or lower where less steam comes than the area would condense."""
    T_sat: float
    flow: float
    """What condenses [kg/s]."""
    flow_most: float | None
    """What comes at most, where it is stated."""
    heat: float
    """What a kilogram gives [J/kg]."""
    zones: tuple[Zone, ...]
    T_vapour: float
    """At which vapour enters the chest, let down to its pressure [K]."""
    dry_surface: float | None
    """Temperature of the hottest surface if vapour touched it dry; None where the vapour is saturated [K]."""
    p_required: float | None = None
    """At which the area would give just the required duty."""
    p_required_problem: str = ""
    """Why there is no such pressure, where a duty is required."""
    stall_duty: float | None = None
    """With the chest at the stated back pressure: at any smaller duty condensate no longer drains."""

    @property
    def throttled(self) -> bool:
        return self.p < self.p_supply * (1 - 1e-6)


@dataclass(frozen=True, kw_only=True)
class State:
    """One state of the exchanger by one method."""

    method: str
    state: str
    duty: float
    T_out: Mapping[Side, float]
    area: float
    mtd: float
    F: float
    effectiveness: float
    NTU: float
    U_clean: float
    U_dirty: float
    resistances: Mapping[str, float]
    """Outside film, outside fouling, wall, inside fouling, inside film [m²K/W] on the outside bare area."""
    U_required: float | None = None
    margin: float | None = None
    required_duty: float | None = None
    sides: Mapping[Side, SideState] = field(default_factory=dict)
    profile: Profile | None = None
    chest: Chest | None = None
    """Where steam condenses."""
    wall_R: float = 0.0
    surface_T: Mapping[Side, float] = field(default_factory=dict)
    """Mean temperature of the surface that each fluid touches [K]."""
    converged: bool = True
    iterations: int = 0
    residual: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Rating:
    """A rated case: both states by the march, the fouled state by every method, or the reason why there is none."""

    case: Case
    states: Mapping[str, State]
    methods: Mapping[str, State | str]
    problem: str = ""
    """A sentence when the physics leaves no answer, such as a liquid that boils at the wall."""
    requirement: str = ""
    """Why a stated outlet gives no required U, when it does not."""

    @property
    def fouled(self) -> State:
        return self.states["fouled"]

    @property
    def clean(self) -> State:
        return self.states["clean"]


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


def mean_flowing(
    case: Case, points: Points, T_out: Mapping[Side, Array], surface: Mapping[Side, Array]
) -> dict[Side, Flowing]:
    """Each side at the mean of its inlet and outlet, as one cell; without a condensing one."""
    return {
        side: flowing_side(
            case.fluid(side),
            side,
            points,
            0.5 * (points.T_in[side] + T_out[side])[:, None],
            surface[side][:, None],
        )
        for side in SIDES
        if side != case.steam_side
    }


def mean_films(case: Case, solved: Solution) -> dict[Side, Film]:
    """The films at the mean of inlet and outlet; a condensing one as it is, (P, n)."""
    surface: dict[Side, Array] = {side: solved.surface[side] @ solved.share for side in SIDES}
    flowing = mean_flowing(case, solved.points, solved.T_out, surface)
    whole = case.exchanger.whole()
    return {
        side: case.exchanger.film(side, whole, flowing[side]) if side in flowing else solved.films[side]
        for side in SIDES
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
        F=_correction(mtd, lmtd),
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


def counter_lmtd(case: Case, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> float:
    """LMTD at the terminal temperatures: counter-current, for a co-current double pipe its own."""
    cocurrent = getattr(case.exchanger, "arrangement", "counter") == "co-current"
    inside_ends = (T_in["inside"], T_out["inside"])
    outside_ends = (T_in["outside"], T_out["outside"]) if cocurrent else (T_out["outside"], T_in["outside"])
    ends = [np.abs(a - b) for a, b in zip(inside_ends, outside_ends, strict=True)]
    return float(exact.log_mean(ends[0], ends[1])[0])


def _correction(mtd: float, lmtd: float) -> float:
    """F; 1 where the fluids have met within the digits, so that no end difference is left to compare with."""
    return mtd / lmtd if lmtd > 0 else 1.0


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
    found = _driving_force(case, T_in, T_out_required)
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


def _driving_force(case: Case, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> tuple[Array, Array] | str:
    """LMTD and F at terminal temperatures; beside condensing steam F is 1 in any arrangement."""
    steam = case.steam_side
    if steam is None:
        return case.exchanger.driving_force(T_in, T_out)
    cold = opposite(steam)
    ends = [np.maximum(T_in[steam] - T, 0.0) for T in (T_in[cold], T_out[cold])]
    return exact.log_mean(*ends), np.ones_like(ends[0])


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


# --- closed forms beside the march ------------------------------------------------------------------------------------


def mean_property_state(case: Case, point: Points, method: str, start: State, fineness: int = 1) -> State | str:
    """The fouled state with properties, films and U at mean temperatures, by ε-NTU or by LMTD and F.

    Returns the reason instead where the arrangement has no such relation. `start` only gives the first guess.
    """
    exchanger, steam, chest = case.exchanger, steam_of(case), start.chest
    if method == "lmtd" and steam is None and exchanger.F_through_effectiveness:
        return "F of this arrangement is only known through its ε, so it would be no second way beside it"
    T_out: dict[Side, Array] = {side: np.array([start.T_out[side]]) for side in SIDES}
    surface: dict[Side, Array] = {side: np.array([start.surface_T[side]]) for side in SIDES}
    whole = exchanger.whole(fineness)
    T_in = dict(point.T_in)
    flow = np.zeros(1)
    if steam is not None and chest is not None:
        if steam.subcooling:
            return "the area that condensate floods is not part of the closed forms"
        T_in[steam.side] = T_out[steam.side] = np.array([chest.T_sat])
        flow = np.array([chest.flow])
    span = abs(float((T_in["inside"] - T_in["outside"])[0]))
    own = {side: case.fluid(side) for side in SIDES}
    count = 0
    while (count := count + 1) < 200:
        flowing = mean_flowing(case, point, T_out, surface)
        films = {side: exchanger.film(side, whole, flowing[side]) for side in flowing}
        if steam is not None:
            at = steam.at(T_in[steam.side], surface[steam.side][:, None], flow, point.tubes_plugged, {})
            films[steam.side] = steam.surface.film(at)
        T_metal = 0.5 * (surface["inside"] + surface["outside"])[:, None]
        local = resistances(case, point, films, T_metal)
        spread = film_spread(case, whole, flowing, {side: films[side].h for side in SIDES}, local)
        local = resistances(case, point, films, T_metal, spread)
        # The entrance makes U differ along a leg; its area mean is the U of every method.
        share, U_local = whole.layout.area_share, in_series(local)
        U = float((U_local @ share)[0])
        R = {name: float(((U_local * r) @ share)[0]) / U for name, r in local.items()}
        C = dict.fromkeys(SIDES, np.inf)
        for side in flowing:
            C[side] = float((point.flow[side] * own[side].mean_cp(T_in[side], T_out[side]))[0])
        C_min, C_max = min(C.values()), max(C.values())
        inside_is_min = C["inside"] <= C["outside"]
        if exchanger.heat_loss and (steam is None or steam.side == "inside"):
            return "the stated heat loss is not part of the closed forms"
        NTU = U * exchanger.area / C_min
        if method == "effectiveness_ntu":
            found = (
                exchanger.effectiveness(np.array([NTU]), np.array([C_min / C_max]), np.array([inside_is_min]))
                if steam is None
                else exact.effectiveness_counter(np.array([NTU]), 0.0)
            )
            if isinstance(found, str):
                return found
            duty = float(found[0]) * C_min * span
        else:
            answer = _lmtd_duty(case, T_in, C, U)
            if isinstance(answer, str):
                return answer
            duty = answer
        hot = case.hot
        if steam is not None:
            flow = (duty + steam.loss) / steam.heat(point.T_in[steam.side], T_in[steam.side])
        new = {side: T_in[side] + (-duty if side == hot else duty) / C[side] for side in SIDES}
        mean = {side: 0.5 * (T_in[side] + new[side]) for side in SIDES}
        # The mean temperatures of a side lie off the profile's; the flux between films is duty over area.
        flux = (duty if hot == "inside" else -duty) / exchanger.area
        new_surface: dict[Side, Array] = {
            "inside": mean["inside"] - flux * R["inside film"],
            "outside": mean["outside"] + flux * R["outside film"],
        }
        change = max(float(np.abs(new[side] - T_out[side])[0]) for side in SIDES)
        change = max(change, *(float(np.abs(new_surface[side] - surface[side])[0]) for side in SIDES))
        T_out, surface = new, new_surface
        if change < 1e-9 * span:
            break
    else:
        return "its fixed point did not settle"
    mtd = duty / (U * exchanger.area)
    return State(
        method=method,
        state="fouled",
        duty=duty,
        T_out={side: float(T_out[side][0]) for side in SIDES},
        area=exchanger.area,
        mtd=mtd,
        F=_correction(mtd, counter_lmtd(case, T_in, T_out)),
        effectiveness=duty / (C_min * span),
        NTU=NTU,
        U_clean=1.0 / (1.0 / U - R["outside fouling"] - R["inside fouling"]),
        U_dirty=U,
        resistances=R,
        wall_R=R["wall"],
        surface_T={side: float(surface[side][0]) for side in SIDES},
        chest=chest,
        iterations=count,
        residual=change / span,
    )


def _lmtd_duty(case: Case, T_in: Mapping[Side, Array], C: Mapping[Side, float], U: float) -> float | str:
    """The duty at which U·area·F·LMTD equals it, found without any ε relation."""
    hot = case.hot
    span = abs(float((T_in["inside"] - T_in["outside"])[0]))
    most = min(C.values()) * span
    reason = ""

    def excess(share: float) -> float:
        nonlocal reason
        duty = share * most
        T_out = {side: T_in[side] + (-duty if side == hot else duty) / C[side] for side in SIDES}
        found = _driving_force(case, T_in, T_out)
        if isinstance(found, str):
            reason = found
            return 0.0
        lmtd, F = (float(x[0]) for x in found)
        return float(U * case.exchanger.area * max(np.nan_to_num(F) * lmtd, 0.0) - duty)

    low, high = 1e-12, 1 - 1e-12
    if excess(low) <= 0 or reason:
        return reason or "no driving force"
    if excess(high) >= 0:
        return high * most
    return float(brentq(excess, low, high, xtol=1e-15, rtol=1e-14)) * most
