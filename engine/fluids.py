"""Fluid properties: the one door to CoolProp, typed property tables and constant properties.

A fluid is stated by a small hashable specification (`Pure`, `Solution`, `Table`, `Constant`; `Steam` for condensing
steam) and becomes a `Fluid` at a pressure by `fluid_at`. A `Fluid` is fast and needs CoolProp no more: density, heat
capacity, viscosity and conductivity are piecewise Chebyshev interpolants of their logarithms in T, each piece checked
against CoolProp between its nodes when it is built. Everything is SI and kelvin; pressures are absolute.
"""

from __future__ import annotations

import contextlib
import difflib
import math
import os
import re
import sys
import threading
from abc import ABC, abstractmethod
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field, fields
from functools import cache, lru_cache, partial
from typing import Any, Literal

import numpy as np
from numpy.polynomial import chebyshev
from numpy.typing import ArrayLike, NDArray
from scipy.constants import bar, zero_Celsius
from scipy.interpolate import CubicSpline

Array = NDArray[np.float64]
Phase = Literal["liquid", "gas"]
Kind = Literal["pure", "solution", "thermal oil"]

ROOM = zero_Celsius + 20
TABLE_MARGIN = 10.0
"""How far, in kelvin, a typed table may be continued beyond its end points."""


class FluidError(ValueError):
    """A fluid that cannot be had as stated; the message is one sentence for the user."""


# What a user can state ------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class Pure:
    """A pure fluid, air, a refrigerant blend or a thermal oil, by plain name or by CoolProp's code."""

    name: str


@dataclass(frozen=True)
class Solution:
    """An aqueous solution; `mass_fraction` (0 to 1) of the substance named."""

    name: str
    mass_fraction: float


@dataclass(frozen=True, kw_only=True)
class TablePoint:
    """Properties at one temperature."""

    T: float
    rho: float
    cp: float
    k: float
    mu: float


@dataclass(frozen=True)
class Table:
    """Properties typed at two or more temperatures: rho, cp, k linear in T, ln mu linear in 1/T between points."""

    name: str
    rows: tuple[TablePoint, ...]


@dataclass(frozen=True, kw_only=True)
class Constant:
    """Properties that do not change, as printed on a sheet."""

    name: str
    rho: float
    cp: float
    k: float
    mu: float


@dataclass(frozen=True, kw_only=True)
class Steam:
    """Condensing steam at absolute pressure p; `superheat` on entry and `subcooling` of the condensate in kelvin."""

    p: float
    superheat: float = 0.0
    subcooling: float = 0.0


Specification = Pure | Solution | Table | Constant


# What the rest of the engine gets -------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True, eq=False)
class Properties:
    """Properties at temperatures of any shape; the arrays have the same shape. Source in `origin`."""

    rho: Array
    cp: Array
    mu: Array
    k: Array
    origin: str

    @property
    def Pr(self) -> Array:
        return self.mu * self.cp / self.k


@dataclass(frozen=True, kw_only=True, eq=False)
class Fluid(ABC):
    """A fluid in one phase at one pressure, usable from `T_low` to `T_high`.

    Outside that span `values` and `at` give the properties at the nearer end, so that an iteration may pass through;
    `outside` and `problem` tell, and a final result must ask them.
    """

    name: str
    origin: str
    phase: Phase
    T_low: float
    T_high: float
    low_reason: str
    high_reason: str
    freezing_temperature: float | None = None
    boils_at: Callable[[float], float | None] = lambda p: None
    """Boiling temperature at an absolute pressure; None where none is known."""
    notes: tuple[str, ...] = ()
    """What a reader must know about these properties; one sentence each."""

    @abstractmethod
    def values(self, T: ArrayLike, *names: str) -> tuple[Array, ...]:
        """The named properties ("rho", "cp", "mu", "k", "Pr") at T, each of T's shape."""

    @abstractmethod
    def _enthalpy(self, T: Array) -> Array:
        """The antiderivative of cp, inside the span."""

    def enthalpy(self, T: ArrayLike) -> Array:
        """Specific enthalpy in J/kg: the antiderivative of cp, from an arbitrary zero.

        Beyond the span it goes on with the cp of that end.
        """
        T = np.asarray(T, dtype=float)
        inside = np.clip(T, self.T_low, self.T_high)
        h = self._enthalpy(inside)
        beyond = T - inside
        if beyond.any():
            h = h + beyond * self.values(inside, "cp")[0]
        return h

    def at(self, T: ArrayLike) -> Properties:
        """All four properties at T, of T's shape."""
        rho, cp, mu, k = self.values(T, "rho", "cp", "mu", "k")
        return Properties(rho=rho, cp=cp, mu=mu, k=k, origin=self.origin)

    def mean_cp(self, T1: ArrayLike, T2: ArrayLike) -> Array:
        """Mean heat capacity between two temperatures, (h2 - h1)/(T2 - T1); cp itself where they meet."""
        T1, T2 = np.broadcast_arrays(np.asarray(T1, dtype=float), np.asarray(T2, dtype=float))
        step = T2 - T1
        # Below a millikelvin the difference of two enthalpies has lost the digits that cp still has.
        apart = np.abs(step) > 1e-3
        mean = (self.enthalpy(T2) - self.enthalpy(T1)) / np.where(apart, step, 1.0)
        return mean if apart.all() else np.where(apart, mean, self.values(0.5 * (T1 + T2), "cp")[0])

    def outside(self, T: ArrayLike) -> NDArray[np.bool_]:
        """Where T lies outside the usable span. NaN is outside."""
        T = np.asarray(T, dtype=float)
        return ~((self.T_low <= T) & (self.T_high >= T))

    def extrapolated(self, T: ArrayLike) -> NDArray[np.bool_]:
        """Where T lies inside the span but beyond the typed points of a table."""
        return np.zeros(np.shape(T), dtype=np.bool_)

    def problem(self, T: float, where: str) -> str:
        """Why the fluid cannot be used at T, as a sentence; empty inside the span."""
        if not self.outside(T):
            return ""
        if not math.isfinite(T):
            return f"{where}: {self.name} at a temperature that is not a number"
        limit, reason = (self.T_low, self.low_reason) if self.T_low > T else (self.T_high, self.high_reason)
        digits = 0 if abs(T - limit) >= 2 else 1 if abs(T - limit) >= 0.1 else 3
        return f"{where}: {self.name} at {_celsius(T, digits)} {reason} ({_celsius(limit, digits)})"

    def within(self, T_low: float, T_high: float) -> Fluid:
        """The same fluid made fast for temperatures between two limits; itself where that gains nothing."""
        return self

    def saturation_temperature(self, p: float) -> float | None:
        """Boiling temperature at absolute pressure p; None where it is not known or p is above the critical."""
        return self.boils_at(float(p))


PROPERTIES = ("rho", "cp", "mu", "k")
_ROWS = {"rho": 0, "cp": 1, "mu": 2, "k": 3, "Pr": 4}


@dataclass(frozen=True, kw_only=True, eq=False)
class Interpolated(Fluid):
    """A fluid on piecewise Chebyshev interpolants of ln rho, ln cp, ln mu, ln k in T."""

    pieces: tuple[_Piece, ...]
    breaks: Array = field(init=False)
    """Temperatures between the pieces."""

    def __post_init__(self) -> None:
        object.__setattr__(self, "breaks", np.array([piece.low for piece in self.pieces[1:]]))

    def values(self, T: ArrayLike, *names: str) -> tuple[Array, ...]:
        rows = [_ROWS[name] for name in names]
        return tuple(self._over(T, len(rows), lambda piece, t: np.exp(piece.logs[rows] @ piece.basis(t, piece.terms))))

    def _enthalpy(self, T: Array) -> Array:
        heats = self._over(T, 1, lambda piece, t: piece.heat[None, :] @ piece.basis(t, piece.heat.size))
        return heats.reshape(T.shape)

    def within(self, T_low: float, T_high: float) -> Fluid:
        """One short polynomial a property over the limits, where the properties have no corner between them."""
        low, high = max(T_low, self.T_low), min(T_high, self.T_high)
        if not high > low:
            return self
        T = 0.5 * (low + high) + 0.5 * (high - low) * _nodes(_NODES)
        seen = np.stack([*self.values(T, *PROPERTIES, "Pr"), self.enthalpy(T)])
        rows = _coefficients(seen)
        small = np.abs(rows) < (np.array(_WINDOW_AGREES) * np.abs(seen).min(axis=1))[:, None]
        # The enthalpy's zero is arbitrary: its digits count against its change.
        small[-1] = np.abs(rows[-1]) < _WINDOW_AGREES[-1] * np.ptp(seen[-1])
        terms = tuple(int(np.flatnonzero(~row)[-1]) + 1 for row in small)
        if max(terms) > _NODES - 4:
            return self
        given = {f.name: getattr(self, f.name) for f in fields(Fluid)}
        return Windowed(**given, low=low, high=high, rows=rows, terms=terms)

    def _over(self, T: ArrayLike, rows: int, evaluate: Callable[[_Piece, Array], Array]) -> Array:
        """`evaluate(piece, T)` of shape (rows, T.size), piece by piece, as an array of shape (rows, *T.shape)."""
        T = np.asarray(T, dtype=float)
        t = np.clip(T.ravel(), self.T_low, self.T_high)
        # 16 bits, since numpy sorts those by counting.
        owner = np.searchsorted(self.breaks, t, side="right").astype(np.int16)
        counts = np.bincount(owner)
        mixed = np.count_nonzero(counts) > 1
        if mixed:
            order = np.argsort(owner, kind="stable")
            t = t[order]
        out = np.empty((rows, t.size))
        start = 0
        for piece, count in zip(self.pieces, counts, strict=False):
            end = start + count
            while start < end:
                part = slice(start, min(start + _CHUNK, end))
                out[:, part] = evaluate(piece, t[part])
                start = part.stop
        if mixed:
            by_piece, out = out, np.empty_like(out)
            out[:, order] = by_piece
        return out.reshape(rows, *T.shape)


@dataclass(frozen=True, kw_only=True, eq=False)
class Windowed(Fluid):
    """A fluid on one Chebyshev polynomial a property, between `low` and `high`; at the nearer of them beyond."""

    low: float
    high: float
    rows: Array
    """Chebyshev coefficients of rho, cp, mu, k, Pr and enthalpy; shape (6, nodes)."""
    terms: tuple[int, ...]
    """How many of them each row needs."""

    def values(self, T: ArrayLike, *names: str) -> tuple[Array, ...]:
        return tuple(self._polynomials(T, [_ROWS[name] for name in names]))

    def _enthalpy(self, T: Array) -> Array:
        inside = np.clip(T, self.low, self.high)
        cp, h = self._polynomials(inside, [_ROWS["cp"], 5])
        return np.asarray(h + cp * (T - inside))

    def _polynomials(self, T: ArrayLike, which: list[int]) -> Array:
        T = np.asarray(T, dtype=float)
        terms = max(self.terms[row] for row in which)
        rows = self.rows[which, :terms]
        x = (np.clip(T.ravel(), self.low, self.high) - 0.5 * (self.low + self.high)) * (2 / (self.high - self.low))
        out = np.empty((len(which), x.size))
        for start in range(0, x.size, _CHUNK):
            part = slice(start, start + _CHUNK)
            out[:, part] = rows @ _chebyshev(x[part], terms)
        return out.reshape(len(which), *T.shape)


@dataclass(frozen=True, kw_only=True, eq=False)
class Tabulated(Fluid):
    """A fluid on a typed table; up to 10 K beyond its end points it continues the end intervals."""

    T: Array
    rows: Array
    """rho, cp, k, ln mu against T, shape (4, points)."""

    def values(self, T: ArrayLike, *names: str) -> tuple[Array, ...]:
        t = np.clip(np.asarray(T, dtype=float), self.T_low, self.T_high)
        i, share = self._interval(t)
        rho, cp, k, log_mu = self.rows
        # ln mu is linear in 1/T, so the share is taken on the inverse temperatures.
        share_mu = share * self.T[i + 1] / t
        known: dict[str, Callable[[], Array]] = {
            "rho": lambda: rho[i] + share * (rho[i + 1] - rho[i]),
            "cp": lambda: cp[i] + share * (cp[i + 1] - cp[i]),
            "k": lambda: k[i] + share * (k[i + 1] - k[i]),
            "mu": lambda: np.exp(log_mu[i] + share_mu * (log_mu[i + 1] - log_mu[i])),
            "Pr": lambda: known["mu"]() * known["cp"]() / known["k"](),
        }
        return tuple(np.asarray(known[name]()) for name in names)

    def _interval(self, t: Array) -> tuple[NDArray[np.intp], Array]:
        i = np.clip(np.searchsorted(self.T, t, side="right") - 1, 0, self.T.size - 2)
        return i, (t - self.T[i]) / (self.T[i + 1] - self.T[i])

    def _enthalpy(self, T: Array) -> Array:
        i, share = self._interval(T)
        cp = self.rows[1]
        whole = np.concatenate([[0.0], np.cumsum(0.5 * (cp[1:] + cp[:-1]) * np.diff(self.T))])
        return np.asarray(whole[i] + (T - self.T[i]) * (cp[i] + 0.5 * share * (cp[i + 1] - cp[i])))

    def extrapolated(self, T: ArrayLike) -> NDArray[np.bool_]:
        T = np.asarray(T, dtype=float)
        return np.asarray(~self.outside(T) & ((self.T[0] > T) | (self.T[-1] < T)))


@dataclass(frozen=True, kw_only=True, eq=False)
class Unchanging(Fluid):
    """A fluid with constant properties."""

    constant: Constant

    def values(self, T: ArrayLike, *names: str) -> tuple[Array, ...]:
        c = self.constant
        known = {"rho": c.rho, "cp": c.cp, "mu": c.mu, "k": c.k, "Pr": c.mu * c.cp / c.k}
        return tuple(np.full(np.shape(T), known[name]) for name in names)

    def _enthalpy(self, T: Array) -> Array:
        return np.asarray(self.constant.cp * T)


@dataclass(frozen=True, kw_only=True, eq=False)
class Saturation:
    """Saturated vapour and liquid of a pure fluid at absolute pressure p."""

    name: str
    p: float
    T_sat: float
    h_fg: float
    surface_tension: float | None
    """None where the library has no model of it."""
    liquid: Fluid
    """The condensate, from freezing up to T_sat."""
    vapour: Fluid
    """The vapour, from T_sat up."""

    def heat(self, superheat: float = 0.0, subcooling: float = 0.0) -> float:
        """Heat given up by a kilogram from superheated vapour to subcooled condensate, J/kg.

        Raises FluidError where the vapour or the condensate leaves its span.
        """
        for fluid, T in ((self.vapour, self.T_sat + superheat), (self.liquid, self.T_sat - subcooling)):
            if problem := fluid.problem(T, "condensing side"):
                raise FluidError(problem)
        vapour = self.vapour.enthalpy(np.array([self.T_sat, self.T_sat + superheat]))
        liquid = self.liquid.enthalpy(np.array([self.T_sat - subcooling, self.T_sat]))
        return float(vapour[1] - vapour[0] + self.h_fg + liquid[1] - liquid[0])


@dataclass(frozen=True, kw_only=True, eq=False)
class SaturationLine:
    """A pure fluid along its saturation line by cubic splines in T, from `T_low` to a little below the critical point.

    Outside that span everything is as at its nearer end, so that an iteration may pass through.
    """

    name: str
    origin: str
    T_low: float
    T_high: float
    p_critical: float
    splines: Mapping[str, CubicSpline]

    def _at(self, name: str, T: ArrayLike) -> Array:
        return np.asarray(self.splines[name](np.clip(np.asarray(T, dtype=float), self.T_low, self.T_high)))

    def T(self, p: ArrayLike) -> Array:
        """Saturation temperature at absolute pressure p."""
        ends = np.log(self.p(np.array([self.T_low, self.T_high])))
        return np.asarray(self.splines["T of ln p"](np.clip(np.log(p), *ends)))

    def p(self, T: ArrayLike) -> Array:
        return np.exp(self._at("ln p", T))

    def liquid(self, T: ArrayLike) -> Properties:
        """Saturated liquid, of T's shape."""
        return self._properties("liquid", T)

    def vapour(self, T: ArrayLike) -> Properties:
        """Saturated vapour, of T's shape."""
        return self._properties("vapour", T)

    def _properties(self, phase: str, T: ArrayLike) -> Properties:
        rho, cp, mu, k = np.moveaxis(np.exp(self._at(phase, T)), -1, 0)
        return Properties(rho=rho, cp=cp, mu=mu, k=k, origin=self.origin)

    def enthalpy(self, T: ArrayLike, phase: Literal["liquid", "vapour"]) -> Array:
        """J/kg, from the library's own zero."""
        return self._at(f"enthalpy of {phase}", T)

    def h_fg(self, T: ArrayLike) -> Array:
        return self.enthalpy(T, "vapour") - self.enthalpy(T, "liquid")


# Making them ----------------------------------------------------------------------------------------------------------


def fluid_at(specification: Specification, p: float, T: float = ROOM) -> Fluid:
    """The fluid at absolute pressure p, on the side of the saturation line where T (inlet temperature) lies.

    Source: CoolProp (Bell et al., Ind. Eng. Chem. Res. 53 (2014) 2498) for named fluids. Raises FluidError with one
    sentence where the fluid is unknown, lacks a property, or is two-phase, solid or outside its model at (p, T).
    """
    match specification:
        case Constant():
            return _constant(specification)
        case Table():
            return _tabulated(specification)
    if not (math.isfinite(p) and p > 0):
        raise FluidError(f"{specification.name}: an absolute pressure of {p:g} Pa is not above zero")
    if not math.isfinite(T):
        raise FluidError(f"{specification.name}: the inlet temperature is not a number")
    if isinstance(specification, Solution):
        return _solution(_solution_code(specification.name), float(specification.mass_fraction), float(p))
    backend, code = _pure_code(specification.name)
    if backend == "INCOMP":
        return _thermal_oil(code, float(p))
    return _pure(code, float(p), _phase(code, float(p), float(T)))


@lru_cache(maxsize=64)
def saturation(p: float, name: str = "water") -> Saturation:
    """Saturated vapour and liquid at absolute pressure p, for condensation.

    Raises FluidError above the critical point, below the triple point and for blends that boil over a range.
    """
    backend, code = _pure_code(name)
    bubble, dew = _saturation(code, float(p)) if backend == "HEOS" else (None, None)
    if bubble is None or dew is None:
        raise FluidError(f"{_plain(code)} has no saturation line at {_bar(p)}")
    if dew - bubble > 0.01:
        raise FluidError(
            f"{_plain(code)} boils from {_celsius(bubble, 1)} to {_celsius(dew, 1)} at {_bar(p)}: condensing of blends "
            "is not covered"
        )
    C, state = _library(), _state("HEOS", code)
    state.update(C.PQ_INPUTS, p, 1)
    h_vapour = state.hmass()
    state.update(C.PQ_INPUTS, p, 0)
    h_liquid = state.hmass()
    return Saturation(
        name=_plain(code),
        p=float(p),
        T_sat=bubble,
        h_fg=h_vapour - h_liquid,
        surface_tension=_positive(state.surface_tension),
        liquid=_pure(code, float(p), "liquid"),
        vapour=_pure(code, float(p), "gas"),
    )


@lru_cache(maxsize=8)
def saturation_line(name: str = "water") -> SaturationLine:
    """The saturation line of a pure fluid, sampled from the property library, checked between its nodes.

    Raises FluidError where the fluid has none.
    """
    backend, code = _pure_code(name)
    if backend != "HEOS":
        raise FluidError(f"{_plain(code)} has no saturation line")
    C, state = _library(), _state("HEOS", code)
    T_low, T_high = float(state.Ttriple()), _LINE_END * float(state.T_critical())

    def sample(T: float) -> list[float]:
        found: list[float] = []
        for quality in (0.0, 1.0):
            state.update(C.QT_INPUTS, quality, T)
            found += [state.rhomass(), state.cpmass(), state.viscosity(), state.conductivity(), state.hmass()]
        return [*found, state.p()]

    # Closer together towards the critical point, where everything bends.
    T = T_low + (T_high - T_low) * (1 - np.linspace(1, 0, _LINE_NODES) ** 2)
    rows = np.array([sample(t) for t in T])
    logs = np.log(np.delete(rows, (4, 9), axis=1))
    line = SaturationLine(
        name=_plain(code),
        origin=_origin(),
        T_low=T_low,
        T_high=T_high,
        p_critical=float(state.p_critical()),
        splines={
            "liquid": CubicSpline(T, logs[:, :4]),
            "vapour": CubicSpline(T, logs[:, 4:8]),
            "ln p": CubicSpline(T, logs[:, 8]),
            "T of ln p": CubicSpline(logs[:, 8], T),
            "enthalpy of liquid": CubicSpline(T, rows[:, 4]),
            "enthalpy of vapour": CubicSpline(T, rows[:, 9]),
        },
    )
    between = 0.5 * (T[5::29] + T[4:-1:29])
    seen = np.array([sample(t) for t in between])
    got = [[x.rho, x.cp, x.mu, x.k] for x in (line.liquid(between), line.vapour(between))]
    off = np.abs(np.array([*got[0], *got[1]]).T / np.delete(seen[:, :10], (4, 9), axis=1) - 1).max()
    if off > _LINE_AGREES:
        raise FluidError(f"the saturation line of {line.name} is not smooth in the property library: {off:.1e}")
    return line


_LINE_END = 0.99
"""Of the critical temperature: where the saturation line ends."""
_LINE_NODES = 300
_LINE_AGREES = 1e-5


def _constant(c: Constant) -> Fluid:
    _refuse_unphysical(c.name, "", rho=c.rho, cp=c.cp, k=c.k, mu=c.mu)
    return Unchanging(
        name=c.name,
        origin="constant, as stated",
        phase=_phase_by_density(c.rho),
        T_low=0.0,
        T_high=math.inf,
        low_reason="is below absolute zero",
        high_reason="",
        constant=c,
    )


@lru_cache(maxsize=256)
def _tabulated(table: Table) -> Fluid:
    if len(table.rows) < 2:
        raise FluidError(f"{table.name}: a property table needs at least two temperatures, {len(table.rows)} given")
    for row in table.rows:
        if not (math.isfinite(row.T) and row.T > 0):
            raise FluidError(f"{table.name}: a temperature of {row.T:g} K in the property table is not above zero")
        _refuse_unphysical(table.name, f" at {_celsius(row.T, 1)}", rho=row.rho, cp=row.cp, k=row.k, mu=row.mu)
    rows = sorted(table.rows, key=lambda row: row.T)
    T = np.array([row.T for row in rows])
    if (np.diff(T) <= 0).any():
        twice = T[:-1][np.diff(T) <= 0][0]
        raise FluidError(f"{table.name}: the property table gives {_celsius(twice, 2)} twice")
    fluid = Tabulated(
        name=table.name,
        origin="typed table",
        phase=_phase_by_density(max(row.rho for row in rows)),
        T_low=max(float(T[0]) - TABLE_MARGIN, 1.0),
        T_high=float(T[-1]) + TABLE_MARGIN,
        low_reason=f"is more than {TABLE_MARGIN:g} K below the typed table",
        high_reason=f"is more than {TABLE_MARGIN:g} K above the typed table",
        T=T,
        rows=np.array([[row.rho, row.cp, row.k, math.log(row.mu)] for row in rows]).T,
    )
    for end in (fluid.T_low, fluid.T_high):
        rho, cp, mu, k = (float(v) for v in fluid.values(end, *PROPERTIES))
        where = f" continued to {_celsius(end, 1)}"
        _refuse_unphysical(table.name, where, rho=rho, cp=cp, k=k, mu=mu)
    return fluid


def _refuse_unphysical(name: str, where: str, **values: float) -> None:
    words = {"rho": "density", "cp": "heat capacity", "k": "conductivity", "mu": "viscosity"}
    for key, value in values.items():
        if not (math.isfinite(value) and value > 0):
            raise FluidError(f"{name}: a {words[key]} of {value:g}{where} is not above zero")


def _phase_by_density(rho: float) -> Phase:
    """Typed fluids state no phase; no liquid used in exchangers is lighter than 100 kg/m3."""
    return "liquid" if rho >= 100 else "gas"


# CoolProp: pure fluids ------------------------------------------------------------------------------------------------

_library_lock = threading.Lock()


@contextlib.contextmanager
def _standard_output_closed() -> Iterator[None]:
    """Nothing written to standard output, not even from compiled code, reaches it."""
    try:
        kept = os.dup(1)
    except OSError:  # there is no standard output, as under a windowed interpreter
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    sys.stdout.flush()
    try:
        os.dup2(nowhere, 1)
        yield
    finally:
        os.dup2(kept, 1)
        os.close(kept)
        os.close(nowhere)


@cache
def _library() -> Any:
    """The CoolProp module, imported on first use.

    Its saturation tables take seconds to load and are not used here. Told so, the library announces it on standard
    output, which belongs to results.
    """
    with _library_lock, _standard_output_closed():
        os.environ["COOLPROP_DISABLE_SUPERANCILLARIES_ENTIRELY"] = "1"
        import CoolProp
    return CoolProp


def _state(backend: str, code: str) -> Any:
    """A state object of one's own: shared between threads, or used after a failed update, they go wrong silently."""
    return _library().AbstractState(backend, code)


@cache
def _origin() -> str:
    return f"CoolProp {_library().__version__}"


def _bubble(code: str, p: float) -> float | None:
    return _saturation(code, p)[0]


@lru_cache(maxsize=4096)
def _saturation(code: str, p: float) -> tuple[float | None, float | None]:
    """Bubble and dew temperature at p; (None, None) at and above the critical pressure and below the triple point."""
    C, state = _library(), _state("HEOS", code)
    if p >= state.p_critical() or p < state.keyed_output(C.iP_min):
        return None, None
    found = []
    for quality in (0, 1):
        try:
            state.update(C.PQ_INPUTS, p, quality)
        except ValueError as error:
            raise FluidError(f"no boiling temperature is found for {_plain(code)} at {_bar(p)}") from error
        found.append(float(state.T()))
    return found[0], found[1]


@lru_cache(maxsize=4096)
def _phase(code: str, p: float, T: float) -> Phase:
    state = _state("HEOS", code)
    if p >= state.p_critical():
        return "liquid" if _critical_side(code, p, T) else "gas"
    bubble, dew = _saturation(code, p)
    if bubble is None or dew is None:
        return "gas"
    if bubble < T < dew and dew - bubble > 0.01:
        raise FluidError(
            f"{_plain(code)} at {_celsius(T, 1)} and {_bar(p)} is two-phase (it boils from {_celsius(bubble, 1)} to "
            f"{_celsius(dew, 1)})"
        )
    return "liquid" if bubble >= T else "gas"


def _critical_side(code: str, p: float, T: float) -> bool:
    """Whether the fluid above its critical pressure is as dense as a liquid at T."""
    C, state = _library(), _state("HEOS", code)
    if not state.Tmin() < T < state.Tmax():
        return bool(state.T_critical() > T)
    try:
        state.update(C.PT_INPUTS, p, T)
    except ValueError:
        return bool(state.T_critical() > T)
    return bool(state.rhomass() > state.rhomass_critical())


@lru_cache(maxsize=512)
def _pure(code: str, p: float, phase: Phase) -> Fluid:
    C, state, name = _library(), _state("HEOS", code), _plain(code)
    if p > state.pmax():
        raise FluidError(f"{name} at {_bar(p)} is above the property model's limit ({_bar(state.pmax())})")
    T_low, T_high = float(state.Tmin()), float(state.Tmax())
    low_reason, high_reason = "is below the property model's limit", "is above the property model's limit"
    T_freeze = None
    if code not in _MODEL_ENDS_ABOVE_FREEZING and abs(T_low - state.Ttriple()) < 0.05:
        low_reason, T_freeze = "freezes", T_low
    if state.has_melting_line():
        T_melt = _melting(code, p)
        if T_melt is not None and T_melt > T_low:
            T_low, low_reason, T_freeze = T_melt, "freezes", T_melt
    notes: tuple[str, ...] = ()
    imposed = C.iphase_not_imposed
    bubble, dew = _saturation(code, p)
    if p >= state.p_critical():
        notes = (
            f"{name} at {_bar(p)} is above its critical pressure ({_bar(state.p_critical())}): film correlations do "
            "not cover the steep property changes near the pseudo-critical temperature",
        )
    elif phase == "liquid":
        if bubble is None:
            raise FluidError(f"{name} has no liquid state at {_bar(p)}")
        T_high, high_reason = bubble, f"boils at {_bar(p)}"
        imposed = C.iphase_liquid
    else:
        if dew is not None and dew > T_low:
            T_low, low_reason = dew, f"condenses at {_bar(p)}"
        imposed = C.iphase_gas
    if T_low >= T_high:
        raise FluidError(f"{name} has no {phase} state at {_bar(p)} inside the property model")

    def in_phase() -> Any:
        state = _state("HEOS", code)
        state.specify_phase(imposed)
        return state

    sample = _without_spike(_sampler(in_phase, p, name), _CONDUCTIVITY_SPIKES.get(code))
    # Next to the critical point CoolProp's own density iteration leaves noise above the tighter figure.
    agrees = _AGREES if p < 0.9 * state.p_critical() else 1e-6
    low, high = T_low, T_high
    failed: list[float] = []
    while True:
        try:
            pieces = _pieces(sample, low, high, name, agrees)
            break
        except _Gap as gap:
            failed.append(gap.T)
            low, high = _first_run(sample, T_low, T_high, failed, gap)
    return Interpolated(
        name=name,
        origin=_origin(),
        phase=phase,
        T_low=low,
        T_high=high,
        low_reason=low_reason if low == T_low else _NO_TRANSPORT,
        high_reason=high_reason if high == T_high else _NO_TRANSPORT,
        freezing_temperature=T_freeze,
        boils_at=partial(_bubble, code),
        notes=(*notes, *_steps(pieces, name)),
        pieces=pieces,
    )


_NO_TRANSPORT = "is outside the library's viscosity and conductivity models"
_MODEL_ENDS_ABOVE_FREEZING = ("Air", "R124", "R14", "R236EA", "R404A", "R407C", "R410A", "R507A")
"""Fluids whose lowest model temperature is not their freezing point."""
_CONDUCTIVITY_SPIKES = {"Ammonia": 405.4}
"""Temperatures at which a conductivity model runs to infinity at any pressure."""


def _without_spike(sample: Sample, T_spike: float | None) -> Sample:
    """`sample` with ln k taken straight across the kelvin on either side of a spike."""
    if T_spike is None:
        return sample
    ends = (T_spike - 1.0, T_spike + 1.0)

    def bridged(T: float) -> tuple[float, ...]:
        if not ends[0] < T < ends[1]:
            return sample(T)
        k = np.interp(T, ends, np.log([sample(end)[3] for end in ends]))
        return (*sample(T)[:3], math.exp(k))

    return bridged


def _first_run(sample: Sample, T_low: float, T_high: float, failed: list[float], gap: _Gap) -> tuple[float, float]:
    """The lowest run of temperatures, at least a fifth of the span, over which the library gives every property.

    The corresponding-states models of some refrigerants find no solution in places. Raises the gap where no such run
    is found, or after repeated failures.
    """

    def works(T: float) -> bool:
        try:
            sample(T)
        except _Gap:
            return False
        return True

    grid = np.unique([*np.linspace(T_low, T_high, 65), *failed])
    good = [T not in failed and works(T) for T in grid]
    edges = np.flatnonzero(np.diff([False, *good, False]))
    for first, last in zip(edges[::2], edges[1::2] - 1, strict=True):
        if grid[last] - grid[first] >= 0.2 * (T_high - T_low) and len(failed) < 8:
            return float(grid[first]), float(grid[last])
    raise gap


def _steps(pieces: tuple[_Piece, ...], name: str) -> tuple[str, ...]:
    return tuple(
        f"the library's own properties of {name} step by up to {piece.error:.1%} at {_celsius(piece.low, 1)}"
        for piece in pieces
        if piece.error > 1e-3
    )


def _melting(code: str, p: float) -> float | None:
    C, state = _library(), _state("HEOS", code)
    try:
        T = float(state.melting_line(C.iT, C.iP, p))
    except ValueError:
        # Below the melting curve's own lowest pressure the triple point is the limit.
        return None
    return T if math.isfinite(T) else None


Sample = Callable[[float], tuple[float, ...]]


class _Gap(FluidError):
    """A property that the library does not give at T."""

    def __init__(self, sentence: str, T: float) -> None:
        super().__init__(sentence)
        self.T = T


def _sampler(new_state: Callable[[], Any], p: float, name: str) -> Sample:
    """rho, cp, mu, k at (p, T), each refused unless finite and above zero."""
    C, state = _library(), new_state()

    def sample(T: float) -> tuple[float, ...]:
        nonlocal state
        try:
            state.update(C.PT_INPUTS, p, T)
        except ValueError as error:
            raise FluidError(f"{name} at {_celsius(T, 1)} and {_bar(p)} is outside its property model") from error
        rho, cp, mu, k = (_positive(get) for get in (state.rhomass, state.cpmass, state.viscosity, state.conductivity))
        if rho is None or cp is None:
            raise FluidError(f"{name} at {_celsius(T, 1)} and {_bar(p)} is outside its property model")
        if mu is None or k is None:
            gap = _Gap(f"the property library has no {_lacking(state)} for {name}: type a property table for it", T)
            state = new_state()
            raise gap
        return rho, cp, mu, k

    return sample


def _positive(get: Callable[[], float]) -> float | None:
    """What `get` gives where that is finite and above zero; the library also fails silently, by 0, inf or NaN."""
    try:
        value = float(get())
    except ValueError:
        return None
    return value if math.isfinite(value) and value > 0 else None


# The interpolant ------------------------------------------------------------------------------------------------------

_NODES = 24
_AGREES = 1e-8
"""Largest relative difference from CoolProp that is accepted between nodes."""
_NEGLIGIBLE = 1e-12
_NARROWEST = 1e-3
"""Kelvin. CoolProp's transport properties have corners and steps; a piece this narrow holds one."""
_LARGEST_STEP = 0.03
_WINDOW_AGREES = (1e-8, 1e-8, 1e-7, 1e-7, 1e-7, 1e-13)
"""Relative size below which a term of a windowed polynomial is left out, by row."""
_CHUNK = 2048


@dataclass(frozen=True, kw_only=True, eq=False)
class _Piece:
    low: float
    high: float
    logs: Array
    """Chebyshev coefficients of ln rho, ln cp, ln mu, ln k, ln Pr; shape (5, terms)."""
    heat: Array
    """Chebyshev coefficients of the integral of cp from the fluid's T_low."""
    error: float

    @property
    def terms(self) -> int:
        return int(self.logs.shape[1])

    def basis(self, T: Array, terms: int) -> Array:
        """Chebyshev polynomials at T by recurrence, shape (terms, T.size)."""
        return _chebyshev((T - 0.5 * (self.low + self.high)) * (2 / (self.high - self.low)), terms)


def _chebyshev(x: Array, terms: int) -> Array:
    """Chebyshev polynomials at x by recurrence, shape (terms, x.size)."""
    basis = np.empty((terms, x.size))
    basis[0] = 1.0
    if terms > 1:
        basis[1] = x
    twice = 2 * x
    for j in range(2, terms):
        np.multiply(twice, basis[j - 1], out=basis[j])
        basis[j] -= basis[j - 2]
    return basis


def _pieces(sample: Sample, T_low: float, T_high: float, name: str, agrees: float = _AGREES) -> tuple[_Piece, ...]:
    """Interpolants that cover the span: halved until each agrees with `sample` between its nodes."""
    found: list[_Piece] = []
    waiting = [(T_low, T_high)]
    h = 0.0
    while waiting:
        low, high = waiting.pop()
        piece = _fit(sample, low, high, h)
        if piece.error > agrees and high - low > _NARROWEST:
            middle = 0.5 * (low + high)
            waiting += [(middle, high), (low, middle)]
            continue
        if piece.error > _LARGEST_STEP:
            raise FluidError(
                f"the properties of {name} change too steeply near {_celsius(low, 2)}: state another pressure or type "
                "a property table"
            )
        found.append(piece)
        h = float(chebyshev.chebval(1.0, piece.heat))
    return tuple(found)


def _fit(sample: Sample, low: float, high: float, h: float) -> _Piece:
    def spread(x: Array) -> Array:
        return np.clip(0.5 * (low + high) + 0.5 * (high - low) * x, low, high)

    logs = _coefficients(np.log([sample(T) for T in spread(_nodes(_NODES))]).T)
    between = np.array([-1.0, -0.83, -0.47, -0.11, 0.23, 0.59, 0.89, 1.0])
    seen = np.log([sample(T) for T in spread(between)]).T
    error = max(
        float(np.abs(chebyshev.chebval(between, logs.T) - seen).max()),
        # A corner that the sparse check points miss shows in coefficients that do not die away.
        float(np.abs(logs[:, -3:]).max()),
    )
    kept = max(int(np.flatnonzero(np.abs(logs).max(axis=0) > _NEGLIGIBLE)[-1]) + 1, 1)
    logs = logs[:, :kept]
    cp = np.exp(chebyshev.chebval(_nodes(2 * _NODES), logs[1]))
    heat = chebyshev.chebint(_coefficients(cp[None, :])[0], lbnd=-1, scl=1) * 0.5 * (high - low)
    heat[0] += h
    heat = heat[: int(np.flatnonzero(np.abs(heat) > 1e-15 * np.abs(heat).max())[-1]) + 1]
    return _Piece(low=low, high=high, logs=np.vstack([logs, logs[1] + logs[2] - logs[3]]), heat=heat, error=error)


@cache
def _nodes(n: int) -> Array:
    return np.cos(np.pi * (np.arange(n) + 0.5) / n)


def _coefficients(values: Array) -> Array:
    """Chebyshev coefficients of functions given at `_nodes`, along the last axis."""
    n = values.shape[-1]
    c = values @ np.cos(np.pi * np.outer(np.arange(n) + 0.5, np.arange(n)) / n) * (2 / n)
    c[..., 0] /= 2
    return np.asarray(c)


# CoolProp: solutions and thermal oils ---------------------------------------------------------------------------------

SOLUTIONS = {
    "MEG": "ethylene glycol",
    "MPG": "propylene glycol",
    "MGL": "glycerol",
    "MEA": "ethanol",
    "MMA": "methanol",
    "MAM": "ammonia",
    "MCA": "calcium chloride",
    "MNA": "sodium chloride",
    "MMG": "magnesium chloride",
    "MKC": "potassium carbonate",
    "MKA": "potassium acetate",
    "MKF": "potassium formate",
    "MLI": "lithium chloride",
    "MITSW": "sea salt",
}
"""Plain names of the aqueous solutions, by CoolProp's code (Melinder 2010; sea water: Sharqawy et al. 2010)."""
_RICHEST = {"MMG": 0.205}
"""Mass fractions beyond which the library's freezing curve leaves the measured one."""
_OTHER_SOLUTIONS = ("MEG2", "MPG2", "MGL2", "MEA2", "MMA2", "MAM2", "MCA2", "MNA2", "MMG2", "MKC2", "MKA2")
_OTHER_BRINES = ("VCA", "VKC", "VMA", "VMG", "VNA", "FRE")
_SOLUTE_ALIASES = {"seawater": "MITSW", "brine": "MNA", "glycol": "MEG", "monoethyleneglycol": "MEG", "salt": "MNA"}
_VOLATILE = ("MEA", "MMA", "MAM", "MEA2", "MMA2", "MAM2", "VMA")

_UNKNOWN_BOILING = "the boiling point of {} is not known and not checked"
_LEFT_OUT = {
    "HFE": "its conductivity in the property library is that of another kind of fluid",
    "PCL": "its viscosity in the property library is that of another kind of fluid",
    "NaK": "its conductivity in the property library is not that of a metal",
    "LiqNa": "no film correlation here covers liquid metals",
}
"""Thermal fluids that the library lists and that are not offered, and why."""


@lru_cache(maxsize=256)
def _solution(code: str, x: float, p: float) -> Fluid:
    state = _state("INCOMP", code)
    solute = SOLUTIONS.get(code, code)
    low, high = _fractions(state, code)
    if not low <= x <= high:
        raise FluidError(
            f"{solute} in water: a mass fraction of {x:.4g} is outside the {low:g} to {high:g} that the property model "
            "covers"
        )

    def mixed() -> Any:
        state = _state("INCOMP", code)
        state.set_mass_fractions([x])
        return state

    state = mixed()
    name = f"{solute} {100 * x:.4g} % in water"
    T_low, T_high = float(state.Tmin()), float(state.Tmax())
    low_reason, high_reason = "is below the property model's limit", "is above the property model's limit"
    T_freeze = _solution_freezing(state)
    if T_freeze is not None and T_freeze > T_low:
        T_low, low_reason = T_freeze, "freezes"
    volatile = code in _VOLATILE
    if not volatile:
        # A dissolved salt or glycol only raises the boiling point of water.
        boiling = _saturation("Water", p)[0]
        if boiling is None and p < bar:
            raise FluidError(f"{name} has no liquid state at {_bar(p)}")
        if boiling is not None and boiling < T_high:
            T_high, high_reason = boiling, f"may boil at {_bar(p)}"
    if T_low >= T_high:
        raise FluidError(f"{name} has no usable liquid state at {_bar(p)}")
    return Interpolated(
        name=name,
        origin=f"{_origin()} ({code})",
        phase="liquid",
        T_low=T_low,
        T_high=T_high,
        low_reason=low_reason,
        high_reason=high_reason,
        freezing_temperature=T_freeze,
        boils_at=partial(_bubble, "Water") if not volatile else lambda p: None,
        notes=(_UNKNOWN_BOILING.format(name),) if volatile else (),
        pieces=_pieces(_sampler(mixed, p, name), T_low, T_high, name),
    )


def _fractions(state: Any, code: str) -> tuple[float, float]:
    C = _library()
    high = float(state.keyed_output(C.ifraction_max))
    return float(state.keyed_output(C.ifraction_min)), min(high, _RICHEST.get(code, high))


def _solution_freezing(state: Any) -> float | None:
    """Freezing point; None where the library has none, which it tells by a figure near zero or infinity."""
    T = float(state.keyed_output(_library().iT_freeze))
    return T if 150 < T < 350 else None


@lru_cache(maxsize=256)
def _thermal_oil(code: str, p: float) -> Fluid:
    state, name = _state("INCOMP", code), code
    T_low, T_high = float(state.Tmin()), float(state.Tmax())
    high_reason = "is above the property model's limit"
    boiling = _oil_boiling(code, p)
    if boiling is not None:
        T_high, high_reason = boiling, f"boils at {_bar(p)}"
    if T_low >= T_high:
        raise FluidError(f"{name} has no liquid state at {_bar(p)}")
    known = _oil_boiling(code, 1.0) is not None
    return Interpolated(
        name=name,
        origin=f"{_origin()} ({code})",
        phase="liquid",
        T_low=T_low,
        T_high=T_high,
        low_reason="is below the property model's limit",
        high_reason=high_reason,
        boils_at=partial(_oil_boiling, code),
        notes=() if known else (_UNKNOWN_BOILING.format(name),),
        pieces=_pieces(_sampler(lambda: _state("INCOMP", code), p, name), T_low, T_high, name),
    )


@lru_cache(maxsize=1024)
def _oil_boiling(code: str, p: float) -> float | None:
    """The highest temperature at which the library calls the oil liquid at p; None where it always does."""
    C, state = _library(), _state("INCOMP", code)
    low, high = float(state.Tmin()), float(state.Tmax())

    def liquid(T: float) -> bool:
        try:
            _state("INCOMP", code).update(C.PT_INPUTS, p, T)
        except ValueError:
            return False
        return True

    if liquid(high):
        return None
    while high - low > 1e-3:
        middle = 0.5 * (low + high)
        low, high = (middle, high) if liquid(middle) else (low, middle)
    return low


# Names ----------------------------------------------------------------------------------------------------------------


@dataclass(frozen=True, kw_only=True)
class Offer:
    """A fluid that can be named: its range in kelvin, its mass fractions where it is a solution, what is missing."""

    name: str
    code: str
    kind: Kind
    T_low: float
    T_high: float
    fraction_low: float | None = None
    fraction_high: float | None = None
    missing: str = ""
    """The properties the library lacks, for which a typed table is needed; empty where the fluid is complete."""


def _folded(text: str) -> str:
    return re.sub(r"[^a-z0-9]", "", text.lower())


def _plain(code: str) -> str:
    """Trade spelling of CoolProp's name: CarbonDioxide is carbon dioxide, R134a stays."""
    if re.match(r"[A-Z]+\d|[A-Z]{2,}", code):
        return code
    words = re.sub(r"(?<=[a-z])(?=[A-Z])", " ", code).lower()
    return re.sub(r"^(iso|cyclo|ethyl|para|ortho) ", r"\1", words)


_PURE_ALIASES = {"steam": "Water", "sulphur dioxide": "SulfurDioxide", "sulphur hexafluoride": "SulfurHexafluoride"}


@cache
def _pure_names() -> dict[str, tuple[str, str]]:
    """Folded name or alias -> (backend, code)."""
    params = _library().CoolProp
    codes = params.get_global_param_string("FluidsList").split(",")
    names: dict[str, tuple[str, str]] = {}
    for code in codes:
        for alias in params.get_fluid_param_string(code, "aliases").split(","):
            if alias:
                names.setdefault(_folded(alias), ("HEOS", code))
    for code in codes:
        names[_folded(code)] = ("HEOS", code)
    for code in _oils():
        names.setdefault(_folded(code), ("INCOMP", code))
    return names | {_folded(alias): ("HEOS", code) for alias, code in _PURE_ALIASES.items()}


@cache
def _oils() -> tuple[str, ...]:
    params = _library().CoolProp
    listed = params.get_global_param_string("incompressible_list_pure").split(",")
    doubles = ("Water", "Air", "Acetone", "Ethanol", "Hexane", "NBS")
    return tuple(
        sorted(
            code
            for code in listed
            if code not in doubles and code not in _LEFT_OUT and not code.startswith(("Example", "Food"))
        )
    )


def _solute_names() -> dict[str, str]:
    codes = (*SOLUTIONS, *_OTHER_SOLUTIONS, *_OTHER_BRINES)
    names = {_folded(code): code for code in codes}
    names.update({_folded(plain): code for code, plain in SOLUTIONS.items()})
    return names | _SOLUTE_ALIASES


def check_name(name: str, kind: Literal["fluid", "solution"]) -> None:
    """FluidError with a sentence where nothing of the kind has that name, whatever its state would be."""
    if kind == "fluid":
        _pure_code(name)
    else:
        _solution_code(name)


def _pure_code(name: str) -> tuple[str, str]:
    found = _pure_names().get(_folded(name))
    if found is None:
        if _folded(name) in _solute_names():
            raise FluidError(f"{name} is offered as a solution in water: state its mass fraction")
        for code, reason in _LEFT_OUT.items():
            if _folded(name) == _folded(code):
                raise FluidError(f"{code} is not offered: {reason}")
        raise FluidError(_unknown("fluid", name))
    return found


def _solution_code(name: str) -> str:
    found = _solute_names().get(_folded(name))
    if found is None:
        if _folded(name) in _pure_names():
            raise FluidError(f"{name} is offered as a pure fluid, not as a solution in water")
        raise FluidError(_unknown("solution", name))
    return found


def _unknown(kind: str, name: str) -> str:
    nearest = nearest_name(name)
    hint = f"the nearest name is {nearest}" if nearest else "no name is near it"
    return f"no {kind} is called {name!r}: {hint}; any other fluid can be typed as a property table"


def nearest_name(text: str) -> str | None:
    """The plain name closest to a misspelt one, over pure fluids, thermal oils and solutions; None if none is near."""
    plain = {key: _plain(code) for key, (_, code) in _pure_names().items()}
    plain |= {
        key: f"{SOLUTIONS.get(code, code)} (solution)" for key, code in _solute_names().items() if key not in plain
    }
    close = difflib.get_close_matches(_folded(text), plain, n=1, cutoff=0.6)
    return plain[close[0]] if close else None


@cache
def offered() -> tuple[Offer, ...]:
    """Everything that can be named, pure fluids first, then solutions and thermal oils, each by name."""
    pure = {code for backend, code in _pure_names().values() if backend == "HEOS"}
    offers = [_offer_pure(code) for code in sorted(pure, key=lambda code: _plain(code).lower())]
    solutes = dict.fromkeys((*SOLUTIONS, *_OTHER_SOLUTIONS, *_OTHER_BRINES))
    offers += [_offer_incompressible(code, "solution") for code in solutes]
    offers += [_offer_incompressible(code, "thermal oil") for code in _oils()]
    return tuple(offers)


def _offer_pure(code: str) -> Offer:
    C, state = _library(), _state("HEOS", code)
    T_low, T_high = float(state.Tmin()), float(state.Tmax())
    T = 0.5 * (T_low + min(T_high, state.T_critical()))
    state.update(C.QT_INPUTS, 0, T)
    return Offer(name=_plain(code), code=code, kind="pure", T_low=T_low, T_high=T_high, missing=_lacking(state))


def _offer_incompressible(code: str, kind: Kind) -> Offer:
    C, state = _library(), _state("INCOMP", code)
    low = high = None
    if kind == "solution":
        low, high = _fractions(state, code)
        state.set_mass_fractions([high])
    T_low, T_high = float(state.Tmin()), float(state.Tmax())
    if kind == "solution":
        T_low = max(T_low, _solution_freezing(state) or 0.0)
    state.update(C.PT_INPUTS, 100 * bar, T_high)
    return Offer(
        name=SOLUTIONS.get(code, code),
        code=code,
        kind=kind,
        T_low=T_low,
        T_high=T_high,
        fraction_low=low,
        fraction_high=high,
        missing=_lacking(state),
    )


def _lacking(state: Any) -> str:
    getters = {"viscosity": state.viscosity, "conductivity": state.conductivity}
    return " and ".join(word for word, get in getters.items() if _positive(get) is None)


# Words ----------------------------------------------------------------------------------------------------------------


def _celsius(T: float, digits: int = 0) -> str:
    # Adding zero turns -0 into 0.
    return f"{round(T - zero_Celsius, digits) + 0.0:.{digits}f} °C"


def _bar(p: float) -> str:
    return f"{p / bar:.4g} bar abs"
