"""A line in which something other than a quantity is typed: a name, a direction, three numbers.

What is typed counts when it is finished, at Return or on leaving the line; Escape takes it back. What cannot be read
stays to be mended, with a sentence that the form shows beside it, and changes nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from app.widgets.quantity_field import is_undo


class EntryField(QLineEdit):
    """Signals: entered(value) when another value is finished; error_changed(str) with the sentence to show, or "".

    `read` makes a value of a text, or raises ValueError with a sentence; `write` makes the text of a value.
    """

    entered = Signal(object)
    error_changed = Signal(str)

    def __init__(
        self, read: Callable[[str], Any], write: Callable[[Any], str] = str, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self._read, self._write = read, write
        self.value: Any = None
        self.error_text = ""
        self.returnPressed.connect(self.commit)

    def set_value(self, value: Any) -> None:
        """Show a value without a signal; one that the line already holds leaves its text alone."""
        if value != self.value:
            self.value = value
            self.revert()

    def commit(self) -> None:
        """The text is finished: take it, or say what is wrong with it."""
        if not self.isModified() and not self.error_text:
            return
        try:
            value = self._read(self.text())
        except ValueError as error:
            self.show_error(str(error))
            return
        self.show_error("")
        before = self.value
        if value != before:
            self.entered.emit(value)
        if not self.error_text and self.value in (before, value):
            self.value = value
            self.setText(self._write(value))  # as it is read, and without undo steps of the line's own

    def revert(self) -> None:
        """Back to the value that it holds."""
        self.setText("" if self.value is None else self._write(self.value))
        self.show_error("")

    def show_error(self, sentence: str) -> None:
        """Say what is wrong with the text."""
        if sentence == self.error_text:
            return
        self.error_text = sentence
        self.setProperty("invalid", bool(sentence))
        self.style().polish(self)
        self.error_changed.emit(sentence)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape and (self.isModified() or self.error_text):
            self.revert()
            event.accept()
        elif is_undo(event) and not self.isModified():
            event.ignore()
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        # A line edit claims undo and redo for itself; here it may only while there are edits to take back.
        claims = event.type() == QEvent.Type.ShortcutOverride and isinstance(event, QKeyEvent) and is_undo(event)
        if claims and not self.isModified():
            event.ignore()
            return False
        return super().event(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        if event.reason() != Qt.FocusReason.PopupFocusReason:
            self.commit()
