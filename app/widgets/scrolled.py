"""What is larger than its room, scrolled."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget


def scrolled(body: QWidget) -> QScrollArea:
    """The widget in an area without a frame that the Tab key passes over."""
    area = QScrollArea()
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setWidgetResizable(True)
    area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
    area.setWidget(body)
    return area


def fill_scrolled(widget: QWidget, body: QWidget) -> None:
    """Make the body, scrolled, all that there is in a widget."""
    outer = QVBoxLayout(widget)
    outer.setContentsMargins(0, 0, 0, 0)
    outer.addWidget(scrolled(body))
