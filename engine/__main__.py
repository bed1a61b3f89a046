"""The command line: `python -m engine rate CASE.json`. Nothing heavy is imported before a command needs it.

Exit status: 0 done; 1 done, with a finding graded stop; 2 input or usage refused, sentences on standard error; 3 a
fault of this program.
"""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NoReturn

from engine import __version__

DONE, STOP, REFUSED, FAULT = range(4)
SYSTEMS = ("si", "us", "metric")
BRIEF = (
    "identity", "answer", "scheme", "results", "resistances", "drops", "methods", "findings", "contributors", "sources",
    "cautions",
)  # fmt: skip
"""Sections that the terminal shows; the PDF holds all."""


class Refused(Exception):
    """Input or usage that cannot be used; its text is one sentence a line."""


class Parser(argparse.ArgumentParser):
    """Refuses wrong usage in one sentence."""

    def error(self, message: str) -> NoReturn:
        raise Refused(f"{message}; see {self.prog} --help")


# --- rate -------------------------------------------------------------------------------------------------------------


def _rate_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="case file (JSON)")
    parser.add_argument("--json", metavar="FILE", help="write the result file; - for standard output and nothing else")
    parser.add_argument("--pdf", metavar="FILE", help="write the report")
    parser.add_argument("--units", choices=SYSTEMS, default="si", help="units of the text and the report (si)")


def _rate(options: argparse.Namespace) -> int:
    outputs = [Path(name) for name in (options.json, options.pdf) if name and name != "-"]
    _refuse_overwriting(Path(options.case), outputs)
    if options.pdf == "-":
        raise Refused("--pdf: needs a file name; only --json can go to standard output")

    import engine

    case = engine.load_case(options.case)
    rating = engine.rate(case)
    intervals = engine.propagate(case, rating)
    verdicts = engine.judge(rating, intervals, system=options.units)
    if options.json:
        text = _as_json(engine.result_json(rating, intervals, verdicts))
        if options.json == "-":
            _say(text)
        else:
            _write(options.json, text.encode())
    if options.pdf:
        studies = engine.studied(case, options.units)
        if case.sheet is not None:
            # In a rating's report what does not close is enough; `check` lists the lines that do.
            audit = engine.sheet_sections(engine.check_datasheet(case), options.units)
            studies += tuple(section for section in audit if section.key not in ("sheet-clear", "sheet-missing"))
        _write(options.pdf, engine.report_pdf(rating, intervals, verdicts, options.units, studies))
    if options.json != "-":
        from engine.report import report_text

        written = engine.sections(rating, intervals, verdicts, options.units)
        _say(report_text(section for section in written if section.key in BRIEF))
    stopped = any(finding.grade == "stop" for verdict in verdicts for finding in verdict.findings)
    return STOP if stopped else DONE


def _refuse_overwriting(case: Path, outputs: Sequence[Path]) -> None:
    """A result written over the case it came from, or over the other result, would lose it."""
    for output in outputs:
        if output.exists() and case.exists() and output.samefile(case):
            raise Refused(f"{output}: is the case file itself; write to another file")
    if len(outputs) == 2 and outputs[0].resolve() == outputs[1].resolve():
        raise Refused(f"{outputs[0]}: is named for both --json and --pdf; write to two files")


# --- check ------------------------------------------------------------------------------------------------------------


def _check_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="case file with a sheet (JSON), or a sheet alone (CSV, XLSX)")
    parser.add_argument("--sheet", metavar="FILE", help="check this sheet (CSV, XLSX) beside the case")
    parser.add_argument("--json", metavar="FILE", help="write the check file; - for standard output and nothing else")
    parser.add_argument("--csv", metavar="FILE", help="write one line a check, for a spreadsheet")
    parser.add_argument("--units", choices=SYSTEMS, default="si", help="units of the text and the CSV (si)")


def _check(options: argparse.Namespace) -> int:
    outputs = [Path(name) for name in (options.json, options.csv) if name and name != "-"]
    for read in (options.case, options.sheet):
        if read:
            _refuse_overwriting(Path(read), outputs)
    if options.csv == "-":
        raise Refused("--csv: needs a file name; only --json can go to standard output")

    import engine

    alone = Path(options.case).suffix.lower() in (".csv", ".xlsx")
    if alone and options.sheet:
        raise Refused(f"--sheet: {options.case} is a sheet itself; name a case file beside it")
    audit = engine.check_datasheet(
        engine.load_sheet(options.case)
        if alone
        else engine.load_case(options.case).model_copy(update={"sheet": engine.load_sheet(options.sheet)})
        if options.sheet
        else engine.load_case(options.case)
    )
    if options.json:
        text = _as_json(engine.check_json(audit))
        if options.json == "-":
            _say(text)
        else:
            _write(options.json, text.encode())
    if options.csv:
        _write(options.csv, engine.check_csv(audit, options.units))
    if options.json != "-":
        from engine.report import report_text

        _say(report_text(engine.sheet_sections(audit, options.units)))
    return STOP if audit.stopped else DONE


# --- what is known here -----------------------------------------------------------------------------------------------


def _methods(_: argparse.Namespace) -> int:
    from importlib import import_module
    from pkgutil import iter_modules

    from engine import correlations
    from engine.report.words import limits_of, relation_name

    for module in iter_modules(correlations.__path__):
        import_module(f"{correlations.__name__}.{module.name}")
    for relation in correlations.REGISTER.values():
        scatter = (
            "not known" if relation.scatter is None else f"{relation.scatter:.0%} (1 sd, {relation.scatter_origin})"
        )
        _say(
            f"{relation.name}: {relation_name(relation)} ({relation.role})\n"
            f"  gives    {relation.gives}\n"
            f"  applies  {relation.applies}\n"
            f"  limits   {limits_of(relation)}\n"
            f"  scatter  {scatter}\n"
            f"  source   {relation.source}\n"
        )
    return DONE


def _fluids(_: argparse.Namespace) -> int:
    from engine import fluids, units

    for offer in fluids.offered():
        low, high = (units.to_unit(T, "temperature", "°C") for T in (offer.T_low, offer.T_high))
        text = f"{offer.name} ({offer.kind}): {low:.0f} to {high:.0f} °C"
        if offer.fraction_low is not None and offer.fraction_high is not None:
            text += f", {100 * offer.fraction_low:.3g} to {100 * offer.fraction_high:.3g} % by mass"
        if offer.missing:
            text += f"; without {offer.missing}, so type a property table"
        _say(text)
    return DONE


def _findings(_: argparse.Namespace) -> int:
    from engine.findings import catalogue

    for rule in catalogue():
        _say(
            f"{rule['code']}: {rule['title']}\n"
            f"  grades  {rule['grades']}\n"
            f"  needs   {rule['needs']}\n"
            f"  source  {rule['source']}\n"
        )
    return DONE


def _checks(_: argparse.Namespace) -> int:
    from engine.datasheet import catalogue

    for row in catalogue():
        _say(
            f"{row['id']}: {row['title']}\n"
            f"  grade   {row['grade']}\n"
            f"  needs   {row['needs']}\n"
            f"  source  {row['source']}\n"
        )
    return DONE


def _schema(_: argparse.Namespace) -> int:
    from engine.casefile import schema

    _say(_as_json(schema()))
    return DONE


def _prove_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--json", metavar="FILE", help="write the table; - for standard output and nothing else")


def _prove(options: argparse.Namespace) -> int:
    from engine.proofs import proof_table

    lines = proof_table()
    if options.json == "-":
        _say(_as_json(lines))
    else:
        if options.json:
            _write(options.json, _as_json(lines).encode())
        for line in lines:
            scale, unit = (100.0, " %") if line["relative"] else (1.0, f" {line['unit']}")
            _say(
                f"{'holds' if line['holds'] else 'FAILS'}  {line['subject']}: {line['what']}\n"
                f"  {line['kind']} {line['value']:.6g} {line['unit']}, ours {line['ours']:.6g}: "
                f"off by {scale * line['difference']:+.2g}{unit} where {scale * line['tolerance']:.2g}{unit} is "
                f"allowed ({line['reason']})\n"
                f"  {line['source']}\n"
            )
        kinds = Counter(line["kind"] for line in lines)
        _say(f"{len(lines)} values: " + ", ".join(f"{n} {kind}" for kind, n in kinds.most_common()))
    return DONE if all(line["holds"] for line in lines) else FAULT


# --- the table of commands --------------------------------------------------------------------------------------------


def _none(_: argparse.ArgumentParser) -> None:
    """No argument of its own."""


@dataclass(frozen=True)
class Command:
    help: str
    run: Callable[[argparse.Namespace], int]
    arguments: Callable[[argparse.ArgumentParser], None] = _none


COMMANDS: dict[str, Command] = {
    "rate": Command("rate a case, clean and fouled, with intervals and findings", _rate, _rate_arguments),
    "check": Command("check a vendor's datasheet line by line", _check, _check_arguments),
    "methods": Command("list the correlations with their limits, scatter and source", _methods),
    "fluids": Command("list the fluids that can be named", _fluids),
    "prove": Command(
        "compute every published or derived value that the engine must reproduce", _prove, _prove_arguments
    ),
    "findings": Command("list the findings that a rating can have, and what each needs", _findings),
    "checks": Command("list the checks of a datasheet, and what each needs", _checks),
    "schema": Command("print the JSON Schema of the case file", _schema),
}


def _parser() -> argparse.ArgumentParser:
    parser = Parser(
        prog="python -m engine",
        description="Rate double-pipe and shell-and-tube heat exchangers.",
        epilog="Exit status: 0 done; 1 done, with a finding graded stop; 2 input or usage refused; 3 a fault of this "
        "program.",
    )
    parser.add_argument("--version", action="version", version=f"Countercheck {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    for name, command in COMMANDS.items():
        command.arguments(commands.add_parser(name, help=command.help, description=f"{command.help}."))
    return parser


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit status."""
    if hasattr(sys.stdout, "reconfigure"):
        sys.stdout.reconfigure(encoding="utf-8", errors="replace")
    try:
        options = _parser().parse_args(arguments)
        return COMMANDS[options.command].run(options)
    except SystemExit as end:  # --help and --version
        return int(end.code or DONE)
    except Refused as refusal:
        return _complain([str(refusal)], REFUSED)
    except Exception as error:
        from engine.stated import CaseError

        if isinstance(error, CaseError):
            return _complain([str(problem) for problem in error.problems], REFUSED)
        if os.environ.get("COUNTERCHECK_DEBUG"):
            raise
        what = " ".join(f"{type(error).__name__}: {error}".split())
        return _complain(
            [f"This is a fault of the program, not of the input ({what}); set COUNTERCHECK_DEBUG=1 to see where."],
            FAULT,
        )


# --- output -----------------------------------------------------------------------------------------------------------


def _as_json(content: Any) -> str:
    return json.dumps(content, indent=1, ensure_ascii=False, allow_nan=False) + "\n"


def _say(text: str) -> None:
    """Print; a reader that has closed the pipe has read enough."""
    try:
        print(text, end="" if text.endswith("\n") else "\n", flush=True)
    except OSError as error:
        # What is still buffered would fail once more when the interpreter closes.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        if not isinstance(error, BrokenPipeError):
            raise Refused(f"standard output: {_cannot_be_written(error)}") from None


def _cannot_be_written(error: OSError) -> str:
    return f"cannot be written: {(error.strerror or 'unknown reason').lower()}"


def _write(name: str, content: bytes) -> None:
    try:
        Path(name).write_bytes(content)
    except OSError as error:
        raise Refused(f"{name}: {_cannot_be_written(error)}") from None


def _complain(sentences: Iterable[str], status: int) -> int:
    """What was given may stand in a sentence: it breaks no line and steers no terminal."""
    for sentence in sentences:
        print("".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in sentence), file=sys.stderr)
    return status


if __name__ == "__main__":
    sys.exit(main())
