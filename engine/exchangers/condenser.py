"""Steam condensing on a tube: which relation holds on which of its surfaces, lying or standing.

Outside a lying tube Nusselt's film, in a bundle with Kern's factor of the rows; on a standing tube the laminar, wavy or
turbulent film by its load, as if the whole height were at the cell's temperature difference. Inside, the greater of
the film that runs down the wall (Chato's in a lying tube) and of Boyko and Kruzhilin's annular film for complete
condensation: the one does not know the vapour's shear, the other not the slow end. Vapour shear outside tubes and
the fall of pressure along the way are not counted.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from engine.correlations import Array, Correlation, Excursion, condensing
from engine.exchangers import REGIMES, Film
from engine.fluids import Properties

QUALITIES = (np.arange(50) + 0.5) / 50
"""Vapour qualities at which a local film is averaged along the way."""
STANDING = (condensing.nusselt_vertical, condensing.kutateladze_wavy, condensing.labuntsov_turbulent)


@dataclass(frozen=True, kw_only=True)
class Condensing:
    """Condensing steam in every cell, (P, n) or (P, 1)."""

    dT: Array
    """From saturation down to the surface [K], above 0."""
    condensate: Properties
    """At the mean of saturation and surface."""
    rho_v: Array
    mu_v: Array
    h_fg: Array
    p_reduced: Array
    flow: Array
    """(P,) all that condenses [kg/s]."""
    tubes_plugged: Array
    """(P,) per shell."""
    factors: Mapping[str, Array] = field(default_factory=dict)
    """Relation name to a (P,) multiplier: how the scatter of a relation is propagated."""

    def factor_of(self, relation: Correlation) -> Array | float:
        """The (P, 1) multiplier of one relation; 1 where none is propagated."""
        return self.factors[relation.name][:, None] if relation.name in self.factors else 1.0

    @property
    def h_fg_film(self) -> Array:
        return np.asarray(condensing.latent_heat(self.h_fg, self.condensate.cp, self.dT))


@dataclass(frozen=True, kw_only=True)
class CondensingFilm(Film):
    """A condensing film: it has no bulk Re, Pr or velocity, which are NaN."""

    acting: Mapping[Correlation, NDArray[np.bool_]]
    """Where each relation gives h, (P, n)."""
    Re_film: Array
    """4 Γ/mu of the condensate where it leaves the tube, or the lowest tube of a row."""
    Re_vapour: Array
    """Of all the vapour in its tube, as it enters; 0 outside tubes."""

    def relations_of(self, point: int) -> tuple[Correlation, ...]:
        return tuple(relation for relation, where in self.acting.items() if where[point].any())

    def excursions_of(self, point: int) -> tuple[Excursion, ...]:
        found: list[Excursion] = []
        for relation in self.relations_of(point):
            where = self.acting[relation][point]
            arguments = {
                "Re_film": self.Re_film[point][where],
                "Re_vapour": np.broadcast_to(self.Re_vapour[point], where.shape)[where],
            }
            found += relation.excursions(**arguments)
        return tuple(found)


@dataclass(frozen=True, kw_only=True)
class CondensingSurface:
    """The surface of a tube that steam condenses on."""

    inside: bool
    vertical: bool
    diameter: float
    """Of this surface [m]."""
    height: float
    """Length of one tube or leg [m]: down it the film runs where it stands."""
    rows: float = 1.0
    """Tubes in a vertical row that drip on each other."""
    branches: Callable[[Array], Array] = np.ones_like
    """Tubes that the flow is split over, by the number of those plugged."""
    film_factor: float = 1.0

    def film(self, at: Condensing) -> CondensingFilm:
        Re_vapour = np.zeros_like(at.rho_v)
        if not self.inside:
            h, Re_film, acting = self._falling(at)
        else:
            down, Re_film, acting = self._falling(at)
            Re_vapour = self._tube_Re(at, at.mu_v)
            shear = self._annular(at) * at.factor_of(condensing.boyko_kruzhilin)
            sheared = shear > down
            h = np.maximum(down, shear)
            acting = {relation: where & ~sheared for relation, where in acting.items()}
            acting[condensing.boyko_kruzhilin] = sheared
        none = np.full_like(h, np.nan)
        return CondensingFilm(
            h=h * self.film_factor,
            Re=none,
            Pr=none,
            velocity=none,
            regime=np.full(h.shape, REGIMES.index("condensing"), dtype=np.int8),
            relations=(next(iter(acting)),) * len(REGIMES),
            acting=acting,
            Re_film=Re_film,
            Re_vapour=Re_vapour,
        )

    def second_opinions(self, at: Condensing) -> dict[str, Array]:
        """h by other relations and by those that the default outweighs, by name, at mean conditions (P,)."""
        found: dict[Correlation, Array] = {}
        if self.inside:
            found[condensing.boyko_kruzhilin] = self._annular(at)
            found[condensing.shah_1979] = self._shah(at)
        if self.vertical:
            found[condensing.nusselt_vertical] = condensing.nusselt_vertical(*self._film(at), at.dT, self.height)
        elif self.inside:
            found[condensing.chato] = condensing.chato(*self._film(at), at.dT, self.diameter)
        elif self.rows > 1:
            of_one = condensing.nusselt_horizontal(*self._film(at), at.dT, self.diameter)
            found[condensing.nusselt_rows] = of_one * condensing.nusselt_rows(self.rows)
        return {relation.name: h.mean(axis=1) * self.film_factor for relation, h in found.items()}

    @staticmethod
    def _film(at: Condensing) -> tuple[Array, Array, Array, Array, Array]:
        c = at.condensate
        return c.k, c.rho, at.rho_v, c.mu, at.h_fg_film

    def _falling(self, at: Condensing) -> tuple[Array, Array, dict[Correlation, NDArray[np.bool_]]]:
        """h of the film that gravity drains, its Re at the end, and which relation gives it where."""
        k, rho_l, rho_v, mu, h_fg = self._film(at)
        if self.vertical:
            h, Re = condensing.vertical_film(k, rho_l, rho_v, mu, at.condensate.cp, h_fg, at.dT, self.height)
            limits = (condensing.RE_WAVY, condensing.RE_TURBULENT)
            regime = sum((Re >= limit for limit in limits), np.zeros(Re.shape, dtype=int))
            acting = {relation: regime == i for i, relation in enumerate(STANDING)}
            factor = sum(where * at.factor_of(relation) for relation, where in acting.items())
            return h * factor, Re, acting
        relation = condensing.chato if self.inside else condensing.nusselt_horizontal
        h = relation(k, rho_l, rho_v, mu, h_fg, at.dT, self.diameter) * at.factor_of(relation)
        everywhere = np.ones(h.shape, dtype=bool)
        acting = {relation: everywhere}
        if self.rows > 1:
            h = h * condensing.kern_rows(self.rows) * at.factor_of(condensing.kern_rows)
            acting[condensing.kern_rows] = everywhere
        return h, 4 * np.pi * self.diameter * h * at.dT * self.rows / (mu * h_fg), acting

    def _tube_Re(self, at: Condensing, mu: Array) -> Array:
        """Of the whole flow in a tube with the viscosity of one phase."""
        flow = at.flow / self.branches(at.tubes_plugged)
        return np.asarray(4 * flow[:, None] / (np.pi * self.diameter * mu))

    def _annular(self, at: Condensing) -> Array:
        c = at.condensate
        Re_L = self._tube_Re(at, c.mu)
        ends = [
            condensing.boyko_kruzhilin(Re_L, c.Pr, c.k, self.diameter, c.rho, at.rho_v, quality) for quality in (0, 1)
        ]
        return np.asarray(0.5 * (ends[0] + ends[1]))

    def _shah(self, at: Condensing) -> Array:
        """(P, 1), mean along the way, quality falling evenly from 1 to 0."""
        c = at.condensate
        Re_L = self._tube_Re(at, c.mu)
        local = condensing.shah_1979(Re_L, c.Pr, c.k, self.diameter, at.p_reduced, QUALITIES)
        return np.asarray(local.mean(axis=1, keepdims=True))


__all__ = ["Condensing", "CondensingFilm", "CondensingSurface"]
