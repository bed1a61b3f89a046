"""Check values for heat transfer inside tubes."""

from __future__ import annotations

from functools import partial

import numpy as np

from engine.correlations import Correlation
from engine.correlations.inside_tubes import (
    Wall,
    dittus_boelter,
    gnielinski_1976,
    gnielinski_laminar,
    gnielinski_laminar_developed,
    gnielinski_turbulent,
    hausen_laminar,
    konakov,
    nusselt_tube,
    petukhov,
    shah_london_laminar,
    sieder_tate_laminar,
    sieder_tate_turbulent,
    transition,
    transition_2013,
    wall_factor_gas_turbulent,
    wall_factor_liquid_laminar,
    wall_factor_liquid_turbulent,
    wall_factor_petukhov,
)
from engine.proofs import Proof

GRAETZ = (
    (0.0002, 26.6835),
    (0.0005, 19.5005),
    (0.001, 15.3842),
    (0.002, 12.1515),
    (0.005, 8.9432),
    (0.01, 7.1552),
    (0.02, 5.8146),
    (0.05, 4.6406),
    (0.1, 4.1556),
    (0.2, 3.9063),
    (0.5, 3.7566),
)
"""(x* = L/(d Re Pr), mean Nu), wall at constant temperature, velocity developed."""
GRAETZ_SOURCE = "Graetz' problem: eigenvalue series, and Chebyshev collocation agreeing within 2e-4"

KAYS = ((0.004, 12.09), (0.01, 8.92), (0.04, 5.81), (0.08, 4.86), (0.1, 4.64), (0.2, 4.15))
"""(x+ = 2 L/(d Re Pr), mean Nu)."""

TRANSITION = (
    # Re, Pr, d/L, Nu joined at Re 1e4, Nu joined at Re 4000
    (2300.0, 0.7, 0.01, 4.7983, 4.7983),
    (2800.0, 0.7, 0.01, 6.6845, 8.7458),
    (3150.0, 7.0, 0.005, 16.3255, 24.9707),
    (4000.0, 7.0, 0.005, 25.4186, 42.7091),
    (3000.0, 50.0, 0.002, 25.3154, 39.9899),
    (3500.0, 500.0, 0.002, 79.4990, 133.3489),
)

HT = "ht 1.2.0, Python library, "
COMPANION = "; answer as computed by a published companion program, the page itself not seen"


def graetz(relation: Correlation, x: float) -> float:
    return float(relation(1000.0, 1.0, 1.0 / (1000.0 * x)))


def hydrodynamic_entry(Pr: float) -> float:
    """What developing velocity alone adds, as the cube root of the difference of cubes, at Re d/L = 100."""
    both, thermal = (relation(1000.0, Pr, 0.1) for relation in (gnielinski_laminar, gnielinski_laminar_developed))
    return float(np.cbrt(both**3 - thermal**3))


def mean_nusselt(Re: float, Pr: float, d_over_L: float, joined_by: Correlation = transition) -> float:
    return float(nusselt_tube(Re, Pr, d_over_L, 0.0, 1.0, joined_by=joined_by)[0])


def local_nusselt(Re: float, Pr: float, x_over_d: float, mu_ratio: float) -> float:
    wall = Wall(mu=mu_ratio, Pr=mu_ratio)
    return float(nusselt_tube(Re, Pr, 1.0, x_over_d - 0.1, x_over_d + 0.1, wall=wall)[0])


def kern_10_1() -> float:
    """Crude oil at 95 °F heated by steam at 250 °F: its temperature after 12 ft of 0.0725 ft tube [°F]."""
    Re, Pr, d_over_L = 564.0, 72.7, 0.0725 / 12.0
    NTU = 4.0 * float(sieder_tate_laminar(Re, Pr, d_over_L, 1.0 / 4.0)) / (Re * Pr * d_over_L)
    # Sieder and Tate's film goes with the arithmetic mean of the end temperature differences.
    return (95.0 * (1.0 - NTU / 2.0) + NTU * 250.0) / (1.0 + NTU / 2.0)


ROWS: tuple[Proof, ...] = (
    *(
        Proof(
            subject="gnielinski_laminar_developed",
            what=f"mean Nu at x* = {x:g}",
            ours=partial(graetz, gnielinski_laminar_developed, x),
            value=Nu,
            unit="-",
            tolerance=0.01,
            reason="a closed form, within 1 % of the exact series",
            kind="derived",
            source=GRAETZ_SOURCE,
        )
        for x, Nu in GRAETZ
    ),
    *(
        Proof(
            subject="gnielinski_laminar_developed",
            what=f"mean Nu at x+ = {x:g}",
            ours=partial(graetz, gnielinski_laminar_developed, x / 2.0),
            value=Nu,
            unit="-",
            tolerance=0.015,
            reason="a closed form within 1 %, and hand-summed series up to 0.5 % off at small x+",
            kind="from memory",
            source="Kays, W. M., Convective Heat and Mass Transfer, 1966, table of the thermal entry",
        )
        for x, Nu in KAYS
    ),
    *(
        Proof(
            subject="shah_london_laminar",
            what=f"mean Nu at x* = {x:g}",
            ours=partial(graetz, shah_london_laminar, x),
            value=Nu,
            unit="-",
            tolerance=0.025,
            reason="a closed form in three pieces, worst beside their seam at x* = 0.005",
            kind="derived",
            source=GRAETZ_SOURCE,
        )
        for x, Nu in GRAETZ
    ),
    *(
        Proof(
            subject="hausen_laminar",
            what=f"mean Nu at x* = {x:g}",
            ours=partial(graetz, hausen_laminar, x),
            value=Nu,
            unit="-",
            tolerance=0.085,
            reason="the relation is known to run 3 to 8 % above the exact series at Gz 100 to 500",
            kind="derived",
            source=GRAETZ_SOURCE,
        )
        for x, Nu in GRAETZ
        if x >= 0.002
    ),
    *(
        Proof(
            subject="hausen_laminar",
            what=f"mean Nu at Gz = {Gz:g}",
            ours=partial(graetz, hausen_laminar, 1.0 / Gz),
            value=Nu,
            unit="-",
            tolerance=1e-6,
            reason="the same formula coded twice",
            kind="independent",
            source=HT + "laminar_entry_thermal_Hausen",
        )
        for Gz, Nu in ((10.0, 4.2233976), (100.0, 7.2479760))
    ),
    *(
        Proof(
            subject="gnielinski_laminar",
            what=f"share of the developing velocity, Pr = {Pr:g}",
            ours=partial(hydrodynamic_entry, Pr),
            value=0.664 * Pr ** (1.0 / 3.0) * 10.0,
            unit="-",
            tolerance=0.01,
            reason="near the inlet the tube wall is a flat plate; the printed term fits its Pr function within 1 %",
            kind="derived",
            source="Pohlhausen, E., Z. angew. Math. Mech. 1 (1921) 115: mean Nu = 0.664 Re^(1/2) Pr^(1/3) on a plate",
        )
        for Pr in (0.7, 1.0, 7.0, 100.0)
    ),
    *(
        Proof(
            subject="gnielinski_laminar",
            what=f"mean Nu at Re {Re:g}, Pr {Pr:g}, d/L {d_over_L:g}",
            ours=partial(gnielinski_laminar, Re, Pr, d_over_L),
            value=Nu,
            unit="-",
            tolerance=0.05,
            reason="another closed form for velocity and temperature developing together",
            kind="independent",
            source=HT + "laminar_entry_Baehr_Stephan",
        )
        for Re, Pr, d_over_L, Nu in (
            (500.0, 0.7, 0.02, 4.288852),
            (1000.0, 5.0, 0.01, 6.306367),
            (1500.0, 1.0, 0.05, 7.943312),
            (2000.0, 50.0, 0.005, 13.057134),
        )
    ),
    Proof(
        subject="gnielinski_laminar",
        what="oil pipeline under a lake: mean Nu over 200 m",
        ours=partial(gnielinski_laminar, 636.0, 10863.0, 0.3 / 200.0),
        value=37.3,
        unit="-",
        tolerance=0.06,
        reason="the example takes the form 3.66 + 0.065 Gz/(1 + 0.04 Gz^(2/3)), which at Gz 1e4 lies 6 % above "
        "Lévêque's exact limit 1.615 Gz^(1/3)",
        kind="from memory",
        source="Çengel, Y. A., Heat Transfer, 2nd ed., Example 8-3",
    ),
    Proof(
        subject="sieder_tate_laminar",
        what="crude oil in tubes heated by steam: temperature after the first pass",
        ours=kern_10_1,
        value=126.9,
        unit="°F",
        tolerance=0.5,
        relative=False,
        reason="printed inputs have three digits",
        kind="printed",
        source="Kern, D. Q., Process Heat Transfer, 1950, Example 10.1",
    ),
    Proof(
        subject="sieder_tate_laminar",
        what="mean Nu at Re 1000, Pr 50, d/L 0.01, mu/mu_w 2",
        ours=partial(sieder_tate_laminar, 1000.0, 50.0, 0.01, 0.5),
        value=16.267238,
        unit="-",
        tolerance=1e-6,
        reason="the same formula coded twice",
        kind="independent",
        source=HT + "laminar_entry_Seider_Tate",
    ),
    *(
        Proof(
            subject="konakov",
            what=f"smooth friction factor at Re {Re:g}",
            ours=partial(konakov, Re),
            value=f,
            unit="-",
            tolerance=0.015,
            reason="a closed form beside the converged root",
            kind="derived",
            source="Colebrook's equation for a smooth tube, solved by fixed point and by another library",
        )
        for Re, f in ((1.0e4, 0.03088295), (1.0e5, 0.01798977), (1.0e6, 0.01164504))
    ),
    *(
        Proof(
            subject="gnielinski_turbulent",
            what=f"Nu of a long tube at Re {Re:g}, Pr {Pr:g}",
            ours=partial(gnielinski_turbulent, Re, Pr, 0.0),
            value=Nu,
            unit="-",
            tolerance=0.08,
            reason="the relation of 1976 carries (Re - 1000)/Re and Petukhov's friction factor",
            kind="independent",
            source=HT + "turbulent_Gnielinski",
        )
        for Re, Pr, Nu in (
            (5.0e4, 5.0, 285.1733),
            (1.0e5, 0.7, 178.623),
            (1.0e5, 50.0, 1298.7246),
            (1.0e6, 5.0, 3758.2875),
        )
    ),
    Proof(
        subject="gnielinski_turbulent",
        what="Nu at Re 4000, Pr 7, d/L 0.005",
        ours=partial(gnielinski_turbulent, 4000.0, 7.0, 0.005),
        value=42.7091,
        unit="-",
        tolerance=1e-5,
        reason="the printed formula evaluated apart from this code",
        kind="derived",
        source="Gnielinski, V., Int. J. Heat Mass Transfer 63 (2013) 134-140",
    ),
    Proof(
        subject="gnielinski_turbulent",
        what="water in the inner tube of an oil cooler, Re 14 050, Pr 4.85",
        ours=partial(gnielinski_turbulent, 14050.0, 4.85, 0.0),
        value=90.0,
        unit="-",
        tolerance=0.125,
        reason="the example takes Dittus and Boelter's relation, good to ±25 % (two standard deviations)",
        kind="from memory",
        source="Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Example 11.1",
    ),
    *(
        Proof(
            subject="transition",
            what=f"Nu at Re {Re:g}, Pr {Pr:g}, d/L {d_over_L:g}",
            ours=partial(mean_nusselt, Re, Pr, d_over_L),
            value=Nu,
            unit="-",
            tolerance=5e-4,
            reason="the source rounds the friction factor at Re 1e4 to 0.0308",
            kind="derived",
            source="VDI Heat Atlas, 2nd ed. 2010, section G1: formulas evaluated apart from this code",
        )
        for Re, Pr, d_over_L, Nu, _ in TRANSITION
    ),
    *(
        Proof(
            subject="transition_2013",
            what=f"Nu at Re {Re:g}, Pr {Pr:g}, d/L {d_over_L:g}",
            ours=partial(mean_nusselt, Re, Pr, d_over_L, transition_2013),
            value=Nu,
            unit="-",
            tolerance=1e-4,
            reason="four decimals",
            kind="derived",
            source="Gnielinski, V., Int. J. Heat Mass Transfer 63 (2013) 134-140: evaluated apart from this code",
        )
        for Re, Pr, d_over_L, _, Nu in TRANSITION
    ),
    *(
        Proof(
            subject="transition",
            what=f"glycol and water, Re 6714, Pr 29.2, 90 diameters after a {inlet} inlet",
            ours=partial(local_nusselt, 6714.0, 29.2, 90.0, 1.0 / 1.77),
            value=Nu,
            unit="-",
            tolerance=0.15,
            reason="transitional flow depends on the inlet; the example's relation is fitted inlet by inlet; "
            "after a bell-mouth the flow is still laminar (21.3), which no relation without the inlet can give",
            kind="independent",
            source="Çengel, Y. A., Ghajar, A. J., Heat and Mass Transfer, Example 8-8 (Ghajar & Tam 1994)" + COMPANION,
        )
        for inlet, Nu in (("re-entrant", 88.2), ("square-edged", 85.3))
    ),
    *(
        Proof(
            subject="gnielinski_1976",
            what=f"Nu at Re {Re:g}, Pr {Pr:g}",
            ours=partial(gnielinski_1976, Re, Pr),
            value=Nu,
            unit="-",
            tolerance=1e-5,
            reason="the same formula coded twice",
            kind="independent",
            source=HT + "turbulent_Gnielinski",
        )
        for Re, Pr, Nu in (
            (1.0e4, 0.7, 29.8174),
            (1.0e4, 5.0, 69.9125),
            (5.0e4, 5.0, 285.1733),
            (1.0e5, 0.7, 178.623),
            (1.0e5, 50.0, 1298.7246),
            (1.0e6, 5.0, 3758.2875),
        )
    ),
    Proof(
        subject="petukhov",
        what="Nu at Re 1e5, Pr 5",
        ours=partial(petukhov, 1.0e5, 5.0),
        value=505.2929,
        unit="-",
        tolerance=0.005,
        reason="the library's constant varies with the friction factor and Pr; 1.07 is its mean",
        kind="independent",
        source=HT + "turbulent_Petukhov_Kirillov_Popov",
    ),
    *(
        Proof(
            subject="dittus_boelter",
            what=f"Nu at Re 5e4, Pr 5, {'heated' if heated else 'cooled'}",
            ours=partial(dittus_boelter, 5.0e4, 5.0, heated),
            value=Nu,
            unit="-",
            tolerance=1e-6,
            reason="the same formula coded twice",
            kind="independent",
            source=HT + "turbulent_Dittus_Boelter",
        )
        for heated, Nu in ((True, 251.4733), (False, 214.0892))
    ),
    Proof(
        subject="dittus_boelter",
        what="air cooled in a duct, Re 20 404, Pr 0.7",
        ours=partial(dittus_boelter, 20404.0, 0.7, False),
        value=57.9,
        unit="-",
        tolerance=0.002,
        reason="three digits",
        kind="from memory",
        source="Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Example 8.6",
    ),
    Proof(
        subject="dittus_boelter",
        what="air at 2 atm and 200 °C, Re 14 756, Pr 0.681: film coefficient",
        ours=lambda: dittus_boelter(14756.0, 0.681, True) * 0.0386 / 0.0254,
        value=64.85,
        unit="W/m2K",
        tolerance=0.001,
        reason="four digits",
        kind="independent",
        source="Holman, J. P., Heat Transfer, 10th ed., Example 6-1" + COMPANION,
    ),
    Proof(
        subject="dittus_boelter",
        what="cooling water in the inner tube of an oil cooler, Re 53 490, Pr 3.91",
        ours=partial(dittus_boelter, 53490.0, 3.91, True),
        value=240.6,
        unit="-",
        tolerance=0.002,
        reason="four digits",
        kind="from memory",
        source="Çengel, Y. A., Heat Transfer, 2nd ed., Example 11-1",
    ),
    Proof(
        subject="sieder_tate_turbulent",
        what="Nu at Re 5e4, Pr 5, mu/mu_w 2",
        ours=partial(sieder_tate_turbulent, 5.0e4, 5.0, 0.5),
        value=292.1958,
        unit="-",
        tolerance=1e-6,
        reason="the same formula coded twice",
        kind="independent",
        source=HT + "turbulent_Sieder_Tate",
    ),
    Proof(
        subject="sieder_tate_turbulent",
        what="water heated by steam in a 1-inch pipe, Re 147 300: film coefficient",
        ours=lambda: sieder_tate_turbulent(147300.0, 2.72, 0.356 / 0.432) * 0.663 / 0.0266,
        value=13324.0,
        unit="W/m2K",
        tolerance=0.02,
        reason="the example rounds each factor of Nu",
        kind="from memory",
        source="Geankoplis, C. J., Transport Processes and Unit Operations, 3rd ed., Example 4.5-2",
    ),
    *(
        Proof(
            subject=subject,
            what=what,
            ours=ours,
            value=value,
            unit="-",
            tolerance=1e-5,
            reason="a power worked out apart from this code",
            kind="derived",
            source=source,
        )
        for subject, what, ours, value, source in (
            (
                "wall_factor_liquid_laminar",
                "factor at mu/mu_w = 1.7355",
                partial(wall_factor_liquid_laminar, 3.10 / 5.38),
                1.080237,
                "Sieder & Tate 1936, exponent 0.14",
            ),
            (
                "wall_factor_liquid_laminar",
                "factor at mu/mu_w = 0.5",
                partial(wall_factor_liquid_laminar, 2.0),
                0.907519,
                "Sieder & Tate 1936, exponent 0.14",
            ),
            (
                "wall_factor_liquid_turbulent",
                "factor at Pr/Pr_w = 1.7355",
                partial(wall_factor_liquid_turbulent, 3.10 / 5.38),
                1.062518,
                "VDI Heat Atlas 2010, section G1, exponent 0.11",
            ),
            (
                "wall_factor_petukhov",
                "factor at mu/mu_w = 1.7355, heated",
                partial(wall_factor_petukhov, 3.10 / 5.38),
                1.062518,
                "Petukhov 1970, exponent 0.11",
            ),
            (
                "wall_factor_petukhov",
                "factor at mu/mu_w = 0.5, cooled",
                partial(wall_factor_petukhov, 2.0),
                0.840896,
                "Petukhov 1970, exponent 0.25",
            ),
            (
                "wall_factor_gas_turbulent",
                "factor at T_w/T = 2, heated",
                partial(wall_factor_gas_turbulent, 2.0),
                0.732043,
                "VDI Heat Atlas 2010, section G1, exponent 0.45",
            ),
            (
                "wall_factor_gas_turbulent",
                "factor at T_w/T = 0.7, cooled",
                partial(wall_factor_gas_turbulent, 0.7),
                1.0,
                "VDI Heat Atlas 2010, section G1, exponent 0",
            ),
        )
    ),
)
