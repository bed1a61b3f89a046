"""What is handed over: sections built once, and the PDF and the plain text drawn from them."""

from engine.report.blocks import Chart, DoublePipeScheme, Section, ShellScheme, Table
from engine.report.pdf import report_pdf
from engine.report.sections import sections
from engine.report.studies import studied
from engine.report.text import report_text

__all__ = [
    "Chart",
    "DoublePipeScheme",
    "Section",
    "ShellScheme",
    "Table",
    "report_pdf",
    "report_text",
    "sections",
    "studied",
]
