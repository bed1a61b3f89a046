"""From a case to its rating: films, U, march or closed form, drops, for any number of operating points at once.

`rate(case)` is `solve` on two points, clean and fouled. There is no second, scalar engine.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray
from scipy.optimize import brentq

from engine import effectiveness as exact
from engine import march
from engine.case import Case
from engine.correlations import Array, Correlation, Excursion
from engine.exchangers import REGIMES, Cells, Film, Flowing
from engine.fluids import Fluid, FluidError, Properties
from engine.stated import SIDES, CaseError, Problem, Side

CHUNK = 256
"""Points solved at once: small enough for the work arrays to stay in the processor's cache."""
TOLERANCE = 1e-9
"""Of the outer loop: largest change of a temperature between two iterations over the inlet difference."""
MOST_ITERATIONS = 60

Texts = NDArray[np.object_]


def opposite(side: Side) -> Side:
    return "outside" if side == "inside" else "inside"


@dataclass(frozen=True, kw_only=True)
class Points:
    """Operating points of one case; every array (P,), SI."""

    flow: Mapping[Side, Array]
    T_in: Mapping[Side, Array]
    R_fouling: Mapping[Side, Array]
    tubes_plugged: Array
    factors: Mapping[str, Array] = field(default_factory=dict)
    """"side:relation" or "side:property" (rho, cp, mu, k) or "wall" to multipliers: how doubt is propagated."""

    def __len__(self) -> int:
        return len(self.tubes_plugged)

    def part(self, rows: slice | NDArray[Any]) -> Points:
        cut = lambda group: {key: value[rows] for key, value in group.items()}  # noqa: E731
        return Points(
            flow=cut(self.flow),
            T_in=cut(self.T_in),
            R_fouling=cut(self.R_fouling),
            tubes_plugged=self.tubes_plugged[rows],
            factors=cut(self.factors),
        )


@dataclass(frozen=True, kw_only=True)
class Profile:
    """Temperatures along the exchanger of one point; x is the area fraction from the inside inlet on, both ends and
    the cell centres. Wall temperatures are those of the metal's two faces; `surface` those the fluids touch."""

    x: Array
    T: Mapping[Side, Array]
    wall_T: Mapping[Side, Array]
    surface_T: Mapping[Side, Array]
    regime: Mapping[Side, tuple[str, ...]]
    heat_flux: Array
    """On the outside bare area, hot to cold [W/m²]."""


@dataclass(frozen=True, kw_only=True)
class SideState:
    """One side of a solved state."""

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

    @property
    def dp(self) -> float:
        return sum(self.drops.values())


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
    wall_R: float = 0.0
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


@dataclass(frozen=True, kw_only=True)
class Solution:
    """Solved points by the march, arrays (P,) or (P, n)."""

    points: Points
    cells: Cells
    duty: Array
    T_out: Mapping[Side, Array]
    entry: Mapping[Side, Array]
    exit: Mapping[Side, Array]
    mean: Mapping[Side, Array]
    surface: Mapping[Side, Array]
    films: Mapping[Side, Film]
    flowing: Mapping[Side, Flowing]
    r: Mapping[str, Array]
    """Local resistances by name, (P, n_cells), on the outside bare area."""
    heat: Array
    drops: Mapping[Side, Mapping[str, Array]]
    iterations: Array
    residual: Array
    problem: Texts

    @cached_property
    def share(self) -> Array:
        return self.cells.layout.cell_area_share

    @cached_property
    def U_local(self) -> Array:
        return 1.0 / sum(self.r.values())

    @cached_property
    def U(self) -> Array:
        return self.U_local @ self.share

    @cached_property
    def resistances(self) -> dict[str, Array]:
        """⟨U r_k⟩/⟨U⟩: so weighted, they sum to 1/U exactly."""
        return {name: (self.U_local * r) @ self.share / self.U for name, r in self.r.items()}

    @cached_property
    def U_clean(self) -> Array:
        R = self.resistances
        return 1.0 / (1.0 / self.U - R["outside fouling"] - R["inside fouling"])

    def drop(self, side: Side) -> Array:
        return sum(self.drops[side].values(), np.zeros(len(self.points)))


def points_of(case: Case, frame: pd.DataFrame | None = None) -> tuple[Points, Texts]:
    """Operating points from a frame (columns by path, SI; what is absent comes from the case), and a problem per row.

    Raises CaseError for an unknown column.
    """
    n = 1 if frame is None else len(frame)
    columns = {f"{side}.{name}" for side in SIDES for name in ("flow", "T_in", "R_fouling")} | {"tubes_plugged"}
    given = {} if frame is None else {str(name): frame[name].to_numpy(float) for name in frame.columns}
    unknown = sorted(set(given) - columns)
    if unknown:
        allowed = ", ".join(sorted(columns))
        raise CaseError([Problem(path=name, says=f"is not a known column; allowed are {allowed}") for name in unknown])

    def column(name: str, default: float) -> Array:
        return given.get(name, np.full(n, default)).astype(float)

    points = Points(
        flow={side: column(f"{side}.flow", case.flow(side) or np.nan) for side in SIDES},
        T_in={side: column(f"{side}.T_in", case.T_in(side)) for side in SIDES},
        R_fouling={side: column(f"{side}.R_fouling", float(case.stream(side).R_fouling)) for side in SIDES},
        tubes_plugged=column("tubes_plugged", float(getattr(case.exchanger, "tubes_plugged", 0))),
    )
    return points, _row_problems(case, points)


def _row_problems(case: Case, points: Points) -> Texts:
    problem = np.full(len(points), "", dtype=object)

    def refuse(rows: NDArray[np.bool_], sentence: str) -> None:
        problem[rows & (problem == "")] = sentence

    for side in SIDES:
        flow, T, R = points.flow[side], points.T_in[side], points.R_fouling[side]
        refuse(~(np.isfinite(flow) & (flow > 0)), f"{side}.flow is not a positive finite number of kg/s")
        refuse(~(np.isfinite(R) & (R >= 0) & (R <= 0.1)), f"{side}.R_fouling is not from 0 to 0.1 m²K/W")
        fluid = case.fluid(side)
        for i in np.flatnonzero(~np.isfinite(T) | fluid.outside(np.nan_to_num(T))):
            sentence = fluid.problem(T[i], "at the inlet") if np.isfinite(T[i]) else "is not a number"
            refuse(np.arange(len(points)) == i, f"{side}.T_in: {sentence}")
    refuse(np.abs(points.T_in["inside"] - points.T_in["outside"]) < 1e-6, "both inlets have the same temperature")
    refuse(~(points.tubes_plugged >= 0), "tubes_plugged is not a count from 0 on")
    return problem


# --- the march ------------------------------------------------------------------------------------------------------


def solve(case: Case, points: Points, *, fineness: int = 1) -> Iterator[tuple[slice, Solution]]:
    """March through all points, chunk after chunk; memory does not grow with their number.

    Points must be sound (see `points_of`). A point that leaves a fluid's usable span carries a sentence in `problem`.
    """
    cells = case.exchanger.cells(fineness)
    fluids = {side: case.fluid(side) for side in SIDES}
    for first in range(0, len(points), CHUNK):
        rows = slice(first, min(first + CHUNK, len(points)))
        yield rows, _march(case, points.part(rows), cells, fluids)


def _properties(fluid: Fluid, T: Array, side: Side, points: Points) -> Properties:
    found = fluid.at(T)
    doubt = {
        name: getattr(found, name) * points.factors[f"{side}:{name}"][:, None]
        for name in ("rho", "cp", "mu", "k")
        if f"{side}:{name}" in points.factors
    }
    return replace(found, **doubt) if doubt else found


def _flowing(fluid: Fluid, side: Side, points: Points, T: Array, T_wall: Array) -> Flowing:
    bulk = _properties(fluid, T, side, points)
    wall = _properties(fluid, T_wall, side, points)
    prefix = f"{side}:"
    return Flowing(
        flow=points.flow[side],
        T=T,
        T_wall=T_wall,
        bulk=bulk,
        mu_wall=wall.mu,
        Pr_wall=wall.Pr,
        gas=fluid.phase == "gas",
        heated=(points.T_in[side] < points.T_in[opposite(side)])[:, None],
        R_fouling=points.R_fouling[side],
        tubes_plugged=points.tubes_plugged,
        factors={name[len(prefix) :]: value for name, value in points.factors.items() if name.startswith(prefix)},
    )


def _capacity(fluid: Fluid, at: Flowing, entry: Array, exit: Array, points: Points, side: Side) -> Array:
    """flow·cp with cp the exact mean over each place, so that the enthalpy balance closes whatever its curvature."""
    rise = exit - entry
    wide = np.abs(rise) > 1e-3
    cp = np.where(wide, (fluid.enthalpy(exit) - fluid.enthalpy(entry)) / np.where(wide, rise, 1.0), fluid.at(entry).cp)
    scale = points.factors.get(f"{side}:cp")
    return at.flow[:, None] * (cp if scale is None else cp * scale[:, None])
