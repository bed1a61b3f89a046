"""What stands against the figures: findings, what to measure to be surer, what was assumed, what was not checked."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from engine.report.blocks import Block, Table
from engine.report.rated import ASSUMED, Rated
from engine.report.words import capital, fluid_name, listed, percent
from engine.stated import SIDES

MOST_CONTRIBUTORS = 5
LEAST_SHARE = 0.005
"""Of the variance, for a contributor to be shown."""
LEFT_OUT = " is not stated"
OWN_UNITS = {"flow": "mass_flow", "T_in": "temperature_difference", "R_fouling": "fouling_resistance"}
"""Doubts that are held in SI and not as a share."""
ALWAYS_ASSUMED = (
    "Steady flow; no heat is conducted along the wall or the fluids; each fluid is mixed over its cross-section.",
    "Pressure drops lie between the stated nozzles or leg ends and hold no static head.",
    "The clean state has no fouling resistance; the fouled state has the stated ones over the whole surface.",
    "Intervals are 95 % and take the doubts as independent; a relation's scatter is common to all cells.",
)
NEVER_CHECKED = (
    "mechanical design, thickness and remaining life of pressure parts",
    "sizing of relief, and tube rupture",
    "vibration and noise beyond a screening of the tubes in a shell, erosion and corrosion",
    "supports, nozzle loads and thermal stress",
    "start-up, shut-down and upset operation",
    "compatibility of the materials with the fluids",
)


def findings(r: Rated, cite: Callable[[str], str]) -> Iterator[Block]:
    """`cite` tells a source, long ones by their number."""
    if not r.found:
        yield "None: every check that could be run is clear."
        return
    yield Table(
        header=("Grade", "What was found", "What to do, and the source"),
        rows=tuple(_finding_rows(r, cite)),
        widths=(0.5, 4.2, 3.2),
    )


def _finding_rows(r: Rated, cite: Callable[[str], str]) -> Iterator[tuple[str, str, str]]:
    """One row a finding, but one for all defaults: each of them already stands among the inputs."""
    for finding in r.found:
        if finding.code != ASSUMED:
            # A figure that the sentence gives is not given twice.
            rest = "; ".join(
                f"{what} {figure}" for what, figure in finding.because.items() if figure not in finding.says
            )
            place = f"[{finding.code}, {finding.where}]" if finding.where else f"[{finding.code}]"
            says = f"{finding.says} ({rest})" if rest else finding.says
            yield finding.grade, f"{says} {place}", f"{finding.do} Source: {cite(finding.source)}."
    defaults = [finding for finding in r.found if finding.code == ASSUMED]
    if defaults:
        says = f"{len(defaults)} inputs are not stated; what is taken for them stands among the inputs. [{ASSUMED}]"
        yield defaults[0].grade, says, defaults[0].do


def contributors(r: Rated) -> Iterator[Block]:
    doubt = r.intervals.get("fouled")
    if doubt is None:
        return
    rows = tuple(
        (
            capital(c.doubt.name),
            f"{r.words.show(c.doubt.sd, OWN_UNITS.get(c.doubt.path.rpartition('.')[2], 'fraction'), 2)}, "
            f"{c.doubt.origin}",
            percent(c.share, 0),
            f"±{r.words.show(c.duty_sd, 'heat_flow', 2)}",
            capital(c.doubt.shrink),
        )
        for c in doubt.contributors[:MOST_CONTRIBUTORS]
        if c.share >= LEAST_SHARE
    )
    if rows:
        yield Table(
            header=("Source of doubt", "1 sd", "Variance", "On duty", "To shrink it"),
            rows=rows,
            widths=(2.2, 1.8, 0.8, 1.0, 3.9),
        )
    if doubt.not_propagated:
        yield f"Not in the intervals: {listed(doubt.not_propagated)}."


def assumptions(r: Rated) -> Iterator[Block]:
    said = list(ALWAYS_ASSUMED)
    if r.case.exchanger.deposit_conductivity is None:
        said.append("Deposits do not narrow the flow areas, since no deposit conductivity is stated.")
    for side in SIDES:
        said += [f"{capital(fluid_name(r.case.stream(side)))}: {n}." for n in r.case.fluid(side).notes]
    yield "\n".join(f"• {text}" for text in said)


def not_checked(r: Rated) -> Iterator[Block]:
    missing: dict[str, list[str]] = {}
    for verdict in r.verdicts:
        if verdict.missing:
            # A path names its side itself.
            named = (
                not verdict.where or f"{verdict.where}." in verdict.missing or f"{verdict.where}_" in verdict.missing
            )
            what = verdict.missing if named else f"{r.where(verdict.where).lower()}: {verdict.missing}"
            missing.setdefault(verdict.rule.title, []).append(what)
    if missing:
        yield Table(
            header=("Check that was not possible, or only in part", "What is missing"),
            rows=tuple((title, _together(what)) for title, what in missing.items()),
            widths=(2.3, 3.4),
            fine=True,
        )
    yield f"Never part of a rating here: {'; '.join(NEVER_CHECKED)}."


def _together(what: Sequence[str]) -> str:
    """What is missing for one check; fields that are not stated in one breath."""
    fields = [text.removesuffix(LEFT_OUT) for text in what]
    if len(what) > 1 and all(text.endswith(LEFT_OUT) for text in what):
        return f"{listed(fields)} are not stated"
    return "; ".join(what)
