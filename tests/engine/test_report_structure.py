"""The document's structure, read back: marks and elements agree.

ISO 32000-1, 14.7 (logical structure) and 14.8 (tagged PDF; standard structure types).
"""

from __future__ import annotations

import io
from functools import cache
from itertools import pairwise

import pytest
from pypdf import PdfReader
from pypdf.generic import ContentStream, DictionaryObject
from reported_room import matter
from test_report_hard_cases import great, picture, text_of, with_title

from engine.report.choices import Choices
from engine.report.document import report_pdf

#: What may stand under what, of the types used here.
UNDER = {
    "Document": {"H1", "H2", "H3", "P", "L", "TOC", "Table", "Figure"},
    "L": {"LI"},
    "LI": {"LBody"},
    "TOC": {"TOCI"},
    "TOCI": {"Reference"},
    "Table": {"TR"},
    "TR": {"TH", "TD"},
}

#: Operators that put something on the page.
PAINTING = {
    b"f", b"F", b"f*", b"B", b"B*", b"b", b"b*", b"S", b"s", b"Tj", b"TJ", b"'", b'"',
    b"Do", b"sh", b"INLINE IMAGE",
}  # fmt: skip


@cache
def reader(kind="report"):
    return PdfReader(io.BytesIO(report_pdf(matter(), Choices(kind=kind))))


def tree(of):
    return of.trailer["/Root"]["/StructTreeRoot"]


def elements(element):
    """Every element below and with one, in reading order."""
    yield element
    for kid in kids(element):
        if isinstance(kid, DictionaryObject) and kid.get("/S"):
            yield from elements(kid)


def kids(element):
    found = element.get("/K", [])
    found = found if isinstance(found, list) else [found]
    return [kid.get_object() for kid in found]


def kind_of(element):
    return element["/S"][1:]


def marks_of(element):
    """Page and number of each mark of an element."""
    for kid in kids(element):
        if isinstance(kid, int):
            yield element.raw_get("/Pg").idnum, int(kid)
        elif kid.get("/Type") == "/MCR":
            yield kid.raw_get("/Pg").idnum, int(kid["/MCID"])


def marks_on(page, of):
    """Marks in a page's content; all that is painted must stand between marks."""
    found, depth = [], 0
    for operands, operator in ContentStream(page.get_contents(), of).operations:
        if operator in (b"BDC", b"BMC"):
            assert depth == 0
            depth += 1
            if operands[0] != "/Artifact":
                found.append((operands[0][1:], int(operands[1]["/MCID"])))
        elif operator == b"EMC":
            depth -= 1
        elif operator in PAINTING:
            assert depth == 1, operator
    assert depth == 0
    return found


def check(of):
    """Marks, elements and the parent tree agree."""
    root = tree(of)
    assert of.trailer["/Root"]["/MarkInfo"]["/Marked"].value is True
    (document,) = kids(root)
    assert kind_of(document) == "Document"
    assert document["/P"] == root
    told = {}
    for element in elements(document):
        assert element["/Type"] == "/StructElem"
        for kid in kids(element):
            if isinstance(kid, DictionaryObject) and "/S" in kid:
                assert kind_of(kid) in UNDER[kind_of(element)]
                assert kid["/P"].indirect_reference == element.indirect_reference
        for mark in marks_of(element):
            assert mark not in told
            told[mark] = element
    numbers = root["/ParentTree"]["/Nums"]
    by_page = {int(numbers[k]): numbers[k + 1] for k in range(0, len(numbers), 2)}
    assert len(by_page) == root["/ParentTreeNextKey"] == len(of.pages)
    seen = set()
    for page in of.pages:
        assert page["/Tabs"] == "/S"
        parents = by_page[page["/StructParents"]].get_object()
        marks = marks_on(page, of)
        assert [number for _, number in marks] == list(range(len(parents)))
        for (kind, number), parent in zip(marks, parents, strict=True):
            mark = (page.indirect_reference.idnum, number)
            seen.add(mark)
            assert (
                told[mark].indirect_reference == parent.get_object().indirect_reference
            )
            assert kind_of(told[mark]) == kind
    assert seen == set(told)
    return document


@pytest.mark.parametrize("kind", ["report", "note"])
def test_every_mark_has_its_element_and_every_element_its_place(kind):
    check(reader(kind))


@pytest.mark.parametrize("kind", ["report", "note"])
def test_headings_skip_no_level(kind):
    (document,) = kids(tree(reader(kind)))
    levels = [int(kind_of(e)[1]) for e in kids(document) if kind_of(e)[0] == "H"]
    assert levels[0] == 1
    assert levels.count(1) == 1
    assert all(later - level <= 1 for level, later in pairwise(levels))


@pytest.mark.parametrize("kind", ["report", "note"])
def test_tables_have_one_head_and_even_rows(kind):
    (document,) = kids(tree(reader(kind)))
    tables = [e for e in elements(document) if kind_of(e) == "Table"]
    assert len(tables) >= (20 if kind == "report" else 2)
    for table in tables:
        rows = [[kind_of(cell) for cell in kids(row)] for row in kids(table)]
        assert set(rows[0]) == {"TH"}
        assert all(row == ["TD"] * len(rows[0]) for row in rows[1:])
        for head in kids(kids(table)[0]):
            assert head["/A"]["/Scope"] == "/Column"


@pytest.mark.parametrize("kind", ["report", "note"])
def test_figures_say_what_they_show(kind):
    (document,) = kids(tree(reader(kind)))
    figures = [e for e in elements(document) if kind_of(e) == "Figure"]
    assert len(figures) >= (4 if kind == "report" else 1)
    assert all(len(figure["/Alt"]) > 8 for figure in figures)
    assert any("Rated" in figure["/Alt"] for figure in figures)


def test_long_tables_stay_one_table_over_many_pages():
    """A table of many zones: one element, its head told once."""
    of = PdfReader(io.BytesIO(report_pdf(great(30, 25))))
    document = check(of)
    sizes = {len(kids(e)) for e in elements(document) if kind_of(e) == "Table"}
    assert 31 in sizes
    assert 26 in sizes


def test_a_cell_longer_than_a_page_stays_one_cell():
    document = check(
        PdfReader(io.BytesIO(report_pdf(with_title(client="Quay " * 2000))))
    )
    (table, *_) = (e for e in elements(document) if kind_of(e) == "Table")
    client = kids(table)[2]
    assert [kind_of(cell) for cell in kids(client)] == ["TD", "TD"]
    assert len({page for page, _ in marks_of(kids(client)[1])}) > 1


def test_the_logo_is_a_figure():
    content = report_pdf(with_title(logo=picture()))
    document = check(PdfReader(io.BytesIO(content)))
    figure = next(e for e in elements(document) if kind_of(e) == "Figure")
    assert "Logo" in figure["/Alt"]
    assert "Harbour annex" in text_of(content)
