"""Temperatures of both fluids cell by cell, for given conductances and heat capacity rates, over any layout."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine.exchangers.layout import Arrangement, Layout

Array = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Temperatures:
    """Temperatures [K] of P operating points in n cells: (P, n); outlets (P,). Outside: those of the cell's bay."""

    inside_entry: Array
    inside_exit: Array
    inside_mean: Array
    outside_entry: Array
    outside_exit: Array
    outside_mean: Array
    heat: Array
    """(P, n) from the inside to the outside fluid [W]."""
    inside_outlet: Array
    outside_outlet: Array


def _chain(arrangement: Arrangement, UA: Array, C_inside: Array, C_outside: Array) -> Temperatures:
    """Exact two-stream solution of a chain of cells along the last axis, for inlets 1 (inside) and 0 (outside).

    In cell k the difference of the two fluids is θ_k exp(-a_k x), 0 <= x <= 1 along the inside flow. All sums have
    terms of one sign and no exponent is positive, so no NTU and no ratio of the rates is too large.
    """
    counter = arrangement == "counter"
    ntu_i, ntu_o = UA / C_inside, UA / C_outside
    a = ntu_i - ntu_o if counter else ntu_i + ntu_o
    decay = np.zeros((*a.shape[:-1], a.shape[-1] + 1))
    np.cumsum(a, axis=-1, out=decay[..., 1:])
    theta = np.exp(decay.min(axis=-1, keepdims=True) - decay)
    before, after = theta[..., :-1], theta[..., 1:]
    small = np.abs(a) < 1e-3
    a_safe = np.where(small, 1.0, a)
    mean = np.where(small, (before + after) * (0.5 - a * a / 24), (before - after) / a_safe)
    if counter:
        first = 1 / (theta[..., :1] + np.sum(ntu_o * mean, axis=-1, keepdims=True))
        before, mean = before * first, mean * first
    lag = np.where(small, mean * (0.5 + a / 12), (before - mean) / a_safe)
    fall, rise = ntu_i * mean, ntu_o * mean
    fallen = np.cumsum(fall, axis=-1)
    risen = np.cumsum(rise[..., ::-1], axis=-1)[..., ::-1] if counter else np.cumsum(rise, axis=-1)
    inside_entry, outside_entry = 1 - (fallen - fall), risen - rise
    return Temperatures(
        inside_entry=inside_entry,
        inside_exit=1 - fallen,
        inside_mean=inside_entry - ntu_i * lag,
        outside_entry=outside_entry,
        outside_exit=risen,
        outside_mean=risen - ntu_o * lag if counter else outside_entry + ntu_o * lag,
        heat=UA * mean,
        inside_outlet=1 - fallen[..., -1],
        outside_outlet=risen[..., 0 if counter else -1],
    )


def _met_by_units(layout: Layout, p_inside: Array, p_outside: Array) -> tuple[Array, Array]:
    """Temperatures with which both fluids enter each unit, for stream inlets 1 and 0; units along the last axis.

    `p_inside`, `p_outside`: fall and rise over a unit for an inlet difference of 1.
    """

    def product_before(x: Array) -> Array:
        return np.cumprod(np.concatenate([np.ones_like(x[..., :1]), x[..., :-1]], axis=-1), axis=-1)

    split_i, split_o = layout.inside_units == "split", layout.outside_units == "split"
    one = np.ones_like(p_inside)
    if split_i and split_o:
        return one, 0 * one
    if split_o:
        return product_before(1 - p_inside), 0 * one
    if split_i:
        return one, 1 - product_before(1 - p_outside)
    if layout.units_flow == "co-current":
        D = product_before(1 - p_inside - p_outside)
    else:
        D = product_before(1 - p_inside) * product_before(1 - p_outside[..., ::-1])[..., ::-1]
        D = D / (D[..., -1:] + np.sum((p_inside * D)[..., :-1], axis=-1, keepdims=True))
    T_inside = 1 - np.cumsum(p_inside * D, axis=-1) + p_inside * D
    return T_inside, T_inside - D


def temperatures(
    layout: Layout,
    UA: ArrayLike,
    C_inside: ArrayLike,
    C_outside: ArrayLike,
    T_in_inside: ArrayLike,
    T_in_outside: ArrayLike,
) -> Temperatures:
    """Solve the linear temperature problem of P operating points over a layout.

    UA: (P, n) conductance of each cell [W/K]. C_inside, C_outside: (P, n) heat capacity rate [W/K] of the whole stream
    at the cell's own specific heat, the latter alike in all cells of a bay; the layout's shares divide them; infinite
    for a fluid at constant temperature. T_in_inside, T_in_outside: (P,) inlets [K]. All broadcast.

    A chain is exact for any number of cells. In other layouts the inside fluid runs an exponential towards the mean
    temperature of the bay: second order in the bay's length.
    """
    T_i, T_o = np.asarray(T_in_inside, dtype=float), np.asarray(T_in_outside, dtype=float)
    points = np.broadcast_shapes(T_i.shape, T_o.shape, *(np.shape(x)[:-1] for x in (UA, C_inside, C_outside)))

    def by_unit(x: ArrayLike) -> Array:
        return np.broadcast_to(np.asarray(x, dtype=float), (*points, layout.n_cells)).reshape(*points, layout.units, -1)

    UA, C_i, C_o = by_unit(UA), by_unit(C_inside * layout.inside_share), by_unit(C_outside * layout.outside_share)
    assert layout.chain is not None
    unit = _chain(layout.chain, UA, C_i, C_o)
    met_inside, met_outside = _met_by_units(layout, 1 - unit.inside_outlet, unit.outside_outlet)
    span = (T_i - T_o)[..., None]
    base = T_o[..., None] + met_outside * span
    step = (met_inside - met_outside) * span

    def every(x: Array) -> Array:
        return (base[..., None] + x * step[..., None]).reshape(*points, layout.n_cells)

    inside_outlets, outside_outlets = base + unit.inside_outlet * step, base + unit.outside_outlet * step
    both_in_turn = layout.inside_units == layout.outside_units == "in turn"
    outside_last = 0 if both_in_turn and layout.units_flow == "counter" else -1
    return Temperatures(
        inside_entry=every(unit.inside_entry),
        inside_exit=every(unit.inside_exit),
        inside_mean=every(unit.inside_mean),
        outside_entry=every(unit.outside_entry),
        outside_exit=every(unit.outside_exit),
        outside_mean=every(unit.outside_mean),
        heat=(unit.heat * step[..., None]).reshape(*points, layout.n_cells),
        inside_outlet=inside_outlets.mean(axis=-1) if layout.inside_units == "split" else inside_outlets[..., -1],
        outside_outlet=outside_outlets.mean(axis=-1)
        if layout.outside_units == "split"
        else outside_outlets[..., outside_last],
    )
