"""What less and what more of an input changes, as bars to either side of no change."""

from __future__ import annotations

import math

from PySide6.QtCore import QPointF, QRectF, QSize
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.figures.picture import Role
from app.figures.theme import LIGHT, Theme


class EffectBar(QWidget):
    """Paints two changes, in logarithms of what they change, on a scale that several bars share."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._less = self._more = math.nan
        self._reach = 1.0
        self._theme = LIGHT
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def show_effect(self, less: float, more: float, reach: float) -> None:
        """Changes by less and by more of an input; reach : the largest that is shown."""
        self._less, self._more, self._reach = less, more, reach
        self.update()

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(200, self.fontMetrics().height() + 3)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        theme, room = self._theme, QRectF(self.rect()).adjusted(2.0, 2.0, -6.0, -2.0)
        painter.fillRect(self.rect(), QColor(theme.window))
        middle = room.center().x()
        # More of it is filled, less of it an outline: told apart without colour.
        for change, filled in ((self._less, False), (self._more, True)):
            if math.isnan(change):
                continue
            length = 0.5 * room.width() * max(-1.0, min(change / self._reach, 1.0))
            colour = QColor(theme.lines[Role.FIRST if filled else Role.SECOND].colour)
            top = room.top() + (0.5 * room.height() if not filled else 0.0)
            box = QRectF(min(middle, middle + length), top + 0.5, abs(length), 0.5 * room.height() - 1.5)
            if filled:
                painter.fillRect(box, colour)
            else:
                painter.setPen(QPen(colour, 1.2))
                painter.drawRect(box)
        painter.setPen(QPen(QColor(theme.muted), 1.0))
        painter.drawLine(QPointF(middle, room.top() - 2.0), QPointF(middle, room.bottom() + 2.0))
        painter.end()
