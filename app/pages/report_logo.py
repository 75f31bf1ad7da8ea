"""The logo in the form of the report: its picture, with ways to set and remove it."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QPixmap
from PySide6.QtWidgets import QFileDialog, QHBoxLayout, QLabel, QVBoxLayout, QWidget

from app.document import Document
from app.logo import KINDS, choose_logo, logo_bytes, remove_logo
from app.panels.panel import Words, button
from app.theme import STEP
from engine.errors import UserError

#: Room of the picture; on paper it gets 60 × 18 mm at most. [logical pixels]
_WIDTH, _HEIGHT = 50 * STEP, 15 * STEP


class ReportLogo(QWidget):
    """Shows the logo of the layout that is open."""

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self._shown: str | None = None
        head = Words("Logo", "plain")
        self.picture = QLabel()
        self.picture.setAccessibleName("Logo")
        self.picture.setToolTip("At the head of the first page, 60 × 18 mm at most")
        self.words, self.reason = Words(), Words(style="warning")
        self.reason.hide()
        self.choose = button(
            "Choose logo …", "A PNG or JPEG, kept in the layout's file", self._choose
        )
        self.remove = button("Remove", "Print no logo", self._remove)
        row = QHBoxLayout()
        row.setSpacing(STEP)
        row.addWidget(self.choose)
        row.addWidget(self.remove)
        row.addStretch(1)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        for widget in (head, self.picture, self.words, self.reason):
            box.addWidget(widget)
        box.addLayout(row)

    def refresh(self) -> None:
        """Show what the title block holds."""
        logo = self._document.layout.title.logo
        if logo == self._shown:
            return
        self._shown = logo
        self.reason.hide()
        self.remove.setEnabled(bool(logo))
        data = logo_bytes(logo) if logo else None
        pixels = QPixmap()
        if data is not None and pixels.loadFromData(data):
            self.picture.setPixmap(self._fitted(pixels))
            self.words.setText(f"{pixels.width()} × {pixels.height()} pixels")
        elif logo:
            self.words.setText("The logo is damaged and not printed: choose it again.")
        else:
            self.words.setText("None; PNG or JPEG.")
        self.picture.setVisible(data is not None)

    def take(self, path: Path) -> None:
        """Take the logo from a file; why not stands beside it."""
        try:
            choose_logo(self._document, path)
        except UserError as error:
            self.reason.setText(str(error))
            self.reason.show()
        else:
            self.reason.hide()

    def _fitted(self, pixels: QPixmap) -> QPixmap:
        ratio = self.devicePixelRatioF()
        fitted = pixels.scaled(
            round(_WIDTH * ratio),
            round(_HEIGHT * ratio),
            Qt.AspectRatioMode.KeepAspectRatio,
            Qt.TransformationMode.SmoothTransformation,
        )
        fitted.setDevicePixelRatio(ratio)
        return fitted

    def _choose(self) -> None:
        name, _ = QFileDialog.getOpenFileName(self, "Choose logo", "", KINDS)
        if name:
            self.take(Path(name))

    def _remove(self) -> None:
        remove_logo(self._document)
