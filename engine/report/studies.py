"""What was asked of a case beyond its rating: its operating conditions side by side, and what it would take."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from engine.case import Case
from engine.report.blocks import Block, Section, Table
from engine.report.words import NONE, Words, capital, listed
from engine.stated import SIDES
from engine.studies import Answer, Conditions, Variable, answer, asked, operating_table, questions, told

MOST_COLUMNS = 6
"""Conditions in one table; further ones go on in the next."""


def studied(case: Case, system: str = "si") -> tuple[Section, ...]:
    """The operating conditions of a case, and the usual questions answered, as sections of its report.

    Empty for a case that itself has no answer. Takes about a quarter of a second for each question.
    """
    conditions = operating_table(case)
    if conditions.frame["problem"].iloc[0]:
        return ()
    answers: list[Answer] = []
    for question in questions(case):
        # What mends a limit that is passed today answers for both ways.
        if not any(a.question.path == question.path and a.outcome in ("mended", "not mended") for a in answers):
            answers.append(answer(case, question))
    return study_sections(case, conditions, answers, system)


def study_sections(
    case: Case, conditions: Conditions, answers: Sequence[Answer], system: str = "si"
) -> tuple[Section, ...]:
    """The sections of a table of conditions and of answers; what is empty has none."""
    words = Words(system)
    made = (
        ("operating", "Operating conditions", tuple(operating(case, conditions, words))),
        ("reach", "What it would take", tuple(reach(case, answers, words))),
    )
    return tuple(Section(key=key, title=title, blocks=blocks) for key, title, blocks in made if blocks)


def reach(case: Case, answers: Sequence[Answer], words: Words) -> Iterator[Block]:
    """Every question with its answer."""
    if not answers:
        return
    yield (
        "One input is varied, all others stay as stated; fouled state. The limits that count are the required outlets, "
        "the allowed drops and the stated limits of the equipment, and where cooling water scales."
    )
    yield Table(
        header=("Question", "Answer"),
        rows=tuple((asked(case, found.question), told(replace(found, left_out=()), words.system)) for found in answers),
        widths=(1.6, 4),
    )
    left_out = dict.fromkeys(limit.name for found in answers for limit in found.left_out)
    if left_out:
        yield f"Not counted, since it is of common practice only and exceeded already today: {listed(list(left_out))}."


def swept(case: Case, variable: Variable, conditions: Conditions, system: str = "si", most: int = 11) -> Table:
    """A sweep as a table: at most so many of its rows, its ends and the stated value among them."""
    words, frame, count = Words(system), conditions.frame, len(conditions.frame)
    today = int(np.abs(np.asarray(frame.index, dtype=float) - variable.today).argmin())
    rows = sorted({today, *(int(i) for i in np.linspace(0, count - 1, min(most, count)))})
    names = case.exchanger.side_names

    def cell(row: int, column: str, quantity: str, digits: int) -> str:
        return words.show(float(frame[column].iloc[row]), quantity, digits)

    return Table(
        header=(
            capital(variable.name.removeprefix("the ")),
            "Duty",
            *(f"{names[side]}, {what}" for what in ("outlet", "drop") for side in SIDES),
            "First limit",
        ),
        rows=tuple(
            (
                f"{variable.shown(float(frame.index[row]), system)}{', today' if row == today else ''}",
                cell(row, "duty", "heat_flow", 4),
                *(cell(row, f"{side}.T_out", "temperature", 4) for side in SIDES),
                *(cell(row, f"{side}.dp", "pressure_difference", 3) for side in SIDES),
                str(frame["problem"].iloc[row]) or _first_limit(conditions, row, words),
            )
            for row in rows
        ),
    )


def operating(case: Case, conditions: Conditions, words: Words) -> Iterator[Block]:
    """All conditions as columns, and first in a sentence which of them pass a limit."""
    names, frame = [str(name) for name in conditions.frame.index], conditions.frame
    if len(names) < 2:
        return
    passing = [name for row, name in enumerate(names) if conditions.passed(row)]
    failing = [name for name, problem in zip(names, frame["problem"], strict=True) if problem]
    told = [f"{listed(passing)} {'passes' if len(passing) == 1 else 'pass'} a limit" if passing else ""]
    told.append(f"{listed(failing)} {'has' if len(failing) == 1 else 'have'} no answer" if failing else "")
    if any(told):
        yield f"{capital('; '.join(part for part in told if part))}."
    elif conditions.limits:
        yield "Every condition stays inside all limits."
    rows = list(_rows(case, conditions, words))
    tables = -(-len(names) // MOST_COLUMNS)
    for columns in (slice(len(names) * i // tables, len(names) * (i + 1) // tables) for i in range(tables)):
        yield Table(
            header=("", *names[columns]),
            rows=tuple((label, *cells[columns]) for label, cells in rows),
            widths=(1.5, *([1.0] * len(names[columns]))),
        )
    for name, problem in zip(names, frame["problem"], strict=True):
        if problem:
            yield f"{name}: {problem}."


def _rows(case: Case, conditions: Conditions, words: Words) -> Iterator[tuple[str, list[str]]]:
    frame, names = conditions.frame, case.exchanger.side_names

    def row(column: str, quantity: str, digits: int = 4) -> list[str]:
        return [words.show(float(value), quantity, digits) for value in frame[column]]

    for side in SIDES:
        yield f"{names[side]}, flow", row(f"{side}.flow", "mass_flow")
        yield f"{names[side]}, inlet", row(f"{side}.T_in", "temperature")
    for side in SIDES:
        if (frame[f"{side}.R_fouling"] > 0).any():
            yield f"{names[side]}, fouling resistance", row(f"{side}.R_fouling", "fouling_resistance", 3)
    if (frame["tubes_plugged"] > 0).any():
        yield "Tubes plugged", [f"{count:.0f}" for count in frame["tubes_plugged"]]
    yield "Duty", row("duty", "heat_flow")
    for side in SIDES:
        yield f"{names[side]}, outlet", row(f"{side}.T_out", "temperature")
    for limit in conditions.limits:
        if limit.key.endswith(".T_out"):
            slack = [words.show(float(x), limit.slack_quantity, 3) for x in conditions.slack(limit)]
            yield f"Margin to {limit.name}", [_signed(text) for text in slack]
    yield "U in service", row("U_dirty", "heat_transfer_coefficient", 3)
    for side in SIDES:
        yield f"{names[side]}, drop", row(f"{side}.dp", "pressure_difference", 3)
        yield f"{names[side]}, velocity", row(f"{side}.velocity", "velocity", 3)
        yield f"{names[side]}, regime", [regime or NONE for regime in frame[f"{side}.regime"]]
    if conditions.limits:
        yield "First limit", [_first_limit(conditions, i, words) for i in range(len(frame))]


def _first_limit(conditions: Conditions, row: int, words: Words) -> str:
    """The limit passed the furthest, else the one come nearest to, with what is left."""
    ranked = conditions.nearest(row)
    if not ranked:
        return NONE
    slack = float(conditions.slack(ranked[0])[row])
    gap = words.show(abs(slack), ranked[0].slack_quantity, 3)
    return f"{ranked[0].name.removeprefix('the ')}: {f'{gap} left' if slack >= 0 else f'PASSED by {gap}'}"


def _signed(text: str) -> str:
    return text if text == NONE or text.startswith("-") else f"+{text}"
