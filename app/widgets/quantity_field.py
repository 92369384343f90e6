"""A line in which a quantity is typed with its unit and, if wanted, its uncertainty.

What was typed stays as it was typed. The field says what it read (tool tip, accessible description) and what is wrong
(`error_text`, which the form shows beside it), and keeps the last good quantity meanwhile. Up, Down, Page Up and Page
Down step it, and so does the wheel while it has the focus; an unfocused field leaves the wheel to the page.
"""

from __future__ import annotations

from PySide6.QtCore import QEvent, QLocale, Qt, QTimer, Signal
from PySide6.QtGui import QAction, QActionGroup, QContextMenuEvent, QFocusEvent, QKeyEvent, QKeySequence, QWheelEvent
from PySide6.QtWidgets import QLineEdit, QMenu, QWidget

from app.units import (
    Kind,
    Quantity,
    QuantityError,
    exact_text,
    localised,
    read_quantity,
    step,
    unit_of,
)

ERROR_DELAY = 400
"""Milliseconds of rest before an unfinished text is called wrong; Return and leaving the field do not wait."""

_NOTCH = 120  # eighths of a degree that one click of a wheel turns


class QuantityField(QLineEdit):
    """Attributes: `kind`; `quantity`, the last good one (None: left empty); `error_text`, empty while all is well.

    Signals: changed(Quantity | None) with every keystroke that gives another quantity; committed(Quantity | None) at
    Return, on leaving the field and after a step, when it differs from the last one committed; error_changed(str) with
    the sentence to show, or "".
    """

    changed = Signal(object)
    committed = Signal(object)
    error_changed = Signal(str)

    def __init__(
        self,
        kind: Kind,
        label: str,
        *,
        tip: str = "",
        optional: bool = False,
        locale: QLocale | None = None,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.kind = kind
        self._label = label
        self._tip = tip
        self._optional = optional
        self._quantity: Quantity | None = None
        self._committed: Quantity | None = None
        self._editing = False  # the text holds edits that were not committed
        self._error = ""
        self._shown_error = ""
        self._turned = 0
        self._patience = QTimer(self)
        self._patience.setSingleShot(True)
        self._patience.setInterval(ERROR_DELAY)
        self._patience.timeout.connect(self._show_error_now)
        if locale is not None:
            self.setLocale(locale)
        self.setAccessibleName(label)
        self.textEdited.connect(self._on_edited)
        self.returnPressed.connect(self.commit)
        self._describe()

    # --- what it holds ---------------------------------------------------------------------------------------------

    @property
    def quantity(self) -> Quantity | None:
        return self._quantity

    @property
    def error_text(self) -> str:
        return self._error

    @property
    def reading_text(self) -> str:
        """What was read, in SI: "2e-07 ± 1e-08 K"; empty for an empty field."""
        if self._quantity is None:
            return ""
        spread = f" ± {self._quantity.sigma:.10g}" if self._quantity.sigma is not None else ""
        return localised(f"{self._quantity.value:.10g}{spread} {self.kind.si_unit}".rstrip(), decimal_comma=self._comma)

    def set_quantity(self, quantity: Quantity | None) -> None:
        """Show a quantity without a signal. One that the field already holds leaves the text alone, so that an echo
        of what is being typed disturbs nothing."""
        if quantity == self._quantity and (quantity is not None or not self.text()):
            self._committed = self._committed if self._editing else quantity
            return
        self._quantity = self._committed = quantity
        self._show_text(quantity)

    def show_error(self, sentence: str) -> None:
        """Say something that only others can know to be wrong with this entry; the next edit clears it."""
        self._set_error(sentence, at_once=True)

    # --- typing ----------------------------------------------------------------------------------------------------

    @property
    def _comma(self) -> bool:
        return self.locale().decimalPoint() == ","

    def _on_edited(self, text: str) -> None:
        self._editing = True
        try:
            quantity = self._read(text)
        except QuantityError as error:
            self._set_error(str(error), at_once=False)
            return
        self._take(quantity)

    def _read(self, text: str) -> Quantity | None:
        if self._optional and not text.strip():
            return None
        return read_quantity(text, self.kind, decimal_comma=self._comma)

    def _take(self, quantity: Quantity | None) -> None:
        """Hold a good quantity that the text already says."""
        different = quantity != self._quantity
        self._quantity = quantity
        self._set_error("", at_once=True)
        if different:
            self.changed.emit(quantity)

    def commit(self) -> None:
        """The text is finished: say so, or say what is wrong with it. A wrong text stays, to be mended."""
        if self._error:
            self._show_error_now()
            return
        if self._editing:
            self._editing = False
            self._forget_edits()
        if self._quantity != self._committed:
            self._committed = self._quantity
            self.committed.emit(self._quantity)

    def revert(self) -> None:
        """Back to what was last committed."""
        quantity, different = self._committed, self._quantity != self._committed
        self._quantity = quantity
        self._show_text(quantity)
        if different:
            self.changed.emit(quantity)

    def _show_text(self, quantity: Quantity | None) -> None:
        self.setText("" if quantity is None else localised(quantity.text, decimal_comma=self._comma))
        self._editing = False
        self._set_error("", at_once=True)

    def _forget_edits(self) -> None:
        """Empty the line's own undo history: from here on, undo is the window's."""
        cursor, start, length = self.cursorPosition(), self.selectionStart(), self.selectionLength()
        self.setText(self.text())
        if start >= 0:
            self.setSelection(start, length)
        else:
            self.setCursorPosition(cursor)

    # --- what it says ----------------------------------------------------------------------------------------------

    def _set_error(self, sentence: str, *, at_once: bool) -> None:
        self._error = sentence
        self._describe()
        if at_once or not sentence or self._shown_error:
            self._show_error_now()
        else:
            self._patience.start()

    def _show_error_now(self) -> None:
        self._patience.stop()
        if self._error == self._shown_error:
            return
        self._shown_error = self._error
        self.setProperty("invalid", bool(self._error))  # for the style sheet; the sentence itself is the sign
        self.style().polish(self)
        self.error_changed.emit(self._error)

    def _describe(self) -> None:
        reading = self.reading_text
        said = self._error or (f"{self._label}: {reading}" if reading else "")
        self.setToolTip("\n".join(line for line in (self._tip, said) if line))
        self.setWhatsThis(self._tip or self._label)
        self.setAccessibleDescription(" ".join(line for line in (said, self._tip) if line))

    # --- stepping --------------------------------------------------------------------------------------------------

    def step_by(self, steps: int, *, coarse: bool = False) -> None:
        """Move along the ladder of round numbers; nothing happens while the text is wrong or empty."""
        if self._error or self._quantity is None or self.isReadOnly():
            return
        text = step(self.text(), steps, self.kind, coarse=coarse, decimal_comma=self._comma)
        if text != self.text():
            self._replace(text, self._read(text))

    def _replace(self, text: str, quantity: Quantity | None) -> None:
        """Another text by one act of the user: a step, or a unit."""
        self.setText(text)
        self._editing = False
        self._take(quantity)
        self.commit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        steps = {
            Qt.Key.Key_Up: (1, False),
            Qt.Key.Key_Down: (-1, False),
            Qt.Key.Key_PageUp: (1, True),
            Qt.Key.Key_PageDown: (-1, True),
        }
        move = steps.get(Qt.Key(event.key())) if event.modifiers() in _PLAIN else None
        if move is not None:
            self.step_by(move[0], coarse=move[1])
            event.accept()
        elif event.key() == Qt.Key.Key_Escape and (self._editing or self._error):
            self.revert()
            event.accept()
        elif is_undo(event) and not self._editing:
            event.ignore()
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        # A line edit claims undo and redo for itself; here it may only while there are edits to take back.
        if (
            event.type() == QEvent.Type.ShortcutOverride
            and isinstance(event, QKeyEvent)
            and is_undo(event)
            and not self._editing
        ):
            event.ignore()
            return False
        return super().event(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        if not self.hasFocus() or self.isReadOnly():
            self._turned = 0
            event.ignore()
            return
        self._turned += event.angleDelta().y()
        notches = int(self._turned / _NOTCH)
        self._turned -= notches * _NOTCH
        if notches:
            self.step_by(notches, coarse=bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier))
        event.accept()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self._turned = 0
        if event.reason() != Qt.FocusReason.PopupFocusReason:
            self.commit()

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.LocaleChange and not self._editing and not self._error:
            self._show_text(self._quantity)

    # --- units -----------------------------------------------------------------------------------------------------

    def show_in(self, unit: str) -> None:
        """Write the same quantity in another unit. Value and uncertainty stay what they are, so no answer changes."""
        if self._error or self._quantity is None or unit == unit_of(self._quantity.text, self.kind):
            return
        value, sigma = self._quantity.value, self._quantity.sigma
        text = exact_text(value, unit, sigma, kind=self.kind)
        self._replace(localised(text, decimal_comma=self._comma), Quantity(text, value, sigma))

    def unit_menu(self, parent: QWidget | None = None) -> QMenu:
        """The units in which the quantity can be shown, the present one checked."""
        menu = QMenu("Show in", parent or self)
        group = QActionGroup(menu)
        present = unit_of(self._quantity.text, self.kind) if self._quantity is not None else ""
        for unit in self.kind.units:
            action = QAction(unit, menu)
            action.setCheckable(True)
            action.setChecked(unit == present)
            action.triggered.connect(lambda _checked=False, unit=unit: self.show_in(unit))
            group.addAction(action)
            menu.addAction(action)
        menu.setEnabled(self._quantity is not None and not self._error)
        return menu

    def context_menu(self) -> QMenu:
        """The line edit's own menu, with the units below."""
        menu = self.createStandardContextMenu()
        if len(self.kind.units) > 1 and not self.isReadOnly():
            menu.addSeparator()
            menu.addMenu(self.unit_menu(menu))
        return menu

    def contextMenuEvent(self, event: QContextMenuEvent) -> None:
        menu = self.context_menu()
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        menu.popup(event.globalPos())


_PLAIN = (Qt.KeyboardModifier.NoModifier, Qt.KeyboardModifier.KeypadModifier)


def is_undo(event: QKeyEvent) -> bool:
    """Whether a key is that of undo or redo."""
    return event.matches(QKeySequence.StandardKey.Undo) or event.matches(QKeySequence.StandardKey.Redo)
