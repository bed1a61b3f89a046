"""What an exchanger must offer to be rated, and the register of types.

Geometry speaks of the inside and the outside of the tube wall. The leading axis of every array is the operating
point (P), the second the cell (n). An exchanger receives `Properties`, never a fluid's name.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from engine.correlations import Array, Correlation, Excursion, Source
from engine.correlations.losses import Figure
from engine.exchangers.layout import Layout
from engine.fluids import Properties
from engine.stated import Problem, Side

REGIMES = ("laminar", "transitional", "turbulent", "condensing")


@dataclass(frozen=True, kw_only=True)
class Cells:
    """How an exchanger is cut for the march, or left whole for a mean-property rating.

    Cells are numbered in the order in which the inside fluid meets them. `start` and `end` give, per side, where in its
    own leg or pass a cell begins and ends [m] in that side's direction; `leg` the length over which the entrance of
    that side develops.
    """

    layout: Layout
    start: Mapping[Side, Array]
    end: Mapping[Side, Array]
    leg: Mapping[Side, float]
    nodes: Cells | None = None
    """Slivers of the cells, `n_nodes` a cell, at which a film that falls off along the leg is looked at more closely;
    a side that has none there does not change within a cell."""
    weights: Array | None = None
    """(n, n_nodes) share of each sliver in its cell."""


class MadeCells(dict[tuple[str, int], Cells]):
    """The cells that an exchanger has been cut into already: they never change, and cutting takes a while."""

    def once(self, kind: str, fineness: int, cut: Callable[[], Cells]) -> Cells:
        if (kind, fineness) not in self:
            self[kind, fineness] = cut()
        return self[kind, fineness]


def entrance_nodes(start: Array, end: Array, from_end: NDArray[np.bool_], leg: float) -> tuple[Array, Array]:
    """Places (n, 3) within the cells of a leg, and their weights, at which to average what an entrance makes fall off.

    Gauss's nodes in the cube root of the distance from the nearer entrance, in which developing films are smooth;
    `from_end` says for which cells that entrance is at the end of the leg.
    """
    near, far = np.where(from_end, leg - end, start), np.where(from_end, leg - start, end)
    t, g = np.polynomial.legendre.leggauss(3)
    low, high = np.cbrt(near)[:, None], np.cbrt(far)[:, None]
    s = low + (high - low) * (t + 1) / 2
    weights = g / 2 * (high - low) * 3 * s**2 / (far - near)[:, None]
    x = np.where(from_end[:, None], leg - s**3, s**3)
    return x, weights / weights.sum(axis=1, keepdims=True)


def sliver(x: Array) -> tuple[Array, Array]:
    """Begin and end of a piece around each place, short enough for its mean to be the local value."""
    return x * (1 - 1e-4), x * (1 + 1e-4)


@dataclass(frozen=True, kw_only=True)
class Flowing:
    """One side's fluid in every cell: what a film or a drop is computed from."""

    flow: Array
    """(P,) mass flow of the whole stream [kg/s]."""
    T: Array
    """(P, n) bulk temperature [K]."""
    T_wall: Array
    """(P, n) temperature of the surface that the fluid touches [K]."""
    bulk: Properties
    mu_wall: Array
    Pr_wall: Array
    gas: bool
    heated: NDArray[np.bool_]
    """(P, 1) True where this side is the cold one."""
    R_fouling: Array
    """(P,) on this side's own surface [m²K/W]."""
    tubes_plugged: Array
    """(P,) per shell."""
    factors: Mapping[str, Array] = field(default_factory=dict)
    """Relation name to a (P,) multiplier: how the scatter of a relation is propagated."""

    def factors_of(self, relations: Sequence[Correlation]) -> tuple[Array, Array, Array] | None:
        """The multipliers of a film's three relations, each (P, 1); None where none is propagated."""
        if not any(relation.name in self.factors for relation in relations):
            return None
        one = np.ones((np.size(self.flow), 1))
        laminar, transitional, turbulent = (
            self.factors[r.name][:, None] if r.name in self.factors else one for r in relations
        )
        return laminar, transitional, turbulent

    def factor_of(self, relation: Correlation) -> Array | float:
        """The (P,) multiplier of one relation; 1 where none is propagated."""
        return self.factors.get(relation.name, 1.0)


@dataclass(frozen=True, kw_only=True)
class Film:
    """One side's film in every cell. `h` refers to this side's own bare surface."""

    h: Array
    Re: Array
    Pr: Array
    velocity: Array
    regime: NDArray[np.integer[Any]]
    """Index into REGIMES."""
    relations: Sequence[Correlation]
    """The relation that stands behind each regime."""


@dataclass(frozen=True, kw_only=True)
class Derived:
    """A figure that a table or a rule gives where none is stated."""

    path: str
    value: float
    quantity: str
    """Empty for a count."""
    source: Source
    size: str = ""
    """The stated field whose size this is; empty where the figure is assumed."""


class Exchanger(Protocol):
    """The duties of an exchanger type. Arrays as in `Flowing`; U and resistances on the outside bare tube area."""

    @property
    def area(self) -> float:
        """Outside bare tube area of the whole exchanger that is open to flow [m²]."""

    def area_at(self, tubes_plugged: Array) -> Array:
        """The same with so many tubes plugged in each shell, of its shape; 0 or less where none is left open."""

    def derived(self) -> list[Derived]:
        """What follows from tables and rules where the user stated no figure."""

    @property
    def area_ratio(self) -> float:
        """Outside area over inside area of the tube."""

    def cells(self, fineness: int = 1) -> Cells: ...
    def whole(self, fineness: int = 1) -> Cells:
        """One leg or pass that stands for all, cut as in `cells`: for ratings at mean properties."""

    def film(self, side: Side, cells: Cells, at: Flowing) -> Film: ...
    def second_opinions(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        """h by other published relations, by name, at mean conditions (P,)."""

    def excursions(self, side: Side, cells: Cells, at: Flowing, film: Film) -> tuple[Excursion, ...]: ...
    def drop(self, side: Side, cells: Cells, at: Flowing, film: Film) -> dict[str, Array]:
        """Pressure drop by part, each (P,) [Pa]: between the stated nozzles or leg ends, without static head."""

    def second_opinion_drops(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        """Total drop by other published relations or coefficients, by name, at mean conditions (P,)."""

    def drop_relation(self, side: Side) -> Correlation:
        """The relation whose scatter the drop carries."""

    def supporting(self, side: Side, regimes: Collection[str], gas: bool) -> tuple[Correlation, ...]:
        """What film and drop of a side that flows in these regimes rest on beside the film's relations and the drop's:
        factors of the wall, friction in another regime, the bank within a bundle, fins."""

    def loss_coefficients(self, side: Side) -> tuple[Figure, ...]:
        """The loss coefficients that enter the drop."""

    def wall_resistance(self, T_metal: Array) -> Array:
        """Of the tube wall [m²K/W], at the metal temperature."""

    def fouling_resistance(self, side: Side, R: Array) -> Array:
        """A stated resistance on the side's own surface, seen on the outside bare area."""

    def effectiveness(self, NTU: Array, Cr: Array, inside_is_min: NDArray[np.bool_]) -> Array | str:
        """By the exact relation of the arrangement, or the reason why there is none."""

    def driving_force(self, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> tuple[Array, Array] | str:
        """LMTD of the arrangement's ends and the factor F at these terminal temperatures, or the reason why not.

        F is 0 where no area gives these temperatures."""

    @property
    def F_through_effectiveness(self) -> bool:
        """Whether F is only known by inverting ε, so that LMTD and F are no second way beside it."""

    def problems(self) -> Any: ...


__all__ = [
    "REGIMES",
    "Cells",
    "Derived",
    "Exchanger",
    "Film",
    "Flowing",
    "Layout",
    "Problem",
    "Properties",
    "Side",
    "entrance_nodes",
    "sliver",
]
