"""Any number of operating points of one case, solved cell by cell: local properties, films, wall temperatures.

Arrays first: there is no second, scalar engine. Points go through in chunks, so that memory does not grow with them.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from engine import march
from engine.case import Case
from engine.correlations import Array
from engine.exchangers import REGIMES, Cells, Film, Flowing
from engine.fluids import Fluid, Properties
from engine.points import Points, Texts
from engine.refusals import refusals
from engine.stated import SIDES, Side, opposite
from engine.steam import Condensed, Flooded, Steam, steam_of

CHUNK = 512
"""Points solved at once: small enough for the work arrays to stay in the processor's cache."""
TOLERANCE = 1e-7
"""Of the outer loop: largest change of a temperature between two iterations over the inlet difference."""
SETTLED = 1e-6
"""Residual up to which a point counts as converged."""
SETTLE_AT = (1e-1, 1e-5)
"""Residuals at which a chunk's slowly changing parts are found: roughly, then for good."""
PATIENCE = 14
"""Iterations after which a chunk goes on without the few points that settle slowly."""
MOST_ITERATIONS = 80
LIKELY_U = 1000.0
"""Of steam heaters [W/m²K]: the heat to start from."""
FEW = 8
"""So few points are not parted."""


def in_series(r: Mapping[str, Array]) -> Array:
    """The conductance of a chain of resistances."""
    return np.asarray(1.0 / sum(r.values()))


@dataclass(frozen=True, kw_only=True)
class Solution:
    """Solved points by the march, arrays (P,) or (P, n).

    Where part of the area is flooded by condensate, the cells are those of the rest of it.
    """

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
    """Without the condensing side."""
    r: Mapping[str, Array]
    """Local resistances by name, (P, n_cells), on the outside bare area."""
    heat: Array
    drops: Mapping[Side, Mapping[str, Array]]
    iterations: NDArray[np.int_]
    residual: Array
    problem: Texts
    condensed: Condensed | None = None

    @cached_property
    def share(self) -> Array:
        return self.cells.layout.area_share

    @cached_property
    def U_local(self) -> Array:
        return in_series(self.r)

    @property
    def flooded(self) -> Flooded | None:
        return None if self.condensed is None else self.condensed.flooded

    @cached_property
    def U(self) -> Array:
        U, flooded = np.asarray(self.U_local @ self.share), self.flooded
        return U if flooded is None else (1 - flooded.share) * U + flooded.share * flooded.U

    @cached_property
    def resistances(self) -> dict[str, Array]:
        """⟨U r_k⟩/⟨U⟩: so weighted, they sum to 1/U exactly."""
        total, flooded = {name: (self.U_local * r) @ self.share for name, r in self.r.items()}, self.flooded
        if flooded is not None:
            s = flooded.share
            total = {name: (1 - s) * x + s * flooded.U * flooded.r[name] for name, x in total.items()}
        return {name: x / self.U for name, x in total.items()}

    @cached_property
    def U_clean(self) -> Array:
        R = self.resistances
        return 1.0 / (1.0 / self.U - R["outside fouling"] - R["inside fouling"])

    def drop(self, side: Side) -> Array:
        return np.asarray(sum(self.drops[side].values(), np.zeros(len(self.points))))


@dataclass(frozen=True, kw_only=True)
class _Setting:
    """What all points of a case have in common while they are solved."""

    case: Case
    cells: Cells
    fluids: Mapping[Side, Fluid]
    """Without the condensing side."""
    steam: Steam | None
    whole: Cells
    """For the flow of condensate where it floods."""


def solve(case: Case, points: Points, *, fineness: int = 1) -> Iterator[tuple[NDArray[np.intp], Solution]]:
    """March through all points, chunk after chunk; memory does not grow with their number.

    Yields the rows and their solution. Rows that settle slowly come once more at the end, on their own, and then
    stand for good. Points must be sound (see `points_of`); a point that leaves a fluid's usable span carries a sentence
    in `problem`.
    """
    if not len(points):
        return
    steam = steam_of(case)
    # No temperature leaves the span between the inlets by more than a heat loss can pull it.
    ends = np.concatenate([points.T_in[side] for side in SIDES])
    if steam is not None:
        ends = np.append(ends, points.hottest_chest(steam.side))
    room = 2.0 + (0.5 * np.ptp(ends) if case.exchanger.heat_loss else 0.0)
    on = _Setting(
        case=case,
        cells=case.exchanger.cells(fineness),
        fluids={
            side: case.fluid(side).within(ends.min() - room, ends.max() + room)
            for side in SIDES
            if steam is None or side != steam.side
        },
        steam=steam,
        whole=case.exchanger.whole(),
    )
    slow: list[NDArray[np.intp]] = []
    for first in range(0, len(points), CHUNK):
        rows = np.arange(first, min(first + CHUNK, len(points)))
        most = PATIENCE if len(points) > FEW else MOST_ITERATIONS
        solved = _march(on, points.part(rows), most)
        slow.append(rows[solved.residual > TOLERANCE])
        yield rows, solved
    late = np.concatenate(slow)
    if len(points) > FEW:
        for first in range(0, late.size, CHUNK):
            rows = late[first : first + CHUNK]
            yield rows, _march(on, points.part(rows), MOST_ITERATIONS)


def _properties(fluid: Fluid, T: Array, side: Side, points: Points) -> Properties:
    found = fluid.at(T)
    doubt = {
        name: getattr(found, name) * points.factors[f"{side}:{name}"][:, None]
        for name in ("rho", "cp", "mu", "k")
        if f"{side}:{name}" in points.factors
    }
    return replace(found, **doubt) if doubt else found


def flowing_side(fluid: Fluid, side: Side, points: Points, T: Array, T_wall: Array) -> Flowing:
    """One side's fluid at bulk and wall temperatures (P, n), with the points' multipliers on its properties."""
    bulk = _properties(fluid, T, side, points)
    mu_wall, Pr_wall = fluid.values(T_wall, "mu", "Pr")
    doubt = points.factors
    if any(f"{side}:{name}" in doubt for name in ("mu", "cp", "k")):
        one = np.ones(len(points))
        mu, cp, k = (doubt.get(f"{side}:{name}", one)[:, None] for name in ("mu", "cp", "k"))
        mu_wall, Pr_wall = mu_wall * mu, Pr_wall * mu * cp / k
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
        factors=_factors(side, points),
    )


def _factors(side: Side, points: Points) -> dict[str, Array]:
    """Of one side, by the name of a relation or a property."""
    prefix = f"{side}:"
    return {name[len(prefix) :]: value for name, value in points.factors.items() if name.startswith(prefix)}


@dataclass(frozen=True, kw_only=True)
class _Settled:
    """Parts of a step that hardly depend on the last digits of the temperatures: found once, near the end."""

    bend: Array
    """(P, 2, n) per side, mean of cp over a cell over cp at its mean temperature: closes the enthalpy balance."""
    spread: Array
    """(P, 2, n) per side, resistance of a film that falls off within a cell over that of its mean h."""


@dataclass(frozen=True, kw_only=True)
class _Step:
    """All that follows from one guess of the temperatures."""

    settled: _Settled

    flowing: Mapping[Side, Flowing]
    films: Mapping[Side, Film]
    r: Mapping[str, Array]
    found: march.Temperatures
    surface: Mapping[Side, Array]
    lossy: NDArray[np.bool_]
    condensed: Condensed | None

    settles: tuple[Array, Array] | None
    """(P,) inlet of the cold fluid, and by how much all differences to it are smaller or larger where the chest would
    settle with these films; None where nothing condenses."""

    def guess(self) -> Array:
        new = np.stack(
            [self.found.inside_mean, self.found.outside_mean, self.surface["inside"], self.surface["outside"]], axis=1
        )
        if self.settles is None:
            return new
        T_cold, ratio = (x[:, None, None] for x in self.settles)
        return np.asarray(T_cold + ratio * (new - T_cold))


def _step(on: _Setting, points: Points, guess: Array, settled: _Settled, heat: Array) -> _Step:
    """Properties, films, U and the temperatures they lead to, from a guess (P, 4, n) of inside and outside bulk and
    inside and outside surface; `heat` (P, n) from the inside to the outside."""
    exchanger, steam = on.case.exchanger, on.steam
    flowing: dict[Side, Flowing] = {}
    films: dict[Side, Film] = {}
    capacity: dict[Side, Array] = {}
    T_in, condensed = dict(points.T_in), None
    for i, side in enumerate(SIDES):
        if steam is not None and side == steam.side:
            condensed = _condensed(steam, points, guess[:, i, 0], heat)
            T_in[side], capacity[side] = condensed.T_sat, np.full((1, 1), np.inf)
            at = steam.at(
                condensed.T_sat, guess[:, 2 + i], condensed.flow, points.tubes_plugged, _factors(side, points)
            )
            films[side] = steam.surface.film(at)
            continue
        flowing[side] = flowing_side(on.fluids[side], side, points, guess[:, i], guess[:, 2 + i])
        films[side] = exchanger.film(side, on.cells, flowing[side])
        capacity[side] = points.flow[side][:, None] * flowing[side].bulk.cp * settled.bend[:, i]
    share = on.cells.layout.area_share
    lossy: NDArray[np.bool_] = np.zeros(len(points), dtype=bool)
    if exchanger.heat_loss and "outside" in flowing:
        # What the outside stream loses to the surroundings changes how far it warms or cools for the heat it gets:
        # the same as another heat capacity in that cell.
        loss = float(exchanger.heat_loss) * share
        ratio = heat / np.where(heat == loss, np.nan, heat - loss)
        bad = ~((ratio > 0.02) & (ratio < 50.0))
        lossy = np.asarray(bad.any(axis=1))
        capacity["outside"] = capacity["outside"] * np.where(bad, 1.0, ratio)
    r = resistances(on.case, points, films, 0.5 * (guess[:, 2] + guess[:, 3]), settled.spread)
    U = in_series(r)
    area = exchanger.area_at(points.tubes_plugged)
    if condensed is not None and condensed.steam.subcooling:
        condensed = replace(condensed, flooded=_flooded(on, points, condensed, guess, flowing, capacity, r, heat, area))
        assert condensed.flooded is not None
        cold = opposite(condensed.steam.side)
        area, T_in[cold] = area * (1 - condensed.flooded.share), T_in[cold] + condensed.flooded.rise
    found = march.temperatures(
        on.cells.layout,
        U * (area[:, None] * share),
        capacity["inside"],
        capacity["outside"],
        T_in["inside"],
        T_in["outside"],
    )
    flux = U * (found.inside_mean - found.outside_mean)
    surface: dict[Side, Array] = {
        "inside": found.inside_mean - flux * r["inside film"],
        "outside": found.outside_mean + flux * r["outside film"],
    }
    settles = None
    if condensed is not None:
        T_cold = T_in[opposite(condensed.steam.side)]
        settles = T_cold, _settling(points, condensed, T_cold, np.abs(found.heat.sum(axis=1)))
    return _Step(
        settled=settled,
        flowing=flowing,
        films=films,
        r=r,
        found=found,
        surface=surface,
        lossy=lossy,
        condensed=condensed,
        settles=settles,
    )


def _condensed(steam: Steam, points: Points, T_guess: Array, heat: Array) -> Condensed:
    """The chest at a guess of its temperature, and the condensate of the heat passed."""
    T_sat = np.minimum(T_guess, points.hottest_chest(steam.side))
    parts = steam.parts(points.T_in[steam.side], T_sat)
    flow = (np.abs(heat.sum(axis=1)) + steam.loss) / (parts["desuperheating"] + parts["condensing"])
    return Condensed(steam=steam, T_sat=T_sat, flow=flow, flooded=None)


def _flooded(
    on: _Setting,
    points: Points,
    condensed: Condensed,
    guess: Array,
    flowing: Mapping[Side, Flowing],
    capacity: Mapping[Side, Array],
    r: Mapping[str, Array],
    heat: Array,
    area: Array,
) -> Flooded:
    """The flooded share, beside the cell that the cold fluid meets first."""
    steam, cold = condensed.steam, opposite(condensed.steam.side)
    coldest = guess[:, SIDES.index(cold)].argmin(axis=1)
    rows = np.arange(len(points))

    def there(x: Array) -> Array:
        return np.asarray(np.broadcast_to(x, heat.shape)[rows, coldest])

    T = condensed.T_sat - 0.5 * steam.subcooling
    drained = replace(points, flow={**points.flow, steam.side: condensed.flow})
    at = flowing_side(steam.condensate, steam.side, drained, T[:, None], 0.5 * (T + points.T_in[cold])[:, None])
    T_supply, T_cold, C_cold = points.T_in[steam.side], points.T_in[cold], there(capacity[cold])
    passed = steam.subcooled(T_supply, condensed.T_sat, np.abs(heat.sum(axis=1)))
    # The cell's own specific heat is not quite that of the inlet.
    cp = on.fluids[cold].mean_cp(T_cold, T_cold + passed / C_cold)
    return steam.flooded(
        on.whole,
        at,
        heat=passed,
        T_sat=condensed.T_sat,
        T_cold=T_cold,
        C_cold=C_cold * cp / there(flowing[cold].bulk.cp),
        area=area,
        r={name: there(x) for name, x in r.items()},
    )


def _settling(points: Points, condensed: Condensed, T_cold: Array, passed: Array) -> Array:
    """By how much the difference of chest to cold inlet changes so that the steam that comes is all condensed; 1 where
    the chest stands as supplied. `passed` [W] is what the condensing area passes now; it follows that difference."""
    steam, side = condensed.steam, condensed.steam.side
    heat = steam.heat(points.T_in[side], condensed.T_sat)
    most = np.minimum(points.flow[side] * heat - steam.loss, points.duty_most)
    if condensed.flooded is not None:
        most = most * passed / (passed + condensed.flooded.heat)
    return np.minimum((points.hottest_chest(side) - T_cold) / (condensed.T_sat - T_cold), most / passed)


def _settle(on: _Setting, step: _Step) -> _Settled:
    found = step.found
    h = {side: step.films[side].h for side in SIDES}
    spread = film_spread(on.case, on.cells, step.flowing, h, step.r)
    met = (
        (found.inside_entry, found.inside_exit, found.inside_mean),
        (found.outside_entry, found.outside_exit, found.outside_mean),
    )
    bend = [
        on.fluids[side].mean_cp(entry, exit) / on.fluids[side].values(mean, "cp")[0]
        if side in on.fluids
        else np.ones_like(mean)
        for side, (entry, exit, mean) in zip(SIDES, met, strict=True)
    ]
    return _Settled(bend=np.stack(bend, axis=1), spread=spread)


def film_spread(
    case: Case, cells: Cells, flowing: Mapping[Side, Flowing], h_mean: Mapping[Side, Array], r: Mapping[str, Array]
) -> Array:
    """(P, 2, n) by how much a film's resistance in a cell exceeds that of its mean h, since U is not linear in h.

    With local values weighted by local U, as everywhere: r = ⟨U r⟩/⟨U⟩ over the nodes of the cell.
    """
    shape = np.broadcast_shapes(*(h_mean[side].shape for side in SIDES))
    nodes, weights = cells.nodes, cells.weights
    if nodes is None or weights is None:
        return np.ones((shape[0], 2, shape[1]))
    count = weights.shape[1]
    ratio: dict[Side, float] = {"inside": case.exchanger.area_ratio, "outside": 1.0}
    rest = (r["wall"] + r["inside fouling"] + r["outside fouling"])[..., None]
    local: dict[Side, Array] = {side: ratio[side] / np.broadcast_to(h_mean[side], shape)[..., None] for side in SIDES}
    looked_at = {side: _repeated(at, count) for side, at in flowing.items() if side in nodes.start}
    scale: dict[Side, Array] = {}
    laminar = False
    for side, at in looked_at.items():
        film = case.exchanger.film(side, nodes, at)
        h = film.h.reshape(*film.h.shape[:-1], -1, count)
        # The printed mean over the cell stands; the nodes only say how it is spread.
        scale[side] = (h_mean[side] / (h * weights).sum(axis=-1))[..., None]
        local[side] = ratio[side] / (h * scale[side])
        laminar = laminar or bool((film.regime < REGIMES.index("turbulent")).any())
    if laminar:
        # Where a film is thin more heat passes, and its surface moves away from the wall's: it changes with it.
        U = 1.0 / (local["inside"] + local["outside"] + rest)
        U_cell = in_series(r)
        for side, at in looked_at.items():
            way = U * local[side] / (U_cell * r[f"{side} film"])[..., None]
            moved = _at_surface(at, way.reshape(*way.shape[:-2], -1))
            h = case.exchanger.film(side, nodes, moved).h
            local[side] = ratio[side] / (h.reshape(*h.shape[:-1], -1, count) * scale[side])
    U = weights / (local["inside"] + local["outside"] + rest)
    total = U.sum(axis=-1)
    means = {side: (U * local[side]).sum(axis=-1) / total for side in SIDES}
    return np.stack([means[side] * h_mean[side] / ratio[side] for side in SIDES], axis=1)


def _at_surface(at: Flowing, way: Array) -> Flowing:
    """The same bulk with a surface `way` times as far from it in temperature; ln mu and ln Pr linear between."""
    return replace(
        at,
        T_wall=at.T + way * (at.T_wall - at.T),
        mu_wall=at.bulk.mu * (at.mu_wall / at.bulk.mu) ** way,
        Pr_wall=at.bulk.Pr * (at.Pr_wall / at.bulk.Pr) ** way,
    )


def _repeated(at: Flowing, count: int) -> Flowing:
    """Every cell `count` times, for its nodes."""

    def wide(x: Array) -> Array:
        return np.repeat(x, count, axis=1) if x.shape[1] > 1 else x

    b = at.bulk
    bulk = replace(b, rho=wide(b.rho), cp=wide(b.cp), mu=wide(b.mu), k=wide(b.k))
    return replace(
        at, T=wide(at.T), T_wall=wide(at.T_wall), bulk=bulk, mu_wall=wide(at.mu_wall), Pr_wall=wide(at.Pr_wall)
    )


def resistances(
    case: Case, points: Points, films: Mapping[Side, Film], T_metal: Array, spread: Array | None = None
) -> dict[str, Array]:
    """The chain from the outside to the inside fluid, (P, n) each, on the outside bare area [m²K/W]."""
    more = np.ones((1, 2, 1)) if spread is None else spread
    exchanger = case.exchanger
    wall = exchanger.wall_resistance(T_metal)
    if "wall" in points.factors:
        wall = wall / points.factors["wall"][:, None]
    fouling = {side: exchanger.fouling_resistance(side, points.R_fouling[side])[:, None] for side in SIDES}
    return {
        "outside film": more[:, 1] / films["outside"].h,
        "outside fouling": np.broadcast_to(fouling["outside"], wall.shape),
        "wall": wall,
        "inside fouling": np.broadcast_to(fouling["inside"], wall.shape),
        "inside film": more[:, 0] * exchanger.area_ratio / films["inside"].h,
    }


def _march(on: _Setting, points: Points, most: int) -> Solution:
    n, P = on.cells.layout.n_cells, len(points)
    T_i, T_o = points.T_in["inside"][:, None], points.T_in["outside"][:, None]
    span = np.abs(T_i - T_o)[:, 0]
    # A quarter of the way from each inlet to the other is near enough to start from; steam stays where it is.
    start = {"inside": 0.75 * T_i + 0.25 * T_o, "outside": 0.25 * T_i + 0.75 * T_o}
    if on.steam is not None:
        start[on.steam.side] = points.T_in[on.steam.side][:, None]
    guess = np.stack([start["inside"], start["outside"], 0.5 * (T_i + T_o), 0.5 * (T_i + T_o)], axis=1)
    guess = np.broadcast_to(guess, (P, 4, n))
    heat = np.broadcast_to(T_i - T_o, (P, n)) * 1e12
    if on.steam is not None:
        area = on.case.exchanger.area_at(points.tubes_plugged)[:, None] * on.cells.layout.area_share
        heat = LIKELY_U * area * (T_i - T_o)
    settled, level = _Settled(bend=np.ones((P, 2, 1)), spread=np.ones((P, 2, 1))), 0
    before: tuple[Array, Array] | None = None
    count = 0
    while True:
        count += 1
        step = _step(on, points, guess, settled, heat)
        new, heat = step.guess(), step.found.heat
        change = new - guess
        residual = np.abs(change).max(axis=(1, 2)) / span
        worst = residual.max()
        if count == most or (level == len(SETTLE_AT) and worst <= TOLERANCE):
            break
        guess = new if before is None else _accelerated(new, change, *before)
        before = (new, change) if count > 1 else None
        if level < len(SETTLE_AT) and worst <= SETTLE_AT[level]:
            level += 1
            settled = _settle(on, step)
            before = None
    return _solution(on, points, step, np.full(P, count), residual)


def _accelerated(new: Array, change: Array, old_new: Array, old_change: Array) -> Array:
    """Anderson's mixing with one step of memory (J. ACM 12 (1965) 547), point by point."""
    turn = change - old_change
    size = np.einsum("pij,pij->p", turn, turn)
    share = np.einsum("pij,pij->p", change, turn) / np.where(size > 0, size, 1.0)
    # A large share means that the two steps say nothing about the slope; the plain step is safer.
    share = np.where(np.abs(share) < 1.0, share, 0.0)
    return new - share[:, None, None] * (new - old_new)


def _solution(on: _Setting, points: Points, step: _Step, iterations: NDArray[np.int_], residual: Array) -> Solution:
    case, cells, found, condensed = on.case, on.cells, step.found, step.condensed
    flowing = dict(step.flowing)
    drops: dict[Side, Mapping[str, Array]] = {side: {} for side in SIDES}
    for side in flowing:
        drops[side] = case.exchanger.drop(side, cells, flowing[side], step.films[side])
        if flowing[side].gas:
            # A gas is rated at its mean pressure: density once more, with half of the drop taken off.
            p = case.p_in(side)
            lost = sum(drops[side].values(), np.zeros(len(points)))
            left = np.maximum(1.0 - 0.5 * lost / p, 0.5)[:, None]
            bulk = replace(flowing[side].bulk, rho=flowing[side].bulk.rho * left)
            flowing[side] = replace(flowing[side], bulk=bulk)
            film = replace(step.films[side], velocity=step.films[side].velocity / left)
            drops[side] = case.exchanger.drop(side, cells, flowing[side], film)
    ends: dict[Side, tuple[Array, Array]] = {
        "inside": (found.inside_entry, found.inside_exit),
        "outside": (found.outside_entry, found.outside_exit),
    }
    duty = np.abs(found.heat.sum(axis=1))
    T_out: dict[Side, Array] = {"inside": found.inside_outlet, "outside": found.outside_outlet}
    if condensed is None:
        passed = found.heat.sum(axis=1)
        gained: dict[Side, Array] = {"inside": -passed, "outside": passed - float(case.exchanger.heat_loss)}
        T_out = {side: _balanced(case.fluid(side), side, points, T, gained[side]) for side, T in T_out.items()}
    else:
        side, steam, flooded = condensed.steam.side, condensed.steam, condensed.flooded
        duty = duty if flooded is None else duty + flooded.heat
        heat = steam.heat(points.T_in[side], condensed.T_sat)
        condensed = replace(condensed, flow=(duty + steam.loss) / heat)
        T_out[side] = condensed.T_sat - steam.subcooling
    return Solution(
        points=points,
        cells=cells,
        duty=duty,
        T_out=T_out,
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
        problem=refusals(case, points, on.fluids, ends, step.surface, drops, step.lossy, condensed),
        condensed=condensed,
    )


def _balanced(fluid: Fluid, side: Side, points: Points, T_out: Array, gained: Array) -> Array:
    """The outlet with the last digits, which the iteration leaves open, set by the side's own enthalpy balance."""
    scale = points.flow[side] * points.factors.get(f"{side}:cp", 1.0)
    rise = fluid.enthalpy(T_out) - fluid.enthalpy(points.T_in[side])
    return np.asarray(T_out + (gained / scale - rise) / fluid.values(T_out, "cp")[0])
