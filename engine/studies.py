"""What it would take: many conditions of one case side by side, and the value at which a limit is first hit.

Everything is asked of the batch: a table of conditions, a sweep and each round of a search are one solve.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Literal, cast

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray
from pydantic import ValidationError

from engine import fluids, units
from engine.case import R_FOULING, Case, SolutionFluid
from engine.closed_forms import mean_films
from engine.correlations import Array, Excursion
from engine.exchangers import REGIMES
from engine.points import Points, joined, points_of
from engine.rating import FIGURES, along, figures_of, rate, tabulated
from engine.solve import Solution
from engine.stated import SIDES, CaseError, Figure, Input, Problem, Side, opposite
from engine.uncertainty import NORMAL_95, doubts, each_way

SCALING_SURFACE = 333.15
"""Surface temperature from which cooling water scales (common practice)."""

AS_STATED = "As stated"
"""The condition that the case itself states, in a table of conditions."""

MOST_VALUES = 2000
"""Of one sweep."""
GRID = 81
"""Values tried in one round of a search."""
COARSE_GRID = 17
"""The same where every value is a solve of its own."""
NARROWED = 2
"""Rounds after the first: they leave 1/6400 of one step of the first."""

SPAN = (1 / 20, 10.0)
"""Of a stated flow or steam pressure: where its limits are looked for."""
TEMPERATURE_SPAN = 150.0
"""From the stated inlet temperature [K]."""
APPROACH = 0.5
"""To the other inlet temperature [K]."""
PLUGGED_SPAN = 0.3
"""Of the tubes of a shell."""


def scales(case: Case, side: Side) -> bool:
    """Whether a side is heated water, which scales on hot surfaces."""
    fluid = case.fluid(side)
    liquid = fluid.phase == "liquid" and not case.stream(side).condenses
    return side == case.cold and liquid and "water" in fluid.name.lower().split()


# --- limits -----------------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Limit:
    """One limit that a condition can hit."""

    key: str
    """Path of the input that states it, or a name of common practice."""
    name: str
    """As it stands in a sentence: "the required outlet of the annulus"."""
    column: str
    """The figure that it bounds."""
    quantity: str
    value: float
    upper: bool
    """Whether the figure must stay below the value; else above."""
    scale: float
    """What a slack is measured by when limits of unlike quantities are compared."""
    stated: bool = True
    """False for a limit of common practice."""

    @property
    def slack_quantity(self) -> str:
        return "temperature_difference" if self.quantity == "temperature" else self.quantity

    def slack(self, figure: ArrayLike) -> Array:
        """How far figures stay inside the limit, in its own unit: negative where they pass it."""
        x = np.asarray(figure, dtype=float)
        return self.value - x if self.upper else x - self.value


def limits_of(case: Case) -> tuple[Limit, ...]:
    """The limits that a case states, and those of common practice that apply to it."""
    span = abs(case.T_in("inside") - case.T_in("outside"))
    found: list[Limit] = []

    def add(
        key: str, name: str, column: str, quantity: str, value: float | None, upper: bool = True, stated: bool = True
    ) -> None:
        if value is not None:
            scale = span if quantity == "temperature" else float(value)
            found.append(Limit(key, name, column, quantity, float(value), upper, scale, stated))

    for side in SIDES:
        stream, limits, place = case.stream(side), case.limits, case.exchanger.side_names[side].lower()
        T, of = "temperature", f"of the {place}"
        if not stream.condenses:
            hot, dp, v = side == case.hot, stream.dp_allowed, getattr(limits, f"{side}_velocity_max")
            add(f"{side}.T_out", f"the required outlet {of}", f"{side}.T_out", T, stream.T_out, hot)
            add(f"{side}.dp_allowed", f"the allowed drop {of}", f"{side}.dp", "pressure_difference", dp)
            add(f"limits.{side}_velocity_max", f"the highest velocity {of}", f"{side}.velocity", "velocity", v)
        for name, words, column, upper in (
            ("wall_T_max", "the highest wall temperature", "surface_T_max", True),
            ("wall_T_min", "the lowest wall temperature", "surface_T_min", False),
            ("design_temperature", "the design temperature", "T_max", True),
        ):
            value = getattr(limits, f"{side}_{name}")
            add(f"limits.{side}_{name}", f"{words} {of}", f"{side}.{column}", T, value, upper)
        if scales(case, side):
            words = f"the scaling temperature of cooling water, {place}"
            add(f"{side}.scaling", words, f"{side}.surface_T_max", T, SCALING_SURFACE, stated=False)
    lowest = case.limits.minimum_metal_temperature
    add("limits.minimum_metal_temperature", "the minimum metal temperature", "metal_T_min", T, lowest, upper=False)
    return tuple(found)


# --- conditions -------------------------------------------------------------------------------------------------------

MIXED = len(REGIMES)
CONDITIONS = (*(f"{side}.{name}" for name in ("flow", "T_in", "R_fouling") for side in SIDES), "tubes_plugged")
_OWN = (
    *(f"{side}.{name}" for name in ("velocity", "T_max", "surface_T_max", "surface_T_min", "regime") for side in SIDES),
    "metal_T_min",
)
_HIGHEST = tuple(f"{side}.{name}" for name in ("T_max", "surface_T_max") for side in SIDES)
_LOWEST = (*(f"{side}.surface_T_min" for side in SIDES), "metal_T_min")


@dataclass(frozen=True, kw_only=True)
class Conditions:
    """Conditions of one case, one row each, in the fouled state that each of them states.

    Columns of `frame`, SI: the condition itself (`CONDITIONS`), the figures of `rate_points`, per side velocity [m/s],
    highest bulk and highest and lowest surface temperature [K] and regime, the lowest metal temperature [K],
    `slack KEY` of each limit in its own unit (negative where it is passed), `limit`, the key of the limit that is
    passed the furthest, or empty, and `problem`. Extremes and problems are those of the clean state too, in which every
    condition begins. A row with a problem has NaN figures.
    """

    frame: pd.DataFrame
    limits: tuple[Limit, ...]

    def slack(self, limit: Limit) -> Array:
        return np.asarray(self.frame[f"slack {limit.key}"], dtype=float)

    def within(self, limits: Iterable[Limit]) -> NDArray[np.bool_]:
        """(P,) where there is an answer and none of these limits is passed."""
        inside = np.asarray(self.frame["problem"] == "")
        for limit in limits:
            inside = inside & (self.slack(limit) >= 0)
        return inside

    def nearest(self, row: int, limits: Iterable[Limit] | None = None) -> tuple[Limit, ...]:
        """The limits of a row that has an answer, the one passed the furthest, or come nearest to, first."""
        if self.frame["problem"].iloc[row]:
            return ()
        slack = {limit: self.slack(limit)[row] / limit.scale for limit in (self.limits if limits is None else limits)}
        return tuple(sorted(slack, key=slack.__getitem__))

    def passed(self, row: int, limits: Iterable[Limit] | None = None) -> tuple[Limit, ...]:
        """The limits that a row passes, the furthest first."""
        return tuple(limit for limit in self.nearest(row, limits) if self.slack(limit)[row] < 0)


def _own_figures(case: Case, solved: Solution) -> dict[str, Array]:
    found, whole, mean = figures_of(case, solved), along(solved), mean_films(case, solved)
    for side in SIDES:
        codes = solved.films[side].regime
        found[f"{side}.velocity"] = mean[side].velocity[:, 0]
        found[f"{side}.T_max"] = np.maximum(solved.points.T_in[side], solved.T_out[side])
        found[f"{side}.surface_T_max"] = whole.surface_T[side].max(axis=1)
        found[f"{side}.surface_T_min"] = whole.surface_T[side].min(axis=1)
        found[f"{side}.regime"] = np.where((codes == codes[:, :1]).all(axis=1), codes[:, 0], MIXED).astype(float)
    found["metal_T_min"] = np.minimum(*(whole.wall_T[side].min(axis=1) for side in SIDES))
    return found


def _solved(case: Case, frame: pd.DataFrame | None) -> pd.DataFrame:
    points, problem = points_of(case, frame)
    clean = replace(points, R_fouling={side: np.zeros(len(points)) for side in SIDES})
    both = tabulated(case, joined([points, clean]), np.tile(problem, 2), (*FIGURES, *_OWN), _own_figures)
    found, start = (both.iloc[rows].reset_index(drop=True) for rows in np.arange(len(both)).reshape(2, -1))
    for column in _HIGHEST:
        found[column] = np.maximum(found[column], start[column])
    for column in _LOWEST:
        found[column] = np.minimum(found[column], start[column])
    only_clean = (found["problem"] == "") & (start["problem"] != "")
    found.loc[only_clean, [*FIGURES, *_OWN]] = np.nan
    found.loc[only_clean, "problem"] = "clean, " + start["problem"]
    names = np.array([*REGIMES, "mixed", ""], dtype=object)
    for side in SIDES:
        found[f"{side}.regime"] = names[found[f"{side}.regime"].fillna(MIXED + 1).astype(int)]
    return pd.concat([_stated_columns(points), found], axis=1)


def _stated_columns(points: Points) -> pd.DataFrame:
    columns = {
        f"{side}.{name}": getattr(points, name)[side] for name in ("flow", "T_in", "R_fouling") for side in SIDES
    }
    return pd.DataFrame({**columns, "tubes_plugged": points.tubes_plugged}, columns=list(CONDITIONS))


def _conditions(case: Case, frame: pd.DataFrame, index: Sequence[float | str]) -> Conditions:
    limits = limits_of(case)
    for limit in limits:
        frame[f"slack {limit.key}"] = limit.slack(frame[limit.column])
    relative = np.vstack([np.zeros(len(frame)), *(frame[f"slack {limit.key}"] / limit.scale for limit in limits)])
    keys = np.array(["", *(limit.key for limit in limits)], dtype=object)
    frame["limit"] = keys[np.nan_to_num(relative).argmin(axis=0)]
    frame.index = pd.Index(index)
    return Conditions(frame=frame, limits=limits)


def operating_table(case: Case) -> Conditions:
    """The case as stated, then each of its operating conditions by name; one solve."""
    names = ("flow", "T_in", "R_fouling")
    stated: dict[str, float] = {"tubes_plugged": float(getattr(case.exchanger, "tubes_plugged", 0))}
    for side in SIDES:
        flow, R = case.flow(side), float(case.stream(side).R_fouling)
        stated |= {f"{side}.flow": flow or np.nan, f"{side}.T_in": case.T_in(side), f"{side}.R_fouling": R}
    rows = [stated]
    for condition in case.operating:
        changes = {f"{side}.{name}": getattr(condition, f"{side}_{name}") for name in names for side in SIDES}
        changes["tubes_plugged"] = condition.tubes_plugged
        row = {**stated, **{path: float(value) for path, value in changes.items() if value is not None}}
        for side in SIDES:
            flow = changes[f"{side}.flow"] or case.stream(side).flow
            row[f"{side}.flow"] = float(_mass_flow(case, side, flow, row[f"{side}.T_in"]))
        rows.append(row)
    index = [AS_STATED, *(condition.name for condition in case.operating)]
    return _conditions(case, _solved(case, pd.DataFrame(rows)), index)


def _mass_flow(case: Case, side: Side, flow: float | None, T_in: ArrayLike) -> Array:
    """Mass flow [kg/s] of a stated flow at inlet temperatures; a volume flow is at the inlet."""
    T = np.asarray(T_in, dtype=float)
    if isinstance(flow, Figure) and flow.quantity == "volume_flow":
        fluid = case.fluid(side)
        # Beyond the fluid's span the inlet itself is refused; its density there is of no account.
        return float(flow) * fluid.values(np.where(fluid.outside(T), case.T_in(side), T), "rho")[0]
    return np.full(T.shape, np.nan if flow is None else float(flow))


# --- what can be varied -----------------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class Variable:
    """One input of a case that can be varied, and the span over which a limit is looked for. SI."""

    path: str
    name: str
    """As it stands in a sentence: "the flow of water (inner pipe)"."""
    quantity: str
    today: float
    low: float
    high: float
    whole: bool = False
    density: float = 1.0
    """Mass for what is shown: a flow that was typed by volume is shown so."""
    of: float | None = None
    """What a count is a part of."""
    tries: int = GRID
    """In one round of a search."""

    def shown(self, value: float, system: str = "si") -> str:
        """A value in words, with its unit."""
        if self.whole:
            share = f" ({100 * value / self.of:.3g} %)" if self.of else ""
            return f"{value:.0f}{share}"
        digits = 4 if self.quantity == "temperature" else 3
        return units.show(value / self.density, self.quantity, system, digits)

    def between(self, start: float, end: float) -> Array:
        """Values from start to end, both included, closer together where a limit is met early."""
        if self.quantity in ("mass_flow", "volume_flow", "pressure_absolute"):
            values = np.geomspace(start, end, self.tries)
        elif self.quantity in ("temperature", "fraction"):
            values = np.linspace(start, end, self.tries)
        else:
            steps = np.geomspace(1e-4, 1.0, self.tries - 1)
            values = start + (end - start) * np.append(0.0, steps)
        return self.settled(values)

    def settled(self, values: Array) -> Array:
        """Values as they can be stated: counts are whole, and none stands twice."""
        if not self.whole:
            return values
        whole = np.rint(values)
        return np.asarray(whole[np.append(True, np.diff(whole) != 0)])


def variables(case: Case) -> dict[str, Variable]:
    """What can be varied in a case, by path: `inside.flow`, `outside.T_in`, `inside.R_fouling`, `tubes_plugged`,
    `inside.mass_fraction`, `outside.fluid.steam.p` and the like."""
    made: list[Variable] = []
    for side in SIDES:
        made += _variables_of(case, side)
    tubes, plugged = getattr(case.exchanger, "tubes", None), getattr(case.exchanger, "tubes_plugged", None)
    if tubes is not None and plugged is not None:
        made.append(
            Variable(
                path="tubes_plugged",
                name="the number of plugged tubes",
                quantity="dimensionless",
                today=float(plugged),
                low=0.0,
                high=float(max(np.floor(PLUGGED_SPAN * tubes), plugged)),
                whole=True,
                of=float(tubes),
            )
        )
    return {variable.path: variable for variable in made}


def _variables_of(case: Case, side: Side) -> Iterable[Variable]:
    stream, fluid = case.stream(side), case.fluid(side)
    where = case.exchanger.side_names[side].lower()
    flow = case.flow(side)
    if flow is not None:
        by_volume = isinstance(stream.flow, Figure) and stream.flow.quantity == "volume_flow"
        yield Variable(
            path=f"{side}.flow",
            name=f"the flow of {fluid.name} ({where})",
            quantity="volume_flow" if by_volume else "mass_flow",
            today=flow,
            low=SPAN[0] * flow,
            high=SPAN[1] * flow,
            density=flow / float(stream.flow) if by_volume and stream.flow is not None else 1.0,
        )
    if stream.condenses:
        p = case.p_in(side)
        yield Variable(
            path=f"{side}.fluid.steam.p",
            name=f"the steam pressure ({where})",
            quantity="pressure_absolute",
            today=p,
            low=SPAN[0] * p,
            high=SPAN[1] * p,
        )
    else:
        T, other = case.T_in(side), case.T_in(opposite(side))
        low, high = max(T - TEMPERATURE_SPAN, fluid.T_low), min(T + TEMPERATURE_SPAN, fluid.T_high)
        hot = side == case.hot
        yield Variable(
            path=f"{side}.T_in",
            name=f"the inlet temperature of {fluid.name} ({where})",
            quantity="temperature",
            today=T,
            low=min(max(low, other + APPROACH), T) if hot else low,
            high=high if hot else max(min(high, other - APPROACH), T),
        )
    yield Variable(
        path=f"{side}.R_fouling",
        name=f"the fouling resistance of the {where}",
        quantity="fouling_resistance",
        today=float(stream.R_fouling),
        low=0.0,
        high=R_FOULING.high,
    )
    if isinstance(stream.fluid, SolutionFluid):
        solute, code = stream.fluid.solution, stream.fluid.solution.strip().lower()
        solutions = (offer for offer in fluids.offered() if offer.kind == "solution")
        offer = next((o for o in solutions if code in (o.name.lower(), o.code.lower())), None)
        yield Variable(
            path=f"{side}.mass_fraction",
            name=f"the mass fraction of {offer.name if offer else solute} ({where})",
            quantity="fraction",
            today=float(stream.fluid.mass_fraction),
            low=offer.fraction_low or 0.0 if offer else 0.0,
            high=offer.fraction_high or 1.0 if offer else 1.0,
            tries=COARSE_GRID,
        )


def _variable(case: Case, path: str) -> Variable:
    known = variables(case)
    if path not in known:
        says = f"cannot be varied in this case; allowed are {', '.join(known)}"
        raise CaseError([Problem(path=path, says=says)])
    return known[path]


def restated(case: Case, path: str, value: float) -> Case:
    """The case with another value at the path of a variable. Raises CaseError where the value cannot be stated."""
    place, stated = path, cast(object, float(value))
    if path == "tubes_plugged":
        place, stated = "exchanger.tubes_plugged", int(value)
    elif path.endswith(".mass_fraction"):
        place = path.replace(".", ".fluid.")
    elif path.endswith(".p"):
        stated = Figure(value, quantity="pressure_absolute")

    def put(part: Input, first: str, *rest: str) -> Input:
        return _with(part, **{first: put(getattr(part, first), *rest) if rest else stated})

    try:
        return cast(Case, put(case, *place.split(".")))
    except ValidationError as error:
        raise CaseError([Problem(path=path, says=error.errors()[0]["msg"])]) from None


def _with(part: Input, **changes: object) -> Input:
    """The part stated anew, so that nothing it has remembered of its former values goes with it."""
    return type(part)(**{**{name: getattr(part, name) for name in part.model_fields_set}, **changes})


def sweep(case: Case, path: str, values: ArrayLike) -> Conditions:
    """The case with one input varied, SI; rows are indexed by the value. A flow typed by volume stays so at the inlet.

    `tubes_plugged` is a count per shell; a `mass_fraction` makes another fluid of each value. Raises CaseError for an
    unknown path or values that are no list of finite numbers.
    """
    variable = _variable(case, path)
    tried = np.asarray(values)
    if tried.ndim != 1 or not 1 <= tried.size <= MOST_VALUES or tried.dtype.kind not in "iuf":
        says = f"needs a list of 1 to {MOST_VALUES} numbers in SI units"
        raise CaseError([Problem(path=path, says=says)])
    tried = tried.astype(float)
    if not np.isfinite(tried).all():
        raise CaseError(
            [Problem(path=path, says="holds a value that is not a finite number; allowed are numbers in SI")]
        )
    if variable.whole and (tried != np.rint(tried)).any():
        raise CaseError([Problem(path=path, says="holds a value that is not whole; allowed are counts")])
    if path.endswith(".mass_fraction"):
        frame = pd.concat([_of_fraction(case, path, value) for value in tried], ignore_index=True)
    else:
        given = {path: tried}
        if path.endswith(".T_in"):
            side: Side = "inside" if path.startswith("inside") else "outside"
            given[f"{side}.flow"] = _mass_flow(case, side, case.stream(side).flow, tried)
        frame = _solved(case, pd.DataFrame(given))
    return _conditions(case, frame, list(tried))


def around(variable: Variable, value: float | None = None) -> Array:
    """Values to sweep that show today's and, where it is near enough to be of use, another one."""
    today = variable.today
    if variable.quantity == "temperature":
        low, high = today - 15.0, today + 15.0
    elif variable.quantity == "fouling_resistance":
        low, high = 0.0, max(2.5 * today, 0.0006)
    elif variable.path.endswith((".flow", ".p")):
        low, high = 0.4 * today, 2.0 * today
    else:
        low, high = variable.low, variable.high
    if value is not None:
        room = 0.25 * abs(value - today)
        low, high = min(low, value - room), max(high, value + room)
    values = np.linspace(max(low, variable.low), min(high, variable.high), min(41, variable.tries))
    return variable.settled(np.unique(np.append(values, today)))


def _of_fraction(case: Case, path: str, value: float) -> pd.DataFrame:
    try:
        return _solved(restated(case, path, value), None)
    except (fluids.FluidError, CaseError) as error:
        empty = _solved(case, pd.DataFrame({"inside.flow": [np.nan]}))
        return empty.assign(problem=str(error))


# --- questions --------------------------------------------------------------------------------------------------------

Way = Literal["least", "most"]


@dataclass(frozen=True, kw_only=True)
class Question:
    """How far one input may go from its stated value: down to the least, or up to the most, that limits allow."""

    path: str
    way: Way
    keys: tuple[str, ...] = ()
    """Of the limits that count; empty for all of them."""


Outcome = Literal["reached", "mended", "open", "not mended", "no answer"]


@dataclass(frozen=True, kw_only=True)
class Answer:
    """What came of a question. Values are SI.

    `reached`: the stated value is inside the limits, and `value` is the last one inside on the way asked.
    `mended`: the stated value already passes a limit; `value` is the nearest one found, the other way first, that does
    not. `open`: no limit is passed up to the end of the span. `not mended`: the stated value passes a limit, and no
    value of the span mends it. `no answer`: the case itself has none, see `problem`.
    """

    question: Question
    variable: Variable
    outcome: Outcome
    value: float | None = None
    at_most: bool = True
    """Whether the input must stay below the value; else above."""
    ends: tuple[float | None, float | None] = (None, None)
    """95 % interval of the value by the doubts about the limit that binds. On the side of values that keep the limit,
    None means that at worst no value of the span keeps it; on the other side, that at best every one does."""
    limit: Limit | None = None
    """The limit that binds, or that the stated value passes the furthest; None where `problem` ends the way instead."""
    problem: str = ""
    by: float = 0.0
    """How far the stated value passes the limit."""
    also: tuple[Limit, ...] = ()
    """Other limits that are passed at the value."""
    left_out: tuple[Limit, ...] = ()
    """Limits of common practice that the stated value passes, which therefore did not count."""
    at: pd.Series | None = None
    """The row of `Conditions` at the value."""
    excursions: tuple[Excursion, ...] = ()
    """Of the relations, at the value."""


def questions(case: Case) -> tuple[Question, ...]:
    """What is usually asked of a case: on the ways on which its limits lie."""
    known = variables(case)
    asked: list[Question] = []
    required = [side for side in SIDES if case.stream(side).T_out is not None]
    for side in required:
        other = opposite(side)
        asked += [
            Question(path=f"{other}.flow", way="least"),
            Question(path=f"{other}.fluid.steam.p", way="least"),
            Question(path=f"{other}.T_in", way="most" if other == case.cold else "least"),
            Question(path=f"{side}.flow", way="most"),
            Question(path=f"{side}.T_in", way="most" if side == case.hot else "least"),
        ]
    for side in SIDES:
        asked += [Question(path=f"{side}.flow", way="most"), Question(path=f"{side}.R_fouling", way="most")]
        asked.append(Question(path=f"{side}.mass_fraction", way="most"))
    asked.append(Question(path="tubes_plugged", way="most"))
    return tuple(dict.fromkeys(question for question in asked if question.path in known))


def answer(case: Case, question: Question) -> Answer:
    """How far the input may go before the first limit, counted from its stated value.

    Where figures do not run one way, that is the first crossing met on the way. Raises CaseError for a path or a limit
    that the case does not have.
    """
    variable, limits = _variable(case, question.path), limits_of(case)
    unknown = set(question.keys) - {limit.key for limit in limits}
    if unknown:
        known = ", ".join(limit.key for limit in limits) or "none, since the case states none"
        says = f"{', '.join(sorted(unknown))} is no limit of this case; allowed are {known}"
        raise CaseError([Problem(path=question.path, says=says)])
    chosen = tuple(limit for limit in limits if not question.keys or limit.key in question.keys)

    def probe(values: Array) -> Conditions:
        return sweep(case, question.path, values)

    today = probe(np.array([variable.today]))
    if today.frame["problem"].iloc[0]:
        problem = str(today.frame["problem"].iloc[0])
        return Answer(question=question, variable=variable, outcome="no answer", problem=problem)
    passed = today.passed(0, chosen)
    left_out = tuple(limit for limit in passed if not limit.stated and limit.key not in question.keys)
    passed = tuple(limit for limit in passed if limit not in left_out)
    counted = passed or tuple(limit for limit in chosen if limit not in left_out)
    about = Answer(question=question, variable=variable, outcome="open", left_out=left_out)
    if passed:
        about = replace(about, outcome="not mended", limit=passed[0], by=-float(today.slack(passed[0])[0]))

    def inside(conditions: Conditions) -> NDArray[np.bool_]:
        return conditions.within(counted)

    ends = [variable.low, variable.high] if question.way == "least" else [variable.high, variable.low]
    for end in reversed(ends) if passed else ends[:1]:
        found = _narrowed(probe, variable, variable.between(variable.today, end), inside)
        if found:
            break
    else:
        return about
    near, far = found
    value, beyond = (far, near) if passed else (near, far)
    both = probe(np.array([value, beyond]))
    problem = str(both.frame["problem"].iloc[1])
    # A figure moves in its ninth digit with the points solved beside it, so the value beyond may just keep its limit.
    binding = None if problem else both.nearest(1, counted)[0]
    about = replace(
        about,
        outcome="mended" if passed else "reached",
        value=value,
        at_most=beyond > value,
        limit=binding,
        problem=problem,
        at=both.frame.iloc[0],
        also=both.passed(0, [limit for limit in limits if limit not in (*counted, *left_out)]),
    )
    return _with_doubt(case, about, probe)


def _narrowed(
    probe: Callable[[Array], Conditions],
    variable: Variable,
    values: Array,
    inside: Callable[[Conditions], NDArray[np.bool_]],
    rounds: int = NARROWED,
) -> tuple[float, float] | None:
    """Two values close together between which `inside` first changes along `values`; None where it never does."""
    for left in range(rounds, -1, -1):
        if len(values) < 2:
            return None
        now = inside(probe(values))
        turned = np.flatnonzero(now != now[0])
        if not turned.size:
            return None
        near, far = float(values[turned[0] - 1]), float(values[turned[0]])
        if not left or (variable.whole and abs(far - near) <= 1):
            return near, far
        values = variable.settled(np.linspace(near, far, variable.tries))
    return None


def _with_doubt(case: Case, about: Answer, probe: Callable[[Array], Conditions]) -> Answer:
    """The answer with its interval: where the limit would bind if its figure lay at either end of its own interval."""
    assert about.value is not None
    variable, limit, value = about.variable, about.limit, about.value
    there = restated(case, variable.path, value)
    rating = rate(there)
    if not rating.states:
        return about
    sides = rating.fouled.sides.values()
    about = replace(about, excursions=tuple(excursion for side in sides for excursion in side.excursions))
    if limit is None:
        return about
    points = each_way(points_of(there)[0], doubts(there, rating))
    none = np.full(len(points), "", dtype=object)
    figure = tabulated(there, points, none, (limit.column,), _own_figures)[limit.column].to_numpy(float)
    up, down = (np.where(np.isfinite(x), x, figure[0]) for x in (figure[1::2], figure[2::2]))
    doubt = NORMAL_95 * float(np.sqrt(np.sum(np.square((up - down) / 2))))
    if not doubt > 0:
        return replace(about, ends=(value, value))

    def moved(by: float) -> Callable[[Conditions], NDArray[np.bool_]]:
        return lambda conditions: conditions.slack(limit) + by >= 0

    found: list[float | None] = []
    for upward, end in ((False, variable.low), (True, variable.high)):
        values = variable.between(value, end)
        bracket = _narrowed(probe, variable, values, moved(doubt if upward == about.at_most else -doubt), rounds=1)
        found.append(None if bracket is None else bracket[0 if upward == about.at_most else 1])
    return replace(about, ends=(found[0], found[1]))


# --- in words ---------------------------------------------------------------------------------------------------------


def asked(case: Case, question: Question) -> str:
    """A question in plain words."""
    variable, (side, _, name) = _variable(case, question.path), question.path.rpartition(".")
    least = question.way == "least"
    if name == "tubes_plugged":
        return "How few tubes may be plugged?" if least else "How many tubes can be plugged?"
    if name == "T_in":
        place: Side = "inside" if side == "inside" else "outside"
        fluid, where = case.fluid(place).name, case.exchanger.side_names[place].lower()
        return f"How {'cold' if least else 'warm'} may {fluid} enter the {where}?"
    size = ("small", "large") if name == "flow" else ("low", "high")
    return f"How {size[not least]} may {variable.name} be?"


def told(answer: Answer, system: str = "si") -> str:
    """An answer in a few sentences, the figure asked for first, in a system of units ("si", "us", "metric")."""
    variable, limit, value = answer.variable, answer.limit, answer.value
    least = answer.question.way == "least"

    def show(x: float) -> str:
        return variable.shown(x, system)

    name, today = f"{variable.name[0].upper()}{variable.name[1:]}", show(variable.today)
    said: list[str] = []
    if answer.outcome == "no answer":
        said.append(f"The case as stated has no answer: {answer.problem}.")
    elif answer.outcome == "open":
        end = f"as low as {show(variable.low)}" if least else f"as high as {show(variable.high)}"
        said.append(f"{name} can go {end}, the last value tried, and no limit that counts is hit; today it is {today}.")
    elif answer.outcome == "not mended" and limit:
        said.append(f"{_missed(limit, system, answer.by)} today, with {variable.name} at {today}.")
        said.append(f"No value from {show(variable.low)} to {show(variable.high)} mends that.")
    elif value is not None:
        if answer.outcome == "reached":
            way = "down" if least else "up"
            said.append(f"{name} can go {way} to {show(value)}{_interval(answer, system)}; today it is {today}.")
            end = (
                f"the first limit hit is {_worth(limit, system)}" if limit else f"there is no answer: {answer.problem}"
            )
            said.append(f"{'Above' if answer.at_most else 'Below'} that, {end}.")
        else:
            bound = "at most" if answer.at_most else "at least"
            said.append(
                f"{name} would have to be {bound} {show(value)}{_interval(answer, system)}; today it is {today}."
            )
            if limit:
                said.append(f"Today {_missed(limit, system, answer.by)}.")
    said += [f"There, {_missed(other, system)}." for other in answer.also]
    said += [
        f"Not counted: {_missed(other, system)} already today, a limit of common practice only."
        for other in answer.left_out
    ]
    return " ".join(f"{text[0].upper()}{text[1:]}" for text in said)


def _worth(limit: Limit, system: str) -> str:
    return f"{limit.name} ({units.show(limit.value, limit.quantity, system)})"


def _missed(limit: Limit, system: str, by: float = 0.0) -> str:
    verb = "missed" if limit.key.endswith(".T_out") else "exceeded" if limit.upper else "undercut"
    much = f" by {units.show(by, limit.slack_quantity, system, 3)}" if by else ""
    return f"{_worth(limit, system)} is {verb}{much}"


def _interval(answer: Answer, system: str) -> str:
    low, high = (None if end is None else answer.variable.shown(end, system) for end in answer.ends)
    if low is None and high is None:
        return ""
    if low is not None and high is not None:
        return f" (95 % interval {low} to {high})"
    known = f"from {low} on" if high is None else f"up to {high}"
    other = "at best it is never hit" if answer.at_most == (high is None) else "at worst no value tried keeps it"
    return f" (95 % interval {known}: {other})"
