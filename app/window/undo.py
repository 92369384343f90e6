"""The plan that the window shows, and every step that led to it.

`Document` holds one frozen Plan. Every edit is a command on a Qt undo stack that knows the plan before and after, so
that undo can never drift from what was on screen. Edits with the same merge key (typing in one field, one whole
drag) are one step. The stack's clean state is the saved file.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

if TYPE_CHECKING:
    from app.plan import Plan

PLAN_EDIT = 1  # Qt merges commands of one number only; the merge key decides within it


class PlanEdit(QUndoCommand):
    """One step from a plan to another. An empty merge key never merges."""

    def __init__(self, document: Document, before: Plan, after: Plan, what: str, merge_key: str) -> None:
        super().__init__(f"change of {what}")
        self._document, self.before, self.after, self.merge_key = document, before, after, merge_key

    def id(self) -> int:
        return PLAN_EDIT if self.merge_key else -1

    def mergeWith(self, other: QUndoCommand) -> bool:
        if not isinstance(other, PlanEdit) or other.merge_key != self.merge_key:
            return False
        self.after = other.after
        self.setText(other.text())
        if self.after == self.before:
            self.setObsolete(True)
        return True

    def undo(self) -> None:
        self._document.put(self.before)

    def redo(self) -> None:
        self._document.put(self.after)


class Document(QObject):
    """The plan, the file it belongs to, and its history.

    Signals: loading() before another plan takes this one's place; plan_changed(Plan) after every edit, undo, redo
    and load; file_changed() when the file it belongs to is
    another one; clean_changed(bool) when the plan comes to be, or no longer is, what the file holds.
    """

    loading = Signal()
    plan_changed = Signal(object)
    file_changed = Signal()
    clean_changed = Signal(bool)

    def __init__(self, plan: Plan, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._plan = plan
        self.path: Path | None = None
        self.file_text: str | None = None  # as read or last written: saving keeps its comments
        self.stack = QUndoStack(self)
        self.stack.cleanChanged.connect(self.clean_changed)

    @property
    def plan(self) -> Plan:
        return self._plan

    @property
    def clean(self) -> bool:
        return self.stack.isClean()

    def put(self, plan: Plan) -> None:
        """Show a plan without a step of history; for the commands of the stack."""
        self._plan = plan
        self.plan_changed.emit(plan)

    def edit(self, plan: Plan, what: str, merge_key: str = "") -> None:
        """Make a plan the present one, as one step that undo names "change of WHAT"."""
        if plan != self._plan:
            self.stack.push(PlanEdit(self, self._plan, plan, what, merge_key))

    def load(self, plan: Plan, path: Path | None, text: str | None) -> None:
        """Start anew from a plan that was read or made."""
        self.loading.emit()
        self.path, self.file_text = path, text
        self.stack.clear()
        self.stack.setClean()
        self.put(plan)
        self.file_changed.emit()

    def saved(self, path: Path, text: str) -> None:
        """The present plan is now in this file."""
        self.path, self.file_text = path, text
        self.stack.setClean()
        self.file_changed.emit()
