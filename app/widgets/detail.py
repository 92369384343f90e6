"""What there is to know of the selected quantity: formula, range and source, for readers without a mouse too."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QFrame, QTextBrowser, QWidget

HINT = "Select a quantity to read its formula, its range and its source here."


class Detail(QTextBrowser):
    """A few quiet lines of selectable text."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("detail")
        self.setAccessibleName("About the selected quantity")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setTabChangesFocus(True)
        self.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.document().setDocumentMargin(0)
        self.show_text("")

    def show_text(self, text: str) -> None:
        self.setPlainText(text or HINT)

    def sizeHint(self) -> QSize:
        return QSize(300, 80)
