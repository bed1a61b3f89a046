"""What a report says: built once, drawn by the PDF, the screen and the command line, so that they cannot disagree."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

from engine import units
from engine.exchangers.shell_and_tube import ShellAndTube
from engine.findings import Verdict
from engine.report import answer, doubts, inputs, results
from engine.report.basis import Basis
from engine.report.blocks import Block, Section, Table
from engine.report.rated import Rated
from engine.report.words import Words
from engine.stated import SIDES
from engine.states import Rating
from engine.uncertainty import Intervals

CAUTIONS = (
    "This is a rating aid. It does not replace the judgement of the responsible engineer, who verifies the inputs and "
    "the result and signs under local law.",
    "Pressure parts and relief are not covered. Changes of pressure equipment, re-rates, repairs and plugging belong "
    "to the authorised inspector, the local code in force and licensed practice.",
    "Nothing here is an instruction to operate, vent, drain or open equipment: that goes by permit and by the plant's "
    "own procedures.",
)


def sections(
    rating: Rating,
    intervals: Mapping[str, Intervals],
    verdicts: Sequence[Verdict],
    system: str = "si",
    studies: Sequence[Section] = (),
) -> tuple[Section, ...]:
    """The whole report in reading order, with figures in a system of units ("si", "us", "metric").

    `verdicts` should have been judged in the same system, and `studies`, sections of their own, be written in it.
    Raises ValueError for an unknown system.
    """
    if system not in units.SYSTEMS:
        raise ValueError(f'"{system}" is not a system of units; allowed are {", ".join(units.SYSTEMS)}')
    r = Rated(rating, intervals, verdicts, Words(system))
    basis = Basis(r)
    made: tuple[tuple[str, str, Iterable[Block]], ...] = (
        ("identity", f"Rating of {rating.case.tag or 'an exchanger'}", answer.identity(r)),
        ("answer", "Answer", answer.answer(r)),
        ("scheme", "Exchanger", _scheme(r)),
        ("inputs", "Inputs", inputs.inputs(rating.case, r.words, basis.cite)),
        ("results", "Results", results.results(r)),
        ("profile", "Temperatures along the exchanger", results.profile(r)),
        ("resistances", "Where the resistance lies", results.resistances(r)),
        ("drops", "Pressure drops", results.drops(r)),
        ("methods", "Methods side by side", basis.methods()),
        ("findings", "Findings", doubts.findings(r, basis.cite)),
        ("contributors", "What to measure to be surer", doubts.contributors(r)),
        *((section.key, section.title, section.blocks) for section in studies),
        ("assumptions", "Assumptions", doubts.assumptions(r)),
        ("not_checked", "Not checked", doubts.not_checked(r)),
        ("relations", "Relations", basis.relations()),
        ("sources", "Sources", basis.cited()),
        ("cautions", "Cautions", CAUTIONS),
        ("signatures", "Signatures", _signatures(r)),
    )
    written = (Section(key=key, title=title, blocks=tuple(blocks)) for key, title, blocks in made)
    return tuple(section for section in written if section.blocks)


def _scheme(r: Rated) -> Iterator[Block]:
    T_out = dict.fromkeys(SIDES, "unknown")
    if r.both:
        for side, T in r.rating.fouled.T_out.items():
            T_out[side] = r.words.best(T, "temperature", r.ends("fouled", f"{side}.T_out"))
    yield inputs.scheme(r.case, r.words, T_out)
    if isinstance(r.case.exchanger, ShellAndTube):
        yield inputs.bundle(r.case.exchanger, r.words)


def _signatures(r: Rated) -> Iterator[Block]:
    yield Table(
        header=("", "Name", "Date", "Signature"),
        rows=(("Prepared", r.case.prepared_by, "", ""), ("Checked", "", "", ""), ("Approved", "", "", "")),
        widths=(1, 2.5, 1.5, 2.5),
        roomy=True,
    )
