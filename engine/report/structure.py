"""The document's structure: headings, paragraphs, lists, tables, figures as a tree.

What is drawn for an element stands between marks in the page's content; the tree of
the elements is written when the document is finished (ISO 32000-1, 14.7 and 14.8). All
else that is drawn is an artifact.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

from reportlab.pdfbase.pdfdoc import (
    PDFArray,
    PDFDictionary,
    PDFName,
    PDFString,
    PDFtrue,
)

from engine.printed_text import one_line
from engine.report.directions import is_right_to_left
from engine.report.scripts import ScriptCanvas

#: Characters of the text that stands for a figure.
_MOST_ALTERNATIVE = 600

#: Elements that stand together in one of another kind.
_TOGETHER = {"LI": "L", "TOCI": "TOC"}

#: What holds the content of an element that may not hold it itself.
_WITHIN = {"LI": "LBody", "TOCI": "Reference"}


@dataclass(eq=False)
class Element:
    """A part of the document, of a standard structure type.

    `marks` are page and number of what is drawn for it; `alternative` stands for a
    figure where it cannot be seen, `actual` for text that is drawn in another order
    than it is read. An element has parts or marks.
    """

    kind: str
    alternative: str = ""
    actual: str = ""
    parts: list[Element] = field(default_factory=list)
    marks: list[tuple[int, int]] = field(default_factory=list)

    def add(self, kind: str) -> Element:
        """A further part at the end."""
        part = Element(kind)
        self.parts.append(part)
        return part


class StructuredCanvas(ScriptCanvas):
    """A canvas that knows what element it draws for, and writes the tree when saved."""

    def __init__(self, *arguments: Any, **options: Any) -> None:
        super().__init__(*arguments, **options)
        self.document = Element("Document")
        self._pages: list[list[Element]] = []
        self._numbered: list[Element] = []
        self._within_marks = False
        self._placed: dict[Element, Element] = {}

    @contextmanager
    def drawn_for(self, element: Element) -> Iterator[None]:
        """What is drawn inside belongs to an element, which may have drawn before.

        An element that has no place in the tree yet comes at the end.
        """
        holder = self._place(element)
        holder.marks.append((len(self._pages), len(self._numbered)))
        mark = f"/{holder.kind} <</MCID {len(self._numbered)}>> BDC"
        self._numbered.append(holder)
        with self._marked(mark):
            yield

    @contextmanager
    def artifact(self, kind: str = "Layout") -> Iterator[None]:
        """What is drawn inside says nothing to a reader who cannot see it."""
        with self._marked(f"/Artifact <</Type /{kind}>> BDC"):
            yield

    @contextmanager
    def _marked(self, mark: str) -> Iterator[None]:
        assert not self._within_marks, mark
        self._within_marks = True
        self._code.append(mark)
        yield
        self._code.append("EMC")
        self._within_marks = False

    def begin(self, element: Element) -> None:
        """Give an element its place in the tree before anything is drawn for it."""
        self._place(element)

    def _place(self, element: Element) -> Element:
        """What holds the content of an element."""
        if element in self._placed:
            return self._placed[element]
        parent = self.document
        together = _TOGETHER.get(element.kind)
        if together is not None:
            last = parent.parts[-1] if parent.parts else None
            parent = (
                last
                if last is not None and last.kind == together
                else parent.add(together)
            )
        if element.kind not in ("TH", "TD"):
            parent.parts.append(element)
        within = _WITHIN.get(element.kind)
        holder = element if within is None else element.add(within)
        self._placed[element] = holder
        return holder

    def showPage(self) -> None:  # noqa: N802
        super().showPage()
        page = self._doc.Pages.pages[-1]
        page.__NoDefault__ = [*page.__NoDefault__, "StructParents", "Tabs"]
        page.StructParents = len(self._pages)
        page.Tabs = PDFName("S")
        self._pages.append(self._numbered)
        self._numbered = []

    def save(self) -> None:
        """Write the tree, then the document."""
        if len(self._code):
            self.showPage()
        self._write_tree()
        super().save()

    def _write_tree(self) -> None:
        document = self._doc
        root = PDFDictionary({"Type": PDFName("StructTreeRoot")})
        reference = document.Reference(root)
        written: dict[Element, object] = {}
        root.dict["K"] = self._written(self.document, reference, written)
        numbers: list[object] = []
        for k, elements in enumerate(self._pages):
            listed = PDFArray([written[element] for element in elements])
            numbers += [k, document.Reference(listed)]
        tree = PDFDictionary({"Nums": PDFArray(numbers)})
        root.dict["ParentTree"] = document.Reference(tree)
        root.dict["ParentTreeNextKey"] = len(self._pages)
        document.Catalog.StructTreeRoot = root
        document.Catalog.MarkInfo = PDFDictionary({"Marked": PDFtrue})

    def _written(
        self, element: Element, parent: object, written: dict[Element, object]
    ) -> object:
        """The reference of an element, which is written with all its parts."""
        document = self._doc
        entry = PDFDictionary(
            {"Type": PDFName("StructElem"), "S": PDFName(element.kind), "P": parent}
        )
        written[element] = reference = document.Reference(entry)
        if element.alternative:
            text = one_line(element.alternative)[:_MOST_ALTERNATIVE]
            entry.dict["Alt"] = PDFString(text)
        if element.actual:
            entry.dict["ActualText"] = PDFString(element.actual)
        if element.kind == "TH":
            scope = {"O": PDFName("Table"), "Scope": PDFName("Column")}
            entry.dict["A"] = PDFDictionary(scope)
        if element.parts:
            parts = [self._written(part, reference, written) for part in element.parts]
            entry.dict["K"] = PDFArray(parts)
        elif element.marks:
            entry.dict.update(self._kids(element.marks))
        return reference

    def _kids(self, marks: list[tuple[int, int]]) -> dict[str, object]:
        """What an element that has been drawn for says of where."""
        pages = {page for page, _ in marks}
        first = self._doc.Reference(self._doc.Pages.pages[marks[0][0]])
        if len(pages) == 1:
            return {"Pg": first, "K": PDFArray([number for _, number in marks])}
        kids = [
            PDFDictionary(
                {
                    "Type": PDFName("MCR"),
                    "Pg": self._doc.Reference(self._doc.Pages.pages[page]),
                    "MCID": number,
                }
            )
            for page, number in marks
        ]
        return {"Pg": first, "K": PDFArray(kids)}


class DraftCanvas(StructuredCanvas):
    """Draws as the other one does, and writes nothing."""

    def save(self) -> None:
        """Leave the file empty."""


class TableMarks:
    """Marks the cells of one table while it draws itself, on however many pages.

    Parameters
    ----------
    rows : list of int
        The row of the table to which each row of cells belongs, the head first: a
        long row takes several. The head comes again on each page, as an artifact.
    """

    def __init__(self, rows: list[int]) -> None:
        self._rows = rows
        self._table = Element("Table")
        self._lines: list[list[Element]] = []
        self._next = 0
        self._is_again = False
        self._open: Any = None

    def __call__(self, table: Any, what: str, *told: Any) -> None:
        canvas: StructuredCanvas = table.canv
        if what == "startTable":
            canvas.begin(self._table)
            self._is_again = self._next > 0
        elif what in ("startBG", "startLines"):
            self._enter(canvas.artifact())
        elif what == "startCell":
            self._start_cell(canvas, *told[:3])
        elif what in ("endBG", "endLines", "endCell"):
            self._leave()
        elif what == "endRow" and not self._is_again:
            self._next += 1
        elif what == "endRow":
            self._is_again = False

    def _start_cell(
        self, canvas: StructuredCanvas, _row: int, column: int, text: str
    ) -> None:
        if self._is_again:
            self._enter(canvas.artifact("Pagination"))
            return
        row = self._rows[self._next]
        if row == len(self._lines):
            self._lines.append([])
            self._table.add("TR")
        cells = self._lines[row]
        if column == len(cells):
            cells.append(self._table.parts[row].add("TH" if row == 0 else "TD"))
        if is_right_to_left(text):
            said = cells[column].actual
            cells[column].actual = f"{said} {one_line(text)}".strip()
        if text.strip():
            self._enter(canvas.drawn_for(cells[column]))

    def _enter(self, marks: Any) -> None:
        marks.__enter__()
        self._open = marks

    def _leave(self) -> None:
        if self._open is not None:
            self._open.__exit__(None, None, None)
            self._open = None
