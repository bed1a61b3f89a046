"""A datasheet in use: read as it is typed or pasted, its arithmetic written out, made a case, made from a rating, bids
side by side."""

from __future__ import annotations

import io
import math
import re
from typing import Any

import numpy as np
import pytest

import engine
from engine import units
from engine.datasheet import Checked
from tests.cases import oil_cooler
from tests.sheets import random_rating, vendor_sheet

SEEDS = (3, 5, 8, 11)


@pytest.fixture(scope="module", params=SEEDS)
def audit(request: pytest.FixtureRequest) -> Any:
    rng = np.random.default_rng(request.param)
    return engine.check_datasheet(vendor_sheet(rng, random_rating(rng)).sheet())


# --- as typed ---------------------------------------------------------------------------------------------------------


def test_a_sheet_is_read_as_far_as_it_can_be_and_says_what_is_wrong_with_the_rest():
    raw = {"inside": {"T_in": "hot", "flow": "3 kg/s", "foo": "1"}, "outside": "x", "duty": "12 kW", "tubes": "7.5"}
    sheet, problems = engine.sheet_as_typed(raw)
    assert sheet.stated() == {"inside.flow": 3.0, "duty": 12000.0}
    assert {problem.path for problem in problems} == {"inside.T_in", "inside.foo", "outside", "tubes"}
    assert raw["inside"]["T_in"] == "hot"


def test_dotted_keys_are_put_in_their_group_and_a_key_given_twice_is_left_to_be_refused():
    raw = {"inside.T_in": "20 degC", "inside": {"T_out": "30 degC"}, "duty": "1 kW"}
    assert engine.nested_sheet(raw) == {"inside": {"T_in": "20 degC", "T_out": "30 degC"}, "duty": "1 kW"}
    twice = {"inside.T_in": "20 degC", "inside": {"T_in": "30 degC"}}
    _, problems = engine.sheet_as_typed(engine.nested_sheet(twice))
    assert [problem.path for problem in problems] == ["inside.T_in"]


PASTED = """
Heat exchanged\t1240 kW
\tTube side\tShell side
Temperature, in [degC]\t27\t68
Temperature, out\t35 degC\t
Total flow\t42 m3/h\t18 t/h
tubes\t240
outside.rho;862 kg/m3
U_clean = 600 W/m2K
Surface:  85 m2
colour\tblue
"""


def test_pasted_rows_are_read_by_key_or_name_with_a_column_for_each_side():
    raw, problems = engine.pasted_sheet(PASTED)
    assert raw == {
        "duty": "1240 kW",
        "inside": {"T_in": "27 degC", "T_out": "35 degC", "flow": "42 m3/h"},
        "outside": {"T_in": "68 degC", "flow": "18 t/h", "rho": "862 kg/m3"},
        "tubes": 240,
        "U_clean": "600 W/m2K",
        "area": "85 m2",
    }
    assert [str(problem) for problem in problems] == ['line 11: "colour" is no field of a datasheet']


def test_a_figure_of_one_side_without_named_columns_is_not_guessed():
    raw, problems = engine.pasted_sheet("Temperature, in\t27 degC\t68 degC")
    assert raw == {}
    assert "head the columns" in problems[0].says


def test_what_is_written_as_csv_is_read_when_it_is_pasted(audit):
    text = engine.sheet_csv(audit.sheet).decode("utf-8-sig")
    raw, problems = engine.pasted_sheet(text)
    assert problems == ()
    assert engine.sheet_as_typed(raw)[0] == audit.sheet
    assert engine.sheet_as_typed(engine.raw_sheet(audit.sheet))[0] == audit.sheet


# --- arithmetic -------------------------------------------------------------------------------------------------------

SUMS = {"A1", "A2", "A3", "A4", "C1", "C2", "C3", "C4", "C10", "D1", "D3", "D6", "D7", "D9", "D16", "D18", "E2"}
"""Checks whose lines are sums and products of what the sheet prints."""


def value_of(formula: str) -> float:
    """A written formula computed in SI; figures are read by the table of units alone."""
    # A sign between two figures has blanks on both sides; a unit has none.
    signs = {" × ": "*", " / ": "/", " − ": "-", " + ": "+", "(": "(", ")": ")", "²": "**2", "π/4": f"{math.pi / 4}"}
    parts = re.split(r"( [×/−+] |[()]|(?<=\))²|π/4)", formula)
    python = "".join(signs.get(part) or (figure(part) if part else "") for part in parts)
    return float(eval(python, {"ln": math.log}))


def figure(text: str) -> str:
    if text.strip() in ("π", "ln"):
        return {"π": repr(math.pi), "ln": "ln"}[text.strip()]
    for quantity in QUANTITIES:
        try:
            return repr(units.parse(text, quantity).value)
        except units.UnitError:
            continue
    raise AssertionError(f"{text!r} is no figure")


QUANTITIES = (
    "temperature_difference", "mass_flow", "volume_flow", "specific_heat", "heat_flow", "area", "length", "density",
    "heat_transfer_coefficient", "fouling_resistance", "viscosity", "conductivity", "mass", "momentum_flux", "fraction",
    "temperature", "velocity", "pressure_difference", "dimensionless",
)  # fmt: skip


def written(c: Checked) -> dict[str, str]:
    """The formulas of a check by what they give."""
    lines = engine.arithmetic(c)
    made = {}
    for line in lines:
        head, _, rest = line.partition(": ")
        if head in ("The sheet", "Recomputed") and " = " in rest:
            formula = rest.rpartition(" = ")[0]
            made[head] = formula.rpartition(": ")[2]
    return made


def test_the_written_arithmetic_gives_what_the_check_computed(audit):
    seen = 0
    for c in audit.checks:
        if c.line is None or c.check.id not in SUMS:
            continue
        for head, formula in written(c).items():
            expected = c.line.sheet if head == "The sheet" else c.line.recomputed
            # Diameters of standard pipes are written to four digits.
            assert value_of(formula) == pytest.approx(expected, rel=5e-3), (c.check.id, c.where, formula)
            seen += 1
    assert seen >= 8


def test_every_comparison_has_its_arithmetic_and_nothing_in_it_is_left_open(audit):
    for c in audit.checks:
        lines = engine.arithmetic(c, "us")
        assert bool(lines) == (c.line is not None)
        assert not any("{" in line or "None" in line for line in lines), lines


# --- a case of a sheet, a sheet of a rating ---------------------------------------------------------------------------


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("system", ["si", "us", "metric"])
def test_a_rating_printed_as_a_sheet_closes_and_rates_to_the_same_duty(seed, system):
    rating = random_rating(np.random.default_rng(seed))
    sheet, problems = engine.sheet_as_typed(engine.sheet_of_rating(rating, system))
    assert problems == ()
    grave = [c.title() for c in engine.check_datasheet(sheet).found if c.grade in ("stop", "act")]
    assert grave == []
    back = engine.rate(engine.parse_case(engine.case_of_sheet(sheet)))
    assert back.fouled.duty == pytest.approx(rating.fouled.duty, rel=5e-3)
    assert back.fouled.area == pytest.approx(rating.fouled.area, rel=5e-3)


def test_a_case_of_a_sheet_states_what_the_sheet_means():
    sheet, _ = engine.sheet_as_typed(
        {
            "tubes": 100,
            "tubes_are": "U-tubes",
            "tema": "AEU",
            "tube_od": "19.05 mm",
            "tube_wall": "2 mm",
            "tube_wall_is": "minimum",
            "tube_length": "5 m",
            "tubesheet_thickness": "50 mm",
            "baffle_cut": "19.55 %",
            "baffle_cut_by": "area",
            "material": "titanium",
            "inside": {"fluid": "Water", "mu": "1 cSt", "rho": "990 kg/m3", "cp": "4.2 kJ/kgK", "k": "0.6 W/mK"},
            "outside": {"fluid": "Steam", "p_in": "3 barg", "T_in": "144 degC", "steam_in": "2 t/h"},
        }
    )
    case = engine.case_of_sheet(sheet)
    exchanger = case["exchanger"]
    assert exchanger["tubes"] == 200
    assert engine.parse(exchanger["tube_wall"], "length").value == pytest.approx(2.22e-3)
    assert engine.parse(exchanger["tube_length"], "length").value == pytest.approx(4.95)
    # A segment of a quarter of the diameter has 19.55 % of the area.
    assert engine.parse(exchanger["baffle_cut"], "fraction").value == pytest.approx(0.25, abs=1e-4)
    assert exchanger["material"] == "titanium"
    constant = case["inside"]["fluid"]["constant"]
    assert engine.parse(constant["mu"], "viscosity").value == pytest.approx(990e-6)
    assert case["outside"] == {"fluid": {"steam": {"p": "3 barg"}}}
    assert case["sheet"]["tubes_are"] == "U-tubes"


def test_a_sheet_with_nothing_on_it_makes_an_empty_case():
    case = engine.case_of_sheet(engine.Sheet())
    assert case["exchanger"] == {"type": "shell-and-tube"}
    with pytest.raises(engine.CaseError):
        engine.parse_case(case)


def test_fins_have_no_field_on_a_sheet():
    fins = {"count": 24, "height": "5 mm", "thickness": "1 mm", "conductivity": "50 W/mK"}
    rating = engine.rate(oil_cooler(exchanger__fins=fins))
    with pytest.raises(ValueError, match="no fields for fins"):
        engine.sheet_of_rating(rating)


# --- bids -------------------------------------------------------------------------------------------------------------


def rows_of(blocks: Any) -> dict[str, tuple[str, ...]]:
    return {row[0]: row[1:] for block in blocks if isinstance(block, engine.Table) for row in block.rows}


def test_bids_stand_side_by_side_on_one_basis():
    rng = np.random.default_rng(21)
    rating = random_rating(rng)
    vendors = {name: vendor_sheet(rng, rating) for name in ("first", "second", "third")}
    audits = {name: engine.check_datasheet(vendor.sheet()) for name, vendor in vendors.items()}
    rows = rows_of(engine.bids_side_by_side(audits, rating.case))
    # Their exchanger and service are the same: so is our rating of them.
    own = [engine.parse(cell, "heat_flow").value for cell in rows["Our duty, fouled"]]
    assert own == pytest.approx([rating.fouled.duty] * 3, rel=5e-3)
    for i, vendor in enumerate(vendors.values()):
        excess = float(rows["Excess of it over service U"][i].removesuffix(" %")) / 100
        assert excess == pytest.approx(vendor.values["excess_area"], abs=0.02)
        assert engine.parse(rows["Surface as printed"][i], "area").value == pytest.approx(
            vendor.values["area"], rel=0.06
        )


def test_a_bid_that_cannot_be_rated_says_why_and_is_compared_all_the_same():
    rng = np.random.default_rng(21)
    vendor = vendor_sheet(rng, random_rating(rng))
    scant, _ = engine.sheet_as_typed({"duty": "800 kW", "area": "40 m2"})
    blocks = engine.bids_side_by_side(
        {"full": engine.check_datasheet(vendor.sheet()), "scant": engine.check_datasheet(scant)}
    )
    rows = rows_of(blocks)
    assert rows["Heat exchanged"][1] == "800 kW"
    assert rows["Our duty, fouled"][1] == "–"
    assert any(isinstance(block, str) and block.startswith("scant could not be rated: ") for block in blocks)


@pytest.mark.parametrize("count", [1, 5])
def test_one_bid_or_five_do_not_stand_side_by_side(count):
    audit = engine.check_datasheet(engine.Sheet())
    with pytest.raises(ValueError, match="allowed are 2 to 4"):
        engine.bids_side_by_side({f"bid {i}": audit for i in range(count)})


# --- on paper ---------------------------------------------------------------------------------------------------------


def test_the_audit_on_paper_holds_answer_arithmetic_and_questions():
    pypdf = pytest.importorskip("pypdf")
    rng = np.random.default_rng(4)
    vendor = vendor_sheet(rng, random_rating(rng))
    vendor = vendor.having({"duty": 1.163 * vendor.values["duty"], "item": "E-<1>"})
    audit = engine.check_datasheet(vendor.sheet())
    paper = engine.sheet_pdf(audit)
    assert paper == engine.sheet_pdf(audit)
    text = " ".join("\n".join(page.extract_text() for page in pypdf.PdfReader(io.BytesIO(paper)).pages).split())
    assert "Datasheet of E-<1>" in text
    assert "Questions to the vendor" in text
    assert "Recomputed: " in text
    for c in audit.found:
        assert c.title() in text
