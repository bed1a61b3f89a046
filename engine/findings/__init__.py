"""What there is to say about a rating: a rule is one function that yields findings, and one row above it.

A rule ends *clear*, *found*, or *not possible* with what is missing. A rule about the sides ends so for each side.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from functools import cache, reduce
from importlib import import_module
from typing import Any, Literal

from engine import units
from engine.case import Case
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.fluids import Fluid
from engine.stated import SIDES, Side
from engine.states import Rating, State
from engine.uncertainty import Intervals

Grade = Literal["stop", "act", "watch", "note"]
Outcome = Literal["clear", "found", "not possible"]

GRADES: Mapping[Grade, str] = {
    "stop": "impossible, contradicts itself, not converged, unsafe",
    "act": "a limit exceeded, inconsistent",
    "watch": "unusual",
    "note": "assumed, not stated",
}
"""The grades, the gravest first."""

COMMON_PRACTICE = "common practice"

MODULES = ("validity", "thermal", "flow", "shell", "steam")
"""The files of rules, in the order in which they are judged."""


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One thing that a rule has to say."""

    code: str
    grade: Grade
    where: str
    """A side, or the path of an input; empty for the whole exchanger."""
    says: str
    because: Mapping[str, str]
    """The figures behind it, with their units."""
    do: str
    source: str


@dataclass(frozen=True, kw_only=True)
class Rule:
    """One judgement."""

    code: str
    title: str
    grades: tuple[Grade, ...]
    """The grades that it can reach."""
    needs: str
    """What must be known for it, in words; "nothing" where it can always be judged."""
    source: str
    judge: Callable[..., Iterator[Finding]]
    """Called with the subject and, where `by_side`, the side."""
    by_side: bool = False


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """How one rule ended, for one side where it is about the sides.

    `missing` may also stand beside findings, where a part could be judged without it.
    """

    rule: Rule
    where: str
    outcome: Outcome
    findings: tuple[Finding, ...] = ()
    missing: str = ""


class Missing(Exception):
    """Raised by a rule that cannot be judged; its text names what is missing."""


@dataclass(frozen=True, kw_only=True)
class Subject:
    """What one rule looks at, and the words and units that it speaks in."""

    rule: Rule
    where: str
    rating: Rating
    intervals: Mapping[str, Intervals] = field(default_factory=dict)
    system: str = "si"

    @property
    def case(self) -> Case:
        return self.rating.case

    @property
    def states(self) -> Mapping[str, State]:
        """Both states. Missing where the rating has none."""
        if not self.rating.states:
            raise Missing("the rated temperatures and films: the calculation has no answer")
        return self.rating.states

    @property
    def fouled(self) -> State:
        return self.states["fouled"]

    def fluid(self, side: Side) -> Fluid:
        return self.case.fluid(side)

    def phase(self, side: Side) -> Literal["liquid", "gas", "condensing"]:
        return "condensing" if self.case.stream(side).condenses else self.fluid(side).phase

    def is_shell(self, side: Side) -> bool:
        """Whether the side flows across a bank of tubes, not along a duct."""
        return side == "outside" and isinstance(self.case.exchanger, ShellAndTube)

    def p_out(self, side: Side) -> float:
        """The lower outlet pressure of both states [Pa]; of condensing steam that of its chest.

        Missing where the drop leaves none.
        """
        chests = [state.chest for state in self.states.values() if state.chest is not None]
        if side == self.case.steam_side and chests:
            return min(chest.p for chest in chests)
        p_out = self.case.p_in(side) - max(state.sides[side].dp for state in self.states.values())
        if p_out <= 0:
            raise Missing(f"an outlet pressure of the {self.name(side)}: the drop is larger than the inlet pressure")
        return p_out

    def stated(self, path: str) -> Any:
        """What the case states at a path. Missing where it states nothing."""
        value = reduce(getattr, path.split("."), self.case)
        if value is None:
            raise Missing(f"{path} is not stated")
        return value

    def interval(self, quantity: str, state: str = "fouled") -> tuple[float, float] | None:
        """The 95 % interval of a quantity, where intervals were propagated."""
        return self.intervals[state].of[quantity] if state in self.intervals else None

    def extremes(self, kind: Literal["T", "surface_T", "wall_T"], side: Side) -> tuple[float, float]:
        """Lowest and highest bulk, touched-surface or metal temperature of a side over both states [K]."""
        profiles = [state.profile for state in self.states.values() if state.profile is not None]
        T = [getattr(profile, kind)[side] for profile in profiles]
        return float(min(x.min() for x in T)), float(max(x.max() for x in T))

    def regime_share(self, side: Side, *regimes: str) -> float:
        """The share of the cells in which a side flows so, in the fouled state."""
        profile = self.fouled.profile
        cells = profile.regime[side][1:-1] if profile is not None else ()
        return sum(regime in regimes for regime in cells) / max(len(cells), 1)

    def name(self, side: Side) -> str:
        """The side as the trade calls it: "annulus"."""
        return self.case.exchanger.side_names[side].lower()

    def show(self, value: float, quantity: str, digits: int = 4) -> str:
        return units.show(float(value), quantity, self.system, digits)

    def T(self, value: float) -> str:
        return self.show(value, "temperature")

    def dT(self, value: float) -> str:
        return self.show(value, "temperature_difference", 3)

    def p(self, value: float) -> str:
        return self.show(value, "pressure_absolute")

    def dp(self, value: float) -> str:
        return self.show(value, "pressure_difference")

    def duty(self, value: float) -> str:
        return self.show(value, "heat_flow")

    def U(self, value: float) -> str:
        """Shown also for a film."""
        return self.show(value, "heat_transfer_coefficient", 3)

    def velocity(self, value: float) -> str:
        return self.show(value, "velocity", 3)

    def finding(
        self,
        grade: Grade,
        *,
        says: str,
        because: Mapping[str, str],
        do: str,
        where: str | None = None,
        source: str = "",
    ) -> Finding:
        """A finding of this rule; `where` and `source` are the rule's own unless given."""
        return Finding(
            code=self.rule.code,
            grade=grade,
            where=self.where if where is None else where,
            says=says,
            because=because,
            do=do,
            source=source or self.rule.source,
        )


def percent(share: float) -> str:
    return f"{100 * share:.3g} %"


def span(show: Callable[[float], str], low: float, high: float) -> str:
    return f"{show(low)} to {show(high)}"


_REGISTER: dict[str, Rule] = {}

Judge = Callable[..., Iterator[Finding]]


def rule(
    code: str, *, title: str, grades: tuple[Grade, ...], needs: str, source: str, by_side: bool = False
) -> Callable[[Judge], Judge]:
    """Register the decorated function as the judgement of a rule."""

    def register(judge: Judge) -> Judge:
        if code in _REGISTER:
            raise ValueError(f"two rules are called {code}")
        _REGISTER[code] = Rule(
            code=code, title=title, grades=grades, needs=needs, source=source, judge=judge, by_side=by_side
        )
        return judge

    return register


@cache
def rules() -> tuple[Rule, ...]:
    """All rules, in the order in which they are judged."""
    for name in MODULES:
        import_module(f"{__name__}.{name}")
    return tuple(_REGISTER.values())


def judge(
    rating: Rating, intervals: Mapping[str, Intervals] | None = None, *, system: str = "si"
) -> tuple[Verdict, ...]:
    """Every rule's verdict on a rating, figures shown in a system of units.

    `intervals` are those of `propagate`, by state; without them the rules that need them are not possible.
    """
    return tuple(
        _verdict(Subject(rule=rule, where=where, rating=rating, intervals=intervals or {}, system=system))
        for rule in rules()
        for where in (SIDES if rule.by_side else ("",))
    )


def _verdict(subject: Subject) -> Verdict:
    rule, where = subject.rule, subject.where
    found: list[Finding] = []
    missing = ""
    try:
        for finding in rule.judge(subject, where) if rule.by_side else rule.judge(subject):
            found.append(finding)
    except Missing as lack:
        missing = str(lack)
    outcome: Outcome = "found" if found else "not possible" if missing else "clear"
    return Verdict(rule=rule, where=where, outcome=outcome, findings=tuple(found), missing=missing)


def findings(verdicts: Iterable[Verdict]) -> tuple[Finding, ...]:
    """All findings, the gravest first."""
    order = list(GRADES)
    found = [finding for verdict in verdicts for finding in verdict.findings]
    return tuple(sorted(found, key=lambda finding: order.index(finding.grade)))


def catalogue() -> tuple[dict[str, str], ...]:
    """One row a rule: code, title, grades, needs, source."""
    return tuple(
        {
            "code": rule.code,
            "title": rule.title,
            "grades": ", ".join(rule.grades),
            "needs": rule.needs,
            "source": rule.source,
        }
        for rule in rules()
    )


__all__ = [
    "GRADES",
    "Finding",
    "Grade",
    "Rule",
    "Verdict",
    "catalogue",
    "findings",
    "judge",
    "rules",
]
