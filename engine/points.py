"""Operating points of one case, as arrays, and what makes a point unfit to be solved."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from engine.case import LEAST_FLOW, MOST_FLOW, Case
from engine.correlations import Array
from engine.stated import SIDES, CaseError, Problem, Side, opposite
from engine.steam import Steam, steam_of

Texts = NDArray[np.object_]


@dataclass(frozen=True, kw_only=True)
class Points:
    """Operating points of one case; every array (P,), SI."""

    flow: Mapping[Side, Array]
    """Of condensing steam the most that comes; infinite where as much comes as condenses."""
    T_in: Mapping[Side, Array]
    """Of condensing steam its saturation temperature as supplied."""
    R_fouling: Mapping[Side, Array]
    tubes_plugged: Array
    duty_most: Array
    """Heat at which a valve throttles the condensing steam [W]; infinite where none does."""
    chest_most: Array
    """Up to which the chest may settle, by saturation temperature [K]; infinite where that is as supplied."""
    factors: Mapping[str, Array] = field(default_factory=dict)
    """"side:relation" or "side:property" (rho, cp, mu, k) or "wall" to multipliers: how doubt is propagated."""

    def __len__(self) -> int:
        return len(self.tubes_plugged)

    def part(self, rows: slice | NDArray[Any]) -> Points:
        return Points(
            flow={side: x[rows] for side, x in self.flow.items()},
            T_in={side: x[rows] for side, x in self.T_in.items()},
            R_fouling={side: x[rows] for side, x in self.R_fouling.items()},
            tubes_plugged=self.tubes_plugged[rows],
            duty_most=self.duty_most[rows],
            chest_most=self.chest_most[rows],
            factors={name: x[rows] for name, x in self.factors.items()},
        )

    def hottest_chest(self, side: Side) -> Array:
        """(P,) highest saturation temperature on a condensing side."""
        return np.where(np.isinf(self.chest_most), self.T_in[side], self.chest_most)


def points_of(case: Case, frame: pd.DataFrame | None = None) -> tuple[Points, Texts]:
    """Operating points from a frame (columns by path, SI; what is absent comes from the case), and a problem per row.

    Of condensing steam `T_in` is the temperature at which it enters, or `fluid.steam.p` its absolute pressure; `flow`
    is a limit, and NaN means none. Raises CaseError for an unknown column.
    """
    n = 1 if frame is None else len(frame)
    steam = steam_of(case)
    columns = {f"{side}.{name}" for side in SIDES for name in ("flow", "T_in", "R_fouling")} | {"tubes_plugged"}
    pressure = "" if steam is None else f"{steam.side}.fluid.steam.p"
    if pressure:
        columns.add(pressure)
    names = [] if frame is None else [str(name) for name in frame.columns]
    unknown = sorted(set(names) - columns)
    if unknown:
        allowed = ", ".join(sorted(columns))
        raise CaseError([Problem(path=name, says=f"is not a known column; allowed are {allowed}") for name in unknown])
    given = {} if frame is None else _numbers(frame)
    if steam is not None and {pressure, f"{steam.side}.T_in"} <= set(given):
        says = f"stands beside {pressure}; of steam one of the two decides the other"
        raise CaseError([Problem(path=f"{steam.side}.T_in", says=says)])

    def column(name: str, default: float) -> Array:
        return np.asarray(given.get(name, np.full(n, default)), dtype=float)

    flow: dict[Side, Array] = {side: column(f"{side}.flow", case.flow(side) or np.nan) for side in SIDES}
    T_in: dict[Side, Array] = {side: column(f"{side}.T_in", case.T_in(side)) for side in SIDES}
    if steam is not None:
        side = steam.side
        flow[side] = np.where(np.isnan(flow[side]), np.inf, flow[side])
        T_in[side] = steam.line.T(given[pressure]) if pressure in given else T_in[side] - steam.superheat
    points = Points(
        flow=flow,
        T_in=T_in,
        R_fouling={side: column(f"{side}.R_fouling", float(case.stream(side).R_fouling)) for side in SIDES},
        tubes_plugged=column("tubes_plugged", float(getattr(case.exchanger, "tubes_plugged", 0))),
        duty_most=np.full(n, np.inf),
        chest_most=np.full(n, np.inf),
    )
    return points, _row_problems(case, points, steam)


def _numbers(frame: pd.DataFrame) -> dict[str, Array]:
    """The columns of a frame as numbers; CaseError for a column that stands twice or holds anything else."""
    problems = [
        Problem(path=str(name), says="stands twice among the columns; each may stand once")
        for name in frame.columns[frame.columns.duplicated()]
    ]
    given: dict[str, Array] = {}
    for name in frame.columns[~frame.columns.duplicated()]:
        column = frame[name]
        if isinstance(column, pd.Series):
            if column.dtype.kind in "iuf":
                given[str(name)] = column.to_numpy(float)
            else:
                problems.append(Problem(path=str(name), says=f"holds {column.dtype} values; allowed are numbers in SI"))
    if problems:
        raise CaseError(problems)
    return given


def _row_problems(case: Case, points: Points, steam: Steam | None) -> Texts:
    problem = np.full(len(points), "", dtype=object)

    def refuse(rows: Any, sentence: str) -> None:
        problem[rows & (problem == "")] = sentence

    for side in SIDES:
        flow, T, R = points.flow[side], points.T_in[side], points.R_fouling[side]
        condenses = steam is not None and side == steam.side
        known = (flow >= LEAST_FLOW) & ((flow <= MOST_FLOW) | (condenses & np.isinf(flow)))
        refuse(~known, f"{side}.flow is not a positive finite number from {LEAST_FLOW:g} to {MOST_FLOW:g} kg/s")
        refuse(~(np.isfinite(R) & (R >= 0) & (R <= 0.1)), f"{side}.R_fouling is not from 0 to 0.1 m²K/W")
        if steam is not None and condenses:
            low, high = steam.line.T_low, steam.line.T_high
            ends = f"{low - 273.15:.2f} to {high - 273.15:.1f} °C"
            refuse(~((low < T) & (high > T)), f"{side}: the steam condenses at no temperature from {ends}")
            continue
        fluid = case.fluid(side)
        for i in np.flatnonzero(~np.isfinite(T) | fluid.outside(np.nan_to_num(T))):
            sentence = fluid.problem(T[i], "at the inlet") if np.isfinite(T[i]) else "is not a number"
            refuse(np.arange(len(points)) == i, f"{side}.T_in: {sentence}")
    if steam is not None:
        warmer = points.T_in[steam.side] - steam.subcooling - points.T_in[opposite(steam.side)] > 1e-6
        refuse(~warmer, f"{steam.side}: the condensate would leave colder than the other fluid enters")
    refuse(np.abs(points.T_in["inside"] - points.T_in["outside"]) < 1e-6, "both inlets have the same temperature")
    refuse(~(points.tubes_plugged >= 0), "tubes_plugged is not a count from 0 on")
    refuse(~(case.exchanger.area_at(points.tubes_plugged) > 0), "tubes_plugged leaves no tube open")
    return problem


def joined(parts: list[Points]) -> Points:
    """Several sets of points as one."""

    def merge(groups: list[Mapping[Any, Array]]) -> dict[Any, Array]:
        return {key: np.concatenate([group[key] for group in groups]) for key in groups[0]}

    return Points(
        flow=merge([p.flow for p in parts]),
        T_in=merge([p.T_in for p in parts]),
        R_fouling=merge([p.R_fouling for p in parts]),
        tubes_plugged=np.concatenate([p.tubes_plugged for p in parts]),
        duty_most=np.concatenate([p.duty_most for p in parts]),
        chest_most=np.concatenate([p.chest_most for p in parts]),
        factors=merge([p.factors for p in parts]),
    )
