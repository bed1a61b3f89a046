"""The arithmetic of a check with the sheet's own figures filled in, as typed."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from typing import Any

from engine import effectiveness as exact
from engine import units
from engine.datasheet import Checked, Line, figures
from engine.datasheet.figures import Figures, Missing, changes_phase, property_of, side_heat, sides, specific_heat
from engine.sheet import PARTS
from engine.stated import Figure

Terms = Callable[[str], str]

NAMES = r"\{([^}]+)\}"
"""Of the terms in a formula."""

FOULING = "{outside.R_fouling} + {inside.R_fouling} × {od} / {bore}"
WALL = "{od} × ln({od} / {bore}) / (2 × {wall_conductivity})"
RECOMPUTED: Mapping[str, str] = {
    "A1": "{parts}",
    "A2": "{parts out}",
    "A3": "{hot.flow} × {hot.cp} × ({hot.T_in} − {hot.T_out})",
    "A4": "{cold.flow} × {cold.cp} × ({cold.T_out} − {cold.T_in})",
    "A6": "{side.change} × {side.latent_heat}",
    "A7": "{side.noncondensables_out}",
    "A8": "{side.p_in} − {side.dp}",
    "A10": "the library, at the mean of {side.T_in} and {side.T_out}",
    "B2": "logarithmic mean of {ends}",
    "B3 F": "F of {arrangement} at {ratios}",
    "B3 MTD": "F of {arrangement} at {ratios}, times the logarithmic mean of {ends}",
    "B7": "effectiveness of {arrangement} at NTU = {U_service} × {surface} / C_min, times C_min × "
    "({hot.T_in} − {cold.T_in}); C = {hot.flow} × {hot.cp} and {cold.flow} × {cold.cp}",
    "C1": "{duty} / ({surface} × {mtd})",
    "C2": f"1 / (1 / {{U_clean}} + {FOULING})",
    "C3 as printed": "{U_dirty} / {U_service}",
    "C5 films": "1 / {outside.h} + {od} / {bore} / {inside.h}",
    "C6": "film of the tube relation at {inside.velocity}, {inside.rho}, {inside.mu}, {inside.cp}, {inside.k}, "
    "bore {bore}",
    "C7": "our own rating of the case",
    "C8 resistance": WALL,
    "C8 conductivity": "the table of alloys, for {material}",
    "D1": "{area of tubes}",
    "D3": "{area_per_shell} × {shells}",
    "D4": "0.785 × CTP / CL × ({shell_id} / {tube_pitch})², for {tube_passes} passes at {layout_angle}",
    "D6 bore": "({tube_od} − {tube_id}) / 2",
    "D6 gauge": "wall of {gauge}",
    "D7": "{side.flow} / ({side.rho} × {passage})",
    "D8 ligament": "1.25 × {tube_od}",
    "D8 cleaning": "{tube_od} + 6.4 mm",
    "D9": "({baffles} − 1) × {baffle_spacing} + {inlet_spacing} + {outlet_spacing}",
    "D10": "{shell_id} / 5 and {shell_id}, or half of the longest unsupported span of {tube_od}",
    "D12": "our own rating of the case",
    "D13": "{side.dp_allowed}",
    "D16 inside.printed": "({side.flow} / (π/4 × {side.nozzle_id²}))² / {side.rho}",
    "D16 outside.printed": "({side.flow} / (π/4 × {side.nozzle_id²}))² / {side.rho}",
    "D18": "1000 kg/m³ × π/4 × {tube_length} × ({shell_id²} − {tubes} × ({od²} − {bore²})) × {shells}",
    "E3": "10/13 × the design pressure of the high side",
    "E8": "the case",
}
"""What the other figures give, by check, or by check and place."""

PRINTED: Mapping[str, str] = {
    "A2": "{parts in}",
    "A7": "{side.noncondensables_in}",
    "A12": "{side.cp} × {side.mu} / {side.k}",
    "B2": "{mtd} / {F}",
    "B4": "{arrangement} at {ratios}",
    "C3 sign": "{U_dirty} / {U_service}",
    "C3 size": "{U_dirty} / {U_service}",
    "C4": "{U_dirty} / {U_clean}",
    "C5": f"1 / {{U_clean}} − {WALL}",
    "C6 room in clean U": f"{{od}} / {{bore}} / (1 / {{U_clean}} − {WALL})",
    "C7": f"1 / {{U_clean}} − {WALL} − our own inside film",
    "C10": f"({FOULING}) × {{U_clean}}",
    "D18": "{weight_full} − {weight_empty}",
    "E2": "{side.test_pressure} / {side.design_pressure}",
    "E4 running": "half the difference of the mean temperatures of both sides",
    "E4 one side lost": "the tubes at the temperature of the side that is left",
}
"""How the sheet's side of a comparison is made, where no single figure is it."""


def arithmetic(c: Checked, system: str = "si") -> tuple[str, ...]:
    """The lines of a comparison: what the sheet means, what the other figures give, and how far apart they may be.

    Empty for a check that compares no figures.
    """
    line = c.line
    if line is None:
        return ()
    terms = _terms(c, system)
    if c.check.id == "A5":
        return (*_balance(c, terms, system), _apart(c, line, system))
    sheet = f"The sheet: {_sheet(c, line, terms, system)}"
    if line.bound == "within":
        return sheet, _expected(c, line, terms, system)
    return sheet, _expected(c, line, terms, system), _apart(c, line, system)


def _formula(c: Checked, formulas: Mapping[str, str], terms: Terms) -> str:
    found = formulas.get(f"{c.check.id} {c.where}") or formulas.get(c.check.id)
    return re.sub(NAMES, lambda name: terms(name[1]), found) if found else ""


def _sheet(c: Checked, line: Line, terms: Terms, system: str) -> str:
    if line.of in c.subject.values:
        return f"{c.subject.label(line.of)} {terms(line.of)}"
    shown = " = ".join(part for part in (_formula(c, PRINTED, terms), c.shown(line.sheet, system)) if part)
    return f"{line.name}: {shown}" if line.name else shown


def _expected(c: Checked, line: Line, terms: Terms, system: str) -> str:
    made, shown = _formula(c, RECOMPUTED, terms), c.expected(system)
    if line.bound:
        return f"Expected: {shown}{f' ({made})' if made else ''}"
    return f"Recomputed: {made} = {shown}" if made else f"Recomputed: {shown}"


def _apart(c: Checked, line: Line, system: str) -> str:
    share = f", {100 * (c.rounding_share or 0.0):.0f} % of it for rounding"
    apart = c.shown_difference(line.misfit, system, 3)
    return f"Difference: {apart}; allowed ±{c.shown_difference(c.tolerance, system, 2)}{share}"


def _balance(c: Checked, terms: Terms, system: str) -> tuple[str, ...]:
    """Both sides and the printed duty, one line each."""
    v = Figures(c.subject.values, c.subject)
    lines = []
    for side, id in zip(sides(v), ("A3", "A4"), strict=True):
        made = "latent and sensible heat" if changes_phase(v, side) else RECOMPUTED[id]
        made = re.sub(NAMES, lambda name: terms(name[1]), made)
        shown = units.show(side_heat(v, side), "heat_flow", system)
        lines.append(f"{c.subject.side_name(side).capitalize()}: {made} = {shown}")
    if "duty" in c.fields:
        lines.append(f"The sheet: {c.subject.label('duty')} {terms('duty')}")
    return tuple(lines)


# --- filling in -------------------------------------------------------------------------------------------------------


def _terms(c: Checked, system: str) -> Terms:
    subject = c.subject
    v = Figures(subject.values, subject)
    at = c.where.partition(".")[0]

    def typed(path: str) -> str:
        value = subject.values.get(path)
        if value is None:
            return f"({subject.label(path)})"
        if isinstance(value, Figure) and value.text:
            return value.text.removesuffix(" -")
        if isinstance(value, Figure) and value.quantity:
            return units.show(float(value), value.quantity, system)
        return units.show(value, "length", system) if isinstance(value, float) else str(value)

    def placed(name: str) -> str:
        group, _, rest = name.partition(".")
        if group in ("hot", "cold"):
            return f"{sides(v)[0 if group == 'hot' else 1]}.{rest}"
        return f"{at}.{rest}" if group == "side" else name

    def parts(end: str) -> str:
        stated = [typed(f"{at}.{part}_{end}") for part in PARTS if f"{at}.{part}_{end}" in subject.values]
        return " + ".join(stated)

    def product(*paths: str) -> str:
        return " × ".join(typed(path) for path in paths if path in c.fields)

    def surface() -> str:
        if "area" not in c.fields:
            return product("area_per_shell", "shells_in_series", "shells_in_parallel")
        shells = ("shells_in_series", "shells_in_parallel") if subject.values.get("basis") == "shell" else ()
        return product("area", *shells)

    def bore() -> str:
        if "tube_id" in c.fields:
            return typed("tube_id")
        if subject.double_pipe:
            return length(figures.bore)
        return f"({typed('tube_od')} − 2 × {typed('tube_wall' if 'tube_wall' in c.fields else 'gauge')})"

    def tubes() -> str:
        return f"2 × {typed('tubes')}" if subject.values.get("tubes_are") == "U-tubes" else typed("tubes")

    def passage() -> str:
        if subject.double_pipe:
            return f"π/4 × {term('bore²')}" if at == "inside" else f"π/4 × ({term('shell bore²')} − {term('od²')})"
        trains = f" × {typed('shells_in_parallel')}" if "shells_in_parallel" in c.fields else ""
        return f"π/4 × {term('bore²')} × {tubes()} / {typed('tube_passes')}{trains}"

    def area_of_tubes() -> str:
        if subject.double_pipe:
            return f"π × {od()} × {product('leg_length', 'legs_in_series', 'banks_in_parallel')}"
        between = " less the tubesheets" if "tubesheet_thickness" in c.fields else ""
        shells = product("shells_in_series", "shells_in_parallel")
        return f"π × {od()} × {typed('tube_length')}{between} × {tubes()}{f' × {shells}' if shells else ''}"

    def od() -> str:
        return typed("tube_od") if "tube_od" in c.fields else length(figures.outside_diameter)

    def length(of: Callable[[Figures], float]) -> str:
        return units.show(of(v), "length", system)

    def ends() -> str:
        first = "{hot.T_in} − {cold.T_out}", "{hot.T_out} − {cold.T_in}"
        if "arrangement" in c.fields and subject.values["arrangement"] == "co-current":
            first = "{hot.T_in} − {cold.T_in}", "{hot.T_out} − {cold.T_out}"
        return " and ".join(f"({re.sub(NAMES, lambda name: term(name[1]), end)})" for end in first)

    def ratios() -> str:
        hot, cold = sides(v)
        T = [float(v[f"{side}.{end}"]) for side in (hot, cold) for end in ("T_in", "T_out")]
        P, R = exact.terminal_ratios(T[0], T[1], T[2], T[3])
        return f"P = {float(P):.3f}, R = {float(R):.3f}"

    def arrangement() -> str:
        if subject.double_pipe:
            return "pure counter- or co-current flow"
        shells = subject.values.get("shells_in_series") or 1
        many = "one shell" if shells == 1 else f"{shells} shells in series"
        return f"{many} of type {typed('tema')} with {typed('tube_passes')} tube passes"

    def change() -> str:
        for part in ("vapour", "steam"):
            paths = [f"{at}.{part}_{end}" for end in ("in", "out") if f"{at}.{part}_{end}" in c.fields]
            if paths:
                return f"({' − '.join(map(typed, paths))})" if len(paths) > 1 else typed(paths[0])
        return typed(f"{at}.flow")

    def of_property(path: str) -> str:
        """A property as printed, the mean of both ends, or what the library knows."""
        group, _, name = path.partition(".")
        if path in c.fields:
            return typed(path)
        ends = [f"{path}_{end}" for end in ("in", "out") if f"{path}_{end}" in c.fields]
        if ends:
            return typed(ends[0]) if len(ends) == 1 else f"(mean of {typed(ends[0])} and {typed(ends[1])})"
        try:
            side: Any = group
            value = specific_heat(v, side)[0] if name == "cp" else property_of(v, side, name)
        except Missing:
            return f"({subject.label(path)})"
        quantity = {"cp": "specific_heat", "rho": "density", "mu": "viscosity", "k": "conductivity"}[name]
        return f"{units.show(value, quantity, system)} (library)"

    def flow(path: str) -> str:
        value = subject.values.get(path)
        if isinstance(value, Figure) and value.quantity == "volume_flow":
            side = path.partition(".")[0]
            rho = next((p for p in (f"{side}.rho_in", f"{side}.rho") if p in subject.values), f"{side}.rho")
            return f"{typed(path)} × {of_property(rho) if rho in c.fields else 'density at the inlet'}"
        return typed(path)

    whole: Mapping[str, Callable[[], str]] = {
        "surface": surface, "bore": bore, "tubes": tubes, "passage": passage, "area of tubes": area_of_tubes, "od": od,
        "ends": ends, "ratios": ratios, "arrangement": arrangement,
        "shell bore": lambda: length(figures.shell_bore),
        "shells": lambda: product("shells_in_series", "shells_in_parallel") or "1",
        "parts": lambda: parts(c.where.partition(".")[2]), "parts in": lambda: parts("in"),
        "parts out": lambda: parts("out"),
    }  # fmt: skip

    def term(name: str) -> str:
        if name.endswith("²"):
            inner = term(name[:-1])
            return f"{inner}²" if inner.endswith(")") else f"({inner})²"
        if name in whole:
            return whole[name]()
        if name == "side.change":
            return change()
        path = placed(name)
        last = path.rpartition(".")[2]
        if "." in path and last in ("rho", "cp", "mu", "k"):
            return of_property(path)
        return flow(path) if last == "flow" else typed(path)

    return term


__all__ = ["arithmetic"]
