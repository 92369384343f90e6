"""What stands over a plot: a sentence, and under it, quieter, the detail."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QVBoxLayout


class PlotHeading(QVBoxLayout):
    """Attributes: sentence and detail, labels whose text can be selected. More may be added under them."""

    def __init__(self, *, below: int = 4) -> None:
        super().__init__()
        self.setContentsMargins(14, 8, 14, below)
        self.setSpacing(2)
        self.sentence, self.detail = QLabel(), QLabel()
        self.detail.setObjectName("plotStatus")
        for label in (self.sentence, self.detail):
            label.setWordWrap(True)
            label.setTextInteractionFlags(
                Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
            )
            self.addWidget(label)
