"""Countercheck's engine: rate double-pipe and shell-and-tube exchangers, and say how sure the figures are.

Everything that the app, the command line and notebooks may use stands in `__all__`. A name is resolved on first use,
so that `python -m engine --help` loads no numpy.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

__version__ = "0.1.0"

_WHERE = {
    "Bundle": "report.blocks",
    "Case": "case",
    "CaseError": "stated",
    "Chart": "report.blocks",
    "Choice": "stated",
    "Columns": "report.blocks",
    "Count": "stated",
    "EXCHANGERS": "case",
    "Input": "stated",
    "METALS": "exchangers.standard_sizes",
    "MOST_BIDS": "report.bids",
    "PROOF_KINDS": "proofs",
    "Problem": "stated",
    "Question": "studies",
    "Rating": "states",
    "SIDES": "stated",
    "SYSTEMS": "units",
    "Sheet": "sheet",
    "Stated": "stated",
    "Table": "report.blocks",
    "UnitError": "units",
    "Words": "stated",
    "answer": "studies",
    "arithmetic": "datasheet.arithmetic",
    "around": "studies",
    "asked": "studies",
    "bids_side_by_side": "report.bids",
    "blank_csv": "sheet.table",
    "blank_xlsx": "sheet.table",
    "case_of_sheet": "datasheet.conversion",
    "check_csv": "report.datasheet",
    "check_datasheet": "datasheet",
    "check_json": "datasheet",
    "dotted": "stated",
    "dump_case": "casefile",
    "judge": "findings",
    "limits_of": "studies",
    "load_case": "casefile",
    "load_sheet": "sheet.table",
    "measured_exchanger": "proofs.shell_and_tube",
    "nested_sheet": "sheet.typed",
    "offered": "fluids",
    "operating_table": "studies",
    "parse": "units",
    "parse_case": "casefile",
    "pasted_sheet": "sheet.typed",
    "proof_table": "proofs",
    "propagate": "uncertainty",
    "property_checks": "proofs.fluids",
    "questions": "studies",
    "rate": "rating",
    "rate_points": "rating",
    "raw_case": "casefile",
    "raw_of": "casefile",
    "raw_sheet": "sheet.typed",
    "read_raw": "casefile",
    "read_sheet": "sheet.table",
    "refinements": "proofs.refinement",
    "report_pdf": "report",
    "result_json": "result",
    "save_case": "casefile",
    "sections": "report",
    "sheet_as_typed": "sheet.typed",
    "sheet_csv": "sheet.table",
    "sheet_fields": "sheet",
    "sheet_of_rating": "datasheet.conversion",
    "sheet_pdf": "report.pdf",
    "sheet_sections": "report.datasheet",
    "sheet_xlsx": "sheet.table",
    "show": "units",
    "stated_bundle": "report.inputs",
    "studied": "report",
    "study_sections": "report.studies",
    "sweep": "studies",
    "swept": "report.studies",
    "to_unit": "units",
    "told": "studies",
    "unit_of": "units",
    "upgraded": "casefile",
    "variables": "studies",
}

__all__ = sorted([*_WHERE, "__version__"])


def __getattr__(name: str) -> Any:
    if name in _WHERE:
        value = getattr(import_module(f"engine.{_WHERE[name]}"), name)
        globals()[name] = value
        return value
    raise AttributeError(f"the engine offers no {name!r}; it offers {', '.join(__all__)}")
