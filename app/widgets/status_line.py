"""A line of text that changes often: painted, so that a new text costs one repaint and no layout."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QSizePolicy, QWidget


class StatusLine(QWidget):
    """Shows one quiet line, elided where it is too long; its full text is its accessible name and tip."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._text = ""
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)

    @property
    def text(self) -> str:
        return self._text

    def say(self, text: str) -> None:
        if text != self._text:
            self._text = text
            self.setAccessibleName(text or "Status")
            self.update()

    def sizeHint(self) -> QSize:
        return QSize(200, QFontMetrics(self.font()).height() + 4)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setPen(self.palette().color(QPalette.ColorRole.PlaceholderText))
        shown = painter.fontMetrics().elidedText(self._text, Qt.TextElideMode.ElideRight, self.width())
        painter.drawText(self.rect(), Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, shown)
