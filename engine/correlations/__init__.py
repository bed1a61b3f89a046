"""What every correlation carries with it: the formula, its limits, its source and its scatter, held in one object.

A limit is written nowhere else. From these objects follow the out-of-range findings, the table of methods in the
report, the uncertainty, and the test that each correlation has a check value.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Role = Literal["default", "second opinion"]


@dataclass(frozen=True, kw_only=True)
class Source:
    """Where a relation or a figure comes from: author, title, edition or year, equation or table."""

    key: str
    text: str
    checked: bool
    """True when the printed page was compared; False means "printed page not checked"."""

    def __str__(self) -> str:
        return self.text if self.checked else f"{self.text} (printed page not checked)"


ARGUMENTS: Mapping[str, str] = {
    "Re": "Re",
    "Re_film": "Re of the condensate film",
    "Re_vapour": "Re of the vapour",
    "Re_L": "Re of the whole flow as liquid",
    "Ra": "Ra",
    "Pr": "Pr",
    "Pr_ratio": "Pr at the wall over that of the bulk",
    "mu_ratio": "viscosity at the wall over that of the bulk",
    "T_ratio": "kelvin temperature of the wall over that of the bulk",
    "d_over_L": "diameter over length",
    "d_h_over_L": "hydraulic diameter over length",
    "a": "diameter ratio of the annulus",
    "roughness_ratio": "roughness over diameter",
    "pitch_ratio": "tube pitch over tube diameter",
    "baffle_cut": "baffle cut over shell bore",
    "p_reduced": "pressure over the critical one",
    "x": "vapour quality",
}
"""Every argument that a limit is published for, in plain words."""


@dataclass(frozen=True, kw_only=True)
class Range:
    """The published span of one argument, both ends inside. NaN is outside."""

    argument: str
    low: float = -np.inf
    high: float = np.inf

    def outside(self, x: Array) -> NDArray[np.bool_]:
        return ~((x >= self.low) & (x <= self.high))

    @property
    def name(self) -> str:
        """The argument in plain words."""
        return ARGUMENTS[self.argument]

    @property
    def span(self) -> str:
        low, high = (f"{x:.0f}" if abs(x) >= 1e4 else f"{x:.4g}" for x in (self.low, self.high))
        if np.isneginf(self.low):
            return f"up to {high}"
        return f"from {low}" if np.isposinf(self.high) else f"{low} to {high}"

    def __str__(self) -> str:
        return f"{self.name} {self.span}"


@dataclass(frozen=True, kw_only=True)
class Correlation:
    """A published relation: `formula` in the paper's symbols, what it `gives`, where it holds, how well it fits.

    `scatter` is a relative standard deviation; `scatter_origin` says where that number comes from. None where the
    source is silent and no common practice is known.
    """

    name: str
    formula: Callable[..., Any]
    gives: str
    applies: str
    source: Source
    valid: tuple[Range, ...] = ()
    scatter: float | None = None
    scatter_origin: str = "common practice"
    role: Role = "default"

    def __call__(self, *args: Any, **kwargs: Any) -> Any:
        return self.formula(*args, **kwargs)

    def __reduce__(self) -> tuple[Callable[[str], Correlation], tuple[str]]:
        # The formula is known under the name of its Correlation, so that a copy is found by name instead of made.
        return registered, (self.name,)

    def excursions(self, **arguments: Array) -> tuple[Excursion, ...]:
        """The limits that the given arguments leave, with how far and in what share of the values.

        Arguments that carry no limit are ignored; a limit whose argument is not given is not judged.
        """
        found = []
        for limit in self.valid:
            if limit.argument not in arguments:
                continue
            x = np.asarray(arguments[limit.argument], dtype=float)
            outside = limit.outside(x)
            if outside.any():
                found.append(
                    Excursion(
                        correlation=self.name,
                        limit=limit,
                        lowest=float(np.nanmin(x)),
                        highest=float(np.nanmax(x)),
                        share=float(outside.mean()),
                        source=self.source,
                    )
                )
        return tuple(found)


@dataclass(frozen=True, kw_only=True)
class Excursion:
    """One published limit left by some of the points or cells."""

    correlation: str
    limit: Range
    lowest: float
    highest: float
    share: float
    source: Source


REGISTER: dict[str, Correlation] = {}


def registered(name: str) -> Correlation:
    """The correlation of that name."""
    return REGISTER[name]


def correlation(
    *,
    gives: str,
    applies: str,
    source: Source,
    valid: tuple[Range, ...] = (),
    scatter: float | None = None,
    scatter_origin: str = "common practice",
    role: Role = "default",
) -> Callable[[Callable[..., Any]], Correlation]:
    """Register the decorated formula as a Correlation under its own name."""

    def wrap(formula: Callable[..., Any]) -> Correlation:
        name = formula.__name__
        if name in REGISTER:
            raise ValueError(f"two correlations are called {name}")
        REGISTER[name] = Correlation(
            name=name,
            formula=formula,
            gives=gives,
            applies=applies,
            source=source,
            valid=valid,
            scatter=scatter,
            scatter_origin=scatter_origin,
            role=role,
        )
        return REGISTER[name]

    return wrap
