"""The smallest repair of a sheet: the one figure, then the two, whose change clears most failures. Never applied.

A figure's values worth trying are those at which a failed check that it enters would close, and those that a known
slip would have put off to where it stands.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

from engine.datasheet import Checked, Equation, Line, Repair, Slip
from engine.datasheet.figures import Missing, Subject
from engine.datasheet.slips import MATCH, Candidate, candidates
from engine.stated import Figure

TELLING = 2.0
"""Tolerances beyond which a misfit says something of its cause."""
LEFT = 0.4
"""Of a misfit that a slip explains, at the most."""
BROKEN = 1.5
"""Tolerances from which on a repair breaks a check that had closed."""
UNLIKELY = 0.5
"""What a place further down the list of slips counts, in squared tolerances left."""
LOOKED = 1e4
"""By how much a figure may be off at most."""
MOST_STEPS = 30
MOST_PAIRS = 3
SMALL_COUNTS = (1, 2, 3, 4, 5, 6, 8, 10, 12, 16)
FEW = ("shells_in_series", "shells_in_parallel", "tube_passes", "banks_in_parallel", "legs_in_series")


@dataclass(frozen=True)
class _Closure:
    """A check that can be read again, its fields of the sheet, and how it stands."""

    ended: Checked
    fields: frozenset[str]

    @property
    def equation(self) -> Equation:
        return self.ended.equation

    @property
    def fails(self) -> bool:
        return self.ended.outcome == "found"

    def miss(self, changed: Mapping[str, float], *, as_slip: bool = False) -> float:
        """The misfit in tolerances with some figures changed; infinite where it cannot be computed.

        The share of rounding goes with the size of the figures. A slip must close better than a wide allowance asks.
        """
        try:
            found = self.equation.reread(changed)
        except Missing:
            return math.inf
        if not isinstance(found, Line):
            return 2.0 if found.says else 0.0
        before, size = self.ended.line, _size(found)
        rounding = 0.0
        if before is not None:
            rounding = self.ended.rounding_with_zeros if as_slip else self.ended.rounding
            if found.quantity != "temperature" and _size(before):
                rounding *= size / _size(before)
        allowance = self.equation.allowance(found)
        if as_slip:
            allowance = max(MATCH * size, allowance / 2)
        tolerance = max(allowance + rounding, 1e-9 * size)
        return abs(found.misfit) / tolerance if tolerance else (0.0 if not found.misfit else math.inf)


def _size(line: Line) -> float:
    return max(abs(line.sheet), abs(line.recomputed))


@dataclass(frozen=True, kw_only=True)
class Found:
    """Slips and repairs of a sheet."""

    slips: tuple[Slip, ...] = ()
    repairs: tuple[Repair, ...] = ()
    pairs: tuple[tuple[Repair, Repair], ...] = ()

    def slip_of(self, ended: Checked) -> str:
        """What the best slip among a failed check's fields would be, in words."""
        if ended.outcome != "found" or ended.line is None:
            return ""
        for slip in self.slips:
            if slip.field in ended.fields:
                return f"if {ended.subject.label(slip.field)} is a slip: {slip.name}"
        return ""


def repairs_of(subject: Subject, ended: Iterable[Checked]) -> Found:
    """Repairs of one figure and of two, the best first; none where no check that closes fails gravely."""
    closures = [
        _Closure(c, frozenset(path for path in c.fields if path in subject.sheet_values))
        for c in ended
        if c.outcome != "not possible"
    ]
    failed = [c for c in closures if c.fails and c.ended.grade != "note"]
    if not any(c.ended.check.closes for c in failed):
        notes = [c for c in closures if c.fails and c.ended.line is not None and c.ended.check.closes]
        failed += [c for c in notes if c.miss({}) > TELLING] or notes
    if not any(c.ended.check.closes for c in failed):
        return Found()
    search = _Search(subject, closures, {})
    singles = search.ranked(failed)
    if not singles:
        return Found()
    slips = sorted((trial for trial in search.slips(failed) if trial.net > 0), key=lambda trial: trial.order)
    best = slips[0].net if slips else 0
    pairs = []
    if singles[0].clears < len(failed):
        pairs = list(_pairs(subject, closures, failed, singles[:MOST_PAIRS]))
    return Found(
        slips=tuple(trial.as_slip(len(failed)) for trial in slips if trial.net >= best),
        repairs=tuple(trial.as_repair(subject, len(failed)) for trial in singles),
        pairs=tuple(pairs),
    )


@dataclass(frozen=True, kw_only=True)
class _Trial:
    """One field at one value, and what became of the checks."""

    field: str
    candidate: Candidate
    clears: int
    breaks: int
    left: float
    """Sum of what misfit is left, so that of two equal trials the one that closes better stands first."""
    place: int
    """Among the candidates of the field, whose commonest slips stand first."""

    @property
    def changed(self) -> dict[str, float]:
        return {self.field: self.candidate.to, **self.candidate.also}

    @property
    def net(self) -> int:
        return self.clears - self.breaks

    @property
    def order(self) -> tuple[float, ...]:
        return (-self.net, not self.candidate.name, self.left + UNLIKELY * self.place)

    def as_repair(self, subject: Subject, of: int) -> Repair:
        value = subject.sheet_values[self.field]
        return Repair(
            field=self.field,
            before=float(value),
            to=self.candidate.to,
            also=tuple(self.candidate.also),
            clears=self.clears,
            of=of,
            breaks=self.breaks,
            quantity=value.quantity if isinstance(value, Figure) else "",
            slip=self.candidate.name,
        )

    def as_slip(self, of: int) -> Slip:
        c = self.candidate
        return Slip(field=self.field, name=c.name, factor=c.factor, to=c.to, clears=self.clears, of=of)


class _Search:
    """Tries values of the sheet's figures, on top of what is already changed."""

    def __init__(self, subject: Subject, closures: Sequence[_Closure], changed: Mapping[str, float]) -> None:
        self.subject, self.closures, self.changed = subject, closures, changed

    def ranked(self, failed: Sequence[_Closure]) -> list[_Trial]:
        """The best trial of each field that takes part in a failure that closes, those that gain first."""
        found = []
        for path in self._fields(failed):
            trials = [self._trial(path, one, failed, i) for i, one in enumerate(self._candidates(path))]
            if trials:
                best = min(trials, key=lambda trial: trial.order)
                if best.net > 0:
                    found.append(best)
        return sorted(found, key=lambda trial: trial.order)

    def slips(self, failed: Sequence[_Closure]) -> Iterator[_Trial]:
        """The best slip of each field that would explain a large misfit."""
        for path in self._fields(failed):
            slips = [one for one in self._candidates(path) if one.name]
            if slips:
                yield min((self._trial(path, one, failed, i) for i, one in enumerate(slips)), key=lambda t: t.order)

    def _fields(self, failed: Sequence[_Closure]) -> list[str]:
        entering = {path for c in failed if c.ended.check.closes for path in c.fields}
        return [
            path
            for path in self.subject.sheet_values
            if path in entering and path not in self.changed and not isinstance(self.subject.sheet_values[path], str)
        ]

    def _candidates(self, path: str) -> Iterator[Candidate]:
        """Values worth trying: where a failure closes, and without a slip that would explain a large one."""
        if path in FEW:
            yield from (Candidate(to=float(n)) for n in SMALL_COUNTS if n != self.subject.sheet_values[path])
            return
        failed = [
            c
            for c in self.closures
            if c.fails and c.ended.check.closes and path in c.fields and c.ended.line is not None
        ]
        large = [(c, miss) for c in failed if (miss := c.miss(self.changed)) > TELLING]
        for slip in candidates(self.subject, path):
            changed = {**self.changed, path: slip.to, **slip.also}
            if any(c.miss(changed, as_slip=True) <= 1.0 and c.miss(changed) <= LEFT * miss for c, miss in large):
                yield slip
        whole = not isinstance(self.subject.sheet_values[path], Figure)
        for c in failed:
            root = self._root(c, path)
            if root is not None:
                yield Candidate(to=float(round(root)) if whole else root)

    def _trial(self, path: str, candidate: Candidate, failed: Sequence[_Closure], place: int) -> _Trial:
        """What a value does to the checks that the field enters; a note that remains counts as not cleared."""
        own = {path: candidate.to, **candidate.also}
        changed = {**self.changed, **own}
        clears = breaks = 0
        left = 0.0
        failing = set(map(id, failed))
        for c in self.closures:
            if own.keys().isdisjoint(c.fields):
                continue
            counted = id(c) in failing
            if not counted and not c.ended.check.closes:
                continue
            miss = c.miss(changed)
            left += min(miss, 10.0) ** 2
            if counted and miss <= 1.0:
                clears += 1
            elif not counted and not c.fails and miss > BROKEN:
                breaks += 1
        return _Trial(field=path, candidate=candidate, clears=clears, breaks=breaks, left=left, place=place)

    def _root(self, c: _Closure, path: str) -> float | None:
        """The value of a field at which a failed check closes; None without one."""
        value = self.subject.sheet_values[path]
        start = float(value)
        quantity = value.quantity if isinstance(value, Figure) else ""
        steps = ADDITIVE.get(quantity) if start or quantity != "fouling_resistance" else (1e-5, 1e-2)
        if steps is None and start <= 0:
            return None

        def at(u: float) -> float:
            return start + u if steps else start * math.exp(u)

        def misfit(u: float) -> float:
            try:
                found = c.equation.reread({**self.changed, path: at(u)})
            except Missing:
                return math.nan
            return found.misfit if isinstance(found, Line) else math.nan

        step, limit = steps or (0.01, math.log(LOOKED))
        u = _solved(misfit, step, limit, c.ended.tolerance or 1e-12)
        return None if u is None else at(u)


ADDITIVE = {
    "temperature": (1.0, 400.0),
    "pressure_absolute": (1e3, 1e7),
    "pressure_gauge": (1e3, 1e7),
    "fraction": (0.01, 5.0),
}
"""Quantities that are off by a difference rather than by a factor: first step and limit of a search."""


def _solved(misfit: Callable[[float], float], step: float, limit: float, tolerance: float) -> float | None:
    """A root near zero of a smooth function, by secants that stay within a limit; None where they do not settle.

    For a limit, inside which the misfit is zero, the edge of it is found.
    """
    u0, f0 = 0.0, misfit(0.0)
    if not math.isfinite(f0):
        return None
    u1 = step
    f1 = misfit(u1)
    if not math.isfinite(f1) or f1 == f0:
        u1 = -step
        f1 = misfit(u1)
    for _ in range(MOST_STEPS):
        if not math.isfinite(f1):
            u1 = 0.5 * (u0 + u1)
            f1 = misfit(u1)
            continue
        if abs(f1) <= 1e-3 * tolerance:
            return u1
        if f1 == f0:
            return None
        move = -f1 * (u1 - u0) / (f1 - f0)
        most = limit / 4
        u2 = u1 + max(-most, min(most, move))
        if abs(u2) > limit:
            return None
        u0, f0, u1 = u1, f1, u2
        f1 = misfit(u1)
    return None


def _pairs(
    subject: Subject, closures: Sequence[_Closure], failed: Sequence[_Closure], singles: Sequence[_Trial]
) -> Iterator[tuple[Repair, Repair]]:
    """Two figures that together clear more than the best single one, the best pair first."""
    found = []
    for first in singles:
        search = _Search(subject, closures, first.changed)
        still = [c for c in failed if c.miss(first.changed) > 1.0]
        for second in search.ranked(still)[:MOST_PAIRS]:
            together = {**first.changed, **second.changed}
            clears = sum(c.miss(together) <= 1.0 for c in failed)
            if clears > singles[0].clears:
                found.append((clears, first, replace(second, clears=clears)))
    seen = set()
    for clears, first, second in sorted(found, key=lambda pair: -pair[0]):
        names = frozenset((first.field, second.field))
        if names not in seen:
            seen.add(names)
            yield replace(first, clears=clears).as_repair(subject, len(failed)), second.as_repair(subject, len(failed))


__all__ = ["Found", "repairs_of"]
