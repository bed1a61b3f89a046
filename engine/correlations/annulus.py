"""Concentric annuli heated or cooled through the inner tube, plain or with longitudinal fins on it.

Re and Nu are on the hydraulic diameter d_h = D_o - D_i of a plain annulus (4 A/P of a finned one); a = D_i/D_o.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from engine.correlations import Array, Correlation, Excursion, Range, correlation
from engine.correlations.inside_tubes import (
    AS_BULK,
    RE_LAMINAR,
    Codes,
    Factors,
    Index,
    Real,
    Wall,
    at,
    cell_entrance,
    cell_mean,
    check_above_zero,
    checked_cells,
    excursions_by_regime,
    konakov,
    nusselt_tube,
    sieder_tate_turbulent,
    through_transition,
    transition,
    turbulent_share,
)
from engine.correlations.losses import RE_FRICTION_TURBULENT, churchill, friction_wall_factor
from engine.correlations.sources import (
    GNIELINSKI_2009,
    HARPER_BROWN_1922,
    KERN_1950,
    LAMINAR_ANNULUS_FRICTION,
    LAMINAR_ANNULUS_HEAT,
    VDI_G1,
    VDI_G2,
)

ANNULUS_NU = (
    (0.02, 32.2982),
    (0.05, 17.4588),
    (0.10, 11.5591),
    (0.15, 9.3306),
    (0.20, 8.1296),
    (0.25, 7.3707),
    (0.30, 6.8452),
    (0.40, 6.1626),
    (0.50, 5.7381),
    (0.60, 5.4490),
    (0.70, 5.2398),
    (0.80, 5.0820),
    (0.90, 4.9590),
    (1.00, 4.8608),
)
"""(a, developed laminar Nu): inner wall isothermal, outer wall adiabatic; exact. The last row is parallel plates."""

_RATIO, _NU = np.array(ANNULUS_NU).T
# a^0.8 Nu is smooth in a^(1/4): degree 6 holds the table and the exact solution between its rows within 2e-5.
_DEVELOPED = np.polynomial.Polynomial.fit(_RATIO**0.25, _RATIO**0.8 * _NU, 6)

_TABLE = Range(argument="a", low=float(_RATIO[0]), high=float(_RATIO[-1]))
_SHORTEST = Range(argument="d_h_over_L", low=0.0, high=1.0)


# Laminar flow


@correlation(
    gives="developed Nu",
    applies="laminar flow in an annulus, inner wall at constant temperature, outer wall adiabatic",
    source=LAMINAR_ANNULUS_HEAT,
    valid=(Range(argument="Re", high=RE_LAMINAR), _TABLE),
)
def annulus_developed(a: Array) -> Array:
    """Exact by ratio. Raises ValueError outside the table."""
    if np.any(_TABLE.outside(np.asarray(a))):
        raise ValueError(
            f"The diameter ratio D_i/D_o of an annulus must lie within {_TABLE.low:g} and {_TABLE.high:g}; "
            f"given {np.min(a):g} to {np.max(a):g}."
        )
    Nu: Array = _DEVELOPED(np.sqrt(np.sqrt(a))) / a**0.8
    return Nu


@correlation(
    gives="developed Nu",
    applies="laminar flow in an annulus, inner wall at constant temperature, outer wall adiabatic",
    source=VDI_G2,
    valid=(Range(argument="Re", high=RE_LAMINAR), Range(argument="a", low=0.0, high=1.0)),
    role="second opinion",
)
def vdi_annulus_developed(a: Array) -> Array:
    """Printed fit, up to 2.9 % below the exact value at a = 0.1."""
    return 3.66 + 1.2 * a**-0.8


@correlation(
    gives="mean Nu",
    applies="laminar flow in an annulus, inner wall at constant temperature, outer wall adiabatic",
    source=VDI_G2,
    valid=(
        Range(argument="Re", high=RE_LAMINAR),
        Range(argument="Pr", low=0.1, high=1000.0),
        _SHORTEST,
        Range(argument="a", low=0.1, high=0.95),
    ),
    scatter=0.10,
)
def annulus_laminar(Re: Array, Pr: Array, d_h_over_L: Array, a: Array) -> Array:
    """Mean Nusselt number from the inlet to L: developed, thermal entry and hydrodynamic entry terms."""
    Gz = Re * Pr * d_h_over_L
    developed_cubed: Array = annulus_developed(a) ** 3
    thermal_entry_cubed = (1.615 * (1.0 + 0.14 / np.sqrt(a))) ** 3 * Gz
    hydrodynamic_entry_cubed = np.sqrt(2.0 / (1.0 + 22.0 * Pr)) * Gz * np.sqrt(Gz)
    return np.cbrt(developed_cubed + thermal_entry_cubed + hydrodynamic_entry_cubed)


def reynolds_star(Re: Real, a: Real) -> Array:
    """Re* = Re [(1 + a^2) ln a + 1 - a^2]/[(1 - a)^2 ln a]: the Re at which 64/Re* is the exact laminar friction."""
    ln_a = np.log(a)
    return np.asarray(Re * ((1.0 + a * a) * ln_a + 1.0 - a * a) / ((1.0 - a) ** 2 * ln_a))


# Turbulent flow


@correlation(
    gives="mean Nu",
    applies="turbulent flow in an annulus, inner wall heated, outer wall adiabatic",
    source=GNIELINSKI_2009,
    valid=(
        Range(argument="Re", low=1.0e4, high=1.0e6),
        Range(argument="Pr", low=0.1, high=1000.0),
        _SHORTEST,
        Range(argument="a", low=0.0, high=1.0),
    ),
    scatter=0.10,
)
def annulus_turbulent(Re: Array, Pr: Array, d_h_over_L: Array, a: Array) -> Array:
    """Mean Nusselt number from the inlet to L."""
    xi_8: Array = konakov(reynolds_star(Re, a)) / 8.0
    k1 = 1.07 + 900.0 / Re - 0.63 / (1.0 + 10.0 * Pr)
    F_ann = 0.75 * a**-0.17
    developed = xi_8 * Re * Pr * F_ann / (k1 + 12.7 * np.sqrt(xi_8) * (np.cbrt(Pr) ** 2 - 1.0))
    return developed * (1.0 + np.cbrt(d_h_over_L) ** 2)


@correlation(
    gives="Nu",
    applies="turbulent flow of liquids in an annulus, by the equivalent diameter (D_o^2 - D_i^2)/D_i",
    source=KERN_1950,
    valid=(Range(argument="Re", low=1.0e4), Range(argument="Pr", low=0.7, high=16700.0)),
    scatter=0.20,
    role="second opinion",
)
def annulus_equivalent_diameter(Re: Array, Pr: Array, a: Array, mu_ratio: Array) -> Array:
    """Sieder and Tate's tube relation on the equivalent diameter, which is d_h (1 + 1/a); Re and Nu stay on d_h.

    Old hand calculations take this for heat and d_h = D_o - D_i for the drop. mu_ratio is mu_w/mu.
    """
    wider = 1.0 + 1.0 / a
    Nu: Array = sieder_tate_turbulent(Re * wider, Pr, mu_ratio) / wider
    return Nu


# The annulus film over all Re

ANNULUS_RELATIONS = (annulus_laminar, transition, annulus_turbulent)
"""The relation in charge of each regime code."""


def nusselt_annulus(
    Re: Real,
    Pr: Real,
    d_h: Real,
    a: Real,
    x1: Real,
    x2: Real,
    *,
    wall: Wall = AS_BULK,
    factors: Factors | None = None,
    joined_by: Correlation = transition,
) -> tuple[Array, Codes]:
    """Mean Nusselt number on d_h over cells between x1 and x2 from the inlet of their leg, and the regime.

    As `nusselt_tube`; a broadcasts too, and must lie within the table of developed laminar Nu.
    """
    Re, Pr, x1, x2 = checked_cells(Re, Pr, x1, x2)
    shape = np.broadcast_shapes(*(np.shape(v) for v in (Re, Pr, d_h, a, x1, x2)))
    Re_turbulent = joined_by.valid[0].high
    entrance = cell_entrance(d_h, x1, x2)

    def laminar(i: Index) -> Array:
        held = np.minimum(Re, RE_LAMINAR)
        Re_i, Pr_i, d_i, a_i, start, end = (at(v, shape, i) for v in (held, Pr, d_h, a, x1, x2))
        Nu: Array = cell_mean(lambda x: annulus_laminar(Re_i, Pr_i, d_i / x, a_i), start, end)
        return Nu * wall.laminar_factor(shape, i)

    def turbulent(i: Index) -> Array:
        held = np.maximum(Re, Re_turbulent)
        Re_i, Pr_i, d_over_L, a_i = (at(v, shape, i) for v in (held, Pr, entrance, a))
        Nu: Array = annulus_turbulent(Re_i, Pr_i, d_over_L, a_i)
        return Nu * wall.turbulent_factor(shape, i)

    return through_transition(np.broadcast_to(Re, shape), laminar, turbulent, factors=factors, joined_by=joined_by)


def excursions_annulus(
    Re: Real, Pr: Real, d_h: Real, a: Real, L: Real, *, wall: Wall = AS_BULK, joined_by: Correlation = transition
) -> tuple[Excursion, ...]:
    """The published limits that the film leaves, each relation judged only where it is used."""
    arguments = {"Pr": Pr, "d_h_over_L": np.divide(d_h, L), "a": a}
    return excursions_by_regime(
        Re, joined_by, laminar=(annulus_laminar, arguments), turbulent=(annulus_turbulent, arguments), wall=wall
    )


# Friction


@correlation(
    gives="Darcy friction factor",
    applies="developed laminar flow in an annulus",
    source=LAMINAR_ANNULUS_FRICTION,
    valid=(Range(argument="Re", high=RE_LAMINAR), Range(argument="a", low=0.0, high=1.0)),
    scatter=0.07,
)
def annulus_laminar_friction(Re: Array, a: Array) -> Array:
    """64/Re*, exact; 64/Re on the hydraulic diameter is up to a third too low."""
    return 64.0 / reynolds_star(Re, a)


@correlation(
    gives="Darcy friction factor",
    applies="turbulent flow in an annulus",
    source=VDI_G2,
    valid=(
        Range(argument="Re", low=RE_FRICTION_TURBULENT),
        Range(argument="a", low=0.0, high=1.0),
        Range(argument="roughness_ratio", low=0.0, high=0.05),
    ),
    scatter=0.07,
)
def annulus_turbulent_friction(Re: Array, a: Array, roughness_ratio: Array) -> Array:
    """Churchill's tube relation at Re*; roughness_ratio is on d_h."""
    f: Array = churchill(reynolds_star(Re, a), roughness_ratio)
    return f


def friction_annulus(Re: Real, a: Real, roughness_ratio: Real, *, wall: Wall = AS_BULK) -> Array:
    """Darcy friction factor on d_h at every Re, linear in Re across the transition, with the wall's viscosity.

    Raises ValueError where Re is not above zero.
    """
    check_above_zero(Re=Re)
    share = turbulent_share(np.asarray(Re), RE_FRICTION_TURBULENT)
    laminar = annulus_laminar_friction(np.minimum(Re, RE_LAMINAR), a)
    turbulent = annulus_turbulent_friction(np.maximum(Re, RE_FRICTION_TURBULENT), a, roughness_ratio)
    f: Array = (1.0 - share) * laminar + share * turbulent
    return f * friction_wall_factor(Re, wall)


# Longitudinal fins on the inner tube


@dataclass(frozen=True, kw_only=True)
class FinnedAnnulus:
    """Cross-section of an annulus with longitudinal fins on the inner tube; per metre of length, areas are perimeters.

    Raises ValueError where the fins do not fit.
    """

    D_o: float
    """Bore of the outer pipe [m]."""
    D_i: float
    """Outside diameter of the bare inner tube [m]."""
    count: int
    height: float
    thickness: float

    def __post_init__(self) -> None:
        gap = (self.D_o - self.D_i) / 2.0
        if not (self.count >= 1 and 0.0 < self.height <= gap and 0.0 < self.thickness * self.count < self.bare):
            raise ValueError(
                f"{self.count} fins {self.height:g} m high and {self.thickness:g} m thick do not fit: one "
                f"or more, no higher than the gap of {gap:g} m, with roots narrower together than the circumference "
                f"of {self.bare:g} m."
            )

    @property
    def bare(self) -> float:
        """Circumference of the bare tube [m], the base of the film coefficient."""
        return float(np.pi * self.D_i)

    @property
    def unfinned(self) -> float:
        """Circumference of the tube between the fins [m]."""
        return self.bare - self.count * self.thickness

    @property
    def finned(self) -> float:
        """Wetted perimeter of the fins, flanks and tips [m]."""
        return self.count * (2.0 * self.height + self.thickness)

    @property
    def flow_area(self) -> float:
        """Free cross-section [m2]."""
        return float(np.pi / 4.0 * (self.D_o**2 - self.D_i**2)) - self.count * self.height * self.thickness

    @property
    def d_h(self) -> float:
        """Four times the free area over the wetted perimeter, that of the outer pipe included [m]."""
        return 4.0 * self.flow_area / (float(np.pi * self.D_o) + self.unfinned + self.finned)

    def effective_share(self, h: Real, k: Real) -> Real:
        """(A_unfinned + efficiency A_fin)/A_bare: turns h on the wetted area into h on the bare tube.

        With a deposit, h is that of film and deposit in series, since both lie on the whole wetted area. The tip counts
        as half a thickness more height, as its area does.
        """
        efficiency: Real = fin_efficiency(h, k, self.thickness, self.height + self.thickness / 2.0)
        return (self.unfinned + efficiency * self.finned) / self.bare


@correlation(
    gives="fin efficiency",
    applies="straight fin of constant thickness, tip adiabatic, thin against its height",
    source=HARPER_BROWN_1922,
)
def fin_efficiency(h: Array, k: Array, thickness: Array, height: Array) -> Array:
    """tanh(m H)/(m H), m = sqrt(2 h/(k t))."""
    mH = np.sqrt(2.0 * h / (k * thickness)) * height
    return np.tanh(mH) / mH


@correlation(
    gives="mean Nu",
    applies="annulus with longitudinal fins on the inner tube, by the tube relations on d_h = 4 A/P",
    source=VDI_G1,
    valid=(
        Range(argument="Re", high=1.0e6),
        Range(argument="Pr", low=0.1, high=1000.0),
        Range(argument="d_h_over_L", low=0.0, high=1.0),
    ),
    scatter=0.30,
    scatter_origin="common practice: the tube relations are carried over to a finned duct",
)
def finned_annulus(Re: Array, Pr: Array, d_h_over_L: Array) -> Array:
    """Mean Nusselt number from the inlet to L, wall at the bulk state."""
    return nusselt_finned_annulus(Re, Pr, d_h_over_L, 0.0, 1.0)[0]


FINNED_RELATIONS = (finned_annulus, finned_annulus, finned_annulus)
"""The relation in charge of each regime code."""

nusselt_finned_annulus = nusselt_tube
"""As `nusselt_tube`, with d_h of the finned cross-section for d."""
