"""Temperatures of both fluids cell by cell, for given conductances and heat capacity rates, over any layout."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from engine.exchangers.layout import Arrangement, Ints, Layout, Through

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


def _phi(a: Array) -> Array:
    """(1 - exp(-a))/a for a >= 0, 1 at a = 0."""
    small = a < 1e-5
    return np.where(small, 1 - a / 2, -np.expm1(-a) / np.where(small, 1.0, a))


def _lead(n: Array) -> Array:
    """1/n - 1/(exp(n) - 1), 1/2 at n = 0: how far an exponential rise over n runs on from its mean to its end."""
    small = n < 1e-3
    safe = np.where(small, 1.0, n)
    return np.where(small, 0.5 - n / 12, 1 / safe + np.exp(-safe) / np.expm1(-safe))


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


def _shell(layout: Layout, UA: Array, C_inside: Array, C_outside: Array) -> Temperatures:
    """Solution of one unit of any layout for inlets 1 (inside) and 0 (outside); arrays (P, m).

    The inside temperatures are eliminated along the paths; the unknowns are the outlets of the bays. The mean
    temperature of a bay is weighted between its inlet and its outlet as if the inside fluid were isothermal: second
    order, and no bay overshoots however long it is.
    """
    P, m = UA.shape
    n = len(layout.outside_links) - 1
    C_bay = C_outside[:, np.unique(layout.bay, return_index=True)[1]]
    ntu = UA / C_inside
    stay, swing = np.exp(-ntu), -np.expm1(-ntu)
    gain = UA * _phi(ntu)
    lead = _lead(_by_bay(layout, UA) / C_bay)
    mixed_from = layout.outside_links[:-1, :-1].T / layout.outside_links[:-1].sum(axis=1)[:, None]
    upstream = [np.flatnonzero(row) for row in mixed_from]

    # Everything affine in the bay outlets (columns 0 to n - 1) and the inside inlet (column n).
    ends = np.zeros((len(layout.inside_links), P, n + 1))
    ends[-1, :, n] = 1.0
    heat = np.zeros((n, P, n + 1))

    def add_mean(T: Array, bay: int, weight: Array) -> None:
        T[:, bay] += weight * (1 - lead[:, bay])
        for other in upstream[bay]:
            T[:, other] += weight * lead[:, bay] * mixed_from[bay, other]

    for p, path in enumerate(layout.inside_paths):
        T = _mixed(layout.inside_links[:, p], ends)
        for c in path:
            heat[layout.bay[c]] += gain[:, c, None] * T
            T = stay[:, c, None] * T
            add_mean(T, layout.bay[c], swing[:, c])
        ends[p] = T
    for bay, taken in enumerate(_by_bay(layout, gain).T):
        add_mean(heat[bay], bay, -taken)

    heat /= C_bay.T[:, :, None]
    A = (np.eye(n) - mixed_from)[:, None, :] - heat[..., :n]
    outside_exit = np.linalg.solve(A.swapaxes(0, 1), heat[..., n].T[..., None])[..., 0].astype(float)
    outside_entry = np.einsum("pa,ba->pb", outside_exit, mixed_from)
    outside_mean = (outside_exit - lead * (outside_exit - outside_entry))[:, layout.bay]

    difference = np.empty((m, P))
    outlets = np.ones((len(layout.inside_links), P))
    for p, path in enumerate(layout.inside_paths):
        T = _mixed(layout.inside_links[:, p], outlets)
        for c in path:
            difference[c] = T - outside_mean[:, c]
            T = outside_mean[:, c] + stay[:, c] * difference[c]
        outlets[p] = T
    difference = difference.T
    return Temperatures(
        inside_entry=outside_mean + difference,
        inside_exit=outside_mean + stay * difference,
        inside_mean=outside_mean + _phi(ntu) * difference,
        outside_entry=outside_entry[:, layout.bay],
        outside_exit=outside_exit[:, layout.bay],
        outside_mean=outside_mean,
        heat=gain * difference,
        inside_outlet=_mixed(layout.inside_links[:, -1], outlets),
        outside_outlet=_mixed(layout.outside_links[:-1, -1], outside_exit.T) * layout.outside_links[:-1, -1].sum(),
    )


def _to_and_fro(layout: Layout, cell: Ints, UA: Array, C_inside: Array, C_outside: Array) -> Temperatures:
    """Solution of one unit with tube passes to and fro along one row of bays, for inlets 1 (inside) and 0 (outside).

    The scheme of `_shell` in bays halved `layout.halvings` times, without its matrix. A bay is described by what
    leaves it for what enters it, S[out, in] over the outside stream, the passes that run with it and those that run
    against it. All entries of S are shares of a mixture, so no bay is too long. Rows of bays are joined by eliminating
    the streams between them (R. Redheffer, On the relation of transmission-line theory to scattering and transfer,
    J. Math. Phys. 41 (1962) 1-41).
    """
    with_outside = layout.bay[[path[0] for path in layout.inside_paths]] == 0
    streams = np.concatenate([[-1], np.flatnonzero(with_outside), np.flatnonzero(~with_outside)])
    order = cell[streams[1:]]
    n_with, place = int(with_outside.sum()) + 1, np.argsort(streams[1:]) + 1

    # Arrays by stream, bay and point.
    C_bay = C_outside.T[cell[0]]
    UA_cell, ntu = UA.T[order], (UA / C_inside).T[order]
    parts = 2.0**layout.halvings
    lead = _lead(UA_cell.sum(axis=0) / C_bay / parts)
    gain = UA_cell / C_bay / parts * _phi(ntu / parts)
    swing = -np.expm1(-ntu / parts)
    taken = gain / (1 + gain.sum(axis=0) * (1 - lead))
    mean = np.concatenate([1 - (taken.sum(axis=0) * (1 - lead))[None], taken * (1 - lead)])
    bay = np.concatenate([np.empty_like(mean)[None], swing[:, None] * mean])
    bay[0, 0], bay[0, 1:] = 1 - taken.sum(axis=0), taken
    for k in range(1, len(bay)):
        bay[k, k] += 1 - swing[k - 1]
    for _ in range(layout.halvings):
        bay = _joined(bay, bay, n_with)[0]

    # Bay after bay, from what enters the whole row at both ends.
    row, rows_before, returns = bay[:, :, 0], [], [bay[n_with:, :, 0]]
    for j in range(1, bay.shape[2]):
        rows_before.append(row[:n_with])
        row, between = _joined(row, bay[:, :, j], n_with)
        returns.append(between)
    # Each pass is fed by the one before it; the outside stream enters at 0.
    passes = len(place)
    turns = np.tile(np.eye(passes), (len(UA), 1, 1))
    turns[:, 1:] -= row[np.ix_(place[:-1], place)].transpose(2, 0, 1)
    fed = np.linalg.solve(turns, np.eye(passes)[:, :1])[..., 0].T.astype(float)
    met = np.concatenate([np.zeros_like(fed[:1]), fed[streams[1:]]])
    T_with, T_against = [_product(row[:n_with], met)], [met[n_with:]]
    inlets = met[:n_with]
    for back in returns[::-1]:
        T_against.append(_product(back, np.concatenate([inlets, T_against[-1]])))
        if rows_before:
            T_with.append(_product(rows_before.pop(), np.concatenate([inlets, T_against[-1]])))
    T = np.concatenate([np.array(x[::-1]).swapaxes(0, 1) for x in ([*T_with, inlets], T_against)])

    first, last = T[:, :-1], T[:, 1:]
    entry, leaving = (np.concatenate([a[:n_with], b[n_with:]]) for a, b in ((first, last), (last, first)))
    outside_mean = leaving[0] - _lead(UA_cell.sum(axis=0) / C_bay) * (leaving[0] - entry[0])
    small = ntu < 1e-6
    difference = np.where(
        small, (entry[1:] - outside_mean) * _phi(ntu), (entry[1:] - leaving[1:]) / np.where(small, 1.0, ntu)
    )

    def by_cell(x: Array) -> Array:
        placed = np.empty_like(UA)
        placed[:, order] = np.broadcast_to(x, order.shape + x.shape[-1:]).transpose(2, 0, 1)
        return placed

    return Temperatures(
        inside_entry=by_cell(entry[1:]),
        inside_exit=by_cell(leaving[1:]),
        inside_mean=by_cell(outside_mean + difference),
        outside_entry=by_cell(entry[0]),
        outside_exit=by_cell(leaving[0]),
        outside_mean=by_cell(outside_mean),
        heat=by_cell(UA_cell * difference),
        inside_outlet=_product(row[place[-1:]], met)[0],
        outside_outlet=leaving[0, -1],
    )


def _joined(first: Array, second: Array, n_with: int) -> tuple[Array, Array]:
    """S of two rows of bays one after the other, and what runs against the outside stream between them.

    Both for all that enters at the two far ends; `n_with` streams run with the outside stream, itself included.
    """
    against = len(first) - n_with
    between = np.concatenate([_product(second[n_with:, :n_with], first[:n_with, :n_with]), second[n_with:, n_with:]], 1)
    left = -_product(second[n_with:, :n_with], first[:n_with, n_with:])
    for k in range(against):
        left[k, k] += 1
    for k in range(against):
        between[k] = between[k] / left[k, k]
        left[k] = left[k] / left[k, k]
        for i in range(against):
            if i != k:
                between[i] = between[i] - left[i, k] * between[k]
                left[i] = left[i] - left[i, k] * left[k]
    onward = _product(first[:n_with, n_with:], between)
    onward[:, :n_with] += first[:n_with, :n_with]
    out_with = _product(second[:n_with, :n_with], onward)
    out_with[:, n_with:] += second[:n_with, n_with:]
    back = _product(first[n_with:, n_with:], between)
    back[:, :n_with] += first[n_with:, :n_with]
    return np.concatenate([out_with, back]), between


def _product(a: Array, b: Array) -> Array:
    """Matrix products along the first two axes, or of matrices with vectors, for every element of the others."""
    found: Array = np.einsum("ij...,jk...->ik..." if b.ndim == a.ndim else "ij...,j...->i...", a, b)
    return found


def _mixed(flows: Array, streams: Array) -> Array:
    """Mean of streams along the first axis, weighted by their flows."""
    share = flows / flows.sum()
    total: Array = sum((share[k] * streams[k] for k in np.flatnonzero(share)), np.zeros_like(streams[0]))
    return total


def _by_bay(layout: Layout, x: Array) -> Array:
    """Sums over the cells of each bay: (P, m) to (P, n)."""
    total = np.zeros((len(x), len(layout.outside_links) - 1))
    for cell, bay in enumerate(layout.bay):
        total[:, bay] += x[:, cell]
    return total


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


def _leaving(exits: Array, through: Through, last: int) -> Array:
    return exits.mean(axis=-1) if through == "split" else exits[..., last]


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
    temperature of the bay: second order in the bay's length. Where the passes run to and fro along one row of bays the
    cost grows with the bays and the cube of the passes, elsewhere with the cube of the bays of a unit and the memory
    with P times its cells times its bays; units in series cost no more than as many points.
    """
    T_i, T_o = np.asarray(T_in_inside, dtype=float), np.asarray(T_in_outside, dtype=float)
    cells = [np.asarray(x, dtype=float) for x in (UA, C_inside, C_outside)]
    points = np.broadcast_shapes(T_i.shape, T_o.shape, *(x.shape[:-1] for x in cells))
    shape = (*points, layout.n_cells)

    def by_unit(x: Array) -> Array:
        return np.broadcast_to(x, shape).reshape(-1, len(layout.bay))

    rates = by_unit(cells[0]), by_unit(cells[1] * layout.inside_share), by_unit(cells[2] * layout.outside_share)
    if layout.chain:
        unit = _chain(layout.chain, *rates)
    elif layout.to_and_fro is not None:
        unit = _to_and_fro(layout, layout.to_and_fro, *rates)
    else:
        unit = _shell(layout, *rates)

    inside_exit, outside_exit = (x.reshape(*points, -1) for x in (unit.inside_outlet, unit.outside_outlet))
    inside_met, outside_met = _met_by_units(layout, 1 - inside_exit, outside_exit)
    span = (T_i - T_o)[..., None]
    foot, height = T_o[..., None] + outside_met * span, (inside_met - outside_met) * span

    def in_place(x: Array) -> Array:
        placed: Array = foot.reshape(-1, 1) + x * height.reshape(-1, 1)
        return placed.reshape(shape)

    inside_exit, outside_exit = foot + inside_exit * height, foot + outside_exit * height
    opposed = layout.inside_units == layout.outside_units == "in turn" and layout.units_flow == "counter"
    return Temperatures(
        inside_entry=in_place(unit.inside_entry),
        inside_exit=in_place(unit.inside_exit),
        inside_mean=in_place(unit.inside_mean),
        outside_entry=in_place(unit.outside_entry),
        outside_exit=in_place(unit.outside_exit),
        outside_mean=in_place(unit.outside_mean),
        heat=(unit.heat * height.reshape(-1, 1)).reshape(shape),
        inside_outlet=_leaving(inside_exit, layout.inside_units, last=-1),
        outside_outlet=_leaving(outside_exit, layout.outside_units, last=0 if opposed else -1),
    )
