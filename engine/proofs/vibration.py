"""Check values for the screening of tube vibration."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import get_args

from engine.exchangers.vibration import (
    CONNORS_SETS,
    Ends,
    acoustic_frequency,
    added_mass_coefficient,
    buffeting_frequency,
    critical_velocity,
    mass_per_length,
    natural_frequency,
)
from engine.proofs import Proof

BEAM = "beam theory worked in a second code"
EQUATION = "the printed equation in a second code"
MSRE = "tube of ORNL-TM-2098 (R. J. Kedl, C. K. McGlothlan, 1968), E, damping and bundle diameter assumed; " + BEAM


def steel_tube_added_mass() -> float:
    return float(added_mass_coefficient(1.25, 30.0))


def steel_tube_mass() -> float:
    """3/4 in tube of 2.11 mm, water inside and outside, pt/do 1.25, triangular [kg/m]."""
    return float(mass_per_length(0.01905, 0.01483, 7850.0, 1e3, 1e3, added_mass_coefficient(1.25, 30.0)))


def steel_tube_frequency(ends: Ends) -> float:
    return float(natural_frequency(0.01905, 0.01483, 200e9, steel_tube_mass(), 1.0, ends))


def steel_tube_critical_velocity() -> float:
    f = steel_tube_frequency("pinned-pinned")
    return float(critical_velocity(CONNORS_SETS[0], f, 0.01905, steel_tube_mass(), 1e3))


def alloy_tube(quantity: str, span: float = 0.6096) -> float:
    """1/2 in tube of a nickel alloy, water inside and outside."""
    od, bore = 0.0127, 0.0127 - 2 * 0.0010668
    C_m = added_mass_coefficient(0.019685 / od, 30.0)
    m = mass_per_length(od, bore, 8860.0, 1e3, 1e3, C_m)
    f = natural_frequency(od, bore, 219e9, m, span, "pinned-pinned")
    usual, cautious = (critical_velocity(constants, f, od, m, 1e3) for constants in CONNORS_SETS)
    return float({"C_m": C_m, "f": f, "usual": usual, "cautious": cautious}[quantity])


def buffeting() -> float:
    return float(buffeting_frequency(10.0, 0.0254, 0.03175, 0.03175))


def acoustic() -> float:
    return float(acoustic_frequency(1, 340.0, 1.0, 1.25, 30.0))


def derived(
    subject: str, what: str, ours: Callable[[], float], value: float, unit: str, reason: str, source: str = EQUATION
) -> Proof:
    return Proof(
        subject=subject,
        what=what,
        ours=ours,
        value=value,
        unit=unit,
        tolerance=0.001,
        reason=reason,
        kind="derived",
        source=source,
    )


SIX = "six digits"
LAMBDA = "λ² to four digits"
ROWS: tuple[Proof, ...] = (
    derived("added_mass_coefficient", "pt/do 1.25, triangular", steel_tube_added_mass, 1.68368, "-", SIX),
    derived("mass_per_length", "3/4 in steel tube in water", steel_tube_mass, 1.5341, "kg/m", "five digits", BEAM),
    *(
        derived(
            "natural_frequency", f"1 m of that tube, {ends}", partial(steel_tube_frequency, ends), f, "Hz", LAMBDA, BEAM
        )
        for ends, f in zip(get_args(Ends), (36.2737, 56.6657, 82.2273), strict=True)
    ),
    derived("critical_velocity", "1 m of that tube, K 3.0", steel_tube_critical_velocity, 1.30851, "m/s", LAMBDA),
    derived("added_mass_coefficient", "pt/do 1.55", partial(alloy_tube, "C_m"), 1.32092, "-", SIX, MSRE),
    derived("natural_frequency", "24 in of 1/2 in alloy tube", partial(alloy_tube, "f"), 65.8621, "Hz", LAMBDA, MSRE),
    derived("critical_velocity", "24 in, K 3.0", partial(alloy_tube, "usual"), 1.48724, "m/s", LAMBDA, MSRE),
    derived("critical_velocity", "24 in, K 2.4", partial(alloy_tube, "cautious"), 0.752493, "m/s", LAMBDA, MSRE),
    derived("critical_velocity", "12 in, K 3.0", partial(alloy_tube, "usual", 0.3048), 5.94898, "m/s", LAMBDA, MSRE),
    derived("buffeting_frequency", "10 m/s across 1 in tubes at 1.25", buffeting, 101.291, "Hz", SIX),
    derived("acoustic_frequency", "first mode across 1 m, 340 m/s, triangular at 1.25", acoustic, 135.227, "Hz", SIX),
)
