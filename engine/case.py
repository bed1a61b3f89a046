"""All that a user can state about one exchanger in service: streams, exchanger, limits, names. Frozen, SI inside."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator, Mapping
from dataclasses import replace
from functools import cached_property
from typing import Annotated, Any, ClassVar, Literal

import numpy as np
from pydantic import BeforeValidator, Discriminator, Field, Tag

from engine import fluids
from engine.exchangers.double_pipe import DoublePipe
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.sheet import Sheet
from engine.stated import SIDES, Choice, Count, Figure, Input, Problem, Side, Stated, Words, opposite

ATMOSPHERE = 101325.0


class TableRow(Input):
    """Properties at one temperature, as printed on a sheet or measured."""

    T: Annotated[float, Stated("temperature", "Temperature", low=50.0, high=2000.0, example="40 degC")]
    rho: Annotated[float, Stated("density", "Density", above=0.0, high=25000.0, example="862 kg/m3")]
    cp: Annotated[float, Stated("specific_heat", "Specific heat", above=0.0, high=50e3, example="1.95 kJ/kgK")]
    k: Annotated[float, Stated("conductivity", "Thermal conductivity", above=0.0, high=500.0, example="0.131 W/mK")]
    mu: Annotated[float, Stated("viscosity", "Dynamic viscosity", above=0.0, high=1e5, example="39.6 cP")]


class Constants(Input):
    """Properties that stay the same at every temperature."""

    rho: Annotated[float, Stated("density", "Density", above=0.0, high=25000.0, example="862 kg/m3")]
    cp: Annotated[float, Stated("specific_heat", "Specific heat", above=0.0, high=50e3, example="1.95 kJ/kgK")]
    k: Annotated[float, Stated("conductivity", "Thermal conductivity", above=0.0, high=500.0, example="0.131 W/mK")]
    mu: Annotated[float, Stated("viscosity", "Dynamic viscosity", above=0.0, high=1e5, example="39.6 cP")]


class PureFluid(Input):
    """A fluid that the property library knows by name."""

    tag_name: ClassVar[str] = "pure"
    name: Annotated[str, Words("Fluid", 80, help="A pure fluid or thermal oil of the list of fluids.")]

    def spec(self, atmosphere: float) -> fluids.Specification:
        return fluids.Pure(self.name)

    def problems(self) -> Iterator[Problem]:
        yield from _name_problems(self.name, "fluid", "")


class SolutionFluid(Input):
    """An aqueous or similar solution by mass fraction."""

    tag_name: ClassVar[str] = "solution"
    solution: Annotated[str, Words("Solution", 80, help="For example ethylene glycol, or the library's own code MEG.")]
    mass_fraction: Annotated[
        float, Stated("fraction", "Mass fraction of the dissolved part", low=0.0, high=1.0, example="35 %")
    ]

    def spec(self, atmosphere: float) -> fluids.Specification:
        return fluids.Solution(self.solution, float(self.mass_fraction))

    def problems(self) -> Iterator[Problem]:
        yield from _name_problems(self.solution, "solution", "solution")


def _name_problems(name: str, kind: Literal["fluid", "solution"], path: str) -> Iterator[Problem]:
    """A name that nothing is known by is wrong before any temperature is stated."""
    if not name.strip():
        yield Problem(path=path, says="is missing")
        return
    try:
        fluids.check_name(name, kind)
    except fluids.FluidError as error:
        yield Problem(path=path, says=str(error))


SLIGHT_SUPERHEAT = 50.0
"""Up to which superheat is taken off by condensation on the wet wall [K]."""


class SteamState(Input):
    """Pressure of condensing steam, how far it enters above and leaves below saturation, and what hinders it."""

    p: Annotated[
        float,
        Stated(("pressure_gauge", "pressure_absolute"), "Steam pressure", low=-101325.0, high=22e6, example="3 barg"),
    ]
    superheat: Annotated[
        float,
        Stated(
            "temperature_difference",
            "Superheat at the inlet",
            low=0.0,
            high=600.0,
            assumed="dry saturated steam",
            example="0 K",
        ),
    ] = 0.0
    subcooling: Annotated[
        float,
        Stated(
            "temperature_difference",
            "Subcooling of the condensate",
            low=0.0,
            high=150.0,
            help="It stands under condensate for that: part of the area is flooded.",
            assumed="condensate leaves at saturation",
            example="0 K",
        ),
    ] = 0.0
    back_pressure: Annotated[
        float | None,
        Stated(
            ("pressure_gauge", "pressure_absolute"),
            "Back pressure of the condensate",
            low=-101325.0,
            high=22e6,
            help="Behind the trap, lift of the condensate included: below it nothing drains.",
            example="0.5 barg",
        ),
    ] = None
    noncondensable: Annotated[
        float | None,
        Stated(
            "fraction",
            "Air in the steam by mass",
            low=0.0,
            high=0.5,
            help="For a warning only; gas that gathers is not rated.",
            example="0.5 %",
        ),
    ] = None
    vent_T: Annotated[
        float | None,
        Stated(
            "temperature",
            "Temperature at the vent",
            low=273.0,
            high=700.0,
            help="As read where gas would gather; for a warning only.",
            example="135 degC",
        ),
    ] = None

    def problems(self) -> Iterator[Problem]:
        if self.superheat > SLIGHT_SUPERHEAT:
            yield Problem(
                path="superheat",
                says=f'"{_text(self.superheat)}" is more than slight: a dry zone that takes off superheat is not '
                f"rated; allowed is up to {SLIGHT_SUPERHEAT:g} K",
            )


class SteamFluid(Input):
    """Condensing steam, saturated or slightly superheated."""

    tag_name: ClassVar[str] = "steam"
    steam: SteamState

    def spec(self, atmosphere: float) -> fluids.Specification:
        return fluids.Pure("water")

    def problems(self) -> Iterator[Problem]:
        for problem in self.steam.problems():
            yield problem.under("steam")


class TableFluid(Input):
    """A fluid by the user's own property table."""

    tag_name: ClassVar[str] = "table"
    name: Annotated[str, Words("Name", 80)]
    table: Annotated[tuple[TableRow, ...], Field(min_length=2, max_length=40)]

    def spec(self, atmosphere: float) -> fluids.Specification:
        rows = sorted(self.table, key=lambda row: row.T)
        return fluids.Table(
            self.name,
            tuple(
                fluids.TablePoint(T=float(r.T), rho=float(r.rho), cp=float(r.cp), k=float(r.k), mu=float(r.mu))
                for r in rows
            ),
        )

    def problems(self) -> Iterator[Problem]:
        temperatures = [float(row.T) for row in self.table]
        if len(set(temperatures)) < len(temperatures):
            yield Problem(
                path="table", says="gives the same temperature twice; each row needs a temperature of its own"
            )


class ConstantFluid(Input):
    """A fluid by constant properties as printed on a sheet."""

    tag_name: ClassVar[str] = "constant"
    name: Annotated[str, Words("Name", 80)]
    constant: Constants

    def spec(self, atmosphere: float) -> fluids.Specification:
        c = self.constant
        return fluids.Constant(name=self.name, rho=float(c.rho), cp=float(c.cp), k=float(c.k), mu=float(c.mu))


FLUIDS: dict[str, type[Input]] = {
    "pure": PureFluid,
    "solution": SolutionFluid,
    "steam": SteamFluid,
    "table": TableFluid,
    "constant": ConstantFluid,
}


def fluid_tag(given: Any) -> str | None:
    if isinstance(given, Input):
        return str(getattr(given, "tag_name", ""))
    if isinstance(given, dict):
        return next((tag for tag in list(FLUIDS)[1:] if tag in given), "pure" if "name" in given else None)
    return None


def _named(given: Any) -> Any:
    return {"name": given} if isinstance(given, str) else given


_FluidGiven = (
    Annotated[str, Words("Fluid", 80, help="A pure fluid or thermal oil of the list of fluids.")]
    | PureFluid
    | SolutionFluid
    | SteamFluid
    | TableFluid
    | ConstantFluid
)

FluidInput = Annotated[
    Annotated[PureFluid, Tag("pure")]
    | Annotated[SolutionFluid, Tag("solution")]
    | Annotated[SteamFluid, Tag("steam")]
    | Annotated[TableFluid, Tag("table")]
    | Annotated[ConstantFluid, Tag("constant")],
    Discriminator(
        fluid_tag,
        custom_error_type="not_a_fluid",
        custom_error_message="is not a fluid",
        custom_error_context={
            "says": 'is not a fluid; allowed is a name such as "Water", {"solution", "mass_fraction"}, '
            '{"steam"}, {"name", "table"} or {"name", "constant"}'
        },
    ),
    BeforeValidator(_named, json_schema_input_type=_FluidGiven),
]

PRESSURE = ("pressure_gauge", "pressure_absolute")


def absolute(p: float, atmosphere: float) -> float:
    """Absolute pressure [Pa] of a stated one, which is gauge when its unit says so."""
    gauge = isinstance(p, Figure) and p.quantity == "pressure_gauge"
    return float(p) + atmosphere if gauge else float(p)


LEAST_FLOW, MOST_FLOW = 1e-9, 1e5
"""kg/s or m³/s: beyond them no exchanger runs, and figures lose their digits."""
FLOW = Stated(
    ("mass_flow", "volume_flow"),
    "Flow",
    low=LEAST_FLOW,
    above=0.0,
    high=MOST_FLOW,
    help="By mass, or by volume at the inlet temperature and pressure.",
    example="42 m3/h",
)
T_IN = Stated("temperature", "Inlet temperature", low=50.0, high=1500.0, example="27 degC")
R_FOULING = Stated(
    "fouling_resistance",
    "Fouling resistance",
    low=0.0,
    high=0.1,
    help="On this side's own surface.",
    example="0.00018 m2K/W",
)


class Stream(Input):
    """One fluid on its way through the exchanger."""

    fluid: FluidInput
    flow: Annotated[float | None, FLOW] = None
    T_in: Annotated[float | None, T_IN] = None
    p_in: Annotated[
        float | None,
        Stated(PRESSURE, "Inlet pressure", low=-ATMOSPHERE, high=1e8, example="4.2 barg"),
    ] = None
    T_out: Annotated[
        float | None,
        Stated("temperature", "Required outlet temperature", low=50.0, high=1500.0, example="52 degC"),
    ] = None
    R_fouling: Annotated[float, replace(R_FOULING, assumed="no fouling, since none is stated")] = 0.0
    dp_allowed: Annotated[
        float | None,
        Stated("pressure_difference", "Allowed pressure drop", above=0.0, high=1e7, example="70 kPa"),
    ] = None

    @property
    def condenses(self) -> bool:
        return isinstance(self.fluid, SteamFluid)

    def problems(self) -> Iterator[Problem]:
        for problem in self.fluid.problems():
            yield problem.under("fluid")
        if isinstance(R := self.R_fouling, Figure) and R.sd and not R:
            says = (
                f'"{R.text}" lays a ± about no fouling; allowed is a resistance above zero with its ±, or zero without'
            )
            yield Problem(path="R_fouling", says=says)
        if self.condenses:
            for name in ("T_in", "p_in", "T_out"):
                if getattr(self, name) is not None:
                    yield Problem(path=name, says="is not stated for steam: its pressure and superheat decide it")
            if isinstance(self.flow, Figure) and self.flow.quantity == "volume_flow":
                yield Problem(path="flow", says=f'"{_text(self.flow)}" is a volume; allowed for steam is a mass flow')
            return
        for name in ("flow", "T_in", "p_in"):
            if getattr(self, name) is None:
                yield Problem(path=name, says="is missing")


class Limits(Input):
    """What the equipment may see. Every one is optional; a rule whose limit is not stated says so."""

    inside_design_pressure: Annotated[float | None, Stated(PRESSURE, "Design pressure, inside", high=1e8)] = None
    outside_design_pressure: Annotated[float | None, Stated(PRESSURE, "Design pressure, outside", high=1e8)] = None
    inside_test_pressure: Annotated[float | None, Stated(PRESSURE, "Test pressure, inside", high=1e8)] = None
    outside_test_pressure: Annotated[float | None, Stated(PRESSURE, "Test pressure, outside", high=1e8)] = None
    inside_design_temperature: Annotated[float | None, Stated("temperature", "Design temperature, inside")] = None
    outside_design_temperature: Annotated[float | None, Stated("temperature", "Design temperature, outside")] = None
    minimum_metal_temperature: Annotated[float | None, Stated("temperature", "Minimum metal temperature")] = None
    inside_wall_T_max: Annotated[
        float | None,
        Stated("temperature", "Highest wall temperature, inside", help="Scaling, coking, cracking or film limit."),
    ] = None
    outside_wall_T_max: Annotated[float | None, Stated("temperature", "Highest wall temperature, outside")] = None
    inside_wall_T_min: Annotated[
        float | None, Stated("temperature", "Lowest wall temperature, inside", help="Pour point, wax, freezing.")
    ] = None
    outside_wall_T_min: Annotated[float | None, Stated("temperature", "Lowest wall temperature, outside")] = None
    inside_velocity_max: Annotated[float | None, Stated("velocity", "Highest velocity, inside", above=0.0)] = None
    outside_velocity_max: Annotated[float | None, Stated("velocity", "Highest velocity, outside", above=0.0)] = None


class Operating(Input):
    """A condition beside the one of the case, such as turndown or winter water. What is not stated stays as there."""

    name: Annotated[str, Words("Name", 40)]
    inside_flow: Annotated[float | None, replace(FLOW, name="Flow, inside")] = None
    outside_flow: Annotated[float | None, replace(FLOW, name="Flow, outside")] = None
    inside_T_in: Annotated[float | None, replace(T_IN, name="Inlet temperature, inside")] = None
    outside_T_in: Annotated[float | None, replace(T_IN, name="Inlet temperature, outside")] = None
    inside_R_fouling: Annotated[float | None, replace(R_FOULING, name="Fouling resistance, inside")] = None
    outside_R_fouling: Annotated[float | None, replace(R_FOULING, name="Fouling resistance, outside")] = None
    tubes_plugged: Annotated[int | None, Count("Tubes plugged", 0, 50000, help="Of one shell.")] = None


EXCHANGERS: dict[str, type[Input]] = {"double-pipe": DoublePipe, "shell-and-tube": ShellAndTube}


def _exchanger_tag(given: Any) -> str | None:
    tag = given.get("type") if isinstance(given, dict) else getattr(given, "type", None)
    return tag if isinstance(tag, str) and tag in EXCHANGERS else None


ExchangerInput = Annotated[
    Annotated[DoublePipe, Tag("double-pipe")] | Annotated[ShellAndTube, Tag("shell-and-tube")],
    Discriminator(
        _exchanger_tag,
        custom_error_type="not_an_exchanger",
        custom_error_message="is not an exchanger",
        custom_error_context={
            "key": "type",
            "allowed": '"double-pipe" or "shell-and-tube"',
            "says": 'is not a group of keys in braces; its "type" says which exchanger it is',
        },
    ),
]


class Case(Input):
    """One exchanger in one service, as stated by the user."""

    format: Annotated[str, Choice("Format", ("countercheck-case",))] = "countercheck-case"
    version: Annotated[int, Field(description="Version of the case file's keys.")] = 1
    tag: Annotated[str, Words("Tag", 60)] = ""
    service: Annotated[str, Words("Service", 200)] = ""
    plant: Annotated[str, Words("Plant", 200)] = ""
    revision: Annotated[str, Words("Revision", 40)] = ""
    prepared_by: Annotated[str, Words("Prepared by", 80)] = ""
    teaches: Annotated[str, Words("What the case teaches", 600, lines=True)] = ""
    notes: Annotated[str, Words("Notes", 4000, lines=True)] = ""
    atmosphere: Annotated[
        float,
        Stated(
            "pressure_absolute",
            "Atmospheric pressure",
            low=5e4,
            high=1.2e5,
            help="Added to gauge pressures.",
            assumed="standard atmosphere",
            example="101.325 kPa a",
        ),
    ] = ATMOSPHERE
    inside: Stream
    outside: Stream
    exchanger: ExchangerInput
    limits: Limits = Limits()
    sheet: Sheet | None = None
    operating: Annotated[tuple[Operating, ...], Field(max_length=12)] = ()

    @classmethod
    def idle(cls, given: Mapping[str, Any]) -> frozenset[str]:
        """By path: what the exchanger names of its own, and how it lies where no steam condenses."""
        parts = {name: part if isinstance(part := given.get(name), Mapping) else {} for name in ("exchanger", *SIDES)}
        kind = EXCHANGERS.get(str(parts["exchanger"].get("type")))
        names = kind.idle(parts["exchanger"]) if kind else frozenset()
        fluids_given = [parts[side].get("fluid") for side in SIDES]
        if not any(isinstance(fluid, Mapping) and "steam" in fluid for fluid in fluids_given):
            names |= {"orientation"}
        return frozenset(f"exchanger.{name}" for name in names)

    @cached_property
    def idle_fields(self) -> frozenset[str]:
        """Paths of the fields that decide nothing in this case; their defaults assume nothing."""
        gauge = any(isinstance(leaf, Figure) and leaf.quantity == "pressure_gauge" for *_, leaf in self.leaves())
        return self.idle(self.model_dump(exclude_unset=True)) | (frozenset() if gauge else {"atmosphere"})

    def stream(self, side: Side) -> Stream:
        return self.inside if side == "inside" else self.outside

    @property
    def steam_side(self) -> Side | None:
        """The side on which steam condenses."""
        return next((side for side in SIDES if self.stream(side).condenses), None)

    @property
    def hot(self) -> Side:
        return "inside" if self.T_in("inside") > self.T_in("outside") else "outside"

    @property
    def cold(self) -> Side:
        return "outside" if self.hot == "inside" else "inside"

    def p_in(self, side: Side) -> float:
        """Absolute inlet pressure [Pa]."""
        stream = self.stream(side)
        if isinstance(stream.fluid, SteamFluid):
            return absolute(stream.fluid.steam.p, self.atmosphere)
        assert stream.p_in is not None
        return absolute(stream.p_in, self.atmosphere)

    def p_back(self, side: Side) -> float | None:
        """Absolute back pressure of a side's condensate [Pa], where it condenses and that is stated."""
        fluid = self.stream(side).fluid
        p = fluid.steam.back_pressure if isinstance(fluid, SteamFluid) else None
        return None if p is None else absolute(p, self.atmosphere)

    def T_in(self, side: Side) -> float:
        """Inlet temperature [K]."""
        stream = self.stream(side)
        if isinstance(stream.fluid, SteamFluid):
            return fluids.saturation(self.p_in(side)).T_sat + float(stream.fluid.steam.superheat)
        assert stream.T_in is not None
        return float(stream.T_in)

    def fluid(self, side: Side) -> fluids.Fluid:
        """The side's fluid at its inlet pressure; of condensing steam its condensate.

        FluidError with a sentence where it cannot be offered.
        """
        if self.stream(side).condenses:
            return fluids.saturation(self.p_in(side)).liquid
        return fluids.fluid_at(self.stream(side).fluid.spec(self.atmosphere), self.p_in(side), self.T_in(side))

    def flow(self, side: Side) -> float | None:
        """Mass flow [kg/s]; None for steam whose flow is solved for."""
        flow = self.stream(side).flow
        if isinstance(flow, Figure) and flow.quantity == "volume_flow":
            return float(flow) * float(self.fluid(side).at(np.asarray(self.T_in(side))).rho)
        return None if flow is None else float(flow)

    @property
    def input_hash(self) -> str:
        """Over the canonical SI values at 9 digits, so that the units a figure was typed in leave it unchanged."""
        text = json.dumps(canonical(self), sort_keys=True, ensure_ascii=True)
        return hashlib.sha256(text.encode()).hexdigest()[:16]

    def problems(self) -> Iterator[Problem]:
        sound = True
        for side in SIDES:
            for problem in self.stream(side).problems():
                sound = False
                yield problem.under(side)
        whole = True
        for problem in self.exchanger.problems():
            whole = False
            yield problem.under("exchanger")
        steam = self.steam_side
        if whole and steam is not None and isinstance(reason := self.exchanger.condensing_surface(steam), str):
            yield Problem(path=f"{steam}.fluid", says=reason)
        yield from self._operating_problems()
        if sound:
            yield from stream_problems({side: self.stream(side) for side in SIDES}, float(self.atmosphere))

    def _operating_problems(self) -> Iterator[Problem]:
        """Only what no condition could mean; where the physics leaves one without an answer, its column says so."""
        names = [condition.name.strip().lower() for condition in self.operating]
        tubes = getattr(self.exchanger, "tubes", None)
        for i, condition in enumerate(self.operating):
            place, plugged = f"operating[{i}]", condition.tubes_plugged
            if not names[i]:
                yield Problem(path=f"{place}.name", says="is empty; each condition needs a name of its own")
            elif names[i] in names[:i]:
                says = f'"{condition.name}" stands twice; each condition needs a name of its own'
                yield Problem(path=f"{place}.name", says=says)
            if plugged is not None and tubes is None:
                says = f"is not stated for a {self.exchanger.type} exchanger: it has no tubes to plug"
                yield Problem(path=f"{place}.tubes_plugged", says=says)
            elif plugged is not None and tubes is not None and plugged >= tubes:
                says = f"{plugged} of {tubes} tubes leaves none open; allowed is up to {tubes - 1}"
                yield Problem(path=f"{place}.tubes_plugged", says=says)
            for side in SIDES:
                if self.stream(side).condenses and getattr(condition, f"{side}_T_in") is not None:
                    says = "is not stated for steam: its pressure and superheat decide it"
                    yield Problem(path=f"{place}.{side}_T_in", says=says)


def stream_problems(streams: Mapping[Side, Stream], atmosphere: float) -> Iterator[Problem]:
    """What does not go together in and between streams: phases at the inlets, temperatures.

    A stream may lack what could not be read; what depends on it is then not judged.
    """
    T_in: dict[Side, float] = {}
    for side, stream in streams.items():
        try:
            if (T := _inlet_temperature(stream, atmosphere)) is not None:
                T_in[side] = T
                yield from (problem.under(side) for problem in _inlet_problems(stream, T, atmosphere))
        except fluids.FluidError as error:
            path = f"{side}.fluid.steam.p" if isinstance(stream.fluid, SteamFluid) else f"{side}.fluid"
            yield Problem(path=path, says=str(error))
    if len(T_in) < 2:
        return
    ends = " and ".join(f"{T_in[side] - 273.15:.6g} °C ({side})" for side in SIDES)
    steam = [side for side in SIDES if isinstance(streams[side].fluid, SteamFluid)]
    if steam:
        yield from _steam_problems(streams, steam, T_in)
        return
    if abs(T_in["inside"] - T_in["outside"]) < 1e-6:
        yield Problem(
            path="outside.T_in",
            says=f"both inlets are at {T_in['outside'] - 273.15:.6g} °C, so no heat flows; "
            "allowed are two different inlet temperatures",
        )
        return
    for side, stream in streams.items():
        if stream.T_out is not None and not min(T_in.values()) < stream.T_out < max(T_in.values()):
            yield Problem(
                path=f"{side}.T_out",
                says=f'"{_text(stream.T_out)}" is against the second law; allowed is between the two inlets, {ends}',
            )


def _steam_problems(streams: Mapping[Side, Stream], steam: list[Side], T: Mapping[Side, float]) -> Iterator[Problem]:
    """What does not go together where steam condenses; `T` is its saturation temperature and the other inlet."""
    if len(steam) > 1:
        yield Problem(
            path="outside.fluid",
            says="condenses steam as the inside does; allowed is steam on one side, a fluid of one phase on the other",
        )
        return
    side, other = steam[0], opposite(steam[0])
    state, T_sat, T_cold = _steam_of(streams[side]), f"{T[side] - 273.15:.4g} °C", f"{T[other] - 273.15:.4g} °C"
    if T[side] - T[other] < 1e-6:
        yield Problem(
            path=f"{side}.fluid.steam.p",
            says=f'"{_text(state.p)}" condenses at {T_sat}, not above the other inlet of {T_cold}; steam must be the '
            "hot side",
        )
        return
    if T[side] - state.subcooling <= T[other]:
        yield Problem(
            path=f"{side}.fluid.steam.subcooling",
            says=f'"{_text(state.subcooling)}" below {T_sat} would be colder than the other inlet; allowed is up to '
            f"{T[side] - T[other]:.4g} K",
        )
    if state.vent_T is not None and state.vent_T > T[side] + 1.0:
        yield Problem(
            path=f"{side}.fluid.steam.vent_T",
            says=f'"{_text(state.vent_T)}" is hotter than the steam condenses ({T_sat}); allowed is up to that',
        )
    T_out = streams[other].T_out
    if T_out is not None and not T[other] < T_out < T[side]:
        yield Problem(
            path=f"{other}.T_out",
            says=f'"{_text(T_out)}" is against the second law; allowed is between the inlet of {T_cold} and the '
            f"{T_sat} at which the steam condenses",
        )


def _steam_of(stream: Stream) -> SteamState:
    assert isinstance(stream.fluid, SteamFluid)
    return stream.fluid.steam


def _inlet_temperature(stream: Stream, atmosphere: float) -> float | None:
    """Of condensing steam the temperature at which it condenses."""
    if isinstance(stream.fluid, SteamFluid):
        return _saturation_temperature(absolute(stream.fluid.steam.p, atmosphere))
    return None if stream.T_in is None else float(stream.T_in)


def _saturation_temperature(p: float) -> float:
    """Raises FluidError beyond the ends of the saturation line."""
    line = fluids.saturation_line()
    low, high = (float(line.p(T)) for T in (line.T_low, line.T_high))
    if not low < p < high:
        raise fluids.FluidError(
            f"{p / 1e5:.4g} bar absolute is no pressure at which steam condenses here; allowed is "
            f"{low / 1e5:.2g} to {high / 1e5:.3g} bar absolute"
        )
    return fluids.saturation(p).T_sat


def _inlet_problems(stream: Stream, T: float, atmosphere: float) -> Iterator[Problem]:
    if stream.fluid is None or isinstance(stream.fluid, SteamFluid) or stream.p_in is None or stream.T_in is None:
        return
    p = absolute(stream.p_in, atmosphere)
    if p <= 0:
        yield Problem(path="p_in", says=f'"{_text(stream.p_in)}" is no pressure; allowed is above a perfect vacuum')
        return
    fluid = fluids.fluid_at(stream.fluid.spec(atmosphere), p, T)
    if trouble := fluid.problem(T, "at the inlet"):
        yield Problem(path="T_in", says=trouble)
        return
    named = isinstance(stream.fluid, PureFluid) and stream.fluid.name.strip().lower()
    boiling = fluid.saturation_temperature(p)
    if fluid.name == "water" and fluid.phase == "gas" and boiling is not None and named and named != "steam":
        yield Problem(
            path="T_in",
            says=f'"{_text(stream.T_in)}" is above the boiling point of water, {boiling - 273.15:.4g} °C at '
            f'{p / 1e5:.4g} bar abs; name the fluid "steam" where its vapour is meant',
        )


def _text(figure: float) -> str:
    return figure.text if isinstance(figure, Figure) and figure.text else f"{float(figure):.6g}"


def canonical(part: Any) -> Any:
    """The stated values as plain JSON: figures in SI at 9 digits with their quantity, names as they are."""
    if isinstance(part, Input):
        return {name: canonical(getattr(part, name)) for name in type(part).model_fields if name != "format"}
    if isinstance(part, (tuple, list)):
        return [canonical(item) for item in part]
    if isinstance(part, float):
        value = f"{float(part):.9g}"
        if isinstance(part, Figure):
            kind = part.quantity if part.quantity in ("volume_flow", "pressure_gauge") else ""
            return [value, kind, None if part.sd is None else f"{part.sd:.9g}"]
        return [value, "", None]
    return part
