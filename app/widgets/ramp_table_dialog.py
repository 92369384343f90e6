"""How a ramp is written as a table: the time step, the unit of each column, and whether the cloud stands beside."""

from __future__ import annotations

from PySide6.QtWidgets import QCheckBox, QDialog, QDialogButtonBox, QFormLayout, QLabel, QVBoxLayout, QWidget

from app.answers.ramp import RampAnswer
from app.answers.ramp_inputs import ramp_of
from app.plan import Plan
from app.ramp_quantities import RAMP_COLUMNS, control_column
from app.ramp_table import ramp_table, usual_step
from app.units import DURATION, best_unit, quantity
from app.widgets.form import Choice
from app.widgets.quantity_field import QuantityField
from physics.ramps import Control

_LINES_SHOWN = 3


class RampTableDialog(QDialog):
    """`text` is the table that was chosen; the dialog shows its first lines, and OK waits until it can be made."""

    def __init__(self, plan: Plan, answer: RampAnswer | None, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("The ramp as a table")
        self._plan, self._answer = plan, answer
        self.text = ""
        ramp = ramp_of(plan)
        step = usual_step(ramp.duration)
        self.step = QuantityField(DURATION, "Time step", tip="One row a step")
        self.step.set_quantity(quantity(step, best_unit(step, ("s", "ms", "µs")), kind=DURATION))
        self.step.changed.connect(lambda _value: self._make())
        self.step.error_changed.connect(lambda _sentence: self._make())
        form = QFormLayout()
        form.addRow("Time step", self.step)
        self.units: dict[str, Choice] = {}
        moved = dict.fromkeys(move.control for stage in plan.ramp for move in stage.moves)
        for name, units in (("time", RAMP_COLUMNS["time"].units), *((c.label, control_column(c).units) for c in moved)):
            if len(units) < 2:
                continue
            choice = Choice()
            choice.addItems(list(units))
            choice.setCurrentText(_unit_in_use(plan, name, moved, units))
            choice.setAccessibleName(f"Unit of {name}")
            choice.currentIndexChanged.connect(lambda _index: self._make())
            form.addRow(f"{name} in", choice)
            self.units[name] = choice
        self.cloud = QCheckBox("Atoms, temperature and more beside the controls")
        self.cloud.setEnabled(answer is not None)
        self.cloud.toggled.connect(lambda _on: self._make())
        form.addRow("", self.cloud)
        self.problem, self.preview = QLabel(), QLabel()
        self.problem.setObjectName("fieldError")
        self.problem.setWordWrap(True)
        self.preview.setObjectName("plotStatus")
        self.buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        self.buttons.accepted.connect(self.accept)
        self.buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.setContentsMargins(20, 14, 20, 14)
        column.setSpacing(10)
        column.addLayout(form)
        column.addWidget(self.preview)
        column.addWidget(self.problem)
        column.addWidget(self.buttons)
        self.setMinimumWidth(420)
        self._make()

    def _make(self) -> None:
        """The table as it is wished for now, or why it cannot be."""
        self.text, sentence = "", self.step.error_text
        if not sentence and self.step.quantity is not None:
            units = {name: choice.currentText() for name, choice in self.units.items()}
            try:
                self.text = ramp_table(
                    self._plan, self.step.quantity.value, units, answer=self._answer if self.cloud.isChecked() else None
                )
            except ValueError as error:
                sentence = f"{str(error)[:1].upper()}{str(error)[1:]}."
        self.problem.setText(sentence)
        self.problem.setVisible(bool(sentence))
        lines = self.text.splitlines()
        shown = [line if len(line) < 70 else f"{line[:68]}…" for line in lines[:_LINES_SHOWN]]
        self.preview.setText("\n".join([f"{len(lines) - 1} rows:", *shown, "…"]) if lines else "")
        self.buttons.button(QDialogButtonBox.StandardButton.Ok).setEnabled(bool(self.text))


def _unit_in_use(plan: Plan, name: str, controls: dict[Control, None], units: tuple[str, ...]) -> str:
    """The unit in which the plan writes a control, if it is one of those offered; else the first."""
    from app.answers.ramp_design import unit_in_use

    control = next((control for control in controls if control.label == name), None)
    unit = units[0] if control is None else unit_in_use(plan, control)
    return unit if unit in units else units[0]
