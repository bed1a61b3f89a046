"""Check values for film condensation."""

from __future__ import annotations

from functools import partial

import numpy as np

from engine.correlations.condensing import (
    boyko_kruzhilin,
    chato,
    churchill_chu_horizontal,
    churchill_chu_vertical,
    kern_rows,
    kutateladze_wavy,
    labuntsov_turbulent,
    latent_heat,
    nusselt_horizontal,
    nusselt_rows,
    nusselt_vertical,
    shah_1979,
    vertical_film,
)
from engine.proofs import Proof

CENGEL = "Y. A. Cengel, Heat Transfer, 2nd ed."
TURBULENT_RE = (0.0690 * 5000.0 * 1.75**0.5 - 151.0 * 1.75**0.5 + 253.0) ** (4 / 3)
"""Film Re at load 5000 and Pr 1.75 by the relation solved for Re, in its printed constants."""
NUSSELT_INTEGRAL = "Nusselt's film integrated around the tube"


def group(relation: str) -> float:
    """The constant of a Nusselt type relation: h where every other quantity makes its group 1."""
    g = 9.80665
    relations = {"vertical": nusselt_vertical, "horizontal": nusselt_horizontal, "chato": chato}
    return float(relations[relation](1.0, 1.0, 0.0, g, 1.0, 1.0, 1.0))


def atmospheric_steam(quantity: str) -> float:
    """A vertical tube of 80 mm and 1 m at 50 °C, steam at 100 °C."""
    h, Re = vertical_film(0.668, 975.0, 0.596, 3.75e-4, 4193.0, latent_heat(2.257e6, 4193.0, 50.0), 50.0, 1.0)
    return float({"h": h, "Re": Re}[quantity])


def steam_on_a_plate(quantity: str) -> float:
    """A vertical plate of 2 m at 80 °C, steam at 100 °C; vapour density neglected by the source."""
    h, Re = vertical_film(0.675, 965.3, 0.0, 3.15e-4, 4206.0, latent_heat(2.257e6, 4206.0, 20.0), 20.0, 2.0)
    return float({"h": h, "Re": Re, "h at Re": kutateladze_wavy(np.asarray(1287.24), 0.675, 3.26e-7)}[quantity])


def thin_film() -> float:
    """Heat flow [W] of a plate of 0.3 x 0.3 m at 98 °C in steam of 100 °C."""
    return float(nusselt_vertical(0.68, 960.0, 0.0, 2.82e-4, 2.255e6, 2.0, 0.3)) * 0.3 * 0.3 * 2.0


def horizontal_steam_tube() -> float:
    """h of a 30 mm tube at 30 °C, steam at 40 °C."""
    h_fg = latent_heat(2.407e6, 4178.0, 10.0)
    return float(nusselt_horizontal(0.623, 994.0, 0.0, 7.2e-4, h_fg, 10.0, 0.03))


def turbulent_film() -> float:
    """Film Re at k L dT (g/nu²)^(1/3)/(mu h_fg) = 5000 and Pr 1.75, by vertical_film."""
    rho, mu, cp, h_fg, L = 950.0, 2.8e-4, 4200.0, 2.2e6, 3.0
    k = cp * mu / 1.75
    dT = 5000.0 * mu * h_fg / (k * L * (9.80665 * (rho / mu) ** 2) ** (1 / 3))
    return float(vertical_film(k, rho, 0.0, mu, cp, h_fg, dT, L)[1])


def turbulent_conductance() -> float:
    """h (nu²/g)^(1/3)/k at that film Re."""
    return float(labuntsov_turbulent(np.asarray(TURBULENT_RE), 1.75, 1.0, 9.80665**0.5))


def steam_in_a_tube() -> float:
    """Mean of complete condensation at 3 bar in a 21 mm tube, 0.015 kg/s."""
    Re_L = np.asarray(4 * 0.015 / (np.pi * 0.021 * 2.1e-4))
    return float(np.mean([boyko_kruzhilin(Re_L, 1.27, 0.688, 0.021, 931.0, 1.65, x) for x in (0.0, 1.0)]))


def shah_steam() -> float:
    """Local h at x 0.4, 0.5 kg/s in a 20 mm tube at 10 bar."""
    Re_L = np.asarray(4 * 0.5 / (np.pi * 0.020 * 1e-4))
    return float(shah_1979(Re_L, 4300.0 * 1e-4 / 0.6, 0.6, 0.020, 1e6 / 22.064e6, 0.4))


ROWS: tuple[Proof, ...] = (
    *(
        Proof(
            subject=subject,
            what=what,
            ours=partial(group, relation),
            value=value,
            unit="-",
            tolerance=tolerance,
            reason=reason,
            kind="derived",
            source=source,
        )
        for subject, relation, what, value, tolerance, reason, source in (
            (
                "nusselt_vertical",
                "vertical",
                "constant",
                0.942809,
                0.0005,
                "three digits",
                "Nusselt's film, (4/3) 4^(-1/4)",
            ),
            ("nusselt_horizontal", "horizontal", "constant", 0.728019, 0.0005, "three digits", NUSSELT_INTEGRAL),
            (
                "chato",
                "chato",
                "constant, bottom 120 degrees flooded",
                0.556701,
                0.005,
                "the source rounds the flooded angle",
                NUSSELT_INTEGRAL,
            ),
        )
    ),
    Proof(
        subject="nusselt_vertical",
        what="plate of 0.3 m, 2 K below 100 °C steam, heat flow",
        ours=thin_film,
        value=2368.0,
        unit="W",
        tolerance=0.001,
        reason="four digits",
        kind="derived",
        source="J. P. Holman, Heat Transfer, Ex. 9-1, worked again in a second code",
    ),
    *(
        Proof(
            subject=subject,
            what=f"plate of 2 m, 20 K below 100 °C steam, {quantity}",
            ours=partial(steam_on_a_plate, quantity),
            value=value,
            unit=unit,
            tolerance=0.005,
            reason="the source closes the relation with rounded constants",
            kind="derived",
            source=f"{CENGEL}, Ex. 10-4, worked again in a second code",
        )
        for subject, quantity, value, unit in (
            ("vertical_film", "Re", 1287.24, "-"),
            ("vertical_film", "h", 5850.18, "W/m²K"),
            ("kutateladze_wavy", "h at Re", 5850.18, "W/m²K"),
        )
    ),
    *(
        Proof(
            subject="vertical_film",
            what=f"tube of 1 m, 50 K below 100 °C steam, {quantity}",
            ours=partial(atmospheric_steam, quantity),
            value=value,
            unit=unit,
            tolerance=0.005,
            reason="the source closes the relation with rounded constants",
            kind="derived",
            source="Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Ex. 10.3, in a second code",
        )
        for quantity, value, unit in (("Re", 1178.15, "-"), ("h", 5300.69, "W/m²K"))
    ),
    Proof(
        subject="vertical_film",
        what="turbulent film at load 5000, Pr 1.75, Re",
        ours=turbulent_film,
        value=TURBULENT_RE,
        unit="-",
        tolerance=0.005,
        reason="three digits in the constants",
        kind="from memory",
        source=f"{CENGEL}, Eq. 10-27, solved for Re",
    ),
    Proof(
        subject="labuntsov_turbulent",
        what="load 5000, Pr 1.75, h (nu²/g)^(1/3)/k",
        ours=turbulent_conductance,
        value=TURBULENT_RE / (4 * 5000.0),
        unit="-",
        tolerance=0.005,
        reason="three digits in the constants",
        kind="from memory",
        source=f"{CENGEL}, Eq. 10-27, solved for Re",
    ),
    Proof(
        subject="nusselt_horizontal",
        what="30 mm tube, 10 K below 40 °C steam",
        ours=horizontal_steam_tube,
        value=9294.66,
        unit="W/m²K",
        tolerance=0.002,
        reason="0.729 in the source, 0.728 here",
        kind="derived",
        source=f"{CENGEL}, Ex. 10-6, worked again in a second code",
    ),
    Proof(
        subject="nusselt_rows",
        what="16 tubes in a row",
        ours=partial(lambda N: float(nusselt_rows(N)), 16.0),
        value=0.5,
        unit="-",
        tolerance=1e-12,
        reason="exact",
        kind="derived",
        source="Nusselt's film over a height of 16 diameters",
    ),
    Proof(
        subject="kern_rows",
        what="64 tubes in a row",
        ours=partial(lambda N: float(kern_rows(N)), 64.0),
        value=0.5,
        unit="-",
        tolerance=1e-12,
        reason="exact",
        kind="from memory",
        source="Kern, D. Q., AIChE J. 4 (1958) 157-160: exponent -1/6",
    ),
    Proof(
        subject="boyko_kruzhilin",
        what="steam of 3 bar condensing completely in a 21 mm tube",
        ours=steam_in_a_tube,
        value=7723.0,
        unit="W/m²K",
        tolerance=0.012,
        reason="the source rounds the liquid velocity to 0.047 m/s",
        kind="from memory",
        source="R. K. Sinnott, Chemical Engineering Design (vol. 6), Ex. 12.2",
    ),
    Proof(
        subject="shah_1979",
        what="steam of 10 bar at x 0.4 in a 20 mm tube",
        ours=shah_steam,
        value=101825.88615581501,
        unit="W/m²K",
        tolerance=1e-9,
        reason="the same equation",
        kind="independent",
        source="library ht 1.2, condensation.Shah",
    ),
    *(
        Proof(
            subject=relation.name,
            what="Ra 1e7, Pr 1.75",
            ours=partial(lambda relation: float(relation(np.asarray(1e7), 1.75)), relation),
            value=value,
            unit="-",
            tolerance=1e-9,
            reason="the same equation",
            kind="independent",
            source=f"library ht 1.2, conv_free_immersed.{function}",
        )
        for relation, function, value in (
            (churchill_chu_horizontal, "Nu_horizontal_cylinder_Churchill_Chu", 31.48898880528851),
            (churchill_chu_vertical, "Nu_vertical_plate_Churchill", 34.486783982475195),
        )
    ),
)
