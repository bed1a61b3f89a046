"""Filmwise condensation of a pure, saturated vapour: on vertical and horizontal tubes, on bundles, inside tubes.

Condensate properties k, mu, cp and rho_l are taken at (T_sat + T_w)/2, the latent heat at T_sat; `h_fg` below is the
modified one, `latent_heat`, `dT` is T_sat - T_w > 0. Vapour shear outside tubes, superheat and inert gas are not
counted. All relations broadcast and give h [W/m²K] on the surface that the condensate wets.
"""

from __future__ import annotations

import numpy as np

from engine.correlations import Array, Range, Source, correlation

NUSSELT_1916 = Source(
    key="Nusselt-1916",
    text="Nusselt, W., Die Oberflächenkondensation des Wasserdampfes, Z. VDI 60 (1916) 541-546, 569-575, with the "
    "constant 0.728 of the exact profile",
    checked=False,
)
ROHSENOW_1956 = Source(
    key="Rohsenow-1956",
    text="Rohsenow, W. M., Heat transfer and temperature distribution in laminar film condensation, Trans. ASME 78 "
    "(1956) 1645-1648",
    checked=False,
)
KUTATELADZE_1963 = Source(
    key="Kutateladze-1963",
    text="Kutateladze, S. S., Fundamentals of Heat Transfer, Academic Press 1963, as given by Incropera et al., "
    "Fundamentals of Heat and Mass Transfer, 6th ed., Eq. 10.37",
    checked=False,
)
LABUNTSOV_1957 = Source(
    key="Labuntsov-1957",
    text="Labuntsov, D. A., Teploenergetika 4 (1957) 72-80, as given by Incropera et al., Fundamentals of Heat and "
    "Mass Transfer, 6th ed., Eq. 10.38",
    checked=False,
)
KERN_ROWS = Source(
    key="Kern-1958",
    text="Kern, D. Q., Mathematical development of tube loading in horizontal condensers, AIChE J. 4 (1958) 157-160",
    checked=False,
)
CHATO_1962 = Source(
    key="Chato-1962",
    text="Chato, J. C., Laminar condensation inside horizontal and inclined tubes, ASHRAE J. 4 (1962) 52-60, as given "
    "by Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed., Eq. 10.42",
    checked=False,
)
BOYKO_KRUZHILIN_1967 = Source(
    key="Boyko-Kruzhilin-1967",
    text="Boyko, L. D., Kruzhilin, G. N., Heat transfer and hydraulic resistance during condensation of steam in a "
    "horizontal tube and in a bundle of tubes, Int. J. Heat Mass Transfer 10 (1967) 361-373",
    checked=False,
)
SHAH_1979 = Source(
    key="Shah-1979",
    text="Shah, M. M., A general correlation for heat transfer during film condensation inside pipes, Int. J. Heat "
    "Mass Transfer 22 (1979) 547-556",
    checked=False,
)
CHURCHILL_CHU_1975 = Source(
    key="Churchill-Chu-1975",
    text="Churchill, S. W., Chu, H. H. S., Correlating equations for laminar and turbulent free convection from a "
    "horizontal cylinder (from a vertical plate), Int. J. Heat Mass Transfer 18 (1975) 1049-1053 (1323-1329)",
    checked=False,
)

Real = Array | float
RE_WAVY, RE_TURBULENT = 30.0, 1600.0
"""Film Re from which `vertical_film` takes the wavy and the turbulent relation."""
G_STANDARD = 9.80665
"""Standard gravity [m/s²]."""


def latent_heat(h_fg: Real, cp: Real, dT: Real) -> Real:
    """h_fg + 0.68 cp dT [J/kg]: the condensate leaves subcooled. Source: ROHSENOW_1956."""
    return h_fg + 0.68 * cp * dT


def _film_group(k: Real, rho_l: Real, rho_v: Real, mu: Real, h_fg: Real, dT: Real, length: Real) -> Array:
    return np.asarray((G_STANDARD * rho_l * (rho_l - rho_v) * k**3 * h_fg / (mu * dT * length)) ** 0.25)


# Vertical


@correlation(
    gives="mean h [W/m²K]",
    applies="vertical tube or wall, laminar film without waves",
    source=NUSSELT_1916,
    valid=(Range(argument="Re_film", high=30.0),),
    scatter=0.10,
)
def nusselt_vertical(k: Real, rho_l: Real, rho_v: Real, mu: Real, h_fg: Real, dT: Real, L: Real) -> Array:
    return 0.943 * _film_group(k, rho_l, rho_v, mu, h_fg, dT, L)


@correlation(
    gives="mean h [W/m²K]",
    applies="vertical tube or wall, wavy laminar film",
    source=KUTATELADZE_1963,
    valid=(Range(argument="Re_film", low=30.0, high=1800.0),),
    scatter=0.10,
)
def kutateladze_wavy(Re_film: Array, k: Real, nu: Real) -> Array:
    """Re_film = 4 Gamma/mu at the lower end."""
    return np.asarray(Re_film * k * (G_STANDARD / nu**2) ** (1 / 3) / (1.08 * Re_film**1.22 - 5.2))


@correlation(
    gives="mean h [W/m²K]",
    applies="vertical tube or wall, film turbulent at its lower end",
    source=LABUNTSOV_1957,
    valid=(Range(argument="Re_film", low=1800.0), Range(argument="Pr", low=1.0)),
    scatter=0.10,
)
def labuntsov_turbulent(Re_film: Array, Pr: Real, k: Real, nu: Real) -> Array:
    """Re_film = 4 Gamma/mu at the lower end."""
    conductance = Re_film * k * (G_STANDARD / nu**2) ** (1 / 3)
    return np.asarray(conductance / (8750 + 58 * Pr**-0.5 * (Re_film**0.75 - 253)))


def vertical_film(
    k: Real, rho_l: Real, rho_v: Real, mu: Real, cp: Real, h_fg: Real, dT: Real, L: Real
) -> tuple[Array, Array]:
    """Mean h and the film's Re at its lower end, from the driving temperature difference.

    Re = 4 h L dT/(mu h_fg) closes each of the three relations. The wavy and the turbulent one meet near Re 1600
    whatever Pr is, so the change is made there and not at the printed 1800, where h would jump by up to 15 %; what
    their rounded constants leave of a step, 0.05 %, is spread over the wavy range. Around Re 30 laminar passes into
    wavy.
    """
    per_h = 4 * L * dT / (mu * h_fg)
    load = per_h * k * (G_STANDARD * (rho_l / mu) ** 2) ** (1 / 3)
    laminar = per_h * nusselt_vertical(k, rho_l, rho_v, mu, h_fg, dT, L)
    wavy = ((load + 5.2) / 1.08) ** (1 / 1.22) * _STEP ** (load / 8750)
    turbulent = (np.maximum(load - 8750, 0.0) * np.sqrt(cp * mu / k) / 58 + 253) ** (4 / 3)
    waves = np.clip(laminar / RE_WAVY - 0.5, 0.0, 1.0)
    Re_film = np.where(load < 8750, laminar ** (1 - waves) * wavy**waves, turbulent)
    return np.asarray(Re_film / per_h), Re_film


_STEP = 253 ** (4 / 3) / ((8750 + 5.2) / 1.08) ** (1 / 1.22)


# Horizontal, outside


@correlation(
    gives="mean h [W/m²K]",
    applies="outside of one horizontal tube, laminar film",
    source=NUSSELT_1916,
    valid=(Range(argument="Re_film", high=3600.0),),
    scatter=0.10,
)
def nusselt_horizontal(k: Real, rho_l: Real, rho_v: Real, mu: Real, h_fg: Real, dT: Real, D: Real) -> Array:
    return 0.728 * _film_group(k, rho_l, rho_v, mu, h_fg, dT, D)


@correlation(
    gives="factor on h of one tube",
    applies="bundle of horizontal tubes, N tubes in a vertical row, mean of the row; drops splash",
    source=KERN_ROWS,
    scatter=0.15,
)
def kern_rows(N: Real) -> Array:
    return np.asarray(np.asarray(N, dtype=float) ** (-1 / 6))


@correlation(
    gives="factor on h of one tube",
    applies="bundle of horizontal tubes, N tubes in a vertical row, mean of the row; condensate falls as a sheet",
    source=NUSSELT_1916,
    scatter=0.15,
    role="second opinion",
)
def nusselt_rows(N: Real) -> Array:
    return np.asarray(np.asarray(N, dtype=float) ** (-1 / 4))


# Inside horizontal tubes


@correlation(
    gives="mean h [W/m²K]",
    applies="inside a horizontal tube, slow vapour, condensate running along the bottom",
    source=CHATO_1962,
    valid=(Range(argument="Re_vapour", high=35e3),),
    scatter=0.15,
)
def chato(k: Real, rho_l: Real, rho_v: Real, mu: Real, h_fg: Real, dT: Real, d: Real) -> Array:
    """Re_vapour is that of the vapour alone at the inlet."""
    return 0.555 * _film_group(k, rho_l, rho_v, mu, h_fg, dT, d)


@correlation(
    gives="h [W/m²K]",
    applies="inside a tube, fast vapour with an annular film",
    source=BOYKO_KRUZHILIN_1967,
    valid=(Range(argument="Re_vapour", low=35e3), Range(argument="x", low=0.0, high=1.0)),
    scatter=0.15,
)
def boyko_kruzhilin(Re_L: Array, Pr: Real, k: Real, d: Real, rho_l: Real, rho_v: Real, x: Real) -> Array:
    """Local h at vapour quality x; Re_L is that of the whole flow as liquid. The mean over x from one end to the other
    is the mean of both ends' values."""
    liquid = 0.021 * k / d * Re_L**0.8 * Pr**0.43
    return np.asarray(liquid * np.sqrt(1 + np.asarray(x) * (rho_l / rho_v - 1)))


@correlation(
    gives="h [W/m²K]",
    applies="inside a tube, horizontal, vertical or inclined, annular film",
    source=SHAH_1979,
    valid=(
        Range(argument="Re_L", low=350.0),
        Range(argument="p_reduced", low=0.002, high=0.44),
        Range(argument="Pr", low=0.5),
        Range(argument="x", low=0.0, high=0.99),
    ),
    scatter=0.19,
    scatter_origin="printed as a mean deviation of 15.4 %",
    role="second opinion",
)
def shah_1979(Re_L: Array, Pr: Real, k: Real, d: Real, p_reduced: Real, x: Real) -> Array:
    """Local h at vapour quality x, taken as 0.99 above that; Re_L is that of the whole flow as liquid."""
    x = np.minimum(x, 0.99)
    liquid = 0.023 * k / d * Re_L**0.8 * Pr**0.4
    return np.asarray(liquid * ((1 - x) ** 0.8 + 3.8 * x**0.76 * (1 - x) ** 0.04 / p_reduced**0.38))


def horizontal_tube_film(
    k: Real, rho_l: Real, rho_v: Real, mu: Real, cp: Real, h_fg: Real, dT: Real, d: Real, Re_L: Array
) -> Array:
    """Mean h of complete condensation inside a horizontal tube: the greater of Chato's and Boyko and Kruzhilin's."""
    Pr = cp * mu / k
    ends = [boyko_kruzhilin(Re_L, Pr, k, d, rho_l, rho_v, x) for x in (0.0, 1.0)]
    return np.asarray(np.maximum(chato(k, rho_l, rho_v, mu, h_fg, dT, d), sum(ends) / 2))


# Under condensate


@correlation(
    gives="mean Nu",
    applies="free convection on a horizontal cylinder, on its diameter",
    source=CHURCHILL_CHU_1975,
    valid=(Range(argument="Ra", high=1e12),),
    scatter=0.15,
)
def churchill_chu_horizontal(Ra: Array, Pr: Real) -> Array:
    return np.asarray((0.60 + 0.387 * Ra ** (1 / 6) / (1 + (0.559 / Pr) ** (9 / 16)) ** (8 / 27)) ** 2)


@correlation(
    gives="mean Nu",
    applies="free convection on a vertical plate or tube, on its height",
    source=CHURCHILL_CHU_1975,
    valid=(Range(argument="Ra", high=1e12),),
    scatter=0.15,
)
def churchill_chu_vertical(Ra: Array, Pr: Real) -> Array:
    return np.asarray((0.825 + 0.387 * Ra ** (1 / 6) / (1 + (0.492 / Pr) ** (9 / 16)) ** (8 / 27)) ** 2)
