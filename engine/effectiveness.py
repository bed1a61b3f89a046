"""Exact relations between size, heat capacity rates and temperatures, for constant U and specific heats.

NTU = UA/C_min, Cr = C_min/C_max, effectiveness ε = duty/(C_min × inlet difference). For a fluid 1 that need not be the
smaller one: P = its temperature change over the inlet difference, NTU1 = UA/C_1, R = C_1/C_2. All functions broadcast.
The limits Cr = 0 (a fluid at constant temperature), Cr = 1 and equal end differences are taken analytically. What no
area can reach has NTU = inf and F = 0; an argument outside its domain raises ValueError.

Sources: R. A. Bowman, A. C. Mueller, W. M. Nagle, Mean temperature difference in design, Trans. ASME 62 (1940) 283-294;
W. M. Kays, A. L. London, Compact Heat Exchangers; J. L. Mason, Heat transfer in crossflow, Proc. 2nd US Nat. Congr.
Appl. Mech. (1955) 801-803. More than two tube passes: derived here, see `effectiveness_shell`.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import elementwise
from scipy.special import gammainc

Array = NDArray[np.float64]
Bools = NDArray[np.bool_]
Relation = Callable[[Array, Array], Array]
"""ε(NTU, Cr) of one arrangement."""

LARGEST_NTU = 1024.0
"""`ntu` does not look for an answer beyond this."""


def _within(name: str, x: ArrayLike, high: float = np.inf) -> Array:
    values = np.asarray(x, dtype=float)
    bad = ~((values >= 0) & (values <= high))
    if bad.any():
        allowed = "0 or more" if np.isinf(high) else f"between 0 and {high:g}"
        raise ValueError(f"{name} must be {allowed}; given {values[bad].flat[0]:g}")
    return values


def _phi(x: Array) -> Array:
    """(1 - exp(-x))/x, 1 at x = 0."""
    return np.where(x == 0, 1.0, -np.expm1(-x) / np.where(x == 0, 1.0, x))


def _x_coth_x(x: Array) -> Array:
    return np.where(x == 0, 1.0, x / np.tanh(np.where(x == 0, 1.0, x)))


# --- temperatures ---------------------------------------------------------------------------------------------------


def log_mean(a: ArrayLike, b: ArrayLike) -> Array:
    """Logarithmic mean of two end differences [K], both 0 or more; their common value where equal, 0 where one is 0."""
    low, high = np.sort(np.broadcast_arrays(_within("an end difference", a), _within("an end difference", b)), axis=0)
    apart = (low > 0) & (high > low)
    x = np.where(apart, (high - low) / np.where(low > 0, low, 1.0), 1.0)
    return np.where(apart, low * x / np.log1p(x), np.where(low > 0, low, 0.0))


def crosses(hot_in: ArrayLike, hot_out: ArrayLike, cold_in: ArrayLike, cold_out: ArrayLike) -> Bools:
    """Where an end difference in counterflow is not positive, so that no exchanger can do this."""
    return (np.asarray(hot_in) <= np.asarray(cold_out)) | (np.asarray(hot_out) <= np.asarray(cold_in))


def terminal_ratios(
    hot_in: ArrayLike, hot_out: ArrayLike, cold_in: ArrayLike, cold_out: ArrayLike
) -> tuple[Array, Array]:
    """P and R of the fluid whose temperature changes more, so that R is at most 1; R is 0 where neither changes."""
    fall = _within("the fall of the hot fluid", np.subtract(hot_in, hot_out))
    rise = _within("the rise of the cold fluid", np.subtract(cold_out, cold_in))
    span = _within("the difference of the inlets", np.subtract(hot_in, cold_in))
    larger, smaller = np.maximum(fall, rise), np.minimum(fall, rise)
    return larger / np.where(larger == 0, 1.0, span), smaller / np.where(larger == 0, 1.0, larger)


# --- two streams ----------------------------------------------------------------------------------------------------


def _counter(NTU1: Array, R: Array) -> Array:
    d = np.where(R == 1, 1.0, 1 - R)
    with np.errstate(divide="ignore", over="ignore"):
        return 1 / (R + 1 / np.where(R == 1, NTU1, -np.expm1(-NTU1 * d) / d))


def _cocurrent(NTU1: Array, R: Array) -> Array:
    return NTU1 * _phi(NTU1 * (1 + R))


def _ntu_counter(P: Array, R: Array) -> Array:
    reached = (P < 1) & (P * R < 1)
    z = np.where(reached, P, 0.0) / np.where(reached, 1 - P, 1.0)
    x = z * (1 - R)
    return np.where(reached, z * np.where(x == 0, 1.0, np.log1p(x) / np.where(x == 0, 1.0, x)), np.inf)


def effectiveness_counter(NTU: ArrayLike, Cr: ArrayLike) -> Array:
    """Counterflow."""
    return _counter(_within("NTU", NTU), _within("Cr", Cr, 1.0))


def effectiveness_cocurrent(NTU: ArrayLike, Cr: ArrayLike) -> Array:
    """Co-current flow."""
    return _cocurrent(_within("NTU", NTU), _within("Cr", Cr, 1.0))


def ntu_counter(effectiveness: ArrayLike, Cr: ArrayLike) -> Array:
    """Counterflow; inf where the effectiveness is 1."""
    return _ntu_counter(_within("effectiveness", effectiveness, 1.0), _within("Cr", Cr, 1.0))


def ntu_cocurrent(effectiveness: ArrayLike, Cr: ArrayLike) -> Array:
    """Co-current flow; inf from 1/(1 + Cr) on."""
    both = 1 + _within("Cr", Cr, 1.0)
    x = both * _within("effectiveness", effectiveness, 1.0)
    return np.where(x < 1, -np.log1p(-np.where(x < 1, x, 0.0)) / both, np.inf)


def effectiveness_split_banks(
    NTU: ArrayLike, Cr: ArrayLike, n_banks: int, *, split_is_min: ArrayLike, counter: bool = True
) -> Array:
    """`n_banks` equal banks, one fluid split equally over them, the other visiting them in turn.

    `counter` is the arrangement within a bank; the order of the banks has no influence. The split fluid enters every
    bank at the same temperature, so the other one's difference to it falls by the same factor in each.
    """
    NTU, Cr = np.broadcast_arrays(_within("NTU", NTU), _within("Cr", Cr, 1.0))
    bank = _counter if counter else _cocurrent
    split_change = bank(NTU, Cr / n_banks)
    series_change = bank(NTU / n_banks, Cr * n_banks)

    def over_all(change: Array) -> Array:
        with np.errstate(divide="ignore"):  # rounding may put the change of a huge bank a hair above 1
            together: Array = -np.expm1(n_banks * np.log1p(-np.minimum(change, 1.0)))
        return together

    x = Cr * split_change / n_banks
    split = split_change * np.where(x == 0, 1.0, over_all(x) / np.where(x == 0, 1.0, n_banks * x))
    return np.where(split_is_min, split, over_all(series_change))


# --- shells ---------------------------------------------------------------------------------------------------------


def _shell(N_tubes: Array, N_shell: Array, NTU: Array, tube_passes: int) -> Array:
    a = N_tubes / tube_passes
    root = np.sqrt(N_shell**2 + 4 * a**2) / 2
    return NTU / (1 / _phi(N_tubes) + N_shell / 2 + _x_coth_x(root) - _x_coth_x(a))


def effectiveness_shell(
    NTU: ArrayLike, Cr: ArrayLike, shells: int = 1, *, tube_passes: int = 2, tubes_are_min: ArrayLike = True
) -> Array:
    """`shells` TEMA E shells in series, overall counterflow, each with an even number of tube passes, shell mixed.

    With two passes the relation of Bowman, Mueller and Nagle, alike for both sides. For n passes: the sums of the
    co-current and of the counter-current passes obey two linear equations with the shell, and the temperatures at the
    turns form a geometric series in exp(-2 NTU_tubes/n). Hence with a = NTU_tubes/n and Γ² = NTU_shell² + 4 a²

        1/P_tubes = 1/(1 - exp(-NTU_tubes)) + [(NTU_shell + Γ coth(Γ/2))/(2 a) - coth a]/n.
    """
    NTU, Cr = np.broadcast_arrays(_within("NTU", NTU), _within("Cr", Cr, 1.0))
    if tube_passes % 2:
        raise ValueError(f"this relation holds for an even number of tube passes; given {tube_passes}")
    N = NTU / shells
    N_tubes, N_shell = np.where(tubes_are_min, N, N * Cr), np.where(tubes_are_min, N * Cr, N)
    return _counter(shells * _ntu_counter(_shell(N_tubes, N_shell, N, tube_passes), Cr), Cr)


def _ntu_shell(P: Array, R: Array) -> Array:
    """NTU1 of one 1-2 shell."""
    root = np.sqrt(1 + R**2)
    excess = (2 - P * (1 + R + root)) / root
    reached = excess > 0
    return np.where(reached, np.log1p(2 * P / np.where(reached, excess, 1.0)) / root, np.inf)


def ntu_shell(effectiveness: ArrayLike, Cr: ArrayLike, shells: int = 1) -> Array:
    """NTU of `shells` 1-2 shells in series together; inf from `largest_P` on."""
    P, Cr = np.broadcast_arrays(_within("effectiveness", effectiveness, 1.0), _within("Cr", Cr, 1.0))
    return shells * _ntu_shell(_per_shell(P, Cr, shells), Cr)


def _per_shell(P: Array, R: Array, shells: int) -> Array:
    """P of each of `shells` equal shells in series; 1 where even counterflow cannot reach the whole."""
    N = _ntu_counter(P, R)
    return np.where(np.isinf(N), 1.0, _counter(np.where(np.isinf(N), 0.0, N) / shells, R))


def largest_P(R: ArrayLike, shells: int = 1) -> Array:
    """P that `shells` 1-2 shells in series approach with infinite area."""
    R = _within("R", R)
    return _counter(shells * _ntu_counter(2 / (1 + R + np.sqrt(1 + R**2)), R), R)


def correction_factor(P: ArrayLike, R: ArrayLike, shells: int = 1) -> Array:
    """F of `shells` shells in series with two (or 4, 6, … nearly) tube passes each; 0 where they cannot reach P."""
    P, R = np.broadcast_arrays(_within("P", P), _within("R", R))
    N, N_shells = _ntu_counter(P, R), shells * _ntu_shell(_per_shell(P, R, shells), R)
    found = np.isfinite(N_shells) & (P > 0)
    return np.where(found, N / np.where(found, N_shells, 1.0), np.where(P > 0, 0.0, 1.0))


def correction_factor_slope(P: ArrayLike, R: ArrayLike, shells: int = 1) -> Array:
    """dF/dP at constant R; -inf where the shells cannot reach P."""
    P, R = np.broadcast_arrays(_within("P", P), _within("R", R))
    F, p = correction_factor(P, R, shells), _per_shell(P, R, shells)
    inside = (F > 0) & (P > 0)
    P, p = np.where(inside, P, 0.1), np.where(inside, p, 0.1)
    R = np.where(inside, R, 0.5)
    N = _ntu_counter(P, R)
    N_shell = _ntu_shell(p, R)
    dN_dP = 1 / ((1 - P) * (1 - P * R))
    dp_dP = (1 - p) * (1 - p * R) * dN_dP / shells
    dN_shell_dp = 2 / (2 - 2 * p * (1 + R) + p**2 * R)
    slope = (dN_dP - N / N_shell * dN_shell_dp * dp_dP) / (shells * N_shell)
    return np.where(inside, slope, np.where(P > 0, -np.inf, 0.0))


# --- cross-flow -----------------------------------------------------------------------------------------------------


def effectiveness_crossflow_unmixed(NTU: ArrayLike, Cr: ArrayLike) -> Array:
    """Both fluids unmixed: Mason's series Σ P(k, NTU) P(k, Cr NTU)/(Cr NTU) over k = 1, 2, …; P the Poisson tails."""
    N, Cr = np.broadcast_arrays(_within("NTU", NTU), _within("Cr", Cr, 1.0))
    N_max = N * Cr
    term: Array = gammainc(1, N) * gammainc(1, N_max)
    total = term
    k = 1
    while (term > 1e-17 * total).any():
        k += 1
        term = gammainc(k, N) * gammainc(k, N_max)
        total = total + term
    isothermal = N_max < 1e-17
    return np.where(isothermal, -np.expm1(-N), total / np.where(isothermal, 1.0, N_max))


def effectiveness_crossflow_one_mixed(NTU: ArrayLike, Cr: ArrayLike, *, min_is_mixed: ArrayLike) -> Array:
    """One fluid mixed across its stream, C_min where `min_is_mixed`, the other unmixed."""
    NTU, Cr = _within("NTU", NTU), _within("Cr", Cr, 1.0)
    unmixed_change = -np.expm1(-NTU)
    min_unmixed = unmixed_change * _phi(Cr * unmixed_change)
    return np.where(min_is_mixed, -np.expm1(-NTU * _phi(Cr * NTU)), min_unmixed)


def effectiveness_crossflow_mixed(NTU: ArrayLike, Cr: ArrayLike) -> Array:
    """Both fluids mixed; beyond some NTU more area does harm."""
    NTU, Cr = _within("NTU", NTU), _within("Cr", Cr, 1.0)
    return NTU / (1 / _phi(NTU) + 1 / _phi(Cr * NTU) - 1)


# --- any arrangement ------------------------------------------------------------------------------------------------


def of_fluid_1(relation: Relation, NTU1: ArrayLike, R: ArrayLike) -> Array:
    """P of a fluid 1 that need not have the smaller rate, for a relation that is alike for both fluids."""
    NTU1, R = np.broadcast_arrays(_within("NTU1", NTU1), _within("R", R))
    larger = np.maximum(R, 1.0)
    P: Array = relation(NTU1 * larger, np.minimum(R, 1 / larger)) / larger
    return P


def ntu(relation: Relation, effectiveness: ArrayLike, Cr: ArrayLike) -> Array:
    """Least NTU at which ε(NTU, Cr) reaches `effectiveness`; inf where no NTU up to LARGEST_NTU does."""
    goal, Cr = np.broadcast_arrays(_within("effectiveness", effectiveness, 1.0), _within("Cr", Cr, 1.0))
    shape, goal, Cr = goal.shape, goal.ravel(), Cr.ravel()
    grid = np.concatenate([[0.0], 2.0 ** np.arange(-2, np.log2(LARGEST_NTU) + 1)])
    low, high = np.zeros_like(goal), np.where(goal == 0, 0.0, np.inf)
    highest = np.zeros_like(goal)
    climbing = np.flatnonzero((goal > 0) & (goal < 1))
    for k in range(1, len(grid)):
        value = relation(grid[k], Cr[climbing])
        reached, falls = value >= goal[climbing], value < highest[climbing] * (1 - 1e-9)
        low[climbing], highest[climbing] = grid[k - 1], value
        high[climbing[reached]] = grid[k]
        turned = climbing[falls & ~reached]
        if turned.size:
            around = (grid[k - 2], grid[k - 1], grid[k])
            peak = elementwise.find_minimum(lambda N, ratio: -relation(N, ratio), around, args=(Cr[turned],))
            low[turned], high[turned] = grid[k - 2], np.where(-peak.f_x >= goal[turned], peak.x, np.inf)
        climbing = climbing[~reached & ~falls]
        if not climbing.size:
            break
    seek = np.isfinite(high) & (high > 0)
    if seek.any():
        bracket = (low[seek], high[seek])
        root = elementwise.find_root(lambda N, ratio, e: relation(N, ratio) - e, bracket, args=(Cr[seek], goal[seek]))
        high[seek] = root.x
    return high.reshape(shape)
