"""Check values for friction in tubes."""

from __future__ import annotations

from functools import partial

from engine.correlations.losses import (
    churchill,
    colebrook,
    friction_drop,
    haaland,
    laminar_friction,
    petukhov_friction,
    velocity_head,
    wall_factor_friction,
    wall_factor_friction_petukhov,
)
from engine.proofs import Proof

COLEBROOK = (
    # Re, roughness ratio, Darcy friction factor
    (4.0e3, 0.0, 0.03990701),
    (1.0e4, 0.0, 0.03088295),
    (1.0e5, 0.0, 0.01798977),
    (1.0e6, 0.0, 0.01164504),
    (1.0e5, 1e-4, 0.01851387),
    (1.0e5, 1e-3, 0.02217454),
    (1.0e6, 1e-4, 0.01344144),
    (1.0e6, 1e-3, 0.01994347),
    (1.0e5, 1e-2, 0.03850354),
    (1.0e7, 1e-5, 0.00899571),
)
CHURCHILL_BY_FLUIDS = (
    (5.0e2, 0.0, 0.128),
    (2.0e3, 0.0, 0.032043317),
    (3.0e3, 1e-3, 0.043691541),
    (5.0e4, 1e-4, 0.021179655),
    (1.0e6, 1e-2, 0.0379915),
)
ROOT = "Colebrook's equation, converged fixed point; Clamond's solver of another library agrees"
FLUIDS = "fluids 1.3.1, Python library, "
COMPANION = "; answer as computed by a published companion program, the page itself not seen"


def drop(f: float, L: float, d: float, rho: float, v: float) -> float:
    return float(friction_drop(f, L, d, velocity_head(rho * v, rho)))


def sukhatme_4_1() -> float:
    """Water at 10 °C, 0.2 m/s through 3 m of 10 mm tube [Pa]."""
    return drop(churchill(0.2 * 0.01 / 1.306e-6, 0.0), 3.0, 0.01, 999.7, 0.2)


def geankoplis_2_10_2() -> float:
    """Capillary, 0.275 m/s through 0.317 m of 2.22 mm bore [Pa]."""
    return drop(laminar_friction(0.00222 * 0.275 * 875.0 / 0.00113), 0.317, 0.00222, 875.0, 0.275)


ROWS: tuple[Proof, ...] = (
    *(
        Proof(
            subject=subject,
            what=f"friction factor at Re {Re:g}, roughness ratio {ratio:g}",
            ours=partial(relation, Re, ratio),
            value=f,
            unit="-",
            tolerance=tolerance,
            reason=reason,
            kind="derived",
            source=ROOT,
        )
        for subject, relation, tolerance, reason in (
            ("churchill", churchill, 0.02, "a closed form within 2 % of the root"),
            ("colebrook", colebrook, 1e-6, "seven digits"),
            ("haaland", haaland, 0.015, "a closed form, published as within 2 % of the root"),
        )
        for Re, ratio, f in COLEBROOK
    ),
    *(
        Proof(
            subject="churchill",
            what=f"friction factor at Re {Re:g}, roughness ratio {ratio:g}",
            ours=partial(churchill, Re, ratio),
            value=f,
            unit="-",
            tolerance=1e-6,
            reason="the same formula coded twice",
            kind="independent",
            source=FLUIDS + "Churchill_1977",
        )
        for Re, ratio, f in CHURCHILL_BY_FLUIDS
    ),
    Proof(
        subject="churchill",
        what="asphalted cast-iron pipe, Re 270 000, roughness ratio 0.0008",
        ours=partial(churchill, 2.7e5, 8e-4),
        value=0.0200,
        unit="-",
        tolerance=0.01,
        reason="three digits",
        kind="from memory",
        source="White, F. M., Fluid Mechanics, Moody-chart example of chapter 6",
    ),
    Proof(
        subject="churchill",
        what="water in a stainless tube, Re 122 900, roughness 0.002 mm in 50 mm",
        ours=partial(churchill, 122900.0, 2e-6 / 0.05),
        value=0.0173,
        unit="-",
        tolerance=0.015,
        reason="three digits, and Colebrook's equation in place of Churchill's",
        kind="from memory",
        source="Çengel, Y. A., Heat Transfer, 2nd ed., Example 8-4",
    ),
    Proof(
        subject="churchill",
        what="laminar drop of water in a 10 mm tube",
        ours=sukhatme_4_1,
        value=250.7,
        unit="Pa",
        tolerance=0.001,
        reason="four digits",
        kind="independent",
        source="Sukhatme, S. P., A Textbook on Heat Transfer, Example 4.1" + COMPANION,
    ),
    Proof(
        subject="laminar_friction",
        what="drop of a liquid in a capillary, Re 473",
        ours=geankoplis_2_10_2,
        value=640.0,
        unit="Pa",
        tolerance=0.003,
        reason="three digits",
        kind="independent",
        source="Geankoplis, C. J., Transport Processes and Unit Operations, 3rd ed., Example 2.10-2" + COMPANION,
    ),
    Proof(
        subject="haaland",
        what="rough pipe, Re 573 700, roughness 0.26 mm in 120 mm",
        ours=partial(haaland, 573700.0, 0.00026 / 0.12),
        value=0.02424,
        unit="-",
        tolerance=0.0005,
        reason="four digits",
        kind="independent",
        source="Lienhard, J. H. IV, Lienhard, J. H. V, A Heat Transfer Textbook, Examples 7.3 and 7.4" + COMPANION,
    ),
    *(
        Proof(
            subject="petukhov_friction",
            what=f"smooth friction factor at Re {Re:g}",
            ours=partial(petukhov_friction, Re),
            value=f,
            unit="-",
            tolerance=0.022,
            reason="a closed form, within 2 % of the root",
            kind="derived",
            source=ROOT,
        )
        for Re, f in ((1.0e4, 0.03088295), (1.0e5, 0.01798977), (1.0e6, 0.01164504))
    ),
    *(
        Proof(
            subject="wall_factor_friction",
            what=f"turbulent factor at mu/mu_w = {1.0 / mu_ratio:.4g}",
            ours=partial(wall_factor_friction, 1.0e4, mu_ratio),
            value=factor,
            unit="-",
            tolerance=0.01,
            reason="Petukhov's forms (7 - mu/mu_w)/6 and (mu_w/mu)^0.24 in place of (mu_w/mu)^0.25",
            kind="derived",
            source="Lienhard & Lienhard, A Heat Transfer Textbook, section 7.3, worked out apart from this code",
        )
        for mu_ratio, factor in ((3.10 / 5.38, 0.877419), (2.0, 1.180993))
    ),
    *(
        Proof(
            subject="wall_factor_friction",
            what=f"laminar factor at mu_w/mu = {mu_ratio:g}",
            ours=partial(wall_factor_friction, 1.0e3, mu_ratio),
            value=factor,
            unit="-",
            tolerance=1e-6,
            reason="a power worked out apart from this code",
            kind="derived",
            source="Kays & Crawford, Convective Heat and Mass Transfer, exponents 0.58 heated and 0.50 cooled",
        )
        for mu_ratio, factor in ((0.5, 0.6689638), (2.0, 1.4142136))
    ),
    *(
        Proof(
            subject="wall_factor_friction_petukhov",
            what=f"factor at mu/mu_w = {1.0 / mu_ratio:.4g}",
            ours=partial(wall_factor_friction_petukhov, mu_ratio),
            value=factor,
            unit="-",
            tolerance=1e-5,
            reason="arithmetic",
            kind="derived",
            source="Lienhard & Lienhard, A Heat Transfer Textbook, section 7.3, worked out apart from this code",
        )
        for mu_ratio, factor in ((3.10 / 5.38, 0.877419), (2.0, 1.180993))
    ),
)
