"""The report: what was entered, what was found, and what it does not say, as a PDF.

Nothing is imported here: the desktop takes fixed texts from `wording`, and what draws
the pages takes long to load. `writing.write_report` writes a report.
"""
