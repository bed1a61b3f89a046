"""The report: what its sections say, and the PDF that is drawn from them."""

from __future__ import annotations

import io
import re
import shutil
import subprocess
from concurrent.futures import ThreadPoolExecutor
from itertools import pairwise
from pathlib import Path

import pypdf
import pytest
from reportlab.lib.pagesizes import A4

from engine import __version__, findings, rating, uncertainty
from engine.casefile import load_case
from engine.correlations import REGISTER
from engine.report import blocks, report_pdf, report_text, sections, studied, words
from engine.report.drawings import shown_legs, ticks
from tests.cases import oil_cooler

KEYS = (
    "identity", "answer", "scheme", "inputs", "results", "profile", "resistances", "drops", "methods", "findings",
    "contributors", "assumptions", "not_checked", "relations", "sources", "cautions", "signatures",
)  # fmt: skip
SAMPLES = Path(__file__).parents[1] / "sample_cases"
BOILS = {"inside__p_in": "0.2 bara", "inside__flow": "0.05 m3/h", "outside__T_in": "95 degC", "outside__T_out": None}


class Rated:
    """A rated case and what is drawn from it."""

    def __init__(self, system="si", case=None, **changes):
        self.rating = rating.rate(case or oil_cooler(**changes))
        intervals = uncertainty.propagate(self.rating.case, self.rating)
        self.arguments = (self.rating, intervals, findings.judge(self.rating, intervals, system=system), system)

    @property
    def sections(self):
        return {section.key: section for section in sections(*self.arguments)}

    def text(self, *keys):
        return report_text(section for key, section in self.sections.items() if not keys or key in keys)

    def table(self, key, number=0):
        return [block for block in self.sections[key].blocks if isinstance(block, blocks.Table)][number]

    def columns(self):
        """Of the exchanger's inputs: what was typed, and what was taken instead."""
        block = next(block for block in self.sections["inputs"].blocks if isinstance(block, blocks.Columns))
        return block.tables[0], block.tables[-1]

    def figure(self, key):
        return next(block for block in self.sections[key].blocks if not isinstance(block, (str, blocks.Table)))

    def pdf(self):
        return report_pdf(*self.arguments)


@pytest.fixture(scope="module")
def cooler():
    return Rated()


@pytest.fixture(scope="module")
def pages(cooler):
    return [" ".join(page.extract_text().split()) for page in pypdf.PdfReader(io.BytesIO(cooler.pdf())).pages]


def row(table, label):
    return next(cells for cells in table.rows if cells[0] == label)


# --- figures in words -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "quantity", "ends", "shown"),
    [
        (73_400.0, "heat_flow", (58_900.0, 91_500.0), "73 kW"),  # ± 16 kW: no tenth is known
        (73_412.0, "heat_flow", (73_000.0, 73_800.0), "73.41 kW"),  # ± 0.4 kW would allow five digits; four are shown
        (73_412.0, "heat_flow", None, "73.41 kW"),
        (333.98, "temperature", (332.55, 335.41), "60.8 °C"),
        (333.98, "temperature", (303.0, 365.0), "61 °C"),
        (18_828.0, "heat_transfer_coefficient", (16_377.0, 21_646.0), "18800 W/m²K"),
        (0.0, "pressure_difference", (0.0, 0.0), "0.000 kPa"),
    ],
)
def test_a_figure_has_as_many_digits_as_its_interval_allows(value, quantity, ends, shown):
    assert words.Words("si").best(value, quantity, ends) == shown


def test_an_interval_is_shown_to_the_digits_of_its_figure():
    assert words.Words("si").span(73_400.0, "heat_flow", (58_900.0, 91_500.0)) == "59 to 92"
    assert words.Words("us").span(333.98, "temperature", (332.55, 335.41)) == "138.9 to 144.1"


def test_no_figure_is_a_negative_zero():
    assert words.rounded(-0.04, -1) == "0.0"


def test_an_input_is_shown_as_typed_and_as_meant():
    typed = oil_cooler().inside
    assert words.Words("si").typed(typed.flow) == "12 m3/h"
    assert words.Words("us").typed(typed.flow) == "12 m3/h (= 52.83 gpm)"
    # 6 t/h are 6000 kg/h: nothing is gained by saying so
    assert words.Words("si").typed(oil_cooler().outside.flow) == "6 t/h ± 3 %"


def test_relations_are_named_with_their_authors_capitals(cooler):
    assert words.relation_name(REGISTER["dittus_boelter"]) == "Dittus Boelter"
    assert words.limits_of(REGISTER["gnielinski_1976"]) == "Re 3000 to 5000000; Pr 0.5 to 2000"


# --- sections ---------------------------------------------------------------------------------------------------------


def test_the_sections_stand_in_reading_order(cooler):
    assert tuple(cooler.sections) == KEYS


def test_an_unknown_system_is_refused_with_the_known_ones(cooler):
    with pytest.raises(ValueError, match='"imperial" is not a system of units; allowed are si, us, metric'):
        sections(*cooler.arguments[:3], "imperial")


def test_the_answer_says_outlet_duty_verdict_and_how_sure(cooler):
    answer = cooler.sections["answer"].blocks[0]
    T_out, duty = cooler.rating.fouled.T_out["outside"] - 273.15, cooler.rating.fouled.duty / 1e3
    assert answer.startswith("E-1402 meets what is required: fouled, the annulus (lube oil) leaves at ")
    assert float(re.search(r"leaves at ([\d.]+) °C", answer)[1]) == pytest.approx(T_out, abs=0.05)
    assert float(re.search(r"([\d.]+) K below the required 60\.0 °C", answer)[1]) == pytest.approx(60 - T_out, abs=0.05)
    assert float(re.search(r"duty of ([\d.]+) kW", answer)[1]) == pytest.approx(duty, abs=0.5)
    assert re.search(r"chance that it meets this is (about \d+|above 99) %\.$", answer)


def test_a_missed_outlet_is_called_missed():
    answer = Rated(outside__T_out="50 degC").sections["answer"].blocks[0]
    assert answer.startswith("E-1402 misses what is required")
    assert "K too hot for the required 50.0 °C" in answer
    assert answer.endswith("is below 1 %.")


def test_a_cold_side_that_falls_short_is_too_cold():
    answer = Rated(outside__T_out=None, inside__T_out="35 degC").sections["answer"].blocks[0]
    assert "the inner pipe (Water) leaves at" in answer
    assert "K too cold for the required 35.0 °C" in answer


def test_without_a_requirement_nothing_is_met_or_missed():
    rated = Rated(outside__T_out=None)
    assert "nothing to meet or to miss" in rated.sections["answer"].blocks[0]
    assert not [cells for cells in rated.table("results").rows if cells[0] == "U required"]


def test_a_drop_is_held_against_its_allowance(cooler):
    assert "under the allowed 70.0 kPa" in cooler.text("answer")
    assert "no allowed drop is stated" in cooler.text("answer")
    assert "over the allowed 5.00 kPa" in Rated(inside__dp_allowed="5 kPa").text("answer")


def test_inputs_are_shown_as_typed_with_their_origin(cooler):
    streams, (typed, taken) = cooler.table("inputs"), cooler.columns()
    assert row(streams, "Flow") == ("Flow", "12 m3/h", "6 t/h ± 3 %")
    assert row(streams, "Fouling resistance")[2] == "0 m²K/W, assumed: no fouling, since none is stated"
    assert row(streams, "Required outlet temperature")[1] == "not stated"
    assert row(typed, "Legs in series") == ("Legs in series", "8")
    size = "nominal size 2, schedule 40: outside diameter 60.3 mm, inside diameter 52.48 mm [1]"
    assert row(typed, "Inner pipe")[1] == size
    assert row(taken, "Roughness of the annulus")[1:] == ("0.045 mm", "commercial steel pipe (common practice)")
    assert len(cooler.table("inputs", 1).rows) == 3


def test_no_default_is_shown_of_a_field_that_decides_nothing(cooler):
    def taken(rated):
        return [cells[0] for cells in rated.columns()[1].rows]

    assert "Orientation" not in taken(cooler)  # no steam condenses
    assert "Atmospheric pressure" in taken(cooler)  # pressures are gauge
    assert "Atmospheric pressure" not in taken(Rated(inside__p_in="5 bara", outside__p_in="7 bara"))


def test_sizes_from_tables_are_told_in_the_units_of_the_report():
    typed, _ = Rated("us").columns()
    assert "outside diameter 2.374 in" in row(typed, "Inner pipe")[1]  # 2 3/8 in


def test_limits_are_shown_where_they_are_stated(cooler):
    assert "No design pressure" in cooler.text("inputs")
    assert "Design pressure, inside" in Rated(limits__inside_design_pressure="10 barg").text("inputs")


def test_clean_and_fouled_stand_side_by_side_with_intervals(cooler):
    cells = row(cooler.table("results"), "Duty")
    for figure, state in ((cells[1], "clean"), (cells[3], "fouled")):
        assert float(figure.split()[0]) == pytest.approx(cooler.rating.states[state].duty / 1e3, rel=0.01)
    low, high = (float(end) for end in cells[4].split(" to "))
    assert low < float(cells[3].split()[0]) < high


def test_shares_of_the_resistance_sum_to_one(cooler):
    for column in (2, 4):
        shares = [float(cells[column].split()[0]) for cells in cooler.table("resistances").rows]
        assert sum(shares[:-1]) == pytest.approx(shares[-1], abs=0.3)
        assert shares[-1] == 100.0


def test_drop_parts_stand_above_their_total(cooler):
    table = cooler.table("drops")
    labels = [cells[0] for cells in table.rows]
    assert labels.index("Friction") < labels.index("Total") < labels.index("Allowed")
    assert row(table, "Used of the allowed")[1:] == ("48 %", "48 %", "–", "–")


def test_methods_stand_beside_each_other_or_say_why_not(cooler):
    assert [cells[0] for cells in cooler.table("methods").rows] == [
        "Cell by cell, local properties",
        "ε-NTU, mean properties",
        "LMTD and F, mean properties",
    ]
    split = Rated(exchanger__banks_in_parallel={"inside": 1, "outside": 3}, exchanger__legs_in_series=3)
    assert "LMTD and F, mean properties: not possible, F of this arrangement" in split.text("methods").replace(
        "\n", " "
    )


@pytest.fixture(scope="module")
def crude():
    return Rated(case=load_case(SAMPLES / "crude-preheat.json"))


def test_second_opinions_stand_beside_films_and_drops_with_their_spread(crude):
    opinions = crude.table("methods", 1)
    of = {(cells[0], cells[1]): cells for cells in opinions.rows}
    assert {("Shell side film", "Kern film"), ("Shell side drop", "Kern drop")} <= set(of)
    assert ("Shell side drop", "Gaddis Gnielinski drop") in of
    assert "4 velocity heads" in next(by for figure, by in of if figure == "Tube side drop")
    side = crude.rating.fouled.sides["outside"]
    off = 100 * (side.second_opinion_drops["kern_drop"] / side.dp - 1)
    assert of["Shell side drop", "Kern drop"][3] == f"{off:+.0f} %"
    assert f"shell side drop +0 % to {off:+.0f} %" in crude.text("methods").replace("\n", " ")


def test_every_relation_and_coefficient_behind_the_figures_is_listed(cooler, crude):
    def listed(rated):
        return {cells[0].partition(":")[0]: cells[1] for cells in rated.table("relations").rows}

    pipe, shell = listed(cooler), listed(crude)
    assert pipe["Wall factor friction"] == "Inner pipe, Annulus"
    assert (pipe["Wall factor liquid turbulent"], pipe["Wall factor liquid laminar"]) == ("Inner pipe", "Annulus")
    assert {"Annulus laminar friction", "Churchill"} <= set(pipe)
    assert {"Taborek j", "Taborek f", "Bell Delaware drop"} <= set(shell)
    assert "return bend" in cooler.text("relations").replace("\n", " ")
    assert "each pass 2.5" in crude.text("relations").replace("\n", " ")
    assert "Fin efficiency" in listed(Rated(case=load_case(SAMPLES / "finned-hairpins-in-parallel.json")))


def test_no_relation_of_a_drop_is_listed_where_none_is_rated():
    heater = Rated(case=load_case(SAMPLES / "steam-heater-that-stalls.json"))
    sides = {cells[0].partition(":")[0]: cells[1] for cells in heater.table("relations").rows}
    assert not {"Bell Delaware drop", "Taborek f"} & set(sides)
    assert sides["Churchill"] == "Tube side"
    assert "4.5 barg ± 0.1 bar" in heater.text("inputs")  # what was typed of the steam


def test_a_finding_gives_no_figure_twice(cooler):
    found = {finding.code: finding for verdict in cooler.arguments[2] for finding in verdict.findings}[
        "outlet-overshoots"
    ]
    told = next(cells[1] for cells in cooler.table("findings").rows if "[outlet-overshoots" in cells[1])
    for what, figure in found.because.items():
        assert told.count(figure) == max(found.says.count(figure), 1), what


def test_findings_stand_by_grade_with_action_and_source():
    rated = Rated(outside__T_out="50 degC", inside__dp_allowed="5 kPa")
    grades = [cells[0] for cells in rated.table("findings").rows]
    order = list(findings.GRADES)
    assert grades == sorted(grades, key=order.index)
    assert "act" in grades
    for _, found, action in rated.table("findings").rows[:3]:
        assert re.search(r"\[[a-z-]+(, [\w.]+)?\]$", found)
        assert " Source: " in action


def test_what_was_not_checked_is_named(cooler):
    text = cooler.text("not_checked").replace("\n", " ")
    assert "limits.inside_design_pressure is not stated" in text
    assert "mechanical design" in text
    assert "relief" in text


def test_every_cited_source_stands_in_the_list(cooler):
    everything = cooler.text()
    listed = {cells[0] for cells in cooler.table("sources").rows}
    assert set(re.findall(r"\[\d+\]", everything)) == listed
    assert {cells[2] for cells in cooler.table("sources").rows} <= {"checked", "not checked", "–"}


def test_the_chart_holds_both_fluids_both_wall_faces_and_the_regimes(cooler):
    chart = cooler.figure("profile")
    assert len(chart.lines) == 4
    assert len({(line.dash, line.marker) for line in chart.lines}) == 4
    assert [strip.name for strip in chart.strips] == ["Inner pipe", "Annulus"]
    for strip in chart.strips:
        assert strip.runs[0][0] == 0
        assert strip.runs[-1][1] == 1
        assert all(run[1] == after[0] for run, after in pairwise(strip.runs))
    assert len(chart.marks) == 7


def test_the_scheme_tells_the_hot_side_the_legs_and_the_banks():
    rated = Rated(exchanger__banks_in_parallel={"inside": 1, "outside": 3}, exchanger__legs_in_series=3)
    scheme = rated.figure("scheme")
    assert (scheme.legs, scheme.banks, scheme.counter) == (3, 3, True)
    assert (scheme.flows["inside"].hot, scheme.flows["outside"].hot) == (False, True)
    assert (scheme.flows["inside"].split, scheme.flows["outside"].split) == (False, True)


def test_a_case_without_an_answer_still_gives_a_report():
    rated = Rated(**BOILS)
    assert tuple(rated.sections) == (
        "identity", "answer", "scheme", "inputs", "findings", "assumptions", "not_checked", "sources", "cautions",
        "signatures",
    )  # fmt: skip
    assert rated.sections["answer"].blocks[0].startswith("No answer: ")
    assert "boils" in rated.sections["answer"].blocks[0]
    assert rated.pdf().startswith(b"%PDF")


@pytest.mark.parametrize("system", ["si", "us", "metric"])
def test_every_system_of_units_carries_through(system):
    text = Rated(system).text("results", "drops")
    units = {"si": ("kW", "°C", "kPa"), "us": ("Btu/h", "°F", "psi"), "metric": ("kcal/h", "°C", "kgf/cm²")}
    for unit in units[system]:
        assert f" {unit}" in text
    assert "nan" not in text.lower()


# --- text -------------------------------------------------------------------------------------------------------------


def test_text_stays_within_its_width(cooler):
    for width in (80, 110):
        assert max(len(line) for line in report_text(sections(*cooler.arguments), width).splitlines()) <= width


# --- PDF --------------------------------------------------------------------------------------------------------------


def test_the_pdf_holds_the_answer_the_cautions_and_the_signature_lines(cooler, pages):
    text = " ".join(pages)
    assert "Rating of E-1402" in text
    assert " ".join(cooler.sections["answer"].blocks[0].split()) in text
    assert "the responsible engineer, who verifies" in text
    assert "the local code in force and licensed practice" in text
    for line in ("Prepared", "Checked", "Approved"):
        assert line in pages[-1]


def test_every_page_carries_tag_hash_version_and_its_number(cooler, pages):
    for number, text in enumerate(pages, 1):
        assert "E-1402" in text
        assert cooler.rating.case.input_hash in text
        assert f"page {number} of {len(pages)}" in text
        assert f"Countercheck {__version__}" in text


@pytest.mark.parametrize(("sample", "most"), [("gear-oil-turning-laminar", 4), ("crude-preheat", 5)])
@pytest.mark.parametrize("system", ["si", "us"])
def test_a_double_pipe_takes_two_to_four_pages_and_a_shell_five_with_all_its_studies(sample, most, system):
    rated = Rated(system, case=load_case(SAMPLES / f"{sample}.json"))
    pdf = report_pdf(*rated.arguments, studied(rated.rating.case, system))
    assert 2 <= len(pypdf.PdfReader(io.BytesIO(pdf)).pages) <= most


def test_the_same_input_gives_the_same_bytes(cooler):
    assert cooler.pdf() == Rated().pdf()


def test_reports_made_at_once_are_alike(cooler):
    with ThreadPoolExecutor(4) as pool:
        made = list(pool.map(lambda _: cooler.pdf(), range(8)))
    assert set(made) == {cooler.pdf()}


def test_every_font_is_embedded(cooler):
    for page in pypdf.PdfReader(io.BytesIO(cooler.pdf())).pages:
        for font in page["/Resources"]["/Font"].values():
            font = font.get_object()
            if font["/BaseFont"] != "/Helvetica":  # named by the format's default, not used
                assert "/FontFile2" in font["/FontDescriptor"]
            assert "DejaVu" in font["/BaseFont"] or font["/BaseFont"] == "/Helvetica"


def test_text_of_the_user_is_text_and_not_markup():
    tag = "<b>E&1</b> ½ <img src=x>"
    notes = "first & <i>second</i>\n" + "w" * 400
    rated = Rated(tag=tag, notes=notes, plant="x" * 190, service="<para>")
    text = " ".join(pypdf.PdfReader(io.BytesIO(rated.pdf())).pages[0].extract_text().split())
    assert f"Rating of {tag}" in text
    assert "<para>" in text


def test_revision_and_author_are_printed():
    rated = Rated(revision="B2", prepared_by="A. Engineer")
    reader = pypdf.PdfReader(io.BytesIO(rated.pdf()))
    assert "E-1402, revision B2" in reader.pages[1].extract_text()
    assert "A. Engineer" in reader.pages[-1].extract_text()


@pytest.mark.skipif(shutil.which("pdftotext") is None, reason="needs pdftotext (poppler-utils) to see where words end")
def test_nothing_is_written_beyond_the_margins(tmp_path):
    long = Rated("metric", plant="x" * 190, tag="T" * 60, service="words " * 30, notes="n" * 900)
    (tmp_path / "report.pdf").write_bytes(long.pdf())
    boxes = subprocess.run(
        ["pdftotext", "-bbox", str(tmp_path / "report.pdf"), "-"], capture_output=True, text=True, check=True
    ).stdout
    words_seen = re.findall(r'<word xMin="([\d.]+)" yMin="([\d.]+)" xMax="([\d.]+)" yMax="([\d.]+)"', boxes)
    assert len(words_seen) > 500
    (width, height), mm = A4, 72 / 25.4
    for word in words_seen:
        left, top, right, bottom = (float(edge) for edge in word)
        assert left >= 17 * mm - 1
        assert right <= width - 17 * mm + 1
        assert top >= 8 * mm
        assert bottom <= height - 6 * mm


@pytest.mark.parametrize("legs", [1, 2, 6, 7, 8, 9, 40, 41])
def test_legs_left_out_of_a_scheme_are_even_in_number(legs):
    shown = shown_legs(legs)
    assert shown[0] == 0
    assert shown[-1] == legs - 1
    assert all((after - leg - 1) % 2 == 0 for leg, after in pairwise(shown))


@pytest.mark.parametrize(("low", "high"), [(27.0, 68.0), (-40.0, -39.9), (80.1, 154.4), (0.0, 1000.0), (5.0, 5.0)])
def test_ticks_enclose_the_data(low, high):
    found = ticks(low, high)
    assert found[0] <= low + 1e-9
    assert found[-1] >= high - 1e-9
    assert 2 <= len(found) <= 9
