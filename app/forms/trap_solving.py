"""Solve backwards: what is wanted or was measured goes in, what a beam or the coils need for it comes out.

Nothing changes before the user has read what would, and takes it.
"""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QPushButton, QWidget

from app.answers.trap_controls import Control, ControlKind, Until
from app.answers.trap_solving import SolvedTrap, Wish, solvable
from app.plan import PLAN_FIELDS, Plan
from app.solving_words import UNTIL, solving_hint
from app.units import Kind
from app.widgets.card import CardHead
from app.widgets.form import Choice, Form
from app.widgets.quantity_field import QuantityField

_TITLE = "Solve backwards"
_CONTROL, _UNTIL, _DEPTH, _FREQUENCY = "control", "until", "depth", "frequency"
_SHORT = {ControlKind.POWERS: "all powers", ControlKind.KNIFE: "RF knife"}
"""Names of controls that are not those of the command line; the column is narrow."""


class SolvingCard(Form):
    """Signals: wanted(Wish), to be solved; dropped() when nobody waits for it any more; taken(SolvedTrap)."""

    wanted = Signal(object)
    dropped = Signal()
    taken = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(_TITLE, parent)
        self.owner = " to solve for"
        self.solved: SolvedTrap | None = None
        self._busy = False
        self.heading.hide()
        self.head = CardHead(_TITLE)
        self.head.button.hide()
        self.head.fold.setToolTip("Which power, waist or gradient gives what is wanted, or explains what was measured")
        self._grid.addWidget(self.head, 0, 0, 1, 2)
        self.control = self._choice(_CONTROL, "Turn", "Which number of the beams and coils is looked for.")
        self.until = self._choice(_UNTIL, "Until", "What the trap is to be, or was measured to be.")
        self.control.activated.connect(self._control_chosen)
        self.until.activated.connect(self._show_rows)
        self.depth_field = self._number(_DEPTH, "Wanted depth", "trap.depth")
        self.frequency_field = self._number(_FREQUENCY, "Frequency", "trap.frequencies")
        self.button = QPushButton("Work it out")
        self.button.clicked.connect(self._press)
        self.result = QLabel()
        self.result.setObjectName("fact")
        self.result.setWordWrap(True)
        self.result.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        self.apply = QPushButton("Take it")
        self.apply.clicked.connect(self._take)
        left = Qt.AlignmentFlag.AlignLeft
        self._grid.addWidget(self.button, self._row, 1, left)
        self._grid.addWidget(self.result, self._row + 1, 0, 1, 2)
        self._grid.addWidget(self.apply, self._row + 2, 1, left)
        self.head.folded_changed.connect(self.set_unfolded)
        self.set_unfolded(False)

    def _choice(self, key: str, label: str, tip: str) -> Choice:
        box = Choice()
        self.add_row(key, label, "", box, tip)
        box.activated.connect(self.forget)
        return box

    def _number(self, key: str, label: str, path: str) -> QuantityField:
        field = PLAN_FIELDS[path]
        assert isinstance(field.kind, Kind)
        line = QuantityField(field.kind, label, tip=field.tip, optional=True)
        line.setPlaceholderText(f"such as {field.kind.example}")
        self.add_row(key, label, "", line, field.tip)
        self._fields[key] = line
        line.changed.connect(lambda _quantity: self.forget())
        line.error_changed.connect(lambda sentence: self.show_problem(key, sentence))
        line.returnPressed.connect(self._press)
        return line

    # ---------------------------------------------------------------- showing

    @property
    def problems(self) -> tuple[str, ...]:
        """None: what is typed here is no part of the plan, and makes no answer doubtful."""
        return ()

    @property
    def unfolded(self) -> bool:
        return self.head.unfolded

    def set_unfolded(self, unfolded: bool) -> None:
        """Show or hide all but the title."""
        self.head.set_unfolded(unfolded)
        self.button.setVisible(unfolded)
        self.result.setVisible(unfolded and bool(self.result.text()))
        self._show_rows()

    def _show_rows(self) -> None:
        shown, until, control = self.unfolded, self._until, self._control
        number = until is not None and until.wants_number
        self.show_row(_CONTROL, shown)
        self.show_row(_UNTIL, shown)
        self.show_row(_DEPTH, shown and until is Until.DEPTH)
        self.show_row(_FREQUENCY, shown and number and until is not Until.DEPTH)
        hint = "" if control is None or until is None or not shown else solving_hint(control, until)
        self.show_note(_UNTIL, hint)
        self.button.setEnabled(control is not None)
        self.apply.setVisible(shown and self.solved is not None)

    def show_plan(self, plan: Plan) -> None:
        here = self._control
        there = tuple(solvable(plan.trap))
        if there != tuple(self.control.itemData(place) for place in range(self.control.count())):
            self.control.clear()
            for control in there:
                name = _SHORT.get(control.kind, control.kind.value)
                self.control.addItem(f"{control.beam}: {name}" if control.beam else name, control)
            first = next((place for place, control in enumerate(there) if control.beam), 0)
            self.control.setCurrentIndex(there.index(here) if here in there else first)
        self._control_chosen()
        found = self.solved
        if found is not None and (plan.trap, plan.species) != (found.before.trap, found.before.species):
            self.forget()

    def _control_chosen(self) -> None:
        """What the control in use can be asked for."""
        control, here = self._control, self._until
        allowed = () if control is None or self._plan is None else solvable(self._plan.trap)[control]
        if allowed != tuple(self.until.itemData(place) for place in range(self.until.count())):
            self.until.clear()
            for until in allowed:
                self.until.addItem(UNTIL[until], until)
            self.until.setCurrentIndex(allowed.index(here) if here in allowed else 0 if allowed else -1)
        self._show_rows()

    @property
    def _control(self) -> Control | None:
        control: Control | None = self.control.currentData()
        return control

    @property
    def _until(self) -> Until | None:
        until: Until | None = self.until.currentData()
        return until

    # ---------------------------------------------------------------- solving

    def _press(self) -> None:
        if self._busy:
            self._busy = False
            self.dropped.emit()
            self._say("")
            return
        control, until = self._control, self._until
        if control is None or until is None:
            return
        number = None
        if until.wants_number:
            key = _DEPTH if until is Until.DEPTH else _FREQUENCY
            field = self._fields[key]
            field.commit()
            if field.error_text:
                return
            if field.quantity is None:
                field.show_error("type the depth that is wanted" if key == _DEPTH else "type the frequency")
                return
            number = field.quantity.value
        wish = Wish(control=control, until=until, number=number)
        self.solved, self._busy = None, True
        self._say("Working it out …")
        self.wanted.emit(wish)

    def show_solved(self, solved: SolvedTrap) -> None:
        """What was found; the plan is as it was until the user takes it."""
        from app.solving_words import change_lines, consequence_lines

        if not self._busy:
            return
        self._busy = False
        if self._plan is None or self._plan.trap != solved.before.trap:
            self._say("The trap has changed meanwhile: work it out again.")
            return
        self.solved = solved
        self._say("\n".join([*change_lines(solved), *consequence_lines(solved)]))

    def show_no_solution(self, sentence: str) -> None:
        """Why nothing was found."""
        if self._busy:
            self._busy = False
            self._say(f"{sentence[:1].upper()}{sentence[1:]}.")

    def forget(self) -> None:
        """Another question: what was found for the last one goes."""
        if self._busy:
            self._busy = False
            self.dropped.emit()
        self.solved = None
        self._say("")

    def _say(self, text: str) -> None:
        self.result.setText(text)
        self.result.setAccessibleName(f"{_TITLE}: {text}" if text else f"{_TITLE}: nothing yet")
        self.result.setVisible(self.unfolded and bool(text))
        self.button.setText("Stop" if self._busy else "Work it out")
        self.apply.setVisible(self.unfolded and self.solved is not None)

    def _take(self) -> None:
        if self.solved is not None:
            solved = self.solved
            self.taken.emit(solved)
