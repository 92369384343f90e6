"""The view that says why a number is what it is: opened for a readout, kept up to date while it is on the screen."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer
from PySide6.QtWidgets import QWidget

if TYPE_CHECKING:
    from app.engine import CloudAnswer
    from app.widgets.explanation import ExplanationDialog

PAUSE = 40  # ms between two rewritings while the cloud is dragged


class Why(QObject):
    """Holds the dialog, which is made when it is first asked for. `dialog` is None before."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self._window = parent
        self.dialog: ExplanationDialog | None = None
        self._name = ""
        self._answer: CloudAnswer | None = None
        self._units: Mapping[str, str] = {}
        self._turn = QTimer(self)
        self._turn.setSingleShot(True)
        self._turn.timeout.connect(self._write)

    def ask(self, name: str, answer: CloudAnswer, units: Mapping[str, str]) -> None:
        """Open the view on a quantity."""
        if self.dialog is None:
            from app.widgets.explanation import ExplanationDialog

            self.dialog = ExplanationDialog(self._window)
        self._name, self._answer, self._units = name, answer, units
        self._write()
        self.dialog.show()
        self.dialog.raise_()
        self.dialog.activateWindow()
        self.dialog.view.setFocus()

    def show_answer(self, answer: CloudAnswer, units: Mapping[str, str]) -> None:
        """Explain the same quantity of a newer answer, soon, if anybody looks."""
        if self.dialog is not None and self.dialog.isVisible():
            self._answer, self._units = answer, units
            if not self._turn.isActive():
                self._turn.start(PAUSE)

    def mark_stale(self) -> None:
        if self.dialog is not None:
            self._turn.stop()
            self.dialog.view.mark_stale()

    @property
    def settled(self) -> bool:
        """Whether the view shows the newest answer that it was given."""
        return not self._turn.isActive()

    def _write(self) -> None:
        from app.explanations import explain
        from app.quantities import QUANTITIES
        from app.widgets.readings import unit_for

        if self.dialog is None or self._answer is None:
            return
        row = QUANTITIES[self._name]
        unit = self._units.get(self._name, "")
        if unit not in row.units:
            missing = self._answer.missing(row) is not None
            unit = row.units[0] if missing else unit_for(row, self._answer.value(self._name))
        self.dialog.show_explanation(explain(self._answer, self._name, unit))
