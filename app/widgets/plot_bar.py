"""The line under a plot: what the pointer reads, and what can be done with the plot."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QToolButton, QWidget

from app.widgets.status_line import StatusLine


@dataclass(frozen=True)
class Tool:
    """A button of the bar: what it shows, and what it does in words."""

    id: str
    text: str
    tip: str
    checkable: bool = False


TOOLS = (
    Tool("zoom_out", "−", "Zoom out"),
    Tool("zoom_in", "+", "Zoom in"),
    Tool("box", "Box", "Drag a box to zoom into", checkable=True),
    Tool("home", "Whole plot", "Show the whole range again"),
    Tool("limits", "Limits…", "Type exact limits"),
    Tool("copy", "Copy", "Copy the plot as a picture"),
    Tool("picture", "Picture…", "Save the plot as PNG, SVG or PDF"),
    Tool("data", "Data…", "Save the numbers behind the plot as CSV"),
)


class PlotBar(QWidget):
    """pressed(id, checked) is sent for a button, with the id of its tool."""

    pressed = Signal(str, bool)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.status = StatusLine()
        row = QHBoxLayout(self)
        row.setContentsMargins(12, 2, 8, 4)
        row.setSpacing(2)
        row.addWidget(self.status, 1)
        self.buttons: dict[str, QToolButton] = {}
        for tool in TOOLS:
            button = QToolButton()
            button.setText(tool.text)
            button.setToolTip(tool.tip)
            button.setAccessibleName(tool.tip)
            button.setAutoRaise(True)
            button.setCheckable(tool.checkable)
            button.clicked.connect(lambda checked=False, chosen=tool.id: self.pressed.emit(chosen, checked))
            row.addWidget(button)
            self.buttons[tool.id] = button
