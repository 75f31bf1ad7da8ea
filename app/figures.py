"""What a widget shows as a file with its caption: PNG, or SVG with its text as text."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QBuffer, QIODevice, QPoint, QRect, QSize, Qt
from PySide6.QtGui import QColor, QFontMetrics, QGuiApplication, QImage, QPainter
from PySide6.QtSvg import QSvgGenerator
from PySide6.QtWidgets import QWidget

from app.copying import captioned
from app.theme import BODY, LIGHT, STEP, Theme
from engine.written_file import write_file

#: Kinds of files for figures that have numbers behind them.
FIGURE_KINDS = "Picture (*.png);;Vectors (*.svg);;Numbers (*.csv)"


def png(image: QImage) -> bytes:
    """A picture as the bytes of a file."""
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    image.save(buffer, "PNG")  # type: ignore[call-overload]
    return bytes(buffer.data().data())


def widget_png(widget: QWidget, caption: str) -> bytes:
    """The picture of a widget with its caption beneath it."""
    return png(captioned(widget, caption))


def with_caption(image: QImage, caption: str, theme: Theme) -> QImage:
    """A picture with a line of text beneath it."""
    ratio = image.devicePixelRatio()
    width, height = round(image.width() / ratio), round(image.height() / ratio)
    font = QGuiApplication.font()
    font.setPixelSize(BODY)
    flags = int(Qt.TextFlag.TextWordWrap | Qt.AlignmentFlag.AlignLeft)
    box = QRect(2 * STEP, height + STEP, width - 4 * STEP, 100 * STEP)
    needed = QFontMetrics(font).boundingRect(box, flags, caption).height()
    whole = QImage(
        image.width(),
        image.height() + round(ratio * (needed + 2 * STEP)),
        QImage.Format.Format_RGB32,
    )
    whole.setDevicePixelRatio(ratio)
    whole.fill(QColor(theme.paper))
    painter = QPainter(whole)
    painter.drawImage(QPoint(0, 0), image)
    painter.setFont(font)
    painter.setPen(QColor(theme.text))
    painter.drawText(box, flags, caption)
    painter.end()
    return whole


def widget_svg(widget: QWidget, caption: str) -> bytes:
    """The same as vectors; light, as on paper."""
    size = widget.size()
    font = widget.font()
    font.setPixelSize(BODY)
    flags = int(Qt.TextFlag.TextWordWrap | Qt.AlignmentFlag.AlignLeft)
    box = QRect(2 * STEP, size.height() + STEP, size.width() - 4 * STEP, 100 * STEP)
    needed = QFontMetrics(font).boundingRect(box, flags, caption).height()
    whole = QSize(size.width(), size.height() + needed + 2 * STEP)
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    generator = QSvgGenerator()
    generator.setOutputDevice(buffer)
    generator.setSize(whole)
    generator.setViewBox(QRect(QPoint(0, 0), whole))
    generator.setTitle(caption)
    painter = QPainter(generator)
    painter.fillRect(QRect(QPoint(0, 0), whole), QColor(LIGHT.paper))
    QWidget.render(widget, painter, QPoint(0, 0))
    painter.setFont(font)
    painter.setPen(QColor(LIGHT.text))
    painter.drawText(box, flags, caption)
    painter.end()
    return bytes(buffer.data().data())


def write_figure(path: Path, widget: QWidget, caption: str, table: str) -> None:
    """Write a figure: its picture, its vectors or its numbers, by the file's ending.

    Raises
    ------
    UserError
        When the file cannot be written.
    """
    match path.suffix.lower():
        case ".svg":
            write_file(path, widget_svg(widget, caption))
        case ".csv":
            write_file(path, table.encode("utf-8"))
        case _:
            write_file(path, widget_png(widget, caption))
