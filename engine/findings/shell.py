"""Whether a shell-and-tube exchanger can be built and run so: nozzles, spans, baffles, leakage, cleaning, vibration."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from engine.correlations import Source
from engine.correlations import across_bundle as shell
from engine.exchangers import standard_sizes, vibration
from engine.exchangers.shell_and_tube import CLEAR_COUNT, ShellAndTube
from engine.exchangers.standard_sizes import BAFFLE_SPACING, RHO_V2_LIMITS, VELOCITIES, Metal
from engine.exchangers.tube_field import tube_field
from engine.exchangers.vibration import CONNORS_SETS, Ends
from engine.findings import COMMON_PRACTICE, Finding, Missing, Subject, percent, rule
from engine.findings.flow import service, speed_of_sound
from engine.findings.thermal import FIXED_HEADS, NEAR_CEILING
from engine.findings.validity import OWN, capacities
from engine.stated import Side

SHORT_OF_PLACES, EMPTY_COUNT = 0.05, 0.75
"""Of the tubes, without a place in the layout; of the least published count, below which a shell is not filled."""
LEAST_SPACING = 0.051
"""Between baffles [m]; TEMA, RCB-4.51."""
WINDOW_RATIO = (0.7, 1.4)
"""Velocity in the window over that across the bundle."""
LOW_LEAKAGE, LOW_BYPASS = 0.6, 0.7
"""Jl and Jb; 0.7 to 0.8 and 0.7 to 0.9 are usual."""
CLIFF, STEEP = 0.9, 0.01
"""Of the largest effectiveness of the arrangement; fall of F at 1 % more duty."""
AHMAD_1988 = Source(
    key="Ahmad-1988",
    text="Ahmad, S., Linnhoff, B., Smith, R., Design of multipass heat exchangers: an alternative approach, J. Heat "
    "Transfer 110 (1988) 304-309",
    checked=False,
)
CLEANED = 0.00035
"""Fouling resistance above which a surface is usually cleaned by mechanical means [m²K/W]."""
LEAST_LANE = 0.00635
"""Between the tubes of a square layout, for a lance to pass [m]; TEMA, R-2.5."""
UNUSED_DROP = 0.4
"""Of the allowance."""
NEAR = 0.2
"""A frequency within this share of another may answer to it."""
SPAN_TEMPERATURE = 589.15
"""Up to which the table of spans holds for all metals [K]."""
SCREENING = "Screening only; not a vibration analysis."

WATER_VELOCITIES = {
    "copper": 2.0,
    "brass 70/30": 1.8,
    "admiralty brass": 2.4,
    "aluminium brass": 2.4,
    "copper-nickel 90/10": 2.5,
    "copper-nickel 70/30": 3.0,
    "carbon steel": 2.7,
    "aluminium": 1.8,
}
"""Highest usual velocity of clean water in tubes of the metals that it erodes [m/s] (common practice; copper-nickel as
the Copper Development Association gives it for clean sea water)."""


def _exchanger(s: Subject) -> ShellAndTube | None:
    return s.case.exchanger if isinstance(s.case.exchanger, ShellAndTube) else None


def _baffled(s: Subject) -> ShellAndTube | None:
    exchanger = _exchanger(s)
    return exchanger if exchanger is not None and exchanger.shell_letter != "X" else None


def _length(s: Subject, x: float) -> str:
    return s.show(x, "length", 4 if x >= 1.0 else 3)


def _metal(s: Subject, exchanger: ShellAndTube, what: str) -> Metal:
    if exchanger.material is None:
        raise Missing(f"{what}: exchanger.material is not stated")
    return standard_sizes.metal(exchanger.material)


# --- size and letters -------------------------------------------------------------------------------------------------


@rule(
    "tube-count",
    title="The tube count is not that of such a shell",
    grades=("act", "watch"),
    needs="nothing",
    source="published tube counts; their bundle limits and pass lanes differ",
)
def tube_count(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None:
        return
    usual, tubes = exchanger.usual_tube_count, exchanger.tubes
    because = {
        "tubes": str(tubes),
        "published or estimated": f"{usual.low:.0f} to {usual.high:.0f}",
        "shell bore": _length(s, exchanger.shell_id),
        "pitch": f"{_length(s, exchanger.tube_pitch)}, {exchanger.layout_angle}",
    }
    source = "; ".join(map(str, usual.sources))
    if exchanger.crowding > CLEAR_COUNT:
        yield s.finding(
            "act",
            where="exchanger.tubes",
            says=f"{tubes} tubes are {percent(exchanger.crowding)} more than published layouts of this bore, pitch and "
            f"number of passes hold, {usual.most:.0f}.",
            because=because,
            do="Compare tubes, pitch, bore and passes with the drawing; the area and both velocities hang on them.",
            source=source,
        )
    elif (places := tube_field(exchanger).capacity) < (1 - SHORT_OF_PLACES) * tubes:
        yield s.finding(
            "watch",
            where="exchanger.tubes",
            says=f"A layout of the stated figures has places for {places} of the {tubes} tubes.",
            because={**because, "places": str(places), "bundle diameter": _length(s, exchanger.outer_tube_limit)},
            do="Compare tubes, pitch, layout angle, pass lanes and bundle diameter with the drawing.",
            source="places a pitch apart within the outer tube limit, lanes of the pass partitions left free",
        )
    elif tubes < EMPTY_COUNT * usual.low and exchanger.bundle_diameter is None:
        legs = " U-tubes are counted by their legs, two for each." if exchanger.u_tubes else ""
        yield s.finding(
            "watch",
            where="exchanger.tubes",
            says=f"{tubes} tubes leave much of this shell empty, where {usual.low:.0f} or more are usual: the bundle "
            "diameter taken from the bore is then too large, and bypass and cross-flow area with it.",
            because={**because, "bundle diameter taken": _length(s, exchanger.outer_tube_limit)},
            do=f"State the bundle diameter, or check the count.{legs}",
            source=source,
        )


@rule(
    "type-letters",
    title="Letters of the type that do not suit the parts",
    grades=("act", "watch", "note"),
    needs="nothing",
    source="heads as described by TEMA, figure N-1.2 (printed page not checked)",
)
def type_letters(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None:
        return
    passes, rear, tubes = exchanger.tube_passes, exchanger.rear_letter, exchanger.tubes
    if rear == "W" and passes > 2:
        yield s.finding(
            "act",
            where="exchanger.tema",
            says=f"A {exchanger.tema.upper()} with {passes} tube passes: the externally sealed floating tubesheet (W) "
            "takes one pass or two.",
            because={"rear head": "W", "tube passes": str(passes)},
            do="Check the rear head and the passes on the drawing.",
        )
    if rear in "ST" and passes % 2:
        yield s.finding(
            "watch",
            where="exchanger.tema",
            says=f"A floating head {rear} with {passes} tube {'pass' if passes == 1 else 'passes'} needs a sliding or "
            "expanding tail pipe, which leaks and is seldom built.",
            because={"rear head": rear, "tube passes": str(passes)},
            do="Check the rear head and the passes on the drawing.",
        )
    if tubes % passes:
        even = tubes / passes
        yield s.finding(
            "note",
            where="exchanger.tubes",
            says=f"{tubes} tubes do not divide into {passes} equal passes: the rating takes {even:.1f} tubes a pass, "
            "and the velocities of the real passes differ a little.",
            because={"tubes": str(tubes), "tube passes": str(passes)},
            do="Check the count where the drawing gives the tubes of each pass.",
        )


@rule(
    "mechanical-cleaning",
    title="A fouling side that cannot be cleaned mechanically",
    grades=("watch",),
    needs="nothing",
    source=f"layouts for cleaning: TEMA R-2.5 (printed page not checked); a fouling resistance above {CLEANED:g} m²K/W "
    f"asks for it ({COMMON_PRACTICE})",
    by_side=True,
)
def mechanical_cleaning(s: Subject, side: Side) -> Iterator[Finding]:
    exchanger, R = _exchanger(s), float(s.case.stream(side).R_fouling)
    if exchanger is None or R <= CLEANED:
        return
    lane = exchanger.tube_pitch - exchanger.tube_od
    because = {"fouling resistance": s.show(R, "fouling_resistance", 3)}
    reasons: list[str] = []
    if side == "inside":
        if exchanger.u_tubes:
            reasons.append("the bends of U-tubes can hardly be brushed or drilled")
    else:
        because["layout"] = f"{exchanger.layout_angle}, lane {_length(s, lane)}"
        if exchanger.rear_letter in FIXED_HEADS:
            reasons.append("a bundle between fixed tubesheets cannot be drawn")
        if standard_sizes.pattern(exchanger.angle) == "triangular":
            reasons.append("a triangular layout has no lanes for a lance")
        elif lane < LEAST_LANE * (1 - 1e-6):
            reasons.append(f"its lanes are narrower than {_length(s, LEAST_LANE)}")
    if reasons:
        yield s.finding(
            "watch",
            says=f"The {s.name(side)} is stated to foul by {because['fouling resistance']}, and {' and '.join(reasons)}"
            ".",
            because=because,
            do="Have chemical cleaning at hand, or state the fouling that this surface has been seen to keep.",
        )


# --- flow -------------------------------------------------------------------------------------------------------------


def _nozzle_momentum(s: Subject, side: Side, end: str) -> tuple[float, float]:
    """ρv² [kg/(m s²)] in one nozzle of a side, and the velocity [m/s]. Missing without nozzle or flow."""
    exchanger = s.case.exchanger
    assert isinstance(exchanger, ShellAndTube)
    path = f"exchanger.{'tube' if side == 'inside' else 'shell'}_nozzle_id"
    bore, flow = float(s.stated(path)), s.case.flow(side)
    if flow is None:
        raise Missing(f"{side}.flow is not stated")
    at, nozzles = s.fouled.sides[side], exchanger.shell_nozzles if side == "outside" else (1, 1)
    rho = (at.properties_in if end == "inlet" else at.properties_out)["rho"]
    G = flow / exchanger.shells_in_parallel / nozzles[end == "outlet"] / (np.pi / 4 * bore**2)
    return float(G**2 / rho), float(G / rho)


def _rho_v2(s: Subject, value: float) -> str:
    return s.show(value, "momentum_flux", 3)


@rule(
    "nozzle-momentum",
    title="The jet from an inlet nozzle wears the tubes",
    grades=("watch", "note"),
    needs="a rated case, and the bore of the side's nozzle",
    source=str(standard_sizes.TEMA),
    by_side=True,
)
def nozzle_momentum(s: Subject, side: Side) -> Iterator[Finding]:
    if _exchanger(s) is None:
        return
    if side == "outside" and s.phase(side) == "condensing":
        yield s.finding(
            "note",
            says="Vapour at its condensing point enters the shell: its nozzle asks for impingement protection at any "
            "velocity.",
            because={"inlet": s.T(s.case.T_in(side))},
            do="Check that there is a plate or rods under the nozzle.",
        )
        return
    rho_v2, v = _nozzle_momentum(s, side, "inlet")
    if side == "inside":
        limit = RHO_V2_LIMITS["tube-side nozzle without thickened pass partition"].high
        what, do = "the pass partition and the tube ends wear", "Check the wear of the head, or use a larger nozzle."
    else:
        clean = RHO_V2_LIMITS["shell nozzle without impingement protection, clean single-phase fluid"].high
        other = RHO_V2_LIMITS["shell nozzle without impingement protection, other liquids"].high
        limit = other if s.phase(side) == "liquid" and rho_v2 <= clean else clean
        what = (
            "the tubes under it need an impingement plate or rods"
            if limit == clean
            else "the tubes under it need an impingement plate or rods, unless the liquid is clean and far from boiling"
        )
        do = "Check that there is impingement protection; a larger nozzle does without."
    if rho_v2 > limit:
        yield s.finding(
            "note" if limit < 1000 else "watch",
            where=f"exchanger.{'tube' if side == 'inside' else 'shell'}_nozzle_id",
            says=f"The {s.name(side)} enters its nozzle with a ρv² of {_rho_v2(s, rho_v2)}, over "
            f"{_rho_v2(s, limit)}: {what}.",
            because={"ρv²": _rho_v2(s, rho_v2), "limit": _rho_v2(s, limit), "velocity": s.velocity(v)},
            do=do,
        )


@rule(
    "bundle-entrance",
    title="The shell-side fluid enters or leaves the bundle too fast",
    grades=("act", "watch"),
    needs="a rated case, and the bore of the shell nozzle",
    source=f"{standard_sizes.TEMA}; areas without impingement plate, of a bundle that is not cut back",
)
def bundle_entrance(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None:
        return
    limit = RHO_V2_LIMITS["shell or bundle entrance and exit"].high
    places: dict[str, float] = {}
    for end in ("inlet", "outlet"):
        through_nozzle, _ = _nozzle_momentum(s, "outside", end)
        bore = float(exchanger.shell_nozzle_id or 0.0)
        gaps = (exchanger.tube_pitch - exchanger.tube_od) / exchanger.tube_pitch
        free = np.pi * bore * (exchanger.shell_id - exchanger.outer_tube_limit) / 2
        free += np.pi / 4 * bore**2 * gaps / shell.tube_layout(exchanger.angle).gap
        places[f"ρv² from nozzle to bundle, {end}"] = through_nozzle * float(np.pi / 4 * bore**2 / free) ** 2
        if exchanger.shell_letter != "X" and s.phase("outside") != "condensing":
            rho, v = _across(s)
            at = s.fouled.sides["outside"]
            rho_end = (at.properties_in if end == "inlet" else at.properties_out)["rho"]
            share = exchanger.geometry.Lbc / exchanger.path_spacings[1 if end == "inlet" else 2]
            places[f"ρv² across the {end} bay"] = (rho * v * share) ** 2 / rho_end
    worst = max(places, key=lambda place: places[place])
    if places[worst] <= limit:
        return
    cut_back = "nozzle" in worst
    yield s.finding(
        "watch" if cut_back else "act",
        where="outside",
        says=f"The {worst} is {_rho_v2(s, places[worst])}, over {_rho_v2(s, limit)}"
        + (", unless the bundle is cut back there: " if cut_back else ": ")
        + "the outer tubes wear and shake.",
        because={**{place: _rho_v2(s, value) for place, value in places.items()}, "limit": _rho_v2(s, limit)},
        do="Look at the tubes under the nozzles first when the bundle is out; a larger nozzle, a longer end bay or "
        "tubes left out under the nozzle lower it.",
    )


@rule(
    "nozzle-over-spacing",
    title="A shell nozzle is wider than its end bay",
    grades=("act",),
    needs="the bore of the shell nozzle",
    source=OWN,
)
def nozzle_over_spacing(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None or exchanger.shell_letter not in "EF":
        return
    bore, (_, inlet, outlet) = float(s.stated("exchanger.shell_nozzle_id")), exchanger.path_spacings
    end, spacing = min((("inlet", inlet), ("outlet", outlet)), key=lambda pair: pair[1])
    if bore > spacing:
        yield s.finding(
            "act",
            where=f"exchanger.{end}_spacing",
            says=f"The shell nozzle of {_length(s, bore)} does not fit between tubesheet and first baffle, "
            f"{_length(s, spacing)} apart at the {end}: part of the flow would pass the first baffle by.",
            because={"nozzle": _length(s, bore), f"{end} spacing": _length(s, spacing)},
            do="Check nozzle bore and end spacings with the drawing.",
        )


@rule(
    "erosion-velocity",
    title="Water runs faster than its tube metal stands",
    grades=("watch",),
    needs="a rated case, and the tube material",
    source=f"usual highest velocities of water by metal ({COMMON_PRACTICE}; copper-nickel: Copper Development "
    "Association)",
)
def erosion_velocity(s: Subject) -> Iterator[Finding]:
    fluid = s.fluid("inside")
    if s.phase("inside") != "liquid" or "water" not in fluid.name.lower().split():
        return
    v, material = s.fouled.sides["inside"].velocity, s.case.exchanger.material
    if material is None:
        raise Missing("the tube metal: exchanger.material is not stated")
    metal = standard_sizes.metal(material).name
    limit = WATER_VELOCITIES.get(metal)
    if limit is not None and v > limit:
        yield s.finding(
            "watch",
            where="inside",
            says=f"Water runs at {s.velocity(v)} in tubes of {metal}, which it erodes above about "
            f"{s.velocity(limit)}, first at the inlet ends.",
            because={"velocity": s.velocity(v), f"usual limit of {metal}": s.velocity(limit)},
            do="Look at the inlet ends; less flow, more tubes in parallel or a harder metal help. Sand, chlorides and "
            "dirt lower the limit.",
        )


@rule(
    "allowance-unused",
    title=f"A slow, fouling side uses under {percent(UNUSED_DROP)} of its allowed drop",
    grades=("watch",),
    needs="a rated case, and the side's allowed drop",
    source=f"{COMMON_PRACTICE}; {standard_sizes.SINNOTT_PRACTICE}",
    by_side=True,
)
def allowance_unused(s: Subject, side: Side) -> Iterator[Finding]:
    if _exchanger(s) is None or s.phase(side) != "liquid" or not s.case.stream(side).R_fouling:
        return
    allowed, at = float(s.stated(f"{side}.dp_allowed")), s.fouled.sides[side]
    least = VELOCITIES[service(s, side)].low
    if at.dp < UNUSED_DROP * allowed and at.velocity < least:
        yield s.finding(
            "watch",
            where=f"{side}.dp_allowed",
            says=f"The {s.name(side)} is stated to foul and flows at {s.velocity(at.velocity)}, but uses "
            f"{percent(at.dp / allowed)} of its allowed drop: a higher velocity was affordable and would foul less.",
            because={
                "drop": s.dp(at.dp),
                "allowed": s.dp(allowed),
                "velocity": s.velocity(at.velocity),
                "least usual": s.velocity(least),
            },
            do="More flow, or more passes or closer baffles at the next re-tubing, use what the pump can give.",
        )


# --- baffles ----------------------------------------------------------------------------------------------------------


@rule(
    "baffle-spacing",
    title="Baffles closer or further apart than is built",
    grades=("watch",),
    needs="nothing",
    source=f"a fifth of the bore or {LEAST_SPACING * 1e3:g} mm at least, the bore at most: TEMA RCB-4.51 and 4.52 "
    f"(printed page not checked); {BAFFLE_SPACING.source}",
)
def baffle_spacing(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None:
        return
    count, inlet, outlet = exchanger.path_spacings
    spacings = {"inlet_spacing": inlet, "outlet_spacing": outlet}
    if count > 1:
        spacings = {"baffle_spacing": float(exchanger.baffle_spacing or 0.0), **spacings}
    least, most = max(BAFFLE_SPACING.low * exchanger.shell_id, LEAST_SPACING), float(exchanger.shell_id)
    close = {name: x for name, x in spacings.items() if x < least * (1 - 1e-6)}
    far = {name: x for name, x in spacings.items() if name == "baffle_spacing" and x > most * (1 + 1e-6)}
    for out, limit, what in (
        (close, least, "under {}: leakage takes much of the flow, and the bundle can hardly be cleaned"),
        (far, most, "over {}: the fluid runs along the tubes rather than across them, and the spans are long"),
    ):
        if out:
            shown = {name.replace("_", " "): _length(s, x) for name, x in out.items()}
            yield s.finding(
                "watch",
                where=f"exchanger.{next(iter(out))}",
                says=f"{' and '.join(f'{name} {x}' for name, x in shown.items()).capitalize()}, "
                f"{what.format(_length(s, limit))}.",
                because={**shown, "limit": _length(s, limit), "shell bore": _length(s, exchanger.shell_id)},
                do="Check number and spacing of the baffles with the drawing; the method is least sure here.",
            )


@rule(
    "window-velocity",
    title="Window and cross-flow velocities far apart",
    grades=("watch",),
    needs="nothing",
    source=f"ratio of {WINDOW_RATIO[0]:g} to {WINDOW_RATIO[1]:g} ({COMMON_PRACTICE})",
)
def window_velocity(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None:
        return
    ratio = exchanger.geometry.Sm / exchanger.geometry.Sw
    if not WINDOW_RATIO[0] <= ratio <= WINDOW_RATIO[1]:
        slow = ratio < WINDOW_RATIO[0]
        yield s.finding(
            "watch",
            where="exchanger.baffle_cut",
            says=f"The fluid runs {ratio:.2f} times as fast through the windows as across the bundle; usual is "
            f"{WINDOW_RATIO[0]:g} to {WINDOW_RATIO[1]:g}: "
            + ("part of the windows stagnates." if slow else "drop is spent in the windows without much film."),
            because={
                "window over cross-flow velocity": f"{ratio:.2f}",
                "baffle cut": percent(float(exchanger.baffle_cut or 0.0)),
                "baffle spacing": _length(s, float(exchanger.baffle_spacing or 0.0)),
            },
            do="Check cut and spacing with the drawing; a cut is a share of the bore here, not of the area.",
        )


@rule(
    "leakage-and-bypass",
    title="Leakage or bypass takes much of the shell-side film",
    grades=("watch",),
    needs="a rated case",
    source=f"{shell.TABOREK_HEDH}; Jl of {LOW_LEAKAGE:g} and Jb of {LOW_BYPASS:g} as low ({COMMON_PRACTICE})",
)
def leakage_and_bypass(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None:
        return
    g = exchanger.geometry
    J = shell.film_factors(g, np.array(s.fouled.sides["outside"].Re))
    Jb = float(J.Jb)
    if J.Jl < LOW_LEAKAGE:
        yield s.finding(
            "watch",
            where="outside",
            says=f"Leakage past the baffles leaves {percent(J.Jl)} of the film (Jl): their clearances are "
            f"{percent(g.rlm)} of the cross-flow area.",
            because={
                "Jl": f"{J.Jl:.2f}, against {LOW_LEAKAGE:g}",
                "tube to baffle hole": _length(s, exchanger.hole_clearance),
                "shell to baffle": _length(s, exchanger.baffle_clearance),
                "baffle spacing": _length(s, g.Lbc),
            },
            do="State measured clearances where they are assumed; wider spacing leaks less.",
        )
    if Jb < LOW_BYPASS:
        yield s.finding(
            "watch",
            where="outside",
            says=f"Bypass round the bundle leaves {percent(Jb)} of the film (Jb): it takes {percent(g.Fbp)} of the "
            "cross-flow area.",
            because={
                "Jb": f"{Jb:.2f}, against {LOW_BYPASS:g}",
                "bore less bundle diameter": _length(s, g.Ds - g.Dotl),
                "pairs of sealing strips": str(exchanger.sealing_strip_pairs),
            },
            do="Check bundle diameter and sealing strips; a pair for every five to seven rows crossed is usual.",
        )


@rule(
    "unsupported-span",
    title="A tube span is longer than is built",
    grades=("act",),
    needs="the tube material",
    source=str(standard_sizes.TEMA),
)
def unsupported_span(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None:
        return
    metal = _metal(s, exchanger, "the longest usual span")
    if exchanger.shell_letter == "X":
        raise Missing("the support plates of an X shell")
    if s.case.T_in(s.case.hot) > SPAN_TEMPERATURE:
        raise Missing(f"the longest usual span above {s.T(SPAN_TEMPERATURE)}")
    try:
        longest = standard_sizes.unsupported_span(float(exchanger.tube_od), metal.span_group)
    except ValueError as unknown:
        raise Missing(str(unknown)) from None
    where, x = max(_window_spans(exchanger).items(), key=lambda pair: pair[1])
    if x > longest:
        yield s.finding(
            "act",
            where="exchanger.baffle_spacing",
            says=f"The window tubes {where} span {_length(s, x)} without support, over the {_length(s, longest)} that "
            f"tubes of {_length(s, exchanger.tube_od)} in {metal.name} are built with: they sag and wear in the baffle "
            "holes.",
            because={"longest span": _length(s, x), "longest built": _length(s, longest)},
            do="Check the baffle spacings with the drawing; tubes in the windows miss every other baffle.",
        )


def _window_spans(exchanger: ShellAndTube) -> dict[str, float]:
    """Unsupported spans [m] of the tubes in the windows, by where they are."""
    (count, inlet, outlet), spacing = exchanger.path_spacings, float(exchanger.baffle_spacing or 0.0)
    if count == 1:
        return {"past the one baffle": inlet + outlet}
    middle = {"between the ends": 2 * spacing} if count > 2 else {}
    return {**middle, "at the inlet": inlet + spacing, "at the outlet": outlet + spacing}


# --- driving force ----------------------------------------------------------------------------------------------------


def _counter_current(exchanger: ShellAndTube) -> bool:
    return exchanger.shell_letter in "EF" and exchanger.tube_passes == exchanger.shell_type.passes


@rule(
    "temperature-cross",
    title="The outlet temperatures cross in a single shell",
    grades=("watch",),
    needs="a rated case",
    source=COMMON_PRACTICE,
)
def temperature_cross(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None or exchanger.shells_in_series > 1 or _counter_current(exchanger):
        return
    T_out, F = s.fouled.T_out, s.fouled.F
    cross = T_out[s.case.cold] - T_out[s.case.hot]
    if cross > 0:
        yield s.finding(
            "watch",
            says=f"The {s.name(s.case.cold)} leaves {s.dT(cross)} hotter than the {s.name(s.case.hot)}: one shell with "
            f"{exchanger.tube_passes} tube passes crosses its outlets at F = {F:.3f}.",
            because={
                f"{s.name(s.case.hot)}, outlet": s.T(T_out[s.case.hot]),
                f"{s.name(s.case.cold)}, outlet": s.T(T_out[s.case.cold]),
                "F": f"{F:.3f}",
            },
            do="Two shells in series, or one tube pass in counterflow, cross without this loss.",
        )


@rule(
    "near-cliff",
    title=f"F falls steeply: {percent(CLIFF)} to {percent(NEAR_CEILING)} of the largest effectiveness",
    grades=("watch",),
    needs="a rated case, and a closed form of its arrangement",
    source=str(AHMAD_1988),
)
def near_cliff(s: Subject) -> Iterator[Finding]:
    exchanger = _exchanger(s)
    if exchanger is None or _counter_current(exchanger):
        return
    state, C = s.fouled, capacities(s.fouled)
    Cr = min(C.values()) / max(C.values())
    ceiling = exchanger.effectiveness(np.array([1e6]), np.array([Cr]), np.array([C["inside"] <= C["outside"]]))
    if isinstance(ceiling, str):
        raise Missing(f"the ceiling of the effectiveness: {ceiling}")
    share = state.effectiveness / float(ceiling[0])
    if not CLIFF < share <= NEAR_CEILING or Cr == 0:
        return
    F = []
    for more in (1.0, 1.01):
        T_in = {side: np.array([s.case.T_in(side)]) for side in state.T_out}
        T_out = {side: T_in[side] + more * (state.T_out[side] - T_in[side]) for side in T_in}
        force = exchanger.driving_force(T_in, T_out)
        assert not isinstance(force, str)
        F.append(float(force[1][0]))
    if F[0] - F[1] <= STEEP:
        return
    then = f"would take F from {F[0]:.3f} to {F[1]:.3f}" if F[1] > 0 else "is out of its reach"
    yield s.finding(
        "watch",
        says=f"The effectiveness is {percent(share)} of what this arrangement can reach with these flows: 1 % more "
        f"duty {then}.",
        because={
            "effectiveness over its ceiling": f"{percent(share)}, against {percent(CLIFF)}",
            "F, closed form": f"{F[0]:.3f}",
            "F at 1 % more duty": f"{F[1]:.3f}",
        },
        do="Do not rely on this exchanger for a colder or hotter outlet; shells in series move the cliff away.",
    )


# --- vibration --------------------------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class _Span:
    where: str
    length: float
    v: float
    """Highest cross-flow velocity along it [m/s]."""
    f: float
    """First natural frequency [Hz]."""


def _across(s: Subject) -> tuple[float, float]:
    """The least density [kg/m³] on the shell side, and the velocity [m/s] across the bundle at it."""
    at = s.fouled.sides["outside"]
    rho_mean = float(s.fluid("outside").at(np.asarray((at.T_in + at.T_out) / 2)).rho)
    rho = min(at.properties_in["rho"], at.properties_out["rho"])
    return rho, at.velocity * rho_mean / rho


def _mass(s: Subject, exchanger: ShellAndTube, metal: Metal, rho_outside: float) -> float:
    """Of a tube with its content and the fluid that it moves [kg/m]."""
    at = s.fouled.sides["inside"]
    ends = [at.properties_in["rho"], at.properties_out["rho"]]
    rho_inside = min(ends) if s.phase("inside") == "condensing" else sum(ends) / 2
    od, C_m = float(exchanger.tube_od), _added_mass(exchanger)
    return float(vibration.mass_per_length(od, exchanger.tube_id, metal.density, rho_inside, rho_outside, C_m))


def _added_mass(exchanger: ShellAndTube) -> float:
    return float(vibration.added_mass_coefficient(exchanger.tube_pitch / exchanger.tube_od, exchanger.angle))


def _spans(s: Subject, exchanger: ShellAndTube, metal: Metal, m: float, v: float) -> list[_Span]:
    """The window tubes, which span two spacings: a tubesheet clamps their end, a baffle is a pin."""
    od, bore, spacing = float(exchanger.tube_od), exchanger.tube_id, float(exchanger.baffle_spacing or 0.0)
    _, inlet, outlet = exchanger.path_spacings
    bay = {"at the inlet": inlet, "at the outlet": outlet, "past the one baffle": min(inlet, outlet)}
    # The inner ends of a split shell's paths and the bends of U-tubes are no tubesheets.
    clamped = not exchanger.u_tubes and exchanger.shell_type.paths == 1
    found = []
    for where, length in _window_spans(exchanger).items():
        ends: Ends = "pinned-pinned"
        if clamped and where in bay:
            ends = "fixed-fixed" if where == "past the one baffle" else "fixed-pinned"
        fastest = v * max(1.0, spacing / bay.get(where, spacing))
        f = float(vibration.natural_frequency(od, bore, metal.E, m, length, ends))
        found.append(_Span(where=where, length=length, v=fastest, f=f))
    return found


def _hertz(s: Subject, f: float) -> str:
    return s.show(f, "frequency", 3)


@rule(
    "tube-vibration",
    title="The cross-flow nears the onset of tube vibration (screening)",
    grades=("act", "watch"),
    needs="a rated case, and the tube material",
    source="; ".join(str(constants.source) for constants in CONNORS_SETS),
)
def tube_vibration(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None:
        return
    if s.phase("outside") == "condensing":
        raise Missing("a cross-flow velocity: the shell side condenses on its way")
    rho, v = _across(s)
    metal = _metal(s, exchanger, "weight and stiffness of the tubes")
    od, m = float(exchanger.tube_od), _mass(s, exchanger, metal, rho)
    worst = max(_spans(s, exchanger, metal, m, v), key=lambda at: at.v / at.f)
    over = int(vibration.sets_exceeded(worst.v, worst.f, od, m, rho))
    if not over:
        return
    critical = {
        f"critical velocity, K {c.K:g} and damping {percent(c.zeta)}": s.velocity(
            float(vibration.critical_velocity(c, worst.f, od, m, rho))
        )
        for c in CONNORS_SETS
    }
    because = {
        "cross-flow velocity": s.velocity(worst.v),
        **critical,
        "span": _length(s, worst.length),
        "natural frequency": _hertz(s, worst.f),
        "mass with the fluid moved": s.show(m, "mass_per_length", 3),
    }
    if exchanger.u_tubes and exchanger.u_bend_length:
        bend = vibration.natural_frequency(
            od, exchanger.tube_id, metal.E, m, float(exchanger.u_bend_length), "pinned-pinned"
        )
        because["natural frequency of the mean U-bend, taken straight"] = _hertz(s, float(bend))
    gas = " A gas damps less than these constants take." if s.phase("outside") == "gas" else ""
    yield s.finding(
        "act" if over == len(CONNORS_SETS) else "watch",
        where="outside",
        says=f"Window tubes {worst.where} meet {s.velocity(worst.v)} of cross-flow, over the critical velocity under "
        f"{'both sets' if over == len(CONNORS_SETS) else 'one of two sets'} of usual constants.{gas}",
        because=because,
        do="Listen at the shell and look for thinned tubes at the baffles; have it analysed before more flow is put "
        f"through. {SCREENING}",
    )


@rule(
    "vortex-resonance",
    title="Eddies in step with the tubes (screening)",
    grades=("watch",),
    needs="a rated case, and the tube material",
    source=f"Strouhal numbers of {vibration.STROUHAL[0]:g} to {vibration.STROUHAL[1]:g} ({COMMON_PRACTICE}); "
    f"{vibration.OWEN_1965}",
)
def vortex_resonance(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None:
        return
    if s.phase("outside") == "condensing":
        raise Missing("a cross-flow velocity: the shell side condenses on its way")
    rho, v = _across(s)
    metal = _metal(s, exchanger, "weight and stiffness of the tubes")
    for at in _spans(s, exchanger, metal, _mass(s, exchanger, metal, rho), v):
        shed, buffet = _excitation(exchanger, at.v)
        near = _in_step(at.f, shed, buffet)
        if near:
            yield s.finding(
                "watch",
                where="outside",
                says=f"Window tubes {at.where} have their first natural frequency at {_hertz(s, at.f)}, in step with "
                f"{near}.",
                because={
                    "natural frequency": _hertz(s, at.f),
                    "vortex shedding": f"{_hertz(s, shed[0])} to {_hertz(s, shed[1])}",
                    "turbulent buffeting": _hertz(s, buffet),
                    "cross-flow velocity": s.velocity(at.v),
                    "span": _length(s, at.length),
                },
                do=f"Look for wear at the baffle holes; shorter spans or less flow part them. {SCREENING}",
            )
            return


def _excitation(exchanger: ShellAndTube, v: float) -> tuple[tuple[float, float], float]:
    """Span of the shedding frequencies, and the dominant one of the turbulence [Hz], at a cross-flow velocity."""
    od, pitch, layout = float(exchanger.tube_od), float(exchanger.tube_pitch), shell.tube_layout(exchanger.angle)
    low, high = vibration.shedding_frequencies(v, od)
    buffet = vibration.buffeting_frequency(v, od, layout.row * pitch, layout.transverse * pitch)
    return (float(low), float(high)), float(buffet)


def _in_step(f: float, shed: tuple[float, float], buffet: float) -> str:
    """What excites a frequency, within NEAR of it; empty where nothing does."""
    near = []
    if (1 - NEAR) * shed[0] <= f <= (1 + NEAR) * shed[1]:
        near.append("vortex shedding")
    if abs(f / buffet - 1) <= NEAR:
        near.append("the buffeting of turbulence")
    return " and ".join(near)


@rule(
    "acoustic-resonance",
    title="Eddies in step with the gas in the shell (screening)",
    grades=("watch",),
    needs="a rated case",
    source=f"{vibration.PARKER_1978}; {vibration.OWEN_1965}; speed of sound of an ideal gas",
)
def acoustic_resonance(s: Subject) -> Iterator[Finding]:
    exchanger = _baffled(s)
    if exchanger is None or s.phase("outside") != "gas":
        return
    _, v = _across(s)
    at, p = s.fouled.sides["outside"], s.case.p_in("outside")
    sound = speed_of_sound(p, at.properties_in["rho"], at.properties_in["cp"], at.T_in)
    shed, buffet = _excitation(exchanger, v)
    first = float(
        vibration.acoustic_frequency(
            1, sound, float(exchanger.shell_id), exchanger.tube_pitch / exchanger.tube_od, exchanger.angle
        )
    )
    modes = range(1, int((1 + NEAR) * max(shed[1], buffet) / first) + 1)
    for mode in modes:
        near = _in_step(mode * first, shed, buffet)
        if near:
            yield s.finding(
                "watch",
                where="outside",
                says=f"The gas across the shell swings at {_hertz(s, mode * first)} in its mode {mode}, in step with "
                f"{near}: it may hum loudly.",
                because={
                    "acoustic frequency": _hertz(s, mode * first),
                    "vortex shedding": f"{_hertz(s, shed[0])} to {_hertz(s, shed[1])}",
                    "turbulent buffeting": _hertz(s, buffet),
                    "cross-flow velocity": s.velocity(v),
                    "speed of sound": s.velocity(sound),
                },
                do=f"If it hums, note at which flow; a detuning plate along the flow raises the frequency. {SCREENING}",
            )
            return
