"""The condensing steam of a case: what a kilogram of it gives, its film, and the share of the area that it floods.

The condensing side stands at the saturation temperature of its chest over the whole condensing area (Cr = 0). A slight
superheat is taken off by condensation on the wet wall, so it counts in the heat of a kilogram and needs no area of its
own. Where less steam comes than the area would condense, the chest settles lower; steam that a valve lets down to that
pressure keeps its enthalpy. Subcooled condensate stands in a flooded share of the area, where the cold fluid enters:
there it cools in counterflow, by the greater of free convection and the film of its own slow flow.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from scipy.constants import g

from engine import fluids
from engine.case import Case, SteamFluid
from engine.correlations import Array, condensing
from engine.effectiveness import log_mean
from engine.exchangers import Cells, Flowing
from engine.exchangers.condenser import Condensing, CondensingSurface
from engine.fluids import Fluid, Properties, SaturationLine
from engine.stated import Side

LEAST_DT = 1e-3
"""From saturation to the surface [K]: below it a film is so good that its resistance is of no account."""
MOST_FLOODED = 0.9
"""Of the area."""
ROUNDS = 2
"""For the surface under condensate, on which free convection depends weakly."""


@dataclass(frozen=True, kw_only=True)
class Flooded:
    """The share of the area that stands under condensate; (P,) arrays."""

    share: Array
    heat: Array
    """Passed through it [W]."""
    r: Mapping[str, Array]
    """Resistances by name on the outside bare area [m²K/W]."""
    mtd: Array
    rise: Array
    """Of the cold fluid [K]."""

    @property
    def U(self) -> Array:
        return np.asarray(1.0 / sum(self.r.values()))


@dataclass(frozen=True, kw_only=True)
class Steam:
    """Steam as a case states it."""

    case: Case
    side: Side
    surface: CondensingSurface
    line: SaturationLine
    T_sat: float
    """At the stated pressure [K]."""
    superheat: float
    subcooling: float
    loss: float
    """Heat that it gives to the surroundings [W]."""

    @cached_property
    def condensate(self) -> Fluid:
        return self.case.fluid(self.side)

    @cached_property
    def _superheat_over_cp(self) -> float:
        """Heat of the superheat at the stated pressure over the specific heat of saturated vapour [K]."""
        saturation = fluids.saturation(self.case.p_in(self.side))
        heat = saturation.heat(self.superheat) - saturation.h_fg
        return heat / float(self.line.vapour(self.T_sat).cp)

    def enthalpy(self, T_supply: Array) -> Array:
        """As it comes [J/kg], saturated at T_supply and superheated as stated."""
        saturated = self.line.enthalpy(T_supply, "vapour")
        return saturated + self._superheat_over_cp * self.line.vapour(T_supply).cp if self.superheat else saturated

    def heat(self, T_supply: Array, T_sat: Array) -> Array:
        """What a kilogram gives [J/kg] that comes saturated at T_supply, or at T_sat where that is more, and leaves a
        chest at T_sat."""
        return sum(self.parts(T_supply, T_sat).values(), np.zeros_like(T_sat))

    def parts(self, T_supply: Array, T_sat: Array) -> dict[str, Array]:
        """The same by zone: what is above saturation in the chest, the latent heat, what is below."""
        vapour, liquid = self.line.enthalpy(T_sat, "vapour"), self.line.enthalpy(T_sat, "liquid")
        return {
            "desuperheating": self.enthalpy(np.maximum(T_supply, T_sat)) - vapour,
            "condensing": vapour - liquid,
            "subcooling": liquid - self.line.enthalpy(T_sat - self.subcooling, "liquid"),
        }

    def subcooled(self, T_supply: Array, T_sat: Array, passed: Array) -> Array:
        """Heat [W] that the condensate still gives where the area above it passes `passed`."""
        parts = self.parts(T_supply, T_sat)
        return np.asarray((passed + self.loss) * parts["subcooling"] / (parts["desuperheating"] + parts["condensing"]))

    def at(
        self, T_sat: Array, T_surface: Array, flow: Array, tubes_plugged: Array, factors: Mapping[str, Array]
    ) -> Condensing:
        """What its film is computed from: T_sat and flow (P,), T_surface (P, n)."""
        T = T_sat[:, None]
        dT = np.maximum(T - T_surface, LEAST_DT)
        vapour, film = self.line.vapour(T_sat), self.line.liquid(T - 0.5 * dT)
        known = {name: getattr(film, name) for name in ("rho", "cp", "mu", "k")}
        doubted = {name: value * factors[name][:, None] if name in factors else value for name, value in known.items()}
        return Condensing(
            dT=dT,
            condensate=Properties(**doubted, origin=film.origin),
            rho_v=vapour.rho[:, None],
            mu_v=vapour.mu[:, None],
            h_fg=self.line.h_fg(T_sat)[:, None],
            p_reduced=(self.line.p(T_sat) / self.line.p_critical)[:, None],
            flow=flow,
            tubes_plugged=tubes_plugged,
            factors=factors,
        )

    def flooded(
        self,
        cells: Cells,
        at: Flowing,
        *,
        heat: Array,
        T_sat: Array,
        T_cold: Array,
        C_cold: Array,
        area: Array,
        r: Mapping[str, Array],
    ) -> Flooded:
        """The share that passes `heat` [W] on its way down from T_sat; arrays (P,).

        `at`: the condensate as a liquid on its way through `cells`, (P, 1). T_cold [K] and C_cold [W/K]: of the cold
        fluid as it enters; r: the resistances there, in which the condensing film is replaced.
        """
        rise = heat / C_cold
        ends = (T_sat - T_cold - rise, T_sat - self.subcooling - T_cold)
        mtd = log_mean(*(np.maximum(end, 1e-6) for end in ends))
        T, T_other = at.T[:, 0], T_cold + 0.5 * rise
        forced, surface = self.single_phase(cells, at), at.T_wall[:, 0]
        name = f"{self.side} film"
        ratio = self.case.exchanger.area_ratio if self.side == "inside" else 1.0
        r = dict(r)
        for _ in range(ROUNDS):
            r[name] = ratio / np.maximum(forced, self._free(T, surface))
            surface = T - (T - T_other) * r[name] / sum(r.values())
        share = heat * sum(r.values()) / (area * mtd)
        return Flooded(share=np.minimum(share, MOST_FLOODED), heat=heat, r=r, mtd=mtd, rise=rise)

    def single_phase(self, cells: Cells, at: Flowing) -> Array:
        """(P,) mean h of its condensate or vapour that fills the passage, (P, 1), by the exchanger's own film."""
        h = self.case.exchanger.film(self.side, cells, at).h
        return np.asarray((h * np.ones(cells.layout.n_cells)) @ cells.layout.area_share)

    def _free(self, T: Array, T_surface: Array) -> Array:
        """h of free convection under condensate; none is known inside a tube."""
        if self.surface.inside:
            return np.zeros_like(T)
        length = self.surface.height if self.surface.vertical else self.surface.diameter
        relation = condensing.churchill_chu_vertical if self.surface.vertical else condensing.churchill_chu_horizontal
        film = self.line.liquid(0.5 * (T + T_surface))
        rho = [self.line.liquid(x).rho for x in (T, T_surface)]
        nu = film.mu / film.rho
        Ra = g * np.abs(rho[1] / rho[0] - 1) * length**3 / nu**2 * film.Pr
        return np.asarray(relation(Ra, film.Pr) * film.k / length * self.surface.film_factor)


@dataclass(frozen=True, kw_only=True)
class Condensed:
    """What the condensing side of solved points does; arrays (P,)."""

    steam: Steam
    T_sat: Array
    """In the chest [K]: as supplied, or lower where less steam comes than the area would condense."""
    flow: Array
    """What condenses [kg/s]."""
    flooded: Flooded | None


def steam_of(case: Case) -> Steam | None:
    """The steam of a case; None where nothing condenses."""
    side = case.steam_side
    if side is None:
        return None
    fluid, surface = case.stream(side).fluid, case.exchanger.condensing_surface(side)
    assert isinstance(fluid, SteamFluid)
    assert isinstance(surface, CondensingSurface)
    return Steam(
        case=case,
        side=side,
        surface=surface,
        line=fluids.saturation_line(),
        T_sat=fluids.saturation(case.p_in(side)).T_sat,
        superheat=float(fluid.steam.superheat),
        subcooling=float(fluid.steam.subcooling),
        loss=float(case.exchanger.heat_loss) if side == "outside" else 0.0,
    )


__all__ = ["MOST_FLOODED", "Flooded", "Steam", "steam_of"]
