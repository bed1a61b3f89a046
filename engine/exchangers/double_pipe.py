"""Double-pipe exchanger: one inner pipe in one outer pipe, legs in series, banks in parallel, plain or finned."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from functools import cached_property
from typing import Annotated, Any, ClassVar, Literal

import numpy as np
from numpy.typing import NDArray
from pydantic import Field

from engine import effectiveness as exact
from engine.correlations import Array, Correlation, Excursion, annulus, inside_tubes, losses
from engine.exchangers import Cells, Derived, Film, Flowing, MadeCells, entrance_nodes, layout, sliver, standard_sizes
from engine.exchangers.condenser import CondensingSurface
from engine.stated import Choice, Count, Input, Problem, Side, Stated, Words

LENGTH = ("length",)


def length(name: str, example: str, high: float = 100.0, assumed: str = "", help: str = "") -> Stated:
    return Stated("length", name, help=help, above=0.0, high=high, assumed=assumed, example=example)


class Pipe(Input):
    """A pipe by nominal size and schedule, or by its two diameters."""

    nps: Annotated[str | None, Words("Nominal size", 12, help="Nominal pipe size in inches.", example="2")] = None
    schedule: Annotated[str | None, Words("Schedule", 12, example="40")] = None
    od: Annotated[float | None, length("Outside diameter", "60.3 mm", 5.0)] = None
    id: Annotated[float | None, length("Inside diameter", "52.5 mm", 5.0)] = None

    @cached_property
    def diameters(self) -> tuple[float, float]:
        """Outside and inside diameter [m]."""
        if self.nps is not None and self.schedule is not None:
            return standard_sizes.pipe(self.nps, self.schedule)
        assert self.od is not None
        assert self.id is not None
        return float(self.od), float(self.id)

    def problems(self) -> Iterator[Problem]:
        by_size = (self.nps is not None, self.schedule is not None)
        by_diameter = (self.od is not None, self.id is not None)
        if any(by_size) and any(by_diameter):
            yield Problem(path="", says="gives both a nominal size and diameters; allowed is one of the two")
        elif any(by_size) and not all(by_size):
            yield Problem(path="schedule" if self.schedule is None else "nps", says="is missing")
        elif any(by_diameter) and not all(by_diameter):
            yield Problem(path="id" if self.id is None else "od", says="is missing")
        elif not any(by_size) and not any(by_diameter):
            yield Problem(path="", says='needs either "nps" and "schedule", or "od" and "id"')
        elif all(by_size):
            try:
                standard_sizes.pipe(str(self.nps), str(self.schedule))
            except ValueError as error:
                yield Problem(path="", says=str(error))
        elif self.od is not None and self.id is not None and self.id >= self.od:
            says = f"{self.id * 1e3:.4g} mm is not smaller than the outside diameter, {self.od * 1e3:.4g} mm"
            yield Problem(path="id", says=says)


class Banks(Input):
    """Into how many equal streams each fluid is split."""

    inside: Annotated[int, Count("Inside branches", 1, 24, assumed="the inside fluid is not split")] = 1
    outside: Annotated[int, Count("Outside branches", 1, 24, assumed="the outside fluid is not split")] = 1

    def problems(self) -> Iterator[Problem]:
        if self.inside != self.outside and 1 not in (self.inside, self.outside):
            yield Problem(
                path="outside",
                says=f"{self.outside} beside {self.inside} inside: a side visits all banks in turn (1) or is split "
                f"equally over all of them ({max(self.inside, self.outside)})",
            )


class Factors(Input):
    """Multipliers on a side's own calculation: inserts, low fins, or a baseline calibrated on a clean test."""

    inside: Annotated[float, Stated("dimensionless", "Inside", above=0.0, high=10.0, example="1.0")] = 1.0
    outside: Annotated[float, Stated("dimensionless", "Outside", above=0.0, high=10.0, example="1.0")] = 1.0


class Fins(Input):
    """Longitudinal fins on the outside of the inner pipe."""

    count: Annotated[int, Count("Fins", 1, 200)]
    height: Annotated[float, length("Fin height", "12.7 mm", 0.2)]
    thickness: Annotated[float, length("Fin thickness", "0.9 mm", 0.05)]
    conductivity: Annotated[float, Stated("conductivity", "Fin conductivity", above=0.0, high=500.0, example="50 W/mK")]


class DoublePipe(Input):
    """The stated dimensions of a double pipe, and its films and drops.

    Legs in series within a bank, banks in parallel; in a bank the two fluids run counter or co-current in every leg.
    """

    type: Literal["double-pipe"] = "double-pipe"
    arrangement: Annotated[
        str,
        Choice("Arrangement", ("counter", "co-current"), assumed="counter-current, the usual piping (common practice)"),
    ] = "counter"
    inner_pipe: Pipe
    outer_pipe: Pipe
    inner_pipes: Annotated[int, Count("Inner pipes in one outer pipe", 1, 100, assumed="one inner pipe")] = 1
    leg_length: Annotated[float, length("Leg length", "6 m", 100.0, help="One straight leg, effective for heat.")]
    legs_in_series: Annotated[int, Count("Legs in series", 1, 200, help="Two a hairpin.", example="8")]
    banks_in_parallel: Banks = Banks()
    orientation: Annotated[
        str,
        Choice(
            "Orientation",
            ("horizontal", "vertical"),
            help="Of the legs; it decides how condensate drains.",
            assumed="horizontal, the usual position",
        ),
    ] = "horizontal"
    material: Annotated[str | None, Words("Inner pipe material", 60)] = None
    wall_conductivity: Annotated[
        float | None, Stated("conductivity", "Wall conductivity", above=0.0, high=500.0, example="50 W/mK")
    ] = None
    inside_roughness: Annotated[
        float,
        Stated(
            "length",
            "Roughness of the inner pipe's bore",
            low=0.0,
            high=5e-3,
            assumed="commercial steel pipe (common practice)",
            example="0.045 mm",
        ),
    ] = losses.COMMERCIAL_STEEL.value
    outside_roughness: Annotated[
        float,
        Stated(
            "length",
            "Roughness of the annulus",
            low=0.0,
            high=5e-3,
            assumed="commercial steel pipe (common practice)",
            example="0.045 mm",
        ),
    ] = losses.COMMERCIAL_STEEL.value
    fins: Fins | None = None
    bend_length: Annotated[
        float,
        Stated(
            "length",
            "Pipe length in one return bend",
            low=0.0,
            high=20.0,
            help="Counts for friction of the inside fluid, not for heat.",
            assumed="no wall friction in return bends beyond their loss coefficient",
            example="0.3 m",
        ),
    ] = 0.0
    inside_nozzle_id: Annotated[float | None, length("Inside nozzle bore", "52 mm", 3.0)] = None
    outside_nozzle_id: Annotated[float | None, length("Outside nozzle bore", "52 mm", 3.0)] = None
    deposit_conductivity: Annotated[
        float | None,
        Stated(
            "conductivity",
            "Deposit conductivity",
            above=0.0,
            high=50.0,
            help="When stated, fouling narrows the flow area.",
            example="1 W/mK",
        ),
    ] = None
    heat_loss: Annotated[
        float,
        Stated(
            "heat_flow",
            "Heat loss of the outside stream to the surroundings",
            low=-1e9,
            high=1e9,
            assumed="no loss to the surroundings",
            example="2 kW",
        ),
    ] = 0.0
    film_factor: Factors = Factors()
    dp_factor: Factors = Factors()

    @classmethod
    def idle(cls, given: Mapping[str, Any]) -> frozenset[str]:
        straight = given.get("legs_in_series") == 1 and not given.get("banks_in_parallel")
        return frozenset({"bend_length"} if straight else ())

    title: ClassVar[str] = "Double pipe"
    side_names: ClassVar[Mapping[Side, str]] = {"inside": "Inner pipe", "outside": "Annulus"}

    # --- geometry ---------------------------------------------------------------------------------------------------

    @cached_property
    def tube_od(self) -> float:
        return self.inner_pipe.diameters[0]

    @cached_property
    def tube_id(self) -> float:
        return self.inner_pipe.diameters[1]

    @cached_property
    def shell_id(self) -> float:
        """Bore of the outer pipe [m]."""
        return self.outer_pipe.diameters[1]

    @property
    def banks(self) -> int:
        return max(self.banks_in_parallel.inside, self.banks_in_parallel.outside)

    def branches(self, side: Side) -> int:
        """Into how many equal streams a side is split."""
        return self.banks_in_parallel.inside if side == "inside" else self.banks_in_parallel.outside

    def legs_on_path(self, side: Side) -> int:
        """Legs that one particle of the side's fluid passes."""
        return self.legs_in_series * self.banks // self.branches(side)

    @property
    def area(self) -> float:
        return float(np.pi * self.tube_od * self.leg_length * self.legs_in_series * self.banks)

    def area_at(self, tubes_plugged: Array) -> Array:
        return np.full(np.shape(tubes_plugged), self.area)

    def derived(self) -> list[Derived]:
        return [
            Derived(path=f"{name}.{end}", value=diameter, quantity="length", source=standard_sizes.ASME_B36, size=name)
            for name, pipe in (("inner_pipe", self.inner_pipe), ("outer_pipe", self.outer_pipe))
            if pipe.nps is not None
            for end, diameter in zip(("od", "id"), pipe.diameters, strict=True)
        ]

    @property
    def area_ratio(self) -> float:
        return self.tube_od / self.tube_id

    @cached_property
    def finned(self) -> annulus.FinnedAnnulus | None:
        if self.fins is None:
            return None
        return annulus.FinnedAnnulus(
            D_o=self.shell_id,
            D_i=self.tube_od,
            count=self.fins.count,
            height=float(self.fins.height),
            thickness=float(self.fins.thickness),
        )

    def cells(self, fineness: int = 1) -> Cells:
        """The legs cut into equal cells; `fineness` multiplies their number."""
        return self._made.once("cells", fineness, lambda: self._cut(self._cells_a_leg * fineness))

    def whole(self, fineness: int = 1) -> Cells:
        return self._made.once("whole", fineness, lambda: self._cut(self._cells_a_leg * fineness, legs=1, banks=1))

    @cached_property
    def _made(self) -> MadeCells:
        return MadeCells()

    @property
    def _cells_a_leg(self) -> int:
        legs = self.legs_in_series * (1 if self._both_split else self.banks)
        return max(2, -(-12 // legs))

    @property
    def _both_split(self) -> bool:
        return self.branches("inside") == self.branches("outside")

    def _cut(self, per_leg: int, legs: int | None = None, banks: int | None = None) -> Cells:
        legs = legs or self.legs_in_series
        # Banks over which both fluids are split run alike: one of them stands for all.
        banks = banks or (1 if self._both_split else self.banks)
        order = layout.banks(
            legs * per_leg,
            banks,
            arrangement="counter" if self.arrangement == "counter" else "co-current",
            inside="split" if self.branches("inside") > 1 else "in turn",
            outside="split" if self.branches("outside") > 1 else "in turn",
        )
        leg = float(self.leg_length)
        counter = self.arrangement == "counter"
        edges = np.linspace(0.0, leg, per_leg + 1)
        start, end = np.tile(edges[:-1], legs * banks), np.tile(edges[1:], legs * banks)
        x, weights = entrance_nodes(start, end, counter & (start + end > leg * (1 + 1e-9)), leg)
        begin, stop = sliver(x.ravel())
        begin_outside, stop_outside = sliver((leg - x if counter else x).ravel())
        legs_of: dict[Side, float] = {"inside": leg, "outside": leg}
        nodes = Cells(
            layout=order,
            start={"inside": begin, "outside": begin_outside},
            end={"inside": stop, "outside": stop_outside},
            leg=legs_of,
        )
        return Cells(
            layout=order,
            start={"inside": start, "outside": leg - end if counter else start},
            end={"inside": end, "outside": leg - start if counter else end},
            leg=legs_of,
            nodes=nodes,
            weights=weights,
        )

    # --- films ------------------------------------------------------------------------------------------------------

    def _bore(self, R_inside: Array) -> Array:
        """(P, 1) free bore of the inner pipe, narrowed by its deposit when the deposit's conductivity is stated."""
        if self.deposit_conductivity is None:
            return np.full((np.size(R_inside), 1), self.tube_id)
        return (self.tube_id * np.exp(-2 * self.deposit_conductivity * R_inside / self.tube_id))[:, None]

    def _core(self, R_outside: Array) -> Array:
        """(P, 1) diameter of the annulus' inner wall, grown by its deposit when that conductivity is stated."""
        if self.deposit_conductivity is None or self.finned is not None:
            return np.full((np.size(R_outside), 1), self.tube_od)
        return (self.tube_od * np.exp(2 * self.deposit_conductivity * R_outside / self.tube_od))[:, None]

    def _passage(self, side: Side, at: Flowing) -> tuple[Array, Array, Array]:
        """(P, 1) flow area [m²], hydraulic diameter [m] and diameter of the surface that the fluid touches [m]."""
        if side == "inside":
            d = self._bore(at.R_fouling)
            return np.pi / 4 * d**2, d, d
        if self.finned is not None:
            one = np.ones((np.size(at.flow), 1))
            return self.finned.flow_area * one, self.finned.d_h * one, self.tube_od * one
        core = self._core(at.R_fouling)
        return np.pi / 4 * (self.shell_id**2 - core**2), self.shell_id - core, core

    @staticmethod
    def _wall(at: Flowing) -> inside_tubes.Wall:
        return inside_tubes.Wall(mu=at.mu_wall / at.bulk.mu, Pr=at.Pr_wall / at.bulk.Pr, T=at.T_wall / at.T, gas=at.gas)

    def film(self, side: Side, cells: Cells, at: Flowing) -> Film:
        area, d_h, surface = self._passage(side, at)
        G = at.flow[:, None] / self.branches(side) / area
        Re = G * d_h / at.bulk.mu
        Pr = at.bulk.Pr
        wall = self._wall(at)
        x1, x2 = cells.start[side], cells.end[side]
        if side == "inside" or self.finned is not None:
            relations = inside_tubes.TUBE_RELATIONS if side == "inside" else annulus.FINNED_RELATIONS
            factors = at.factors_of(relations)
            Nu, regime = inside_tubes.nusselt_tube(Re, Pr, d_h, x1, x2, wall=wall, factors=factors)
        else:
            relations = annulus.ANNULUS_RELATIONS
            factors = at.factors_of(relations)
            ratio = surface / self.shell_id
            Nu, regime = annulus.nusselt_annulus(Re, Pr, d_h, ratio, x1, x2, wall=wall, factors=factors)
        h = self._coefficient(side, Nu * at.bulk.k / d_h, surface)
        return Film(h=h, Re=Re, Pr=Pr, velocity=G / at.bulk.rho, regime=regime, relations=relations)

    def _coefficient(self, side: Side, h: Array, surface: Array) -> Array:
        """A film coefficient of the surface that the fluid touches, on the side's own bare surface."""
        own = self.tube_id if side == "inside" else self.tube_od
        h = h * (surface / own) * getattr(self.film_factor, side)
        if side == "outside" and self.finned is not None and self.fins is not None:
            h = h * self.finned.effective_share(h, float(self.fins.conductivity))
        return h

    def second_opinions(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        area, d_h, surface = self._passage(side, at)
        Re = at.flow[:, None] / self.branches(side) / area * d_h / at.bulk.mu
        Pr, mu_ratio, L = at.bulk.Pr, at.mu_wall / at.bulk.mu, cells.leg[side]
        lowest, highest = float(Re.min()), float(Re.max())
        plain_annulus = side == "outside" and self.finned is None
        found: dict[Correlation, Array] = {}
        if plain_annulus:
            if lowest >= inside_tubes.RE_TURBULENT:
                relation = annulus.annulus_equivalent_diameter
                found[relation] = relation(Re, Pr, surface / self.shell_id, mu_ratio)
        elif lowest >= inside_tubes.RE_TURBULENT:
            found[inside_tubes.gnielinski_1976] = inside_tubes.gnielinski_1976(Re, Pr)
            found[inside_tubes.dittus_boelter] = inside_tubes.dittus_boelter(Re, Pr, at.heated)
            found[inside_tubes.sieder_tate_turbulent] = inside_tubes.sieder_tate_turbulent(Re, Pr, mu_ratio)
        elif highest < inside_tubes.RE_LAMINAR:
            found[inside_tubes.hausen_laminar] = inside_tubes.hausen_laminar(Re, Pr, d_h / L)
            found[inside_tubes.sieder_tate_laminar] = inside_tubes.sieder_tate_laminar(Re, Pr, d_h / L, mu_ratio)
        if inside_tubes.RE_LAMINAR < highest < inside_tubes.RE_TURBULENT:
            joined_by, wall = inside_tubes.transition_2013, self._wall(at)
            if plain_annulus:
                ratio = surface / self.shell_id
                Nu, _ = annulus.nusselt_annulus(Re, Pr, d_h, ratio, 0.0, L, wall=wall, joined_by=joined_by)
            else:
                Nu, _ = inside_tubes.nusselt_tube(Re, Pr, d_h, 0.0, L, wall=wall, joined_by=joined_by)
            found[joined_by] = Nu
        to_h = at.bulk.k / d_h
        return {r.name: self._coefficient(side, Nu * to_h, surface).mean(axis=1) for r, Nu in found.items()}

    def excursions(self, side: Side, cells: Cells, at: Flowing, film: Film) -> tuple[Excursion, ...]:
        _, d_h, surface = self._passage(side, at)
        wall = self._wall(at)
        if side == "inside" or self.finned is not None:
            return inside_tubes.excursions_tube(film.Re, film.Pr, d_h, cells.leg[side], wall=wall)
        ratio = surface / self.shell_id
        return annulus.excursions_annulus(film.Re, film.Pr, d_h, ratio, cells.leg[side], wall=wall)

    def condensing_surface(self, side: Side) -> CondensingSurface | str:
        """What steam condenses on, or the reason why that is not rated. Deposits leave its size as it is."""
        if side == "outside" and self.finned is not None:
            return "steam on longitudinal fins is not rated: condensate bridges the fins"
        vertical = self.orientation == "vertical"
        if side == "inside" and vertical and self.legs_on_path(side) > 1:
            return "condensate cannot rise: inside upright legs steam is rated for one leg on its way"
        return CondensingSurface(
            inside=side == "inside",
            vertical=vertical,
            diameter=self.tube_id if side == "inside" else self.tube_od,
            height=float(self.leg_length),
            branches=lambda plugged: np.full(np.shape(plugged), float(self.branches(side))),
            film_factor=float(getattr(self.film_factor, side)),
        )

    # --- walls ------------------------------------------------------------------------------------------------------

    def wall_resistance(self, T_metal: Array) -> Array:
        k = self.metal_conductivity(T_metal)
        return np.asarray(self.tube_od * np.log(self.tube_od / self.tube_id) / (2 * k))

    def metal_conductivity(self, T: Array) -> Array:
        if self.wall_conductivity is not None:
            return np.full_like(T, float(self.wall_conductivity))
        return standard_sizes.conductivity(str(self.material), T)

    def fouling_resistance(self, side: Side, R: Array) -> Array:
        if side == "inside":
            return R * self.area_ratio
        return R if self.finned is None else R * self.finned.bare / (self.finned.unfinned + self.finned.finned)

    # --- drops ------------------------------------------------------------------------------------------------------

    def drop(self, side: Side, cells: Cells, at: Flowing, film: Film) -> dict[str, Array]:
        parts = self._drop(side, at, film, self._friction(side, at, film.Re))
        factor = at.factor_of(self.drop_relation(side))
        return {name: part * factor for name, part in parts.items()}

    def _roughness_ratio(self, side: Side, d_h: Array) -> Array:
        return float(self.inside_roughness if side == "inside" else self.outside_roughness) / d_h

    def _friction(self, side: Side, at: Flowing, Re: Array) -> Array:
        _, d_h, surface = self._passage(side, at)
        roughness, wall = self._roughness_ratio(side, d_h), self._wall(at)
        if side == "inside" or self.finned is not None:
            return losses.friction_tube(Re, roughness, wall=wall)
        return annulus.friction_annulus(Re, surface / self.shell_id, roughness, wall=wall)

    def _drop(self, side: Side, at: Flowing, film: Film, f: Array) -> dict[str, Array]:
        """The parts of a drop with this friction factor, dp_factor included."""
        area, d_h, _ = self._passage(side, at)
        head = at.bulk.rho * film.velocity**2 / 2
        per_metre = f / d_h * head
        legs = self.legs_on_path(side)
        bends = max(legs - 1, 0)
        length = legs * float(self.leg_length)
        mean_head = head.mean(axis=1)
        friction = per_metre.mean(axis=1) * length
        returns = np.zeros_like(friction)
        if side == "inside":
            friction = friction + per_metre.mean(axis=1) * bends * float(self.bend_length)
            returns = losses.RETURN_BEND.value * bends * mean_head
            ends = losses.TUBE_ENTRANCE.value * head[:, 0] + losses.TUBE_EXIT.value * head[:, -1]
        else:
            ends = losses.ANNULUS_HAIRPIN.value * -(-legs // 2) * mean_head
        if at.gas:
            # A gas also pays for its acceleration as density falls along the way.
            G = at.flow / self.branches(side) / area[:, 0]
            first, last = (0, -1) if side == "inside" or self.arrangement != "counter" else (-1, 0)
            ends = ends + G**2 * (1 / at.bulk.rho[:, last] - 1 / at.bulk.rho[:, first])
        parts = {"friction": friction, "returns": returns, "entrance_exit": ends}
        nozzle = self.inside_nozzle_id if side == "inside" else self.outside_nozzle_id
        parts["nozzles"] = np.zeros_like(friction)
        if nozzle is not None:
            v = at.flow / (at.bulk.rho.mean(axis=1) * np.pi / 4 * float(nozzle) ** 2)
            heads = losses.NOZZLE_IN.value + losses.NOZZLE_OUT.value
            parts["nozzles"] = heads * at.bulk.rho.mean(axis=1) * v**2 / 2
        return {name: part * getattr(self.dp_factor, side) for name, part in parts.items()}

    def second_opinion_drops(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        film = self.film(side, cells, at)
        plain_annulus = side == "outside" and self.finned is None
        relation = losses.churchill if plain_annulus else losses.colebrook
        if float(film.Re.min()) < losses.RE_FRICTION_TURBULENT:
            return {}
        _, d_h, _ = self._passage(side, at)
        f = relation(film.Re, self._roughness_ratio(side, d_h)) * losses.friction_wall_factor(film.Re, self._wall(at))
        return {relation.name: sum(self._drop(side, at, film, f).values(), np.zeros(len(at.flow)))}

    def drop_relation(self, side: Side) -> Correlation:
        return annulus.annulus_turbulent_friction if side == "outside" and self.finned is None else losses.churchill

    def supporting(self, side: Side, regimes: Collection[str], gas: bool) -> tuple[Correlation, ...]:
        laminar, turbulent = bool({*regimes} - {"turbulent"}), bool({*regimes} - {"laminar"})
        found = list(inside_tubes.wall_relations(laminar=laminar, turbulent=turbulent, gas=gas))
        if side == "outside" and self.finned is not None:
            found.append(annulus.fin_efficiency)
        if side == "outside" and self.finned is None and laminar:
            found.append(annulus.annulus_laminar_friction)
        return (*found, *(() if gas else (losses.wall_factor_friction,)))

    def loss_coefficients(self, side: Side) -> tuple[losses.Figure, ...]:
        bends = (losses.RETURN_BEND,) if self.legs_on_path("inside") > 1 else ()
        ends = (losses.TUBE_ENTRANCE, losses.TUBE_EXIT, *bends) if side == "inside" else (losses.ANNULUS_HAIRPIN,)
        nozzles = (losses.NOZZLE_IN, losses.NOZZLE_OUT) if getattr(self, f"{side}_nozzle_id") is not None else ()
        return (*ends, *nozzles)

    # --- the whole --------------------------------------------------------------------------------------------------

    def effectiveness(self, NTU: Array, Cr: Array, inside_is_min: NDArray[np.bool_]) -> Array | str:
        counter = self.arrangement == "counter"
        if self._both_split:
            return exact.effectiveness_counter(NTU, Cr) if counter else exact.effectiveness_cocurrent(NTU, Cr)
        split_is_min = inside_is_min if self.branches("inside") > 1 else ~np.asarray(inside_is_min, dtype=bool)
        return exact.effectiveness_split_banks(NTU, Cr, self.banks, split_is_min=split_is_min, counter=counter)

    def driving_force(self, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> tuple[Array, Array] | str:
        counter = self.arrangement == "counter"
        if not self._both_split:
            return self._driving_force_of_banks(T_in, T_out)
        if counter:
            ends = (T_in["inside"] - T_out["outside"], T_out["inside"] - T_in["outside"])
        else:
            ends = (T_in["inside"] - T_in["outside"], T_out["inside"] - T_out["outside"])
        lmtd = exact.log_mean(np.abs(ends[0]), np.abs(ends[1]))
        # Ends of opposite sign have crossed: no area of this arrangement gives them.
        return lmtd, np.where(ends[0] * ends[1] > 0, 1.0, 0.0)

    @property
    def F_through_effectiveness(self) -> bool:
        return not self._both_split

    def _driving_force_of_banks(
        self, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]
    ) -> tuple[Array, Array] | str:
        """By the exact ε of one fluid split over banks that the other visits in turn, solved for NTU."""
        change = {side: np.abs(T_out[side] - T_in[side]) for side in ("inside", "outside")}
        span = np.abs(T_in["inside"] - T_in["outside"])
        most, least = np.maximum(*change.values()), np.minimum(*change.values())
        inside_is_min = np.asarray(change["inside"] >= change["outside"])

        def relation(NTU: Array, Cr: Array) -> Array:
            return np.asarray(self.effectiveness(NTU, Cr, inside_is_min))

        Cr = least / np.where(most > 0, most, 1.0)
        NTU = exact.ntu(relation, np.minimum(most / span, 1.0), Cr)
        mtd = most / np.where(NTU > 0, NTU, 1.0)
        ends = (T_in["inside"] - T_out["outside"], T_out["inside"] - T_in["outside"])
        lmtd = exact.log_mean(np.abs(ends[0]), np.abs(ends[1]))
        return lmtd, np.where(np.isfinite(NTU) & (lmtd > 0), mtd / np.where(lmtd > 0, lmtd, 1.0), 0.0)

    def checks(self) -> tuple[Iterator[Problem], ...]:
        return self._pipe_problems(), self._bank_problems(), self._wall_problems()

    def problems(self) -> Iterator[Problem]:
        for check in self.checks():
            yield from check

    def _pipe_problems(self) -> Iterator[Problem]:
        sound = True
        for name in ("inner_pipe", "outer_pipe"):
            for problem in getattr(self, name).problems():
                sound = False
                yield problem.under(name)
        if not sound:
            return
        mm = 1e3
        if self.tube_od >= self.shell_id:
            yield Problem(
                path="inner_pipe",
                says=f"{self.tube_od * mm:.4g} mm outside does not fit into the outer pipe's bore of "
                f"{self.shell_id * mm:.4g} mm",
            )
            return
        if self.fins is not None:
            if self.tube_od + 2 * self.fins.height > self.shell_id:
                says = (
                    f"fins of {self.fins.height * mm:.4g} mm on {self.tube_od * mm:.4g} mm do not fit into the bore of "
                    f"{self.shell_id * mm:.4g} mm"
                )
                yield Problem(path="fins.height", says=says)
            if self.fins.count * self.fins.thickness >= 0.8 * np.pi * self.tube_od:
                says = (
                    f"{self.fins.count} fins of {self.fins.thickness * mm:.4g} mm leave no bare wall between them; "
                    f"allowed is up to {0.8 * np.pi * self.tube_od / self.fins.thickness:.0f}"
                )
                yield Problem(path="fins.count", says=says)
        for side in ("inside", "outside"):
            rough = float(getattr(self, f"{side}_roughness"))
            d = self.tube_id if side == "inside" else self.shell_id - self.tube_od
            if rough > 0.05 * d:
                yield Problem(
                    path=f"{side}_roughness",
                    says=f"{rough * mm:.4g} mm is over 5 % of the passage of {d * mm:.4g} mm; allowed is up to that",
                )

    def _bank_problems(self) -> Iterator[Problem]:
        for problem in self.banks_in_parallel.problems():
            yield problem.under("banks_in_parallel")
        if self.inner_pipes != 1:
            says = f"{self.inner_pipes} is not rated yet: only one inner pipe in an outer pipe is supported"
            yield Problem(path="inner_pipes", says=says)

    def _wall_problems(self) -> Iterator[Problem]:
        if (self.material is None) == (self.wall_conductivity is None):
            says = 'one of "material" and "wall_conductivity" must be stated, and not both'
            yield Problem(path="material", says=says)
        elif self.material is not None:
            try:
                standard_sizes.conductivity(self.material, np.asarray(300.0))
            except ValueError as error:
                yield Problem(path="material", says=str(error))


__all__ = ["Banks", "DoublePipe", "Factors", "Field", "Fins", "Pipe"]
