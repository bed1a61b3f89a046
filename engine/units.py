"""The closed table of units, and the reader of figures typed with a unit: "120 gpm" <-> 0.00757 m³/s.

Inside the engine every number is an SI float; a unit's name is known here and where figures are read or shown. A
temperature and a temperature difference are two quantities, and so are absolute, gauge and differential pressure.

A unit is a label made of symbols, and its factor is the product of theirs, so that no factor stands in the table.
The factors of the symbols come from `scipy.constants`. They are held as exact fractions: a typed figure becomes the
float nearest to it, and a figure shown with 17 digits reads back as the same float.

How numbers are read. The point is the decimal sign. A comma, a point or spaces that can only be one thing are
understood ("3,5", "0,125", "1,200.5", "1 200 000"); a comma that may be either ("1,200") is refused. Lengths may be
fractions ("1 1/2 in") or feet and inches (16' 6"). Case is forgiven where it cannot change the meaning: never in the
m of milli and the M of mega.
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
from typing import Any

from scipy import constants as c

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


_SYMBOLS: dict[str, Fraction] = {
    **{"-": Fraction(1), "%": _exact(c.centi), "rad": Fraction(1), "deg": Fraction(c.degree)},
    **{"m": Fraction(1), "cm": _exact(c.centi), "mm": _exact(c.milli), "μm": _exact(c.micro)},
    **{"in": _exact(c.inch), "ft": _exact(c.foot), "mil": _exact(c.mil)},
    **{"kg": Fraction(1), "g": _exact(c.gram), "t": _exact(c.metric_ton)},
    **{"lb": _exact(c.pound), "klb": _exact(c.pound) * _exact(c.kilo)},
    **{"kmol": _exact(c.kilo), "mol": Fraction(1), "lbmol": _exact(c.pound) / _exact(c.gram)},
    **{"s": Fraction(1), "min": _exact(c.minute), "h": _exact(c.hour), "d": _exact(c.day), "yr": _exact(c.year)},
    **{"K": Fraction(1), "C": Fraction(1), "F": 1 / _exact(1 / c.degree_Fahrenheit)},
    **{"R": 1 / _exact(1 / c.degree_Fahrenheit), "Hz": Fraction(1), "rpm": 1 / _exact(c.minute)},
    **{"L": _exact(c.liter), "gal": _exact(c.gallon), "bbl": _exact(c.barrel)},
    **{"gpm": _exact(c.gallon) / _exact(c.minute), "cfm": _exact(c.foot) ** 3 / _exact(c.minute)},
    **{"J": Fraction(1), "kJ": _exact(c.kilo), "MJ": _exact(c.mega), "GJ": _exact(c.giga)},
    **{"cal": _exact(c.calorie_IT), "kcal": _exact(c.calorie_IT) * _exact(c.kilo)},
    **{"Mcal": _exact(c.calorie_IT) * _exact(c.mega), "Gcal": _exact(c.calorie_IT) * _exact(c.giga)},
    **{"Btu": _exact(c.Btu_IT), "kBtu": _exact(c.Btu_IT) * _exact(c.kilo), "MMBtu": _exact(c.Btu_IT) * _exact(c.mega)},
    **{"W": Fraction(1), "kW": _exact(c.kilo), "MW": _exact(c.mega)},
    **{"N": Fraction(1), "mN": _exact(c.milli), "dyn": _exact(c.dyne)},
    **{"kgf": _exact(c.g), "lbf": _exact(c.pound) * _exact(c.g)},
    **{"Pa": Fraction(1), "mPa": _exact(c.milli), "μPa": _exact(c.micro), "hPa": _exact(c.hecto)},
    **{"kPa": _exact(c.kilo), "MPa": _exact(c.mega), "GPa": _exact(c.giga)},
    **{"bar": _exact(c.bar), "mbar": _exact(c.bar) * _exact(c.milli), "atm": _exact(c.atm), "torr": _exact(c.torr)},
    **{"at": _exact(c.g) / _exact(c.centi) ** 2, "psi": _exact(c.pound) * _exact(c.g) / _exact(c.inch) ** 2},
    "ksi": _exact(c.kilo) * _exact(c.pound) * _exact(c.g) / _exact(c.inch) ** 2,
    **{"mmHg": _exact(c.mmHg), "inHg": _exact(c.mmHg) * _exact(c.inch) / _exact(c.milli)},
    # A metre of water is the conventional one, 1000 kg/m³ under standard gravity.
    **{"mH2O": _exact(c.g) * _exact(c.kilo), "cmH2O": _exact(c.g) * _exact(c.kilo) * _exact(c.centi)},
    **{"mmH2O": _exact(c.g), "inH2O": _exact(c.g) * _exact(c.kilo) * _exact(c.inch)},
    "ftH2O": _exact(c.g) * _exact(c.kilo) * _exact(c.foot),
    **{"P": Fraction(1, 10), "cP": _exact(c.milli)},
    **{"St": _exact(c.centi) ** 2, "cSt": _exact(c.milli) ** 2},
}

_SPELLINGS: dict[str, str] = {spelling: symbol for symbol, spellings in {
    "-": "", "%": "percent pct", "deg": "° degree degrees degs", "rad": "radian radians",
    "m": "M meter meters metre metres", "mm": "MM", "cm": "", "μm": "um micron microns", "μPa": "uPa",
    "in": "\" '' inch inches", "ft": "' foot feet", "mil": "mils MIL",
    "g": "gram grams gm", "kg": "kgs", "t": "tonne tonnes", "lb": "lbs lbm pound pounds", "klb": "klbs klbm",
    "s": "sec secs second seconds", "min": "mins minute minutes MIN", "h": "hr hrs hour hours",
    "d": "day days", "yr": "yrs year years", "L": "ltr liter liters litre litres",
    "gal": "gals gallon gallons usgal usg", "bbl": "bbls barrel barrels", "gpm": "usgpm", "cfm": "acfm",
    "K": "kelvin", "C": "celsius", "F": "fahrenheit", "R": "rankine",
    "MMBtu": "mmbtu mmBtu", "cP": "cps centipoise", "cSt": "centistokes centistoke",
    "kgf": "kp", "bar": "bars", "torr": "", "mmHg": "MMHG", "inHg": "\"Hg",
    "mmH2O": "mmWC mmWG mmWS mmCE MMH2O MMWC", "cmH2O": "cmWC", "mH2O": "mWC mWG mWS mCE mlc MWC",
    "inH2O": "inWC inWG \"WC \"H2O", "ftH2O": "ftWC", "rpm": "", "lbmol": "lb-mol",
}.items() for spelling in spellings.split()}  # fmt: skip


@dataclass(frozen=True, kw_only=True)
class _Quantity:
    """What a quantity is called, the units in which each system shows it, and all the units it may be typed in."""

    name: str
    shown: tuple[str, str, str]
    labels: tuple[str, ...]


def _quantity(name: str, si: str, us: str, metric: str, *others: str) -> _Quantity:
    shown = (si, us, metric)
    return _Quantity(name=name, shown=shown, labels=tuple(dict.fromkeys((*shown, *others))))


_PRESSURES = ("bar", "psi", "kgf/cm²", "kPa", "Pa", "hPa", "MPa", "mbar", "mmHg", "inHg", "torr", "atm", "at")
_COLUMNS = ("mmH2O", "cmH2O", "mH2O", "inH2O", "ftH2O", "lbf/ft²", "N/m²")


def _marked(mark: str) -> tuple[str, ...]:
    return tuple(label + (mark if label in ("bar", "psi") else f" {mark}") for label in _PRESSURES + _COLUMNS)


_QUANTITIES: dict[str, _Quantity] = {
    "temperature": _quantity("a temperature", "°C", "°F", "°C", "K", "°R"),
    "temperature_difference": _quantity("a temperature difference", "K", "°F", "°C", "°R"),
    "pressure_absolute": _quantity("an absolute pressure", "bara", "psia", "kgf/cm² a", *_marked("a")),
    "pressure_gauge": _quantity("a gauge pressure", "barg", "psig", "kgf/cm² g", *_marked("g")),
    "pressure_difference": _quantity("a pressure difference", "kPa", "psi", "kgf/cm²", *_PRESSURES, *_COLUMNS),
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
    "momentum_flux": _quantity("a ρv²", "kg/m·s²", "lb/ft·s²", "kg/m·s²", "Pa", "N/m²"),
    "velocity": _quantity("a velocity", "m/s", "ft/s", "m/s", "mm/s", "cm/s", "m/min", "ft/min", "m/h"),
    "time": _quantity("a time", "h", "h", "h", "s", "min", "d", "yr"),
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
    r"N\s?m(?:\^?3|3)|[Ss]m\^?3|(?i:mm|m|k)?(?i:scf)": "counts gas at a reference state; give the mass flow, "
    "or the volume flow at inlet conditions",
    r"(?i:(?:short |long |metric )?tons?\b)": "does not say which ton; write t for 1000 kg, or lb",
    r"M(?i:btu)": "is read as a thousand by some and a million by others; write kBtu or MMBtu",
    r"(?i:ss[uf]\b|sus\b|saybolt)": "is a time on a viscometer; give the viscosity in cP or cSt",
    r"(?i:.*\bvac(?:uum)?\b)": "counts downwards from the atmosphere; give the absolute pressure",
    r"(?i:.*\bvol\.?\s?%|.*%\s?vol)": "is a share of volume; give the share of mass in %",
}


_BEFORE_NFKC = str.maketrans({
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
    text = unicodedata.normalize("NFKC", text.translate(_BEFORE_NFKC)).translate(_BEFORE_NFKC)
    return re.sub(r"\s+", " ", text).strip()


def _folded(spelling: str) -> str:
    return spelling[0] + spelling[1:].casefold() if spelling[0] in "mM" else spelling.casefold()


def _tokens(fold: bool) -> tuple[re.Pattern[str], dict[str, str]]:
    symbols = {**{symbol: symbol for symbol in _SYMBOLS}, **_SPELLINGS}
    longest_first = sorted(symbols, key=len, reverse=True)
    if fold:
        names = "|".join(
            f"{s[0]}(?i:{re.escape(s[1:])})" if s[0] in "mM" else f"(?i:{re.escape(s)})" for s in longest_first
        )
        symbols = {_folded(spelling): symbol for spelling, symbol in symbols.items()}
    else:
        names = "|".join(map(re.escape, longest_first))
    token = r"(?P<open>\()|(?P<close>\))|(?P<over>/)|(?P<times>[\s·*.-]+)|(?P<one>1(?!\d))"
    token += rf"|(?P<symbol>{names})(?:\^?(?P<power>-?\d))?"
    return re.compile(token), symbols


_READERS = (_tokens(fold=False), _tokens(fold=True))
_Powers = tuple[tuple[str, int], ...]


def _powers(unit: str, token: re.Pattern[str], symbols: Mapping[str, str]) -> _Powers | None:
    """Symbols and their powers, None where the unit has another word; all that follows a "/" divides."""
    if unit in ("", "-"):
        return (("-", 1),)
    powers: Counter[str] = Counter()
    outside: list[int] = []
    sign, group, at = 1, 1, 0
    while at < len(unit):
        found = token.match(unit, at)
        if found is None:
            return None
        at = found.end()
        if found["open"]:
            outside.append(group)
            outside.append(sign)
            group = sign
        elif found["close"]:
            if not outside:
                return None
            sign, group = outside.pop(), outside.pop()
        elif found["over"]:
            sign = -group
        elif found["symbol"]:
            name = found["symbol"]
            symbol = symbols.get(name) or symbols[_folded(name)]
            powers[symbol] += sign * int(found["power"] or 1)
    if outside:
        return None
    if len(powers) > 1:  # in a compound unit a degree is a difference: °C is K and °R is °F
        for degree, same in (("C", "K"), ("R", "F")):
            powers[same] += powers.pop(degree, 0)
    return tuple(sorted((symbol, power) for symbol, power in powers.items() if power)) or None


_ALSO: dict[_Powers | None, _Powers] = {
    (("cm", -2), ("kg", 1)): (("cm", -2), ("kgf", 1)),
    (("kg", 1), ("mm", -2)): (("kgf", 1), ("mm", -2)),
    (("in", -2), ("lb", 1)): (("psi", 1),),
    (("in", -2), ("lbf", 1)): (("psi", 1),),
    (("ft", -2), ("lb", 1)): (("ft", -2), ("lbf", 1)),
    (("Btu", 1), ("lbf", -1)): (("Btu", 1), ("F", -1), ("lb", -1)),
}
"""Habits that the symbols alone would misread: a kilogram that is a force, "Btu/lbf" for Btu/lb°F in capitals."""

_MARKED = re.compile(r"(.*?)\s*\(?(?:(a|abs|absolute)|(g|ga|gauge|gage)|(d|diff|differential))\.?\)?", re.IGNORECASE)


def _readings(unit: str) -> Iterator[tuple[str, _Powers]]:
    """Each way to read a cleaned unit, as (mark, powers), the likeliest first."""
    unit = re.sub(r"(?i)(?:°|deg(?:rees?|\.)?)\s*(?=[CFKR])", "", unit)
    unit = re.sub(
        r"(?i)\b(sq|cu)\.?\s*(mm|cm|m|ft|feet|foot|in)", lambda x: f"{x[2]}{2 if x[1].lower() == 'sq' else 3}", unit
    )
    unit = re.sub(r"(?i)\bu\.?s\.?\s(?=g)|\s?\(us\)", "", unit)
    marked = [("", unit)]
    if difference := re.fullmatch(r"(?:Δ|(?i:delta))\s*(.+)", unit):
        marked.append(("Δ", difference[1]))
    if pressure := _MARKED.fullmatch(unit):
        marked.append(("agd"[(pressure.lastindex or 2) - 2], pressure[1]))
    for token, symbols in _READERS:
        for mark, rest in marked:
            powers = _powers(rest, token, symbols)
            if powers:
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
    return _QUANTITIES[quantity].shown[list(SYSTEMS).index(system)]


def find(unit: str, *quantities: str) -> Unit:
    """The accepted unit that a spelling stands for, of the first quantity that has it.

    Raises UnitError if none of the quantities has it.
    """
    found = _find(_clean(unit), quantities)
    if found is None:
        raise UnitError(_why_not(f'the unit "{_quoted(unit)}"', _clean(unit), quantities))
    return found


def to_unit(value: Any, quantity: str, unit: str) -> Any:
    """An SI value, or an array of them, in the given unit."""
    known = find(unit, quantity)
    return value / float(known.factor) - float(known.zero) if known.zero else value / float(known.factor)


def from_unit(figure: Any, quantity: str, unit: str) -> Any:
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


def _find(unit: str, quantities: tuple[str, ...]) -> Unit | None:
    """The unit of a cleaned spelling."""
    readings = list(_readings(unit))
    for quantity in quantities:
        for reading in readings:
            if reading in _TABLE[quantity]:
                return _TABLE[quantity][reading]
    return None


def _quoted(text: str) -> str:
    text = " ".join(text.split())
    return text if len(text) <= 40 else text[:37] + "…"


def _plain(label: str) -> str:
    """A label as it is typed on a keyboard."""
    return label.translate(str.maketrans("²³·µ", "23 u")).replace("°", "deg")


def _allowed(quantities: tuple[str, ...]) -> str:
    several = []
    for quantity in quantities:
        labels = units_of(quantity)
        several.append(f"{_QUANTITIES[quantity].name} in {', '.join(labels[:6])}{', …' if len(labels) > 6 else ''}")
    return " or ".join(several)


def _why_not(given: str, unit: str, quantities: tuple[str, ...], number: str = "3") -> str:
    """The sentence that says why a cleaned unit is not accepted for the quantities."""
    for pattern, reason in _REFUSED.items():
        if re.match(pattern, unit):
            return f"{given} {reason}"
    other = _find(unit, QUANTITIES)
    if other is None:
        return f"{given} has a unit that is not known here; allowed is {_allowed(quantities)}"
    if other.quantity == "pressure_difference":
        sisters = [q for q in quantities if q in ("pressure_absolute", "pressure_gauge")]
        if sisters:
            label = other.label + ("" if other.label in ("bar", "psi") else " ")
            ways = " or ".join(f'"{number} {_plain(label)}{_MARKS[q][0]}"' for q in sisters)
            return f"{given} does not say whether it is absolute or gauge; write {ways}"
    return f"{given} is {_QUANTITIES[other.quantity].name}; allowed is {_allowed(quantities)}"


_NUMBER = re.compile(
    r"([+-]?)(\d[\d.,]*(?: \d{3}(?!\d)[\d.,]*)*|[.,]\d+)"
    r"(?:[eE]([+-]?\d+)|\s*[x·*]\s*10(?:\^([+-]?\d+)|([+-]\d+)))?"
)
_TRADE_FRACTION = re.compile(r"(?:(\d{1,6})(?: - | |-))?(\d{1,6})/(\d{1,6})(?![\d.,])")
_FEET_AND_INCHES = re.compile(r"(\d{1,6}) ?(?:'|ft|feet)[ -]*(\d[^'\"a-z]*)(?:\"|''|in|inch|inches)")
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
        raise UnitError(
            f'{given} does not begin with a number; write for example "42 {_plain(unit_of(quantities[0]))}"'
        )
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
    if (
        mantissa.count(",") == 1
        and "." not in mantissa
        and " " not in mantissa
        and re.fullmatch(r"[1-9]\d{0,2},\d{3}", mantissa)
    ):
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
    in_common = spread is not None and not unit and (not _is_percent(spread_unit) or "fraction" in quantities)
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
        raise UnitError(_why_not(given, unit, quantities, number.text))
    if number.digit == 0 and known.quantity != "length":
        raise UnitError(f"{given} is a fraction; only a length can be one")
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
