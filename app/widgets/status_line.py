"""A line of text that changes often: painted, so that a new text costs one repaint and no layout."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent, QPalette
from PySide6.QtWidgets import QSizePolicy, QWidget


class StatusLine(QWidget):
    """Shows one line, quiet unless strong, elided where it is too long; its full text is its accessible name."""

    def __init__(self, parent: QWidget | None = None, *, strong: bool = False) -> None:
        super().__init__(parent)
        self._text = ""
        self._role = QPalette.ColorRole.WindowText if strong else QPalette.ColorRole.PlaceholderText
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
        painter.setPen(self.palette().color(self._role))
        shown = painter.fontMetrics().elidedText(self._text, Qt.TextElideMode.ElideRight, self.width())
        painter.drawText(self.rect(), Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, shown)
