"""The line under a plot: what the pointer reads, what is being worked out, and what can be done with the plot."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QMenu, QToolButton, QWidget

from app.widgets.progress_line import ProgressLine
from app.widgets.status_line import StatusLine


@dataclass(frozen=True)
class Tool:
    """A button of the bar, or a line of its menu: what it shows, and what it does in words."""

    id: str
    text: str
    tip: str
    checkable: bool = False


TOOLS = (
    Tool("zoom_out", "−", "Zoom out"),
    Tool("zoom_in", "+", "Zoom in"),
    Tool("box", "Box", "Drag a box to zoom into", checkable=True),
    Tool("home", "Whole", "Show the whole range again"),
    Tool("limits", "Limits…", "Type exact limits"),
)
EXPORTS = (
    Tool("copy", "Copy picture", "Copy the plot as a picture"),
    Tool("picture", "Save picture…", "Save the plot as PNG, SVG or PDF"),
    Tool("data", "Save data…", "Save the numbers behind the plot as CSV"),
)


class PlotBar(QWidget):
    """pressed(id, checked) is sent for a button or a line of the menu, with the id of its tool."""

    pressed = Signal(str, bool)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.status, self.progress = StatusLine(), ProgressLine()
        row = QHBoxLayout(self)
        row.setContentsMargins(12, 2, 8, 4)
        row.setSpacing(2)
        row.addWidget(self.status, 1)
        row.addWidget(self.progress)
        self.buttons: dict[str, QToolButton] = {}
        for tool in TOOLS:
            button = self._button(tool.text, tool.tip)
            button.setCheckable(tool.checkable)
            button.clicked.connect(lambda checked=False, chosen=tool.id: self.pressed.emit(chosen, checked))
            row.addWidget(button)
            self.buttons[tool.id] = button
        export = self._button("Export ▾", "Copy or save the plot or its numbers")
        menu = QMenu(export)
        menu.setToolTipsVisible(True)
        for tool in EXPORTS:
            action = menu.addAction(tool.text)
            action.setToolTip(tool.tip)
            action.triggered.connect(lambda _=False, chosen=tool.id: self.pressed.emit(chosen, False))
        export.setMenu(menu)
        export.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        row.addWidget(export)
        self._export = export

    def show_tools(self, shown: bool) -> None:
        """Whether there is a plot for the buttons to work on."""
        for button in (*self.buttons.values(), self._export):
            button.setVisible(shown)

    @staticmethod
    def _button(text: str, tip: str) -> QToolButton:
        button = QToolButton()
        button.setText(text)
        button.setToolTip(tip)
        button.setAccessibleName(tip)
        button.setAutoRaise(True)
        return button
