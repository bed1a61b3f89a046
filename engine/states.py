"""What a rating holds: one state of one exchanger by one method, its sides and its profile; the rated case."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import nan

from engine.case import Case
from engine.correlations import Array, Correlation, Excursion
from engine.stated import Side


@dataclass(frozen=True, kw_only=True)
class Profile:
    """Temperatures along the exchanger of one point; x is the area fraction from the inside inlet on, both ends and
    the cell centres; of the rest of the area where part of it is flooded by condensate. Wall temperatures are those of
    the metal's two faces; `surface` those the fluids touch."""

    x: Array
    T: Mapping[Side, Array]
    wall_T: Mapping[Side, Array]
    surface_T: Mapping[Side, Array]
    regime: Mapping[Side, tuple[str, ...]]
    heat_flux: Array
    """On the outside bare area, hot to cold [W/m²]."""


@dataclass(frozen=True, kw_only=True)
class SideState:
    """One side of a solved state. Re, Pr, velocity and drop of condensing steam are not rated: NaN here, null in the
    result file."""

    flow: float
    """Of the whole stream [kg/s]; of condensing steam what condenses."""
    T_in: float
    T_out: float
    h: float
    Re: float
    Pr: float
    velocity: float
    regime: str
    drops: Mapping[str, float]
    R_fouling: float
    relations: tuple[Correlation, ...]
    excursions: tuple[Excursion, ...]
    properties_in: Mapping[str, float]
    properties_out: Mapping[str, float]
    second_opinions: Mapping[str, float]
    surface_T: tuple[float, float]
    """Lowest and highest temperature of the surface that the fluid touches [K]."""
    second_opinion_drops: Mapping[str, float] = field(default_factory=dict)
    """By other published relations and coefficients, by name [Pa]."""

    @property
    def dp(self) -> float:
        return sum(self.drops.values()) if self.drops else nan


@dataclass(frozen=True, kw_only=True)
class Zone:
    """Part of what condensing steam gives. Desuperheating has no area of its own: it condenses on the wet wall."""

    name: str
    """desuperheating, condensing or subcooling."""
    duty: float
    area: float | None = None
    U: float | None = None
    mtd: float | None = None


@dataclass(frozen=True, kw_only=True)
class Chest:
    """The condensing side of one state. Pressures are absolute."""

    side: Side
    p_supply: float
    p: float
    """At which the chest settles: as supplied, or lower where less steam comes than the area would condense."""
    T_sat: float
    flow: float
    """What condenses [kg/s]."""
    flow_most: float | None
    """What comes at most, where it is stated."""
    heat: float
    """What a kilogram gives [J/kg]."""
    zones: tuple[Zone, ...]
    T_vapour: float
    """At which vapour enters the chest, let down to its pressure [K]."""
    dry_surface: float | None
    """Temperature of the hottest surface if vapour touched it dry; None where the vapour is saturated [K]."""
    p_required: float | None = None
    """At which the area would give just the required duty."""
    p_required_problem: str = ""
    """Why there is no such pressure, where a duty is required."""
    stall_duty: float | None = None
    """With the chest at the stated back pressure: at any smaller duty condensate no longer drains."""

    @property
    def throttled(self) -> bool:
        return self.p < self.p_supply * (1 - 1e-6)


@dataclass(frozen=True, kw_only=True)
class State:
    """One state of the exchanger by one method."""

    method: str
    state: str
    duty: float
    T_out: Mapping[Side, float]
    area: float
    mtd: float
    F: float
    effectiveness: float
    NTU: float
    U_clean: float
    U_dirty: float
    resistances: Mapping[str, float]
    """Outside film, outside fouling, wall, inside fouling, inside film [m²K/W] on the outside bare area."""
    U_required: float | None = None
    margin: float | None = None
    required_duty: float | None = None
    sides: Mapping[Side, SideState] = field(default_factory=dict)
    profile: Profile | None = None
    chest: Chest | None = None
    """Where steam condenses."""
    wall_R: float = 0.0
    surface_T: Mapping[Side, float] = field(default_factory=dict)
    """Mean temperature of the surface that each fluid touches [K]."""
    converged: bool = True
    iterations: int = 0
    residual: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Rating:
    """A rated case: both states by the march, the fouled state by every method, or the reason why there is none."""

    case: Case
    states: Mapping[str, State]
    methods: Mapping[str, State | str]
    problem: str = ""
    """A sentence when the physics leaves no answer, such as a liquid that boils at the wall."""
    requirement: str = ""
    """Why a stated outlet gives no required U, when it does not."""

    @property
    def fouled(self) -> State:
        return self.states["fouled"]

    @property
    def clean(self) -> State:
        return self.states["clean"]
