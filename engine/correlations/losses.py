"""Pressure losses in tubes: Darcy friction factors, and the loss coefficients and roughnesses taken by default.

Friction factors are Darcy's (dp = f L/d rho v^2/2) and broadcast over Re and the relative roughness.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.correlations import Array, Range, Source, correlation
from engine.correlations.inside_tubes import AS_BULK, RE_LAMINAR, Real, Wall, check_above_zero, turbulent_share
from engine.correlations.sources import (
    CHURCHILL_1977,
    COLEBROOK_1939,
    COMMON_PRACTICE,
    HAALAND_1983,
    HAGEN_POISEUILLE,
    KAYS_CRAWFORD,
    KERN_1950,
    LIENHARD,
    MOODY_1944,
    PETUKHOV_1970,
    SINNOTT_2005,
)

RE_FRICTION_TURBULENT = 4000.0
"""From here on friction is taken as turbulent; between RE_LAMINAR and here it is joined linearly in Re."""

_ROUGHNESS = Range(argument="roughness_ratio", low=0.0, high=0.05)
_TURBULENT = Range(argument="Re", low=RE_FRICTION_TURBULENT, high=1.0e8)


@correlation(
    gives="Darcy friction factor",
    applies="developed flow in smooth and rough tubes at every Re",
    source=CHURCHILL_1977,
    valid=(_ROUGHNESS,),
    scatter=0.07,
)
def churchill(Re: Array, roughness_ratio: Array) -> Array:
    A = (2.457 * np.log(1.0 / ((7.0 / Re) ** 0.9 + 0.27 * roughness_ratio))) ** 16
    B = (37530.0 / Re) ** 16
    return 8.0 * ((8.0 / Re) ** 12 + (A + B) ** -1.5) ** (1.0 / 12.0)


@correlation(
    gives="Darcy friction factor",
    applies="developed laminar flow in a tube",
    source=HAGEN_POISEUILLE,
    valid=(Range(argument="Re", high=RE_LAMINAR),),
    role="second opinion",
)
def laminar_friction(Re: Array) -> Array:
    return 64.0 / Re


@correlation(
    gives="Darcy friction factor",
    applies="turbulent flow in smooth and rough tubes",
    source=COLEBROOK_1939,
    valid=(_TURBULENT, _ROUGHNESS),
    scatter=0.07,
    role="second opinion",
)
def colebrook(Re: Array, roughness_ratio: Array) -> Array:
    """Root of 1/sqrt(f) = -2 log10(roughness_ratio/3.7 + 2.51/(Re sqrt(f))) by Newton's method."""
    x: Array = 1.0 / np.sqrt(haaland(Re, roughness_ratio))
    for _ in range(4):  # quadratic from a start within 2 %: the third step already reaches rounding
        inner = roughness_ratio / 3.7 + 2.51 * x / Re
        slope = 1.0 + 2.0 / np.log(10.0) * 2.51 / (Re * inner)
        x = x - (x + 2.0 * np.log10(inner)) / slope
    return 1.0 / x**2


@correlation(
    gives="Darcy friction factor",
    applies="turbulent flow in smooth and rough tubes",
    source=HAALAND_1983,
    valid=(_TURBULENT, _ROUGHNESS),
    scatter=0.07,
    role="second opinion",
)
def haaland(Re: Array, roughness_ratio: Array) -> Array:
    return (-1.8 * np.log10((roughness_ratio / 3.7) ** 1.11 + 6.9 / Re)) ** -2


@correlation(
    gives="Darcy friction factor",
    applies="turbulent flow in smooth tubes",
    source=PETUKHOV_1970,
    valid=(Range(argument="Re", low=3000.0, high=5.0e6),),
    scatter=0.07,
    role="second opinion",
)
def petukhov_friction(Re: Array) -> Array:
    return (0.79 * np.log(Re) - 1.64) ** -2


@correlation(
    gives="factor on the friction factor",
    applies="flow of liquids heated or cooled at the wall",
    source=KAYS_CRAWFORD,
    valid=(Range(argument="mu_ratio", low=0.1, high=10.0),),
)
def wall_factor_friction(Re: Array, mu_ratio: Array) -> Array:
    """(mu_w/mu)^m; m is 0.58 heated and 0.50 cooled in laminar flow, 0.25 in turbulent flow, linear in Re between.

    mu_ratio is mu_w/mu: below 1 a liquid is being heated.
    """
    laminar = np.where(mu_ratio < 1.0, 0.58, 0.50)
    m = laminar + turbulent_share(Re, RE_FRICTION_TURBULENT) * (0.25 - laminar)
    return mu_ratio**m


@correlation(
    gives="factor on the friction factor",
    applies="turbulent flow of liquids heated or cooled at the wall",
    source=LIENHARD,
    valid=(Range(argument="Re", low=1.0e4), Range(argument="mu_ratio", low=1.0 / 3.0, high=2.0)),
    role="second opinion",
)
def wall_factor_friction_petukhov(mu_ratio: Array) -> Array:
    """(7 - mu/mu_w)/6 heated, (mu_w/mu)^0.24 cooled; mu_ratio is mu_w/mu."""
    return np.where(mu_ratio < 1.0, (7.0 - 1.0 / mu_ratio) / 6.0, mu_ratio**0.24)


def friction_tube(Re: Real, roughness_ratio: Real, *, wall: Wall = AS_BULK) -> Array:
    """Darcy friction factor in a tube at every Re, with the wall's viscosity for liquids.

    Raises ValueError where Re is not above zero.
    """
    check_above_zero(Re=Re)
    f: Array = churchill(Re, roughness_ratio)
    return f * friction_wall_factor(Re, wall)


def friction_wall_factor(Re: Real, wall: Wall) -> Real:
    """Factor on the friction factor: 1 for gases."""
    factor: Real = 1.0 if wall.gas else wall_factor_friction(Re, wall.mu)
    return factor


def velocity_head(G: Real, rho: Real) -> Real:
    """G^2/(2 rho) [Pa] of a mass velocity G [kg/m2 s]."""
    return G * G / (2.0 * rho)


def friction_drop(f: Real, L: Real, d: Real, head: Real) -> Real:
    """f L/d times the velocity head [Pa]."""
    return f * L / d * head


@dataclass(frozen=True, kw_only=True)
class Figure:
    """A number taken from print or from common practice; `spread` is what other sources take for it."""

    what: str
    value: float
    unit: str
    source: Source
    spread: tuple[float, float] | None = None


HEADS = "velocity heads"

TUBE_ENTRANCE = Figure(what="entrance into a tube, once", value=0.5, unit=HEADS, source=COMMON_PRACTICE)
TUBE_EXIT = Figure(what="exit from a tube, once", value=1.0, unit=HEADS, source=COMMON_PRACTICE)
RETURN_BEND = Figure(
    what="return bend of two long-radius 90° bends, each", value=1.0, unit=HEADS, source=COMMON_PRACTICE
)
ANNULUS_HAIRPIN = Figure(what="entering and leaving the annulus, each hairpin", value=1.0, unit=HEADS, source=KERN_1950)
TUBE_PASS = Figure(
    what="contraction, expansion and turn of the tubes of a shell, each pass",
    value=2.5,
    unit=HEADS,
    source=SINNOTT_2005,
    spread=(2.5, 4.0),
)
TUBE_PASS_KERN = Figure(
    what="return losses of the tubes of a shell, each pass", value=4.0, unit=HEADS, source=KERN_1950
)
NOZZLE_IN = Figure(what="inlet nozzle, of its own head", value=1.0, unit=HEADS, source=COMMON_PRACTICE)
NOZZLE_OUT = Figure(what="outlet nozzle, of its own head", value=0.5, unit=HEADS, source=COMMON_PRACTICE)

COEFFICIENTS = {
    figure.what: figure
    for figure in (
        TUBE_ENTRANCE,
        TUBE_EXIT,
        RETURN_BEND,
        ANNULUS_HAIRPIN,
        TUBE_PASS,
        TUBE_PASS_KERN,
        NOZZLE_IN,
        NOZZLE_OUT,
    )
}
"""By name."""

DRAWN_TUBE = Figure(what="roughness of drawn tube", value=1.5e-6, unit="m", source=MOODY_1944)
COMMERCIAL_STEEL = Figure(what="roughness of commercial steel pipe", value=45.0e-6, unit="m", source=MOODY_1944)
