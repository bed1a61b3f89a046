"""Group D: surface, bundle, baffles, velocities, pressure drops, nozzles and weights."""

from __future__ import annotations

import math

from engine.datasheet import Line, Remark, check, within
from engine.datasheet.figures import (
    Figures,
    Impossible,
    Missing,
    bare_area,
    bore,
    gauge_wall,
    heated_length,
    mass_flow,
    passage,
    property_of,
    shells,
    single_phase,
    surface,
    tube_count,
)
from engine.exchangers import standard_sizes
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.stated import SIDES, Side

FITS, SPARSE = 0.12, 0.5
PITCH_RATIO, CLEANING_LANE = 1.25, 6.4e-3
LEAST_SPACING = 0.051
CUT = (0.15, 0.45)
WINDOW = (0.7, 1.4)
SHELL_DROP, TUBE_DROP = 0.35, 0.15
LOW_USE = 0.4
TUBE_WATER = (0.9, 3.0)
DEPOSIT = 1.0
"""Conductivity of a deposit where none is stated [W/mK] (common practice)."""
WATER = 1000.0
FILLED = (0.85, 1.6)
IMPINGEMENT = {True: 2232.0, False: 744.0}
"""ρv² above which a shell inlet needs protection: clean gas or liquid, other liquids [kg/m s²]."""
BUNDLE_ENTRANCE = 5953.0


def _side(where: str) -> Side:
    return "inside" if where == "inside" else "outside"


def _shell_and_tube(v: Figures) -> None:
    if v.subject.double_pipe:
        raise Missing("a shell-and-tube exchanger; this one is a double pipe")


# --- surface ----------------------------------------------------------------------------------------------------------

AREA_ASK = (
    "Tubes, diameter and length give a surface of {recomputed}, printed is {sheet}. Is it effective or gross, of one "
    "shell or of the unit, and does the tube count mean holes or U's?"
)
AREA_NEEDS = "surface, tube count, outside diameter and length; of a double pipe its legs"


def _surface(v: Figures) -> Line:
    return Line(sheet=surface(v), recomputed=bare_area(v), quantity="area", of="area")


@check(
    "D1",
    title="Surface from the tubes",
    grade="stop",
    needs=AREA_NEEDS,
    source="geometry; 1.5 %, the difference between effective and gross length of usual tubesheets",
    ask=AREA_ASK,
    share=0.015,
    bears="UA",
    closes=True,
)
def surface_of_tubes(v: Figures, _: str) -> Line:
    return _surface(v)


@check(
    "D2",
    title="Tube count means holes or U's",
    grade="act",
    needs=AREA_NEEDS,
    source="a surface twice or half of what the tubes give is the mark of U-tubes counted once",
    ask="The surface is twice or half of what the tube count gives. Does the count mean U-tubes or their legs?",
)
def holes_or_us(v: Figures, _: str) -> Remark:
    _shell_and_tube(v)
    line = _surface(v)
    ratio = line.sheet / line.recomputed
    if any(abs(ratio / factor - 1) < 0.03 for factor in (2.0, 0.5)):
        return Remark(says=f"The printed surface is {ratio:.3g} times what the tube count gives.")
    return Remark()


@check(
    "D3",
    title="Surface of the shells sums to that of the unit",
    grade="stop",
    needs="surface of the unit and of one shell",
    source="geometry; 0.2 %",
    ask="Surface of one shell times the shells is {recomputed}, of the unit {sheet} is printed. How many shells are "
    "there?",
    share=0.002,
    bears="UA",
    closes=True,
)
def surface_of_shells(v: Figures, _: str) -> Line:
    if v.get("basis") == "shell":
        raise Missing("area of the whole unit; it is printed for one shell")
    return Line(sheet=float(v["area"]), recomputed=float(v["area_per_shell"]) * shells(v), quantity="area", of="area")


# --- bundle -----------------------------------------------------------------------------------------------------------


@check(
    "D4",
    title="Tubes fit the shell",
    grade="watch",
    needs="tubes, pitch, layout angle, tube passes, and shell or bundle diameter",
    source="0.785 CTP/CL D²/pitch², CL 1 square and 0.87 triangular, CTP 0.93, 0.90 and 0.85 for 1, 2 and more passes "
    "(Kakac, Liu, Heat Exchangers; printed page not checked); 12 %, and half of it at the least",
    ask="{sheet} tubes are printed, this shell, pitch and layout hold about {recomputed}. Does the count mean holes or "
    "U's, and is the shell diameter right?",
    share=FITS,
    closes=True,
)
def tubes_fit(v: Figures, _: str) -> Line:
    _shell_and_tube(v)
    N, pitch = tube_count(v), float(v["tube_pitch"])
    square = str(v["layout_angle"]).split()[0] in ("45", "90")
    CL, CTP = (1.0 if square else 0.87), {1: 0.93, 2: 0.90}.get(int(v["tube_passes"]), 0.85)
    most = 0.785 * CTP / CL * (float(v["shell_id"]) / pitch) ** 2
    return within(N, "dimensionless", low=SPARSE * most, high=most, of="tubes")


@check(
    "D5",
    title="Tubes divide by the passes",
    grade="note",
    needs="tubes and tube passes",
    source="uneven passes are legal, their velocities differ",
    ask="The tube count does not divide by the passes. How many tubes has each pass?",
)
def divides(v: Figures, _: str) -> Remark:
    N, passes = int(tube_count(v)), int(v["tube_passes"])
    if N % passes:
        return Remark(says=f"{N} tubes do not divide by {passes} passes.")
    return Remark()


@check(
    "D6",
    title="Tube bore and wall",
    grade="watch",
    needs="outside diameter and bore and wall, or gauge and wall",
    source="bore is the outside diameter less two walls; Birmingham gauge; 3 % of the wall. The average of a minimum "
    "wall is 10 to 12 % above it (common practice)",
    ask="We find {recomputed} where the sheet prints {sheet} ({where}). Is the wall the average or the minimum?",
    over=("bore", "gauge"),
    share=0.03,
    closes=True,
)
def tube_wall(v: Figures, where: str) -> Line:
    wall = float(v["tube_wall"])
    if where == "gauge":
        return Line(sheet=wall, recomputed=gauge_wall(str(v["gauge"])), quantity="length", of="tube_wall")
    return Line(
        sheet=wall, recomputed=(float(v["tube_od"]) - float(v["tube_id"])) / 2, quantity="length", of="tube_wall"
    )


@check(
    "D8",
    title="Tube pitch",
    grade="watch",
    needs="tube pitch and outside diameter, and for cleaning lanes the layout angle",
    source="TEMA R-2.5: pitch of 1.25 diameters; lanes of 6.4 mm on a square pitch for mechanical cleaning (printed "
    "page not checked)",
    ask="The tube pitch is {sheet}, {recomputed} is the least ({where}). Is it meant so?",
    over=("ligament", "cleaning"),
    share=0.005,
    closes=True,
)
def pitch(v: Figures, where: str) -> Line | Remark:
    _shell_and_tube(v)
    pt, od = float(v["tube_pitch"]), float(v["tube_od"])
    if where == "ligament":
        return within(pt, "length", low=PITCH_RATIO * od, high=3 * od, of="tube_pitch")
    if v["shell_cleaning"] != "mechanically":
        return Remark()
    if str(v["layout_angle"]).split()[0] in ("30", "60"):
        return Remark(
            says="The shell side is said to be cleaned mechanically, but a triangular pitch leaves no lanes.",
            ask="How is the shell side cleaned mechanically on a triangular pitch?",
        )
    return within(pt, "length", low=od + CLEANING_LANE, of="tube_pitch")


# --- velocities -------------------------------------------------------------------------------------------------------


@check(
    "D7",
    title="Velocity from flow, density and passage",
    grade="stop",
    needs="velocity, flow, density, bore, tubes and passes; of an annulus both diameters",
    source="continuity; 3 %",
    ask="Flow, density and flow area of the {where} give {recomputed}, printed is {sheet}. Are flow and tube count "
    "those of one shell or of all, and does the count mean holes or U's?",
    over=SIDES,
    share=0.03,
    closes=True,
)
def velocity(v: Figures, where: str) -> Line:
    side = _side(where)
    single_phase(v, side)
    area, _, _ = passage(v, side)
    recomputed = mass_flow(v, side) / (property_of(v, side, "rho") * area)
    return Line(sheet=float(v[f"{side}.velocity"]), recomputed=recomputed, quantity="velocity", of=f"{side}.velocity")


@check(
    "D15",
    title="Velocity window",
    grade="watch",
    needs="velocity of water in the tubes",
    source="water in tubes at 0.9 m/s or more against deposits, and up to 3 m/s (common practice; copper alloys less)",
    ask="Water runs at {sheet} in the tubes; {recomputed} is the end of the usual range. Is it meant so?",
    share=0.02,
)
def velocity_window(v: Figures, _: str) -> Line:
    if "water" not in str(v["inside.fluid"]).lower():
        raise Missing("water inside; for other fluids there is no common window")
    low, high = TUBE_WATER
    return within(float(v["inside.velocity"]), "velocity", low=low, high=high, of="inside.velocity")


# --- baffles ----------------------------------------------------------------------------------------------------------


@check(
    "D9",
    title="Baffle spacings sum to the tube length",
    grade="stop",
    needs="baffles, spacing, inlet and outlet spacing, tube length",
    source="geometry; 2 %",
    ask="Baffles and spacings take {recomputed} of the {sheet} of tube. Which end spacing hides in an average?",
    share=0.02,
    closes=True,
)
def spacings_sum(v: Figures, _: str) -> Line:
    _shell_and_tube(v)
    inner = (float(v["baffles"]) - 1) * float(v["baffle_spacing"])
    taken = inner + float(v["inlet_spacing"]) + float(v["outlet_spacing"])
    return Line(sheet=heated_length(v), recomputed=taken, quantity="length", of="tube_length")


@check(
    "D10",
    title="Baffle spacing within its limits",
    grade="watch",
    needs="baffle spacing, shell diameter, tube diameter",
    source="TEMA RCB-4.5: from a fifth of the shell or 51 mm up to the shell, and half of the longest unsupported span "
    "where tubes stand in the window (printed page not checked)",
    ask="The baffle spacing is {sheet}, its limit here {recomputed}. Are there tubes in the window?",
    share=0.01,
)
def spacing_limits(v: Figures, _: str) -> Line:
    _shell_and_tube(v)
    Ds = float(v["shell_id"])
    low, high = max(Ds / 5, LEAST_SPACING), Ds
    material = v.get("material")
    try:
        group = standard_sizes.metal(str(material)).span_group if material else "steel and nickel"
        high = min(high, standard_sizes.unsupported_span(float(v["tube_od"]), group) / 2)
    except ValueError:
        pass
    return within(float(v["baffle_spacing"]), "length", low=min(low, high), high=high, of="baffle_spacing")


@check(
    "D11",
    title="Baffle cut",
    grade="watch",
    needs="baffle cut; for the velocities the case",
    source="cuts of 15 to 45 % of the diameter; window over cross-flow velocity of 0.7 to 1.4 (common practice)",
    ask="Baffle cut: {sheet}, end of the usual range {recomputed} ({where}). Is the cut by diameter or by area?",
    over=("cut", "basis", "window"),
    absolute=0.005,
)
def cut(v: Figures, where: str) -> Line | Remark:
    _shell_and_tube(v)
    if where == "cut":
        low, high = CUT
        return within(float(v["baffle_cut"]), "fraction", low=low, high=high, of="baffle_cut")
    if where == "basis":
        share = float(v["baffle_cut"])
        if v["baffle_cut_by"] == "area":
            return Remark(
                says=f"The cut is by area: {100 * share:.3g} % of the area is {100 * height_of_segment(share):.3g} % "
                "of the diameter, which is what the methods take.",
                ask="Was the rating run with the cut by area or by diameter?",
            )
        return Remark()
    case = v.subject.case
    if case is None or not isinstance(case.exchanger, ShellAndTube) or case.exchanger.shell_letter == "X":
        raise Missing("the case with a baffled shell")
    g = case.exchanger.geometry
    return within(
        float(g.Sm / g.Sw),
        "dimensionless",
        low=WINDOW[0],
        high=WINDOW[1],
        name="window over cross-flow velocity",
        share=0.02,
    )


def height_of_segment(share: float) -> float:
    """Height of a circle's segment over the diameter, from its share of the area."""
    low, high = 0.0, 1.0
    for _ in range(60):
        middle = (low + high) / 2
        angle = 2 * math.acos(1 - 2 * middle)
        low, high = (middle, high) if (angle - math.sin(angle)) / (2 * math.pi) < share else (low, middle)
    return (low + high) / 2


# --- pressure drops ---------------------------------------------------------------------------------------------------


@check(
    "D12",
    title="Pressure drop by our own rating",
    grade="watch",
    needs="the case, and a calculated pressure drop",
    source="methods of the case's rating; 35 % for a baffled shell, 15 % for tubes and annuli (common practice)",
    ask="For the {where} we compute {recomputed} between the stated nozzles, the sheet prints {sheet}. Does it hold "
    "nozzles and returns, clean or fouled?",
    over=SIDES,
    share=TUBE_DROP,
    closes=True,
)
def drop(v: Figures, where: str) -> Line:
    side = _side(where)
    state = v.subject.rating.fouled.sides[side]
    baffled = side == "outside" and not v.subject.double_pipe
    return Line(
        sheet=float(v[f"{side}.dp"]),
        recomputed=state.dp,
        quantity="pressure_difference",
        of=f"{side}.dp",
        by="is our own rating",
        share=SHELL_DROP if baffled else TUBE_DROP,
        absolute=500.0,
    )


@check(
    "D13",
    title="Use of the allowable pressure drop",
    grade="watch",
    needs="calculated and allowable pressure drop",
    source="above the allowable is out of the enquiry; below 40 % of it in fouling service velocity was given away "
    "(common practice)",
    ask="Of the allowable drop of the {where} {recomputed} is the expected use, {sheet} is calculated. Which margin "
    "was kept, and for which state?",
    over=SIDES,
    share=0.01,
)
def drop_used(v: Figures, where: str) -> Line:
    allowed = float(v[f"{where}.dp_allowed"])
    fouls = float(v.get(f"{where}.R_fouling") or 0.0) > 0
    low = LOW_USE * allowed if fouls else 0.0
    return within(
        float(v[f"{where}.dp"]), "pressure_difference", low=low, high=allowed, of=f"{where}.dp", absolute=0.02 * allowed
    )


@check(
    "D14",
    title="State for which the tube-side drop holds",
    grade="note",
    needs="tube-side drop, inside fouling and bore",
    source="a deposit of 1 W/mK narrows the bore; the drop grows with its inverse to 4.8",
    ask="Does the tube-side pressure drop hold clean or fouled?",
)
def drop_basis(v: Figures, _: str) -> Remark:
    _, R, d = v["inside.dp"], float(v["inside.R_fouling"]), bore(v)
    if "inside.dp_basis" in v or R == 0:
        return Remark()
    if d <= 2 * DEPOSIT * R:
        raise Impossible("a deposit that leaves a bore")
    ratio = (d / (d - 2 * DEPOSIT * R)) ** 4.8
    return Remark(says=f"Not stated; a deposit of 1 W/mK for this resistance would raise the drop {ratio:.3g} times.")


# --- nozzles, parts, weights ------------------------------------------------------------------------------------------


@check(
    "D16",
    title="ρv² in nozzles and at the bundle",
    grade="watch",
    needs="ρv² printed, or nozzle bore with flow and density",
    source="TEMA RCB-4.6: 2232 for clean single-phase fluids, 744 for other liquids without impingement protection, "
    "5953 kg/m s² at the bundle (printed page not checked)",
    ask="ρv² is {sheet} where {recomputed} is expected ({where}). Is there impingement protection, and what is the "
    "nozzle's bore?",
    over=("inside.printed", "outside.printed", "outside.inlet", "outside.bundle"),
    share=0.05,
)
def momentum(v: Figures, where: str) -> Line:
    name, _, what = where.partition(".")
    side = _side(name)
    if what == "bundle":
        return within(
            float(v["outside.bundle_rho_v2"]), "momentum_flux", high=BUNDLE_ENTRANCE, of="outside.bundle_rho_v2"
        )
    if what == "printed":
        printed = float(v[f"{name}.nozzle_rho_v2"])
        return Line(
            sheet=printed, recomputed=_nozzle_rho_v2(v, side), quantity="momentum_flux", of=f"{name}.nozzle_rho_v2"
        )
    _shell_and_tube(v)
    if v.get("impingement_protection") == "yes":
        return within(0.0, "momentum_flux", name="ρv² without protection")
    rho_v2 = v.get("outside.nozzle_rho_v2")
    clean = not float(v.get("outside.R_fouling") or 0.0)
    return within(
        _nozzle_rho_v2(v, side) if rho_v2 is None else float(rho_v2),
        "momentum_flux",
        high=IMPINGEMENT[clean],
        name="ρv² at the shell inlet",
    )


def _nozzle_rho_v2(v: Figures, side: Side) -> float:
    single_phase(v, side)
    bore_area = math.pi / 4 * float(v[f"{side}.nozzle_id"]) ** 2
    flow = mass_flow(v, side) / float(v.get("shells_in_parallel") or 1)
    return (flow / bore_area) ** 2 / property_of(v, side, "rho")


@check(
    "D17",
    title="Type letters against the parts",
    grade="watch",
    needs="type letters, and tube passes or an entry for the expansion joint",
    source="TEMA figure N-1.2: U-tubes have even passes, an F shell has a pass of tubes for each shell pass, fixed "
    "tubesheets answer for expansion",
    ask="Are the type letters those of this exchanger?",
)
def letters(v: Figures, _: str) -> Remark:
    tema = str(v["tema"]).upper()
    if len(tema) != 3:
        return Remark(says=f'"{tema}" is not front head, shell and rear head.')
    passes = v.get("tube_passes")
    joint = v.get("expansion_joint")
    if passes is None and joint is None:
        raise Missing("tube_passes or expansion_joint")
    wrong = []
    if tema[2] == "U" and passes is not None and passes % 2:
        wrong.append(f"{passes} tube passes cannot be in U-tubes")
    if tema[1] == "F" and passes is not None and passes % 2:
        wrong.append(f"{passes} tube passes cannot be halved over the two passes of an F shell")
    if tema[2] in "PSTUW" and joint == "yes":
        wrong.append(f"an expansion joint stands beside a rear head {tema[2]}, whose tubes move freely")
    if tema[2] in "PSTW" and v.get("tubes_are") == "U-tubes":
        wrong.append(f"U-tubes stand beside a rear head {tema[2]}")
    return Remark(says=f"{'; '.join(wrong).capitalize()}.") if wrong else Remark()


@check(
    "D18",
    title="Water that fills it",
    grade="watch",
    needs="weights empty and full, shell diameter, tube count, diameters and length",
    source="1000 kg/m³ times the free volume between the tubesheets; 15 % below, and up to 60 % above for heads and "
    "nozzles (common practice)",
    ask="Full less empty is {sheet}; the free volume of shell and tubes holds about {recomputed}. Do shell diameter, "
    "length and tube count belong to this weight?",
    share=0.05,
    closes=True,
)
def filling(v: Figures, _: str) -> Line:
    _shell_and_tube(v)
    L, metal = float(v["tube_length"]), float(v["tube_od"]) ** 2 - bore(v) ** 2
    volume = math.pi / 4 * L * (float(v["shell_id"]) ** 2 - tube_count(v) * metal) * shells(v)
    if volume <= 0:
        raise Impossible("a shell that holds its tubes")
    low, high = (share * WATER * volume for share in FILLED)
    return within(
        float(v["weight_full"]) - float(v["weight_empty"]), "mass", low=low, high=high, name="full less empty weight"
    )
