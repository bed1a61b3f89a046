"""The computed figures, clean beside fouled: the whole, each side, the profile, the resistances, the drops."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import groupby

import numpy as np
from numpy.typing import NDArray

from engine import units
from engine.exchangers.double_pipe import DoublePipe
from engine.report.blocks import Block, Chart, Line, Strip, Table
from engine.report.inputs import NOT_STATED
from engine.report.rated import Rated
from engine.report.words import NONE, off, percent
from engine.stated import SIDES, Side
from engine.states import Profile

PARTS = {
    "friction": "Friction",
    "returns": "Return bends and headers",
    "entrance_exit": "Entrance and exit",
    "crossflow": "Cross-flow between baffles",
    "window": "Windows",
    "ends": "End zones",
    "nozzles": "Nozzles",
}
PROPERTIES = (
    ("rho", "Density", "density"),
    ("cp", "Specific heat", "specific_heat"),
    ("mu", "Viscosity", "viscosity"),
    ("k", "Conductivity", "conductivity"),
)
U = "heat_transfer_coefficient"


def results(r: Rated) -> Iterator[Block]:
    if not r.both:
        return
    yield Table(
        header=("", "Clean", "95 % interval", "Fouled", "95 % interval"),
        rows=(*_doubted_rows(r), *_bare_rows(r)),
        widths=(2.2, 1.2, 1.5, 1.2, 1.5),
    )
    yield _by_side(r, "Each side; in brackets the 95 % interval", _side_rows(r))
    ends = tuple(f"{r.names[side]}, {end}" for side in SIDES for end in ("inlet", "outlet"))
    yield Table(
        header=("", *ends), rows=tuple(_property_rows(r)), title="Properties used, fouled", widths=(1.2, 1, 1, 1, 1)
    )


def _by_side(r: Rated, title: str, rows: Iterable[tuple[str, ...]]) -> Table:
    return Table(header=("", *r.by_side), rows=tuple(rows), title=title, widths=(1.2, 1, 1, 1, 1))


def _doubted_rows(r: Rated) -> Iterator[tuple[str, ...]]:
    """The figures of the whole that have an interval."""
    rows = (
        ("Duty", "duty", "heat_flow"),
        ("Mean temperature difference", "mtd", "temperature_difference"),
        ("U in service", "U_dirty", U),
        ("U of the same films, no fouling", "U_clean", U),
    )
    for label, name, kind in rows:
        cells: list[str] = []
        for state in r.both:
            value, ends = getattr(state, name), r.ends(state.state, name)
            cells += [r.words.best(value, kind, ends), r.words.span(value, kind, ends)]
        yield (label, *cells)


def _bare_rows(r: Rated) -> Iterator[tuple[str, ...]]:
    show = r.words.show
    rows = {
        "F": [f"{s.F:.3f}" for s in r.both],
        "Effectiveness": [show(s.effectiveness, "fraction", 3) for s in r.both],
        "NTU": [show(s.NTU, "dimensionless", 3) for s in r.both],
        "U required": [show(s.U_required, U, 3) for s in r.both],
        "Margin of U": [NONE if s.margin is None else off(s.margin) for s in r.both],
        **_steam_rows(r),
    }
    for label, (clean, fouled) in rows.items():
        if (clean, fouled) != (NONE, NONE):
            yield label, clean, "", fouled, ""


def _steam_rows(r: Rated) -> dict[str, list[str]]:
    """What condenses, at which pressure, and where its heat goes; empty where nothing condenses."""
    chests, show = [state.chest for state in r.both if state.chest is not None], r.words.show
    if not chests:
        return {}
    zones = [{zone.name: zone for zone in chest.zones} for chest in chests]

    def shares(name: str, of: str) -> list[str]:
        found = [getattr(at.get(name), of, None) for at in zones]
        wholes = [getattr(state, of) for state in r.both]
        return [NONE if x is None else percent(x / whole) for x, whole in zip(found, wholes, strict=True)]

    return {
        "Condensate": [show(chest.flow, "mass_flow") for chest in chests],
        "Steam pressure in the chest": [show(chest.p, "pressure_absolute") for chest in chests],
        "Pressure for the required duty": [show(chest.p_required, "pressure_absolute") for chest in chests],
        "Superheat, of the duty": shares("desuperheating", "duty"),
        "Subcooling, of the duty": shares("subcooling", "duty"),
        "Under condensate, of the area": shares("subcooling", "area"),
    }


def _side_rows(r: Rated) -> Iterator[tuple[str, ...]]:
    show = r.words.show
    outlets = [(at.T_out, "temperature", r.ends(state, f"{side}.T_out")) for side, state, at in r.columns]
    yield ("Outlet", *(r.words.bracketed(*outlet) for outlet in outlets))
    films = [(at.h, U, r.ends(state, f"{side}.h")) for side, state, at in r.columns]
    unit = r.words.unit(U)
    yield (f"Film, own surface, {unit}", *(r.words.bracketed(*film).replace(f" {unit}", "") for film in films))
    sides = [at for _, _, at in r.columns]
    yield (
        "Reynolds, Prandtl number",
        *(_pair(show(at.Re, "dimensionless", 3), show(at.Pr, "dimensionless", 3)) for at in sides),
    )
    yield ("Velocity", *(show(at.velocity, "velocity", 3) for at in sides))
    yield ("Regime", *(at.regime for at in sides))
    yield ("Fouling resistance", *(show(at.R_fouling, "fouling_resistance", 3) for at in sides))
    surfaces = [[show(T, "temperature") for T in at.surface_T] for at in sides]
    yield ("Surface, coldest to hottest", *(f"{low.partition(' ')[0]} to {high}" for low, high in surfaces))


def _pair(first: str, second: str) -> str:
    return NONE if first == second == NONE else f"{first}, {second}"


def _property_rows(r: Rated) -> Iterator[tuple[str, ...]]:
    fouled = [r.rating.fouled.sides[side] for side in SIDES]
    ends = [at for side in fouled for at in (side.properties_in, side.properties_out)]
    for key, name, quantity in PROPERTIES:
        yield (name, *(r.words.show(at[key], quantity) for at in ends))


def profile(r: Rated) -> Iterator[Block]:
    profile = r.rating.fouled.profile if r.both else None
    if profile is None:
        return
    unit, hot, cold = r.words.unit("temperature"), r.case.hot, r.case.cold

    def shown(T: NDArray[np.float64]) -> tuple[float, ...]:
        return tuple(float(t) for t in units.to_unit(T, "temperature", unit))

    lines = (
        Line(name=f"{r.names[hot]} (hot)", y=shown(profile.T[hot]), marker="full circle"),
        Line(name=f"Wall, {r.names[hot].lower()} face", y=shown(profile.wall_T[hot]), dash=(5, 2)),
        Line(name=f"Wall, {r.names[cold].lower()} face", y=shown(profile.wall_T[cold]), dash=(1, 2)),
        Line(name=f"{r.names[cold]} (cold)", y=shown(profile.T[cold]), marker="open square"),
    )
    gap = np.abs(profile.T["inside"] - profile.T["outside"])
    walls = np.concatenate([profile.wall_T[side] for side in SIDES])
    coldest, hottest = (r.words.show(float(T), "temperature") for T in (walls.min(), walls.max()))
    start = f"from the {r.names['inside'].lower()} inlet on"
    exchanger = r.case.exchanger
    legs = exchanger.legs_in_series if isinstance(exchanger, DoublePipe) and exchanger.banks == 1 else 1
    yield Chart(
        x=tuple(float(x) for x in profile.x),
        x_label=f"Share of the area, {start}",
        y_label=f"Temperature, {unit}",
        lines=lines,
        strips=tuple(Strip(name=r.names[side], runs=_runs(profile, side)) for side in SIDES),
        marks=tuple(leg / legs for leg in range(1, legs)),
        alt=f"Fouled, {start}. The fluids come as near as "
        f"{r.words.show(float(gap.min()), 'temperature_difference', 3)}; the metal lies between {coldest} and "
        f"{hottest}.{' Upright lines part the legs.' if legs > 1 else ''}",
    )


def _runs(profile: Profile, side: Side) -> tuple[tuple[float, float, str], ...]:
    """Where along x which regime holds."""
    x, regime = profile.x, profile.regime[side]
    edges = [0.0, *(float(e) for e in 0.5 * (x[1:-2] + x[2:-1])), 1.0]
    runs = []
    for what, group in groupby(range(len(x) - 2), key=lambda cell: regime[cell + 1]):
        cells = list(group)
        runs.append((edges[cells[0]], edges[cells[-1] + 1], what))
    return tuple(runs)


def resistances(r: Rated) -> Iterator[Block]:
    if not r.both:
        return
    show = r.words.show
    rows = [
        (
            r.where(name),
            *(
                cell
                for s in r.both
                for R in [s.resistances[name]]
                for cell in (show(R, "fouling_resistance", 3), percent(R * s.U_dirty))
            ),
        )
        for name in r.rating.fouled.resistances
    ]
    clean, fouled = (show(1.0 / s.U_dirty, "fouling_resistance", 3) for s in r.both)
    yield Table(
        header=("On the outside bare area", "Clean", "Share", "Fouled", "Share"),
        rows=(*rows, ("Sum, 1/U in service", clean, percent(1.0), fouled, percent(1.0))),
        widths=(2, 1.4, 0.8, 1.4, 0.8),
    )


def drops(r: Rated) -> Iterator[Block]:
    if r.both:
        yield _by_side(r, "", _drop_rows(r))


def _drop_rows(r: Rated) -> Iterator[tuple[str, ...]]:
    kind, columns = "pressure_difference", r.columns
    for part in dict.fromkeys(part for _, _, at in columns for part in at.drops):
        if any(at.drops.get(part) for _, _, at in columns):
            yield (PARTS.get(part, part), *(r.words.show(at.drops.get(part), kind, 3) for _, _, at in columns))
    totals = [(at.dp, kind, r.ends(state, f"{side}.dp")) for side, state, at in columns]
    yield ("Total", *(r.words.bracketed(*total) for total in totals))
    allowed = [(at.dp, r.case.stream(side).dp_allowed) for side, _, at in columns]
    yield ("Allowed", *(NOT_STATED if most is None else r.words.typed(most) for _, most in allowed))
    yield (
        "Used of the allowed",
        *(NONE if most is None or np.isnan(dp) else percent(dp / most, 0) for dp, most in allowed),
    )
