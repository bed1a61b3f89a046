"""Heat transfer inside round tubes: the printed relations, and `nusselt_tube`, which joins them over all Re.

Re and Pr are taken at the bulk state and on the inside diameter d; L is one straight leg or one tube pass, since bends
and headers remix the flow and the entrance starts anew. All relations broadcast.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from types import EllipsisType

import numpy as np
from numpy.typing import NDArray

from engine.correlations import Array, Correlation, Excursion, Range, correlation
from engine.correlations.sources import (
    DITTUS_BOELTER_1930,
    GNIELINSKI_1976,
    GNIELINSKI_2013,
    HAUSEN_1943,
    KONAKOV_1946,
    PETUKHOV_1970,
    SHAH_LONDON_1978,
    SIEDER_TATE_1936,
    VDI_G1,
)

RE_LAMINAR = 2300.0
"""Up to here the flow is taken as laminar, in heat transfer and in friction."""
RE_TURBULENT = 1.0e4
"""From here on heat transfer is taken as fully turbulent (VDI Heat Atlas 2010, G1)."""
RE_TURBULENT_2013 = 4000.0
"""The same limit in Gnielinski's paper of 2013."""
NU_ISOTHERMAL = 3.66

LAMINAR, TRANSITIONAL, TURBULENT = 0, 1, 2
REGIMES = ("laminar", "transitional", "turbulent")

Real = Array | float
Codes = NDArray[np.int8]
Shape = tuple[int, ...]
Index = NDArray[np.bool_] | EllipsisType
Factors = tuple[Real, Real, Real]

_PRINTED_25 = "printed as ±25 % (Incropera et al., section 8.5)"
_PRINTED_10 = "printed as ±10 % (Incropera et al., section 8.5)"
_SHORTEST = Range(argument="d_over_L", low=0.0, high=1.0)
_SLENDER = Range(argument="d_over_L", low=0.0, high=0.1)


# Laminar flow


def _thermal_entry_cubed(Gz: Array) -> Array:
    entry = 1.615 * np.cbrt(Gz) - 0.7
    return NU_ISOTHERMAL**3 + 0.7**3 + entry * entry * entry


@correlation(
    gives="mean Nu",
    applies="laminar flow in a tube, wall at constant temperature, velocity and temperature developing together",
    source=VDI_G1,
    valid=(Range(argument="Re", high=RE_LAMINAR), Range(argument="Pr", low=0.1, high=1000.0), _SHORTEST),
    scatter=0.07,
)
def gnielinski_laminar(Re: Array, Pr: Array, d_over_L: Array) -> Array:
    """Mean Nusselt number from the inlet to L, with all four terms."""
    Gz = Re * Pr * d_over_L
    hydrodynamic_entry_cubed = np.sqrt(2.0 / (1.0 + 22.0 * Pr)) * Gz * np.sqrt(Gz)
    return np.cbrt(_thermal_entry_cubed(Gz) + hydrodynamic_entry_cubed)


@correlation(
    gives="mean Nu",
    applies="laminar flow in a tube, wall at constant temperature, velocity already developed",
    source=VDI_G1,
    valid=(Range(argument="Re", high=RE_LAMINAR),),
    scatter=0.07,
    role="second opinion",
)
def gnielinski_laminar_developed(Re: Array, Pr: Array, d_over_L: Array) -> Array:
    """Mean Nusselt number from the start of heating to L: the form that Graetz' exact solution checks."""
    return np.cbrt(_thermal_entry_cubed(Re * Pr * d_over_L))


@correlation(
    gives="mean Nu",
    applies="laminar flow in a tube, wall at constant temperature, velocity already developed",
    source=SHAH_LONDON_1978,
    valid=(Range(argument="Re", high=RE_LAMINAR),),
    scatter=0.07,
    role="second opinion",
)
def shah_london_laminar(Re: Array, Pr: Array, d_over_L: Array) -> Array:
    """Closed form of Graetz' mean Nusselt number, in three pieces over x* = L/(d Re Pr)."""
    x = 1.0 / (Re * Pr * d_over_L)
    leveque = 1.615 / np.cbrt(x)
    return np.where(x <= 0.005, leveque - 0.7, np.where(x < 0.03, leveque - 0.2, 3.657 + 0.0499 / x))


@correlation(
    gives="mean Nu",
    applies="laminar flow in a tube, wall at constant temperature, velocity already developed",
    source=HAUSEN_1943,
    valid=(Range(argument="Re", high=RE_LAMINAR),),
    scatter=0.07,
    role="second opinion",
)
def hausen_laminar(Re: Array, Pr: Array, d_over_L: Array) -> Array:
    """Mean Nusselt number; 3 to 8 % above Graetz' exact solution at Gz 100 to 500."""
    Gz = Re * Pr * d_over_L
    return 3.66 + 0.0668 * Gz / (1.0 + 0.04 * np.cbrt(Gz) ** 2)


@correlation(
    gives="mean Nu",
    applies="laminar flow of liquids in short tubes, wall at constant temperature",
    source=SIEDER_TATE_1936,
    valid=(
        Range(argument="Re", high=RE_LAMINAR),
        Range(argument="Pr", low=0.48, high=16700.0),
        Range(argument="mu_ratio", low=1.0 / 9.75, high=1.0 / 0.0044),
    ),
    scatter=0.125,
    scatter_origin=_PRINTED_25,
    role="second opinion",
)
def sieder_tate_laminar(Re: Array, Pr: Array, d_over_L: Array, mu_ratio: Array) -> Array:
    """Mean Nusselt number; falls to zero in a long tube. mu_ratio is mu_w/mu."""
    return 1.86 * np.cbrt(Re * Pr * d_over_L) * mu_ratio**-0.14


# Turbulent flow


@correlation(
    gives="Darcy friction factor",
    applies="turbulent flow in a smooth tube; feeds Gnielinski's relation, not the pressure drop",
    source=KONAKOV_1946,
    valid=(Range(argument="Re", low=1.0e4, high=1.0e6),),
)
def konakov(Re: Array) -> Array:
    return 1.0 / (1.8 * np.log10(Re) - 1.5) ** 2


@correlation(
    gives="mean Nu",
    applies="turbulent flow in a tube",
    source=VDI_G1,
    valid=(Range(argument="Re", low=1.0e4, high=1.0e6), Range(argument="Pr", low=0.1, high=1000.0), _SHORTEST),
    scatter=0.07,
)
def gnielinski_turbulent(Re: Array, Pr: Array, d_over_L: Array) -> Array:
    """Mean Nusselt number from the inlet to L."""
    xi_8: Array = konakov(Re) / 8.0
    developed = xi_8 * Re * Pr / (1.0 + 12.7 * np.sqrt(xi_8) * (np.cbrt(Pr) ** 2 - 1.0))
    return developed * (1.0 + np.cbrt(d_over_L) ** 2)


@correlation(
    gives="Nu",
    applies="turbulent and upper transitional flow in a long tube",
    source=GNIELINSKI_1976,
    valid=(Range(argument="Re", low=3000.0, high=5.0e6), Range(argument="Pr", low=0.5, high=2000.0)),
    scatter=0.05,
    scatter_origin=_PRINTED_10,
    role="second opinion",
)
def gnielinski_1976(Re: Array, Pr: Array) -> Array:
    f_8 = 0.125 / (0.79 * np.log(Re) - 1.64) ** 2
    return f_8 * (Re - 1000.0) * Pr / (1.0 + 12.7 * np.sqrt(f_8) * (np.cbrt(Pr) ** 2 - 1.0))


@correlation(
    gives="Nu",
    applies="turbulent flow in a long tube",
    source=PETUKHOV_1970,
    valid=(Range(argument="Re", low=1.0e4, high=5.0e6), Range(argument="Pr", low=0.5, high=2000.0)),
    scatter=0.05,
    scatter_origin=_PRINTED_10,
    role="second opinion",
)
def petukhov(Re: Array, Pr: Array) -> Array:
    f_8 = 0.125 / (0.79 * np.log(Re) - 1.64) ** 2
    return f_8 * Re * Pr / (1.07 + 12.7 * np.sqrt(f_8) * (np.cbrt(Pr) ** 2 - 1.0))


@correlation(
    gives="Nu",
    applies="turbulent flow in a long tube, moderate temperature differences",
    source=DITTUS_BOELTER_1930,
    valid=(Range(argument="Re", low=1.0e4), Range(argument="Pr", low=0.6, high=160.0), _SLENDER),
    scatter=0.125,
    scatter_origin=_PRINTED_25,
    role="second opinion",
)
def dittus_boelter(Re: Array, Pr: Array, heated: NDArray[np.bool_]) -> Array:
    return 0.023 * Re**0.8 * Pr ** np.where(heated, 0.4, 0.3)


@correlation(
    gives="Nu",
    applies="turbulent flow of liquids in a long tube, large viscosity differences",
    source=SIEDER_TATE_1936,
    valid=(Range(argument="Re", low=1.0e4), Range(argument="Pr", low=0.7, high=16700.0), _SLENDER),
    scatter=0.125,
    scatter_origin=_PRINTED_25,
    role="second opinion",
)
def sieder_tate_turbulent(Re: Array, Pr: Array, mu_ratio: Array) -> Array:
    """mu_ratio is mu_w/mu."""
    return 0.027 * Re**0.8 * np.cbrt(Pr) * mu_ratio**-0.14


# Between laminar and turbulent


def turbulent_share(Re: Array, Re_turbulent: float = RE_TURBULENT) -> Array:
    """Weight of the turbulent end in the transition: 0 up to RE_LAMINAR, linear in Re, 1 from Re_turbulent on."""
    return np.clip((Re - RE_LAMINAR) / (Re_turbulent - RE_LAMINAR), 0.0, 1.0)


@correlation(
    gives="mean Nu",
    applies="transitional flow, joined linearly between the laminar and the turbulent relation at their limits",
    source=VDI_G1,
    valid=(Range(argument="Re", low=RE_LAMINAR, high=RE_TURBULENT),),
    scatter=0.15,
)
def transition(Re: Array, Nu_laminar: Array, Nu_turbulent: Array) -> Array:
    """Nu_laminar is taken at Re 2300, Nu_turbulent at Re 1e4, both with the local Pr."""
    share = turbulent_share(Re)
    return (1.0 - share) * Nu_laminar + share * Nu_turbulent


@correlation(
    gives="mean Nu",
    applies="transitional flow, the turbulent relation reached at Re 4000",
    source=GNIELINSKI_2013,
    valid=(Range(argument="Re", low=RE_LAMINAR, high=RE_TURBULENT_2013),),
    scatter=0.15,
    role="second opinion",
)
def transition_2013(Re: Array, Nu_laminar: Array, Nu_turbulent: Array) -> Array:
    """Nu_laminar is taken at Re 2300, Nu_turbulent at Re 4000, both with the local Pr."""
    share = turbulent_share(Re, RE_TURBULENT_2013)
    return (1.0 - share) * Nu_laminar + share * Nu_turbulent


# Properties at the wall


@correlation(
    gives="factor on Nu",
    applies="turbulent flow of liquids",
    source=VDI_G1,
    valid=(Range(argument="Pr_ratio", low=0.05, high=20.0),),
)
def wall_factor_liquid_turbulent(Pr_ratio: Array) -> Array:
    """(Pr/Pr_w)^0.11; Pr_ratio is Pr_w/Pr."""
    return Pr_ratio**-0.11


@correlation(
    gives="factor on Nu",
    applies="laminar flow of liquids",
    source=SIEDER_TATE_1936,
    valid=(Range(argument="mu_ratio", low=1.0 / 9.75, high=1.0 / 0.0044),),
)
def wall_factor_liquid_laminar(mu_ratio: Array) -> Array:
    """(mu/mu_w)^0.14; mu_ratio is mu_w/mu."""
    return mu_ratio**-0.14


@correlation(
    gives="factor on Nu",
    applies="turbulent flow of gases; heated only, 1 where the gas is cooled",
    source=VDI_G1,
    valid=(Range(argument="T_ratio", high=2.0),),
)
def wall_factor_gas_turbulent(T_ratio: Array) -> Array:
    """(T/T_w)^0.45 in kelvin; T_ratio is T_w/T."""
    return np.maximum(T_ratio, 1.0) ** -0.45


@correlation(
    gives="factor on Nu",
    applies="turbulent flow of liquids",
    source=PETUKHOV_1970,
    valid=(Range(argument="mu_ratio", low=0.025, high=12.5),),
    role="second opinion",
)
def wall_factor_petukhov(mu_ratio: Array) -> Array:
    """(mu/mu_w)^n, n = 0.11 heated and 0.25 cooled; mu_ratio is mu_w/mu, below 1 where a liquid is heated."""
    return mu_ratio ** -np.where(mu_ratio < 1.0, 0.11, 0.25)


@dataclass(frozen=True, kw_only=True)
class Wall:
    """The fluid's state at the surface it touches over its bulk state; each ratio broadcasts against Re.

    `mu` is mu_w/mu, `Pr` is Pr_w/Pr, `T` is T_w/T in kelvin, so that T > 1 means heated.
    """

    mu: Real = 1.0
    Pr: Real = 1.0
    T: Real = 1.0
    gas: bool = False

    def laminar_factor(self, shape: Shape, i: Index) -> Real:
        """Factor on the laminar Nu at the elements i of an array of that shape."""
        factor: Real = 1.0 if self.gas else wall_factor_liquid_laminar(at(self.mu, shape, i))
        return factor

    def turbulent_factor(self, shape: Shape, i: Index) -> Real:
        """Factor on the turbulent Nu at the elements i of an array of that shape."""
        relation, ratio = (wall_factor_gas_turbulent, self.T) if self.gas else (wall_factor_liquid_turbulent, self.Pr)
        factor: Real = relation(at(ratio, shape, i))
        return factor


AS_BULK = Wall()
"""The wall at the bulk state: every factor is 1."""


def wall_relations(*, laminar: bool, turbulent: bool, gas: bool) -> tuple[Correlation, ...]:
    """The relations behind a Wall's factors on the films that occur."""
    used = ((laminar and not gas, wall_factor_liquid_laminar), (turbulent and not gas, wall_factor_liquid_turbulent))
    return tuple(relation for occurs, relation in (*used, (turbulent and gas, wall_factor_gas_turbulent)) if occurs)


# The tube film over all Re

TUBE_RELATIONS = (gnielinski_laminar, transition, gnielinski_turbulent)
"""The relation in charge of each regime code."""


def nusselt_tube(
    Re: Real,
    Pr: Real,
    d: Real,
    x1: Real,
    x2: Real,
    *,
    wall: Wall = AS_BULK,
    factors: Factors | None = None,
    joined_by: Correlation = transition,
) -> tuple[Array, Codes]:
    """Mean Nusselt number over cells that lie between x1 and x2 from the inlet of their leg or pass, and the regime.

    All arguments broadcast, typically Re and Pr (points, cells), x1 and x2 (cells,), d [m] a scalar or (points, 1).
    `factors` multiply the laminar, transitional and turbulent result and broadcast in the same way. `joined_by` is
    `transition` or `transition_2013`. The regime is a code into REGIMES and TUBE_RELATIONS. With x1 = 0 and x2 = L the
    result is the printed mean over L, and cells of one leg sum to it. Raises ValueError where Re or Pr is not above
    zero or a cell has no length.
    """
    Re, Pr, x1, x2 = checked_cells(Re, Pr, x1, x2)
    shape = np.broadcast_shapes(*(np.shape(v) for v in (Re, Pr, d, x1, x2)))
    Re_turbulent = joined_by.valid[0].high
    entrance = cell_entrance(d, x1, x2)

    def laminar(i: Index) -> Array:
        Re_i, Pr_i, d_i, start, end = (at(v, shape, i) for v in (np.minimum(Re, RE_LAMINAR), Pr, d, x1, x2))
        Nu: Array = cell_mean(lambda x: gnielinski_laminar(Re_i, Pr_i, d_i / x), start, end)
        return Nu * wall.laminar_factor(shape, i)

    def turbulent(i: Index) -> Array:
        Re_i, Pr_i, d_over_L = (at(v, shape, i) for v in (np.maximum(Re, Re_turbulent), Pr, entrance))
        Nu: Array = gnielinski_turbulent(Re_i, Pr_i, d_over_L)
        return Nu * wall.turbulent_factor(shape, i)

    return through_transition(np.broadcast_to(Re, shape), laminar, turbulent, factors=factors, joined_by=joined_by)


def excursions_tube(
    Re: Real, Pr: Real, d: Real, L: Real, *, wall: Wall = AS_BULK, joined_by: Correlation = transition
) -> tuple[Excursion, ...]:
    """The published limits that the film leaves, each relation judged only where it is used."""
    return excursions_by_regime(
        Re,
        joined_by,
        laminar=(gnielinski_laminar, {"Pr": Pr, "d_over_L": np.divide(d, L)}),
        turbulent=(gnielinski_turbulent, {"Pr": Pr, "d_over_L": np.divide(d, L)}),
        wall=wall,
    )


# What the tube and the annulus share


def check_above_zero(**numbers: Real) -> None:
    """ValueError that names the first of the numbers which is not finite and above zero throughout."""
    for name, value in numbers.items():
        lowest, highest = np.min(value), np.max(value)
        if not 0.0 < lowest <= highest < np.inf:
            raise ValueError(
                f"{name} must be a number above zero at every point and cell; given {lowest:g} to {highest:g}."
            )


def checked_cells(Re: Real, Pr: Real, x1: Real, x2: Real) -> tuple[Array, Array, Array, Array]:
    """The arguments as arrays; ValueError where Re or Pr is not above zero or a cell has no length."""
    check_above_zero(Re=Re, Pr=Pr)
    Re, Pr, x1, x2 = (np.asarray(v, dtype=float) for v in (Re, Pr, x1, x2))
    if not (np.all(x1 >= 0.0) and np.all(x2 > x1)):
        raise ValueError("A cell must end further from the inlet of its leg than it starts: 0 <= x1 < x2.")
    return Re, Pr, x1, x2


def at(x: Real, shape: Shape, i: Index) -> Array:
    """The elements i of x broadcast to shape; a scalar stays a scalar."""
    x = np.asarray(x)
    return x if x.ndim == 0 else np.broadcast_to(x, shape)[i]


def cell_mean(mean_Nu: Callable[[Array], Array], x1: Array, x2: Array) -> Array:
    """Mean over the cell of a Nusselt number whose mean from the inlet to x is known."""
    if not np.any(x1):
        return mean_Nu(x2)
    # x Nu_m(x) goes to zero as x^(1/2) or faster, so a start this close to the inlet changes no digit.
    start = np.maximum(x1, 1e-30 * x2)
    return (x2 * mean_Nu(x2) - start * mean_Nu(start)) / (x2 - x1)


def cell_entrance(d: Real, x1: Array, x2: Array) -> Array:
    """The d/L whose (d/L)^(2/3) is the mean entrance term of a cell from x1 to x2."""
    return np.asarray(d * ((np.cbrt(x2) - np.cbrt(x1)) / (x2 - x1)) ** 1.5)


def through_transition(
    Re: Array,
    laminar: Callable[[Index], Array],
    turbulent: Callable[[Index], Array],
    *,
    factors: Factors | None,
    joined_by: Correlation,
) -> tuple[Array, Codes]:
    """Nu over all Re and the regime codes, from two branches that return their Nu at given elements.

    Each branch holds its Re at its own limit and is evaluated only where it has a share in the result.
    """
    Re_turbulent = joined_by.valid[0].high
    share = turbulent_share(Re, Re_turbulent)
    Nu: Array = joined_by(Re, _where(share < 1.0, laminar), _where(share > 0.0, turbulent))
    if factors is not None:
        Nu = Nu * regime_factor(share, factors)
    regime = (Re >= RE_LAMINAR).astype(np.int8) + (Re >= Re_turbulent)
    return Nu, regime


def _where(needed: NDArray[np.bool_], branch: Callable[[Index], Array]) -> Array:
    if np.all(needed):
        return branch(...)
    result = np.zeros(np.shape(needed))
    if np.any(needed):
        result[needed] = branch(needed)
    return result


FACTOR_RAMP = 0.1
"""Share of the transition at each end over which one relation's factor passes into the next one's."""


def regime_factor(share: Array, factors: Factors) -> Array:
    """The factor of the relation in charge, ramped at the ends of the transition so that Nu keeps no step there."""
    laminar, transitional, turbulent = factors
    inner = np.minimum(np.minimum(share, 1.0 - share) / FACTOR_RAMP, 1.0)
    outer = np.where(share < 0.5, laminar, turbulent)
    return outer + inner * (transitional - outer)


def excursions_by_regime(
    Re: Real,
    joined_by: Correlation,
    *,
    laminar: tuple[Correlation, Mapping[str, Real]],
    turbulent: tuple[Correlation, Mapping[str, Real]],
    wall: Wall,
) -> tuple[Excursion, ...]:
    """Excursions of the two branches and of their wall factors, each judged only where it has a share in the result.

    A branch is a relation and its arguments but Re, which is held at the branch's own limit.
    """
    Re_turbulent = joined_by.valid[0].high
    share = turbulent_share(np.asarray(Re), Re_turbulent)
    judged: list[tuple[Correlation, NDArray[np.bool_], Mapping[str, Real]]] = [
        (laminar[0], share < 1.0, {"Re": np.minimum(Re, RE_LAMINAR), **laminar[1]}),
        (turbulent[0], share > 0.0, {"Re": np.maximum(Re, Re_turbulent), **turbulent[1]}),
    ]
    if wall.gas:
        judged.append((wall_factor_gas_turbulent, share > 0.0, {"T_ratio": wall.T}))
    else:
        judged.append((wall_factor_liquid_laminar, share < 1.0, {"mu_ratio": wall.mu}))
        judged.append((wall_factor_liquid_turbulent, share > 0.0, {"Pr_ratio": wall.Pr}))
    found = []
    for relation, used, arguments in judged:
        if np.any(used):
            inside = {name: np.broadcast_to(value, np.shape(used))[used] for name, value in arguments.items()}
            part = float(np.mean(used))
            found += [replace(e, share=e.share * part) for e in relation.excursions(**inside)]
    return tuple(found)
