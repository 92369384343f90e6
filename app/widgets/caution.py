"""A quiet note of what to mind, which folds to one line and comes back when it is about something else."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QLabel, QToolButton, QVBoxLayout, QWidget


class CautionNote(QFrame):
    """Hidden while there is nothing to mind."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("caution")
        self.fold = QToolButton()
        self.fold.setObjectName("cautionTitle")
        self.fold.setAutoRaise(True)
        self.fold.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
        self.fold.clicked.connect(lambda: self.set_unfolded(not self.unfolded))
        self.body = QLabel()
        self.body.setObjectName("fieldNote")
        self.body.setWordWrap(True)
        self.body.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        column = QVBoxLayout(self)
        column.setContentsMargins(8, 3, 4, 5)
        column.setSpacing(2)
        column.addWidget(self.fold, 0, Qt.AlignmentFlag.AlignLeft)
        column.addWidget(self.body)
        self._title = ""
        self.set_unfolded(True)
        self.hide()

    @property
    def unfolded(self) -> bool:
        return self._unfolded

    @property
    def text(self) -> str:
        """What it says, folded or not; empty while there is nothing to mind."""
        return self.body.text()

    def set_unfolded(self, unfolded: bool) -> None:
        """Show the sentences, or only what they are about."""
        self._unfolded = unfolded
        self.body.setVisible(unfolded)
        self.fold.setArrowType(Qt.ArrowType.DownArrow if unfolded else Qt.ArrowType.RightArrow)
        self._describe()

    def show_cautions(self, title: str, sentences: Sequence[str]) -> None:
        """Say these sentences under this title; none hide the note."""
        text = "\n".join(sentences)
        self.setVisible(bool(text))
        if text and title != self._title:
            self._unfolded = True
        self._title = title if text else ""
        self.body.setText(text)
        self.fold.setText(title)
        self.set_unfolded(self._unfolded)

    def _describe(self) -> None:
        self.fold.setToolTip("Fold this note away" if self._unfolded else "Read this note")
        self.fold.setAccessibleName(f"{self._title}, {'unfolded' if self._unfolded else 'folded'}")
        self.fold.setAccessibleDescription(self.body.text())
