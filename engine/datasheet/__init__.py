"""A vendor's datasheet recomputed line by line: what contradicts what, by how much of it rounding, and what to ask.

A check is one function and one row above it. The function reads figures and returns what the sheet prints and what
its other lines give; everything else follows from reading it again with one figure moved: the share of rounding in the
tolerance, which figures take part, and which change of one of them would clear it.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from functools import cache, cached_property
from importlib import import_module
from typing import Any, Literal

from engine import effectiveness as exact
from engine import units
from engine.case import Case
from engine.datasheet.figures import Figures, Impossible, Missing, Subject, half_width
from engine.sheet import Sheet, sheet_fields
from engine.stated import SIDES, CaseError, Figure, Problem

Grade = Literal["stop", "act", "watch", "note"]
Outcome = Literal["clear", "found", "not possible"]
GRADES: tuple[Grade, ...] = ("stop", "act", "watch", "note")

MODULES = ("balance", "driving_force", "resistances", "geometry", "limits")
"""The files of checks, groups A to E."""

NOTED, STOPPED = 2.0, 10.0
"""Tolerances up to which a misfit is a note, and beyond which it stops."""
NOTED_ALLOWANCES = 3.0
"""Allowances up to which it is a note all the same."""

Bound = Literal["", "at least", "at most", "within"]


@dataclass(frozen=True, kw_only=True)
class Line:
    """What the sheet prints and what other figures give in its place, in SI.

    A figure that should lie in a range has a `bound`: the recomputed one is then the limit that it passes, or itself
    where it is within. `share` and `absolute` replace the allowance of the check's row.
    """

    sheet: float
    recomputed: float
    quantity: str
    of: str = ""
    """Path of the printed figure, where it is one."""
    name: str = ""
    """What the figure is, where it is none of the sheet's own."""
    by: str = ""
    """Where the recomputed figure is from, where it is not from the other figures: "stands in the case"."""
    bound: Bound = ""
    low: float = -math.inf
    high: float = math.inf
    share: float | None = None
    absolute: float | None = None
    noted: float = 0.0
    """Misfit up to which it is a note at most, in SI."""
    impossible: bool = False
    """Whether a misfit beyond rounding cannot be at all, and stops."""
    grade: Grade | None = None
    """The gravest that this line can reach, where it is less than the check's."""

    @property
    def misfit(self) -> float:
        return self.sheet - self.recomputed


@dataclass(frozen=True, kw_only=True)
class Remark:
    """What a check has to say that is no comparison of two figures; empty where there is nothing."""

    says: str = ""
    ask: str = ""
    grade: Grade | None = None
    """Where it is less grave than the check's."""


Reader = Callable[[Figures, str], Line | Remark]


@dataclass(frozen=True, kw_only=True)
class Check:
    """One check of a sheet."""

    id: str
    title: str
    grade: Grade
    """The gravest that it can reach."""
    needs: str
    source: str
    """Where it comes from, and why its allowance is as large as it is."""
    ask: str
    """The question to the vendor; {sheet} and {recomputed} are put in."""
    read: Reader
    over: tuple[str, ...] | Callable[[Subject], tuple[str, ...]] = ("",)
    """Sides, ends or lines for which it is made."""
    share: float = 0.0
    """Allowance beside rounding, of the larger figure."""
    absolute: float = 0.0
    """Allowance in SI; the larger of both counts."""
    bears: Literal["", "duty", "UA", "mtd"] = ""
    """What the misfit is a misfit of, for its consequence."""
    closes: bool = False
    """Whether its failure is a contradiction, which some figure's change can clear."""

    def places(self, subject: Subject) -> tuple[str, ...]:
        """For which it is made on a sheet; one nameless place where there is none, so that it ends not possible."""
        return self.over if isinstance(self.over, tuple) else self.over(subject) or ("",)


_REGISTER: dict[str, Check] = {}


def check(id: str, **row: Any) -> Callable[[Reader], Reader]:
    """Register the decorated function as the reader of a check."""

    def register(read: Reader) -> Reader:
        if id in _REGISTER:
            raise ValueError(f"two checks are called {id}")
        _REGISTER[id] = Check(id=id, read=read, **row)
        return read

    return register


@cache
def checks() -> tuple[Check, ...]:
    """All checks, A to E."""
    for name in MODULES:
        import_module(f"{__name__}.{name}")
    order = sorted(_REGISTER, key=lambda id: (id[0], int(id[1:])))
    return tuple(_REGISTER[id] for id in order)


def catalogue() -> tuple[dict[str, str], ...]:
    """One row a check: id, title, the gravest grade, needs, source."""
    return tuple({key: getattr(c, key) for key in ("id", "title", "grade", "needs", "source")} for c in checks())


def within(value: float, quantity: str, *, low: float = -math.inf, high: float = math.inf, **more: Any) -> Line:
    """The line of a figure that should lie in a range."""
    bound: Bound = "at least" if value < low else "at most" if value > high else "within"
    recomputed = {"at least": low, "at most": high, "within": value}[bound]
    return Line(sheet=value, recomputed=recomputed, quantity=quantity, bound=bound, low=low, high=high, **more)


@dataclass(frozen=True, kw_only=True)
class Equation:
    """A check at one place, ready to be read again with some figures changed."""

    check: Check
    where: str
    subject: Subject

    def reread(self, changed: Mapping[str, float]) -> Line | Remark:
        """The check with some figures changed. Raises Missing."""
        return self._read(changed)[0]

    def _read(self, changed: Mapping[str, float]) -> tuple[Line | Remark, set[str]]:
        v = Figures({**self.subject.values, **changed} if changed else self.subject.values, self.subject)
        try:
            found = self.check.read(v, self.where)
        except (ValueError, ZeroDivisionError, OverflowError) as error:
            raise Impossible(f"figures between which this can be computed ({error})") from None
        if isinstance(found, Line) and not math.isfinite(found.misfit):
            raise Impossible("figures between which this can be computed (they are out of the range of numbers)")
        return found, v.read

    def allowance(self, line: Line) -> float:
        share = self.check.share if line.share is None else line.share
        absolute = self.check.absolute if line.absolute is None else line.absolute
        return max(share * max(abs(line.sheet), abs(line.recomputed)), absolute)

    def checked(self) -> Checked:
        """The check as it ends on the figures as typed."""
        try:
            found, fields = self._read({})
        except Missing as lack:
            return Checked(equation=self, outcome="not possible", missing=str(lack))
        known = tuple(path for path in self.subject.values if path in fields)
        if isinstance(found, Remark):
            grade = (found.grade or self.check.grade) if found.says else None
            return Checked(
                equation=self, outcome="found" if grade else "clear", grade=grade, remark=found, fields=known
            )
        strict, wide = self._rounding(found, known)
        allowance = self.allowance(found)
        tolerance, misfit = strict + allowance, abs(found.misfit)
        # A misfit of nothing but the last bits of a float is none.
        tolerance = max(tolerance, 1e-9 * max(abs(found.sheet), abs(found.recomputed)))
        grade = self._grade(found, tolerance, wide + allowance, allowance) if misfit > tolerance else None
        return Checked(
            equation=self,
            outcome="clear" if grade is None else "found",
            grade=grade,
            line=found,
            tolerance=tolerance,
            rounding=strict,
            rounding_with_zeros=wide,
            fields=known,
        )

    def _rounding(self, line: Line, fields: tuple[str, ...]) -> tuple[float, float]:
        """What the rounding of the typed figures can make of the misfit, by their digits and with zeros rounded."""
        totals = [0.0, 0.0]
        for path in fields:
            value = self.subject.values[path]
            for i, half in enumerate(half_width(path, value)):
                if half:
                    moves = (self._moved(path, value + sign * half, line.misfit) for sign in (1, -1))
                    totals[i] += max(moves)
        return totals[0], totals[1]

    def _moved(self, path: str, value: float, misfit: float) -> float:
        try:
            found = self.reread({path: value})
        except Missing:
            return 0.0
        return abs(found.misfit - misfit) if isinstance(found, Line) else 0.0

    def _grade(self, line: Line, tolerance: float, wide: float, allowance: float) -> Grade:
        """Of a misfit beyond its tolerance; `wide` is the tolerance with trailing zeros taken as rounding."""
        misfit = abs(line.misfit)
        if line.impossible and misfit > wide:
            return "stop"
        if misfit <= max(NOTED * wide, NOTED_ALLOWANCES * allowance, line.noted):
            return "note"
        gravest = line.grade or self.check.grade
        return "act" if gravest == "stop" and misfit <= STOPPED * max(wide, tolerance) else gravest


DIFFERENCES = {
    "temperature": "temperature_difference",
    "pressure_absolute": "pressure_difference",
    "pressure_gauge": "pressure_difference",
}
"""Quantities whose differences are another quantity."""


@dataclass(frozen=True, kw_only=True)
class Checked:
    """How one check ended at one place."""

    equation: Equation
    outcome: Outcome
    grade: Grade | None = None
    line: Line | None = None
    remark: Remark = Remark()
    tolerance: float = 0.0
    rounding: float = 0.0
    """What the rounding of the figures adds to the tolerance."""
    rounding_with_zeros: float = 0.0
    """The same where trailing zeros may be rounding too."""
    fields: tuple[str, ...] = ()
    """Paths of the figures that took part."""
    missing: str = ""
    """The field that is lacking, or what else is."""
    slip: str = ""
    """The slip that would explain the misfit, where one does."""

    @property
    def check(self) -> Check:
        return self.equation.check

    @property
    def where(self) -> str:
        return self.equation.where

    @property
    def subject(self) -> Subject:
        return self.equation.subject

    @property
    def difference(self) -> float | None:
        return None if self.line is None else self.line.misfit

    @property
    def rounding_share(self) -> float | None:
        """Of the tolerance."""
        if self.line is None or not self.tolerance:
            return None
        return min(1.0, self.rounding / self.tolerance)

    @property
    def from_case(self) -> tuple[str, ...]:
        """Figures that the sheet does not print and the case states."""
        own = self.subject.sheet_values
        return tuple(path for path in self.fields if path not in own and path in self.subject.case_values)

    def place(self) -> str:
        """Where, in words."""
        if not self.where:
            return ""
        side, _, rest = self.where.partition(".")
        if self.where in sheet_fields():
            return self.subject.label(self.where)
        if side in SIDES:
            name = self.subject.side_name(side)
            return f"{name}, {rest}" if rest else name
        return self.where

    def title(self) -> str:
        place = self.place()
        return f"{self.check.title}: {place}" if place else self.check.title

    def shown(self, value: float, system: str = "si", digits: int = 4) -> str:
        assert self.line is not None
        if self.line.quantity == "dimensionless" and isinstance(self.subject.values.get(self.line.of), int):
            return f"{value:.0f}"
        return units.show(value, self.line.quantity, system, digits)

    def shown_difference(self, value: float, system: str = "si", digits: int = 2) -> str:
        """A difference or a tolerance of the line's quantity."""
        assert self.line is not None
        quantity = DIFFERENCES.get(self.line.quantity, self.line.quantity)
        return units.show(value, quantity, system, digits)

    def expected(self, system: str = "si") -> str:
        """The recomputed figure, or the range that the printed one should lie in."""
        assert self.line is not None
        line = self.line
        if line.bound != "within":
            return f"{line.bound} {self.shown(line.recomputed, system)}".strip()
        ends = [self.shown(x, system) for x in (line.low, line.high) if math.isfinite(x)]
        if len(ends) == 2:
            return " to ".join(ends)
        return f"at {'least' if math.isfinite(line.low) else 'most'} {ends[0]}" if ends else "anything"

    def says(self, system: str = "si") -> str:
        """What was found, in one sentence; empty where nothing was."""
        if self.outcome != "found":
            return ""
        if self.line is None:
            return self.remark.says
        name = self.subject.label(self.line.of) if self.line.of else self.line.name
        verb = self.line.by or ("is expected" if self.line.bound else "follows from the other figures")
        text = f"{name} is {self.shown(self.line.sheet, system)}, where {self.expected(system)} {verb}"
        return text[:1].upper() + text[1:] + (f"; {self.slip}" if self.slip else "") + "."

    def evidence(self) -> str:
        """The figures that took part, as typed."""
        return "; ".join(
            f"{self.subject.label(path)} {_typed(self.subject.values[path])}"
            + (" (from our case)" if path in self.from_case else "")
            for path in self.fields
            if path != "type"
        )

    def question(self, system: str = "si") -> str:
        """What to ask the vendor, ready to paste; empty where nothing was found."""
        if self.outcome != "found":
            return ""
        if self.line is None:
            return self.remark.ask or self.check.ask
        shown = {name: self.shown(getattr(self.line, name), system) for name in ("sheet", "recomputed")}
        text = self.check.ask.format(**shown, where=self.place())
        if self.slip:
            text += f" It would fit {self.slip}."
        return f"{text} (As stated: {self.evidence()}.)"

    def consequence(self, system: str = "si") -> str:
        """What the misfit means for the duty or an outlet temperature; empty where it bears on neither."""
        return _consequence(self, system) if self.outcome == "found" and self.line is not None else ""


def _typed(value: Any) -> str:
    if isinstance(value, Figure):
        return value.text or units.show(float(value), value.quantity, "si")
    return f"{value:.4g}" if isinstance(value, float) else str(value)


@dataclass(frozen=True, kw_only=True)
class Slip:
    """A field whose misfit is that of a known slip: the figure as it stands is `factor` times what would close."""

    field: str
    name: str
    factor: float
    to: float
    clears: int
    of: int


@dataclass(frozen=True, kw_only=True)
class Repair:
    """A field and the value at which most failures vanish; never applied by itself."""

    field: str
    before: float
    to: float
    clears: int
    of: int
    breaks: int = 0
    """Checks that would fail instead."""
    also: tuple[str, ...] = ()
    """Fields that were computed from it and change with it."""
    quantity: str = ""
    slip: str = ""

    def change(self, subject: Subject, system: str = "si") -> str:
        before, to = (
            units.show(x, self.quantity, system) if self.quantity else f"{x:.4g}" for x in (self.before, self.to)
        )
        with_it = f", and with it {', '.join(map(subject.label, self.also))}" if self.also else ""
        return f"{subject.label(self.field)} from {before} to {to}{with_it}"

    def says(self, subject: Subject, system: str = "si") -> str:
        new = f", {self.breaks} new" if self.breaks else ""
        comma = "," if self.also else ""
        return f"Change {self.change(subject, system)}{comma} and {self.clears} of {self.of} failures vanish{new}."


@dataclass(frozen=True, kw_only=True)
class Audit:
    """A checked sheet. `repairs` change one field, the best first; `pairs` two, where one is not enough."""

    subject: Subject
    checks: tuple[Checked, ...]
    slips: tuple[Slip, ...] = ()
    repairs: tuple[Repair, ...] = ()
    pairs: tuple[tuple[Repair, Repair], ...] = ()
    counts: Mapping[str, int] = field(default_factory=dict)
    """Checks by outcome and, among those found, by grade."""

    @property
    def sheet(self) -> Sheet:
        return self.subject.sheet

    @cached_property
    def found(self) -> tuple[Checked, ...]:
        """What was found, the gravest first."""
        found = [c for c in self.checks if c.grade is not None]
        return tuple(sorted(found, key=lambda c: GRADES.index(c.grade or "note")))

    @property
    def stopped(self) -> bool:
        return any(c.grade == "stop" for c in self.checks)


def check_datasheet(subject: Case | Sheet) -> Audit:
    """Every check on the sheet of a case, or on a sheet alone; what needs the case is then not possible.

    Raises CaseError where the case holds no sheet.
    """
    from engine.datasheet.repairs import repairs_of

    if isinstance(subject, Case):
        if subject.sheet is None:
            raise CaseError([Problem(path="sheet", says="is missing: the case holds no datasheet to check")])
        about = Subject(sheet=subject.sheet, case=subject)
    else:
        about = Subject(sheet=subject)
    ended = [Equation(check=c, where=place, subject=about).checked() for c in checks() for place in c.places(about)]
    found = repairs_of(about, ended)
    ended = [replace(c, slip=found.slip_of(c)) for c in ended]
    ended = [_slip_test(c, found.slips) if c.check.id == "A14" else c for c in ended]
    counts = Counter(c.outcome for c in ended) + Counter(str(c.grade) for c in ended if c.grade)
    return Audit(
        subject=about,
        checks=tuple(ended),
        slips=found.slips,
        repairs=found.repairs,
        pairs=found.pairs,
        counts={name: counts[name] for name in ("clear", "found", "not possible", *GRADES)},
    )


def _slip_test(ended: Checked, slips: tuple[Slip, ...]) -> Checked:
    """The check that says whether any failure looks like a slip."""
    if ended.outcome == "not possible" or not slips:
        return ended
    names = "; ".join(f"{ended.subject.label(slip.field)}: {slip.name}" for slip in slips)
    remark = Remark(
        says=f"A slip would fit: {names}.",
        ask=f"Please confirm unit and meaning of these figures; a slip would explain them: {names}.",
    )
    return replace(ended, outcome="found", grade=ended.check.grade, remark=remark)


def check_json(audit: Audit) -> dict[str, Any]:
    """The keys of a check file, ready for `json.dumps`: SI numbers under stable names, None where there is none."""
    return {
        "format": "countercheck-check",
        "version": 1,
        "checks": [_check_json(c) for c in audit.checks],
        "slips": [
            {"field": s.field, "name": s.name, "factor": s.factor, "to": s.to, "clears": s.clears, "of": s.of}
            for s in audit.slips
        ],
        "repairs": [_repair_json(r) for r in audit.repairs],
        "pairs": [[_repair_json(r) for r in pair] for pair in audit.pairs],
        "counts": {name.replace(" ", "_"): n for name, n in audit.counts.items()},
    }


def _check_json(c: Checked) -> dict[str, Any]:
    line = c.line
    return {
        "id": c.check.id,
        "title": c.check.title,
        "where": c.where,
        "outcome": c.outcome.replace(" ", "_"),
        "grade": c.grade,
        "field": line.of if line and line.of else None,
        "quantity": line.quantity if line else None,
        "sheet": _number(line.sheet) if line else None,
        "recomputed": _number(line.recomputed) if line and line.bound != "within" else None,
        "low": _number(line.low) if line else None,
        "high": _number(line.high) if line else None,
        "difference": _number(c.difference),
        "tolerance": _number(c.tolerance) if line else None,
        "rounding_share": _number(c.rounding_share),
        "says": c.says(),
        "consequence": c.consequence(),
        "question": c.question(),
        "missing": c.missing,
        "fields": list(c.fields),
        "from_case": list(c.from_case),
    }


def _repair_json(r: Repair) -> dict[str, Any]:
    return {
        "field": r.field, "from": r.before, "to": r.to, "clears": r.clears, "of": r.of, "breaks": r.breaks,
        "slip": r.slip, "also": list(r.also),
    }  # fmt: skip


def _number(x: float | None) -> float | None:
    return float(x) if x is not None and math.isfinite(x) else None


def _consequence(c: Checked, system: str) -> str:
    """By how much the duty and the outlets are off if the misfit is real."""
    assert c.line is not None
    if not c.check.bears:
        return ""
    values = c.subject.values
    line = c.line
    duty = values.get("duty")
    if c.check.bears == "duty":
        lost = abs(line.misfit)
        whole = max(abs(line.sheet), abs(line.recomputed))
    else:
        if duty is None or not line.recomputed:
            return ""
        whole = float(duty)
        ratio = line.sheet / line.recomputed
        ratio = 1 / ratio if c.check.bears == "mtd" and ratio else ratio
        lost = whole * abs(1 - _duty_ratio(values, ratio))
    # Two digits, but never as a power of ten.
    share = float(f"{100 * lost / whole:.2g}")
    text = f"{units.show(lost, 'heat_flow', system, 3)} of duty ({share:g} %)"
    for side in SIDES:
        T_in, T_out = (values.get(f"{side}.{end}") for end in ("T_in", "T_out"))
        if T_in is not None and T_out is not None and T_in != T_out:
            change = abs(float(T_out - T_in)) * lost / (float(duty) if duty else whole)
            shown = units.show(change, "temperature_difference", system, 2)
            text += f", {shown} on the outlet of the {c.subject.side_name(side)}"
    return text


def _duty_ratio(values: Mapping[str, Any], ratio: float) -> float:
    """Duty at a conductance `ratio` times smaller, over the duty printed; F taken to stay."""
    ends = [values.get(f"{side}.{end}") for side in SIDES for end in ("T_in", "T_out")]
    if any(T is None for T in ends) or not 0 < ratio < math.inf:
        return 1 / ratio if ratio else 0.0
    T = [float(x) for x in ends if x is not None]
    change = abs(T[1] - T[0]), abs(T[3] - T[2])
    span = abs(T[0] - T[2])
    if span <= max(change) or max(change) == 0:
        return 1 / ratio
    effectiveness, Cr = max(change) / span, min(change) / max(change)
    NTU = float(exact.ntu_counter(effectiveness, Cr))
    if not math.isfinite(NTU):
        return 1 / ratio
    return float(exact.effectiveness_counter(NTU / ratio, Cr)) / effectiveness


__all__ = [
    "GRADES",
    "Audit",
    "Check",
    "Checked",
    "Line",
    "Remark",
    "Repair",
    "Slip",
    "catalogue",
    "check",
    "check_datasheet",
    "check_json",
    "checks",
    "within",
]
