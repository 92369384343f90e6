"""A form that is a card: it folds to a line, and says on top why something cannot be done with it."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget

from app.widgets.card import CardHead, bring_into_view
from app.widgets.form import Form

_CARD = "card"


class FoldingForm(Form):
    """A subclass adds its fields, folds with `set_unfolded(False)`, and gives `summary_text`."""

    def __init__(self, title: str, parent: QWidget | None = None, *, switch: bool = False) -> None:
        super().__init__(title, parent)
        self.heading.hide()
        self.head = CardHead(title, switch=switch)
        self._grid.addWidget(self.head, 0, 0, 1, 2)
        self._grid.addWidget(self._add_messages(_CARD)[1], 1, 0, 1, 2)
        self._row = 2
        self.head.folded_changed.connect(self.set_unfolded)

    def summary_text(self) -> str:
        """What the folded card says of what it holds; empty before it holds anything."""
        raise NotImplementedError

    @property
    def unfolded(self) -> bool:
        return self.head.unfolded

    def set_unfolded(self, unfolded: bool) -> None:
        """Show or hide the fields; one with something wrong in it can always be seen."""
        unfolded = unfolded or bool(self.problems)
        self.head.set_unfolded(unfolded)
        for key in self._labels:
            self.show_row(key, unfolded)
        self._show_summary()

    def _show_summary(self) -> None:
        self.head.set_summary("" if self.unfolded else self.summary_text())

    def show_problem(self, key: str, sentence: str) -> None:
        super().show_problem(key, sentence)
        if sentence and not self.unfolded:
            self.set_unfolded(True)

    def refuse(self, sentence: str) -> None:
        """Say why something cannot be done with what the card holds."""
        self.show_problem(_CARD, sentence)

    def take_focus(self) -> None:
        self.head.fold.setFocus(Qt.FocusReason.OtherFocusReason)
        bring_into_view(self)
