"""Check values for annuli, plain and finned."""

from __future__ import annotations

from functools import partial

import numpy as np

from engine.correlations.annulus import (
    annulus_developed,
    annulus_equivalent_diameter,
    annulus_laminar,
    annulus_laminar_friction,
    annulus_turbulent,
    annulus_turbulent_friction,
    fin_efficiency,
    finned_annulus,
    reynolds_star,
    vdi_annulus_developed,
)
from engine.proofs import Proof

INCROPERA_8_2 = ((0.05, 17.46), (0.10, 11.56), (0.25, 7.37), (0.50, 5.74))
"""(a, developed Nu at the inner wall)."""

BETWEEN_ROWS = (
    (0.035, 21.99984),
    (0.07, 14.19712),
    (0.12, 10.46918),
    (1.0 / 3.0, 6.57575),
    (5.0 / 9.0, 5.56517),
    (2.0 / 3.0, 5.30276),
    (0.95, 4.90727),
)
"""(a, developed Nu) at ratios that the correlation's own table does not hold."""

LEVEQUE = ((0.1, 2.375158), (0.25, 2.081603), (0.5, 1.939771), (0.8, 1.873597), (0.95, 1.854188))
"""(a, mean Nu / Gz^(1/3)) close to the inlet."""

WHITE_6_3 = (
    (1e-5, 70.09),
    (1e-4, 71.78),
    (1e-3, 74.68),
    (0.01, 80.11),
    (0.05, 86.27),
    (0.1, 89.37),
    (0.2, 92.35),
    (0.4, 94.71),
    (0.6, 95.59),
    (0.8, 95.92),
)
"""(a, f Re), Darcy's f on the hydraulic diameter."""

EIGENVALUE = "lowest eigenvalue of the energy equation by Chebyshev collocation, outer wall adiabatic"


def leveque(a: float) -> float:
    """Mean Nu over Gz^(1/3) where only the thermal entry counts: Gz 1e6, Pr without bound."""
    Gz, Pr = 1e6, 1e15
    return float(annulus_laminar(1.0, Pr, Gz / Pr, a) / np.cbrt(Gz))


def kern_6_1(relation: str) -> float:
    """Film coefficient of toluene in the annulus, on its outer surface [W/m2K]."""
    D_i, D_o, k = 0.0420624, 0.052578, 0.147112475
    a, Pr = D_i / D_o, 1842.192 * 0.00041 / k
    Re = 58800.0 / (1.0 + 1.0 / a)
    Nu = annulus_equivalent_diameter(Re, Pr, a, 1.0) if relation == "kern" else annulus_turbulent(Re, Pr, 0.0, a)
    return float(Nu * k / (D_o - D_i))


ROWS: tuple[Proof, ...] = (
    *(
        Proof(
            subject="annulus_developed",
            what=f"developed Nu at D_i/D_o = {a:g}",
            ours=partial(annulus_developed, a),
            value=Nu,
            unit="-",
            tolerance=0.0012,
            reason="three to four digits",
            kind="printed",
            source="Incropera et al., Fundamentals of Heat and Mass Transfer, Table 8.2 (after Kays & Perkins 1972)",
        )
        for a, Nu in INCROPERA_8_2
    ),
    *(
        Proof(
            subject="annulus_developed",
            what=f"developed Nu at D_i/D_o = {a:.4g}",
            ours=partial(annulus_developed, a),
            value=Nu,
            unit="-",
            tolerance=3e-5,
            reason="the fit through the table",
            kind="derived",
            source=EIGENVALUE,
        )
        for a, Nu in BETWEEN_ROWS
    ),
    *(
        Proof(
            subject="vdi_annulus_developed",
            what=f"developed Nu at D_i/D_o = {a:g}",
            ours=partial(vdi_annulus_developed, a),
            value=Nu,
            unit="-",
            tolerance=0.03,
            reason="a printed fit, 2.9 % low at 0.1",
            kind="derived",
            source=EIGENVALUE,
        )
        for a, Nu in ((0.1, 11.5591), (0.25, 7.3707), (0.5, 5.7381), (0.8, 5.0820))
    ),
    *(
        Proof(
            subject="annulus_laminar",
            what=f"mean Nu / Gz^(1/3) near the inlet at D_i/D_o = {a:g}",
            ours=partial(leveque, a),
            value=limit,
            unit="-",
            tolerance=0.02,
            reason="a printed fit to the exact limit",
            kind="derived",
            source="Lévêque's limit with the exact velocity gradient at the inner wall: "
            "Nu = 1.5 (u' d_h/u)^(1/3)/(9^(1/3) Γ(4/3)) Gz^(1/3)",
        )
        for a, limit in LEVEQUE
    ),
    Proof(
        subject="annulus_laminar",
        what="oil cooler, D_i/D_o = 0.5556, without its entrance: film coefficient",
        ours=lambda: annulus_laminar(56.0, 501.9, 0.0, 0.025 / 0.045) * 0.138 / 0.020,
        value=38.8,
        unit="W/m2K",
        tolerance=0.015,
        reason="the book interpolates Nu 5.63 in its table where the exact value is 5.565",
        kind="from memory",
        source="Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Example 11.1",
    ),
    Proof(
        subject="annulus_turbulent",
        what="Nu at Re 3e4, Pr 6, D_i/D_o 0.6, d_h/L 0.004",
        ours=partial(annulus_turbulent, 3.0e4, 6.0, 0.004, 0.6),
        value=176.27,
        unit="-",
        tolerance=1e-5,
        reason="the printed formula evaluated apart from this code",
        kind="derived",
        source="Gnielinski, V., Heat Transfer Eng. 30 (2009) 431-436",
    ),
    Proof(
        subject="annulus_turbulent",
        what="toluene in an annulus: film coefficient",
        ours=partial(kern_6_1, "gnielinski"),
        value=1834.1,
        unit="W/m2K",
        tolerance=0.10,
        reason="another method: equivalent diameter, a factor read off a chart; the slack is one standard deviation",
        kind="from memory",
        source="Kern, D. Q., Process Heat Transfer, 1950, Example 6.1",
    ),
    Proof(
        subject="annulus_equivalent_diameter",
        what="toluene in an annulus: film coefficient",
        ours=partial(kern_6_1, "kern"),
        value=1834.1,
        unit="W/m2K",
        tolerance=0.05,
        reason="the book reads 167 off its chart where the closed form gives 177, and rounds the diameters",
        kind="from memory",
        source="Kern, D. Q., Process Heat Transfer, 1950, Example 6.1",
    ),
    *(
        Proof(
            subject="annulus_laminar_friction",
            what=f"f Re at D_i/D_o = {a:g}",
            ours=partial(annulus_laminar_friction, 1.0, a),
            value=f_Re,
            unit="-",
            tolerance=1e-4,
            reason="four digits",
            kind="printed",
            source="White, F. M., Fluid Mechanics, 4th ed., Table 6.3",
        )
        for a, f_Re in WHITE_6_3
    ),
    Proof(
        subject="reynolds_star",
        what="Re*/Re at D_i/D_o = 0.6",
        ours=lambda: float(reynolds_star(1.0, 0.6)),
        value=64.0 / 95.59,
        unit="-",
        tolerance=1e-4,
        reason="Re* is defined by the exact laminar friction",
        kind="printed",
        source="White, F. M., Fluid Mechanics, 4th ed., Table 6.3",
    ),
    Proof(
        subject="annulus_turbulent_friction",
        what="smooth friction factor at Re 3e4, D_i/D_o 0.6",
        ours=partial(annulus_turbulent_friction, 3.0e4, 0.6, 0.0),
        value=0.025639,
        unit="-",
        tolerance=0.01,
        reason="Konakov's closed form for a smooth wall in place of Churchill's",
        kind="derived",
        source="VDI Heat Atlas, 2nd ed. 2010, section G2, evaluated apart from this code",
    ),
    *(
        Proof(
            subject="fin_efficiency",
            what=f"efficiency at m H = {mH:g}",
            # k t = 2 and H = 1 leave m H = sqrt(h).
            ours=partial(fin_efficiency, mH**2, 2.0, 1.0, 1.0),
            value=tanh / mH,
            unit="-",
            tolerance=1e-7,
            reason="hyperbolic tangent from a mathematical table",
            kind="derived",
            source="Abramowitz, M., Stegun, I. A., Handbook of Mathematical Functions, Table 4.15",
        )
        for mH, tanh in ((0.5, 0.46211716), (1.0, 0.76159416), (2.0, 0.96402758))
    ),
    Proof(
        subject="finned_annulus",
        what="Nu at Re 4000, Pr 7, d_h/L 0.005",
        ours=partial(finned_annulus, 4000.0, 7.0, 0.005),
        value=25.4186,
        unit="-",
        tolerance=5e-4,
        reason="shows only that the tube relations are applied; the source rounds a friction factor to 0.0308",
        kind="derived",
        source="VDI Heat Atlas, 2nd ed. 2010, section G1: formulas evaluated apart from this code",
    ),
)
