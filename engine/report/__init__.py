"""The report: what was entered, what was found, and what it does not say, as a PDF."""

from engine.report.document import report_pdf
from engine.report.matter import Matter
from engine.report.writing import computed_matter, write_report

__all__ = ["Matter", "computed_matter", "report_pdf", "write_report"]
