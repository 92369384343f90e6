"""Who opens the window for the trap of a stage."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject
from PySide6.QtWidgets import QWidget

if TYPE_CHECKING:
    from app.window.answers import Answers
    from app.window.stage_trap_dialog import StageTrapDialog
    from app.window.undo import Document


class StageTraps(QObject):
    """Holds the window, which is made when it is first asked for; `dialog` is None before."""

    def __init__(self, document: Document, answers: Answers, parent: QWidget) -> None:
        super().__init__(parent)
        self._document, self._answers, self._window = document, answers, parent
        self.dialog: StageTrapDialog | None = None

    def ask(self, place: int) -> None:
        """Open it on the trap of a stage, counted from 0."""
        if self.dialog is None:
            from app.window.stage_trap_dialog import StageTrapDialog

            self.dialog = StageTrapDialog(self._document, self._answers, self._window)
        self.dialog.show_stage(place)
        self.dialog.show()
        self.dialog.raise_()
        self.dialog.activateWindow()

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read there, as sentences."""
        return () if self.dialog is None or not self.dialog.isVisible() else self.dialog.form.problems

    @property
    def settled(self) -> bool:
        """Whether no trap is being surveyed for it."""
        return self.dialog is None or not self.dialog.surveying

    def close(self) -> None:
        if self.dialog is not None:
            self.dialog.end()
