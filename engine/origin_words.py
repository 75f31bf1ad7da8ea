"""Where a value comes from, in words.

Import place: after `origins`.
"""

from __future__ import annotations

from engine.items import Item, ValueOrigin
from engine.layout import Layout
from engine.origins import origin_of


def origin_text(layout: Layout, item: Item, field: str) -> str:
    """Where an item's value comes from; "assumed" where nothing is stated."""
    origin = origin_of(item, field)
    if origin is None:
        return "assumed"
    return told_origin(layout, origin)


def told_origin(layout: Layout, origin: ValueOrigin) -> str:
    """An origin in words: the document with its place, or who, how and when."""
    documents = {document.id: document for document in layout.documents}
    parts: list[str] = [origin.kind]
    if origin.document is not None:
        found = documents.get(origin.document)
        name = found.title if found is not None else origin.document
        revision = f" rev. {found.revision}" if found and found.revision else ""
        parts = [name + revision]
    said = (origin.page, origin.instrument, origin.by, origin.date, origin.note)
    parts += [text for text in said if text]
    return ", ".join(parts)
