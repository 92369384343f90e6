"""A part of the window whose fields show pieces of a plan and put what is typed into it, beyond the fixed forms."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QWidget

from app.plan import Plan
from app.plan_field import PlanError
from app.units import Kind, Quantity
from app.widgets.quantity_field import QuantityField

Edit = Callable[[Plan, Quantity | None], Plan]


class PlanEditor(QWidget):
    """Signals: plan_edited(Plan, what, merge key); problem_changed(str) with what cannot be read, or "".

    `check` is given every edited plan and raises PlanError or ValueError for one that cannot be.
    """

    plan_edited = Signal(object, str, str)
    problem_changed = Signal(str)

    def __init__(self, check: Callable[[Plan], Plan], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._check = check
        self._plan: Plan | None = None
        self._session = 0
        self._fills: list[Callable[[Plan], None]] = []
        self._errors: dict[QuantityField, str] = {}
        self.error = QLabel()
        self.error.setObjectName("fieldError")
        self.error.setWordWrap(True)
        self.error.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.error.hide()

    # ---------------------------------------------------------------- showing

    def set_plan(self, plan: Plan) -> None:
        """Show a plan. Nothing is emitted; a text that is being typed is left alone."""
        self._plan = plan
        self.lay_out(plan)
        for fill in self._fills:
            fill(plan)

    def lay_out(self, plan: Plan) -> None:
        """Make the fields that a plan needs, where it needs others than are there."""

    def add_fill(self, fill: Callable[[Plan], None]) -> None:
        """Something that shows the plan, whenever there is another one."""
        self._fills.append(fill)

    def forget_fields(self) -> None:
        """All fields are about to be made anew."""
        self._fills.clear()
        self._errors.clear()
        self._show_problem()

    def discard_edits(self) -> None:
        """Drop texts that could not be read: another plan is about to be shown."""
        for field in list(self._errors):
            field.blockSignals(True)
            field.revert()
            field.blockSignals(False)
        self._errors.clear()
        self._show_problem()

    @property
    def problem(self) -> str:
        """What cannot be read, in a sentence; empty while all is well."""
        return self.error.text()

    # ---------------------------------------------------------------- fields

    def add_field(
        self,
        kind: Kind,
        label: str,
        read: Callable[[Plan], Quantity | None],
        write: Edit,
        key: str,
        *,
        optional: bool = False,
        tip: str = "",
    ) -> QuantityField:
        """A field that shows a quantity of the plan, and puts what is typed into it."""
        field = QuantityField(kind, label, tip=tip, optional=optional)
        field.setMinimumWidth(field.fontMetrics().horizontalAdvance("00.0 µK") + 14)
        field.changed.connect(lambda value: self._put(field, label, write, value, key))
        field.editingFinished.connect(self._end_session)
        field.error_changed.connect(lambda sentence: self._set_error(field, sentence))
        self._fills.append(lambda plan: _show(field, read(plan)))
        return field

    def _put(self, field: QuantityField, label: str, write: Edit, value: Quantity | None, key: str) -> None:
        if self._plan is None:
            return
        try:
            plan = self._check(write(self._plan, value))
        except (PlanError, ValueError) as error:
            field.show_error(f"{label}: {error}")
            return
        self._plan = plan
        self.plan_edited.emit(plan, label[:1].lower() + label[1:], f"{key} {self._session}")

    def _end_session(self) -> None:
        """The next edit is another step for undo."""
        self._session += 1

    def edit(self, change: Callable[[Plan], Plan], what: str) -> None:
        """A change that is a step of its own. What cannot be is told, and nothing changes."""
        if self._plan is None:
            return
        try:
            plan = self._check(change(self._plan))
        except (PlanError, ValueError) as error:
            self.set_plan(self._plan)
            self.say(f"{error}.")
            return
        self.say("")
        if plan != self._plan:
            self.set_plan(plan)
            self.plan_edited.emit(plan, what, "")

    def _set_error(self, field: QuantityField, sentence: str) -> None:
        if sentence:
            self._errors[field] = sentence
        else:
            self._errors.pop(field, None)
        self._show_problem()

    def _show_problem(self) -> None:
        self.say("")

    def say(self, sentence: str) -> None:
        """Say under the fields what is wrong; an empty text takes it back, unless a field cannot be read."""
        sentence = sentence or next(iter(self._errors.values()), "")
        if sentence != self.error.text():
            self.error.setText(sentence)
            self.error.setVisible(bool(sentence))
            self.problem_changed.emit(sentence)


def _show(field: QuantityField, quantity: Quantity | None) -> None:
    """Show a quantity from its first digit on."""
    if quantity != field.quantity:
        field.set_quantity(quantity)
        field.setCursorPosition(0)
