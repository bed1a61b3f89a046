"""A checked datasheet as sections, and its lines as a table for a spreadsheet."""

from __future__ import annotations

from collections.abc import Iterator

from engine import units
from engine.datasheet import GRADES, Audit, Checked
from engine.datasheet.arithmetic import arithmetic
from engine.report.blocks import Block, Section, Table
from engine.report.words import NONE, capital
from engine.sheet.table import as_csv

GRADE_WORDS = {
    "stop": "contradicts itself or cannot be",
    "act": "inconsistent beyond its tolerance",
    "watch": "unusual",
    "note": "within reach of rounding, or not stated",
}
COLUMNS = (
    "id", "where", "title", "outcome", "grade", "sheet", "recomputed", "difference", "tolerance", "of it rounding",
    "consequence", "question", "missing",
)  # fmt: skip


def sheet_sections(audit: Audit, system: str = "si") -> tuple[Section, ...]:
    """The audit in reading order, with figures in a system of units ("si", "us", "metric").

    Raises ValueError for an unknown system.
    """
    if system not in units.SYSTEMS:
        raise ValueError(f'"{system}" is not a system of units; allowed are {", ".join(units.SYSTEMS)}')
    made = (
        ("sheet-answer", f"Datasheet of {audit.sheet.item or 'an exchanger'}", _answer(audit, system)),
        ("sheet-found", "Lines that do not close", _found(audit, system)),
        ("sheet-arithmetic", "Their arithmetic", _arithmetic(audit, system)),
        ("sheet-repairs", "What would clear them", _repairs(audit, system)),
        ("sheet-questions", "Questions to the vendor", _questions(audit, system)),
        ("sheet-clear", "Lines that close", _clear(audit, system)),
        ("sheet-missing", "Checks that are not possible", _missing(audit)),
    )
    return tuple(Section(key=key, title=title, blocks=blocks) for key, title, found in made if (blocks := tuple(found)))


def _answer(audit: Audit, system: str) -> Iterator[Block]:
    counts = audit.counts
    yield (
        f"Of {len(audit.checks)} checks {counts['clear']} are clear, {counts['found']} found something and "
        f"{counts['not possible']} are not possible with what is stated."
    )
    graded = [f"{counts[grade]} {grade} ({GRADE_WORDS[grade]})" for grade in GRADES if counts[grade]]
    if graded:
        yield f"Found: {', '.join(graded)}."
    elif counts["clear"]:
        yield "What can be recomputed agrees within rounding and the allowances."
    if audit.repairs:
        best = audit.repairs[0]
        rivals = [r for r in audit.repairs[1:] if r.clears - r.breaks == best.clears - best.breaks]
        others = ", ".join(audit.subject.label(r.field) for r in rivals)
        also = f" As much would clear by another change of: {others}." if rivals else ""
        yield f"{best.says(audit.subject, system)}{also} Nothing is changed here; ask first."
    for slip in audit.slips:
        yield f"{capital(audit.subject.label(slip.field))} looks like a slip: {slip.name}."


def _found(audit: Audit, system: str) -> Iterator[Block]:
    if not audit.found:
        return
    yield Table(
        header=("Check", "Grade", "Sheet", "Recomputed", "Tolerance (rounding)", "What it means"),
        rows=tuple(
            (
                f"{c.check.id} {c.title()}",
                c.grade or "",
                *_figures(c, system),
                c.consequence(system) or c.remark.says or NONE,
            )
            for c in audit.found
        ),
        widths=(2.2, 0.7, 1.2, 1.2, 1.4, 2.4),
    )


def _arithmetic(audit: Audit, system: str) -> Iterator[Block]:
    for c in audit.found:
        if c.grade != "note" and (lines := arithmetic(c, system)):
            yield "\n".join((f"{c.check.id} {c.title()}", *lines))


def _figures(c: Checked, system: str) -> tuple[str, str, str]:
    if c.line is None:
        return NONE, NONE, NONE
    tolerance = f"{c.shown_difference(c.tolerance, system)} ({100 * (c.rounding_share or 0.0):.0f} %)"
    least = 1e-6 * abs(c.line.sheet)
    return c.shown(c.line.sheet, system), c.expected(system), tolerance if c.tolerance > least else NONE


def _repairs(audit: Audit, system: str) -> Iterator[Block]:
    shown = audit.repairs[:8]
    if shown:
        yield Table(
            header=("Change", "Failures that vanish", "New ones", "Slip"),
            rows=tuple(
                (
                    capital(r.change(audit.subject, system)),
                    f"{r.clears} of {r.of}",
                    str(r.breaks),
                    r.slip or NONE,
                )
                for r in shown
            ),
            widths=(4, 1.4, 0.8, 2),
        )
    for first, second in audit.pairs[:3]:
        yield (
            f"Two changes together: {first.change(audit.subject, system)}; {second.change(audit.subject, system)}. "
            f"{first.clears} of {first.of} failures vanish."
        )


def _questions(audit: Audit, system: str) -> Iterator[Block]:
    asked = [c for c in audit.found if c.question(system)]
    if asked:
        yield Table(
            header=("No.", "Question"),
            rows=tuple((str(i), f"{c.title()}: {c.question(system)}") for i, c in enumerate(asked, 1)),
            widths=(0.5, 8),
        )


def _clear(audit: Audit, system: str) -> Iterator[Block]:
    lines = [c for c in audit.checks if c.outcome == "clear" and c.line is not None]
    if lines:
        yield Table(
            header=("Check", "Sheet", "Recomputed", "Tolerance (rounding)"),
            rows=tuple((f"{c.check.id} {c.title()}", *_figures(c, system)) for c in lines),
            widths=(3, 1.4, 1.4, 1.6),
        )


def _missing(audit: Audit) -> Iterator[Block]:
    lacking = [c for c in audit.checks if c.outcome == "not possible"]
    if lacking:
        yield Table(
            header=("Check", "Not possible without"),
            rows=tuple((f"{c.check.id} {c.title()}", c.missing) for c in lacking),
            widths=(3, 4),
        )


def check_csv(audit: Audit, system: str = "si") -> bytes:
    """One line a check, for a spreadsheet."""
    return as_csv([COLUMNS, *(_line(c, system) for c in audit.checks)])


def _line(c: Checked, system: str) -> tuple[str, ...]:
    figures = ("", "", "", "", "")
    if c.line is not None:
        difference = c.shown_difference(c.line.misfit, system, 3)
        share = "" if c.rounding_share is None else f"{100 * c.rounding_share:.0f} %"
        sheet, recomputed, tolerance = _figures(c, system)
        figures = (sheet, recomputed, difference, tolerance.partition(" (")[0], share)
    return (
        c.check.id, c.where, c.check.title, c.outcome, c.grade or "", *figures, c.consequence(system),
        c.question(system) or c.remark.says, c.missing,
    )  # fmt: skip


__all__ = ["check_csv", "sheet_sections"]
