"""Ratings at mean properties by closed forms, ε-NTU and LMTD with F: what stands beside the march."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from scipy.optimize import brentq

from engine import effectiveness as exact
from engine.case import Case
from engine.correlations import Array
from engine.exchangers import Film, Flowing
from engine.points import Points
from engine.solve import Solution, film_spread, flowing_side, in_series, resistances
from engine.stated import SIDES, Side, opposite
from engine.states import State
from engine.steam import steam_of


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


def counter_lmtd(case: Case, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> float:
    """LMTD at the terminal temperatures: counter-current, for a co-current double pipe its own."""
    cocurrent = getattr(case.exchanger, "arrangement", "counter") == "co-current"
    inside_ends = (T_in["inside"], T_out["inside"])
    outside_ends = (T_in["outside"], T_out["outside"]) if cocurrent else (T_out["outside"], T_in["outside"])
    ends = [np.abs(a - b) for a, b in zip(inside_ends, outside_ends, strict=True)]
    return float(exact.log_mean(ends[0], ends[1])[0])


def correction(mtd: float, lmtd: float) -> float:
    """F; 1 where the fluids have met within the digits, so that no end difference is left to compare with."""
    return mtd / lmtd if lmtd > 0 else 1.0


def driving_force(case: Case, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> tuple[Array, Array] | str:
    """LMTD and F at terminal temperatures; beside condensing steam F is 1 in any arrangement."""
    steam = case.steam_side
    if steam is None:
        return case.exchanger.driving_force(T_in, T_out)
    cold = opposite(steam)
    ends = [np.maximum(T_in[steam] - T, 0.0) for T in (T_in[cold], T_out[cold])]
    return exact.log_mean(*ends), np.ones_like(ends[0])


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
        F=1.0 if steam else correction(mtd, counter_lmtd(case, T_in, T_out)),
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
        found = driving_force(case, T_in, T_out)
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
