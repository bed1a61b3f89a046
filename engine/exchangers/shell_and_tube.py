"""Shell-and-tube exchanger: TEMA E, F, G, H, J and X shells, baffled, in series and in parallel.

The shell side is rated by Bell-Delaware in Taborek's form; Kern's method and the drag of Gaddis and Gnielinski stand
beside it. Shell letters and heads are those of the TEMA Standards, figure N-1.2.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Annotated, Any, ClassVar, Literal

import numpy as np
from numpy.typing import NDArray
from pydantic_core import PydanticCustomError

from engine import effectiveness as exact
from engine.correlations import Array, Correlation, Excursion, Source, inside_tubes, losses
from engine.correlations import across_bundle as shell
from engine.exchangers import Cells, Derived, Film, Flowing, MadeCells, entrance_nodes, layout, sliver, standard_sizes
from engine.exchangers.condenser import CondensingSurface
from engine.exchangers.double_pipe import Factors, length
from engine.stated import Choice, Count, Input, Problem, Side, Stated, Words

FRONT_HEADS = "ABCN"
REAR_HEADS = "LMNPSTUW"


@dataclass(frozen=True, kw_only=True)
class ShellType:
    """How the shell-side fluid runs: it splits into equal paths, alike by symmetry, so that one stands for all."""

    name: str
    paths: int = 1
    passes: int = 1
    """Shell passes either side of a longitudinal baffle on one path."""
    inlets: int = 1
    outlets: int = 1

    @property
    def share(self) -> float:
        """Of the shell's flow and of its length that one path takes."""
        return 1 / self.paths


SHELLS: Mapping[str, ShellType] = {
    "E": ShellType(name="one shell pass"),
    "F": ShellType(name="two shell passes with a longitudinal baffle", passes=2),
    "G": ShellType(name="split flow", paths=2, passes=2),
    "H": ShellType(name="double split flow", paths=4, passes=2, inlets=2, outlets=2),
    "J": ShellType(name="divided flow", paths=2, outlets=2),
    "X": ShellType(name="cross-flow"),
}

BAFFLE_FIELDS = frozenset(
    {
        *("baffle_type", "baffle_cut", "baffle_spacing", "inlet_spacing", "outlet_spacing", "baffles"),
        *("tube_hole_clearance", "shell_baffle_clearance"),
        *("sealing_strip_pairs", "pass_lanes", "pass_lane_width"),
    }
)
"""What an X shell, rated as one bank, has no use for."""

MOST_BAFFLES = 500
"""Of one shell."""

RE_LAMINAR, RE_TRANSITIONAL = 100.0, 1000.0
"""Names of the shell-side regimes: below the switch of the method's constants, and below its row for Re from 1000."""

CLEAR_COUNT, REFUSED_COUNT = 0.12, 0.30
"""By how much more tubes than published a shell is taken without a word, and from where on it is refused."""

SPACING_SLACK = 0.02
"""Of the tube length: by how much a stated number of baffles and all their spacings may miss it."""

DERIVED_BAFFLES = Source(
    key="derived-baffles",
    text="as many baffles at the stated spacing as the tube length holds, the end spacings sharing the rest",
    checked=True,
)


def _mm(x: float) -> str:
    return f"{x * 1e3:.4g} mm"


class _BaffleType(Choice):
    """Single-segmental baffles; the other types that exist are refused for what they are."""

    def read(self, given: Any) -> str:
        known = ("double-segmental", "triple-segmental", "no-tubes-in-window", "disc-and-doughnut", "rod", "helical")
        if isinstance(given, str) and given.strip().lower() in known:
            sentence = f'"{given}" baffles are not rated: the shell-side method holds for single-segmental baffles only'
            raise PydanticCustomError("stated", "{sentence}", {"sentence": sentence})
        return super().read(given)


class ShellAndTube(Input):
    """The stated dimensions of a shell-and-tube exchanger, and its films and drops. Counts are those of one shell."""

    type: Literal["shell-and-tube"] = "shell-and-tube"
    tema: Annotated[str, Words("TEMA type", 3, help="Front head, shell and rear head.", example="AES")]
    shell_id: Annotated[float, length("Shell inside diameter", "591 mm", 5.0)]
    tube_od: Annotated[float, length("Tube outside diameter", "19.05 mm", 0.2)]
    tube_wall: Annotated[float | None, length("Tube wall", "2.11 mm", 0.05)] = None
    gauge: Annotated[str | None, Words("Tube gauge", 12, help="Birmingham gauge of the wall.", example="14 BWG")] = None
    tube_length: Annotated[
        float, length("Tube length", "4.88 m", 50.0, help="Straight and effective, between the tubesheets.")
    ]
    tube_pitch: Annotated[float, length("Tube pitch", "25.4 mm", 0.5)]
    layout_angle: Annotated[str, Choice("Layout angle", ("30 deg", "45 deg", "60 deg", "90 deg"))]
    tubes: Annotated[
        int,
        Count(
            "Tubes",
            1,
            50000,
            help="Of one shell: straight tubes, or the legs of U-tubes (two for each U).",
            example="220",
        ),
    ]
    tube_passes: Annotated[int, Count("Tube passes", 1, 16, example="2")]
    tubes_plugged: Annotated[
        int, Count("Tubes plugged", 0, 50000, help="Of one shell, counted as the tubes.", assumed="no tube is plugged")
    ] = 0
    first_pass: Annotated[
        str,
        Choice(
            "First tube pass",
            ("counter", "co-current"),
            help="How the first tube pass runs against the shell flow.",
            assumed="the first tube pass meets the shell outlet first (common practice)",
        ),
    ] = "counter"
    shells_in_series: Annotated[int, Count("Shells in series", 1, 24, assumed="one shell in series")] = 1
    shells_in_parallel: Annotated[int, Count("Shells in parallel", 1, 24, assumed="one train of shells")] = 1
    shell_inlets: Annotated[
        int,
        Count(
            "Shell inlets of a J shell", 1, 2, help="1: one inlet, two outlets. 2: the reverse.", assumed="one inlet"
        ),
    ] = 1
    orientation: Annotated[
        str, Choice("Orientation", ("horizontal", "vertical"), assumed="horizontal, the usual position")
    ] = "horizontal"

    baffle_type: Annotated[
        str,
        _BaffleType("Baffle type", ("single-segmental",), assumed="single-segmental baffles, the usual type"),
    ] = "single-segmental"
    baffle_cut: Annotated[
        float | None,
        Stated(
            "fraction",
            "Baffle cut",
            low=0.0,
            high=1.0,
            help="Height of the window over the shell bore.",
            example="25 %",
        ),
    ] = None
    baffle_spacing: Annotated[float | None, length("Baffle spacing", "300 mm", 20.0, help="Between two baffles.")] = (
        None
    )
    inlet_spacing: Annotated[
        float | None,
        length("Inlet spacing", "400 mm", 20.0, help="From the tubesheet at the inlet to the first baffle."),
    ] = None
    outlet_spacing: Annotated[float | None, length("Outlet spacing", "400 mm", 20.0)] = None
    baffles: Annotated[int | None, Count("Baffles", 1, MOST_BAFFLES, help="Of one shell.")] = None
    bundle_diameter: Annotated[float | None, length("Bundle diameter", "540 mm", 5.0, help="Outer tube limit.")] = None
    tube_hole_clearance: Annotated[
        float | None,
        Stated("length", "Clearance of the baffle holes", low=0.0, high=0.01, help="Diametral.", example="0.8 mm"),
    ] = None
    shell_baffle_clearance: Annotated[
        float | None,
        Stated("length", "Clearance shell to baffle", low=0.0, high=0.1, help="Diametral.", example="4.8 mm"),
    ] = None
    sealing_strip_pairs: Annotated[int, Count("Pairs of sealing strips", 0, 50, assumed="no sealing strips")] = 0
    pass_lanes: Annotated[
        int, Count("Pass lanes along the cross-flow", 0, 10, assumed="no pass lane lies along the cross-flow")
    ] = 0
    pass_lane_width: Annotated[
        float, Stated("length", "Width of a pass lane", low=0.0, high=0.5, assumed="no pass lane", example="19 mm")
    ] = 0.0
    long_baffle_leakage: Annotated[
        float,
        Stated(
            "fraction",
            "Leakage past the longitudinal baffle",
            low=0.0,
            high=0.9,
            help="F shells: share of the shell flow that slips from the inlet to the outlet.",
            assumed="the longitudinal baffle is tight",
            example="5 %",
        ),
    ] = 0.0

    material: Annotated[str | None, Words("Tube material", 60)] = None
    wall_conductivity: Annotated[
        float | None, Stated("conductivity", "Wall conductivity", above=0.0, high=500.0, example="50 W/mK")
    ] = None
    inside_roughness: Annotated[
        float,
        Stated("length", "Roughness of the tubes", low=0.0, high=5e-3, assumed="drawn tube", example="0.0015 mm"),
    ] = losses.DRAWN_TUBE.value
    u_bend_length: Annotated[
        float,
        Stated(
            "length",
            "Mean length of a U-bend",
            low=0.0,
            high=20.0,
            help="Counts for friction, not for heat.",
            assumed="no wall friction in U-bends beyond the losses of each pass",
            example="0.4 m",
        ),
    ] = 0.0
    u_bend_area: Annotated[
        float,
        Stated(
            "area",
            "Area of the U-bends that takes part",
            low=0.0,
            high=1e4,
            help="Outside area of all bends of one shell, swept by the shell flow.",
            assumed="the U-bends take no part in the heat transfer",
            example="2.3 m2",
        ),
    ] = 0.0
    tube_nozzle_id: Annotated[float | None, length("Tube-side nozzle bore", "154 mm", 3.0)] = None
    shell_nozzle_id: Annotated[float | None, length("Shell-side nozzle bore", "154 mm", 3.0)] = None
    deposit_conductivity: Annotated[
        float | None,
        Stated(
            "conductivity",
            "Deposit conductivity",
            above=0.0,
            high=50.0,
            help="When stated, fouling narrows the tube bore.",
            example="1 W/mK",
        ),
    ] = None
    heat_loss: Annotated[
        float,
        Stated(
            "heat_flow",
            "Heat loss of the shell-side stream to the surroundings",
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
        letters = str(given.get("tema", "")).upper()
        if len(letters) != 3:
            return frozenset()
        shell_letter, rear = letters[1], letters[2]
        found = set() if shell_letter == "F" else {"long_baffle_leakage"}
        found |= {"first_pass"} if shell_letter == "J" else {"shell_inlets"}
        if rear != "U":
            found |= {"u_bend_length", "u_bend_area"}
        if given.get("tube_passes") == 1:
            found.add("pass_lanes")
        if "pass_lanes" in found or not given.get("pass_lanes"):
            found.add("pass_lane_width")
        return frozenset(found | BAFFLE_FIELDS if shell_letter == "X" else found)

    title: ClassVar[str] = "Shell and tube"
    side_names: ClassVar[Mapping[Side, str]] = {"inside": "Tube side", "outside": "Shell side"}

    # --- geometry ---------------------------------------------------------------------------------------------------

    @property
    def shell_letter(self) -> str:
        return self.tema[1].upper()

    @property
    def rear_letter(self) -> str:
        return self.tema[2].upper()

    @property
    def shell_type(self) -> ShellType:
        return SHELLS[self.shell_letter]

    @property
    def u_tubes(self) -> bool:
        return self.rear_letter == "U"

    @property
    def angle(self) -> float:
        """Layout angle in degrees."""
        return float(self.layout_angle.split()[0])

    @cached_property
    def tube_id(self) -> float:
        wall = standard_sizes.gauge_wall(self.gauge) if self.gauge is not None else self.tube_wall
        assert wall is not None
        return float(self.tube_od - 2 * wall)

    @property
    def shells(self) -> int:
        return self.shells_in_series * self.shells_in_parallel

    @property
    def area(self) -> float:
        return float(self.area_at(np.asarray(self.tubes_plugged, dtype=float)))

    def area_at(self, tubes_plugged: Array) -> Array:
        of_a_tube = np.pi * self.tube_od * self.tube_length + self.u_bend_area / self.tubes
        return np.asarray(of_a_tube * (self.tubes - tubes_plugged) * self.shells)

    @property
    def area_ratio(self) -> float:
        return float(self.tube_od / self.tube_id)

    def tubes_per_pass(self, tubes_plugged: Array) -> Array:
        """Open tubes in the mean pass; passes of unlike size are rated at the mean."""
        return np.asarray((self.tubes - tubes_plugged) / self.tube_passes)

    @cached_property
    def path_spacings(self) -> tuple[float, float, float]:
        """Baffles along one path of the shell-side fluid, one way, and the spacings at its inlet and outlet [m].

        A stated number of baffles stands; else as many as fit. What they leave goes to the ends not stated, or to both;
        where all is stated it must be within SPACING_SLACK of the length.
        Raises ValueError with a sentence where the baffles do not fit.
        """
        assert self.baffle_spacing is not None
        room, spacing = self.tube_length * self.shell_type.share, self.baffle_spacing
        stated = [None if end is None else float(end) for end in (self.inlet_spacing, self.outlet_spacing)]
        if spacing > room:
            raise ValueError(f"{_mm(spacing)} is longer than the {_mm(room)} of tube that the baffles stand on")
        if self.baffles is not None:
            count = self.baffles * self.shell_type.share
        else:
            fit = (room - sum(spacing if end is None else end for end in stated)) / spacing
            count = max(1.0, 1.0 + np.floor(fit + 1e-9))
            in_shell = count / self.shell_type.share
            if in_shell > MOST_BAFFLES:
                raise ValueError(f"{_mm(spacing)} asks for {in_shell:.4g} baffles; allowed is up to {MOST_BAFFLES}")
        rest = room - (count - 1) * spacing - sum(end or 0.0 for end in stated)
        both = None not in stated
        slack = SPACING_SLACK * room
        share = rest / (2 if both else stated.count(None))
        ends = [(end or 0.0) + (share if both or end is None else 0.0) for end in stated]
        if min(ends) <= 0 or (both and rest < -slack):
            raise ValueError(
                f"{count:.4g} baffles at a spacing of {_mm(spacing)} and the end spacings are longer than the "
                f"{_mm(room)} of tube they stand on"
            )
        if both and self.baffles is not None and rest > slack:
            raise ValueError(
                f"{count:.4g} baffles with their spacings take {_mm(room - rest)} of the {_mm(room)} of tube they "
                "stand on; leave out their number or one of the spacings"
            )
        return float(count), ends[0], ends[1]

    @property
    def baffle_count(self) -> int:
        """Baffles of one shell, stated or as many as fit."""
        return self.baffles if self.baffles is not None else round(self.path_spacings[0]) * self.shell_type.paths

    @cached_property
    def outer_tube_limit(self) -> float:
        """Bundle diameter [m], stated or what the usual clearance of the rear head leaves."""
        if self.bundle_diameter is not None:
            return self.bundle_diameter
        return standard_sizes.outer_tube_limit(self.shell_id, self.rear_letter)

    @cached_property
    def hole_clearance(self) -> float:
        """Diametral clearance of the baffle holes [m], stated or the usual one."""
        if self.tube_hole_clearance is not None:
            return float(self.tube_hole_clearance)
        return standard_sizes.tube_hole_clearance(self.tube_od, self.longest_span)

    @cached_property
    def baffle_clearance(self) -> float:
        """Diametral clearance between shell and baffle [m], stated or the usual one."""
        if self.shell_baffle_clearance is not None:
            return float(self.shell_baffle_clearance)
        return standard_sizes.shell_baffle_clearance(self.shell_id)

    @property
    def longest_span(self) -> float:
        """Longest unsupported span [m]: a tube in the windows passes two compartments between its supports."""
        assert self.baffle_spacing is not None
        count, inlet, outlet = self.path_spacings
        compartments = [inlet, *[self.baffle_spacing] * (round(count) - 1), outlet]
        return max(one + other for one, other in pairwise(compartments))

    @cached_property
    def geometry(self) -> shell.BundleGeometry:
        """Areas and rows of one path through one shell. Raises ValueError where the dimensions contradict."""
        assert self.baffle_cut is not None
        assert self.baffle_spacing is not None
        _, inlet, outlet = self.path_spacings
        return shell.bundle_geometry(
            layout_angle=self.angle,
            shell_id=self.shell_id,
            bundle_diameter=self.outer_tube_limit,
            tube_od=self.tube_od,
            tube_pitch=self.tube_pitch,
            tubes=self.tubes,
            baffle_cut=self.baffle_cut,
            baffles=self.baffle_count,
            baffle_spacing=self.baffle_spacing,
            inlet_spacing=inlet,
            outlet_spacing=outlet,
            tube_hole_clearance=self.hole_clearance,
            shell_baffle_clearance=self.baffle_clearance,
            sealing_strip_pairs=self.sealing_strip_pairs,
            pass_lanes=self.pass_lanes,
            pass_lane_width=self.pass_lane_width,
            shell_passes=self.shell_type.passes,
            flow_share=self.shell_type.share,
            length_share=self.shell_type.share,
        )

    @cached_property
    def usual_tube_count(self) -> standard_sizes.TubeCount:
        return standard_sizes.tube_count(
            self.shell_id,
            self.tube_od,
            self.tube_pitch,
            self.angle,
            self.tube_passes,
            u_tubes=self.u_tubes,
        )

    def derived(self) -> list[Derived]:
        found: list[Derived] = []

        def take(path: str, value: float, source: Source, quantity: str = "length", size: str = "") -> None:
            found.append(Derived(path=path, value=value, quantity=quantity, source=source, size=size))

        if self.gauge is not None:
            take("tube_wall", (self.tube_od - self.tube_id) / 2, standard_sizes.BWG, size="gauge")
        if self.bundle_diameter is None:
            take("bundle_diameter", self.outer_tube_limit, standard_sizes.SINNOTT_BUNDLE)
        if self.shell_letter == "X":
            return found
        _, inlet, outlet = self.path_spacings
        if self.baffles is None:
            take("baffles", self.baffle_count, DERIVED_BAFFLES, quantity="")
        for name, stated, used in (
            ("inlet_spacing", self.inlet_spacing, inlet),
            ("outlet_spacing", self.outlet_spacing, outlet),
        ):
            if stated is None or abs(used - stated) > 1e-6:
                take(name, used, DERIVED_BAFFLES)
        if self.tube_hole_clearance is None:
            take("tube_hole_clearance", self.hole_clearance, standard_sizes.TEMA)
        if self.shell_baffle_clearance is None:
            take("shell_baffle_clearance", self.baffle_clearance, standard_sizes.TEMA)
        return found

    # --- cells ------------------------------------------------------------------------------------------------------

    def cells(self, fineness: int = 1) -> Cells:
        """Equal bays along the shell, as many as the temperatures need; `fineness` multiplies their number.

        They are no baffle compartments: the film of Bell-Delaware is that of the whole shell, end spacings included, so
        what differs from bay to bay is the temperature only.
        """
        return self._made.once("cells", fineness, lambda: self._cells(self._layout(fineness)))

    def whole(self, fineness: int = 1) -> Cells:
        return self._made.once("whole", fineness, lambda: self._cells(layout.counter_chain(24 * fineness)))

    @cached_property
    def _made(self) -> MadeCells:
        return MadeCells()

    def _cells(self, order: layout.Layout) -> Cells:
        L = self.tube_length
        start, end = (order.span * L).T
        leg: dict[Side, float] = {"inside": L, "outside": L}
        x, weights = entrance_nodes(start, end, np.zeros(len(start), dtype=bool), L)
        begin, stop = sliver(x.ravel())
        return Cells(
            layout=order,
            start={"inside": start, "outside": start},
            end={"inside": end, "outside": end},
            leg=leg,
            nodes=Cells(layout=order, start={"inside": begin}, end={"inside": stop}, leg=leg),
            weights=weights,
        )

    def _layout(self, fineness: int) -> layout.Layout:
        letter, passes = self.shell_letter, self.tube_passes
        first: layout.Arrangement = "counter" if self.first_pass == "counter" else "co-current"
        if letter == "E":
            # For the films 12 bays are plenty; the temperatures are those of bays a quarter as long.
            unit = layout.shell_pass((24 if passes == 1 else 12) * fineness, passes, first, halvings=2)
        elif letter == "F":
            unit = layout.f_shell(16 * fineness, passes, first, self.long_baffle_leakage)
        elif letter == "G":
            unit = layout.g_shell(32 * fineness, passes, first)
        elif letter == "H":
            unit = layout.h_shell(32 * fineness, passes, first)
        elif letter == "J":
            unit = layout.j_shell(32 * fineness, passes, 1 if self.shell_inlets == 1 else 2)
        else:
            unit = layout.x_shell(8 * fineness, passes, first, rows=max(1, 8 * fineness // passes))
        return layout.in_series(unit, self.shells_in_series)

    # --- films ------------------------------------------------------------------------------------------------------

    def _bore(self, R_inside: Array) -> Array:
        """(P, 1) free bore of the tubes, narrowed by the deposit when its conductivity is stated."""
        if self.deposit_conductivity is None:
            return np.full((np.size(R_inside), 1), self.tube_id)
        return np.asarray(self.tube_id * np.exp(-2 * self.deposit_conductivity * R_inside / self.tube_id))[:, None]

    def _tube_flow(self, at: Flowing) -> tuple[Array, Array]:
        """(P, 1) mass velocity in the tubes [kg/m²s] and their bore [m]."""
        d = self._bore(at.R_fouling)
        tubes = self.tubes_per_pass(at.tubes_plugged) * self.shells_in_parallel
        return (at.flow / tubes)[:, None] / (np.pi / 4 * d**2), d

    @staticmethod
    def _wall(at: Flowing) -> inside_tubes.Wall:
        return inside_tubes.Wall(mu=at.mu_wall / at.bulk.mu, Pr=at.Pr_wall / at.bulk.Pr, T=at.T_wall / at.T, gas=at.gas)

    def _shell_flow(self, at: Flowing) -> Array:
        """(P, 1) flow of one shell [kg/s]."""
        return at.flow[:, None] / self.shells_in_parallel

    def _shell_numbers(self, cells: Cells, at: Flowing) -> tuple[Array, Array, Array]:
        """Mass velocity (P, 1), local Re (P, n) and mean Re of the shell that a cell lies in."""
        m = self._shell_flow(at)
        G = m / self._cross_flow_area if self.shell_letter == "X" else self.geometry.mass_velocity(m)
        Re = np.asarray(G * self.tube_od / at.bulk.mu)
        order = cells.layout
        if Re.shape[1] != order.n_cells:
            return np.asarray(G), Re, Re
        mean = Re.reshape(len(Re), order.units, -1) @ order.area
        return np.asarray(G), Re, np.repeat(mean, len(order.area), axis=1) if order.units > 1 else mean

    @cached_property
    def _cross_flow_area(self) -> float:
        """Of an X shell, all of its length [m²]."""
        return shell.crossflow_area(
            self.angle,
            self.shell_id,
            self.outer_tube_limit,
            self.tube_od,
            self.tube_pitch,
            self.tube_length,
        )

    @property
    def _rows_crossed(self) -> float:
        """Of an X shell, at its middle."""
        row_pitch = shell.tube_layout(self.angle).row * self.tube_pitch
        return float((self.outer_tube_limit - self.tube_od) / row_pitch + 1)

    @property
    def _pitch_ratio(self) -> float:
        return float(self.tube_pitch / self.tube_od)

    def film(self, side: Side, cells: Cells, at: Flowing) -> Film:
        return self._tube_film(cells, at) if side == "inside" else self._shell_film(cells, at)

    def _tube_film(self, cells: Cells, at: Flowing) -> Film:
        G, d = self._tube_flow(at)
        Re, Pr, relations = G * d / at.bulk.mu, at.bulk.Pr, inside_tubes.TUBE_RELATIONS
        x1, x2, factors = cells.start["inside"], cells.end["inside"], at.factors_of(relations)
        Nu, regime = inside_tubes.nusselt_tube(Re, Pr, d, x1, x2, wall=self._wall(at), factors=factors)
        h = Nu * at.bulk.k / self.tube_id * self.film_factor.inside
        return Film(h=h, Re=Re, Pr=Pr, velocity=G / at.bulk.rho, regime=regime, relations=relations)

    def _shell_film(self, cells: Cells, at: Flowing) -> Film:
        G, Re, Re_mean = self._shell_numbers(cells, at)
        Pr, cp, mu_ratio = at.bulk.Pr, at.bulk.cp, at.mu_wall / at.bulk.mu
        if self.shell_letter == "X":
            relation = shell.taborek_j
            h = shell.ideal_film(self.angle, self._pitch_ratio, G=G, Re=Re, Pr=Pr, cp=cp, mu_ratio=mu_ratio)
        else:
            relation = shell.bell_delaware_film
            h = relation(self.geometry, G=G, Re=Re, Re_mean=Re_mean, Pr=Pr, cp=cp, mu_ratio=mu_ratio)
        h = h * shell.over_steps(self.angle, Re) * np.asarray(at.factor_of(relation))[..., None]
        h = h * self.film_factor.outside
        regime = (Re >= RE_LAMINAR).astype(np.int8) + (Re >= RE_TRANSITIONAL)
        return Film(h=h, Re=Re, Pr=Pr, velocity=G / at.bulk.rho, regime=regime, relations=(relation,) * 3)

    def second_opinions(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        return self._tube_opinions(cells, at) if side == "inside" else self._shell_opinions(at)

    def _tube_opinions(self, cells: Cells, at: Flowing) -> dict[str, Array]:
        G, d = self._tube_flow(at)
        Re, Pr, mu_ratio, L = G * d / at.bulk.mu, at.bulk.Pr, at.mu_wall / at.bulk.mu, cells.leg["inside"]
        lowest, highest = float(Re.min()), float(Re.max())
        found: dict[Correlation, Array] = {}
        if lowest >= inside_tubes.RE_TURBULENT:
            found[inside_tubes.gnielinski_1976] = inside_tubes.gnielinski_1976(Re, Pr)
            found[inside_tubes.dittus_boelter] = inside_tubes.dittus_boelter(Re, Pr, at.heated)
            found[inside_tubes.sieder_tate_turbulent] = inside_tubes.sieder_tate_turbulent(Re, Pr, mu_ratio)
        elif highest < inside_tubes.RE_LAMINAR:
            found[inside_tubes.hausen_laminar] = inside_tubes.hausen_laminar(Re, Pr, d / L)
            found[inside_tubes.sieder_tate_laminar] = inside_tubes.sieder_tate_laminar(Re, Pr, d / L, mu_ratio)
        if inside_tubes.RE_LAMINAR < highest < inside_tubes.RE_TURBULENT:
            joined_by = inside_tubes.transition_2013
            found[joined_by] = inside_tubes.nusselt_tube(Re, Pr, d, 0.0, L, wall=self._wall(at), joined_by=joined_by)[0]
        to_h = at.bulk.k / self.tube_id * self.film_factor.inside
        return {relation.name: (Nu * to_h).mean(axis=1) for relation, Nu in found.items()}

    def _shell_opinions(self, at: Flowing) -> dict[str, Array]:
        kern = shell.kern_film
        if self.shell_letter == "X":
            return {}
        De, _, Re = self._kern_flow(at)
        if kern.valid[0].outside(Re).any():
            return {}
        h = kern(De, k=at.bulk.k, Re=Re, Pr=at.bulk.Pr, mu_ratio=at.mu_wall / at.bulk.mu)
        return {kern.name: h.mean(axis=1) * self.film_factor.outside}

    def _kern_flow(self, at: Flowing) -> tuple[float, Array, Array]:
        """Kern's equivalent diameter [m], mass velocity [kg/m²s] and Re of one path."""
        assert self.baffle_spacing is not None
        De = shell.kern_equivalent_diameter(self.angle, self.tube_od, self.tube_pitch)
        As = shell.kern_area(self.shell_id, self.tube_od, self.tube_pitch, self.baffle_spacing, self.shell_type.passes)
        Gs = self._shell_flow(at) * self.shell_type.share / As
        return De, Gs, np.asarray(De * Gs / at.bulk.mu)

    def excursions(self, side: Side, cells: Cells, at: Flowing, film: Film) -> tuple[Excursion, ...]:
        if side == "inside":
            _, d = self._tube_flow(at)
            return inside_tubes.excursions_tube(film.Re, film.Pr, d, cells.leg[side], wall=self._wall(at))
        cut = np.asarray(self.baffle_cut if self.baffle_cut is not None else np.nan, dtype=float)
        return film.relations[0].excursions(Re=film.Re, pitch_ratio=np.asarray(self._pitch_ratio), baffle_cut=cut)

    def shell_details(self, at: Flowing) -> dict[str, Array]:
        """Areas [m²], rows, ratios and correction factors of the shell-side method, scalars or (P,), at one state a
        point: names as in Taborek's text. Empty for an X shell, whose bank takes no correction."""
        if self.shell_letter == "X":
            return {}
        g = self.geometry
        _, Re, _ = self._shell_numbers(self.whole(), at)
        Re = Re.mean(axis=1)
        J, R = shell.film_factors(g, Re), shell.drop_factors(g, Re)
        areas = ("Sm", "Sw", "Dw", "Ssb", "Stb", "Sb", "Fc", "Fw", "Ncc", "Ncw", "Nb", "rs", "rlm", "Fbp", "rss")
        return {
            **{name: np.asarray(getattr(g, name)) for name in areas},
            "Re": Re,
            **{name: np.asarray(getattr(J, name)) for name in ("Jc", "Jl", "Jb", "Js", "Jr")},
            **{name: np.asarray(getattr(R, name)) for name in ("Rl", "Rb", "Rs")},
        }

    def condensing_surface(self, side: Side) -> CondensingSurface | str:
        """What steam condenses on, or the reason why that is not rated. Deposits leave its size as it is.

        Two thirds of the tubes across the bundle drip on each other: the mean vertical row of a round bundle (Sinnott,
        R. K., Chemical Engineering Design, ch. 12; printed page not checked), here at the tube pitch for all layouts.
        """
        vertical = self.orientation == "vertical"
        if side == "inside" and vertical and self.tube_passes > 1:
            return "condensate cannot rise: inside upright tubes steam is rated for one tube pass"
        rows = 2 / 3 * self.outer_tube_limit / self.tube_pitch
        return CondensingSurface(
            inside=side == "inside",
            vertical=vertical,
            diameter=float(self.tube_id if side == "inside" else self.tube_od),
            height=float(self.tube_length),
            rows=max(1.0, float(rows)) if side == "outside" and not vertical else 1.0,
            branches=lambda plugged: self.tubes_per_pass(plugged) * self.shells_in_parallel,
            film_factor=float(getattr(self.film_factor, side)),
        )

    # --- walls ------------------------------------------------------------------------------------------------------

    def wall_resistance(self, T_metal: Array) -> Array:
        return np.asarray(self.tube_od * np.log(self.tube_od / self.tube_id) / (2 * self.metal_conductivity(T_metal)))

    def metal_conductivity(self, T: Array) -> Array:
        if self.wall_conductivity is not None:
            return np.full_like(T, float(self.wall_conductivity))
        return standard_sizes.conductivity(str(self.material), T)

    def fouling_resistance(self, side: Side, R: Array) -> Array:
        return R * self.area_ratio if side == "inside" else R

    # --- drops ------------------------------------------------------------------------------------------------------

    def drop(self, side: Side, cells: Cells, at: Flowing, film: Film) -> dict[str, Array]:
        parts = self._tube_drop(cells, at, film) if side == "inside" else self._shell_drop(cells, at)
        factor = getattr(self.dp_factor, side) * at.factor_of(self.drop_relation(side))
        return {name: part * factor for name, part in parts.items()}

    @staticmethod
    def _mean(x: Array | float, cells: Cells) -> Array:
        """Mean over the area of all cells, (P,) from (P, n) or (P, 1)."""
        return np.asarray((x * np.ones(cells.layout.n_cells)) @ cells.layout.area_share)

    def _tube_drop(
        self, cells: Cells, at: Flowing, film: Film, heads: losses.Figure = losses.TUBE_PASS
    ) -> dict[str, Array]:
        G, d = self._tube_flow(at)
        f = losses.friction_tube(film.Re, self.inside_roughness / d, wall=self._wall(at))
        head = losses.velocity_head(G, at.bulk.rho)
        passes = self.tube_passes * self.shells_in_series
        along = passes * self.tube_length + passes // 2 * self.u_bend_length
        # A gas also pays for its acceleration as density falls along the way.
        gained = G[:, 0] ** 2 * (1 / at.bulk.rho[:, -1] - 1 / at.bulk.rho[:, 0]) if at.gas else np.zeros(len(G))
        return {
            "friction": self._mean(f * head / d, cells) * along,
            "returns": heads.value * passes * self._mean(head, cells),
            "entrance_exit": gained,
            "nozzles": self._nozzle_drop(self.tube_nozzle_id, at, self._mean(at.bulk.rho, cells), 1, 1),
        }

    def _shell_drop(self, cells: Cells, at: Flowing) -> dict[str, Array]:
        G, Re, Re_mean = self._shell_numbers(cells, at)
        rho, mu_ratio = at.bulk.rho, at.mu_wall / at.bulk.mu
        if self.shell_letter == "X":
            bank = shell.ideal_drop(
                self.angle, self._pitch_ratio, self._rows_crossed, G=G, Re=Re, rho=rho, mu_ratio=mu_ratio
            )
            found = shell.ShellDrop(crossflow=bank, window=0 * bank, ends=0 * bank)
        else:
            found = shell.bell_delaware_drop(
                self.geometry, m=self._shell_flow(at), rho=rho, mu=at.bulk.mu, mu_ratio=mu_ratio, Re_mean=Re_mean
            )
        parts = {"crossflow": found.crossflow, "window": found.window, "ends": found.ends}
        return {
            **{name: self._mean(part, cells) * self.shells_in_series for name, part in parts.items()},
            "nozzles": self._shell_nozzles(at, self._mean(rho, cells)),
        }

    @property
    def shell_nozzles(self) -> tuple[int, int]:
        """Inlets and outlets of one shell."""
        if self.shell_letter == "J" and self.shell_inlets == 2:
            return 2, 1
        return self.shell_type.inlets, self.shell_type.outlets

    def _shell_nozzles(self, at: Flowing, rho: Array) -> Array:
        return self._nozzle_drop(self.shell_nozzle_id, at, rho, *self.shell_nozzles)

    def _nozzle_drop(self, bore: float | None, at: Flowing, rho: Array, inlets: int, outlets: int) -> Array:
        """(P,) loss in the nozzles of all shells in series; each shell has its own."""
        if bore is None:
            return np.zeros_like(rho)
        head = losses.velocity_head(at.flow / self.shells_in_parallel / (np.pi / 4 * float(bore) ** 2), rho)
        heads = losses.NOZZLE_IN.value / inlets**2 + losses.NOZZLE_OUT.value / outlets**2
        return np.asarray(head * heads * self.shells_in_series)

    def drop_relation(self, side: Side) -> Correlation:
        if side == "inside":
            return losses.churchill
        return shell.taborek_f if self.shell_letter == "X" else shell.bell_delaware_drop

    def supporting(self, side: Side, regimes: Collection[str], gas: bool) -> tuple[Correlation, ...]:
        if side == "outside":
            return () if self.shell_letter == "X" else (shell.taborek_j, shell.taborek_f)
        laminar, turbulent = bool({*regimes} - {"turbulent"}), bool({*regimes} - {"laminar"})
        wall = inside_tubes.wall_relations(laminar=laminar, turbulent=turbulent, gas=gas)
        return (*wall, *(() if gas else (losses.wall_factor_friction,)))

    def loss_coefficients(self, side: Side) -> tuple[losses.Figure, ...]:
        passes = (losses.TUBE_PASS,) if side == "inside" else ()
        nozzle = self.tube_nozzle_id if side == "inside" else self.shell_nozzle_id
        return (*passes, *((losses.NOZZLE_IN, losses.NOZZLE_OUT) if nozzle is not None else ()))

    def second_opinion_drops(self, side: Side, cells: Cells, at: Flowing) -> dict[str, Array]:
        """Total drop by other published relations, by name, at mean conditions (P,), nozzles and dp_factor included."""
        factor = getattr(self.dp_factor, side)
        if side == "inside":
            parts = self._tube_drop(cells, at, self.film(side, cells, at), losses.TUBE_PASS_KERN)
            return {losses.TUBE_PASS_KERN.what: sum(parts.values(), np.zeros(len(at.flow))) * factor}
        if self.shell_letter == "X":
            return {}
        rho, mu_ratio = at.bulk.rho, at.mu_wall / at.bulk.mu
        found: dict[Correlation, Array] = {}
        De, Gs, Re = self._kern_flow(at)
        if not shell.kern_drop.valid[0].outside(Re).any():
            crossings = (self.baffle_count * self.shell_type.share + 1) * self.shell_type.passes
            found[shell.kern_drop] = shell.kern_drop(
                De, shell_id=self.shell_id, crossings=crossings, Gs=Gs, rho=rho, Re=Re, mu_ratio=mu_ratio
            )
        _, Re, Re_mean = self._shell_numbers(cells, at)
        if not shell.gaddis_gnielinski_drop.valid[0].outside(Re).any():
            found[shell.gaddis_gnielinski_drop] = shell.gaddis_gnielinski_drop(
                self.geometry, m=self._shell_flow(at), rho=rho, mu=at.bulk.mu, mu_ratio=mu_ratio, Re_mean=Re_mean
            ).total
        nozzles = self._shell_nozzles(at, rho.mean(axis=1))
        return {
            relation.name: (dp.mean(axis=1) * self.shells_in_series + nozzles) * factor
            for relation, dp in found.items()
        }

    # --- the whole --------------------------------------------------------------------------------------------------

    @property
    def arrangement(self) -> Literal["counter", "co-current"]:
        """Which terminal differences an LMTD of this exchanger takes."""
        one_way = self.tube_passes == self.shell_type.passes and self.shell_letter in "EF"
        return "co-current" if one_way and self.first_pass == "co-current" and self.shells_in_series == 1 else "counter"

    def _relation(self, inside_is_min: NDArray[np.bool_]) -> exact.Relation | str:
        """ε(NTU, Cr) of the arrangement, or the reason why there is none."""
        letter, passes, n = self.shell_letter, self.tube_passes, self.shells_in_series
        counter = self.first_pass == "counter"
        if letter == "F" and self.long_baffle_leakage:
            return "no closed relation is known for an F shell with leakage past its longitudinal baffle"
        if letter in "EF" and passes == self.shell_type.passes:
            if counter:
                return exact.effectiveness_counter
            return lambda NTU, Cr: self._in_series(exact.effectiveness_cocurrent, NTU, Cr)
        if letter == "E" and passes % 2 == 0:
            shells, of_shell = n, passes
        elif letter == "F" and passes % 4 == 0 and counter:
            # Each shell pass with its tubes is an E shell; the two are in series.
            shells, of_shell = 2 * n, passes // 2
        elif letter == "X" and passes == 1:
            return lambda NTU, Cr: self._in_series(exact.effectiveness_crossflow_unmixed, NTU, Cr)
        else:
            return (
                f"no closed relation is used for a {letter} shell with {passes} tube "
                f"{'pass' if passes == 1 else 'passes'}; the march stands alone"
            )
        return lambda NTU, Cr: exact.effectiveness_shell(
            NTU, Cr, shells, tube_passes=of_shell, tubes_are_min=inside_is_min
        )

    def _in_series(self, relation: exact.Relation, NTU: Array, Cr: Array) -> Array:
        """A train in counterflow of shells that each follow a relation alike for both fluids."""
        n = self.shells_in_series
        if n == 1:
            return relation(NTU, Cr)
        return exact.effectiveness_counter(n * exact.ntu_counter(relation(NTU / n, Cr), Cr), Cr)

    def effectiveness(self, NTU: Array, Cr: Array, inside_is_min: NDArray[np.bool_]) -> Array | str:
        relation = self._relation(np.asarray(inside_is_min, dtype=bool))
        return relation if isinstance(relation, str) else relation(NTU, Cr)

    @property
    def _two_passes(self) -> bool:
        return self.shell_letter == "E" and self.tube_passes == 2

    @property
    def F_through_effectiveness(self) -> bool:
        return self.shell_letter == "X" and not isinstance(self._relation(np.array([True])), str)

    @property
    def _one_way(self) -> bool:
        """Whether the arrangement is plain counter or co-current flow."""
        return self._relation(np.array([True])) is exact.effectiveness_counter or self.arrangement == "co-current"

    def driving_force(self, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> tuple[Array, Array] | str:
        change = {side: np.abs(T_out[side] - T_in[side]) for side in T_in}
        inside_is_min = change["inside"] >= change["outside"]
        relation = self._relation(inside_is_min)
        if isinstance(relation, str):
            return relation
        outside = (
            (T_out["outside"], T_in["outside"])
            if self.arrangement == "counter"
            else (T_in["outside"], T_out["outside"])
        )
        ends = [a - b for a, b in zip((T_in["inside"], T_out["inside"]), outside, strict=True)]
        lmtd = exact.log_mean(np.abs(ends[0]), np.abs(ends[1]))
        if self._one_way:
            # Ends of opposite sign have crossed: no area of this arrangement gives them.
            return lmtd, np.where(ends[0] * ends[1] > 0, 1.0, 0.0)
        larger, smaller = np.maximum(*change.values()), np.minimum(*change.values())
        P = larger / np.abs(T_in["inside"] - T_in["outside"])
        R = smaller / np.where(larger == 0, 1.0, larger)
        if self._two_passes:
            return lmtd, exact.correction_factor(P, R, self.shells_in_series)
        needed = exact.ntu(relation, P, R)
        return lmtd, np.where(np.isinf(needed), 0.0, exact.ntu_counter(P, R) / np.where(needed == 0, 1.0, needed))

    # --- what does not go together ----------------------------------------------------------------------------------

    def checks(self) -> tuple[Iterator[Problem], ...]:
        return self.problems(), self._wall_problems()

    def problems(self) -> Iterator[Problem]:
        tema_sound = True
        for problem in self._tema_problems():
            tema_sound = False
            yield problem
        yield from self._wall_problems()
        size_sound = True
        for problem in self._size_problems(tema_sound):
            size_sound = False
            yield problem
        if tema_sound:
            yield from self._baffle_problems(size_sound)

    def _tema_problems(self) -> Iterator[Problem]:
        letters = self.tema.upper()
        if len(letters) != 3:
            says = f'"{self.tema}" is not a TEMA type; allowed are three letters: front head, shell, rear head'
            yield Problem(path="tema", says=says)
            return
        front, kind, rear = letters[0], letters[1], letters[2]
        if front not in FRONT_HEADS:
            says = f'"{front}" is not a front head that is offered; allowed are {", ".join(FRONT_HEADS)}'
            yield Problem(path="tema", says=says)
        if kind == "K":
            says = '"K" shells are kettle reboilers, which boil; they are not rated here'
            yield Problem(path="tema", says=says)
        elif kind not in SHELLS:
            yield Problem(path="tema", says=f'"{kind}" is not a shell that is offered; allowed are {", ".join(SHELLS)}')
        if rear not in REAR_HEADS:
            yield Problem(path="tema", says=f'"{rear}" is not a rear head; allowed are {", ".join(REAR_HEADS)}')
        passes = self.tube_passes
        if rear == "U" and passes % 2:
            says = f"{passes} cannot be: U-tubes lead back to the front head, so their passes are even"
            yield Problem(path="tube_passes", says=says)
        if kind == "F" and passes % 2:
            says = f"{passes} cannot be halved: an F shell has half of its tube passes in each shell pass"
            yield Problem(path="tube_passes", says=says)
        if kind in "GH" and passes > 1 and passes % 2:
            says = f"{passes} does not fit: a {kind} shell has one tube pass or an even number"
            yield Problem(path="tube_passes", says=says)
        if rear == "U" and self.tubes % 2:
            says = f"{self.tubes} is odd; U-tubes are counted by their legs, two for each"
            yield Problem(path="tubes", says=says)
        for name in ("u_bend_length", "u_bend_area"):
            if rear != "U" and getattr(self, name):
                yield Problem(path=name, says=f"is for U-tubes only; the rear head is {rear}")
        if kind != "F" and self.long_baffle_leakage:
            says = f"is for F shells only; the shell is {kind}"
            yield Problem(path="long_baffle_leakage", says=says)
        if kind != "J" and self.shell_inlets != 1:
            yield Problem(path="shell_inlets", says="is for J shells only")

    def _wall_problems(self) -> Iterator[Problem]:
        if (self.material is None) == (self.wall_conductivity is None):
            says = 'one of "material" and "wall_conductivity" must be stated, and not both'
            yield Problem(path="material", says=says)
        elif self.material is not None:
            try:
                standard_sizes.conductivity(self.material, np.asarray(300.0))
            except ValueError as error:
                yield Problem(path="material", says=str(error))
        if (self.tube_wall is None) == (self.gauge is None):
            says = 'one of "tube_wall" and "gauge" must be stated, and not both'
            yield Problem(path="tube_wall", says=says)
            return
        try:
            bore = self.tube_id
        except ValueError as error:
            yield Problem(path="gauge", says=str(error))
            return
        if bore <= 0:
            says = f"leaves no bore in a tube of {self.tube_od * 1e3:.4g} mm; allowed is below half of the diameter"
            yield Problem(path="gauge" if self.gauge is not None else "tube_wall", says=says)
        elif self.inside_roughness > 0.05 * bore:
            says = f"is over 5 % of the bore of {bore * 1e3:.4g} mm; allowed is up to that"
            yield Problem(path="inside_roughness", says=says)

    def _size_problems(self, tema_sound: bool) -> Iterator[Problem]:
        if self.tubes_plugged >= self.tubes:
            says = f"{self.tubes_plugged} of {self.tubes} tubes leaves none open; allowed is up to {self.tubes - 1}"
            yield Problem(path="tubes_plugged", says=says)
        if self.tubes < self.tube_passes:
            says = f"{self.tubes} cannot fill {self.tube_passes} passes; allowed is at least one tube a pass"
            yield Problem(path="tubes", says=says)
        if self.tube_pitch < 1.15 * self.tube_od:
            says = (
                f"{_mm(self.tube_pitch)} is below 1.15 tube diameters of {_mm(self.tube_od)}; allowed is from "
                f"{_mm(1.15 * self.tube_od)}"
            )
            yield Problem(path="tube_pitch", says=says)
        if self.bundle_diameter is not None and self.bundle_diameter >= self.shell_id:
            says = f"{_mm(self.bundle_diameter)} does not fit into the shell of {_mm(self.shell_id)}"
            yield Problem(path="bundle_diameter", says=says)
        elif tema_sound and self.outer_tube_limit < 2 * self.tube_od + self.tube_pitch:
            says = f"{_mm(self.shell_id)} is too small for a bundle of tubes of {_mm(self.tube_od)}"
            yield Problem(path="shell_id", says=says)
        elif tema_sound and self.crowding > REFUSED_COUNT:
            says = (
                f"{self.tubes} in a shell of {_mm(self.shell_id)} is {self.crowding:.0%} more than published layouts "
                f"hold; allowed is up to {REFUSED_COUNT:.0%} more"
            )
            yield Problem(path="tubes", says=says)

    @property
    def crowding(self) -> float:
        """By how much the tubes exceed the largest published count, as a fraction of it; negative when below."""
        return self.tubes / self.usual_tube_count.most - 1

    def _baffle_problems(self, size_sound: bool) -> Iterator[Problem]:
        if self.shell_letter == "X":
            for name in ("baffle_cut", "baffle_spacing", "inlet_spacing", "outlet_spacing", "baffles"):
                if getattr(self, name) is not None:
                    says = "is not used: an X shell is rated as one bank without baffles; leave it out"
                    yield Problem(path=name, says=says)
            return
        sound = True
        for name in ("baffle_cut", "baffle_spacing"):
            if getattr(self, name) is None:
                sound = False
                yield Problem(path=name, says="is missing")
        if self.baffle_cut is not None and not 0.10 <= self.baffle_cut <= 0.49:
            sound = False
            says = f"{self.baffle_cut:.3g} of the shell bore is out of bounds; allowed is 10 to 49 %"
            yield Problem(path="baffle_cut", says=says)
        if self.baffle_spacing is not None:
            try:
                _ = self.path_spacings
            except ValueError as error:
                sound = False
                path = (
                    "baffles"
                    if self.baffles is not None and self.baffle_spacing < self.tube_length
                    else "baffle_spacing"
                )
                yield Problem(path=path, says=str(error))
        try:
            _ = self.baffle_clearance
        except ValueError as error:
            sound = False
            yield Problem(path="shell_baffle_clearance", says=str(error))
        for problem in self._gap_problems() if size_sound else ():
            sound = False
            yield problem
        if sound and size_sound:
            try:
                _ = self.geometry
            except ValueError as error:
                yield Problem(path="", says=str(error))

    def _gap_problems(self) -> Iterator[Problem]:
        """Gaps that are wider than what they lie in."""
        for name, most, place in (
            ("shell_baffle_clearance", self.shell_id - self.outer_tube_limit, "the baffles hold all tubes"),
            ("tube_hole_clearance", self.tube_pitch - self.tube_od, "the holes do not meet"),
        ):
            if (getattr(self, name) or 0.0) > most:
                says = f"{_mm(getattr(self, name))} is too wide; allowed is up to {_mm(most)}, so that {place}"
                yield Problem(path=name, says=says)
        lanes = self.pass_lanes * self.pass_lane_width
        if lanes >= self.outer_tube_limit:
            says = f"{self.pass_lanes} lanes of {_mm(self.pass_lane_width)} leave nothing of a bundle of "
            yield Problem(path="pass_lane_width", says=says + _mm(self.outer_tube_limit))


__all__ = ["SHELLS", "ShellAndTube", "ShellType"]
