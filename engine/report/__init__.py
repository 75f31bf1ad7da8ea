"""The report: what was entered, what was found, and what it does not say, as a PDF."""

from engine.report.document import report_pdf
from engine.report.writing import write_report

__all__ = ["report_pdf", "write_report"]
