"""Results for the clipboard: a comparison as a sentence, the drawing as a picture."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QRect, Qt
from PySide6.QtGui import QColor, QFontMetrics, QImage, QPainter
from PySide6.QtWidgets import QApplication, QWidget

from app.theme import BODY, STEP, theme_for
from engine.errors import UserError


def copy_sentence(sentence: str) -> None:
    """Put a sentence on the clipboard.

    Raises
    ------
    UserError
        When there is none.
    """
    if not sentence:
        raise UserError(
            "There is no margin to copy yet: it takes a zone, a reference level and "
            "a current."
        )
    QApplication.clipboard().setText(sentence)


def copy_picture(drawing: QWidget, caption: str) -> None:
    """Put the drawing as it shows on the clipboard, its caption beneath it."""
    QApplication.clipboard().setImage(captioned(drawing, caption))


def captioned(drawing: QWidget, caption: str) -> QImage:
    """The picture of a widget with a line of text beneath it."""
    ratio = drawing.devicePixelRatioF()
    size = drawing.size()
    theme = theme_for(drawing.palette())
    font = drawing.font()
    font.setPixelSize(BODY)
    box = QRect(2 * STEP, size.height() + STEP, size.width() - 4 * STEP, 100 * STEP)
    flags = int(Qt.TextFlag.TextWordWrap | Qt.AlignmentFlag.AlignLeft)
    needed = QFontMetrics(font).boundingRect(box, flags, caption).height()
    height = size.height() + needed + 2 * STEP
    image = QImage(
        round(size.width() * ratio), round(height * ratio), QImage.Format.Format_RGB32
    )
    image.setDevicePixelRatio(ratio)
    image.fill(QColor(theme.paper))
    painter = QPainter(image)
    QWidget.render(drawing, painter, QPoint(0, 0))
    painter.setFont(font)
    painter.setPen(QColor(theme.text))
    painter.drawText(box, flags, caption)
    painter.end()
    return image
