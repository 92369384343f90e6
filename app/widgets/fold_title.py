"""The title of a form that can be folded away."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QFont
from PySide6.QtWidgets import QToolButton, QWidget


class FoldTitle(QToolButton):
    """A title with an arrow; pressing it is for the form to act on, which then says how it is.

    what : what is under it, in a few words, for the tip
    """

    def __init__(self, title: str, what: str, font: QFont, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._what = what
        self.setObjectName("formTitle")
        self.setAutoRaise(True)
        self.setText(title)
        self.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
        self.setFont(font)
        self.show_unfolded(False)

    def show_unfolded(self, unfolded: bool) -> None:
        """Say how the form is."""
        self.setArrowType(Qt.ArrowType.DownArrow if unfolded else Qt.ArrowType.RightArrow)
        self.setToolTip(f"{'Fold away' if unfolded else 'Unfold'} {self._what}")
        self.setAccessibleName(f"{self.text()}, {'unfolded' if unfolded else 'folded'}")
