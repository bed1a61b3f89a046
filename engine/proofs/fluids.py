"""Check values for fluid properties: release tables for water and air, textbooks, a second library."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cache, partial

import numpy as np
from scipy.integrate import quad
from scipy.optimize import brentq

from engine.fluids import PROPERTIES, Interpolated, Pure, Solution, Table, TablePoint, fluid_at, saturation
from engine.proofs import Kind, Proof

WATER = Pure("water")
AIR = Pure("air")
AIR_MOLE = 28.96546e-3
"""kg/mol"""

IF97_STATES = (
    (300.0, 3e6, 0.00100215168, 4173.01218, 1e-4, 5e-4),
    (500.0, 3e6, 0.00120241800, 4655.80682, 1e-4, 1e-3),
    (300.0, 3500.0, 39.4913866, 1913.00162, 1e-4, 1e-3),
    (700.0, 3500.0, 92.3015898, 2081.41274, 1e-4, 1e-3),
)
"""(T, p, specific volume, cp, slack on volume, slack on cp)"""

IF97_BOILING = ((0.1e6, 372.755919), (1e6, 453.035632), (10e6, 584.149488))
"""(p, saturation temperature)"""

IAPWS95_SATURATION = (
    (275.0, 698.451167, 999.887406, 0.00550664919, 2504.28995e3 - 7.75972201e3),
    (625.0, 16.9082693e6, 567.090385, 118.290280, 2550.71625e3 - 1686.26976e3),
)
"""(T, p, density of the liquid, of the vapour, heat of vaporisation)"""

R12_VISCOSITY = (
    (998.0, 298.15, 2217134.885875794, 889.735100e-6),
    (1000.0, 373.15, 100644962.1141995, 307.883622e-6),
    (1000.0, 433.15, 214352684.22674346, 217.685358e-6),
    (1.0, 433.15, 196901.582931856, 14.538324e-6),
    (1.0, 873.15, 402225.47133046854, 32.619287e-6),
    (100.0, 873.15, 33608608.0623081, 35.802262e-6),
)
"""(density, T, pressure at that density, viscosity)"""

R15_CONDUCTIVITY = ((298.15, 18.4341883e-3), (873.15, 79.1034659e-3))
"""(T, conductivity at zero density)"""

AIR_STATES = (
    (100.0, 0.101325e6, 0.12449, 30.13),
    (130.0, 1e6, 1.0295, 34.69),
    (2000.0, 10e6, 0.59094, 36.25),
)
"""(T, p, mol/dm3, cp in J/mol K)"""

AIR_TRANSPORT = ((100.0, 7.09559e-6, 9.35902e-3), (300.0, 18.5230e-6, 26.3529e-3))
"""(T, viscosity, conductivity), at zero density"""

TEXTBOOK_WATER = (
    ("Incropera et al., 6th ed., Table A.6", 300.0, "rho", 997.0, 0.008),
    ("Incropera et al., 6th ed., Table A.6", 300.0, "cp", 4179.0, 0.008),
    ("Incropera et al., 6th ed., Table A.6", 300.0, "mu", 855e-6, 0.015),
    ("Incropera et al., 6th ed., Table A.6", 300.0, "k", 0.613, 0.008),
    ("Incropera et al., 6th ed., Table A.6", 353.0, "mu", 352e-6, 0.015),
    ("Incropera et al., 6th ed., Table A.6", 353.0, "k", 0.670, 0.008),
    ("Cengel, 3rd ed., Table A-9", 318.15, "rho", 990.1, 0.008),
    ("Cengel, 3rd ed., Table A-9", 318.15, "k", 0.637, 0.008),
    ("Cengel, 3rd ed., Table A-9", 318.15, "Pr", 3.91, 0.015),
    ("Cengel, 3rd ed., Table A-9", 278.15, "mu", 1.519e-3, 0.015),
)
"""(source, T, property, value, slack)"""

TEXTBOOK_AIR = (
    ("rho", 0.9994, 0.003),
    ("cp", 1008.0, 0.003),
    ("k", 0.02953, 0.03),
    ("Pr", 0.7154, 0.03),
)
"""(property, value, slack) at 80 °C and 1 atm"""

LATENT_HEAT = (
    ("Cengel, Ex. 11-3", 303.15, 2431e3),
    ("Lienhard & Lienhard, Ex. 3.3", 333.15, 2358.7e3),
    ("Cengel, Ex. 8-1", 393.15, 2203e3),
)

ENGINE_OIL = Table(
    "engine oil",
    (
        TablePoint(T=293.15, rho=888.1, cp=1880.0, k=0.145, mu=888.1 * 0.0009429),
        TablePoint(T=353.15, rho=852.0, cp=2131.0, k=0.138, mu=852.0 * 3.794e-5),
    ),
)
"""Cengel, Table A-13, at 20 and 80 °C; viscosity from the kinematic one."""

UNUSED_OIL = Table(
    "unused engine oil",
    (
        TablePoint(T=340.0, rho=859.9, cp=2076.0, k=0.139, mu=5.31e-2),
        TablePoint(T=350.0, rho=853.9, cp=2118.0, k=0.138, mu=3.56e-2),
        TablePoint(T=360.0, rho=847.8, cp=2161.0, k=0.138, mu=2.52e-2),
    ),
)
"""Incropera et al., Table A.5, rows recalled."""

FREEZING = (
    ("ethylene glycol", 0.30, 273.15 - 14.1, "ASHRAE Handbook, Fundamentals: ethylene glycol 30 % by mass"),
    ("propylene glycol", 0.30, 273.15 - 12.7, "ASHRAE Handbook, Fundamentals: propylene glycol 30 % by mass"),
    ("sodium chloride", 0.23, 273.15 - 21.1, "eutectic of sodium chloride and water, 23.3 % and -21.1 °C"),
)

SECOND_LIBRARY_WATER = ((280.0, 0.2e6), (320.0, 1.0e6), (400.0, 1.0e6), (430.0, 0.4e6), (600.0, 2.0e6))
SECOND_LIBRARY_AIR = ((280.0, 0.1e6), (400.0, 0.5e6))
PROPERTY_UNIT = {"rho": "kg/m³", "cp": "J/(kg K)", "mu": "Pa s", "k": "W/(m K)", "Pr": "-"}


def prop(specification: Pure | Solution | Table, p: float, T: float, name: str) -> float:
    return float(fluid_at(specification, p, T).values(T, name)[0])


def enthalpy_rise(p: float, T1: float, T2: float) -> float:
    h1, h2 = fluid_at(WATER, p, T1).enthalpy([T1, T2])
    return float(h2 - h1)


def latent_heat(T: float) -> float:
    """Heat of vaporisation at T: `saturation` is stated by pressure."""
    return heat_of_vaporisation(float(brentq(lambda p: boiling(p) - T, 1e3, 1e6, xtol=1.0)))


def freezing_temperature(name: str, x: float) -> float:
    T = fluid_at(Solution(name, x), 3e5).freezing_temperature
    assert T is not None
    return T


@cache
def second_library(fluid: Pure, T: float, p: float) -> dict[str, float]:
    """rho, cp, mu, k by the iapws package."""
    if fluid == WATER:
        from iapws import IAPWS95 as Formulation  # type: ignore[import-untyped]
    else:
        from iapws.humidAir import Air as Formulation  # type: ignore[import-untyped]
    state = Formulation(T=T, P=p / 1e6)
    return {"rho": state.rho, "cp": state.cp * 1e3, "mu": state.mu, "k": state.k}


def over_second_library(fluid: Pure, T: float, p: float, name: str) -> float:
    return prop(fluid, p, T, name) / second_library(fluid, T, p)[name]


def boiling(p: float) -> float:
    return saturation(p).T_sat


def heat_of_vaporisation(p: float) -> float:
    return saturation(p).h_fg


def condensate_density(p: float) -> float:
    at = saturation(p)
    return float(at.liquid.values(at.T_sat, "rho")[0])


def vapour_density(p: float) -> float:
    at = saturation(p)
    return float(at.vapour.values(at.T_sat, "rho")[0])


def row(
    what: str,
    ours: Callable[[], float],
    value: float,
    unit: str,
    tolerance: float,
    reason: str,
    source: str,
    kind: Kind = "printed",
    subject: str = "fluid_at",
    relative: bool = True,
) -> Proof:
    return Proof(
        subject=subject,
        what=what,
        ours=ours,
        value=value,
        unit=unit,
        tolerance=tolerance,
        reason=reason,
        kind=kind,
        source=source,
        relative=relative,
    )


IF97 = "IAPWS R7-97(2012), Industrial Formulation 1997"
IAPWS95 = "IAPWS R6-95(2018), Table 8"
LEMMON = "Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000) 331, Table A2"
LEMMON_JACOBSEN = "Lemmon & Jacobsen, Int. J. Thermophys. 25 (2004) 21, Table V"
FIT = "the industrial formulation is a fit to the general one that is used here"
OLD_TABLES = "older steam tables than the formulation used here"
HALF_DIGIT = "half the last printed digit"
THIN = "the printed value is for zero density; here 100 Pa"

ROWS: tuple[Proof, ...] = (
    *(
        row(f"water at {T:g} K and {p:g} Pa: {name}", partial(prop, WATER, p, T, name), value, unit, slack, FIT, IF97)
        for T, p, v, cp, slack_v, slack_cp in IF97_STATES
        for name, value, unit, slack in (
            ("rho", 1 / v, "kg/m³", slack_v),
            ("cp", cp, "J/(kg K)", slack_cp),
        )
    ),
    row(
        "liquid water at 3 MPa: enthalpy from 300 to 500 K",
        partial(enthalpy_rise, 3e6, 300.0, 500.0),
        975.542239e3 - 115.331273e3,
        "J/kg",
        2e-4,
        FIT,
        f"{IF97}, Table 5",
    ),
    row(
        "steam at 3.5 kPa: enthalpy from 300 to 700 K",
        partial(enthalpy_rise, 3500.0, 300.0, 700.0),
        3335.68375e3 - 2549.91145e3,
        "J/kg",
        2e-4,
        FIT,
        f"{IF97}, Table 15",
    ),
    *(
        row(
            f"boiling temperature of water at {p:g} Pa",
            partial(boiling, p),
            T_sat,
            "K",
            0.02,
            FIT,
            f"{IF97}, Table 36",
            subject="saturation",
            relative=False,
        )
        for p, T_sat in IF97_BOILING
    ),
    *(
        row(
            f"saturated water at {T:g} K: {what}",
            partial(ours, p),
            value,
            unit,
            1e-7,
            "9 printed digits; interpolant within 1e-8",
            IAPWS95,
            subject="saturation",
        )
        for T, p, rho_liquid, rho_vapour, h_fg in IAPWS95_SATURATION
        for what, ours, value, unit in (
            ("temperature", boiling, T, "K"),
            ("liquid density", condensate_density, rho_liquid, "kg/m³"),
            ("vapour density", vapour_density, rho_vapour, "kg/m³"),
            ("heat of vaporisation", heat_of_vaporisation, h_fg, "J/kg"),
        )
    ),
    *(
        row(
            f"viscosity of water at {rho:g} kg/m³ and {T:g} K",
            partial(prop, WATER, p, T, "mu"),
            mu,
            "Pa s",
            1e-6,
            "8 printed digits; interpolant within 1e-6 above the critical pressure",
            "IAPWS R12-08 (Huber et al., J. Phys. Chem. Ref. Data 38 (2009) 101), Table 4",
        )
        for rho, T, p, mu in R12_VISCOSITY
    ),
    row(
        "conductivity of water at 998 kg/m³ and 298.15 K",
        partial(prop, WATER, R12_VISCOSITY[0][2], 298.15, "k"),
        607.712868e-3,
        "W/(m K)",
        1e-5,
        "the printed value leaves out the critical enhancement",
        "IAPWS R15-11 (Huber et al., J. Phys. Chem. Ref. Data 41 (2012) 033102), Table 4",
    ),
    *(
        row(
            f"conductivity of thin steam at {T:g} K",
            partial(prop, WATER, 100.0, T, "k"),
            k,
            "W/(m K)",
            1e-4,
            THIN,
            "IAPWS R15-11 (Huber et al., J. Phys. Chem. Ref. Data 41 (2012) 033102), Table 4",
        )
        for T, k in R15_CONDUCTIVITY
    ),
    *(
        row(f"air at {T:g} K and {p:g} Pa: {name}", partial(prop, AIR, p, T, name), value, unit, slack, reason, LEMMON)
        for T, p, mole, cp in AIR_STATES
        for name, value, unit, slack, reason in (
            ("rho", mole * 1e3 * AIR_MOLE, "kg/m³", 2e-4, "5 printed digits; molar mass 28.96546 g/mol"),
            ("cp", cp / AIR_MOLE, "J/(kg K)", 4e-4, "4 printed digits; molar mass 28.96546 g/mol"),
        )
    ),
    *(
        row(
            f"thin air at {T:g} K: {name}", partial(prop, AIR, 100.0, T, name), value, unit, 3e-4, THIN, LEMMON_JACOBSEN
        )
        for T, mu, k in AIR_TRANSPORT
        for name, value, unit in (("mu", mu, "Pa s"), ("k", k, "W/(m K)"))
    ),
    *(
        row(
            f"water at {T:g} K: {name}",
            partial(prop, WATER, 1e5, T, name),
            value,
            PROPERTY_UNIT[name],
            slack,
            OLD_TABLES,
            source,
        )
        for source, T, name, value, slack in TEXTBOOK_WATER
    ),
    *(
        row(
            f"air at 80 °C and 1 atm: {name}",
            partial(prop, AIR, 101325.0, 353.15, name),
            value,
            PROPERTY_UNIT[name],
            slack,
            "the textbook's conductivity is 2.4 % below the reference formulation",
            "Cengel, 3rd ed., Table A-15",
        )
        for name, value, slack in TEXTBOOK_AIR
    ),
    *(
        row(
            f"heat of vaporisation of water at {T:g} K",
            partial(latent_heat, T),
            value,
            "J/kg",
            1.2e-3,
            OLD_TABLES,
            source,
            subject="saturation",
        )
        for source, T, value in LATENT_HEAT
    ),
    *(
        row(
            f"typed table of engine oil at {T:g} K: Prandtl number",
            partial(prop, ENGINE_OIL, 1e5, T, "Pr"),
            value,
            "-",
            2e-3,
            "rounding of the table's other columns",
            "Cengel, 3rd ed., Table A-13",
        )
        for T, value in ((293.15, 10863.0), (353.15, 499.3))
    ),
    *(
        row(
            f"typed table of unused engine oil, between 350 and 360 K: {name}",
            partial(prop, UNUSED_OIL, 1e5, 353.0, name),
            value,
            PROPERTY_UNIT[name],
            slack,
            reason,
            "Incropera et al., 6th ed., Ex. 11.1 (properties at 353 K) and Table A.5",
            kind="from memory",
        )
        for name, value, slack, reason in (
            ("rho", 852.1, 1e-4, HALF_DIGIT),
            ("cp", 2131.0, 5e-4, HALF_DIGIT),
            ("mu", 3.25e-2, 0.02, "the example interpolates the viscosity on a straight line, here ln mu against 1/T"),
        )
    ),
    *(
        row(
            f"freezing point of {name} {100 * x:g} % in water",
            partial(freezing_temperature, name, x),
            value,
            "K",
            1.0,
            "solution tables differ by about a kelvin",
            source,
            kind="from memory",
            relative=False,
        )
        for name, x, value, source in FREEZING
    ),
    *(
        row(
            f"{fluid.name} at {T:g} K and {p:g} Pa: {name} over the second library's",
            partial(over_second_library, fluid, T, p, name),
            1.0,
            "-",
            tolerance,
            "the same published formulations, coded by others",
            "Python package iapws 1.5.5",
            kind="independent",
        )
        for fluid, states, tolerance in ((WATER, SECOND_LIBRARY_WATER, 1e-5), (AIR, SECOND_LIBRARY_AIR, 1e-4))
        for T, p in states
        for name in ("rho", "cp", "mu", "k")
    ),
)

# --- the program against itself ---------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class PropertyCheck:
    """A largest relative difference between two ways of this program to the same property."""

    fluid: str
    what: str
    found: float
    allowed: float

    @property
    def holds(self) -> bool:
        return self.found <= self.allowed


CHECKED = (
    (WATER, 4e5, 290.0, 350.0),
    (Pure("toluene"), 4e5, 290.0, 370.0),
    (Solution("ethylene glycol", 0.3), 4e5, 275.0, 350.0),
    (AIR, 4e5, 280.0, 400.0),
    (ENGINE_OIL, 4e5, 293.15, 353.15),
)
"""(fluid, pressure, lowest and highest temperature)"""
PLACES = np.linspace(0.0137, 0.9863, 97)
"""Shares of a span at which it is looked at; none of them a node of an interpolant."""


def property_checks() -> tuple[PropertyCheck, ...]:
    """Fluids as a rating uses them: interpolant, window over a rating's span, enthalpy against the integral of cp."""
    return tuple(_property_checks())


def _property_checks() -> Iterator[PropertyCheck]:
    for specification, p, low, high in CHECKED:
        fluid = fluid_at(specification, p, low)
        T = low + (high - low) * PLACES
        if isinstance(fluid, Interpolated):
            worst = max(piece.error for piece in fluid.pieces if piece.low < high and piece.high > low)
            yield PropertyCheck(
                fluid=fluid.name, what="interpolant against the property library", found=worst, allowed=1e-6
            )
        window = fluid.within(low, high)
        if window is not fluid:
            pairs = zip(fluid.values(T, *PROPERTIES), window.values(T, *PROPERTIES), strict=True)
            off = max(float(np.abs(b / a - 1).max()) for a, b in pairs)
            yield PropertyCheck(
                fluid=fluid.name, what="window of a rating against the interpolant", found=off, allowed=1e-6
            )
        heat, _ = quad(lambda T, fluid=fluid: float(fluid.values(T, "cp")[0]), low, high, epsrel=1e-10)
        rise = float(np.diff(fluid.enthalpy([low, high]))[0])
        yield PropertyCheck(
            fluid=fluid.name, what="enthalpy against the integral of cp", found=abs(rise / heat - 1), allowed=1e-8
        )
