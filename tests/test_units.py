"""The closed unit table and the reader of typed figures."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from engine import units
from engine.units import QUANTITIES, SYSTEMS, UnitError, find, from_unit, parse, show, to_unit, unit_of, units_of

# NIST Special Publication 811 (2008), Guide for the Use of the International System of Units, A. Thompson and
# B. N. Taylor, Appendix B.8, with the digits printed there; from memory, printed page not checked.
NIST = [
    ("temperature_difference", "°F", "5.555556e-1"),
    ("pressure_difference", "atm", "1.01325e5"),
    ("pressure_difference", "at", "9.80665e4"),
    ("pressure_difference", "bar", "1.0e5"),
    ("pressure_difference", "psi", "6.894757e3"),
    ("pressure_difference", "lbf/ft2", "4.788026e1"),
    ("pressure_difference", "torr", "1.333224e2"),
    ("pressure_difference", "mmHg", "1.333224e2"),
    ("pressure_difference", "mmH2O", "9.80665"),
    ("pressure_difference", "inH2O", "2.490889e2"),
    ("pressure_difference", "ftH2O", "2.989067e3"),
    ("mass_flow", "lb/h", "1.259979e-4"),
    ("mass_flow", "lb/min", "7.559873e-3"),
    ("mass_flow", "lb/s", "4.535924e-1"),
    ("volume_flow", "gpm", "6.309020e-5"),
    ("volume_flow", "ft3/min", "4.719474e-4"),
    ("volume_flow", "ft3/s", "2.831685e-2"),
    ("length", "in", "2.54e-2"),
    ("length", "ft", "3.048e-1"),
    ("length", "mil", "2.54e-5"),
    ("area", "ft2", "9.290304e-2"),
    ("area", "in2", "6.4516e-4"),
    ("volume", "gal", "3.785412e-3"),
    ("volume", "bbl", "1.589873e-1"),
    ("volume", "ft3", "2.831685e-2"),
    ("density", "lb/ft3", "1.601846e1"),
    ("density", "lb/gal", "1.198264e2"),
    ("specific_heat", "Btu/lb F", "4.1868e3"),
    ("viscosity", "P", "1.0e-1"),
    ("viscosity", "cP", "1.0e-3"),
    ("viscosity", "lb/ft h", "4.133789e-4"),
    ("viscosity", "lb/ft s", "1.488164"),
    ("viscosity", "lbf s/ft2", "4.788026e1"),
    ("kinematic_viscosity", "St", "1.0e-4"),
    ("kinematic_viscosity", "cSt", "1.0e-6"),
    ("kinematic_viscosity", "ft2/h", "2.58064e-5"),
    ("conductivity", "Btu/h ft F", "1.730735"),
    ("conductivity", "Btu in/h ft2 F", "1.442279e-1"),
    ("heat_flow", "Btu/h", "2.930711e-1"),
    ("heat_flow", "Btu/s", "1.055056e3"),
    ("heat_flux", "Btu/h ft2", "3.154591"),
    ("heat_transfer_coefficient", "Btu/h ft2 F", "5.678263"),
    ("fouling_resistance", "h ft2 F/Btu", "1.761102e-1"),
    ("specific_enthalpy", "Btu/lb", "2.326e3"),
    ("mass", "lb", "4.535924e-1"),
    ("mass_per_length", "lb/ft", "1.488164"),
    ("velocity", "ft/min", "5.08e-3"),
    ("modulus", "ksi", "6.894757e6"),
    ("surface_tension", "lbf/ft", "1.459390e1"),
    ("angle", "deg", "1.745329e-2"),
    ("time", "yr", "3.1536e7"),
]


@pytest.mark.parametrize(("quantity", "unit", "printed"), NIST, ids=[f"{q}, {u}" for q, u, _ in NIST])
def test_factors_agree_with_every_digit_of_the_si_guide(quantity: str, unit: str, printed: str) -> None:
    decimals = len(printed.partition("e")[0].partition(".")[2])
    half_a_digit = 0.5 * 10.0 ** (int(printed.partition("e")[2] or 0) - decimals)
    exact_there = decimals < 6
    assert from_unit(1.0, quantity, unit) == pytest.approx(float(printed), abs=1e-15 if exact_there else half_a_digit)


def test_a_column_of_mercury_is_made_of_torr() -> None:
    """SP 811 prints 3.386 389e3 Pa for the conventional inch of mercury, which is 1.5e-7 above 25.4 torr."""
    assert from_unit(1.0, "pressure_difference", "inHg") == pytest.approx(25.4 * 101325 / 760, rel=1e-15)
    assert from_unit(1.0, "pressure_difference", "inHg") == pytest.approx(3386.389, rel=3e-7)


# Definitions: yard and pound agreement of 1959, standard gravity of 1901, International Table calorie of 1956
# (1 cal = 4.1868 J, 1 Btu/lb°F = 1 cal/g°C), US gallon of 231 cubic inches, oil barrel of 42 gallons.
INCH, FOOT, POUND, GRAVITY = Fraction(254, 10**4), Fraction(3048, 10**4), Fraction(45359237, 10**8), Fraction("9.80665")
BTU = Fraction(41868, 10) * POUND * Fraction(5, 9)
PSI, HFTF = float(POUND * GRAVITY / INCH**2), float(3600 * FOOT**2 * Fraction(5, 9) / BTU)


@pytest.mark.parametrize(
    ("quantity", "unit", "defined"),
    [
        ("pressure_gauge", "psig", POUND * GRAVITY / INCH**2),
        ("pressure_absolute", "kg/cm2 a", GRAVITY * 10**4),
        ("volume_flow", "gpm", 231 * INCH**3 / 60),
        ("volume_flow", "bbl/d", 42 * 231 * INCH**3 / 86400),
        ("heat_flow", "MMBtu/h", BTU * 10**6 / 3600),
        ("heat_flow", "Gcal/h", Fraction(41868, 10**4) * 10**9 / 3600),
        ("heat_transfer_coefficient", "Btu/h·ft²·°F", BTU / 3600 / FOOT**2 / Fraction(5, 9)),
        ("heat_transfer_coefficient", "kcal/h·m²·°C", Fraction(1163, 1000)),
        ("fouling_resistance", "h·m²·°C/kcal", Fraction(1000, 1163)),
        ("fouling_rate", "m2K/W d", Fraction(1, 86400)),
        ("mass_flux", "lb/h ft2", POUND / 3600 / FOOT**2),
        ("momentum_flux", "lb/ft s2", POUND / FOOT),
        ("molar_mass", "lb/lbmol", Fraction(1, 1000)),
        ("temperature_difference", "degF", Fraction(5, 9)),
    ],
)
def test_factors_are_the_defined_fractions(quantity: str, unit: str, defined: Fraction) -> None:
    assert find(unit, quantity).factor == defined


# What each symbol measures: powers of length, mass, time, temperature, amount.
LENGTH, MASS, TIME = (1, 0, 0, 0, 0), (0, 1, 0, 0, 0), (0, 0, 1, 0, 0)
DEGREE, AMOUNT, NUMBER = (0, 0, 0, 1, 0), (0, 0, 0, 0, 1), (0, 0, 0, 0, 0)
VOLUME, FLOW, RATE, FORCE = (3, 0, 0, 0, 0), (3, 0, -1, 0, 0), (0, 0, -1, 0, 0), (1, 1, -2, 0, 0)
PRESSURE, ENERGY, POWER = (-1, 1, -2, 0, 0), (2, 1, -2, 0, 0), (2, 1, -3, 0, 0)
DIMENSION = {
    symbol: dimension
    for symbols, dimension in {
        "m cm mm μm in ft mil": LENGTH,
        "kg g t lb klb": MASS,
        "s min h d yr": TIME,
        "K C F R": DEGREE,
        "mol kmol lbmol": AMOUNT,
        "- % rad deg": NUMBER,
        "L gal bbl": VOLUME,
        "gpm cfm": FLOW,
        "Hz rpm": RATE,
        "N mN dyn kgf lbf": FORCE,
        "Pa mPa μPa hPa kPa MPa GPa bar mbar atm torr at psi ksi mmHg inHg mH2O cmH2O mmH2O inH2O ftH2O": PRESSURE,
        "J kJ MJ GJ cal kcal Mcal Gcal Btu kBtu MMBtu": ENERGY,
        "W kW MW": POWER,
        "P cP": (-1, 1, -1, 0, 0),
        "St cSt": (2, 0, -1, 0, 0),
    }.items()
    for symbol in symbols.split()
}


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_all_units_of_a_quantity_have_one_dimension(quantity: str) -> None:
    """With it, the symbols checked above prove every factor of the table."""
    dimensions = set()
    for label in units_of(quantity):
        base = label.removesuffix(" a").removesuffix(" g") if quantity.startswith("pressure") else label
        base = base[:3] if base in ("bara", "barg", "psia", "psig") else base
        powers = units._powers(units._clean(base.replace("°", "")))
        assert powers, label
        dimensions.add(tuple(sum(p * DIMENSION[s][axis] for s, p in powers) for axis in range(5)))
    assert len(dimensions) == 1


@pytest.mark.parametrize(
    ("text", "quantities", "value", "quantity", "unit", "digit"),
    [
        ("120 gpm", "volume_flow", 120 * 3.785411784e-3 / 60, "volume_flow", "gpm", 3.785411784e-3 / 60),
        ("45 psig", "pressure_absolute pressure_gauge", 45 * PSI, "pressure_gauge", "psig", PSI),
        ("0.002 h·ft²·°F/Btu", "fouling_resistance", 0.002 * HFTF, None, "h·ft²·°F/Btu", 0.001 * HFTF),
        ("38 kcal/h·m²·°C", "heat_transfer_coefficient", 44.194, None, "kcal/h·m²·°C", 1.163),
        ("3,5 bar", "pressure_difference", 3.5e5, None, "bar", 1e4),
        ("0.00018 m2K/W", "fouling_resistance", 0.00018, None, "m²K/W", 1e-5),
        ("1.95 kJ/kgK", "specific_heat", 1950.0, None, "kJ/kgK", 10.0),
        ("39.6 cP", "viscosity", 0.0396, None, "cP", 1e-4),
        ("27 degC", "temperature", 300.15, None, "°C", 1.0),
        ("80.6 °F", "temperature", 300.15, None, "°F", 0.1 / 1.8),
        ("4.2 barg", "pressure_gauge pressure_absolute", 4.2e5, "pressure_gauge", "barg", 1e4),
        ("4.2 bara", "pressure_gauge pressure_absolute", 4.2e5, "pressure_absolute", "bara", 1e4),
        ("25 %", "fraction", 0.25, None, "%", 0.01),
        ("0.25", "fraction", 0.25, None, "-", 0.01),
        ("30 deg", "angle", math.pi / 6, None, "deg", math.pi / 180),
        ("6 m", "length", 6.0, None, "m", 1.0),
        ("0.045 mm", "length", 45e-6, None, "mm", 1e-6),
        ("50 W/mK", "conductivity", 50.0, None, "W/mK", 1.0),
        ("70 kPa", "pressure_difference", 7e4, None, "kPa", 1e3),
        ("42 m3/h", "volume_flow mass_flow", 42 / 3600, "volume_flow", "m³/h", 1 / 3600),
        ("18 t/h", "volume_flow mass_flow", 5.0, "mass_flow", "t/h", 1000 / 3600),
        ("1.20e-4 m2K/W", "fouling_resistance", 1.2e-4, None, "m²K/W", 1e-6),
        ("1.2 × 10⁻⁴ m²·K/W", "fouling_resistance", 1.2e-4, None, "m²K/W", 1e-5),
        ("1200 kg/h", "mass_flow", 1 / 3, None, "kg/h", 1 / 3600),
        ("\u22125\u00a0°C", "temperature", 268.15, None, "°C", 1.0),
        ("-0.2 barg", "pressure_gauge", -2e4, None, "barg", 1e4),
        ("16 mPa·s", "viscosity", 0.016, None, "mPa·s", 1e-3),
        ("16 MPa(a)", "pressure_absolute", 1.6e7, None, "MPa a", 1e6),
        ("10 delta degF", "temperature_difference", 50 / 9, None, "°F", 5 / 9),
        ("48200", "dimensionless", 48200.0, None, "-", 1.0),
    ],
)
def test_typed_figures_mean(
    text: str, quantities: str, value: float, quantity: str | None, unit: str, digit: float
) -> None:
    typed = parse(text, *quantities.split())
    assert typed.value == pytest.approx(value, rel=1e-9)
    assert typed.quantity == (quantity or quantities)
    assert typed.unit == unit
    assert typed.digit == pytest.approx(digit, rel=1e-9)
    assert typed.sd is None
    assert typed.text == text


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("3/4 in", 0.75),
        ("1 1/2 in", 1.5),
        ("1-1/2 in", 1.5),
        ('1½"', 1.5),
        ("16'-0\"", 192.0),
        ("20 ft 6 in", 246.0),
        ("16' 6 1/2\"", 198.5),
        ("5′ 3″", 63.0),
    ],
)
def test_lengths_may_be_trade_fractions_or_feet_and_inches(text: str, value: float) -> None:
    assert parse(text, "length").value == pytest.approx(value * 0.0254, rel=1e-15)


def test_a_trade_fraction_has_no_last_digit() -> None:
    assert parse("3/4 in", "length").digit == 0.0
    assert parse("16'-0\"", "length").digit == 0.0254


@pytest.mark.parametrize(
    ("typed", "value"),
    [
        ("3,5", 3.5),
        ("12,25", 12.25),
        ("0,125", 0.125),
        ("1234,567", 1234.567),
        ("1,200,000", 1.2e6),
        ("1,200.5", 1200.5),
        ("1.200,5", 1200.5),
        ("1.200.000", 1.2e6),
        ("1 200", 1200.0),
        ("1\u202f200\u202f000,5", 1200000.5),
        ("1.200", 1.2),
        (".5", 0.5),
        ("5.", 5.0),
        ("+5", 5.0),
    ],
)
def test_separators_with_one_meaning_are_understood(typed: str, value: float) -> None:
    assert parse(f"{typed} m", "length").value == value


@pytest.mark.parametrize(
    ("unit", "spellings"),
    [
        (
            "heat_transfer_coefficient: W/m²K",
            "W/m2K|W/(m2·K)|W/m^2/K|W·m⁻²·K⁻¹|W/m²·°C|W/(m^2*degC)|w/m2k|W/M2K|W/m2-K",
        ),
        ("heat_transfer_coefficient: W/m²K", "W m-2 K-1|W / m2 K|W per m2 K|W/(m2 degC)|W/sq m K|W/sq.m.°C"),
        ("heat_transfer_coefficient: kcal/h·m²·°C", "kcal/h.m2.C|kcal/hm2C|kcal/(hr*m^2*°C)|kcal/m2hC|KCAL/H·M2·°C"),
        ("heat_transfer_coefficient: Btu/h·ft²·°F", "BTU/hr-ft2-F|Btu/(h ft^2 °F)|btu/hr.sq.ft.°F|BTU/HR/FT2/F"),
        ("fouling_resistance: m²K/W", "m2K/W|m2.K/W|m²·°C/W|(m2K)/W|1/(W/m2K)|K·m2/W|m2degC/W"),
        ("fouling_resistance: h·ft²·°F/Btu", "hr·ft²·°F/Btu|h-ft2-F/BTU|hr ft2 F / Btu|hft2F/Btu|ft2 h R/Btu"),
        ("specific_heat: kJ/kgK", "kJ/kgK|kJ/(kg·K)|kJ/kg/K|kJ/kg°C|KJ/KG·K"),
        ("specific_heat: Btu/lb·°F", "Btu/lbF|BTU/LB-F|Btu/(lbm °R)|BTU/LBF|Btu/lb degF"),
        ("conductivity: W/mK", "W/mK|W/m°C|W/(m·K)|W/m/K|W/m-K|W/MK"),
        ("conductivity: Btu/h·ft·°F", "Btu/hr ft F|BTU/(hr·ft·°F)|Btu ft/h ft2 F"),
        ("conductivity: Btu·in/h·ft²·°F", "Btu in/h ft2 F|Btu-in/hr-ft²-°F"),
        ("viscosity: cP", "cP|CP|cp|cps|centipoise"),
        ("viscosity: lb/ft·h", "lb/ft h|lbm/ft-hr|lb/(ft·h)|lb/fth"),
        ("viscosity: Pa·s", "Pa s|Pa.s|Pas|Pa-s"),
        ("mass_flow: kg/h", "kg/h|kg/hr|KG/H|Kg/Hr|kg·h⁻¹|kg per hour"),
        ("mass_flow: t/h", "t/h|T/H|tonne/h|tonnes/hr"),
        ("volume_flow: m³/h", "m3/h|m³/h|m^3/h|M3/HR|cu.m/h"),
        ("volume_flow: gpm", "gpm|GPM|usgpm|US gpm|gpm (US)"),
        ("volume_flow: gal/min", "gal/min|gallons/minute|US gal/min"),
        ("volume_flow: L/s", "l/s|L/s|litre/s"),
        ("temperature: °C", "C|c|°C|degC|℃|ºC|celsius|deg C|° C|degrees Celsius"),
        ("temperature: °F", "F|°F|degF|℉|deg. F"),
        ("pressure_absolute: bara", "bara|bar a|bar(a)|bar abs|bar abs.|BARA|bar (absolute)"),
        ("pressure_absolute: kgf/cm² a", "kg/cm2 a|kg/cm2(a)|kgf/cm2a|kg/cm²abs"),
        ("pressure_absolute: at a", "ata"),
        ("pressure_absolute: mmHg a", "mmHg abs|mm Hg a|mmHga"),
        ("pressure_gauge: psig", "psig|PSIG|psi g|psi gauge|lb/in2 g"),
        ("pressure_gauge: kPa g", "kPag|kPa(g)|KPAG|kPa gauge"),
        ("pressure_difference: inH2O", "inH2O|inH₂O|inWC|in H2O|in. H2O|in WC"),
        ("pressure_difference: psi", "psi|psid|lbf/in2|lb/in2|psi diff"),
        ("heat_flow: MMBtu/h", "MMBtu/h|MMBTU/HR|mmbtu/h"),
        ("length: µm", "µm|μm|um|micron"),
        ("length: in", 'in|"|inch|inches|IN'),
        ("length: mm", "mm|MM"),
        ("area: ft²", "ft2|sqft|sq.ft|sq ft|ft^2|SQ FT"),
        ("angle: deg", "deg|°|degrees"),
        ("fraction: %", "%|percent"),
    ],
)
def test_spellings_of_one_unit(unit: str, spellings: str) -> None:
    quantity, label = unit.split(": ")
    for spelling in spellings.split("|"):
        assert find(spelling, quantity).label == label, spelling


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_every_label_reads_back_also_as_typed_on_a_keyboard(quantity: str) -> None:
    for label in units_of(quantity):
        assert find(label, quantity).label == label
        assert find(units._plain(label), quantity).label == label
        assert units._plain(label).isascii()


@pytest.mark.parametrize(
    ("text", "quantity", "value", "sd"),
    [
        ("18 t/h ± 3 %", "mass_flow", 5.0, 0.15),
        ("18 t/h±3%", "mass_flow", 5.0, 0.15),
        ("42 m3/h +/- 3.6 m3/h", "volume_flow", 42 / 3600, 1e-3),
        ("5 kg/s +- 2 t/h", "mass_flow", 5.0, 2 / 3.6),
        ("(42 ± 2) kg/s", "mass_flow", 42.0, 2.0),
        ("42 ± 2 kg/s", "mass_flow", 42.0, 2.0),
        ("68 degC ± 0.5 K", "temperature", 341.15, 0.5),
        ("68 °C ± 0.9 °F", "temperature", 341.15, 0.5),
        ("68 ± 0.5 degC", "temperature", 341.15, 0.5),
        ("4.2 barg ± 0.05 bar", "pressure_gauge", 4.2e5, 5e3),
        ("4.2 barg ± 5 kPa g", "pressure_gauge", 4.2e5, 5e3),
        ("-0.5 barg ± 2 %", "pressure_gauge", -0.5e5, 1e3),
        ("25 ± 1 %", "fraction", 0.25, 0.01),
        ("0.25 ± 0.01", "fraction", 0.25, 0.01),
        ("1.2 ± 5 %", "dimensionless", 1.2, 0.06),
        ("3/4 in ± 0.1 mm", "length", 0.01905, 1e-4),
        ("10 m ± 0 mm", "length", 10.0, 0.0),
    ],
)
def test_one_standard_deviation_stands_behind_the_plus_minus(text: str, quantity: str, value: float, sd: float) -> None:
    typed = parse(text, quantity)
    assert typed.value == pytest.approx(value, rel=1e-14)
    assert typed.sd == pytest.approx(sd, rel=1e-14)


REFUSED = [
    ("", "mass_flow", "nothing is given; allowed is a mass flow in kg/h, lb/h, kg/s, t/h, lb/s, klb/h, …"),
    ("42", "volume_flow", '"42" gives no unit; write for example "42 m3/h"'),
    ("42 ± 3 %", "volume_flow", '"42 ± 3 %" gives no unit; write for example "42 m3/h"'),
    ("0.25", "temperature", '"0.25" gives no unit; write for example "0.25 degC"'),
    ("25", "fraction", '"25" gives no unit and is above 1; write for example "25 %"'),
    ("42 kg/h", "temperature", '"42 kg/h" is a mass flow; allowed is a temperature in °C, °F, K, °R'),
    ("5 kg", "dimensionless", '"5 kg" is a mass; allowed is a plain number'),
    (
        "5000 W/m2K",
        "fouling_resistance",
        '"5000 W/m2K" is a heat transfer coefficient; allowed is a fouling resistance in m²K/W, h·ft²·°F/Btu, '
        "h·m²·°C/kcal, m²K/kW, s·m²·K/J",
    ),
    (
        "5 Δ°C",
        "temperature",
        '"5 Δ°C" is a temperature difference; allowed is a temperature in °C, °F, K, °R',
    ),
    (
        "3 barg",
        "pressure_difference",
        '"3 barg" is a gauge pressure; allowed is a pressure difference in kPa, psi, kgf/cm², bar, Pa, hPa, …',
    ),
    (
        "42 kg/h",
        "temperature temperature_difference",
        '"42 kg/h" is a mass flow; allowed is a temperature in °C, °F, K, °R or a temperature difference in K, °F, '
        "°C, °R",
    ),
    (
        "3 bar",
        "pressure_absolute pressure_gauge",
        '"3 bar" does not say whether it is absolute or gauge; write "3 bara" or "3 barg"',
    ),
    ("45 psi", "pressure_gauge", '"45 psi" does not say whether it is absolute or gauge; write "45 psig"'),
    (
        "70 kPa",
        "pressure_gauge pressure_absolute",
        '"70 kPa" does not say whether it is absolute or gauge; write "70 kPa g" or "70 kPa a"',
    ),
    ("1 atm", "pressure_absolute", '"1 atm" does not say whether it is absolute or gauge; write "1 atm a"'),
    (
        "20 inHg vac",
        "pressure_absolute",
        '"20 inHg vac" counts downwards from the atmosphere; give the absolute pressure',
    ),
    ("nan K", "temperature", '"nan K" is not a finite number'),
    ("-inf kg/h", "mass_flow", '"-inf kg/h" is not a finite number'),
    ("Infinity", "mass_flow", '"Infinity" is not a finite number'),
    ("1e999 kg/h", "mass_flow", '"1e999 kg/h" is out of the range of numbers'),
    ("1e999999999 kg/h", "mass_flow", '"1e999999999 kg/h" is out of the range of numbers'),
    ("1e308 MPa", "pressure_difference", '"1e308 MPa" is out of the range of numbers'),
    ("1e-999 kg/h", "mass_flow", '"1e-999 kg/h" is out of the range of numbers'),
    ("1e-323 mm", "length", '"1e-323 mm" is out of the range of numbers'),
    (
        "9" * 41 + " m",
        "length",
        '"9999999999999999999999999999999999999…" has a number of 41 characters; write at most 40',
    ),
    (
        "9" * 5000 + " m",
        "length",
        '"9999999999999999999999999999999999999…" has 5002 characters; write a number and a unit',
    ),
    (
        "1,200 kg/h",
        "mass_flow",
        '"1,200 kg/h" can be read as 1.200 or as 1200; write it without the comma',
    ),
    (
        "1.2.3 m",
        "length",
        '"1.2.3 m" is not a number; write it with a point and without separators, for example 1234.5',
    ),
    (
        "12,34,567 m",
        "length",
        '"12,34,567 m" is not a number; write it with a point and without separators, for example 1234.5',
    ),
    ("cold", "temperature", '"cold" does not begin with a number; write for example "42 degC"'),
    ("5 m ± ", "length", '"5 m ±" does not begin with a number; write for example "42 mm"'),
    ("-300 degC", "temperature", '"-300 degC" is below absolute zero'),
    ("-1 K", "temperature", '"-1 K" is below absolute zero'),
    ("-0.1 bara", "pressure_absolute", '"-0.1 bara" is below absolute zero'),
    ("3/4 kg", "mass", '"3/4 kg" is written as a fraction, which only a length may be; write a decimal'),
    ("3/0 in", "length", '"3/0 in" divides by zero'),
    ("5 m ± 1 m ± 2 m", "length", '"5 m ± 1 m ± 2 m" has more than one ±'),
    ("5 m ± -1 mm", "length", '"5 m ± -1 mm" has a negative ±'),
    ("5 kg/h ± 1", "mass_flow", '"5 kg/h ± 1" gives no unit behind the ±; write for example "± 3 kg/h"'),
    (
        "68 degC ± 3 %",
        "temperature",
        '"68 degC ± 3 %" has a ± in percent, which says nothing of a temperature; write it in K or degF',
    ),
    (
        "68 degC ± 2 kg",
        "temperature",
        'the ± of "68 degC ± 2 kg" is a mass; allowed is a temperature difference in K, °F, °C, °R',
    ),
    (
        "25 % ± 1 %",
        "fraction",
        '"25 % ± 1 %" can mean percent of the value or percentage points; for points write "25 ± 1 %"',
    ),
    (
        "0.25 ± 1 %",
        "fraction",
        '"0.25 ± 1 %" can mean percent of the value or percentage points; for points write "25 ± 1 %"',
    ),
    ("3 mpa", "pressure_difference", '"3 mpa" mixes up m for milli and M for mega; write "3 MPa" if that is meant'),
    ("12 mW", "heat_flow", '"12 mW" mixes up m for milli and M for mega; write "12 MW" if that is meant'),
    (
        "300 Nm3/h",
        "volume_flow",
        '"300 Nm3/h" counts gas at a reference state; give the mass flow or the volume flow at the inlet',
    ),
    (
        "300 SCFM",
        "volume_flow mass_flow",
        '"300 SCFM" counts gas at a reference state; give the mass flow or the volume flow at the inlet',
    ),
    ("2 ton/h", "mass_flow", '"2 ton/h" does not say which ton; write t for 1000 kg, or lb'),
    (
        "3 MBtu/h",
        "heat_flow",
        '"3 MBtu/h" is read as a thousand by some and as a million by others; write kBtu or MMBtu',
    ),
    ("80 SSU", "viscosity", '"80 SSU" is a time on a viscometer; give the viscosity in cP or cSt'),
    ("40 vol%", "fraction", '"40 vol%" is a share of the volume; give the share of the mass in %'),
    (
        "5 furlong/h",
        "velocity",
        '"5 furlong/h" has a unit that is not known here; allowed is a velocity in m/s, ft/s, mm/s, cm/s, m/min, '
        "ft/min, …",
    ),
    *(
        (
            f"5 {unit}",
            "mass",
            f'"5 {unit}" has a unit that is not known here; allowed is a mass in kg, lb, g, t, klb',
        )
        for unit in ("kg/", "kg//h", "kg/()", ")kg(", "°kg", "kg(", "kilo", "kg+")
    ),
    (
        "5 m/(s",
        "velocity",
        '"5 m/(s" has a unit that is not known here; allowed is a velocity in m/s, ft/s, mm/s, cm/s, m/min, ft/min, …',
    ),
]


@pytest.mark.parametrize(("text", "quantities", "sentence"), REFUSED, ids=[f"{t[:20]} as {q}" for t, q, _ in REFUSED])
def test_refusals_say_what_was_given_and_what_is_allowed(text: str, quantities: str, sentence: str) -> None:
    with pytest.raises(UnitError) as refused:
        parse(text, *quantities.split())
    assert str(refused.value) == sentence


@pytest.mark.parametrize(("text", "quantities", "sentence"), REFUSED)
def test_what_a_refusal_proposes_is_accepted(text: str, quantities: str, sentence: str) -> None:
    if "write for example" in sentence or "; write " in sentence:
        for proposal in sentence.partition("; ")[2].split('"')[1::2]:
            if not proposal.startswith("±"):
                parse(proposal, *quantities.split())


def test_an_unknown_unit_in_a_table_header_is_refused() -> None:
    with pytest.raises(UnitError, match='"furlong" has a unit that is not known here; allowed is a length in mm, in'):
        from_unit(1.0, "length", "furlong")


@given(st.text(max_size=60), st.sampled_from(QUANTITIES))
@example("5 İ", "length")
@example("٣ m", "length")
@example("5 ſ", "time")
@example("²", "length")
@example("5 m²²", "area")
def test_any_text_is_read_or_refused_with_a_sentence(text: str, quantity: str) -> None:
    try:
        typed = parse(text, quantity)
    except UnitError:
        return
    assert math.isfinite(typed.value)


NUMBERS = st.from_regex(r"[+-]?[0-9]{1,3}([., ][0-9]{0,4}){0,3}(e-?[0-9]{1,4})?", fullmatch=True)
UNITS = st.one_of(*(st.sampled_from([*units_of(q), "", "%"]) for q in QUANTITIES))


@given(NUMBERS, UNITS, st.sampled_from(["", " ± {} {}", "+/-{}{}"]), NUMBERS, UNITS, st.sampled_from(QUANTITIES))
def test_near_misses_are_read_or_refused_with_a_sentence(
    number: str, unit: str, spread: str, around: str, spread_unit: str, quantity: str
) -> None:
    try:
        typed = parse(f"{number} {unit}" + spread.format(around, spread_unit), quantity)
    except UnitError:
        return
    assert math.isfinite(typed.value)
    assert typed.quantity == quantity


@given(st.floats(min_value=1e-300, max_value=1e300))
def test_a_figure_in_si_is_the_float_that_was_typed(x: float) -> None:
    assert parse(f"{x!r} m", "length").value == x
    assert parse(f"-{x!r} Pa", "pressure_difference").value == -x


@given(st.floats(1e-9, 1e12), st.booleans(), st.sampled_from(QUANTITIES), st.sampled_from([*SYSTEMS]))
@example(300.15, False, "temperature", "us")
@example(273.15, False, "temperature", "si")
def test_seventeen_digits_lose_nothing(x: float, negative: bool, quantity: str, system: str) -> None:
    if quantity == "fraction":
        x = min(x, 1.0)
    if negative and quantity not in ("temperature", "pressure_absolute"):
        x = -x
    assert parse(show(x, quantity, system, digits=17), quantity).value == x


@given(st.floats(1e-9, 1e12), st.integers(2, 8), st.sampled_from(QUANTITIES), st.sampled_from([*SYSTEMS]))
def test_a_shown_figure_is_off_by_half_a_digit_at_most(x: float, digits: int, quantity: str, system: str) -> None:
    typed = parse(show(x, quantity, system, digits), quantity)
    assert abs(typed.value - x) <= 0.5000001 * 10.0 ** (1 - digits) * x


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_conversions_invert_each_other(quantity: str) -> None:
    x = np.geomspace(1e-6, 1e9, 31)
    for unit in units_of(quantity):
        back = from_unit(to_unit(x, quantity, unit), quantity, unit)
        slack = 1e-13 if quantity == "temperature" else 0.0  # the zero of °C and °F costs an ulp of 273.15 or 459.67
        np.testing.assert_allclose(back, x, rtol=5e-16, atol=slack)


def test_conversions_take_arrays_of_any_shape() -> None:
    T = from_unit(np.array([[0.0, 100.0], [27.0, -40.0]]), "temperature", "degC")
    np.testing.assert_allclose(T, [[273.15, 373.15], [300.15, 233.15]], rtol=1e-15)
    np.testing.assert_allclose(to_unit(T, "temperature", "°F"), [[32.0, 212.0], [80.6, -40.0]], rtol=1e-13)
    assert from_unit(50.0, "temperature_difference", "°C") == 50.0


@pytest.mark.parametrize(
    ("value", "quantity", "system", "digits", "shown"),
    [
        (325.15, "temperature", "si", 4, "52.0 °C"),
        (325.15, "temperature", "us", 4, "125.6 °F"),
        (273.15, "temperature", "si", 4, "0.0 °C"),
        (13.0, "temperature_difference", "si", 3, "13.0 K"),
        (5.0, "mass_flow", "si", 5, "18000 kg/h"),
        (5.0, "mass_flow", "us", 4, "39680 lb/h"),
        (42 / 3600, "volume_flow", "us", 4, "184.9 gpm"),
        (0.00018, "fouling_resistance", "si", 2, "0.00018 m²K/W"),
        (0.00018, "fouling_resistance", "us", 3, "0.00102 h·ft²·°F/Btu"),
        (1000.0, "heat_transfer_coefficient", "metric", 4, "859.8 kcal/h·m²·°C"),
        (0.01905, "length", "si", 4, "19.05 mm"),
        (0.01905, "length", "us", 3, "0.750 in"),
        (521325.0, "pressure_absolute", "si", 4, "5.213 bara"),
        (4.2e5, "pressure_gauge", "metric", 3, "4.28 kgf/cm² g"),
        (70e3, "pressure_difference", "si", 3, "70.0 kPa"),
        (0.25, "fraction", "us", 3, "25.0 %"),
        (math.pi / 6, "angle", "si", 2, "30 deg"),
        (99.996, "mass", "si", 4, "100.0 kg"),
        (0.0, "mass", "si", 4, "0 kg"),
        (123456789.0, "dimensionless", "si", 4, "1.235e+8"),
        (48213.0, "dimensionless", "si", 4, "48210"),
    ],
)
def test_figures_are_shown(value: float, quantity: str, system: str, digits: int, shown: str) -> None:
    assert show(value, quantity, system, digits) == shown


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_not_shown(value: float) -> None:
    with pytest.raises(UnitError, match="is no value of a mass flow"):
        show(value, "mass_flow")


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_every_system_has_a_unit_of_every_quantity(quantity: str) -> None:
    for system in SYSTEMS:
        assert unit_of(quantity, system) in units_of(quantity)
