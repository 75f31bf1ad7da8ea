"""Reference levels: as the user enters them, with what is missing to compare with one.

The program ships no level. Nothing is prefilled, and a value that is not entered is not
there.
"""

from __future__ import annotations

from typing import Any

from msgspec.structs import replace
from PySide6.QtCore import QEvent
from PySide6.QtWidgets import (
    QFormLayout,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.library import Library, level_copy
from app.messages import Messages
from app.panels.circuit_cells import value_of
from app.panels.field import Choice, ValueField
from app.panels.level_table import LevelTableEditor
from app.panels.level_uses import LevelUses
from app.panels.library_menu import LevelLibraryButton
from app.panels.origin import OriginMark, assumed_fields
from app.panels.panel import Panel, Words, button, column, scrolled
from app.panels.table import Column, RowsTable
from app.theme import STEP
from app.wrapping import wrapped
from engine.criteria import ReferenceLevel
from engine.edits import added, checked, removed, replaced, unused_id
from engine.errors import UserError
from engine.levels import what_is_missing
from engine.origins import restated
from engine.places import Receptor, Zone

CATEGORIES: tuple[tuple[str, str], ...] = (
    ("", "not chosen"),
    ("general public, long stay", "general public, long stay"),
    ("general public, short stay", "general public, short stay"),
    ("workers", "workers"),
    ("persons at particular risk", "persons at particular risk"),
    ("equipment", "equipment"),
)
BASES: tuple[tuple[str, str], ...] = (("RMS", "RMS"), ("peak", "peak"))
COMPONENTS: tuple[tuple[str, str], ...] = (
    ("resultant", "resultant of the axes"),
    ("axis", "largest axis"),
)
SUM_RULES: tuple[tuple[str, str], ...] = (
    ("ratio sum", "sum of the ratios"),
    ("root sum of squares", "root sum of squares of the ratios"),
    ("weighted peak", "weighted peak of the waveform"),
)


class LevelsPanel(Panel):
    """The reference levels of the layout, one of them in full below the list."""

    shows = (
        "levels", "zones", "receptors", "settings", "circuits", "documents",
    )  # fmt: skip

    def __init__(
        self,
        document: Document,
        messages: Messages | None = None,
        library: Library | None = None,
    ) -> None:
        super().__init__(document)
        self.table = RowsTable(_columns(), name="Reference levels")
        self.table.entered.connect(self._on_entered)
        self.table.chosen.connect(self._on_chosen)
        self.empty = Words("Enter a reference level and its source to see margins.")
        self.library = LevelLibraryButton(
            library or Library(), messages or Messages(), self._take
        )
        self.title = Words(style="title")
        self.missing = Words(style="warning")
        self.values = LevelTableEditor(document, self._set)
        self.uses = LevelUses(self._on_uses)
        self._one = QWidget()
        one = column(self._one)
        one.addWidget(self.missing)
        one.addLayout(self._fields())
        one.addWidget(self.values)
        one.addWidget(self.uses)
        content = QWidget()
        box = column(content, 3 * STEP)
        box.addWidget(self._buttons())
        box.addWidget(self.empty)
        box.addWidget(self.table)
        box.addWidget(self.title)
        box.addWidget(self._one)
        box.addStretch(1)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.addWidget(scrolled(content))

    @property
    def level(self) -> ReferenceLevel | None:
        """The level shown below the list."""
        row, levels = self.table.row, self._document.layout.levels
        return levels[row] if 0 <= row < len(levels) else None

    def refresh(self) -> None:
        levels = self._document.layout.levels
        self.table.set_rows(levels)
        self.table.fit_height(1, 5)
        self.empty.setVisible(not levels)
        self.table.setVisible(bool(levels))
        if levels and self.table.row < 0:
            self.table.set_current(0, 0)
        self._show_one()

    def follow_selection(self, ids: frozenset[str]) -> None:
        for row, level in enumerate(self._document.layout.levels):
            if level.id in ids and self.table.row != row:
                self.table.set_current(row)
                self._show_one()
                return

    def add(self) -> None:
        """Add a level that says nothing yet."""
        layout = self._document.committed
        number = len(layout.levels) + 1
        new = ReferenceLevel(
            id=unused_id(layout, f"level-{number}"), name=f"Reference level {number}"
        )
        self._add(new, f"Add {new.title}")
        self.name.line.setFocus()
        self.name.line.selectAll()

    def duplicate(self) -> None:
        """Add the shown level once more; an invented one leaves its source."""
        level = self.level
        if level is not None:
            layout = self._document.committed
            name = f"{level.title} (copy)"[:400]
            new = replace(level_copy(level), id=unused_id(layout, level.id), name=name)
            self._add(new, f"Duplicate {level.title}")

    def remove(self) -> None:
        """Remove the shown level, also from the places that name it."""
        level = self.level
        if level is None:
            return
        layout = self._document.committed
        assessed: tuple[Zone | Receptor, ...] = (*layout.zones, *layout.receptors)
        places = [
            replace(place, levels=tuple(x for x in place.levels if x != level.id))
            for place in assessed
            if level.id in place.levels
        ]
        after = removed(replaced(layout, *places), level.id)
        self._document.edit(f"Remove {level.title}", after)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "table"):
            self.table.colour()
        super().changeEvent(event)

    def _buttons(self) -> QWidget:
        buttons = (
            ("Add", "Add a reference level that says nothing yet", self.add),
            ("Duplicate", "Add the chosen reference level once more", self.duplicate),
            (
                "Remove",
                "Remove the chosen reference level, also from its places",
                self.remove,
            ),
        )
        return wrapped(*(button(*each) for each in buttons), self.library)

    def _fields(self) -> QFormLayout:
        form = QFormLayout()
        form.setSpacing(STEP)
        form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow)
        self.source_mark = OriginMark(self._document)
        self.name = self._words("Name", "name", "Name of the reference level")
        self.source = self._words(
            "Source", "source", "Where the reference level comes from: the document "
            "and its clause", self.source_mark, 2000,
        )  # fmt: skip
        self.edition = self._words(
            "Edition", "edition", "Edition or year of the source"
        )
        self.category = self._choice(
            "For", "category", CATEGORIES, "For whom or what it holds"
        )
        self.entered_by = self._words("Entered by", "entered_by", "Who entered it")
        self.basis = self._choice(
            "Values are", "basis", BASES, "Whether the values are RMS or peak"
        )
        self.component = self._choice(
            "Of the", "component", COMPONENTS, "What of the field is compared"
        )
        self.rule = self._choice(
            "Several Hz", "sum_rule", SUM_RULES,
            "How several frequencies count together; 0 Hz is always compared alone",
        )  # fmt: skip
        self.uncertainty = self._words(
            "Uncertainty", "uncertainty_rule",
            "What the source says of uncertainty, in its words",
        )  # fmt: skip
        for title, field in (
            ("Name", self.name),
            ("Source", self.source),
            ("Edition", self.edition),
            ("For", self.category),
            ("Entered by", self.entered_by),
            ("Values are", self.basis),
            ("Of the", self.component),
            ("Several Hz", self.rule),
            ("Uncertainty", self.uncertainty),
        ):
            form.addRow(title, field)
        return form

    def _words(
        self, title: str, name: str, tip: str,
        mark: OriginMark | None = None, most: int = 400,
    ) -> ValueField:  # fmt: skip
        return ValueField.words(
            lambda text: self._set(title.lower(), **{name: text}),
            name=title, tip=tip, hint="not stated", mark=mark, most=most,
        )  # fmt: skip

    def _choice(
        self, title: str, name: str, options: tuple[tuple[str, str], ...], tip: str
    ) -> Choice:
        what = name.replace("_", " ")
        return Choice(
            options, lambda v: self._set(what, **{name: v}), name=title, tip=tip
        )

    def _show_one(self) -> None:
        level = self.level
        self._one.setVisible(level is not None)
        self.title.setVisible(level is not None)
        if level is None:
            return
        self.title.setText(level.title)
        missing = what_is_missing(level)
        if missing:
            said = "\n".join(f"– {sentence}" for sentence in missing)
            self.missing.setText(f"Before anything can be compared with it:\n{said}")
        self.missing.setVisible(bool(missing))
        self.name.set_value(level.name)
        self.source.set_value(level.source)
        self.edition.set_value(level.edition)
        self.entered_by.set_value(level.entered_by)
        self.uncertainty.set_value(level.uncertainty_rule)
        self.category.set_value(level.category)
        self.basis.set_value(level.basis)
        self.component.set_value(level.component)
        self.rule.set_value(level.sum_rule)
        assumed = assumed_fields(level)
        self.source_mark.show_value(level, "source", "source" in assumed)
        self.values.show_level(level, "values" in assumed)
        self.uses.show_level(self._document.layout, level)
        self.library.show_level(level)

    def _add(self, level: ReferenceLevel, text: str) -> None:
        self._document.edit(text, added(self._document.committed, checked(level)))
        self.table.set_current(len(self._document.layout.levels) - 1, 0)
        self._show_one()

    def _take(self, level: ReferenceLevel) -> None:
        """Add a level from the library."""
        layout = self._document.committed
        new = replace(level, id=unused_id(layout, level.id))
        self._add(new, f"Add {new.title} from the library")

    def _set(self, what: str, **values: Any) -> None:
        level = self.level
        if level is not None:
            changed = checked(restated(level, **values))
            self._document.edit(
                f"Change {what} of {level.title}",
                replaced(self._document.committed, changed),
            )

    def _on_uses(self, place: str, used: bool) -> None:
        level, layout = self.level, self._document.committed
        item: Any = layout.by_id().get(place)
        if level is None or item is None:
            return
        others = tuple(x for x in item.levels if x != level.id)
        changed = replace(item, levels=(*others, level.id) if used else others)
        verb = "Compare" if used else "No longer compare"
        self._document.edit(
            f"{verb} {item.title} with {level.title}", replaced(layout, changed)
        )

    def _on_entered(self, rows: tuple[ReferenceLevel, ...], sentence: str) -> None:
        try:
            after = replaced(self._document.committed, *(checked(r) for r in rows))
        except UserError as error:
            self.table.refuse(str(error))
            return
        self._document.edit(f"{sentence} of reference levels", after)

    def _on_chosen(self, _row: int) -> None:
        self._show_one()


def _with_name(level: ReferenceLevel, text: str, _decimal: str) -> ReferenceLevel:
    return checked(replace(level, name=text.strip()))


def _with_category(level: ReferenceLevel, text: str, _decimal: str) -> ReferenceLevel:
    return checked(replace(level, category=value_of(CATEGORIES, text, "category")))


def _state(level: ReferenceLevel) -> str:
    count = len(what_is_missing(level))
    return f"{count} missing" if count else "complete"


def _columns() -> tuple[Column, ...]:
    return (
        Column(
            "Name", lambda v: v.name or v.id, _with_name,
            tip="Name of the reference level", width=30,
        ),
        Column(
            "For", lambda v: dict(CATEGORIES)[v.category], _with_category,
            tuple(words for _, words in CATEGORIES), tip="For whom it is", width=30,
        ),
        Column(
            "Entry", _state, tip="Whether anything is missing for a comparison",
            width=21,
        ),
    )  # fmt: skip
