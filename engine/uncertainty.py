"""From the doubt of the inputs and the scatter of the relations to an interval on every figure, and to the
contributors that are worth measuring.

First-order central differences through the batch: one call, two extra points a source and state. Sampling on request.
A printed ±x % is read as two standard deviations unless the source says otherwise. Intervals are 95 %.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from engine import fluids
from engine.case import Case, ConstantFluid, PureFluid, SteamFluid, TableFluid
from engine.correlations import Array
from engine.points import Points, joined, points_of
from engine.solve import SETTLED, Solution, solve
from engine.stated import SIDES, Figure, Side
from engine.states import Rating

NORMAL_95 = 1.959963984540054
COMMON_PRACTICE = "common practice"

PROPERTY_SD: Mapping[str, Mapping[str, float]] = {
    "library": {"rho": 0.001, "cp": 0.005, "mu": 0.02, "k": 0.02},
    "stated": {"rho": 0.01, "cp": 0.015, "mu": 0.05, "k": 0.025},
}
"""Relative sd of a pure fluid from the property library, and of solutions, oils and typed figures (common practice)."""

PROPERTY_NAMES = {"rho": "density", "cp": "specific heat", "mu": "viscosity", "k": "conductivity"}
WALL_SD = 0.05
"""Relative sd of a wall conductivity (common practice)."""

QUANTITIES = (
    "duty",
    "inside.T_out",
    "outside.T_out",
    "mtd",
    "U_clean",
    "U_dirty",
    "inside.h",
    "outside.h",
    "inside.dp",
    "outside.dp",
)
"""Those that an interval is found for; of a condensing side all but its drop, see `quantities_of`."""
_LINEAR = ("inside.T_out", "outside.T_out")


@dataclass(frozen=True, kw_only=True)
class Doubt:
    """One source of doubt: what it is called, how large one sd is, and how to shrink it."""

    name: str
    path: str
    """Where it acts: a column of the points, or a factor."""
    sd: float
    """Absolute in SI for temperatures, flows and fouling; relative for factors."""
    origin: str
    shrink: str


@dataclass(frozen=True, kw_only=True)
class Contributor:
    """A doubt and its share of the variance of the duty in one state."""

    doubt: Doubt
    share: float
    duty_sd: float
    """Change of the duty for one sd [W]."""


@dataclass(frozen=True, kw_only=True)
class Intervals:
    """95 % intervals (low, high) by quantity of one state, and what they consist of, largest first."""

    of: Mapping[str, tuple[float, float]]
    sd: Mapping[str, float]
    """Standard deviation by quantity: absolute for temperatures, of the logarithm otherwise."""
    contributors: tuple[Contributor, ...]
    not_propagated: tuple[str, ...] = ()
    """Doubts whose extra points have no answer, such as a liquid that would boil."""


def doubts(case: Case, rating: Rating) -> list[Doubt]:
    """Every source of doubt of a rated case."""
    found: list[Doubt] = []
    for side in SIDES:
        found += _stated(case, side)
        found += _relations(case, rating, side)
        found += _properties(case, side)
    found.append(
        Doubt(
            name="wall conductivity",
            path="wall",
            sd=WALL_SD,
            origin=COMMON_PRACTICE,
            shrink="state the conductivity from the material certificate at wall temperature",
        )
    )
    return found


def quantities_of(case: Case) -> tuple[str, ...]:
    """The quantities that a case has: the drop of condensing steam is not rated."""
    return tuple(quantity for quantity in QUANTITIES if quantity != f"{case.steam_side}.dp")


def _name(case: Case, side: Side) -> str:
    return case.exchanger.side_names[side].lower()


def _stated(case: Case, side: Side) -> Iterable[Doubt]:
    stream, where = case.stream(side), _name(case, side)
    advice = {
        "flow": ("flow", "compare the flow meter with a second one or a tank reading"),
        "T_in": ("inlet temperature", "read the inlet with a calibrated probe in the well"),
        "R_fouling": ("fouling resistance", "find it from field readings on a clean and on today's exchanger"),
    }
    for name, (words, shrink) in advice.items():
        figure = getattr(stream, name)
        if isinstance(figure, Figure) and figure.sd:
            sd = figure.sd
            if figure.quantity == "volume_flow":
                sd = figure.sd / float(figure) * (case.flow(side) or 0.0)
            yield Doubt(name=f"{where} {words}", path=f"{side}.{name}", sd=sd, origin="as stated", shrink=shrink)
    if isinstance(stream.fluid, SteamFluid) and isinstance(p := stream.fluid.steam.p, Figure) and p.sd:
        line, p_in = fluids.saturation_line(), case.p_in(side)
        yield Doubt(
            name=f"{where} steam pressure",
            path=f"{side}.T_in",
            sd=0.5 * float(np.diff(line.T(p_in + np.array([-p.sd, p.sd])))[0]),
            origin="as stated, by its saturation temperature",
            shrink="read the steam pressure with a calibrated gauge at the exchanger",
        )


def _relations(case: Case, rating: Rating, side: Side) -> Iterable[Doubt]:
    where, state = _name(case, side), rating.fouled.sides[side]
    seen = {r.name: r for name in rating.states for r in rating.states[name].sides[side].relations}
    for relation in seen.values():
        if relation.scatter is None:
            continue
        sd, origin = relation.scatter, relation.scatter_origin
        variant = state.second_opinions.get("transition_2013")
        if relation.name == "transition" and variant:
            spread = abs(np.log(variant / state.h)) / 2
            if spread > sd:
                sd, origin = float(spread), "half the distance to the other published transition"
        yield Doubt(
            name=f"{where} film ({relation.name.replace('_', ' ')})",
            path=f"{side}:{relation.name}",
            sd=sd,
            origin=origin,
            shrink="calibrate with a clean test: the film factor of this side",
        )
    if side == case.steam_side:
        return
    drop = case.exchanger.drop_relation(side)
    if drop.scatter is not None:
        yield Doubt(
            name=f"{where} pressure drop ({drop.name.replace('_', ' ')})",
            path=f"{side}:{drop.name}",
            sd=drop.scatter,
            origin=drop.scatter_origin,
            shrink="calibrate with a measured clean drop: the pressure-drop factor of this side",
        )


def _properties(case: Case, side: Side) -> Iterable[Doubt]:
    stream = case.stream(side)
    library = isinstance(stream.fluid, (PureFluid, SteamFluid))
    typed = isinstance(stream.fluid, (TableFluid, ConstantFluid))
    for name, sd in PROPERTY_SD["library" if library else "stated"].items():
        yield Doubt(
            name=f"{_name(case, side)} {PROPERTY_NAMES[name]}",
            path=f"{side}:{name}",
            sd=sd,
            origin=COMMON_PRACTICE,
            shrink=f"have the {PROPERTY_NAMES[name]} measured at two temperatures on a fresh sample"
            if typed or not library
            else f"nothing cheap: the {PROPERTY_NAMES[name]} of a pure fluid is already well known",
        )


def propagate(case: Case, rating: Rating, *, samples: int = 0, seed: int = 0) -> dict[str, Intervals]:
    """Intervals by state name. With `samples`, by that many random draws instead of first-order differences."""
    if not rating.states:
        return {}
    found = doubts(case, rating)
    if samples:
        return _sampled(case, rating, found, samples, seed)
    points = joined([each_way(_base(case, state), found) for state in rating.states])
    values, good = _figures(case, points)
    out: dict[str, Intervals] = {}
    for k, state in enumerate(rating.states):
        first = k * (1 + 2 * len(found))
        centre = {q: values[q][first] for q in quantities_of(case)}
        slopes: dict[str, list[float]] = {q: [] for q in quantities_of(case)}
        left_out = []
        for i, doubt in enumerate(found):
            up, down = first + 1 + 2 * i, first + 2 + 2 * i
            if not (good[up] or good[down]):
                left_out.append(doubt.name)
            for q in quantities_of(case):
                high = _scale(q, values[q][up]) if good[up] else None
                low = _scale(q, values[q][down]) if good[down] else None
                middle = _scale(q, centre[q])
                if high is not None and low is not None:
                    slope = (high - low) / 2
                else:
                    slope = high - middle if high is not None else middle - low if low is not None else 0.0
                slopes[q].append(float(slope))
        out[state] = _intervals(found, centre, slopes, tuple(left_out))
    return out


def _scale(quantity: str, x: float) -> float:
    return x if quantity in _LINEAR else float(np.log(max(x, 1e-300)))


def _intervals(
    found: list[Doubt], centre: Mapping[str, float], slopes: Mapping[str, list[float]], left_out: tuple[str, ...]
) -> Intervals:
    sd = {q: float(np.sqrt(np.sum(np.square(s)))) for q, s in slopes.items()}
    of = {}
    for q, s in sd.items():
        x = centre[q]
        of[q] = (
            (x - NORMAL_95 * s, x + NORMAL_95 * s)
            if q in _LINEAR
            else (
                x * float(np.exp(-NORMAL_95 * s)),
                x * float(np.exp(NORMAL_95 * s)),
            )
        )
    total = sd["duty"] ** 2 or 1.0
    ranked = sorted(zip(found, slopes["duty"], strict=True), key=lambda pair: -abs(pair[1]))
    contributors = tuple(
        Contributor(doubt=doubt, share=slope**2 / total, duty_sd=abs(slope) * centre["duty"])
        for doubt, slope in ranked
        if slope**2 / total > 1e-6
    )
    return Intervals(of=of, sd=sd, contributors=contributors, not_propagated=left_out)


def _base(case: Case, state: str) -> Points:
    point, _ = points_of(case)
    if state == "clean":
        return replace(point, R_fouling={side: np.zeros(1) for side in SIDES})
    return point


def _moved(base: Points, moves: Mapping[str, Array]) -> Points:
    """The base point moved along the given paths; factors are lognormal, a fouling resistance stays from zero up."""
    n = len(next(iter(moves.values())))
    wide = base.part(np.zeros(n, dtype=int))
    flow, T_in, R = dict(wide.flow), dict(wide.T_in), dict(wide.R_fouling)
    factors = dict(wide.factors)
    for path, step in moves.items():
        side: Side = "inside" if path.startswith("inside") else "outside"
        if path.endswith(".flow"):
            flow[side] = flow[side] * np.exp(step / flow[side])
        elif path.endswith(".T_in"):
            T_in[side] = T_in[side] + step
        elif path.endswith(".R_fouling"):
            known = R[side] > 0
            R[side] = np.where(known, R[side] * np.exp(step / np.where(known, R[side], 1.0)), 0.0)
        else:
            factors[path] = np.exp(step)
    return replace(wide, flow=flow, T_in=T_in, R_fouling=R, factors=factors)


def each_way(base: Points, found: Sequence[Doubt]) -> Points:
    """One point, then for each doubt that point one sd up and one sd down."""
    parts = [base, *(_moved(base, {d.path: np.array([d.sd, -d.sd])}) for d in found)]
    names = sorted({name for part in parts for name in part.factors})
    return joined([replace(p, factors={n: p.factors.get(n, np.ones(len(p))) for n in names}) for p in parts])


def _figures(case: Case, points: Points) -> tuple[dict[str, Array], NDArray[np.bool_]]:
    values = {q: np.full(len(points), np.nan) for q in quantities_of(case)}
    good = np.zeros(len(points), dtype=bool)
    for rows, solved in solve(case, points):
        good[rows] = (solved.problem == "") & (solved.residual <= SETTLED)
        found = _of(case, solved)
        for name in values:
            values[name][rows] = found[name]
    return values, good


def _of(case: Case, solved: Solution) -> dict[str, Array]:
    R = solved.resistances
    return {
        "duty": solved.duty,
        "inside.T_out": solved.T_out["inside"],
        "outside.T_out": solved.T_out["outside"],
        "mtd": solved.duty / (solved.U * case.exchanger.area),
        "U_clean": solved.U_clean,
        "U_dirty": solved.U,
        "inside.h": case.exchanger.area_ratio / R["inside film"],
        "outside.h": 1.0 / R["outside film"],
        "inside.dp": solved.drop("inside"),
        "outside.dp": solved.drop("outside"),
    }


def _sampled(case: Case, rating: Rating, found: list[Doubt], samples: int, seed: int) -> dict[str, Intervals]:
    random = np.random.default_rng(seed)
    z = random.standard_normal((len(found), samples))
    first_order = propagate(case, rating)
    out = {}
    for state in rating.states:
        points = _moved(_base(case, state), {d.path: d.sd * z[i] for i, d in enumerate(found)})
        values, good = _figures(case, points)
        tails = (2.5, 97.5)
        of = {q: tuple(float(x) for x in np.percentile(values[q][good], tails)) for q in quantities_of(case)}
        sd = {q: float(np.std([_scale(q, x) for x in values[q][good]])) for q in quantities_of(case)}
        lost = int((~good).sum())
        note = (f"{lost} of {samples} draws have no answer",) if lost else ()
        out[state] = Intervals(
            of={q: (low, high) for q, (low, high) in of.items()},
            sd=sd,
            contributors=first_order[state].contributors,
            not_propagated=note,
        )
    return out
