"""One rating with its intervals and verdicts, and the words that all parts of its report share."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from engine.case import Case
from engine.findings import Finding, Verdict
from engine.findings import findings as by_grade
from engine.report.words import Ends, Words, capital, fluid_name
from engine.stated import SIDES, Side
from engine.states import Rating, SideState, State
from engine.uncertainty import Intervals

STATES = ("clean", "fouled")
ASSUMED = "assumed"
"""Code of the findings that name a default."""


@dataclass(frozen=True)
class Rated:
    """What a part of a report looks at."""

    rating: Rating
    intervals: Mapping[str, Intervals]
    verdicts: Sequence[Verdict]
    words: Words

    @property
    def case(self) -> Case:
        return self.rating.case

    @property
    def names(self) -> Mapping[Side, str]:
        return self.case.exchanger.side_names

    @cached_property
    def found(self) -> tuple[Finding, ...]:
        return by_grade(self.verdicts)

    @property
    def both(self) -> list[State]:
        """Clean and fouled; empty where the rating has no answer."""
        return [self.rating.states[name] for name in STATES if name in self.rating.states]

    @property
    def columns(self) -> list[tuple[Side, str, SideState]]:
        """Each side clean and fouled, in the order of a table's columns."""
        return [(side, state.state, state.sides[side]) for side in SIDES for state in self.both]

    @property
    def by_side(self) -> tuple[str, ...]:
        """Their headings."""
        return tuple(f"{self.names[side]}, {state}" for side, state, _ in self.columns)

    def ends(self, state: str, quantity: str) -> Ends:
        return self.intervals[state].of.get(quantity) if state in self.intervals else None

    def side(self, side: Side) -> str:
        """In the middle of a sentence, with its fluid."""
        return f"{self.names[side].lower()} ({fluid_name(self.case.stream(side))})"

    def where(self, place: str) -> str:
        """ "outside film" in the trade names of the exchanger's sides."""
        first, _, rest = place.partition(" ")
        named = {str(side): name for side, name in self.names.items()}
        return f"{named.get(first, capital(first))} {rest}".rstrip()
