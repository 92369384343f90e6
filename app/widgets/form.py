"""A form: a titled column of labelled fields that shows one section of the plan and turns edits into plans.

Labels, tips and kinds come from the plan's own table of fields. A form knows nothing of answers and plots; it is given
plans and sends plans.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import Any, cast

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFont, QWheelEvent
from PySide6.QtWidgets import QComboBox, QGridLayout, QHBoxLayout, QLabel, QWidget

from app.plan import PLAN_FIELDS, Plan, PlanError, PlanField
from app.units import Kind, Quantity
from app.widgets.entry_field import EntryField
from app.widgets.quantity_field import QuantityField

LONGEST_LABEL = "Scattering length "  # all forms give their labels this much room


class Choice(QComboBox):
    """A combo box that leaves the wheel to the page unless it has the focus."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.setMinimumContentsLength(8)

    def wheelEvent(self, event: QWheelEvent) -> None:
        if self.hasFocus():
            super().wheelEvent(event)
        else:
            event.ignore()


def plan_with_entry(plan: Plan, path: str, value: object) -> Plan:
    """The plan with one entry replaced; what a given value excludes is dropped, and with another species the
    scattering length that was typed for it and the passenger.

    Raises PlanError where no plan can have it.
    """
    field = PLAN_FIELDS[path]
    entries: dict[str, dict[str, Any]] = {field.section: {field.name: value}}
    for other in (PLAN_FIELDS[path] for path in field.excludes if value is not None):
        entries.setdefault(other.section, {})[other.name] = None
    changes: dict[str, Any] = {name: replace(getattr(plan, name), **entry) for name, entry in entries.items()}
    if path == "species.key" and plan.passenger is not None:
        changes["passenger"] = replace(plan.passenger, scattering_length=None)
    return replace(plan, **changes)


def with_mnemonic(label: str, letter: str) -> str:
    """The label with an ampersand before the first such letter."""
    place = label.lower().find(letter.lower())
    if place < 0:
        raise ValueError(f"{label!r} has no letter {letter!r} for a mnemonic")
    return f"{label[:place]}&{label[place:]}"


Put = Callable[[Plan, Any], Plan]
"""How what a field holds enters the plan; PlanError where no plan can have it."""


class Form(QWidget):
    """Signals: plan_edited(Plan, what, merge key); problems_changed() when what cannot be read changes.

    `owner` ends what the fields are called in a list of steps or by a screen reader, such as " of beam A", where
    several forms have fields of one name. A form that is made with one has no mnemonics, which would mean two things.
    """

    plan_edited = Signal(object, str, str)
    problems_changed = Signal()

    def __init__(self, title: str, parent: QWidget | None = None, *, owner: str = "") -> None:
        super().__init__(parent)
        self.setAccessibleName(title + owner)
        self._plan: Plan | None = None
        self.owner = owner
        self._mnemonics = not owner
        self._labels: dict[str, str] = {}
        self._fields: dict[str, QuantityField] = {}
        self._entries: dict[str, EntryField] = {}
        self._sessions: dict[str, int] = {}
        self._errors: dict[str, QLabel] = {}
        self._notes: dict[str, QLabel] = {}
        self._widgets: dict[str, tuple[QWidget, ...]] = {}
        self._row = 1
        self._grid = QGridLayout(self)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(10)
        self._grid.setVerticalSpacing(3)
        self._grid.setColumnMinimumWidth(0, self.fontMetrics().horizontalAdvance(LONGEST_LABEL))
        self._grid.setColumnStretch(1, 1)
        self.heading = QLabel(title)
        self.heading.setObjectName("formTitle")
        font = QFont(self.heading.font())
        font.setWeight(QFont.Weight.DemiBold)
        self.heading.setFont(font)
        self._grid.addWidget(self.heading, 0, 0, 1, 2)

    # ---------------------------------------------------------------- building

    def add_row(self, key: str, label: str, letter: str, widget: QWidget, tip: str) -> None:
        """A labelled widget, with room for a note and for an error under it; an empty letter gives no mnemonic."""
        letter = letter if self._mnemonics else ""
        buddy = QLabel(with_mnemonic(label, letter) if letter else label)
        if letter:
            buddy.setBuddy(widget)
        buddy.setToolTip(tip)
        self._labels[key] = label
        widget.setAccessibleName(label + self.owner)
        if not isinstance(widget, QuantityField):
            widget.setToolTip(tip)
            widget.setWhatsThis(tip)
            widget.setAccessibleDescription(tip)
        note, error = self._add_messages(key)
        self._widgets[key] = (buddy, widget, note, error)
        self._grid.addWidget(buddy, self._row, 0)
        self._grid.addWidget(widget, self._row, 1)
        self._grid.addWidget(note, self._row + 1, 1)
        self._grid.addWidget(error, self._row + 2, 0, 1, 2)
        self._row += 3

    def _add_messages(self, key: str) -> tuple[QLabel, QLabel]:
        note, error = QLabel(), QLabel()
        note.setObjectName("fieldNote")
        error.setObjectName("fieldError")
        for message in (note, error):
            message.setWordWrap(True)
            message.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
            message.hide()
        self._notes[key], self._errors[key] = note, error
        return note, error

    def add_quantity(
        self, path: str | PlanField, letter: str, *, label: str = "", key: str = "", put: Put | None = None
    ) -> QuantityField:
        """A field for a quantity of the plan. `put` says how it enters the plan, where it is no entry of its own."""
        field = PLAN_FIELDS[path] if isinstance(path, str) else path
        key, label = key or field.path, label or field.label
        line = self._quantity_line(field, label)
        self.add_row(key, label, letter, line, field.tip)
        self._connect_quantity(key, label, line, put or partial(_put, field.path))
        return line

    def add_place(
        self, field: PlanField, key: str, puts: tuple[Put, Put, Put], *, label: str = ""
    ) -> tuple[QuantityField, QuantityField, QuantityField]:
        """Three fields side by side, under their label, for a point of the laboratory."""
        label = label or field.label
        heading = QLabel(f"{label} x, y, z")
        heading.setToolTip(field.tip)
        row = QHBoxLayout()
        row.setSpacing(4)
        self._grid.addWidget(heading, self._row, 0, 1, 2)
        self._grid.addLayout(row, self._row + 1, 0, 1, 2)
        self._row += 2
        lines = []
        for axis, put in zip("xyz", puts, strict=True):
            line = self._quantity_line(field, f"{label} {axis}")
            part = f"{key}.{axis}"
            self._labels[part] = f"{label} {axis}"
            line.setAccessibleName(f"{label} {axis}{self.owner}")
            line.setMinimumWidth(line.fontMetrics().horizontalAdvance("-10 µm") + 14)
            row.addWidget(line, 1)
            note, error = self._add_messages(part)
            self._widgets[part] = (*((heading,) if axis == "x" else ()), line, note, error)
            self._grid.addWidget(note, self._row, 0, 1, 2)
            self._grid.addWidget(error, self._row + 1, 0, 1, 2)
            self._row += 2
            self._connect_quantity(part, f"{label} {axis}", line, put)
            lines.append(line)
        x, y, z = lines
        return x, y, z

    def _quantity_line(self, field: PlanField, label: str) -> QuantityField:
        assert isinstance(field.kind, Kind)
        return QuantityField(field.kind, label, tip=field.tip, optional=not field.required)

    def _connect_quantity(self, key: str, label: str, line: QuantityField, put: Put) -> None:
        self._fields[key] = line
        self._sessions[key] = 0
        line.changed.connect(lambda quantity: self._changed(key, label, put, quantity))
        line.editingFinished.connect(partial(self._end_session, key))
        line.error_changed.connect(partial(self.show_problem, key))

    def add_entry(self, key: str, label: str, letter: str, line: EntryField, tip: str, put: Put) -> None:
        """A line for something else than a quantity, taken when it is finished: a step of its own."""
        self.add_row(key, label, letter, line, tip)
        self._entries[key] = line
        line.entered.connect(lambda value: self._changed(key, label, put, value, own_step=True))
        line.error_changed.connect(partial(self.show_problem, key))

    def add_fact(self, key: str, label: str, tip: str) -> QLabel:
        """A labelled text to read and to copy, which nothing can be typed into."""
        fact = QLabel()
        fact.setObjectName("fact")
        fact.setWordWrap(True)
        fact.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        fact.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.add_row(key, label, "", fact, tip)
        return fact

    # ---------------------------------------------------------------- edits

    def _changed(self, key: str, label: str, put: Put, value: object, *, own_step: bool = False) -> None:
        if self._plan is None:
            return
        try:
            plan = put(self._plan, value)
        except PlanError as error:
            (self._fields.get(key) or self._entries[key]).show_error(str(error))
            return
        step = "" if own_step else f"{self.owner}{key} {self._sessions[key]}"
        self.plan_edited.emit(plan, _step_name(label, self.owner), step)

    def _end_session(self, key: str) -> None:
        """The next edit of this field is another step for undo."""
        self._sessions[key] += 1

    def edit(self, path: str, value: object) -> None:
        """An edit that is a step of its own, such as a choice from a list."""
        if self._plan is not None:
            what = _step_name(PLAN_FIELDS[path].label, self.owner)
            self.plan_edited.emit(plan_with_entry(self._plan, path, value), what, "")

    def set_owner(self, owner: str) -> None:
        """Whose fields these are, from now on."""
        if owner == self.owner:
            return
        self.owner = owner
        for key, label in self._labels.items():
            for widget in self._widgets[key]:
                if not isinstance(widget, QLabel) or widget.objectName() == "fact":
                    widget.setAccessibleName(label + owner)

    # ---------------------------------------------------------------- showing

    def set_plan(self, plan: Plan) -> None:
        """Show a plan. Nothing is emitted."""
        self._plan = plan
        self.show_plan(plan)

    def show_plan(self, plan: Plan) -> None:
        raise NotImplementedError

    def discard_edits(self) -> None:
        """Drop texts that could not be read: another plan is about to be shown."""
        fields: list[QuantityField | EntryField] = [*self._fields.values(), *self._entries.values()]
        for field in fields:
            field.blockSignals(True)
            field.revert()
            field.blockSignals(False)
        for key in self._errors:
            self.show_problem(key, "")

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read, as sentences, from top to bottom."""
        return tuple(label.text() for label in self._errors.values() if label.text())

    def show_problem(self, key: str, sentence: str) -> None:
        """Say under a field what is wrong with it; an empty text takes it back."""
        label = self._errors[key]
        if label.text() != sentence:
            label.setText(sentence)
            label.setVisible(bool(sentence))
            self.problems_changed.emit()

    def show_note(self, key: str, text: str) -> None:
        """A quiet word under a field."""
        label = self._notes[key]
        if label.text() != text:
            label.setText(text)
            label.setVisible(bool(text))

    def note_of(self, key: str) -> str:
        """The quiet word under a field, or nothing."""
        return self._notes[key].text()

    def show_row(self, key: str, shown: bool) -> None:
        """Show or hide a field with its label and messages."""
        for widget in self._widgets[key]:
            message = widget is self._notes[key] or widget is self._errors[key]
            widget.setVisible(shown and (not message or bool(cast(QLabel, widget).text())))

    def take_focus(self) -> None:
        """Give the keyboard to the first field."""
        item = self._grid.itemAtPosition(1, 1)
        widget = item.widget() if item is not None else None
        if widget is not None:
            widget.setFocus()


def _put(path: str, plan: Plan, quantity: Quantity | None) -> Plan:
    return plan_with_entry(plan, path, quantity)


def _step_name(label: str, owner: str) -> str:
    """What undo calls a change: small letters, but for an owner's name."""
    return f"{label[:1].lower()}{label[1:]}{owner}" if owner else label.lower()
