"""Figures and texts as a person reads them: the chosen system of units, typed figures in other units, safe text."""

from __future__ import annotations

import math
import re
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

import engine

AS_TYPED = "typed"
NONE = "–"
CHOICES = {AS_TYPED: "As typed", **engine.SYSTEMS}
_MARKUP = re.compile(r"([\\`*_{}\[\]<>#$|~:!&])")


def plain(text: Any) -> str:
    """Text that shows in Markdown as it is, whoever wrote it."""
    return _MARKUP.sub(r"\\\1", str(text))


@dataclass(frozen=True)
class Display:
    """In which units figures are shown. Typed boxes keep their own text when the choice is "as typed"."""

    choice: str
    system: str

    def show(self, value: float, quantity: str, digits: int = 4) -> str:
        """The figure with its unit; a dash where there is none."""
        if not math.isfinite(value):
            return NONE
        return engine.show(float(value), quantity, self.system, digits)

    def unit(self, quantity: str) -> str:
        return engine.unit_of(quantity, self.system)

    def number(self, value: float, quantity: str, digits: int = 4) -> str:
        return self.show(value, quantity, digits).removesuffix(f" {self.unit(quantity)}")

    def span(self, ends: tuple[float, float], quantity: str, digits: int = 3) -> str:
        return " to ".join(self.number(end, quantity, digits) for end in ends)

    def values(self, values: Any, quantity: str) -> Any:
        return engine.to_unit(values, quantity, self.unit(quantity))

    def typed(self, text: str, quantities: tuple[str, ...]) -> str:
        """A typed figure in the chosen units; as it was typed where it already is, or cannot be read."""
        if self.choice == AS_TYPED:
            return text
        try:
            figure = engine.parse(text, *quantities)
        except engine.UnitError:
            return text
        if figure.unit == self.unit(figure.quantity):
            return text
        digits = min(max(4, _significant(text) + 1), 15)
        shown = self.show(figure.value, figure.quantity, digits)
        if figure.sd is None:
            return shown
        return f"{shown} ± {self._doubt(figure.value, figure.sd, figure.quantity)}"

    def _doubt(self, value: float, sd: float, quantity: str) -> str:
        if quantity == "temperature":
            return self.show(sd, "temperature_difference", 3)
        if quantity.startswith("pressure"):
            return self.show(sd, "pressure_difference", 3)
        return f"{100 * sd / abs(value):.3g} %" if value else self.show(sd, quantity, 3)


def _significant(text: str) -> int:
    number = re.match(r"[^\d]*([\d.,]+)", text)
    return len(re.sub(r"[.,]", "", number[1]).lstrip("0")) if number else 0


def display_of(choice: str, figures: Iterable[tuple[str, tuple[str, ...]]]) -> Display:
    """The display for a choice; as typed, results take the system that most of the typed figures are in."""
    if choice != AS_TYPED:
        return Display(choice, choice)
    votes: Counter[str] = Counter()
    for text, quantities in figures:
        try:
            figure = engine.parse(text, *quantities)
        except engine.UnitError:
            continue
        # A unit that several systems share says nothing about which of them is meant.
        users = [name for name in engine.SYSTEMS if engine.unit_of(figure.quantity, name) == figure.unit]
        if len(users) == 1:
            votes[users[0]] += 1
    return Display(choice, max(engine.SYSTEMS, key=lambda name: votes[name]))
