"""Whether steam can condense so: drainage of the condensate, steam that falls short, superheat, gas in the steam."""

from __future__ import annotations

from collections.abc import Iterator

from engine import fluids
from engine.case import SteamFluid
from engine.findings import COMMON_PRACTICE, Finding, Missing, Subject, percent, rule
from engine.findings.validity import OWN
from engine.states import Chest

M_WATER, M_AIR = 18.015e-3, 28.96e-3
"""Molar masses [kg/mol]."""
VENT_TOLERANCE = 1.0
"""Below saturation, within which a vent's reading says nothing [K]."""


def _chests(s: Subject) -> dict[str, Chest]:
    """The condensing side of both states; empty where no steam condenses."""
    if s.case.steam_side is None:
        return {}
    return {name: state.chest for name, state in s.states.items() if state.chest is not None}


@rule("steam-hammer", title="Steam and its condensate", grades=("note",), needs="nothing", source=COMMON_PRACTICE)
def steam_hammer(s: Subject) -> Iterator[Finding]:
    side = s.case.steam_side
    if side is not None:
        p = s.case.p_in(side)
        yield s.finding(
            "note",
            where=side,
            says=f"Steam of {s.p(p)} in the {s.name(side)} hammers where condensate stands.",
            because={"condensing point": s.T(fluids.saturation(p).T_sat)},
            do="See that the condensate drains freely before steam is let in.",
        )


@rule(
    "steam-stall",
    title="The steam pressure needed falls under the back pressure of the condensate",
    grades=("act", "watch", "note"),
    needs="a rated case, a required outlet that steam can give, and the back pressure of the condensate",
    source=OWN,
)
def steam_stall(s: Subject) -> Iterator[Finding]:
    side = s.case.steam_side
    if side is None:
        return
    chests = _chests(s)
    duty = s.fouled.required_duty
    if duty is None:
        raise Missing(f"a required duty: {s.rating.requirement or 'no outlet of the other side is stated'}")
    needed = {name: chest.p_required for name, chest in chests.items() if chest.p_required is not None}
    if not needed:
        raise Missing(f"the pressure needed: {chests['fouled'].p_required_problem}")
    back, path = s.case.p_back(side), f"{side}.fluid.steam.back_pressure"
    floor = float(s.case.atmosphere) if back is None else back
    because = {f"chest pressure needed, {name}": s.p(p) for name, p in needed.items()}
    because["atmosphere" if back is None else "back pressure"] = s.p(floor)
    stalled = [name for name, p in needed.items() if p < floor]
    if stalled:
        lowest = s.p(min(needed[name] for name in stalled))
        what = "the atmosphere, and no back pressure is stated" if back is None else "the back pressure"
        yield s.finding(
            "note" if back is None else "act" if "fouled" in stalled else "watch",
            where=path,
            says=f"For the required {s.duty(duty)} the {s.name(side)} needs steam of {lowest} only "
            f"({' and '.join(stalled)}), below {what}: condensate does not drain of itself, floods the area and the "
            "outlet swings.",
            because=because,
            do="Drain with a pump trap, lower the back pressure, or control the level of condensate, not the steam.",
        )
    elif back is None:
        raise Missing(f"{path} is not stated")
    elif stall := {name: chest.stall_duty for name, chest in chests.items() if chest.stall_duty is not None}:
        highest = max(stall.values())
        yield s.finding(
            "note",
            where=path,
            says=f"Condensate drains of itself down to {s.duty(highest)}, {percent(highest / duty)} of the required "
            "duty: below that the chest falls under the back pressure, the other side's flow and inlet as they are.",
            because=because | {f"duty at the back pressure, {name}": s.duty(x) for name, x in stall.items()},
            do="Compare this with the least load in operation.",
        )


@rule(
    "steam-short",
    title="Less steam comes than the area would condense",
    grades=("act", "watch"),
    needs="a rated case",
    source=OWN,
)
def steam_short(s: Subject) -> Iterator[Finding]:
    chests = {name: chest for name, chest in _chests(s).items() if chest.throttled}
    if not chests:
        return
    lowest = min(chests.values(), key=lambda chest: chest.p)
    side, back = lowest.side, s.case.p_back(lowest.side)
    floor = float(s.case.atmosphere) if back is None else back
    under = lowest.p < floor
    drains = (
        f", below the {'atmosphere' if back is None else 'back pressure'}: condensate does not drain" if under else ""
    )
    yield s.finding(
        "act" if under else "watch",
        where=f"{side}.flow",
        says=f"The stated {s.show(lowest.flow, 'mass_flow')} of steam is less than the area would condense at "
        f"{s.p(lowest.p_supply)}: the {s.name(side)} settles at {s.p(lowest.p)}{drains}.",
        because={
            **{f"chest pressure, {name}": s.p(chest.p) for name, chest in chests.items()},
            "supply": s.p(lowest.p_supply),
            "condensing point in the chest": s.T(lowest.T_sat),
        },
        do="Check the steam flow; where a valve sets it, this is the pressure to expect behind it.",
    )


@rule(
    "superheat-dry-wall",
    title="Superheated steam may leave the wall dry",
    grades=("watch",),
    needs="a rated case",
    source=f"condensation on a wall below saturation, whatever the superheat ({COMMON_PRACTICE})",
)
def superheat_dry_wall(s: Subject) -> Iterator[Finding]:
    for name, chest in _chests(s).items():
        if chest.dry_surface is not None and chest.dry_surface >= chest.T_sat:
            yield s.finding(
                "watch",
                where=f"{chest.side}.fluid.steam.superheat",
                says=f"Vapour of {s.T(chest.T_vapour)} would hold the wall beside the warmest other fluid at "
                f"{s.T(chest.dry_surface)}, above the {s.T(chest.T_sat)} at which steam condenses ({name} state): "
                "part of the area stays dry, which this rating does not count.",
                because={
                    "dry surface": s.T(chest.dry_surface),
                    "condensing point": s.T(chest.T_sat),
                    "superheat in the chest": s.dT(chest.T_vapour - chest.T_sat),
                },
                do="Desuperheat the steam, or take the duty as too high by what the dry part lacks.",
            )
            return


@rule(
    "flooded-area",
    title="Condensate stands on part of the area",
    grades=("note",),
    needs="a rated case",
    source=OWN,
)
def flooded_area(s: Subject) -> Iterator[Finding]:
    if s.case.steam_side is None:
        return
    state = s.fouled
    for zone in state.chest.zones if state.chest is not None else ():
        if zone.name == "subcooling" and zone.area is not None and zone.U is not None:
            share = zone.area / state.area
            yield s.finding(
                "note",
                where=f"{s.case.steam_side}.fluid.steam.subcooling",
                says=f"The stated subcooling floods {percent(share)} of the area, which passes "
                f"{percent(zone.duty / state.duty)} of the duty.",
                because={"flooded area": s.show(zone.area, "area"), "U under condensate": s.U(zone.U)},
                do="Take this share as an estimate: the level is set by the drain, not by the area.",
                source=f"free convection or the slow flow of the condensate, the greater ({COMMON_PRACTICE})",
            )


@rule(
    "gas-in-steam",
    title="Gas in the steam that does not condense",
    grades=("watch",),
    needs="the share of air in the steam, or a temperature read at the vent",
    source="partial pressures of ideal gases and the saturation line of water",
)
def gas_in_steam(s: Subject) -> Iterator[Finding]:
    side = s.case.steam_side
    if side is None:
        return
    fluid, p, line = s.case.stream(side).fluid, s.case.p_in(side), fluids.saturation_line()
    assert isinstance(fluid, SteamFluid)
    T_sat, steam, path = fluids.saturation(p).T_sat, fluid.steam, f"{side}.fluid.steam"
    if steam.vent_T is not None:
        T_vent, path = float(steam.vent_T), f"{path}.vent_T"
        share = 1 - float(line.p(T_vent)) / p
        found, how = T_vent < T_sat - VENT_TOLERANCE, "read at the vent"
    elif steam.noncondensable is not None:
        air, water = steam.noncondensable / M_AIR, (1 - steam.noncondensable) / M_WATER
        share, path = air / (air + water), f"{path}.noncondensable"
        T_vent, found, how = (
            float(line.T((1 - share) * p)),
            share > 0,
            "to expect where it enters, and lower at the vent",
        )
    else:
        raise Missing(f"gas in the steam: neither {path}.noncondensable nor {path}.vent_T is stated")
    if found:
        yield s.finding(
            "watch",
            where=path,
            says=f"Gas takes {s.dp(share * p)} of the pressure ({percent(share)} by volume): steam beside it condenses "
            f"{s.dT(T_sat - T_vent)} below {s.T(T_sat)}, and slowly. The rating is for steam without gas.",
            because={
                f"temperature {how}": s.T(T_vent),
                "condensing point without gas": s.T(T_sat),
                "partial pressure of gas": s.dp(share * p),
            },
            do="Vent where the steam ends its way, until the vent runs at the condensing point.",
        )
