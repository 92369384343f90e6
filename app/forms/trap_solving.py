"""Solve backwards: what is wanted or was measured goes in, what a beam or the coils need for it comes out.

Nothing changes before the user has read what would, and takes it.
"""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QPushButton, QWidget

from app.answers.trap_solving import Aim, SolvedTrap, Wish
from app.figures.profile import AXES
from app.plan import PLAN_FIELDS, BeamChoice, Plan, PlanField
from app.units import DEPTH, FREQUENCY
from app.widgets.card import CardHead
from app.widgets.form import Choice, Form
from app.widgets.quantity_field import QuantityField

_TITLE = "Solve backwards"
_AIM, _BEAM, _AXIS, _WAIST, _DEPTH, _FREQUENCY = _ROWS = ("aim", "beam", "axis", "which", "depth", "frequency")
_TIPS = {
    Aim.POWER_FOR_DEPTH: "The power at which the trap is as deep as is wanted.",
    Aim.POWER_FOR_MEAN_FREQUENCY: "The power at which the geometric mean of the frequencies is what is wanted.",
    Aim.LOWEST_POWER: "The least power that still holds atoms, against gravity too.",
    Aim.LEVITATION: "The gradient at which the field carries the atoms.",
    Aim.POWER_MEASURED: "A measured frequency tells how much power reaches the atoms.",
    Aim.WAIST_MEASURED: "A measured frequency tells the waist of the beam.",
}


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
        self.aim = self._choice(_AIM, "Find", [(aim.value, aim) for aim in Aim], "What to look for.")
        self.aim.activated.connect(self._wish_changed)
        self.beam = self._choice(_BEAM, "Beam", [], "The beam whose power or waist is looked for.")
        axes = [(f"{axis}, nearest mode", place) for place, axis in enumerate(AXES)]
        self.axis = self._choice(_AXIS, "Along", axes, "The axis nearest to which the frequency was measured.")
        waists = [("both waists", None), ("horizontal waist", 0), ("vertical waist", 1)]
        self.waist = self._choice(_WAIST, "Calibrate", waists, "Which waist the measurement tells.")
        self.depth_field = self._number(_DEPTH, "Wanted depth", PLAN_FIELDS["trap.depth"])
        self.frequency_field = self._number(_FREQUENCY, "Frequency", PLAN_FIELDS["trap.frequencies"])
        self.beam.activated.connect(self._wish_changed)
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

    def _choice(self, key: str, label: str, items: Sequence[tuple[str, object]], tip: str) -> Choice:
        box = Choice()
        for text, value in items:
            box.addItem(text, value)
        self.add_row(key, label, "", box, tip)
        box.activated.connect(self.forget)
        return box

    def _number(self, key: str, label: str, field: PlanField) -> QuantityField:
        kind = DEPTH if key == _DEPTH else FREQUENCY
        line = QuantityField(kind, label, tip=field.tip, optional=True)
        line.setPlaceholderText(f"such as {kind.example}")
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
        aim, shown = self._aim, self.unfolded
        beam = self._beam
        rows = {
            _AIM: True,
            _BEAM: aim.of_beam,
            _AXIS: aim.measured,
            _WAIST: aim is Aim.WAIST_MEASURED and beam is not None and len(beam.waists) == 2,
            _DEPTH: aim is Aim.POWER_FOR_DEPTH,
            _FREQUENCY: aim.wants_number and aim is not Aim.POWER_FOR_DEPTH,
        }
        for key, wanted in rows.items():
            self.show_row(key, shown and wanted)
        self.show_note(_AIM, _TIPS[aim])
        if not shown:
            self.show_row(_AIM, False)
        self.apply.setVisible(shown and self.solved is not None)

    def show_plan(self, plan: Plan) -> None:
        names, present = [beam.name for beam in plan.trap.beams], self.beam.currentText()
        if names != [self.beam.itemText(place) for place in range(self.beam.count())]:
            self.beam.clear()
            self.beam.addItems(names)
            self.beam.setCurrentIndex(max(0, self.beam.findText(present)))
        if self.solved is not None and (plan.trap, plan.species) != (
            self.solved.before.trap,
            self.solved.before.species,
        ):
            self.forget()
        self._show_rows()

    @property
    def _aim(self) -> Aim:
        aim: Aim = self.aim.currentData()
        return aim

    @property
    def _beam(self) -> BeamChoice | None:
        name = self.beam.currentText()
        beams = () if self._plan is None else self._plan.trap.beams
        return next((beam for beam in beams if beam.name == name), None)

    def _wish_changed(self) -> None:
        self.forget()
        self._show_rows()

    # ---------------------------------------------------------------- solving

    def _press(self) -> None:
        if self._busy:
            self._busy = False
            self.dropped.emit()
            self._say("")
            return
        aim = self._aim
        field = self.depth_field if aim is Aim.POWER_FOR_DEPTH else self.frequency_field
        if aim.wants_number:
            field.commit()
            if field.error_text:
                return
            if field.quantity is None:
                self.show_problem(
                    _DEPTH if field is self.depth_field else _FREQUENCY,
                    "type the measured frequency" if aim.measured else "type the wanted value",
                )
                return
        if aim.of_beam and self._beam is None:
            self._say("The trap has no beam to solve for.")
            return
        number = None if not aim.wants_number or field.quantity is None else field.quantity.value
        wish = Wish(
            aim=aim,
            beam=self.beam.currentText() if aim.of_beam else "",
            axis=self.axis.currentData(),
            number=number,
            which=self.waist.currentData(),
        )
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
