"""Figures, fluids and relations in words: as many digits as the doubt allows, a unit beside every figure."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from engine import units
from engine.case import SolutionFluid, SteamFluid, Stream
from engine.correlations import Correlation
from engine.stated import Figure, Stated

NONE = "–"
Ends = tuple[float, float] | None
"""Of a 95 % interval, in SI; None where there is none."""


def decade(width: float) -> int:
    """Power of ten of the last digit worth showing for a figure that may be so far off: a tenth of that or more."""
    return math.floor(math.log10(width / 10)) if width > 0 else -12


def rounded(x: float, last: int) -> str:
    """x to the decade `last`, without a negative zero."""
    return f"{round(x, -last) + 0.0:.{max(-last, 0)}f}"


@dataclass(frozen=True)
class Words:
    """Figures in words, in one system of units ("si", "us", "metric"). Values are SI."""

    system: str

    def unit(self, quantity: str) -> str:
        return units.unit_of(quantity, self.system)

    def show(self, value: float | None, quantity: str, digits: int = 4) -> str:
        """A figure with its unit to so many digits, or a dash where there is none."""
        if value is None or not math.isfinite(value):
            return NONE
        return units.show(float(value), quantity, self.system, digits)

    def best(self, value: float, quantity: str, ends: Ends) -> str:
        """A figure with its unit, to as many digits as its interval allows; a dash where there is none."""
        if not math.isfinite(value):
            return NONE
        return f"{self._of(value, quantity, self._last(value, quantity, ends))} {self.unit(quantity)}"

    def span(self, value: float, quantity: str, ends: Ends) -> str:
        """The interval of the figure, to the same digits, without the unit; a dash where there is none."""
        if ends is None:
            return NONE
        last = self._last(value, quantity, ends)
        return f"{self._of(ends[0], quantity, last)} to {self._of(ends[1], quantity, last)}"

    def bracketed(self, value: float, quantity: str, ends: Ends) -> str:
        """A figure with its interval behind it, for a cell."""
        text = self.best(value, quantity, ends)
        return f"{text} ({self.span(value, quantity, ends)})" if ends and text != NONE else text

    def doubted(self, value: float, quantity: str, ends: Ends) -> str:
        """A figure and its interval, for a sentence."""
        text = self.best(value, quantity, ends)
        return f"{text} (95 % interval {self.span(value, quantity, ends)} {self.unit(quantity)})" if ends else text

    def _last(self, value: float, quantity: str, ends: Ends) -> int:
        """Decade of the last digit in the unit shown: as the doubt allows, of 2 to 4 significant ones."""
        factor = float(units.find(self.unit(quantity), quantity).factor)
        leading = math.floor(math.log10(abs(value) / factor)) if value else 0
        finest = leading - 3
        coarsest = leading - (2 if quantity == "temperature" else 1)
        wanted = decade((ends[1] - ends[0]) / 2 / factor) if ends else finest
        return min(max(wanted, finest), coarsest)

    def _of(self, value: float, quantity: str, last: int) -> str:
        return rounded(units.to_unit(float(value), quantity, self.unit(quantity)), last)

    def typed(self, value: Any, declared: Any = None) -> str:
        """An input as it was typed, with what it means in the report's units where its digits differ there."""
        if isinstance(value, Figure) and value.text:
            if _same_digits(units.parse(value.text, value.quantity).unit, self.unit(value.quantity), value.quantity):
                return value.text
            return f"{value.text} (= {self.show(value, value.quantity)})"
        if isinstance(declared, Stated):
            quantity = value.quantity if isinstance(value, Figure) and value.quantity else declared.quantities[0]
            return self.plain(float(value), quantity)
        return str(value)

    def plain(self, value: float, quantity: str) -> str:
        """A figure with its unit that is no result, without zeros at its end."""
        number, _, unit = self.show(value, quantity).partition(" ")
        return f"{number.rstrip('0').rstrip('.') if '.' in number else number} {unit}".rstrip()


def _same_digits(unit: str, other: str, quantity: str) -> bool:
    """Whether a figure reads the same in two units, but for its decimal point."""
    a, b = units.find(unit, quantity), units.find(other, quantity)
    return a.zero == b.zero and math.log10(a.factor / b.factor).is_integer()


def percent(share: float, digits: int = 1) -> str:
    return f"{100 * share:.{digits}f} %"


def off(share: float, digits: int = 1) -> str:
    """A difference, with its sign."""
    return f"{round(100 * share, digits) + 0.0:+.{digits}f} %"


def listed(words: Sequence[str]) -> str:
    """ "a, b and c"."""
    return " and ".join([", ".join(words[:-1]), words[-1]] if len(words) > 1 else words)


def capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def relation_name(relation: Correlation) -> str:
    """A relation's name in words, authors' names with their capitals."""
    source = relation.source.text
    words = [
        word.capitalize() if len(word) > 1 and word.capitalize() in source else word
        for word in relation.name.split("_")
    ]
    return capital(" ".join(words))


def limits_of(relation: Correlation) -> str:
    """The published limits in words."""
    return "; ".join(str(limit) for limit in relation.valid) or "no limit printed"


def fluid_name(stream: Stream) -> str:
    fluid = stream.fluid
    if isinstance(fluid, SolutionFluid):
        return f"{fluid.solution}, {units.show(float(fluid.mass_fraction), 'fraction')} by mass in water"
    if isinstance(fluid, SteamFluid):
        return "steam, condensing"
    return fluid.name
