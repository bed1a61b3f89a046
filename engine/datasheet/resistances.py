"""Group C: overall coefficients, films, wall and fouling."""

from __future__ import annotations

import numpy as np

from engine.correlations import inside_tubes
from engine.datasheet import Line, Remark, check, within
from engine.datasheet.figures import (
    Figures,
    Impossible,
    Missing,
    bore,
    fouling,
    mass_flow,
    metal_conductivity,
    outside_diameter,
    passage,
    property_of,
    single_phase,
    surface,
    wall_resistance,
)
from engine.exchangers.standard_sizes import FOULING
from engine.stated import SIDES, Side

EXCESS_USUAL = 0.25
CLEANLINESS = (0.75, 0.90)
FOULING_USUAL = (1e-4, 1e-3)
DOMINATES = 0.5
CASE, OWN = "stands in our case", "is our own rating"
OWN_FILMS = 2.0
COPIED = 1.03
"""By how much more U the films would give than is printed, for a copied figure to be told."""
RATIO = "dirty over service transfer rate"
ROOM = "what clean U leaves for the films"
TUBE_FILM, TRANSITIONAL_FILM, SHELL_FILM = 0.15, 0.30, 0.25


def _side(where: str) -> Side:
    return "inside" if where == "inside" else "outside"


# --- overall coefficients ---------------------------------------------------------------------------------------------


@check(
    "C1",
    title="Service U is duty over surface and MTD",
    grade="stop",
    needs="duty, surface, MTD and service U",
    source="definition; 1 %",
    ask="Duty over surface and mean temperature difference is {recomputed}, the service transfer rate is printed as "
    "{sheet}. Which of the four is from another revision, and is the surface that of one shell or of the unit?",
    share=0.01,
    bears="UA",
    closes=True,
)
def service(v: Figures, _: str) -> Line:
    U = float(v["duty"]) / (surface(v) * float(v["mtd"]))
    return Line(sheet=float(v["U_service"]), recomputed=U, quantity="heat_transfer_coefficient", of="U_service")


@check(
    "C2",
    title="Dirty U is clean U with the fouling",
    grade="stop",
    needs="clean and dirty U, both fouling resistances, tube diameters",
    source="resistances in series on the outside surface; 2 %",
    ask="Clean transfer rate and fouling give a dirty rate of {recomputed}, printed is {sheet}. Is the inside "
    "resistance on the inside surface, and in which unit are the resistances?",
    share=0.02,
    bears="UA",
    closes=True,
)
def dirty(v: Figures, _: str) -> Line:
    U = 1 / (1 / float(v["U_clean"]) + fouling(v))
    return Line(sheet=float(v["U_dirty"]), recomputed=U, quantity="heat_transfer_coefficient", of="U_dirty")


@check(
    "C3",
    title="Excess of dirty over service U",
    grade="act",
    needs="dirty and service U, or the printed excess beside them",
    source="dirty U below service U misses the duty; over 25 % hides a margin (common practice)",
    ask="The dirty transfer rate stands to the service rate as {sheet} to one ({recomputed} at the end of the usual "
    "range; {where}). Which margin is meant, and on which surface and which U is it counted?",
    over=("sign", "size", "as printed", "copied"),
    share=0.01,
    bears="",
    closes=True,
)
def excess(v: Figures, where: str) -> Line | Remark:
    U_dirty, U_service = float(v["U_dirty"]), float(v["U_service"])
    ratio = U_dirty / U_service
    if where == "sign":
        return within(ratio, "dimensionless", low=1.0, name=RATIO)
    if where == "size":
        return within(ratio, "dimensionless", high=1 + EXCESS_USUAL, name=RATIO, grade="watch")
    if where == "as printed":
        return Line(
            sheet=1 + float(v["excess_area"]),
            recomputed=ratio,
            quantity="dimensionless",
            name="one and the excess area",
            share=0.02,
        )
    printed = Figures(v.subject.values, v.subject)  # a trial of other figures makes the copy no likelier
    by_films = 1 / (1 / float(v["U_clean"]) + fouling(printed))
    if U_dirty == U_service and by_films > COPIED * U_dirty:
        return Remark(
            says="Dirty and service transfer rate are the same to the last digit: one seems to be copied.",
            ask="Is the dirty transfer rate computed from films and fouling, or is it duty over surface and mean "
            "temperature difference once more?",
            grade="watch",
        )
    return Remark()


@check(
    "C4",
    title="Cleanliness",
    grade="watch",
    needs="clean and dirty U, or clean and service U",
    source="dirty over clean U of 0.75 to 0.90 is typical (common practice)",
    ask="Dirty over clean transfer rate is {sheet}, the end of the usual range {recomputed}. Which margins are stacked "
    "on each other?",
    share=0.02,
)
def cleanliness(v: Figures, _: str) -> Line:
    low, high = CLEANLINESS
    return within(
        float(v["U_dirty"]) / float(v["U_clean"]),
        "dimensionless",
        low=low,
        high=high,
        name="dirty over clean transfer rate",
    )


# --- films ------------------------------------------------------------------------------------------------------------


def _films_left(v: Figures) -> float:
    """What clean U leaves for the two films on the outside surface [m²K/W]."""
    return 1 / float(v["U_clean"]) - wall_resistance(v)


@check(
    "C5",
    title="Clean U leaves room for the films",
    grade="stop",
    needs="clean U, tube diameters, wall conductivity or material; for the films their coefficients or the case",
    source="resistances in series, films 2 %; our own films hold within a factor of two",
    ask="Clean transfer rate and tube wall leave {sheet} for both films where {recomputed} is expected ({where}). "
    "Which surface and which units do these rates have?",
    over=("wall", "films", "own"),
    share=0.02,
    bears="",
    closes=True,
)
def film_sum(v: Figures, where: str) -> Line:
    left = _films_left(v)
    if where == "wall":
        # Below nothing at all there is no tolerance but rounding.
        return within(left, "fouling_resistance", low=0.0, name=ROOM, share=0.0, impossible=True)
    if where == "films":
        films = 1 / float(v["outside.h"]) + outside_diameter(v) / bore(v) / float(v["inside.h"])
        return Line(sheet=left, recomputed=films, quantity="fouling_resistance", name=ROOM)
    R = v.subject.rating.clean.resistances
    own = R["outside film"] + R["inside film"]
    return within(left, "fouling_resistance", low=own / OWN_FILMS, high=own * OWN_FILMS, name=ROOM, grade="watch")


def _inside_film(v: Figures) -> tuple[float, float]:
    """Film coefficient from the sheet's own velocity and properties [W/m²K], and its band."""
    single_phase(v, "inside")
    area, d, L = passage(v, "inside")
    rho, cp, mu, k = (property_of(v, "inside", name) for name in ("rho", "cp", "mu", "k"))
    velocity = v.get("inside.velocity")
    if velocity is None:
        velocity = mass_flow(v, "inside") / (rho * area)
    Re, Pr = rho * float(velocity) * d / mu, cp * mu / k
    Nu, _ = inside_tubes.nusselt_tube(Re, Pr, d, 0.0, L)
    transitional = inside_tubes.RE_LAMINAR <= Re < inside_tubes.RE_TURBULENT
    return float(Nu) * k / d, TRANSITIONAL_FILM if transitional else TUBE_FILM


@check(
    "C6",
    title="Inside film from the sheet's velocity",
    grade="watch",
    needs="velocity, all properties, bore and length of the tubes; the inside film, or clean U, wall and diameters",
    source="Gnielinski and VDI Heat Atlas G1; 15 %, 30 % in transition",
    ask="Velocity and properties give an inside film of {recomputed}, the sheet means {sheet} ({where}). Are there "
    "inserts, or another tube than printed?",
    over=("h", "room in clean U"),
    bears="",
    closes=True,
)
def inside_film(v: Figures, where: str) -> Line:
    h, band = _inside_film(v)
    if where == "h":
        return Line(
            sheet=float(v["inside.h"]), recomputed=h, quantity="heat_transfer_coefficient", of="inside.h", share=band
        )
    ratio = outside_diameter(v) / bore(v)
    left = _films_left(v)
    if left <= 0:
        raise Impossible("a clean U that leaves room for films")
    # No outside film, however good, brings the sum of both below the inside one.
    return within(
        ratio / left, "heat_transfer_coefficient", high=h, name="the least inside film for this clean U", share=band
    )


@check(
    "C7",
    title="Outside film by our own rating",
    grade="watch",
    needs="the case, and the outside film or clean U",
    source="Bell-Delaware, or Gnielinski for an annulus, as the case is rated; scatter of 25 % (common practice)",
    ask="The sheet means an outside film of {sheet}; we compute {recomputed}. Which bypass and leakage areas were "
    "assumed?",
    share=SHELL_FILM,
    closes=True,
)
def outside_film(v: Figures, _: str) -> Line:
    state = v.subject.rating.clean
    if "outside.h" in v:
        h = float(v["outside.h"])
    else:
        left = _films_left(v) - state.resistances["inside film"]
        if left <= 0:
            raise Impossible("a clean U that leaves room for an outside film")
        h = 1 / left
    own = 1 / state.resistances["outside film"]
    return Line(
        sheet=h,
        recomputed=own,
        quantity="heat_transfer_coefficient",
        of="outside.h" if "outside.h" in v else "",
        by=OWN,
        name="the outside film left by clean U",
    )


@check(
    "C8",
    title="Wall resistance and alloy",
    grade="watch",
    needs="the printed wall resistance with diameters and conductivity, or conductivity and material",
    source="conductivities of the alloy's table; 5 %",
    ask="For this tube and alloy we find {recomputed} where the sheet means {sheet} ({where}). Was the material "
    "changed without rating it again?",
    over=("resistance", "conductivity"),
    share=0.05,
    closes=True,
)
def wall(v: Figures, where: str) -> Line:
    if where == "resistance":
        R = float(v["wall_resistance"])
        return Line(sheet=R, recomputed=wall_resistance(v), quantity="fouling_resistance", of="wall_resistance")
    k = float(v["wall_conductivity"])
    T = [v.get(f"{side}.{end}") for side in SIDES for end in ("T_in", "T_out")]
    known = [float(t) for t in T if t is not None]
    own = metal_conductivity(str(v["material"]), sum(known) / len(known) if known else 300.0)
    return Line(sheet=k, recomputed=own, quantity="conductivity", of="wall_conductivity")


# --- fouling ----------------------------------------------------------------------------------------------------------


@check(
    "C9",
    title="Fouling resistance is plausible",
    grade="watch",
    needs="a fouling resistance; the case's own stands before any table",
    source="the case's figure; else 0.0001 to 0.001 m²K/W, or the TEMA range of a service named as its tables do",
    ask="The sheet has a fouling resistance of {sheet} for the {where}, expected was {recomputed}. On which surface "
    "and from which enquiry is it?",
    over=SIDES,
    share=0.02,
)
def fouling_range(v: Figures, where: str) -> Line:
    path = f"{where}.R_fouling"
    R = float(v[path])
    if path in v.subject.sheet_values and path in v.subject.case_values:
        asked = float(v.subject.case_values[path])
        return Line(sheet=R, recomputed=asked, quantity="fouling_resistance", of=path, by=CASE, absolute=1e-6)
    usual = FOULING.get(str(v.get(f"{where}.fluid") or "").lower())
    low, high = (usual.low, usual.high) if usual else FOULING_USUAL
    if not usual and R == 0.0:
        other = v.get(f"{'outside' if where == 'inside' else 'inside'}.R_fouling")
        low = low if other else 0.0
    return within(R, "fouling_resistance", low=low, high=high, of=path, absolute=0.1 * low)


@check(
    "C10",
    title="Fouling outweighs the clean exchanger",
    grade="watch",
    needs="clean U, both fouling resistances, tube diameters",
    source="total fouling times clean U over one half: most of the surface is bought for an estimate (common practice)",
    ask="Fouling times clean transfer rate is {sheet}, above {recomputed}: most of the surface is there for fouling. "
    "How will the clean exchanger be run?",
    share=0.02,
)
def dominance(v: Figures, _: str) -> Line:
    return within(fouling(v) * float(v["U_clean"]), "dimensionless", high=DOMINATES, name="fouling times clean U")


@check(
    "C11",
    title="Wall temperatures against their limits",
    grade="watch",
    needs="the case with a limit of the wall temperature",
    source="our own rating, clean and fouled",
    ask="At the wall of the {where} we find {sheet}, the limit is {recomputed}. Was the wall temperature checked clean "
    "and fouled?",
    over=tuple(f"{side}.{end}" for side in SIDES for end in ("highest", "lowest")),
)
def wall_temperature(v: Figures, where: str) -> Line:
    name, _, end = where.partition(".")
    case = v.subject.case
    kind = "max" if end == "highest" else "min"
    if case is None:
        raise Missing("the case: without it there is no rating of our own")
    limit = getattr(case.limits, f"{name}_wall_T_{kind}")
    if limit is None:
        raise Missing(f"limits.{name}_wall_T_{kind}")
    T = np.array([state.sides[_side(name)].surface_T for state in v.subject.rating.states.values()])
    if end == "highest":
        return within(float(T.max()), "temperature", high=float(limit), name="the hottest wall")
    return within(float(T.min()), "temperature", low=float(limit), name="the coldest wall")
