"""Screening of tube vibration: where a closer study is due, never a proof of safety.

Beam frequencies of the tube spans, the velocity at which fluid-elastic instability sets in, shedding, buffeting and
acoustic frequencies. The usual sets of constants disagree by a factor of two, so a verdict names how many of them are
exceeded. Window tubes span two baffle spacings. Arrays broadcast; SI.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from engine.correlations import Array, Source
from engine.exchangers.standard_sizes import pattern

Real = Array | float
Ends = Literal["pinned-pinned", "fixed-pinned", "fixed-fixed"]

BEAM_EIGENVALUES: dict[Ends, float] = {"pinned-pinned": 9.870, "fixed-pinned": 15.418, "fixed-fixed": 22.373}
"""λ² of the first mode. Baffles act as pins, a tubesheet as a clamp."""

PETTIGREW_TAYLOR = Source(
    key="Pettigrew-Taylor-1991",
    text="Pettigrew, M. J., Taylor, C. E., Fluidelastic instability of heat exchanger tube bundles: review and design "
    "recommendations, J. Pressure Vessel Technol. 113 (1991) 242-256",
    checked=False,
)
ASME_III_N = Source(
    key="asme-iii-n", text="ASME Boiler and Pressure Vessel Code, Section III, Appendix N-1330", checked=False
)
OWEN_1965 = Source(
    key="Owen-1965",
    text="Owen, P. R., Buffeting excitation of boiler tube vibration, J. Mech. Eng. Sci. 7 (1965) 431-439",
    checked=False,
)
PARKER_1978 = Source(
    key="Parker-1978",
    text="Parker, R., Acoustic resonances in passages containing banks of heat exchanger tubes, J. Sound Vib. 57 "
    "(1978) 245-260",
    checked=False,
)


@dataclass(frozen=True, kw_only=True)
class Connors:
    """Constants of U_crit = K f D sqrt(2π ζ m/(rho D²)), ζ the damping ratio in liquid."""

    K: float
    zeta: float
    source: Source


CONNORS_SETS = (
    Connors(K=3.0, zeta=0.015, source=PETTIGREW_TAYLOR),
    Connors(K=2.4, zeta=0.006, source=ASME_III_N),
)
"""A usual and a cautious pair: recommended K at typical damping, lower bound of K at the smallest damping."""


def added_mass_coefficient(pitch_ratio: Real, layout_angle: float) -> Real:
    """C_m of the fluid that a tube of a bundle moves with it: over the mass of the fluid it displaces.

    Raises ValueError for an angle that is no tube layout. Source: PETTIGREW_TAYLOR.
    """
    c0, c1 = (0.96, 0.50) if pattern(layout_angle) == "triangular" else (1.07, 0.56)
    De_Do = (c0 + c1 * pitch_ratio) * pitch_ratio
    return (De_Do**2 + 1) / (De_Do**2 - 1)


def mass_per_length(
    tube_od: float, tube_id: float, rho_metal: float, rho_inside: Real, rho_outside: Real, C_m: Real
) -> Real:
    """Metal, content and the fluid moved outside [kg/m]."""
    metal = rho_metal * (tube_od**2 - tube_id**2)
    return np.pi / 4 * (metal + rho_inside * tube_id**2 + C_m * rho_outside * tube_od**2)


def natural_frequency(tube_od: float, tube_id: float, E: float, m: Real, span: Real, ends: Ends) -> Array:
    """First mode of one span [Hz], without axial force; m is mass_per_length."""
    EI = E * np.pi / 64 * (tube_od**4 - tube_id**4)
    return np.asarray(BEAM_EIGENVALUES[ends] / (2 * np.pi * span**2) * np.sqrt(EI / m))


def critical_velocity(constants: Connors, f: Real, tube_od: float, m: Real, rho: Real) -> Array:
    """Cross-flow velocity in the gap [m/s] above which the tubes feed on the flow; f is the span's frequency [Hz]."""
    return np.asarray(constants.K * f * tube_od * np.sqrt(2 * np.pi * constants.zeta * m / (rho * tube_od**2)))


def sets_exceeded(velocity: Real, f: Real, tube_od: float, m: Real, rho: Real) -> Array:
    """How many of CONNORS_SETS the gap velocity m/(rho Sm) exceeds: 0 clear under all, 2 over under both."""
    return np.asarray(sum(1.0 * (velocity > critical_velocity(c, f, tube_od, m, rho)) for c in CONNORS_SETS))


STROUHAL = (0.2, 0.5)
"""From a single cylinder to close-set banks; the value of one bank lies between. Common practice."""


def shedding_frequencies(velocity: Real, tube_od: float) -> tuple[Real, Real]:
    """Lowest and highest vortex-shedding frequency [Hz] at the gap velocity, by STROUHAL."""
    return STROUHAL[0] * velocity / tube_od, STROUHAL[1] * velocity / tube_od


def buffeting_frequency(velocity: Real, tube_od: float, row_pitch: float, transverse_pitch: float) -> Real:
    """Dominant frequency [Hz] of the turbulence at the gap velocity. Source: OWEN_1965."""
    return velocity * tube_od / (row_pitch * transverse_pitch) * (3.05 * (1 - tube_od / transverse_pitch) ** 2 + 0.28)


def acoustic_frequency(mode: int, sound_speed: Real, width: float, pitch_ratio: float, layout_angle: float) -> Array:
    """Standing wave [Hz] of a gas across the shell of that width, the bundle slowing the sound. Source: PARKER_1978.

    Raises ValueError for an angle that is no tube layout.
    """
    cell = np.sqrt(0.75) if pattern(layout_angle) == "triangular" else 1.0
    solidity = np.pi / 4 / (cell * pitch_ratio**2)
    return np.asarray(mode * sound_speed / np.sqrt(1 + solidity) / (2 * width))
