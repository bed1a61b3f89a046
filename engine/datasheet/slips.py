"""Slips that put a figure off by a known factor: one unit for another, a part for the whole, gauge for absolute.

A factor is what the figure as it stands is times what it should be. The factors between units are those of the unit
table, which takes them from scipy.constants.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from engine import units
from engine.datasheet.driving_force import factor, log_mean_difference
from engine.datasheet.figures import Figures, Missing, Subject, bore, outside_diameter, property_of
from engine.stated import Figure, Side

MATCH = 0.02
"""How near a misfit must come to a slip, beside what rounding allows."""

CONFUSED: Mapping[str, tuple[tuple[str, str], ...]] = {
    "heat_transfer_coefficient": (
        ("W/m²K", "Btu/h·ft²·°F"), ("W/m²K", "kcal/h·m²·°C"), ("kcal/h·m²·°C", "Btu/h·ft²·°F"), ("kW/m²K", "W/m²K"),
    ),
    "fouling_resistance": (
        ("m²K/W", "h·ft²·°F/Btu"), ("m²K/W", "h·m²·°C/kcal"), ("h·m²·°C/kcal", "h·ft²·°F/Btu"), ("m²K/W", "m²K/kW"),
    ),
    "heat_flow": (
        ("kW", "Mcal/h"), ("MW", "Gcal/h"), ("MW", "MMBtu/h"), ("kW", "kBtu/h"), ("kW", "MJ/h"), ("Mcal/h", "kBtu/h"),
        ("Mcal/h", "MJ/h"), ("kBtu/h", "MJ/h"), ("kW", "MW"), ("W", "Btu/h"),
    ),
    "mass_flow": (
        ("kg/h", "lb/h"), ("kg/s", "t/h"), ("t/h", "klb/h"), ("kg/s", "kg/h"), ("kg/s", "lb/h"), ("t/h", "kg/h"),
    ),
    "volume_flow": (("m³/h", "gpm"), ("L/s", "m³/h"), ("m³/h", "L/min"), ("L/s", "gpm"), ("m³/h", "ft³/h")),
    "specific_heat": (("kJ/kgK", "kcal/kg·°C"), ("kJ/kgK", "J/kgK")),
    "conductivity": (
        ("W/mK", "Btu/h·ft·°F"), ("W/mK", "kcal/h·m·°C"), ("kcal/h·m·°C", "Btu/h·ft·°F"),
        ("W/mK", "Btu·in/h·ft²·°F"), ("W/mK", "kW/mK"),
    ),
    "viscosity": (
        ("cP", "Pa·s"), ("cP", "lb/ft·h"), ("cP", "kg/m·h"), ("cP", "P"), ("Pa·s", "P"), ("cP", "lb/ft·s"),
        ("cP", "µPa·s"),
    ),
    "density": (("kg/m³", "lb/ft³"), ("kg/m³", "g/cm³")),
    "specific_enthalpy": (("kJ/kg", "kcal/kg"), ("kJ/kg", "Btu/lb"), ("kcal/kg", "Btu/lb"), ("kJ/kg", "J/kg")),
    "pressure_difference": (
        ("kPa", "psi"), ("bar", "psi"), ("kPa", "bar"), ("kPa", "mbar"), ("bar", "mH2O"), ("kPa", "mH2O"),
        ("kPa", "Pa"),
    ),
    "length": (("mm", "in"), ("m", "ft"), ("mm", "cm"), ("mm", "m"), ("ft", "in"), ("cm", "in")),
    "area": (("m²", "ft²"),),
    "velocity": (("m/s", "ft/s"), ("m/s", "cm/s")),
    "mass": (("kg", "lb"), ("t", "kg")),
    "temperature_difference": (("K", "°F"),),
    "momentum_flux": (("kg/m·s²", "lb/ft·s²"),),
}  # fmt: skip
"""Pairs of units that are taken for each other, the commonest first."""


@dataclass(frozen=True, kw_only=True)
class Candidate:
    """A value worth trying for a figure, such as the one that it would have without a slip."""

    to: float
    name: str = ""
    """Of the slip, where it is one."""
    factor: float = 1.0
    """Of the figure as it stands over what it should be; 1 for a slip that adds."""
    also: Mapping[str, float] = field(default_factory=dict)
    """What was computed from the figure and changes with it."""


def candidates(subject: Subject, path: str) -> Iterator[Candidate]:
    """The values a figure of the sheet would have if it had not slipped, the commonest slip first."""
    value = subject.sheet_values[path]
    if isinstance(value, (str, bool)):
        return
    x = float(value)
    name = path.rpartition(".")[2]
    for words, share in _of_parts(subject, path, name):
        yield Candidate(name=words, factor=share, to=x / share)
    if path in ("F", "mtd"):
        yield from _of_shells(subject, path, x)
    if not isinstance(value, Figure):
        return
    quantity = value.quantity
    if quantity == "temperature":
        yield from _of_temperature(x)
        return
    if quantity in ("pressure_absolute", "pressure_gauge"):
        atmosphere = units.from_unit(1.0, "pressure_difference", "atm")
        yield Candidate(name="an absolute pressure taken for a gauge one", factor=1.0, to=x - atmosphere)
        yield Candidate(name="a gauge pressure taken for an absolute one", factor=1.0, to=x + atmosphere)
    if quantity == "temperature_difference":
        to = x - units.from_unit(32.0, "temperature_difference", "°F")
        if to > 0:
            yield Candidate(name="a difference converted with +32", factor=x / to, to=to)
    yield from sorted(_of_units(value), key=lambda slip: not slip.name.endswith(f" read as {_label(value)}"))
    if quantity in ("viscosity", "kinematic_viscosity"):
        yield from _of_viscosity(subject, path, x, quantity)


def _of_units(value: Figure) -> Iterator[Candidate]:
    """One unit read as another; a figure meant in `one` and read in `other` stands too small by their ratio."""
    quantity = {
        "pressure_absolute": "pressure_difference", "pressure_gauge": "pressure_difference",
        "kinematic_viscosity": "viscosity",
    }.get(value.quantity, value.quantity)  # fmt: skip
    x = float(value)
    for one, other in CONFUSED.get(quantity, ()):
        ratio = units.from_unit(1.0, quantity, one) / units.from_unit(1.0, quantity, other)
        yield Candidate(name=f"{one} read as {other}", factor=1 / ratio, to=x * ratio)
        yield Candidate(name=f"{other} read as {one}", factor=ratio, to=x / ratio)


def _label(value: Figure) -> str:
    """The unit that the figure was typed in."""
    return units.parse(value.text, value.quantity).unit if value.text else ""


def _of_parts(subject: Subject, path: str, name: str) -> Iterator[tuple[str, float]]:
    """A part for the whole or the whole for a part: (name, factor)."""
    v = Figures(subject.values, subject)
    if path == "tubes":
        yield "U-tubes counted for their legs", 0.5
        yield "legs counted for U-tubes", 2.0
    n = {key: int(v.get(key) or 1) for key in ("shells_in_series", "shells_in_parallel")}
    whole = n["shells_in_series"] * n["shells_in_parallel"]
    if name in ("area", "duty", "tubes", "area_per_shell") and whole > 1:
        yield "one shell for the unit", 1 / whole
        yield "the unit for one shell", float(whole)
    if name == "flow" and n["shells_in_parallel"] > 1:
        yield "flow per shell for the total", 1 / n["shells_in_parallel"]
    if path in ("inside.R_fouling", "inside.h"):
        try:
            ratio = outside_diameter(v) / bore(v)
        except Missing:
            return
        if name == "h":
            yield "an inside film already on the outside surface", 1 / ratio
        else:
            yield "an inside resistance already on the outside surface", ratio


def _of_shells(subject: Subject, path: str, x: float) -> Iterator[Candidate]:
    """F of another number of shells, and the mean difference that it or no F at all gives."""
    v = Figures(subject.values, subject)
    try:
        lmtd = log_mean_difference(v) if path == "mtd" else 1.0
        true = factor(v) * lmtd
        others = {n: factor(v, shells=n) * lmtd for n in (1, 2, 3, 4, 6)}
    except (Missing, ValueError):
        return
    words = "the uncorrected LMTD" if path == "mtd" else "left at one"
    for name, wrong in ((words, lmtd), *((f"F of {n} shells in series", F) for n, F in others.items())):
        if true > 0 and wrong > 0 and abs(wrong / true - 1) > 2 * MATCH and abs(x / wrong - 1) < MATCH / 2:
            yield Candidate(name=name, factor=wrong / true, to=true, also=_with_mtd(subject, path, true / x))
            yield Candidate(name=name, factor=wrong / true, to=true)


def _with_mtd(subject: Subject, path: str, ratio: float) -> dict[str, float]:
    """What follows from a mean difference `ratio` times as large, where it was all computed from one."""
    values = subject.sheet_values
    follows = {"mtd": ratio, "U_service": 1 / ratio}
    also = {name: float(values[name]) * by for name, by in follows.items() if name in values and name != path}
    if "excess_area" in values and "U_service" in values:
        also["excess_area"] = (1 + float(values["excess_area"])) * ratio - 1
    return also


def _of_temperature(x: float) -> Iterator[Candidate]:
    celsius, fahrenheit = (units.to_unit(x, "temperature", unit) for unit in ("°C", "°F"))
    yield Candidate(name="°F read as °C", factor=1.0, to=units.from_unit(celsius, "temperature", "°F"))
    yield Candidate(name="°C read as °F", factor=1.0, to=units.from_unit(fahrenheit, "temperature", "°C"))


def _of_viscosity(subject: Subject, path: str, x: float, quantity: str) -> Iterator[Candidate]:
    """cP and cSt stand apart by the density."""
    side: Side = "inside" if path.startswith("inside") else "outside"
    try:
        relative = property_of(Figures(subject.values, subject), side, "rho") / 1000.0
    except Missing:
        return
    if quantity == "viscosity":
        yield Candidate(name="cSt read as cP", factor=1 / relative, to=x * relative)
    else:
        yield Candidate(name="cP read as cSt", factor=relative, to=x / relative)


__all__ = ["MATCH", "Candidate", "candidates"]
