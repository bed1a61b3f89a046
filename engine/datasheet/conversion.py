"""A sheet made into a case that can be rated, and a rating printed as a sheet."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np

from engine import fluids, units
from engine.case import Case
from engine.casefile import FORMAT, VERSION, raw_case
from engine.closed_forms import counter_lmtd
from engine.datasheet.figures import (
    DOUBLE_PIPE,
    FLUID_PROPERTIES,
    MINIMUM_WALL,
    SHELL_AND_TUBE,
    Figures,
    Missing,
    Subject,
    property_of,
)
from engine.datasheet.geometry import height_of_segment
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.sheet import Sheet, sheet_fields
from engine.sheet.typed import raw_sheet
from engine.stated import SIDES, Figure, Side
from engine.states import Rating, State

STREAM = ("flow", "T_in", "p_in", "T_out", "R_fouling", "dp_allowed")
LIMITS = ("design_pressure", "test_pressure", "design_temperature")
NOZZLES = {
    SHELL_AND_TUBE: ("tube_nozzle_id", "shell_nozzle_id"),
    DOUBLE_PIPE: ("inside_nozzle_id", "outside_nozzle_id"),
}
EXACTLY = 17
"""Digits of a figure that was not typed."""


def case_of_sheet(sheet: Sheet) -> dict[str, Any]:
    """The keys of a case as a file holds them, as far as the sheet goes: what it lacks is missing in the case too.

    Outlets of the sheet are required outlets of the case. A sheet's own properties stand before the library's.
    """
    about = Subject(sheet=sheet)
    kind = DOUBLE_PIPE if about.double_pipe else SHELL_AND_TUBE
    limits = {
        f"{side}_{name}": _typed(value)
        for side in SIDES
        for name in LIMITS
        if (value := getattr(sheet.side(side), name)) is not None
    }
    keys: dict[str, Any] = {
        "format": FORMAT,
        "version": VERSION,
        "tag": sheet.item,
        **{side: _stream(about, side) for side in SIDES},
        "exchanger": dict(_double_pipe(sheet) if about.double_pipe else _shell_and_tube(sheet)),
        "limits": limits,
        "sheet": raw_sheet(sheet),
    }
    keys["exchanger"] |= {
        name: _typed(bore)
        for side, name in zip(SIDES, NOZZLES[kind], strict=True)
        if (bore := sheet.side(side).nozzle_id) is not None
    }
    return {key: value for key, value in keys.items() if value not in (None, {})}


def _typed(value: Any) -> Any:
    if isinstance(value, Figure):
        return value.text or units.show(float(value), value.quantity, "si", EXACTLY)
    return value


def _shown(value: float, quantity: str) -> str:
    return units.show(value, quantity, "si", 6)


def _stream(about: Subject, side: Side) -> dict[str, Any]:
    part = about.sheet.side(side)
    steam = part.steam_in is not None or (part.fluid or "").lower() == "steam"
    without = ("T_in", "p_in", "T_out") if steam else ()
    stated = {
        name: _typed(value) for name in STREAM if name not in without and (value := getattr(part, name)) is not None
    }
    if steam:
        return {"fluid": {"steam": {} if part.p_in is None else {"p": _typed(part.p_in)}}, **stated}
    fluid = _fluid(about, side)
    return {"fluid": fluid, **stated} if fluid is not None else stated


def _fluid(about: Subject, side: Side) -> Any:
    """By the sheet's properties: a table where it has both ends, constants where it has means; else by name."""
    part, v = about.sheet.side(side), Figures(about.values, about)
    name = part.fluid or f"{about.side_name(side)} fluid"
    at_ends = {
        end: {f"{key}": getattr(part, f"{key}_{end}") for key in FLUID_PROPERTIES} | {"T": getattr(part, f"T_{end}")}
        for end in ("in", "out")
    }
    if part.T_in != part.T_out and all(x is not None for row in at_ends.values() for x in row.values()):
        return {"name": name, "table": [_row(row) for row in at_ends.values()]}
    try:
        means = {key: property_of(v, side, key) for key in FLUID_PROPERTIES}
    except Missing:
        return _known(part.fluid)
    printed = {key: getattr(part, key) for key in FLUID_PROPERTIES}
    return {
        "name": name,
        "constant": {
            key: _typed(printed[key]) if _usable(printed[key]) else _shown(means[key], FLUID_PROPERTIES[key])
            for key in FLUID_PROPERTIES
        },
    }


def _usable(value: Any) -> bool:
    return isinstance(value, Figure) and value.quantity != "kinematic_viscosity"


def _row(row: Mapping[str, Any]) -> dict[str, Any]:
    mu = row["mu"]
    dynamic = _typed(mu) if _usable(mu) else _shown(float(mu) * float(row["rho"]), "viscosity")
    return {key: dynamic if key == "mu" else _typed(row[key]) for key in ("T", "rho", "cp", "k", "mu")}


def _known(name: str | None) -> str | None:
    """A name that the library knows; what it does not know stays to be stated."""
    if name is None:
        return None
    try:
        fluids.fluid_at(fluids.Pure(name), 1e5)
    except fluids.FluidError:
        return None
    return name


def _shared(sheet: Sheet, model: type[Any], without: tuple[str, ...] = ()) -> Iterator[tuple[str, Any]]:
    """Fields that sheet and exchanger call alike."""
    for name in model.model_fields:
        if name in sheet_fields() and name not in without and (value := getattr(sheet, name)) is not None:
            yield name, _typed(value)


def _shell_and_tube(sheet: Sheet) -> Iterator[tuple[str, Any]]:
    yield "type", SHELL_AND_TUBE
    yield from _shared(sheet, ShellAndTube, ("tubes", "tube_wall", "gauge", "tube_length", "baffle_cut", "material"))
    if sheet.tubes is not None:
        yield "tubes", sheet.tubes * (2 if sheet.tubes_are == "U-tubes" else 1)
    if sheet.tube_wall is not None:
        thick = sheet.tube_wall_is == "minimum"
        yield "tube_wall", _shown(MINIMUM_WALL * sheet.tube_wall, "length") if thick else _typed(sheet.tube_wall)
    elif sheet.gauge is not None:
        yield "gauge", sheet.gauge
    elif sheet.tube_od is not None and sheet.tube_id is not None:
        yield "tube_wall", _shown((sheet.tube_od - sheet.tube_id) / 2, "length")
    if sheet.tube_length is not None:
        held = (sheet.tubesheet_thickness or 0.0) * (1 if (sheet.tema or "").upper().endswith("U") else 2)
        between = sheet.area_kind != "gross" and held
        yield "tube_length", _shown(sheet.tube_length - held, "length") if between else _typed(sheet.tube_length)
    if sheet.baffle_cut is not None:
        by_area = sheet.baffle_cut_by == "area"
        yield (
            "baffle_cut",
            _shown(height_of_segment(sheet.baffle_cut), "fraction") if by_area else _typed(sheet.baffle_cut),
        )
    yield from _wall(sheet)


def _double_pipe(sheet: Sheet) -> Iterator[tuple[str, Any]]:
    yield "type", DOUBLE_PIPE
    yield from _shared(sheet, DoublePipe, ("material", "banks_in_parallel"))
    for name in ("inner_pipe", "outer_pipe"):
        pipe = getattr(sheet, name)
        stated = {key: _typed(value) for key in type(pipe).model_fields if (value := getattr(pipe, key)) is not None}
        if stated:
            yield name, stated
    if sheet.banks_in_parallel is not None:
        yield "banks_in_parallel", dict.fromkeys(SIDES, sheet.banks_in_parallel)
    yield from _wall(sheet)


def _wall(sheet: Sheet) -> Iterator[tuple[str, Any]]:
    """Conductivity or material: a case takes one of them."""
    if sheet.wall_conductivity is not None:
        yield "wall_conductivity", _typed(sheet.wall_conductivity)
    elif sheet.material is not None:
        yield "material", sheet.material


# --- a rating as a sheet ----------------------------------------------------------------------------------------------

DIGITS: Mapping[str, int] = {"temperature": 5, "temperature_difference": 4}


def sheet_of_rating(rating: Rating, system: str = "si") -> dict[str, Any]:
    """The keys of a sheet with what a rating found in the fouled state, printed in a system of units.

    Raises ValueError where the rating has no answer, or the exchanger what no sheet has a field for.
    """
    if not rating.states:
        raise ValueError(f"there is no rating to print: {rating.problem}")
    case, fouled = rating.case, rating.fouled
    if isinstance(case.exchanger, DoublePipe) and (case.exchanger.fins or case.exchanger.inner_pipes > 1):
        raise ValueError("a datasheet has no fields for fins, nor for several inner pipes in one outer pipe")
    raw: dict[str, Any] = {}
    for path, value, quantity in (*_sides(case, fouled), *_whole(case, fouled), *_exchanger(case)):
        if value is None or (isinstance(value, float) and not np.isfinite(value)):
            continue
        group, _, name = path.rpartition(".")
        at = raw.setdefault(group, {}) if group else raw
        at[name] = units.show(float(value), quantity, system, DIGITS.get(quantity, 4)) if quantity else _typed(value)
    return raw


Entry = tuple[str, Any, str]
"""Path, value, and the quantity to print it in; none where it stands as it is."""


def _sides(case: Case, fouled: State) -> Iterator[Entry]:
    for side in SIDES:
        stream, at = case.stream(side), fouled.sides[side]
        name = getattr(stream.fluid, "name", None) or getattr(stream.fluid, "solution", None)
        yield f"{side}.fluid", "steam" if stream.condenses else name, ""
        yield f"{side}.flow", at.flow, "mass_flow"
        yield f"{side}.T_in", at.T_in, "temperature"
        yield f"{side}.T_out", at.T_out, "temperature"
        p_in = case.p_in(side)
        yield f"{side}.p_in", p_in, "pressure_absolute"
        if not stream.condenses:
            yield f"{side}.p_out", p_in - at.dp, "pressure_absolute"
            T_mean = 0.5 * (at.T_in + at.T_out)
            mean = case.fluid(side).at(np.asarray(T_mean))
            for key, quantity in FLUID_PROPERTIES.items():
                yield f"{side}.{key}", float(getattr(mean, key)), quantity
                yield f"{side}.{key}_in", at.properties_in[key], quantity
                yield f"{side}.{key}_out", at.properties_out[key], quantity
            # Shell sides have no velocity that two methods mean alike.
            if side == "inside" or isinstance(case.exchanger, DoublePipe):
                yield f"{side}.velocity", at.velocity, "velocity"
            yield f"{side}.dp", at.dp, "pressure_difference"
            yield f"{side}.dp_basis", "fouled", ""
        yield f"{side}.dp_allowed", stream.dp_allowed, ""
        yield f"{side}.R_fouling", at.R_fouling, "fouling_resistance"
        yield f"{side}.h", at.h, "heat_transfer_coefficient"
        for limit in LIMITS:
            yield f"{side}.{limit}", getattr(case.limits, f"{side}_{limit}"), ""


def _whole(case: Case, fouled: State) -> Iterator[Entry]:
    yield "item", case.tag, ""
    yield "revision", case.revision, ""
    yield "status", "estimated", ""
    yield "duty", fouled.duty, "heat_flow"
    yield "area", fouled.area, "area"
    yield "area_kind", "effective", ""
    ends = {side: (np.array([fouled.sides[side].T_in]), np.array([fouled.T_out[side]])) for side in SIDES}
    T_in, T_out = ({side: pair[i] for side, pair in ends.items()} for i in range(2))
    yield "lmtd", counter_lmtd(case, T_in, T_out), "temperature_difference"
    yield "mtd", fouled.mtd, "temperature_difference"
    yield "F", f"{fouled.F:.4f}", ""
    U = fouled.duty / (fouled.area * fouled.mtd)
    yield "U_service", U, "heat_transfer_coefficient"
    yield "U_dirty", fouled.U_dirty, "heat_transfer_coefficient"
    yield "U_clean", fouled.U_clean, "heat_transfer_coefficient"
    yield "wall_resistance", fouled.resistances["wall"], "fouling_resistance"


def _exchanger(case: Case) -> Iterator[Entry]:
    exchanger = case.exchanger
    stated = raw_case(case)["exchanger"]
    known = sheet_fields()
    for name in type(exchanger).model_fields:
        if name in known and name in stated:
            yield name, stated[name], ""
    if isinstance(exchanger, DoublePipe):
        for pipe in ("inner_pipe", "outer_pipe"):
            yield from ((f"{pipe}.{key}", value, "") for key, value in stated[pipe].items())
        if exchanger.banks > 1:
            yield "banks_in_parallel", exchanger.banks, ""
    elif exchanger.shell_letter != "X":
        count, inlet, outlet = exchanger.path_spacings
        yield "baffles", round(count * exchanger.shell_type.paths), ""
        yield "inlet_spacing", inlet, "length"
        yield "outlet_spacing", outlet, "length"
    kind = DOUBLE_PIPE if isinstance(exchanger, DoublePipe) else SHELL_AND_TUBE
    for side, name in zip(SIDES, NOZZLES[kind], strict=True):
        yield f"{side}.nozzle_id", stated.get(name), ""


__all__ = ["case_of_sheet", "sheet_of_rating"]
