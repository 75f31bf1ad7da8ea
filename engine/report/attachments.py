"""Files inside the PDF: the layout itself, grid values, tables of results."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from reportlab.pdfbase.pdfdoc import (
    PDFArray,
    PDFDictionary,
    PDFName,
    PDFStream,
    PDFString,
    PDFZCompress,
)
from reportlab.pdfgen.canvas import Canvas

from engine.printed_text import one_line


@dataclass(frozen=True)
class Attachment:
    """A file inside the PDF.

    `name` is plain ASCII, `kind` a MIME type, `about` what a reader is told.
    """

    name: str
    kind: str
    about: str
    content: bytes

    @cached_property
    def sha256(self) -> str:
        """Of the content, as 64 hexadecimal digits."""
        return hashlib.sha256(self.content).hexdigest()


def attach(canvas: Canvas, attachments: Sequence[Attachment]) -> None:
    """Put files into the document that a canvas makes.

    Raises
    ------
    ValueError
        When two have one name, or a name is not plain ASCII.

    Notes
    -----
    The name tree EmbeddedFiles of ISO 32000-1, 7.7.4 and 7.11.4, sorted by name. No
    dates are written: equal input gives equal bytes.
    """
    if not attachments:
        return
    names = [a.name for a in attachments]
    if len(set(names)) < len(names) or not all(n.isascii() for n in names):
        raise ValueError(f"attachments need different ASCII names, not {names}")
    document = canvas._doc
    pairs: list[object] = []
    for each in sorted(attachments, key=lambda a: a.name):
        parameters = PDFDictionary({"Size": len(each.content)})
        head = PDFDictionary(
            {
                "Type": PDFName("EmbeddedFile"),
                "Subtype": PDFName(each.kind.replace("/", "#2F")),
                "Params": parameters,
            }
        )
        stream = PDFStream(head, each.content, [PDFZCompress])
        files = PDFDictionary({"F": document.Reference(stream)})
        entry = PDFDictionary(
            {
                "Type": PDFName("Filespec"),
                "F": PDFString(each.name),
                "UF": PDFString(each.name),
                "Desc": PDFString(one_line(each.about)),
                "EF": files,
            }
        )
        pairs += [PDFString(each.name), document.Reference(entry)]
    tree = PDFDictionary({"Names": PDFArray(pairs)})
    canvas.setCatalogEntry("Names", PDFDictionary({"EmbeddedFiles": tree}))
