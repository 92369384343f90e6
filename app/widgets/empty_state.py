"""What stands where a plot would be: why there is none, and what can be done."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from app.widgets.banner import Offer

WIDEST = 62  # digits of the system's font


class EmptyState(QWidget):
    """A sentence on why there is nothing to plot, one on what can be done, and buttons that do it."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("emptyState")
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self._why, self._remedy = QLabel(), QLabel()
        self._remedy.setObjectName("plotStatus")
        for label in (self._why, self._remedy):
            label.setWordWrap(True)
            label.setTextInteractionFlags(
                Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
            )
        self._buttons = QHBoxLayout()
        self._buttons.setSpacing(8)
        text = QWidget()
        text.setMaximumWidth(WIDEST * self.fontMetrics().horizontalAdvance("0"))
        column = QVBoxLayout(text)
        column.setSpacing(10)
        column.addWidget(self._why)
        column.addWidget(self._remedy)
        column.addLayout(self._buttons)
        middle = QHBoxLayout()
        middle.addStretch(1)
        middle.addWidget(text, 4)
        middle.addStretch(1)
        outer = QVBoxLayout(self)
        outer.addStretch(2)
        outer.addLayout(middle)
        outer.addStretch(3)
        self._offers: tuple[Offer, ...] = ()

    @property
    def text(self) -> str:
        """Both sentences."""
        return f"{self._why.text()} {self._remedy.text()}"

    def buttons(self) -> tuple[QPushButton, ...]:
        """The buttons on show, in order."""
        items = (self._buttons.itemAt(i) for i in range(self._buttons.count()))
        widgets = (item.widget() for item in items if item is not None)
        return tuple(widget for widget in widgets if isinstance(widget, QPushButton))

    def tell(self, why: str, remedy: str, offers: Sequence[Offer] = ()) -> None:
        """Show these sentences and buttons; those on show already stay as they are."""
        self._why.setText(why)
        self._remedy.setText(remedy)
        self.setAccessibleName(why)
        self.setAccessibleDescription(remedy)
        before, self._offers = self._offers, tuple(offers)
        if [offer.text for offer in before] == [offer.text for offer in offers]:
            return
        while (item := self._buttons.takeAt(0)) is not None:
            if (old := item.widget()) is not None:
                old.deleteLater()
        for place, offer in enumerate(self._offers):
            button = QPushButton(offer.text)
            button.clicked.connect(lambda _=False, chosen=place: self._offers[chosen].action())
            self._buttons.addWidget(button)
        self._buttons.addStretch(1)

    def take_focus(self) -> None:
        """Give the keyboard to the first button, or to the text."""
        (self.buttons() or (self,))[0].setFocus()
