"""The command line: what it prints, what it writes, what it refuses, and with which status it ends."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest
from pypdf import PdfReader

import engine
from engine import units
from engine.__main__ import COMMANDS, SYSTEMS, main
from tests.cases import OIL_COOLER, changed

ROOT = Path(__file__).parents[1]
BOILS = changed(
    OIL_COOLER, inside__p_in="0.2 bara", inside__flow="0.05 m3/h", outside__T_in="95 degC", outside__T_out=None
)
HEAVY = ("numpy", "scipy", "pandas", "pydantic", "CoolProp", "reportlab")


@pytest.fixture
def case(tmp_path):
    path = tmp_path / "case.json"
    path.write_text(json.dumps(OIL_COOLER), encoding="utf-8")
    return path


def written(path, content):
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return str(path)


def run(*arguments, **options):
    return subprocess.run(
        [sys.executable, "-m", "engine", *map(str, arguments)],
        cwd=ROOT,
        capture_output=True,
        text=True,
        encoding="utf-8",
        timeout=120,
        **options,
    )


def refused(capsys, *arguments):
    """The sentences on standard error, of a run that must be refused and print nothing."""
    assert main([str(argument) for argument in arguments]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "Traceback" not in err
    return err.splitlines()


# --- help and lists ---------------------------------------------------------------------------------------------------


def test_help_loads_nothing_heavy():
    code = (
        "import sys; from engine.__main__ import main; status = main(['--help']); "
        f"print([name for name in {HEAVY} if name in sys.modules], status, file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, timeout=60)
    assert done.stderr.strip() == "[] 0"
    assert all(command in done.stdout for command in COMMANDS)


def test_the_version_is_the_engines(capsys):
    assert main(["--version"]) == 0
    assert capsys.readouterr().out == f"Countercheck {engine.__version__}\n"


def test_the_systems_of_units_are_those_of_the_unit_table():
    assert tuple(units.SYSTEMS) == SYSTEMS


def test_every_correlation_is_listed_with_limits_scatter_and_source(capsys):
    assert main(["methods"]) == 0
    out = capsys.readouterr().out
    from engine.correlations import REGISTER

    for name, relation in REGISTER.items():
        assert f"{name}: " in out
        assert relation.source.text in out
    for label in ("gives", "applies", "limits", "scatter", "source"):
        assert out.count(f"\n  {label} ") == len(REGISTER)


def test_fluids_are_listed_with_their_range_and_what_they_lack(capsys):
    assert main(["fluids"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert "water (pure): 0 to 1727 °C" in lines
    assert any(line.startswith("acetone") and "without viscosity and conductivity" in line for line in lines)
    assert any("% by mass" in line for line in lines)


def test_findings_are_listed_with_grades_and_needs(capsys):
    assert main(["findings"]) == 0
    out = capsys.readouterr().out
    assert "no-answer: " in out
    assert "\n  grades  stop\n" in out
    assert "\n  needs " in out


def test_the_schema_is_json_schema_of_the_case(capsys):
    assert main(["schema"]) == 0
    schema = json.loads(capsys.readouterr().out)
    assert {"inside", "outside", "exchanger"} <= set(schema["properties"])


# --- rate -------------------------------------------------------------------------------------------------------------


def test_rate_prints_the_answer_to_read(case, capsys):
    assert main(["rate", str(case)]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    assert "E-1402 meets what is required" in out.replace("\n", " ")
    for title in ("Results", "Pressure drops", "Findings", "What to measure to be surer", "Cautions"):
        assert f"\n{title}\n" in out


def test_rate_prints_in_the_units_asked_for(case, capsys):
    assert main(["rate", str(case), "--units", "us"]) == 0
    out = capsys.readouterr().out
    assert "Btu/h" in out
    assert " kW" not in out


def test_json_on_standard_output_stands_there_alone(case):
    done = run("rate", case, "--json", "-")
    assert (done.returncode, done.stderr) == (0, "")
    assert json.loads(done.stdout)["format"] == "countercheck-rating"


def test_result_and_report_are_written_to_files(case, tmp_path, capsys):
    result, report = tmp_path / "out.json", tmp_path / "out.pdf"
    assert main(["rate", str(case), "--json", str(result), "--pdf", str(report)]) == 0
    assert json.loads(result.read_text(encoding="utf-8"))["tag"] == "E-1402"
    assert report.read_bytes().startswith(b"%PDF")
    assert "E-1402" in capsys.readouterr().out


def test_a_finding_graded_stop_shows_in_the_status(tmp_path):
    done = run("rate", written(tmp_path / "boils.json", json.dumps(BOILS)), "--json", "-")
    assert (done.returncode, done.stderr) == (1, "")
    assert "boils" in json.loads(done.stdout)["states"]["fouled"]["not_possible"]


def test_a_reader_that_stops_early_is_no_fault(case):
    process = subprocess.Popen(
        [sys.executable, "-m", "engine", "rate", str(case)], cwd=ROOT, stdout=subprocess.PIPE, stderr=subprocess.PIPE
    )
    process.stdout.close()
    assert process.stderr.read() == b""
    assert process.wait(timeout=120) == 0


def test_any_encoding_of_the_terminal_will_do(case):
    done = run("rate", case, env={**os.environ, "PYTHONIOENCODING": "ascii"})
    assert (done.returncode, done.stderr) == (0, "")
    assert "°C" in done.stdout


# --- refusals ---------------------------------------------------------------------------------------------------------


def test_a_missing_file_is_refused_in_one_sentence(tmp_path):
    done = run("rate", tmp_path / "none.json")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr == f"{tmp_path / 'none.json'}: cannot be read: no such file or directory\n"


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("", "the file is empty"),
        (b"\xff\xfe\x00\x01\x80", "the file is not text"),
        ("{", "the file is not JSON"),
        ("[]", "not a group of keys"),
        ('{"format": "countercheck-case", "version": 1, "tag": "a", "tag": "b"}', "tag: stands twice"),
        (json.dumps({**OIL_COOLER, "atmosphere": float("nan")}), "NaN is not a figure"),
        (json.dumps(OIL_COOLER).replace('"version": 1', '"version": 1e999'), "too large"),
        (json.dumps(changed(OIL_COOLER, version=2)), "version: 2 is newer than this program knows"),
        (json.dumps(changed(OIL_COOLER, inside__flow="42")), "inside.flow: "),
        (json.dumps(changed(OIL_COOLER, inside__flow=42)), "gives no unit"),
        (json.dumps(changed(OIL_COOLER, exchanger__leg_lenght="6 m")), 'did you mean "leg_length"?'),
        (json.dumps(changed(OIL_COOLER, tag="\ud800")), "tag: holds "),
        ("[" * 100_000, "nests deeper"),
        (b" " * ((1 << 20) + 1), "allowed is up to 1 MiB"),
    ],
    ids=lambda value: value[:24] if isinstance(value, str) and len(value) < 60 else "",
)
def test_an_unusable_file_is_refused_with_a_sentence(content, sentence, tmp_path, capsys):
    sentences = refused(capsys, "rate", written(tmp_path / "case.json", content))
    assert any(sentence in line for line in sentences), sentences


def test_a_folder_is_refused(tmp_path, capsys):
    assert "is a folder" in refused(capsys, "rate", tmp_path)[0]


def test_all_problems_are_told_at_once_one_a_line(tmp_path, capsys):
    raw = changed(OIL_COOLER, inside__flow="42", outside__T_in="hot", exchanger__legs_in_series=2.5)
    sentences = refused(capsys, "rate", written(tmp_path / "case.json", json.dumps(raw)))
    for place in ("inside.flow: ", "outside.T_in: ", "exchanger.legs_in_series: "):
        assert sum(line.startswith(place) for line in sentences) == 1


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs a device that is always full")
def test_a_full_disk_behind_standard_output_is_no_fault_of_the_program():
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(
            [sys.executable, "-m", "engine", "schema"],
            cwd=ROOT,
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            timeout=60,
        )
    assert done.returncode == 2
    assert done.stderr == "standard output: cannot be written: no space left on device\n"


def test_what_was_given_breaks_no_line_and_steers_no_terminal(tmp_path, capsys):
    raw = {**changed(OIL_COOLER, inside__flow="42 m3/h\n\x1b[31m"), "a\nkey\x1b[2J": 1}
    sentences = refused(capsys, "rate", written(tmp_path / "case.json", json.dumps(raw)))
    assert len(sentences) == 2
    assert all(sentence.isprintable() for sentence in sentences)


@pytest.mark.parametrize(
    ("arguments", "sentence"),
    [
        ((), "the following arguments are required: COMMAND"),
        (("rat",), "invalid choice: 'rat'"),
        (("rate",), "the following arguments are required: CASE"),
        (("rate", "a.json", "b.json"), "unrecognized arguments: b.json"),
        (("rate", "a.json", "--units", "imperial"), "invalid choice: 'imperial'"),
        (("rate", "a.json", "--pdf", "-"), "--pdf: needs a file name"),
    ],
)
def test_wrong_usage_is_refused_in_one_sentence(arguments, sentence, capsys):
    [line] = refused(capsys, *arguments)
    assert sentence in line


@pytest.mark.parametrize("option", ["--json", "--pdf"])
def test_an_output_that_cannot_be_written_is_refused(option, case, tmp_path, capsys):
    target = tmp_path / "no such folder" / "out"
    [line] = refused(capsys, "rate", case, option, target)
    assert line == f"{target}: cannot be written: no such file or directory"


@pytest.mark.parametrize("option", ["--json", "--pdf"])
def test_the_case_is_never_written_over(option, case, capsys):
    before = case.read_bytes()
    [line] = refused(capsys, "rate", case, option, case.parent / "." / case.name)
    assert "is the case file itself" in line
    assert case.read_bytes() == before


def test_two_results_are_not_written_to_one_file(case, tmp_path, capsys):
    out = tmp_path / "out"
    [line] = refused(capsys, "rate", case, "--json", out, "--pdf", out)
    assert "named for both" in line
    assert not out.exists()


# --- faults -----------------------------------------------------------------------------------------------------------


def test_a_fault_of_the_program_is_called_one(case, monkeypatch, capsys):
    def broken(_):
        raise RuntimeError("first line\nsecond line")

    monkeypatch.setattr(engine, "rate", broken, raising=False)
    monkeypatch.delenv("COUNTERCHECK_DEBUG", raising=False)
    assert main(["rate", str(case)]) == 3
    [line] = capsys.readouterr().err.splitlines()
    assert "fault of the program" in line
    assert "RuntimeError: first line second line" in line
    monkeypatch.setenv("COUNTERCHECK_DEBUG", "1")
    with pytest.raises(RuntimeError):
        main(["rate", str(case)])


def test_the_report_of_a_case_with_a_sheet_holds_its_audit(tmp_path):
    sample = Path(__file__).parents[1] / "sample_cases" / "sheet-fouling-in-the-wrong-unit.json"
    assert main(["rate", str(sample), "--pdf", str(tmp_path / "x.pdf")]) == 0
    text = " ".join(page.extract_text() for page in PdfReader(tmp_path / "x.pdf").pages)
    assert "Questions to the vendor" in text
    assert "h·ft²·°F/Btu read as m²K/W" in " ".join(text.split())
