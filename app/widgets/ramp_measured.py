"""Clouds that were measured along a ramp, to be typed, and the rest of the ramp from one of them."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app import measured_edits
from app.figures.theme import Theme
from app.measured_edits import By, Where
from app.newest import Steps
from app.plan import Plan
from app.ramp_choices import LONGEST_LABEL, MeasuredChoice
from app.units import ATOM_NUMBER, CLOUD_WIDTH, TEMPERATURE, TIME, Kind, Quantity, best_unit, quantity
from app.widgets.form import Choice
from app.widgets.plan_editor import PlanEditor
from app.widgets.quantity_field import QuantityField
from app.widgets.scrolled import fill_scrolled
from app.words import number

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer

_HEADINGS = ("Cloud", "After", "", "Atoms", "By", "", "", "")
_HINT = (
    "Type what was measured, with its uncertainty: 2.1(1)e6. The points stand on the plots and on the map; the rest of "
    "the ramp can be followed from each."
)


class MeasuredView(PlanEditor):
    """since_chosen(str | None) is sent with the label of the cloud from which the rest is to be followed."""

    since_chosen = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(measured_edits.checked, parent)
        self.setAccessibleName("Measured clouds")
        self._pattern: object = None
        self._expected: tuple[float, float] | None = None
        self.since: str | None = None
        self.labels: list[QLineEdit] = []
        self.rests: list[QToolButton] = []
        hint = QLabel(_HINT)
        hint.setObjectName("plotStatus")
        hint.setWordWrap(True)
        self.sentence = QLabel()
        self.sentence.setWordWrap(True)
        self.sentence.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.add = QPushButton("Add a measured cloud")
        self.add.setToolTip("After the last stage, with the numbers that are expected there, to be corrected")
        self.add.clicked.connect(self._add)
        buttons = QHBoxLayout()
        buttons.addWidget(self.add)
        buttons.addStretch(1)
        self._table = QWidget()
        body = QWidget()
        self._column = QVBoxLayout(body)
        self._column.setContentsMargins(14, 4, 4, 6)
        self._column.setSpacing(8)
        self._column.addWidget(hint)
        self._column.addWidget(self._table)
        self._column.addWidget(self.error)
        self._column.addLayout(buttons)
        self._column.addWidget(self.sentence)
        self._column.addStretch(1)
        fill_scrolled(self, body)

    # ---------------------------------------------------------------- showing

    def lay_out(self, plan: Plan) -> None:
        pattern = (
            tuple(
                (measured_edits.where_of(cloud), measured_edits.by_of(cloud), len(cloud.widths))
                for cloud in plan.measured
            ),
            len(plan.ramp),
            plan.passenger is not None,
        )
        if pattern != self._pattern:
            self._pattern = pattern
            self._build(plan)

    def _build(self, plan: Plan) -> None:
        self.forget_fields()
        self.labels, self.rests = [], []
        old, self._table = self._table, QWidget()
        grid = QGridLayout(self._table)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(3)
        grid.setVerticalSpacing(4)
        if plan.measured:
            for column, text in enumerate(_HEADINGS):
                heading = QLabel(text)
                heading.setObjectName("paneTitle")
                grid.addWidget(heading, 0, column)
        for column, stretch in ((0, 3), (1, 3), (2, 2), (3, 3), (4, 3), (5, 4)):
            grid.setColumnStretch(column, stretch)
        for place, cloud in enumerate(plan.measured):
            self._add_row(grid, 2 * place + 1, place, cloud, plan)
            if plan.passenger is not None:
                self._add_passenger(grid, 2 * place + 2, place)
        self._column.replaceWidget(old, self._table)
        old.hide()
        old.deleteLater()

    def _add_row(self, grid: QGridLayout, row: int, place: int, cloud: MeasuredChoice, plan: Plan) -> None:
        name = f"measured cloud {place + 1}"
        label = QLineEdit()
        label.setMaxLength(LONGEST_LABEL)
        label.setMinimumWidth(label.fontMetrics().horizontalAdvance("after it"))
        label.setAccessibleName(f"Name of {name}")
        label.editingFinished.connect(lambda: self._rename(place, label.text()))
        self.add_fill(lambda plan: _show_text(label, plan.measured[place].label))
        self.labels.append(label)
        grid.addWidget(label, row, 0)
        where = _choice(
            [one.value for one in Where], measured_edits.where_of(cloud).value, f"Where {name} was measured"
        )
        where.activated.connect(lambda index: self._place(place, tuple(Where)[index]))
        grid.addWidget(where, row, 1)
        if cloud.stage is not None:
            stages = _choice(
                [f"{k}" for k in range(1, len(plan.ramp) + 1)],
                f"{cloud.stage}",
                f"Stage after which {name} was measured",
            )
            stages.activated.connect(lambda index: self._set(place, stage=index + 1))
            grid.addWidget(stages, row, 2)
        elif cloud.time is not None:
            grid.addWidget(self._field(TIME, f"Time of {name}", place, "time"), row, 2)
        atoms = self._field(ATOM_NUMBER, f"Atoms of {name}", place, "atoms")
        atoms.setMinimumWidth(atoms.fontMetrics().horizontalAdvance("2.5(3)e6") + 16)
        grid.addWidget(atoms, row, 3)
        by = _choice([one.value for one in By], measured_edits.by_of(cloud).value, f"What is known of {name}")
        by.activated.connect(lambda index: self._know(place, tuple(By)[index]))
        grid.addWidget(by, row, 4)
        grid.addWidget(self._temperature_fields(place, cloud, name), row, 5)
        rest = QToolButton()
        rest.setText("Continue")
        rest.setCheckable(True)
        rest.setAutoRaise(True)
        rest.setToolTip("Follow the rest of the ramp from this cloud")
        rest.setAccessibleName(f"Continue from {name}")
        rest.clicked.connect(lambda on: self._follow(place if on else None))
        self.add_fill(lambda plan: rest.setChecked(plan.measured[place].label == self.since))
        self.rests.append(rest)
        grid.addWidget(rest, row, 6)
        remove = QToolButton()
        remove.setText("−")
        remove.setAutoRaise(True)
        remove.setToolTip("Remove this cloud")
        remove.setAccessibleName(f"Remove {name}")
        remove.clicked.connect(
            lambda: self.edit(lambda plan: measured_edits.without_cloud(plan, place), "measured clouds")
        )
        grid.addWidget(remove, row, 7)

    def _add_passenger(self, grid: QGridLayout, row: int, place: int) -> None:
        """What was measured of the second species at the same time."""
        label = QLabel("of the passenger")
        label.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        grid.addWidget(label, row, 1, 1, 2)
        name = f"the passenger at measured cloud {place + 1}"
        for column, kind, what, key in (
            (3, ATOM_NUMBER, "Atoms", "passenger_atoms"),
            (5, TEMPERATURE, "Temperature", "passenger_temperature"),
        ):
            tip = f"{what} of the second species at the same time; empty: as simulated"
            field = self._field(kind, f"{what} of {name}", place, key, tip, optional=True)
            field.setPlaceholderText("as simulated")
            grid.addWidget(field, row, column)

    def _temperature_fields(self, place: int, cloud: MeasuredChoice, name: str) -> QWidget:
        if cloud.temperature is not None:
            return self._field(TEMPERATURE, f"Temperature of {name}", place, "temperature")
        box = QWidget()
        row = QHBoxLayout(box)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(4)
        for axis, letter in enumerate("xyz"):
            if axis > len(cloud.widths):
                break
            field = self.add_field(
                CLOUD_WIDTH, f"rms width {letter} of {name}", partial(_width, place, axis),
                partial(_put_width, place, axis), f"measured {place} width {letter}", optional=axis > 0,
            )  # fmt: skip
            field.setPlaceholderText(letter)
            row.addWidget(field, 1)
        time = self._field(TIME, f"Expansion time of {name}", place, "expansion_time", "After this time of expansion")
        row.addWidget(time, 1)
        return box

    def _field(
        self, kind: Kind, label: str, place: int, name: str, tip: str = "", *, optional: bool = False
    ) -> QuantityField:
        return self.add_field(
            kind, label, lambda plan: getattr(plan.measured[place], name), partial(_put, place, name),
            f"measured {place} {name}", tip=tip, optional=optional,
        )  # fmt: skip

    def show_answers(self, planned: RampAnswer | None, rest: RampAnswer | None) -> None:
        """Where the planned ramp ends, which a new cloud begins with; and how the rest of it ends from a cloud."""
        from app.ramp_words import ramp_verdict

        if planned is not None and len(planned.run.time):
            self._expected = (float(planned.run.atoms[-1]), float(planned.run.temperature[-1]))
        if rest is None or self.since is None:
            self.sentence.setText("")
            return
        text = f"From “{self.since}”: {ramp_verdict(rest)}"
        if planned is not None and len(planned.run.time) and len(rest.run.time):
            share = float(rest.run.atoms[-1]) / float(planned.run.atoms[-1])
            text += f" That is {number(share, 3)} times the atoms of the plan."
        self.sentence.setText(text)

    # ---------------------------------------------------------------- edits

    def _add(self) -> None:
        if self._plan is None:
            return
        cloud = self._plan.cloud
        atoms, kelvin = self._expected or (cloud.atoms.value, cloud.temperature.value)
        unit = best_unit(kelvin, ("pK", "nK", "µK", "mK", "K"))
        new = (
            quantity(max(atoms, 1.0), "", kind=ATOM_NUMBER),
            quantity(kelvin if math.isfinite(kelvin) else cloud.temperature.value, unit, kind=TEMPERATURE),
        )
        self.edit(lambda plan: measured_edits.with_new_cloud(plan, *new), "measured clouds")
        if self.labels:
            self.labels[-1].setFocus()
            self.labels[-1].selectAll()

    def _set(self, place: int, **changes: Any) -> None:
        self.edit(
            lambda plan: measured_edits.with_cloud(plan, place, replace(plan.measured[place], **changes)),
            f"measured cloud {place + 1}",
        )

    def _rename(self, place: int, text: str) -> None:
        if self._plan is None or place >= len(self._plan.measured) or not text.strip():
            return
        old = self._plan.measured[place].label
        self._set(place, label=text.strip())
        if self.since == old and self._plan.measured[place].label != old:
            self._follow(place)

    def _place(self, place: int, where: Where) -> None:
        self.edit(
            lambda plan: measured_edits.with_cloud(
                plan, place, measured_edits.placed(plan.measured[place], where, len(plan.ramp))
            ),
            f"measured cloud {place + 1}",
        )

    def _know(self, place: int, by: By) -> None:
        def change(plan: Plan) -> Plan:
            known = measured_edits.known_by(plan.measured[place], by, plan.cloud.temperature)
            return measured_edits.with_cloud(plan, place, known)

        self.edit(change, f"measured cloud {place + 1}")

    def _follow(self, place: int | None) -> None:
        if self._plan is None:
            return
        self.since = None if place is None else self._plan.measured[place].label
        for number_of, button in enumerate(self.rests):
            button.setChecked(number_of == place)
        self.since_chosen.emit(self.since)

    # ---------------------------------------------------------------- as a view of the panel

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        return None, None

    def take_extra(self, plan: Plan, extra: Any) -> None:
        pass

    def stopped(self) -> None:
        pass

    def set_theme(self, theme: Theme) -> None:
        pass

    def take_focus(self) -> None:
        (self.labels[0] if self.labels else self.add).setFocus()


def _choice(names: list[str], chosen: str, label: str) -> Choice:
    choice = Choice()
    choice.setAccessibleName(label)
    choice.setMinimumContentsLength(2)
    choice.addItems(names)
    choice.setCurrentIndex(max(choice.findText(chosen), 0))
    return choice


def _show_text(line: QLineEdit, text: str) -> None:
    if not line.hasFocus() and line.text() != text:
        line.setText(text)
        line.setCursorPosition(0)


def _width(place: int, axis: int, plan: Plan) -> Quantity | None:
    widths = plan.measured[place].widths
    return widths[axis] if axis < len(widths) else None


def _put_width(place: int, axis: int, plan: Plan, value: Quantity | None) -> Plan:
    return measured_edits.with_cloud(plan, place, measured_edits.with_width(plan.measured[place], axis, value))


def _put(place: int, name: str, plan: Plan, value: Quantity | None) -> Plan:
    return measured_edits.with_cloud(plan, place, replace(plan.measured[place], **{name: value}))  # type: ignore[arg-type]
