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
from engine.fluids import Fluid, Properties, Tabulated
from engine.stated import SIDES, CaseError, Problem, Side

CHUNK = 256
"""Points solved at once: small enough for the work arrays to stay in the processor's cache."""
TOLERANCE = 1e-9
"""Of the outer loop: largest change of a temperature between two iterations over the inlet difference."""
NEAR = 1e-3
"""Residual at which the slowly changing parts of a step are settled."""
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
        return self.cells.layout.area_share

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
    refuse(~(case.exchanger.area_at(points.tubes_plugged) > 0), "tubes_plugged leaves no tube open")
    return problem


# --- the march ------------------------------------------------------------------------------------------------------


def solve(case: Case, points: Points, *, fineness: int = 1) -> Iterator[tuple[slice, Solution]]:
    """March through all points, chunk after chunk; memory does not grow with their number.

    Points must be sound (see `points_of`). A point that leaves a fluid's usable span carries a sentence in `problem`.
    """
    cells = case.exchanger.cells(fineness)
    # No temperature leaves the span between the inlets by more than a heat loss can pull it.
    ends = np.concatenate([points.T_in[side] for side in SIDES])
    room = 2.0 + (0.5 * np.ptp(ends) if case.exchanger.heat_loss else 0.0)
    fluids = {side: case.fluid(side).within(ends.min() - room, ends.max() + room) for side in SIDES}
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
    mu_wall, Pr_wall = fluid.values(T_wall, "mu", "Pr")
    doubt = points.factors
    if any(f"{side}:{name}" in doubt for name in ("mu", "cp", "k")):
        one = np.ones(len(points))
        mu, cp, k = (doubt.get(f"{side}:{name}", one)[:, None] for name in ("mu", "cp", "k"))
        mu_wall, Pr_wall = mu_wall * mu, Pr_wall * mu * cp / k
    prefix = f"{side}:"
    return Flowing(
        flow=points.flow[side],
        T=T,
        T_wall=T_wall,
        bulk=bulk,
        mu_wall=mu_wall,
        Pr_wall=Pr_wall,
        gas=fluid.phase == "gas",
        heated=(points.T_in[side] < points.T_in[opposite(side)])[:, None],
        R_fouling=points.R_fouling[side],
        tubes_plugged=points.tubes_plugged,
        factors={name[len(prefix) :]: value for name, value in points.factors.items() if name.startswith(prefix)},
    )


@dataclass(frozen=True, kw_only=True)
class _Step:
    """All that follows from one guess of the temperatures."""

    flowing: Mapping[Side, Flowing]
    films: Mapping[Side, Film]
    r: Mapping[str, Array]
    found: march.Temperatures
    surface: Mapping[Side, Array]
    lossy: NDArray[np.bool_]

    def guess(self) -> Array:
        return np.stack(
            [self.found.inside_mean, self.found.outside_mean, self.surface["inside"], self.surface["outside"]], axis=1
        )


def _step(
    case: Case, points: Points, cells: Cells, fluids: Mapping[Side, Fluid], guess: Array, bend: Array, heat: Array
) -> _Step:
    """Properties, films, U and the temperatures they lead to, from a guess.

    `guess` (P, 4, n): inside and outside bulk, inside and outside surface. `bend` (P, 2, n): per side the mean of cp
    over a cell over cp at its mean temperature. `heat` (P, n): from the inside to the outside.
    """
    exchanger = case.exchanger
    flowing: dict[Side, Flowing] = {}
    films: dict[Side, Film] = {}
    capacity: dict[Side, Array] = {}
    for i, side in enumerate(SIDES):
        flowing[side] = _flowing(fluids[side], side, points, guess[:, i], guess[:, 2 + i])
        films[side] = exchanger.film(side, cells, flowing[side])
        capacity[side] = points.flow[side][:, None] * flowing[side].bulk.cp * bend[:, i]
    share = cells.layout.area_share
    lossy = np.zeros(len(points), dtype=bool)
    if exchanger.heat_loss:
        # What the outside stream loses to the surroundings changes how far it warms or cools for the heat it gets:
        # the same as another heat capacity in that cell.
        loss = float(exchanger.heat_loss) * share
        ratio = heat / np.where(heat == loss, np.nan, heat - loss)
        bad = ~((ratio > 0.02) & (ratio < 50.0))
        lossy = bad.any(axis=1)
        capacity["outside"] = capacity["outside"] * np.where(bad, 1.0, ratio)
    r = resistances(case, points, films, 0.5 * (guess[:, 2] + guess[:, 3]))
    U = 1.0 / sum(r.values())
    found = march.temperatures(
        cells.layout,
        U * (exchanger.area_at(points.tubes_plugged)[:, None] * share),
        capacity["inside"],
        capacity["outside"],
        points.T_in["inside"],
        points.T_in["outside"],
    )
    flux = U * (found.inside_mean - found.outside_mean)
    surface: dict[Side, Array] = {
        "inside": found.inside_mean - flux * r["inside film"],
        "outside": found.outside_mean + flux * r["outside film"],
    }
    return _Step(flowing=flowing, films=films, r=r, found=found, surface=surface, lossy=lossy)


def _bend(fluids: Mapping[Side, Fluid], found: march.Temperatures, guess: Array) -> Array:
    """Mean cp over each cell over cp at its mean temperature: with it the enthalpy balance closes exactly."""
    ends = ((found.inside_entry, found.inside_exit), (found.outside_entry, found.outside_exit))
    cp = [fluids[side].mean_cp(*ends[i]) / fluids[side].values(guess[:, i], "cp")[0] for i, side in enumerate(SIDES)]
    return np.stack(cp, axis=1)


def resistances(case: Case, points: Points, films: Mapping[Side, Film], T_metal: Array) -> dict[str, Array]:
    """The chain from the outside to the inside fluid, (P, n) each, on the outside bare area [m²K/W]."""
    exchanger = case.exchanger
    wall = exchanger.wall_resistance(T_metal)
    if "wall" in points.factors:
        wall = wall / points.factors["wall"][:, None]
    fouling = {side: exchanger.fouling_resistance(side, points.R_fouling[side])[:, None] for side in SIDES}
    return {
        "outside film": 1.0 / films["outside"].h,
        "outside fouling": np.broadcast_to(fouling["outside"], wall.shape),
        "wall": wall,
        "inside fouling": np.broadcast_to(fouling["inside"], wall.shape),
        "inside film": exchanger.area_ratio / films["inside"].h,
    }


def _march(case: Case, points: Points, cells: Cells, fluids: Mapping[Side, Fluid]) -> Solution:
    n, P = cells.layout.n_cells, len(points)
    T_i, T_o = points.T_in["inside"][:, None], points.T_in["outside"][:, None]
    span = np.abs(T_i - T_o)[:, 0]
    # A quarter of the way from each inlet to the other is near enough to start from.
    guess = np.stack([np.broadcast_to(x, (P, n)) for x in (0.75 * T_i + 0.25 * T_o, 0.25 * T_i + 0.75 * T_o)] * 2, 1)
    guess[:, 2:] = 0.5 * (T_i + T_o)[:, None]
    heat = np.broadcast_to(T_i - T_o, (P, n)) * 1e12
    bend, bent = np.ones((P, 2, n)), np.zeros(P, dtype=bool)
    iterations, residual = np.zeros(P, dtype=int), np.full(P, np.inf)
    active, before = np.arange(P), None
    for count in range(1, MOST_ITERATIONS + 1):
        part = points if active.size == P else points.part(active)
        step = _step(case, part, cells, fluids, guess[active], bend[active], heat[active])
        new = step.guess()
        change = new - guess[active]
        if case.exchanger.heat_loss:
            heat = heat.copy()
            heat[active] = step.found.heat
        iterations[active], residual[active] = count, np.abs(change).max(axis=(1, 2)) / span[active]
        guess[active] = _accelerated(new, change, before)
        if (residual[active] < NEAR).all() and not bent[active].all():
            # The curvature of cp within a cell hardly depends on the last digits: once, near the end, is enough.
            bend[active], bent[active] = _bend(fluids, step.found, new), True
            before = None
            continue
        going = (residual[active] > TOLERANCE) | ~bent[active]
        before = (new[going], change[going])
        active = active[going]
        if not active.size:
            break
    step = _step(case, points, cells, fluids, guess, bend, heat)
    return _solution(case, points, cells, fluids, step, iterations, residual)


def _accelerated(new: Array, change: Array, before: tuple[Array, Array] | None) -> Array:
    """Anderson's mixing with one step of memory (J. ACM 12 (1965) 547), point by point."""
    if before is None:
        return new
    old_new, old_change = before
    turn = change - old_change
    size = np.einsum("pij,pij->p", turn, turn)
    share = np.einsum("pij,pij->p", change, turn) / np.where(size > 0, size, 1.0)
    # A large share means that the two steps say nothing about the slope; the plain step is safer.
    share = np.where(np.abs(share) < 1.0, share, 0.0)
    return new - share[:, None, None] * (new - old_new)


def _solution(
    case: Case,
    points: Points,
    cells: Cells,
    fluids: Mapping[Side, Fluid],
    step: _Step,
    iterations: NDArray[np.int_],
    residual: Array,
) -> Solution:
    found = step.found
    drops = {side: case.exchanger.drop(side, cells, step.flowing[side], step.films[side]) for side in SIDES}
    flowing = dict(step.flowing)
    for side in SIDES:
        if flowing[side].gas:
            # A gas is rated at its mean pressure: density once more, with half of the drop taken off.
            p = case.p_in(side)
            lost = sum(drops[side].values(), np.zeros(len(points)))
            left = np.maximum(1.0 - 0.5 * lost / p, 0.5)[:, None]
            bulk = replace(flowing[side].bulk, rho=flowing[side].bulk.rho * left)
            flowing[side] = replace(flowing[side], bulk=bulk)
            film = replace(step.films[side], velocity=step.films[side].velocity / left)
            drops[side] = case.exchanger.drop(side, cells, flowing[side], film)
    problem = np.full(len(points), "", dtype=object)
    ends: dict[Side, tuple[Array, Array]] = {
        "inside": (found.inside_entry, found.inside_exit),
        "outside": (found.outside_entry, found.outside_exit),
    }
    for side in SIDES:
        dp = sum(drops[side].values(), np.zeros(len(points)))
        p_in = case.p_in(side)
        if fluids[side].phase == "gas":
            _mark(
                problem,
                dp >= 0.5 * p_in,
                lambda i, side=side, dp=dp, p_in=p_in: (
                    f"{side}.flow: a gas cannot lose {dp[i] / 1e5:.3g} bar of {p_in / 1e5:.3g} bar absolute and be rated "
                    "at its mean pressure; allowed is up to half"
                ),
            )
        T_boil = _boiling_limit(fluids[side], p_in, dp)
        places = {"": np.concatenate([*ends[side]], axis=1)}
        if not isinstance(fluids[side], Tabulated):
            # Beyond a typed table the wall takes the properties of the table's last allowed temperature, and a finding
            # says so: only the wall's correction depends on them.
            places["at the wall"] = step.surface[side]
        for where, T in places.items():
            bad = fluids[side].outside(T)
            _mark(
                problem,
                bad.any(axis=1),
                lambda i, T=T, bad=bad, side=side, where=where: (
                    fluids[side].problem(float(T[i][bad[i]][0]), f"{side} {where}".strip())
                ),
            )
            hot = T > T_boil[:, None]
            _mark(
                problem,
                hot.any(axis=1),
                lambda i, T=T, side=side, where=where, T_boil=T_boil: (
                    f"{side} {where or 'bulk'}: {fluids[side].name} at {T[i].max() - 273.15:.1f} °C boils at the outlet "
                    f"pressure ({T_boil[i] - 273.15:.1f} °C)"
                ),
            )
    _mark(problem, step.lossy, lambda i: "exchanger.heat_loss is as large as the heat passed in some cells")
    return Solution(
        points=points,
        cells=cells,
        duty=np.abs(found.heat.sum(axis=1)),
        T_out={"inside": found.inside_outlet, "outside": found.outside_outlet},
        entry={side: ends[side][0] for side in SIDES},
        exit={side: ends[side][1] for side in SIDES},
        mean={"inside": found.inside_mean, "outside": found.outside_mean},
        surface=step.surface,
        films=step.films,
        flowing=flowing,
        r=step.r,
        heat=found.heat,
        drops=drops,
        iterations=iterations,
        residual=residual,
        problem=problem,
    )


def _boiling_limit(fluid: Fluid, p_in: float, dp: Array) -> Array:
    """(P,) saturation temperature at the outlet pressure; infinite where the fluid has none that is known."""
    limit = np.full(np.shape(dp), np.inf)
    if fluid.phase != "liquid" or fluid.saturation_temperature(p_in) is None:
        return limit
    p = np.maximum(p_in - dp, 0.01 * p_in)
    # ln p is nearly linear in 1/T along a saturation line: three points of it are enough for thousands.
    lowest = float(p.min())
    nodes = np.geomspace(lowest, p_in, 5)
    T = [fluid.saturation_temperature(float(node)) for node in nodes]
    if any(t is None for t in T):
        return limit
    return 1.0 / np.interp(np.log(p), np.log(nodes), 1.0 / np.array(T, dtype=float))


def _mark(problem: Texts, rows: NDArray[np.bool_], sentence: Any) -> None:
    for i in np.flatnonzero(rows & (problem == "")):
        problem[i] = sentence(i)


# --- the frame ------------------------------------------------------------------------------------------------------


def rate_points(case: Case, frame: pd.DataFrame) -> pd.DataFrame:
    """Rate each row of a frame in the fouled state; index and order kept.

    Columns by path in SI; what is absent comes from the case. Returned: duty [W], outlets [K], mtd [K], U [W/m²K],
    films [W/m²K], Re, drops [Pa] and `problem`, a sentence or empty. A row with a problem has NaN figures and never
    spoils the others. Raises CaseError for an unknown column.
    """
    points, problem = points_of(case, frame)
    names = ["duty", "inside.T_out", "outside.T_out", "mtd", "U_clean", "U_dirty"]
    names += [f"{side}.{name}" for name in ("h", "Re", "dp") for side in SIDES]
    figures = {name: np.full(len(points), np.nan) for name in names}
    sound = np.flatnonzero(problem == "")
    for rows, solved in solve(case, points.part(sound)):
        at = sound[rows]
        unconverged = solved.residual > 1e-6
        problem[at] = np.where(
            (solved.problem == "") & unconverged, "the temperatures did not settle; no answer", solved.problem
        )
        good = problem[at] == ""
        values = _columns(case, solved)
        for name in names:
            figures[name][at[good]] = values[name][good]
    return pd.DataFrame({**figures, "problem": problem.astype(str)}, index=frame.index)


def _columns(case: Case, solved: Solution) -> dict[str, Array]:
    R = solved.resistances
    mean = mean_films(case, solved)
    return {
        "duty": solved.duty,
        "inside.T_out": solved.T_out["inside"],
        "outside.T_out": solved.T_out["outside"],
        "mtd": solved.duty / (solved.U * case.exchanger.area_at(solved.points.tubes_plugged)),
        "U_clean": solved.U_clean,
        "U_dirty": solved.U,
        "inside.h": case.exchanger.area_ratio / R["inside film"],
        "outside.h": 1.0 / R["outside film"],
        "inside.Re": mean["inside"].Re[:, 0],
        "outside.Re": mean["outside"].Re[:, 0],
        "inside.dp": solved.drop("inside"),
        "outside.dp": solved.drop("outside"),
    }


def mean_flowing(case: Case, points: Points, T_out: Mapping[Side, Array], surface: Mapping[Side, Array]) -> Any:
    """Each side at the mean of its inlet and outlet, as one cell."""
    return {
        side: _flowing(
            case.fluid(side),
            side,
            points,
            0.5 * (points.T_in[side] + T_out[side])[:, None],
            surface[side][:, None],
        )
        for side in SIDES
    }


def mean_films(case: Case, solved: Solution) -> dict[Side, Film]:
    surface: dict[Side, Array] = {side: solved.surface[side] @ solved.share for side in SIDES}
    flowing = mean_flowing(case, solved.points, solved.T_out, surface)
    whole = case.exchanger.whole()
    return {side: case.exchanger.film(side, whole, flowing[side]) for side in SIDES}


# --- one case -------------------------------------------------------------------------------------------------------


def rate(case: Case, *, fineness: int = 1) -> Rating:
    """Rate a case: clean and fouled by the march, and the fouled state by mean-property closed forms beside it."""
    point, problem = points_of(case)
    if problem[0]:
        return Rating(case=case, states={}, methods={}, problem=str(problem[0]))
    none = np.zeros(1)
    clean = replace(point, R_fouling={side: none for side in SIDES})
    both = joined([clean, point])
    [(_, solved)] = list(solve(case, both, fineness=fineness))
    trouble = next((text for text in solved.problem if text), "")
    if trouble:
        return Rating(case=case, states={}, methods={}, problem=str(trouble))
    states = {name: state_of(case, solved, i, name) for i, name in enumerate(("clean", "fouled"))}
    states, requirement = _with_requirement(case, states)
    methods: dict[str, State | str] = {"march": states["fouled"]}
    for method in ("effectiveness_ntu", "lmtd"):
        methods[method] = mean_property_state(case, point, method, states["fouled"])
    return Rating(case=case, states=states, methods=methods, requirement=requirement)


def joined(parts: list[Points]) -> Points:
    """Several sets of points as one."""
    merge = lambda groups: {key: np.concatenate([g[key] for g in groups]) for key in groups[0]}  # noqa: E731
    return Points(
        flow=merge([p.flow for p in parts]),
        T_in=merge([p.T_in for p in parts]),
        R_fouling=merge([p.R_fouling for p in parts]),
        tubes_plugged=np.concatenate([p.tubes_plugged for p in parts]),
        factors=merge([p.factors for p in parts]) if parts[0].factors else {},
    )


def state_of(case: Case, solved: Solution, i: int, name: str) -> State:
    """One solved point as a State."""
    exchanger = case.exchanger
    R = {key: float(value[i]) for key, value in solved.resistances.items()}
    area = float(exchanger.area_at(solved.points.tubes_plugged)[i])
    U, duty = float(solved.U[i]), float(solved.duty[i])
    mtd = duty / (U * area)
    T_in: dict[Side, Array] = {side: solved.points.T_in[side][i : i + 1] for side in SIDES}
    T_out: dict[Side, Array] = {side: solved.T_out[side][i : i + 1] for side in SIDES}
    lmtd = counter_lmtd(case, T_in, T_out)
    mean = mean_films(case, solved)
    C = {side: duty / max(abs(float((T_out[side] - T_in[side])[0])), 1e-12) for side in SIDES}
    C_min = min(C.values())
    whole = exchanger.whole()
    surface: dict[Side, Array] = {side: solved.surface[side] @ solved.share for side in SIDES}
    flowing = mean_flowing(case, solved.points, solved.T_out, surface)
    sides: dict[Side, SideState] = {}
    for side in SIDES:
        film, fluid = solved.films[side], case.fluid(side)
        one = solved.points.part(slice(i, i + 1))
        at = _flowing(fluid, side, one, solved.mean[side][i : i + 1], solved.surface[side][i : i + 1])
        own = Film(**{k: getattr(film, k)[i : i + 1] for k in ("h", "Re", "Pr", "velocity", "regime")}, relations=film.relations)
        regimes = tuple(REGIMES[code] for code in np.unique(film.regime[i]))
        opinions = exchanger.second_opinions(side, whole, flowing[side])
        sides[side] = SideState(
            T_in=float(T_in[side][0]),
            T_out=float(T_out[side][0]),
            h=exchanger.area_ratio / R["inside film"] if side == "inside" else 1.0 / R["outside film"],
            Re=float(mean[side].Re[i, 0]),
            Pr=float(mean[side].Pr[i, 0]),
            velocity=float(mean[side].velocity[i, 0]),
            regime=regimes[0] if len(regimes) == 1 else "mixed",
            drops={key: float(value[i]) for key, value in solved.drops[side].items()},
            R_fouling=float(solved.points.R_fouling[side][i]),
            relations=tuple(film.relations[code] for code in np.unique(film.regime[i])),
            excursions=exchanger.excursions(side, solved.cells, at, own),
            properties_in=_printed(fluid, float(T_in[side][0])),
            properties_out=_printed(fluid, float(T_out[side][0])),
            second_opinions={key: float(value[i]) for key, value in opinions.items()},
            surface_T=(float(solved.surface[side][i].min()), float(solved.surface[side][i].max())),
        )
    return State(
        method="march",
        state=name,
        duty=duty,
        T_out={side: float(T_out[side][0]) for side in SIDES},
        area=area,
        mtd=mtd,
        F=mtd / lmtd,
        effectiveness=duty / (C_min * abs(float((T_in["inside"] - T_in["outside"])[0]))),
        NTU=U * area / C_min,
        U_clean=float(solved.U_clean[i]),
        U_dirty=U,
        resistances=R,
        sides=sides,
        profile=_profile(solved, i),
        wall_R=R["wall"],
        converged=bool(solved.residual[i] <= 1e-6),
        iterations=int(solved.iterations[i]),
        residual=float(solved.residual[i]),
    )


def _printed(fluid: Fluid, T: float) -> dict[str, float]:
    at = fluid.at(np.asarray(T))
    return {name: float(getattr(at, name)) for name in ("rho", "cp", "mu", "k")}


def counter_lmtd(case: Case, T_in: Mapping[Side, Array], T_out: Mapping[Side, Array]) -> float:
    """LMTD at the terminal temperatures: counter-current, for a co-current double pipe its own."""
    cocurrent = getattr(case.exchanger, "arrangement", "counter") == "co-current"
    inside_ends = (T_in["inside"], T_out["inside"])
    outside_ends = (T_in["outside"], T_out["outside"]) if cocurrent else (T_out["outside"], T_in["outside"])
    ends = [np.abs(a - b) for a, b in zip(inside_ends, outside_ends, strict=True)]
    return float(exact.log_mean(ends[0], ends[1])[0])


def _profile(solved: Solution, i: int) -> Profile:
    share = solved.share
    edges = np.concatenate([[0.0], np.cumsum(share)])
    x = np.concatenate([[0.0], 0.5 * (edges[:-1] + edges[1:]), [1.0]])
    T: dict[Side, Array] = {}
    first_last = {"inside": (solved.entry["inside"][i, 0], solved.exit["inside"][i, -1])}
    counter = solved.cells.layout.chain == "counter"
    begin, end = (solved.exit, solved.entry) if counter else (solved.entry, solved.exit)
    first_last["outside"] = (begin["outside"][i, 0], end["outside"][i, -1])
    for side in SIDES:
        T[side] = np.concatenate([[first_last[side][0]], solved.mean[side][i], [first_last[side][1]]])
    r = {name: np.concatenate([[v[i, 0]], v[i], [v[i, -1]]]) for name, v in solved.r.items()}
    flux = (T["inside"] - T["outside"]) / sum(r.values())
    surface: dict[Side, Array] = {
        "inside": T["inside"] - flux * r["inside film"],
        "outside": T["outside"] + flux * r["outside film"],
    }
    wall: dict[Side, Array] = {
        "inside": surface["inside"] - flux * r["inside fouling"],
        "outside": surface["outside"] + flux * r["outside fouling"],
    }
    regime: dict[Side, tuple[str, ...]] = {}
    for side in SIDES:
        codes = solved.films[side].regime[i]
        regime[side] = tuple(REGIMES[c] for c in (codes[0], *codes, codes[-1]))
    return Profile(x=x, T=T, wall_T=wall, surface_T=surface, regime=regime, heat_flux=np.abs(flux))


def _with_requirement(case: Case, states: Mapping[str, State]) -> tuple[dict[str, State], str]:
    """The states with required duty, required U and margin, and why not where a stated outlet gives none."""
    wanted = {side: case.stream(side).T_out for side in SIDES if case.stream(side).T_out is not None}
    if not wanted:
        return dict(states), ""
    heat: dict[Side, float] = {}
    for side, T_out in wanted.items():
        flow, fluid = case.flow(side), case.fluid(side)
        assert flow is not None and T_out is not None
        heat[side] = flow * abs(_enthalpy_rise(fluid, case.T_in(side), float(T_out)))
    duty = max(heat.values())
    T_out_required: dict[Side, Array] = {}
    for side in SIDES:
        T = _outlet_for(case, side, duty)
        if T is None:
            return dict(states), f"the other stream cannot take up {duty / 1e3:.4g} kW within its usable temperatures"
        T_out_required[side] = np.array([T])
    T_in: dict[Side, Array] = {side: np.array([case.T_in(side)]) for side in SIDES}
    hot, cold = case.hot, case.cold
    if not (T_out_required[hot] > T_in[cold] and T_out_required[cold] < T_in[hot]):
        return dict(states), "the required outlets cross the other inlet: no area can give them"
    found = case.exchanger.driving_force(T_in, T_out_required)
    if isinstance(found, str):
        return dict(states), found
    lmtd, F = (float(x[0]) for x in found)
    if not (np.isfinite(F) and F > 0 and np.isfinite(lmtd) and lmtd > 0):
        return dict(states), "the required outlets lie beyond what this arrangement can reach with any area"
    required = duty / (case.exchanger.area * F * lmtd)
    return {
        name: replace(state, U_required=required, margin=state.U_dirty / required - 1.0, required_duty=duty)
        for name, state in states.items()
    }, ""


def _enthalpy_rise(fluid: Fluid, T_in: float, T_out: float) -> float:
    h = fluid.enthalpy(np.array([T_in, T_out]))
    return float(h[1] - h[0])


def _outlet_for(case: Case, side: Side, duty: float) -> float | None:
    """Outlet at which a side has exchanged the duty, or None when it lies outside the fluid's usable span."""
    fluid, flow, T_in = case.fluid(side), case.flow(side), case.T_in(side)
    assert flow is not None
    sign = -1.0 if side == case.hot else 1.0
    end = fluid.T_low if sign < 0 else fluid.T_high
    end = min(max(end, 1.0), 5000.0)

    def short(T: float) -> float:
        return flow * sign * _enthalpy_rise(fluid, T_in, T) - duty

    if short(end) < 0:
        return None
    return float(brentq(short, *sorted((T_in, end)), xtol=1e-10))


# --- closed forms beside the march ------------------------------------------------------------------------------------


def mean_property_state(case: Case, point: Points, method: str, start: State) -> State | str:
    """The fouled state with properties, films and U at mean temperatures, by ε-NTU or by LMTD and F.

    Returns the reason instead where the arrangement has no such relation. `start` only gives the first guess.
    """
    exchanger = case.exchanger
    T_out: dict[Side, Array] = {side: np.array([start.T_out[side]]) for side in SIDES}
    surface: dict[Side, Array] = {side: np.array([np.mean(start.sides[side].surface_T)]) for side in SIDES}
    whole = exchanger.whole()
    T_in = point.T_in
    span = abs(float((T_in["inside"] - T_in["outside"])[0]))
    fluids = {side: case.fluid(side) for side in SIDES}
    for count in range(1, 200):
        flowing = mean_flowing(case, point, T_out, surface)
        films = {side: exchanger.film(side, whole, flowing[side]) for side in SIDES}
        r = resistances(case, point, films, 0.5 * (surface["inside"] + surface["outside"])[:, None])
        U = 1.0 / float(sum(r.values())[0, 0])
        C = {side: float((point.flow[side] * fluids[side].mean_cp(T_in[side], T_out[side]))[0]) for side in SIDES}
        C_min, C_max = min(C.values()), max(C.values())
        inside_is_min = C["inside"] <= C["outside"]
        loss = float(exchanger.heat_loss)
        if loss:
            return "the stated heat loss is not part of the closed forms"
        NTU = U * exchanger.area / C_min
        if method == "effectiveness_ntu":
            found = exchanger.effectiveness(np.array([NTU]), np.array([C_min / C_max]), np.array([inside_is_min]))
            if isinstance(found, str):
                return found
            duty = float(found[0]) * C_min * span
        else:
            answer = _lmtd_duty(case, T_in, C, U)
            if isinstance(answer, str):
                return answer
            duty = answer
        hot = case.hot
        new = {
            side: T_in[side] + (-duty if side == hot else duty) / C[side] for side in SIDES
        }
        mean = {side: 0.5 * (T_in[side] + new[side]) for side in SIDES}
        # The mean temperatures of a side lie off the profile's; the flux between films is duty over area.
        flux = (duty if hot == "inside" else -duty) / exchanger.area
        new_surface: dict[Side, Array] = {
            "inside": mean["inside"] - flux * r["inside film"][:, 0],
            "outside": mean["outside"] + flux * r["outside film"][:, 0],
        }
        change = max(float(np.abs(new[side] - T_out[side])[0]) for side in SIDES)
        change = max(change, *(float(np.abs(new_surface[side] - surface[side])[0]) for side in SIDES))
        T_out, surface = new, new_surface
        if change < 1e-9 * span:
            break
    else:
        return "its fixed point did not settle"
    mtd = duty / (U * exchanger.area)
    R = {name: float(value[0, 0]) for name, value in r.items()}
    return State(
        method=method,
        state="fouled",
        duty=duty,
        T_out={side: float(T_out[side][0]) for side in SIDES},
        area=exchanger.area,
        mtd=mtd,
        F=mtd / counter_lmtd(case, T_in, T_out),
        effectiveness=duty / (C_min * span),
        NTU=NTU,
        U_clean=1.0 / (1.0 / U - R["outside fouling"] - R["inside fouling"]),
        U_dirty=U,
        resistances=R,
        wall_R=R["wall"],
        iterations=count,
        residual=change / span,
    )


def _lmtd_duty(case: Case, T_in: Mapping[Side, Array], C: Mapping[Side, float], U: float) -> float | str:
    """The duty at which U·area·F·LMTD equals it, found without any ε relation."""
    hot = case.hot
    span = abs(float((T_in["inside"] - T_in["outside"])[0]))
    most = min(C.values()) * span
    reason = ""

    def excess(share: float) -> float:
        nonlocal reason
        duty = share * most
        T_out = {side: T_in[side] + (-duty if side == hot else duty) / C[side] for side in SIDES}
        found = case.exchanger.driving_force(T_in, T_out)
        if isinstance(found, str):
            reason = found
            return 0.0
        lmtd, F = (float(x[0]) for x in found)
        return U * case.exchanger.area * max(np.nan_to_num(F) * lmtd, 0.0) - duty

    ceiling = 1.0
    if getattr(case.exchanger, "arrangement", "counter") == "co-current":
        ceiling = 1.0 / (1.0 + min(C.values()) / max(C.values()))
    low, high = 1e-12, ceiling * (1 - 1e-12)
    if excess(low) <= 0 or reason:
        return reason or "no driving force"
    if excess(high) >= 0:
        return high * most
    return float(brentq(excess, low, high, xtol=1e-15, rtol=1e-14)) * most
