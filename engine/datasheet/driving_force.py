"""Group B: temperatures, mean temperature difference, effectiveness."""

from __future__ import annotations

import math

from engine import effectiveness as exact
from engine.datasheet import Line, Remark, check, within
from engine.datasheet.figures import (
    Figures,
    Impossible,
    Missing,
    changes_phase,
    mass_flow,
    sides,
    specific_heat,
    surface,
)
from engine.exchangers.double_pipe import DoublePipe
from engine.stated import SIDES, Side

FLAT = 0.5
"""A change of temperature below which a side that changes its phase is isothermal [K]."""
F_USUAL, F_LEAST = 0.80, 0.75
ON_THE_CLIFF = 0.9
VARIES = 0.25


def _temperatures(v: Figures) -> tuple[float, float, float, float]:
    """Hot in, hot out, cold in, cold out [K]."""
    hot, cold = sides(v)
    hot_in, hot_out, cold_in, cold_out = (float(v[f"{s}.{end}"]) for s in (hot, cold) for end in ("T_in", "T_out"))
    return hot_in, hot_out, cold_in, cold_out


def _one_zone(v: Figures) -> None:
    """Missing where one mean temperature difference cannot hold for the whole."""
    for side in SIDES:
        if changes_phase(v, side) and abs(float(v[f"{side}.T_out"] - v[f"{side}.T_in"])) > FLAT:
            raise Missing(f"one zone; the {v.subject.side_name(side)} changes its phase over a range")


def _cocurrent(v: Figures) -> bool:
    """Missing where nothing says which way the fluids run."""
    stated = v.get("arrangement")
    if stated is None and (v.subject.double_pipe or ("tube_passes" not in v and "tema" not in v)):
        raise Missing("arrangement")
    return stated == "co-current" and (v.subject.double_pipe or v.get("tube_passes") == 1)


def log_mean_difference(v: Figures) -> float:
    """Counter-current at the terminal temperatures, its own for a co-current exchanger [K]."""
    hot_in, hot_out, cold_in, cold_out = _temperatures(v)
    ends = (hot_in - cold_in, hot_out - cold_out) if _cocurrent(v) else (hot_in - cold_out, hot_out - cold_in)
    if min(ends) <= 0:
        raise Impossible("temperature differences above zero at both ends")
    return float(exact.log_mean(*ends))


def _shells(v: Figures) -> int:
    """Shells in series of the 1-2 kind that the exchanger equals; 0 where it is pure counter- or co-current flow.

    Four and more passes differ from two by less than a chart is read. Missing where no closed relation holds.
    """
    if v.subject.double_pipe:
        case = v.subject.case
        if case is not None and isinstance(case.exchanger, DoublePipe):
            split = {case.exchanger.branches(side) for side in SIDES}
            if len(split) > 1:
                raise Missing("one F; one fluid is split over banks that the other visits in turn")
        return 0
    letter = str(v["tema"])[1:2].upper()
    passes, n = int(v["tube_passes"]), int(v.get("shells_in_series") or 1)
    if (letter == "E" and passes == 1) or (letter == "F" and passes == 2):
        return 0
    if letter == "E" and passes % 2 == 0:
        return n
    if letter == "F" and passes % 4 == 0:
        return 2 * n
    raise Missing(f"a closed relation for a {letter or 'nameless'} shell with {passes} tube passes")


def _ratios(v: Figures) -> tuple[float, float]:
    P, R = exact.terminal_ratios(*_temperatures(v))
    return float(P), float(R)


def factor(v: Figures, shells: int | None = None) -> float:
    """F at the printed temperatures, or with another number of shells; 0 where no area reaches them."""
    log_mean_difference(v)
    own = _shells(v)
    return float(exact.correction_factor(*_ratios(v), shells or own)) if own else 1.0


# --- the second law ---------------------------------------------------------------------------------------------------


@check(
    "B1",
    title="Second law",
    grade="stop",
    needs="both inlets and the outlet of a side",
    source="second law: an outlet lies between the two inlets",
    ask="An outlet of {sheet} on the {where} side lies beyond the other inlet or on the wrong side of its own "
    "({recomputed}). Are the columns swapped, or is a temperature misprinted?",
    over=("hot", "cold"),
    closes=True,
)
def second_law(v: Figures, where: str) -> Line:
    side = sides(v)[0 if where == "hot" else 1]
    low, high = sorted(float(v[f"{s}.T_in"]) for s in SIDES)
    return within(float(v[f"{side}.T_out"]), "temperature", low=low, high=high, of=f"{side}.T_out", impossible=True)


# --- mean temperature difference --------------------------------------------------------------------------------------


@check(
    "B2",
    title="LMTD",
    grade="stop",
    needs="four temperatures, and the printed LMTD or MTD and F",
    source="logarithmic mean of the end differences; 1 % or 0.3 K, whichever is more",
    ask="The four temperatures give an LMTD of {recomputed}, the sheet means {sheet}. Which temperature or which mean "
    "belongs to an earlier revision?",
    share=0.01,
    absolute=0.3,
    bears="mtd",
    closes=True,
)
def lmtd(v: Figures, _: str) -> Line:
    if "lmtd" in v:
        stated, of = float(v["lmtd"]), "lmtd"
    else:
        _one_zone(v)
        stated, of = float(v["mtd"]) / float(v["F"]), ""
    return Line(
        sheet=stated, recomputed=log_mean_difference(v), quantity="temperature_difference", of=of, name="MTD over F"
    )


@check(
    "B3",
    title="F and corrected MTD",
    grade="stop",
    needs="four temperatures, type letters, tube passes, shells in series, and the printed F or MTD",
    source="Bowman, Mueller, Nagle, Trans. ASME 62 (1940) 283, exact for shells in series with even passes; 2 %, as a "
    "chart is read to 0.01 or 0.02",
    ask="For this arrangement and these temperatures we find {recomputed} where the sheet prints {sheet}. For how many "
    "shells in series was F taken, and is the printed mean difference corrected by it?",
    over=("F", "MTD"),
    share=0.02,
    bears="mtd",
    closes=True,
)
def corrected(v: Figures, where: str) -> Line:
    _one_zone(v)
    if where == "F":
        return Line(sheet=float(v["F"]), recomputed=factor(v), quantity="dimensionless", of="F", absolute=0.02)
    return Line(
        sheet=float(v["mtd"]),
        recomputed=factor(v) * log_mean_difference(v),
        quantity="temperature_difference",
        of="mtd",
    )


@check(
    "B4",
    title="Level and steepness of F",
    grade="watch",
    needs="four temperatures, type letters, tube passes and shells in series",
    source="F of 0.8, 0.75 at the least; P up to 0.9 of what infinite area would reach (common practice)",
    ask="At these temperatures the arrangement works at {sheet} ({where}; {recomputed} is usual). How far does the "
    "duty fall if flow or inlet temperature differ by a little?",
    over=("F", "P over its limit"),
)
def steepness(v: Figures, where: str) -> Line:
    _one_zone(v)
    shells = _shells(v)
    if not shells:
        raise Missing("tube passes against each other; this exchanger is pure counter- or co-current flow")
    if where == "F":
        return within(factor(v), "dimensionless", low=F_USUAL, name="F", noted=F_USUAL - F_LEAST)
    P, R = _ratios(v)
    return within(
        P / float(exact.largest_P(R, shells)),
        "dimensionless",
        high=ON_THE_CLIFF,
        name="P over its limit",
        absolute=0.01,
    )


@check(
    "B5",
    title="F of one is claimed",
    grade="watch",
    needs="a printed F, four temperatures, type letters and tube passes",
    source="exact: F is 1 only in pure counterflow or with an isothermal side",
    ask="Why is F printed as 1 for this arrangement?",
)
def claims_counterflow(v: Figures, _: str) -> Remark:
    F = float(v["F"])
    exactly = factor(v)
    if F >= 0.995 and exactly < 0.98:
        return Remark(says=f"F is printed as {F:.3g}; this arrangement has {exactly:.3f} at these temperatures.")
    return Remark()


@check(
    "B6",
    title="Temperature cross in one shell",
    grade="watch",
    needs="four temperatures, type letters, tube passes and shells in series",
    source="in one shell with passes either way the cold outlet above the hot one costs most of the driving force "
    "(common practice)",
    ask="The cold fluid leaves at {sheet}, above the hot outlet of {recomputed}, in one shell. Was the shell count "
    "meant so?",
    absolute=1.0,
)
def cross(v: Figures, _: str) -> Line:
    if _shells(v) != 1:
        raise Missing("one shell with passes either way")
    hot_out, cold_out = _temperatures(v)[1::2]
    return within(cold_out, "temperature", high=hot_out, name="cold outlet")


# --- closure ----------------------------------------------------------------------------------------------------------


def _capacity(v: Figures, side: Side) -> float:
    """Flow times specific heat [W/K]; infinite where the side stays at one temperature."""
    return math.inf if changes_phase(v, side) else mass_flow(v, side) * specific_heat(v, side)[0]


@check(
    "B7",
    title="Effectiveness from U, surface and flows",
    grade="stop",
    needs="duty, service U, surface, both inlets, flows and specific heats, type letters, tube passes",
    source="effectiveness of the arrangement, which needs no outlet temperature; 1 % on the sheet's own specific heats",
    ask="Service U, surface, flows and inlet temperatures give a duty of {recomputed}, the sheet prints {sheet}. Which "
    "of them is from another revision?",
    share=0.01,
    bears="duty",
    closes=True,
)
def effectiveness_closes(v: Figures, _: str) -> Line:
    _one_zone(v)
    hot, cold = sides(v)
    C = {side: _capacity(v, side) for side in SIDES}
    C_min, C_max = min(C.values()), max(C.values())
    if math.isinf(C_min):
        raise Missing("a side without change of phase")
    NTU = float(v["U_service"]) * surface(v) / C_min
    Cr, shells = C_min / C_max, _shells(v)
    if shells:
        reached = exact.effectiveness_shell(NTU, Cr, shells)
    else:
        reached = exact.effectiveness_cocurrent(NTU, Cr) if _cocurrent(v) else exact.effectiveness_counter(NTU, Cr)
    span = float(v[f"{hot}.T_in"] - v[f"{cold}.T_in"])
    own = all(math.isinf(C[side]) or specific_heat(v, side)[1] for side in SIDES)
    return Line(
        sheet=float(v["duty"]),
        recomputed=float(reached) * C_min * span,
        quantity="heat_flow",
        of="duty",
        share=0.01 if own else 0.03,
    )


@check(
    "B8",
    title="One mean difference for several zones",
    grade="watch",
    needs="temperatures, and phases or properties at both ends",
    source="zones of desuperheating, condensing and subcooling, or properties that change by over 25 %, need a mean "
    "difference summed over zones (common practice)",
    ask="Was the mean temperature difference summed over zones?",
)
def zones(v: Figures, _: str) -> Remark:
    judged = False
    for side in SIDES:
        T = [v.get(f"{side}.{end}") for end in ("T_in", "T_out")]
        if changes_phase(v, side) and None not in T:
            judged = True
            if abs(float(T[1] - T[0])) > 5.0:
                return Remark(says=f"The {v.subject.side_name(side)} changes its phase and its temperature.")
        for name in ("cp", "mu"):
            ends = [v.get(f"{side}.{name}_{end}") for end in ("in", "out")]
            if None in ends:
                continue
            judged = True
            varies = max(ends) / min(ends) - 1
            if varies > VARIES:
                label = v.subject.label(f"{side}.{name}_in").partition(",")[0]
                return Remark(
                    says=f"{label.capitalize()} of the {v.subject.side_name(side)} changes by {100 * varies:.0f} %."
                )
    if not judged:
        raise Missing("a side's cp or mu at both ends, or a change of phase with both temperatures")
    return Remark()
