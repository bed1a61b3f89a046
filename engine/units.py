"""The closed table of units, and the reader of figures typed with a unit: "120 gpm" <-> 0.00757 m³/s.

Inside the engine every number is an SI float; a unit's name is known here and where figures are read or shown. A
temperature and a temperature difference are two quantities, and so are absolute, gauge and differential pressure.

A unit is a label made of symbols, and its factor is the product of theirs, so that the table holds no factors. Those
of the symbols come from `scipy.constants`: Btu and calorie are the International Table ones, gallon and barrel the US
ones, a column of water weighs 1000 kg/m³ under standard gravity. They are held as exact fractions: a typed figure
becomes the float nearest to it, and a figure shown with 17 digits reads back as the same float.

How a unit is read. Spelling is free (m2 K/W, m²·K/W, m^2.K/W, m2 K W-1), the set of units is not. All that follows a
"/" divides, as in kcal/h·m²·°C. Case is forgiven, except between the m of milli and the M of mega.

How a number is read. The point is the decimal sign. Commas, points and spaces that can only mean one thing are
understood ("3,5", "0,125", "1,200.5", "1 200 000"); a comma that may be either ("1,200") is refused. A length may be
a fraction ("1 1/2 in") or feet and inches (16' 6").
"""

from __future__ import annotations

import math
import re
import unicodedata
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from decimal import Decimal, localcontext
from fractions import Fraction
from functools import lru_cache
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray
from scipy import constants as c

Numbers = TypeVar("Numbers", float, NDArray[np.float64])

SYSTEMS: Mapping[str, str] = {"si": "SI", "us": "US customary", "metric": "Metric with kcal and kgf/cm²"}
"""Systems of units in which figures can be shown, and what a user calls them."""


class UnitError(ValueError):
    """A typed figure or a unit that cannot be accepted; the message is one sentence for the person who typed it."""


@dataclass(frozen=True, kw_only=True)
class Unit:
    """One accepted unit of one quantity: SI value = (figure + zero) · factor."""

    quantity: str
    label: str
    factor: Fraction
    zero: Fraction = Fraction(0)

    def to_si(self, figure: Fraction) -> Fraction:
        return (figure + self.zero) * self.factor

    def from_si(self, value: Fraction) -> Fraction:
        return value / self.factor - self.zero


@dataclass(frozen=True, kw_only=True)
class Typed:
    """A figure as somebody typed it, and what it means."""

    value: float
    """In SI."""
    quantity: str
    """Which of the allowed quantities the unit belongs to."""
    unit: str
    """The unit in its standard spelling."""
    text: str
    """What was typed, without the space around it."""
    digit: float
    """One unit of the last typed digit, in SI; 0 for a length given as a fraction, which is a trade size."""
    sd: float | None
    """One standard deviation in SI, from what stands behind "±"; None where nothing does."""


def _exact(constant: float) -> Fraction:
    """The defined decimal behind a constant that scipy computes in floats: 0.45359237, not 0.45359236999999997."""
    return Fraction(f"{constant:.15g}")


_DEFINED: dict[str, Fraction] = {symbol: _exact(constant) for symbol, constant in {
    "-": 1.0, "%": c.centi, "rad": 1.0,
    "m": 1.0, "in": c.inch, "ft": c.foot, "mil": c.mil, "L": c.liter, "gal": c.gallon, "bbl": c.barrel,
    "g": c.gram, "t": c.metric_ton, "lb": c.pound, "mol": 1.0,
    "s": 1.0, "min": c.minute, "h": c.hour, "d": c.day, "yr": c.year, "Hz": 1.0,
    "N": 1.0, "dyn": c.dyne, "kgf": c.g, "Pa": 1.0, "bar": c.bar, "atm": c.atm,
    "J": 1.0, "cal": c.calorie_IT, "Btu": c.Btu_IT, "W": 1.0, "K": 1.0, "C": 1.0,
}.items()}  # fmt: skip

_PREFIXED = {
    "μ": (c.micro, "m Pa"),
    "m": (c.milli, "m N Pa bar mH2O"),
    "c": (c.centi, "m P St mH2O"),
    "h": (c.hecto, "Pa"),
    "k": (c.kilo, "g lb mol J cal Btu W Pa"),
    "M": (c.mega, "J cal W Pa"),
    "G": (c.giga, "J cal Pa"),
    "MM": (c.mega, "Btu"),
}


def _symbols() -> dict[str, Fraction]:
    """SI value of every symbol."""
    one = dict(_DEFINED)
    one["deg"] = Fraction(c.degree)
    one["F"] = one["R"] = 1 / _exact(1 / c.degree_Fahrenheit)
    one["lbmol"] = one["lb"] / one["g"]
    one["lbf"] = one["lb"] * one["kgf"]
    one["psi"] = one["lbf"] / one["in"] ** 2
    one["ksi"] = one["psi"] * _exact(c.kilo)
    one["at"] = one["kgf"] / _exact(c.centi) ** 2
    one["mmHg"] = one["torr"] = one["atm"] / _exact(c.atm / c.torr)
    one["inHg"] = one["mmHg"] * one["in"] / _exact(c.milli)
    one["mH2O"] = one["kgf"] * _exact(c.kilo)
    one["inH2O"], one["ftH2O"] = one["mH2O"] * one["in"], one["mH2O"] * one["ft"]
    one["P"], one["St"] = one["dyn"] / _exact(c.centi) ** 2, _exact(c.centi) ** 2
    one["gpm"], one["cfm"] = one["gal"] / one["min"], one["ft"] ** 3 / one["min"]
    one["rpm"] = 1 / one["min"]
    for prefix, (factor, symbols) in _PREFIXED.items():
        one.update({prefix + symbol: _exact(factor) * one[symbol] for symbol in symbols.split()})
    return one


_SYMBOLS = _symbols()

_SPELLINGS: dict[str, str] = {spelling: symbol for symbol, spellings in {
    "%": "percent pct", "deg": "° degree degrees degs", "rad": "radian radians",
    "m": "M meter meters metre metres", "mm": "MM", "μm": "um micron microns", "μPa": "uPa",
    "in": "\" '' inch inches", "ft": "' foot feet", "mil": "mils MIL",
    "g": "gram grams gm", "kg": "kgs", "t": "tonne tonnes", "lb": "lbs lbm pound pounds", "klb": "klbs klbm",
    "s": "sec secs second seconds", "min": "mins minute minutes MIN", "h": "hr hrs hour hours",
    "d": "day days", "yr": "yrs year years", "L": "ltr liter liters litre litres",
    "gal": "gals gallon gallons usgal usg", "bbl": "bbls barrel barrels", "gpm": "usgpm", "cfm": "acfm",
    "K": "kelvin", "C": "celsius", "F": "fahrenheit", "R": "rankine", "kgf": "kp", "bar": "bars",
    "MMBtu": "mmbtu mmBtu", "cP": "cps centipoise", "cSt": "centistokes centistoke", "mmHg": "MMHG",
    "mmH2O": "mmWC mmWG mmWS mmCE MMH2O MMWC", "cmH2O": "cmWC", "mH2O": "mWC mWG mWS mCE mlc MWC",
    "inH2O": "inWC inWG \"WC \"H2O", "ftH2O": "ftWC", "inHg": "\"Hg",
}.items() for spelling in spellings.split()}  # fmt: skip
"""Other names of the symbols, beyond those that differ in case alone."""


@dataclass(frozen=True, kw_only=True)
class _Quantity:
    """What a quantity is called, its unit in each system, and all the units in which it may be typed."""

    name: str
    shown: Mapping[str, str]
    labels: tuple[str, ...]


def _quantity(name: str, si: str, us: str, metric: str, *others: str) -> _Quantity:
    labels = tuple(dict.fromkeys((si, us, metric, *others)))
    return _Quantity(name=name, shown={"si": si, "us": us, "metric": metric}, labels=labels)


_PRESSURES = (
    "bar", "psi", "kgf/cm²", "kPa", "Pa", "hPa", "MPa", "mbar", "mmHg", "inHg", "torr", "atm", "at",
    "mmH2O", "cmH2O", "mH2O", "inH2O", "ftH2O", "lbf/ft²", "N/m²",
)  # fmt: skip


def _marked(mark: str, labels: tuple[str, ...] = _PRESSURES) -> tuple[str, ...]:
    """The labels of absolute or of gauge pressures."""
    return tuple(label + mark if label in ("bar", "psi") else f"{label} {mark}" for label in labels)


_QUANTITIES: dict[str, _Quantity] = {
    "temperature": _quantity("a temperature", "°C", "°F", "°C", "K", "°R"),
    "temperature_difference": _quantity("a temperature difference", "K", "°F", "°C", "°R"),
    "pressure_absolute": _quantity("an absolute pressure", "bara", "psia", "kgf/cm² a", *_marked("a")),
    "pressure_gauge": _quantity("a gauge pressure", "barg", "psig", "kgf/cm² g", *_marked("g")),
    "pressure_difference": _quantity("a pressure difference", "kPa", "psi", "kgf/cm²", *_PRESSURES),
    "mass_flow": _quantity(
        "a mass flow", "kg/h", "lb/h", "kg/h", "kg/s", "t/h", "lb/s", "klb/h", "lb/min", "kg/min", "g/s", "t/d"
    ),
    "volume_flow": _quantity(
        "a volume flow", "m³/h", "gpm", "m³/h", "m³/s", "L/s", "L/min", "L/h", "m³/d", "m³/min", "ft³/h", "ft³/s",
        "ft³/min", "cfm", "gal/min", "gal/h", "bbl/d", "bbl/h", "cm³/s",
    ),
    "length": _quantity("a length", "mm", "in", "mm", "m", "cm", "ft", "µm", "mil"),
    "area": _quantity("an area", "m²", "ft²", "m²", "cm²", "mm²", "in²"),
    "volume": _quantity("a volume", "m³", "ft³", "m³", "L", "cm³", "in³", "gal", "bbl"),
    "density": _quantity("a density", "kg/m³", "lb/ft³", "kg/m³", "g/cm³", "kg/L", "g/L", "t/m³", "lb/gal"),
    "specific_heat": _quantity(
        "a specific heat", "kJ/kgK", "Btu/lb·°F", "kcal/kg·°C", "J/kgK", "J/gK", "cal/g·°C"
    ),
    "viscosity": _quantity(
        "a dynamic viscosity", "mPa·s", "cP", "cP", "Pa·s", "µPa·s", "P", "kg/m·s", "kg/m·h", "g/cm·s", "lb/ft·h",
        "lb/ft·s", "N·s/m²", "lbf·s/ft²", "kgf·s/m²",
    ),
    "kinematic_viscosity": _quantity(
        "a kinematic viscosity", "mm²/s", "cSt", "cSt", "m²/s", "St", "cm²/s", "m²/h", "ft²/s", "ft²/h"
    ),
    "conductivity": _quantity(
        "a thermal conductivity", "W/mK", "Btu/h·ft·°F", "kcal/h·m·°C", "kW/mK", "W/cmK", "Btu·in/h·ft²·°F",
        "cal/s·cm·°C",
    ),
    "heat_flow": _quantity(
        "a heat flow", "kW", "Btu/h", "kcal/h", "W", "MW", "kBtu/h", "MMBtu/h", "Btu/s", "Mcal/h", "Gcal/h", "J/s",
        "kJ/s", "kJ/h", "MJ/h", "GJ/h",
    ),
    "heat_flux": _quantity("a heat flux", "kW/m²", "Btu/h·ft²", "kcal/h·m²", "W/m²", "W/cm²"),
    "heat_transfer_coefficient": _quantity(
        "a heat transfer coefficient", "W/m²K", "Btu/h·ft²·°F", "kcal/h·m²·°C", "kW/m²K", "W/cm²K", "kJ/h·m²·K",
        "cal/s·cm²·°C",
    ),
    "fouling_resistance": _quantity(
        "a fouling resistance", "m²K/W", "h·ft²·°F/Btu", "h·m²·°C/kcal", "m²K/kW", "s·m²·K/J"
    ),
    "fouling_rate": _quantity(
        "a fouling rate", "m²K/W·d", "h·ft²·°F/Btu·d", "h·m²·°C/kcal·d", "m²K/J", "m²K/kW·d", "m²K/W·h"
    ),
    "conductance": _quantity("a conductance", "kW/K", "Btu/h·°F", "kcal/h·°C", "W/K", "MW/K"),
    "specific_enthalpy": _quantity("a specific enthalpy", "kJ/kg", "Btu/lb", "kcal/kg", "J/kg", "J/g", "MJ/kg"),
    "mass": _quantity("a mass", "kg", "lb", "kg", "g", "t", "klb"),
    "mass_per_length": _quantity("a mass per length", "kg/m", "lb/ft", "kg/m", "g/m"),
    "mass_flux": _quantity("a mass flux", "kg/m²s", "lb/h·ft²", "kg/m²s", "lb/s·ft²", "kg/h·m²"),
    "momentum_flux": _quantity("a momentum flux ρv²", "kg/m·s²", "lb/ft·s²", "kg/m·s²", "Pa", "N/m²"),
    "velocity": _quantity("a velocity", "m/s", "ft/s", "m/s", "mm/s", "cm/s", "m/min", "ft/min", "m/h"),
    "time": _quantity("a time", "d", "d", "d", "h", "min", "s", "yr"),
    "frequency": _quantity("a frequency", "Hz", "Hz", "Hz", "1/s", "1/min", "rpm"),
    "modulus": _quantity("an elastic modulus or stress", "GPa", "ksi", "kgf/mm²", "MPa", "Pa", "kPa", "N/mm²", "psi"),
    "surface_tension": _quantity("a surface tension", "mN/m", "dyn/cm", "dyn/cm", "N/m", "lbf/ft"),
    "molar_mass": _quantity("a molar mass", "kg/kmol", "lb/lbmol", "kg/kmol", "g/mol", "kg/mol"),
    "angle": _quantity("an angle", "deg", "deg", "deg", "rad"),
    "fraction": _quantity("a fraction", "%", "%", "%", "-"),
    "dimensionless": _quantity("a plain number", "-", "-", "-"),
}  # fmt: skip

QUANTITIES: tuple[str, ...] = tuple(_QUANTITIES)
"""Names of all quantities."""

_MARKS: dict[str, tuple[str, ...]] = {
    **{"pressure_absolute": ("a",), "pressure_gauge": ("g",), "pressure_difference": ("", "d")},
    **{"temperature_difference": ("", "Δ")},
}
"""What may stand at a unit to say which of the sister quantities is meant; "" is nothing."""

_REFUSED: dict[str, str] = {
    r"[ns] ?m\^?3|m{0,2}scf": "counts gas at a reference state; give the mass flow or the volume flow at the inlet",
    r"(?:short |long |metric )?tons?\b": "does not say which ton; write t for 1000 kg, or lb",
    r"(?-i:M)btu": "is read as a thousand by some and as a million by others; write kBtu or MMBtu",
    r"ss[uf]\b|sus\b|saybolt": "is a time on a viscometer; give the viscosity in cP or cSt",
    r".*\bvac(?:uum)?\b": "counts downwards from the atmosphere; give the absolute pressure",
    r"vol\b|.*%\s?\(?vol": "is a share of the volume; give the share of the mass in %",
}
"""Units that cannot be taken at their word, and why."""

_LOOKALIKES = str.maketrans({
    **dict.fromkeys("−–—‐‑‒﹣", "-"), **dict.fromkeys("º˚", "°"), **dict.fromkeys("″“”„", '"'),
    **dict.fromkeys("′’‘´`", "'"), **dict.fromkeys("⋅∙•‧×", "·"), **dict.fromkeys("∕⁄÷", "/"),
    **dict.fromkeys("\u200b\u200c\u200d\u2060\ufeff", ""), "∆": "Δ",
})  # fmt: skip


def _clean(text: str) -> str:
    """One spelling for the many characters that look alike; raised figures become ^n, ½ becomes " 1/2"."""
    text = re.sub("[⁰¹²³⁴-⁹⁺⁻]+", lambda raised: "^" + unicodedata.normalize("NFKC", raised[0]), text)
    text = "".join(
        f" {unicodedata.normalize('NFKC', x)}" if "<fraction>" in unicodedata.decomposition(x) else x for x in text
    )
    text = unicodedata.normalize("NFKC", text.translate(_LOOKALIKES)).translate(_LOOKALIKES)
    return re.sub(r"\s+", " ", text).strip()


def _folded(spelling: str) -> str:
    return spelling[0] + spelling[1:].lower() if spelling[0] in "mM" else spelling.lower()


@dataclass(frozen=True)
class _Lexicon:
    """Finds the next token of a unit, and the symbol behind a spelling."""

    token: re.Pattern[str]
    symbols: Mapping[str, str]


def _lexicon(fold: bool) -> _Lexicon:
    symbols = {symbol: symbol for symbol in _SYMBOLS} | _SPELLINGS
    if fold:
        symbols |= {_folded(spelling): symbol for spelling, symbol in symbols.items()}
    names = [
        re.escape(x) if not fold else f"{x[0]}(?i:{re.escape(x[1:])})" if x[0] in "mM" else f"(?i:{re.escape(x)})"
        for x in sorted(symbols, key=len, reverse=True)
    ]
    token = rf"([(])|([)])|(/|per\b)|[\s·*.-]+|1(?!\d)|(?P<name>{'|'.join(names)})(?:\^?(?P<power>-?\d))?"
    return _Lexicon(re.compile(token, re.ASCII), symbols)


# Exact case comes first: in Btu/lbF the F is a degree, though "lbf" is a force.
_LEXICONS = (_lexicon(fold=False), _lexicon(fold=True))
_Powers = tuple[tuple[str, int], ...]


def _powers(unit: str, lexicon: _Lexicon = _LEXICONS[0]) -> _Powers:
    """Symbols of a cleaned unit and their powers; empty where it has another word in it."""
    if unit in ("", "-"):
        return (("-", 1),)
    powers: Counter[str] = Counter()
    sign, group, at, divides = 1, 1, 0, False
    outside: list[tuple[int, int]] = []
    while at < len(unit):
        token = lexicon.token.match(unit, at)
        if token is None or (token[2] and not outside) or (divides and (token[2] or token[3])):
            return ()
        at = token.end()
        divides = bool(token[3]) or (divides and token["name"] is None)
        if token[1]:
            outside.append((sign, group))
            group = sign
        elif token[2]:
            sign, group = outside.pop()
        elif token[3]:
            sign = -group
        elif name := token["name"]:
            symbol = lexicon.symbols.get(name) or lexicon.symbols[_folded(name)]
            powers[symbol] += sign * int(token["power"] or 1)
    if len(powers) > 1:  # within a compound unit a degree is a difference
        powers["K"] += powers.pop("C", 0)
        powers["F"] += powers.pop("R", 0)
    return () if outside or divides else tuple(sorted((symbol, power) for symbol, power in powers.items() if power))


_ALSO: dict[_Powers, _Powers] = {
    _powers(habit): _powers(meant)
    for habit, meant in {
        **{"kg/cm2": "kgf/cm2", "kg/mm2": "kgf/mm2", "lb/ft2": "lbf/ft2", "lb/in2": "psi", "lbf/in2": "psi"},
        "Btu/lbf": "Btu/lb F",
    }.items()
}
"""Habits that the symbols would misread: a mass that is a force, and Btu/lb°F in capitals."""

_MARKED = re.compile(r"(.*?)\s*\(?(?:(a|abs|absolute)|(g|gauge|gage)|(d|diff|differential))\.?\)?", re.IGNORECASE)


def _readings(unit: str) -> Iterator[tuple[str, _Powers]]:
    """Each way to read a cleaned unit, as (mark, powers), the likeliest first."""
    unit = re.sub(r"(?i)(?:°|deg(?:rees?|\.)?)\s*(?=[CFKR]\b|celsius|fahrenheit)", "", unit)
    unit = re.sub(r"(?i)\b(mm|cm|m|in|ft)\.? (?=(?:H2O|Hg|W[CGS])\b)", r"\1", unit)
    unit = re.sub(r"(?i)\bsq\.? ?(mm|cm|m|ft|feet|foot|in)", r"\g<1>2", unit)
    unit = re.sub(r"(?i)\bcu\.? ?(mm|cm|m|ft|feet|foot|in)", r"\g<1>3", unit)
    unit = re.sub(r"(?i)\bu\.?s\.? (?=g)| ?\(us\)", "", unit)
    marked = [("", unit)]
    if difference := re.fullmatch(r"(?:Δ|(?i:delta)) ?(.+)", unit):
        marked.append(("Δ", difference[1]))
    if pressure := _MARKED.fullmatch(unit):
        marked.append(("agd"[(pressure.lastindex or 2) - 2], pressure[1]))
    for lexicon in _LEXICONS:
        for mark, rest in marked:
            if powers := _powers(rest, lexicon):
                yield mark, _ALSO.get(powers, powers)


def _table() -> dict[str, dict[tuple[str, _Powers], Unit]]:
    table: dict[str, dict[tuple[str, _Powers], Unit]] = {}
    zeros = {"°C": _exact(c.zero_Celsius), "°F": _exact(c.convert_temperature(0.0, "F", "R"))}
    for quantity, described in _QUANTITIES.items():
        table[quantity] = {}
        marks = _MARKS.get(quantity, ("",))
        for label in described.labels:
            powers = next(powers for mark, powers in _readings(_clean(label)) if mark == marks[0])
            unit = Unit(
                quantity=quantity,
                label=label,
                factor=math.prod((_SYMBOLS[symbol] ** power for symbol, power in powers), start=Fraction(1)),
                zero=zeros.get(label, Fraction(0)) if quantity == "temperature" else Fraction(0),
            )
            table[quantity].update({(mark, powers): unit for mark in marks if (mark, powers) not in table[quantity]})
    return table


_TABLE = _table()


def units_of(quantity: str) -> tuple[str, ...]:
    """Labels of all units in which the quantity may be typed, those of the systems first."""
    return _QUANTITIES[quantity].labels


def unit_of(quantity: str, system: str = "si") -> str:
    """Label of the unit in which a system shows the quantity."""
    return _QUANTITIES[quantity].shown[system]


def find(unit: str, *quantities: str) -> Unit:
    """The accepted unit that a spelling stands for, of the first quantity that has it.

    Raises UnitError if none of the quantities has it.
    """
    cleaned = _clean(unit)
    found = _find(cleaned, quantities)
    if found is None:
        raise UnitError(_why_not(f'"{_quoted(unit)}"', cleaned, quantities))
    return found


def to_unit(value: Numbers, quantity: str, unit: str) -> Numbers:
    """An SI value, or an array of them, in the given unit."""
    known = find(unit, quantity)
    return value / float(known.factor) - float(known.zero)


def from_unit(figure: Numbers, quantity: str, unit: str) -> Numbers:
    """A figure in the given unit, or an array of them, in SI."""
    known = find(unit, quantity)
    return (figure + float(known.zero)) * float(known.factor)


def show(value: float, quantity: str, system: str = "si", digits: int = 4) -> str:
    """A value with its unit, to so many significant digits; with 17, `parse` gives the same float back.

    The digits of a temperature count from absolute zero: 325.15 K to 4 digits is 52.0 °C.
    """
    if not math.isfinite(value):
        raise UnitError(f"{value} is no value of {_QUANTITIES[quantity].name}")
    unit = find(unit_of(quantity, system), quantity)
    exact = Fraction(float(value))
    figure = _figure(unit.from_si(exact), exact / unit.factor, digits)
    return figure if unit.label == "-" else f"{figure} {unit.label}"


def _figure(x: Fraction, magnitude: Fraction, digits: int) -> str:
    """Decimal digits of x, rounded where `magnitude` has its last significant one."""
    if not x:
        return "0"
    with localcontext(prec=digits):
        leading = (Decimal(magnitude.numerator) / Decimal(magnitude.denominator)).adjusted()
    last = leading - digits + 1
    rounded = Decimal(f"{round(x / Fraction(10) ** last)}e{last}")
    return f"{rounded:f}" if -6 < leading < max(digits, 7) else f"{rounded:e}"


@lru_cache(maxsize=4096)
def _find(unit: str, quantities: tuple[str, ...]) -> Unit | None:
    """The unit of a cleaned spelling."""
    readings = list(_readings(unit))
    return next((_TABLE[q][reading] for q in quantities for reading in readings if reading in _TABLE[q]), None)


def _quoted(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= 40 else text[:37] + "…"


def _plain(label: str) -> str:
    """A label as it is typed on a keyboard."""
    return label.translate(str.maketrans("²³·µ", "23 u")).replace("°", "deg")


def _allowed(quantities: tuple[str, ...]) -> str:
    def one(quantity: str) -> str:
        labels = [label for label in units_of(quantity) if label != "-"]
        units = ", ".join(labels[:6]) + ", …" * (len(labels) > 6)
        return _QUANTITIES[quantity].name + (f" in {units}" if units else "")

    return " or ".join(map(one, quantities))


def _why_not(given: str, unit: str, quantities: tuple[str, ...], number: str = "") -> str:
    """The sentence that says why a cleaned unit is not accepted for the quantities."""
    for pattern, reason in _REFUSED.items():
        if re.match(pattern, unit, re.IGNORECASE):
            return f"{given} {reason}"
    other = _find(unit, QUANTITIES)
    marks = [_MARKS[q][0] for q in quantities if q in ("pressure_absolute", "pressure_gauge")]
    if other and other.quantity == "pressure_difference" and marks:
        ways = " or ".join(f'"{number}{_plain(*_marked(mark, (other.label,)))}"' for mark in marks)
        return f"{given} does not say whether it is absolute or gauge; write {ways}"
    if other:
        return f"{given} is {_QUANTITIES[other.quantity].name}; allowed is {_allowed(quantities)}"
    if meant := _find(unit.translate(str.maketrans("mM", "Mm")), quantities):
        return f'{given} mixes up m for milli and M for mega; write "{number}{_plain(meant.label)}" if that is meant'
    return f"{given} has a unit that is not known here; allowed is {_allowed(quantities)}"


_NUMBER = re.compile(
    r"([+-]?)(\d[\d.,]*(?: \d{3}(?!\d)[\d.,]*)*|[.,]\d+)"
    r"(?:[eE]([+-]?\d+)|\s*[x·*]\s*10(?:\^([+-]?\d+)|([+-]\d+)))?"
)
_TRADE_FRACTION = re.compile(r"(?:(\d{1,6})(?: - | |-))?(\d{1,6})/(\d{1,6})(?![\d.,])")
_FEET_AND_INCHES = re.compile(r"(\d{1,6}) ?(?:'|ft|feet)[ -]*(\d[^'\"a-z]*)(?:\"|''|in|inch|inches)", re.IGNORECASE)
_DEVIATION = re.compile(r"±|\+ ?/ ?-|\+ ?-")


@dataclass(frozen=True, kw_only=True)
class _Number:
    text: str
    value: Fraction
    digit: Fraction


def _number(text: str, given: str, quantities: tuple[str, ...]) -> tuple[_Number, str]:
    """The number that a cleaned text begins with, and the unit that follows it."""
    if both := _FEET_AND_INCHES.fullmatch(text):
        inches, _ = _number(both[2].strip(), given, quantities)
        feet = int(both[1]) * _SYMBOLS["ft"] / _SYMBOLS["in"]
        return _Number(text=inches.text, value=feet + inches.value, digit=inches.digit), "in"
    if trade := _TRADE_FRACTION.match(text):
        whole, over, under = (int(part or 0) for part in trade.groups())
        if under == 0:
            raise UnitError(f"{given} divides by zero")
        value = whole + Fraction(over, under)
        return _Number(text=trade[0], value=value, digit=Fraction(0)), text[trade.end() :].strip()
    if re.match(r"[+-]?(?:nan|inf)", text, re.IGNORECASE):
        raise UnitError(f"{given} is not a finite number")
    found = _NUMBER.match(text)
    if found is None:
        example = f"42 {_plain(unit_of(quantities[0]))}"
        raise UnitError(f'{given} does not begin with a number; write for example "{example}"')
    if len(found[0]) > 40:
        raise UnitError(f"{given} has a number of {len(found[0])} characters; write at most 40")
    sign, mantissa, *powers = found.groups()
    digits = _point(mantissa, given)
    power = int(next(filter(None, powers), "0"))
    if abs(power) > 400:
        raise UnitError(f"{given} is out of the range of numbers")
    digit = Fraction(10) ** (power - len(digits.partition(".")[2]))
    value = int(sign + digits.replace(".", "")) * digit
    return _Number(text=found[0].strip(), value=value, digit=digit), text[found.end() :].strip()


def _point(mantissa: str, given: str) -> str:
    """The digits with one decimal point at most; what commas, points and spaces mean where only one meaning is left."""
    if re.fullmatch(r"[1-9]\d{0,2},\d{3}", mantissa):
        whole, _, rest = mantissa.partition(",")
        raise UnitError(f"{given} can be read as {whole}.{rest} or as {whole}{rest}; write it without the comma")
    for group, point in ((" ", "."), (" ", ","), (",", "."), (".", ",")):
        grouped = rf"(?:\d+|\d{{1,3}}(?:{re.escape(group)}\d{{3}})+)?(?:{re.escape(point)}\d*)?"
        if re.fullmatch(grouped, mantissa):
            return mantissa.replace(group, "").replace(point, ".")
    raise UnitError(f"{given} is not a number; write it with a point and without separators, for example 1234.5")


def parse(text: str, *quantities: str) -> Typed:
    """Read a figure typed with its unit, "18 t/h ± 3 %", as one of the given quantities.

    What stands behind "±", "+/-" or "+-" is one standard deviation: a percentage of the value, or a figure with a
    unit (of a difference, for a temperature or a pressure). Raises UnitError, whose message is one sentence that
    says what was given and what is allowed.
    """
    given = f'"{_quoted(text)}"'
    if len(text) > 200:
        raise UnitError(f"{given} has {len(text)} characters; write a number and a unit")
    stated, *deviation = _DEVIATION.split(re.sub(r"^\(([^()]*)\)", r"\1", _clean(text)))
    if not stated and not deviation:
        raise UnitError(f"nothing is given; allowed is {_allowed(quantities)}")
    if len(deviation) > 1:
        raise UnitError(f"{given} has more than one ±")
    number, unit = _number(stated.strip(), given, quantities)
    spread, spread_unit = _number(deviation[0].strip(), given, quantities) if deviation else (None, "")
    in_common = not unit and (not _is_percent(spread_unit) or ("fraction" in quantities and number.value > 1))
    known = _known(number, spread_unit if in_common else unit, given, quantities)
    exact = known.to_si(number.value)
    if exact < 0 and known.quantity in ("temperature", "pressure_absolute"):
        raise UnitError(f"{given} is below absolute zero")
    if spread is None:
        sd = None
    elif _is_percent(spread_unit) and not in_common:
        sd = abs(exact) * _share(spread, known, given)
    else:
        sd = spread.value * _spread_unit(spread_unit, known, given).factor
    if sd is not None and sd < 0:
        raise UnitError(f"{given} has a negative ±")
    return Typed(
        value=_float(exact, given),
        quantity=known.quantity,
        unit=known.label,
        text=text.strip(),
        digit=_float(number.digit * known.factor, given),
        sd=None if sd is None else _float(sd, given),
    )


def _known(number: _Number, unit: str, given: str, quantities: tuple[str, ...]) -> Unit:
    """The unit of a number, or the reason why it cannot have that unit."""
    known = _find(unit, quantities)
    if known is None and not unit:
        raise UnitError(f'{given} gives no unit; write for example "{number.text} {_plain(unit_of(quantities[0]))}"')
    if known is None:
        raise UnitError(_why_not(given, unit, quantities, f"{number.text} "))
    if number.digit == 0 and known.quantity != "length":
        raise UnitError(f"{given} is written as a fraction, which only a length may be; write a decimal")
    if known.quantity == "fraction" and known.label == "-" and number.value > 1:
        raise UnitError(f'{given} gives no unit and is above 1; write for example "{number.text} %"')
    return known


def _is_percent(unit: str) -> bool:
    found = _find(unit, ("fraction",))
    return found is not None and found.label == "%"


def _share(spread: _Number, known: Unit, given: str) -> Fraction:
    """A ± in percent, as a share of the value."""
    if known.quantity == "temperature":
        raise UnitError(f"{given} has a ± in percent, which says nothing of a temperature; write it in K or degF")
    if known.quantity == "fraction":
        raise UnitError(f'{given} can mean percent of the value or percentage points; for points write "25 ± 1 %"')
    return spread.value * _SYMBOLS["%"]


def _spread_unit(unit: str, known: Unit, given: str) -> Unit:
    """The unit of a ± that is not in percent."""
    if not unit and known.label != "-":
        raise UnitError(f'{given} gives no unit behind the ±; write for example "± 3 {_plain(known.label)}"')
    family = known.quantity.partition("_")[0]
    allowed: tuple[str, ...] = (f"{family}_difference",) if family in ("temperature", "pressure") else (known.quantity,)
    if known.quantity in ("pressure_absolute", "pressure_gauge"):
        allowed += (known.quantity,)
    found = _find(unit, allowed)
    if found is None:
        raise UnitError(_why_not(f"the ± of {given}", unit, allowed[:1]))
    return found


def _float(exact: Fraction, given: str) -> float:
    """The nearest float."""
    try:
        nearest = float(exact)
    except OverflowError:
        nearest = math.inf
    if math.isinf(nearest) or (nearest == 0 and exact != 0):
        raise UnitError(f"{given} is out of the range of numbers")
    return nearest
