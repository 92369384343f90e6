"""Where atoms went, as one bar divided by process, each part with its name and share where there is room."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.figures.picture import Role
from app.figures.theme import LIGHT, Theme
from app.words import percent

_TINT = 0.30


@dataclass(frozen=True)
class Part:
    """One part of the bar. share : of the whole, 0 to 1. short : its name where there is little room. role : whose
    colour it has; None: it cools, as evaporation does."""

    name: str
    share: float
    short: str
    role: Role | None = None

    @property
    def text(self) -> str:
        return f"{self.name} {percent(self.share)}"


class LossBar(QWidget):
    """Paints parts from left to right."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._parts: tuple[Part, ...] = ()
        self._theme = LIGHT
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)

    def show_parts(self, parts: Sequence[Part]) -> None:
        """Show these, the parts that cool first and then the largest."""
        ordered = tuple(sorted(parts, key=lambda part: (part.role is not None, -part.share)))
        if ordered != self._parts:
            self._parts = ordered
            self.update()

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        self.update()

    def sizeHint(self) -> QSize:
        return QSize(180, self.fontMetrics().height() + 3)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        theme, room = self._theme, QRectF(self.rect()).adjusted(0.0, 1.5, -4.0, -1.5)
        painter.fillRect(self.rect(), QColor(theme.window))
        metrics = self.fontMetrics()
        left = room.left()
        for part in self._parts:
            width = room.width() * part.share
            box = QRectF(left, room.top(), max(width - 1.0, 0.0), room.height())
            left += width
            tone = theme.accent if part.role is None else theme.lines[part.role].colour
            painter.fillRect(box, _mixed(theme.window, tone, _TINT))
            painter.setPen(QColor(theme.text))
            for text in (part.text, f"{part.short} {percent(part.share)}", part.short):
                if metrics.horizontalAdvance(text) + 8 <= box.width():
                    painter.drawText(box.adjusted(4.0, 0.0, 0.0, 0.0), Qt.AlignmentFlag.AlignVCenter, text)
                    break
        painter.end()


def _mixed(ground: str, tone: str, share: float) -> QColor:
    a, b = QColor(ground), QColor(tone)
    red, green, blue = (
        round((1.0 - share) * one + share * other)
        for one, other in ((a.red(), b.red()), (a.green(), b.green()), (a.blue(), b.blue()))
    )
    return QColor(red, green, blue)
