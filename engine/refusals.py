"""Why a solved point has no answer: physics that leaves none, told as a sentence instead of a number."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from engine.case import Case
from engine.correlations import Array
from engine.fluids import Fluid, Tabulated
from engine.points import Points, Texts
from engine.stated import Side, opposite
from engine.steam import MOST_FLOODED, Condensed


def refusals(
    case: Case,
    points: Points,
    fluids: Mapping[Side, Fluid],
    ends: Mapping[Side, tuple[Array, Array]],
    surface: Mapping[Side, Array],
    drops: Mapping[Side, Mapping[str, Array]],
    lossy: NDArray[np.bool_],
    condensed: Condensed | None,
) -> Texts:
    """(P,) why a solved point has no answer, a sentence or empty: fluids that leave their span, in bulk or at the wall,
    liquids that boil at the outlet pressure, gases that lose too much of theirs, heat or steam that does not reach.

    `ends`, `surface` (P, n): temperatures where cells begin and end, and of the surface that each fluid touches.
    """
    problem = np.full(len(points), "", dtype=object)
    for side, fluid in fluids.items():
        dp = sum(drops[side].values(), np.zeros(len(points)))
        p_in = case.p_in(side)
        if fluid.phase == "gas":
            _mark(
                problem,
                dp >= 0.5 * p_in,
                lambda i, side=side, dp=dp, p_in=p_in: (
                    f"{side}.flow: a gas cannot lose {dp[i] / 1e5:.3g} bar of {p_in / 1e5:.3g} bar absolute and be "
                    "rated at its mean pressure; allowed is up to half"
                ),
            )
        elif fluid.saturation_temperature(min(p_in, 1e5)) is not None:
            _mark(problem, dp >= p_in, lambda i, side=side, dp=dp, p_in=p_in: over_pressure(side, dp[i], p_in))
        hottest = max(float(x.max()) for x in (*ends[side], surface[side]))
        T_boil = _boiling_limit(fluid, p_in, dp, hottest)
        places = {"": np.concatenate([*ends[side]], axis=1)}
        if not isinstance(fluid, Tabulated):
            # Beyond a typed table the wall takes the properties of the table's last allowed temperature, and a finding
            # says so: only the wall's correction depends on them.
            places["at the wall"] = surface[side]
        for where, T in places.items():
            bad = fluid.outside(T)
            _mark(
                problem,
                bad.any(axis=1),
                lambda i, T=T, bad=bad, side=side, fluid=fluid, where=where: fluid.problem(
                    float(T[i][bad[i]][0]), f"{side} {where}".strip()
                ),
            )
            hot = T_boil[:, None] < T
            _mark(
                problem,
                hot.any(axis=1),
                lambda i, T=T, side=side, fluid=fluid, where=where, T_boil=T_boil: (
                    f"{side} {where or 'bulk'}: {fluid.name} at {T[i].max() - 273.15:.1f} °C boils at the "
                    f"outlet pressure ({T_boil[i] - 273.15:.1f} °C)"
                ),
            )
    _mark(problem, lossy, lambda i: "exchanger.heat_loss is as large as the heat passed in some cells")
    if condensed is not None:
        _mark_steam(problem, points, condensed)
    return problem


def over_pressure(side: Side, dp: float, p_in: float) -> str:
    """A liquid cannot lose more pressure than it has."""
    return (
        f"{side}.flow: the pressure drop of {dp / 1e5:.3g} bar is over the whole inlet pressure of {p_in / 1e5:.3g} "
        "bar absolute; this flow cannot pass"
    )


def _mark_steam(problem: Texts, points: Points, condensed: Condensed) -> None:
    steam, side = condensed.steam, condensed.steam.side
    given = points.flow[side]
    _mark(
        problem,
        given * steam.heat(points.T_in[side], condensed.T_sat) <= steam.loss,
        lambda i: f"exchanger.heat_loss takes all the heat of {given[i]:.4g} kg/s of steam",
    )
    lowest = steam.line.T_low
    _mark(
        problem,
        condensed.T_sat - steam.subcooling <= lowest,
        lambda i: (
            f"{side}.flow: with {given[i]:.4g} kg/s of steam its condensate would be below {lowest - 273.15:.2f} °C"
        ),
    )
    if condensed.flooded is not None:
        cold = opposite(side)
        _mark(
            problem,
            condensed.T_sat - steam.subcooling <= points.T_in[cold],
            lambda i: (
                f"{side}.fluid.steam.subcooling: steam that condenses at {condensed.T_sat[i] - 273.15:.1f} °C cannot "
                f"be subcooled by {steam.subcooling:.3g} K with a fluid of {points.T_in[cold][i] - 273.15:.1f} °C"
            ),
        )
        _mark(
            problem,
            condensed.flooded.share >= MOST_FLOODED,
            lambda i: (
                f"{side}.fluid.steam.subcooling: {steam.subcooling:.3g} K would flood over {100 * MOST_FLOODED:.0f} % "
                "of the area with condensate"
            ),
        )


def _boiling_limit(fluid: Fluid, p_in: float, dp: Array, hottest: float) -> Array:
    """(P,) saturation temperature at the outlet pressure; infinite where none is known or nothing comes near it."""
    limit = np.full(np.shape(dp), np.inf)
    if fluid.phase != "liquid":
        return limit
    p = np.maximum(p_in - dp, 0.01 * p_in)
    lowest = float(p.min())
    first = fluid.saturation_temperature(lowest)
    if first is None or hottest < first:
        return limit
    # ln p is nearly linear in 1/T along a saturation line: three points of it are enough for thousands.
    nodes = np.geomspace(lowest, p_in, 5)
    T = [fluid.saturation_temperature(float(node)) for node in nodes]
    if any(t is None for t in T):
        return limit
    return 1.0 / np.interp(np.log(p), np.log(nodes), 1.0 / np.array(T, dtype=float))


def _mark(problem: Texts, rows: Any, sentence: Any) -> None:
    for i in np.flatnonzero(rows & (problem == "")):
        problem[i] = sentence(i)
