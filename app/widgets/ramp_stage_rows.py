"""The rows of the table of stages: what a control does in a stage, and the trap that a cloud is handed to."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QHBoxLayout, QLabel, QToolButton, QWidget

from app import ramp_edits
from app.control_kinds import CONTROL_KINDS
from app.plan import Plan
from app.ramp_choices import Handing, MoveChoice, StageChoice
from app.units import DEPTH, EXPONENT, FREQUENCY, Quantity
from app.widgets.form import Choice
from app.widgets.quantity_field import QuantityField
from physics.ramp_shapes import Shape
from physics.ramps import Control

if TYPE_CHECKING:
    from app.widgets.ramp_stages import StageEditor


class MoveLine:
    """One move of a stage: control, from, to, shape. `places` says in which column of the table each widget stands."""

    def __init__(self, editor: StageEditor, stage: int, number: int, move: MoveChoice, plan: Plan) -> None:
        self._editor, self._stage, self._number = editor, stage, number
        kind, key = CONTROL_KINDS[move.control.knob], f"{stage} {number}"
        name = f"{move.control.label}, stage {stage + 1}"
        self.control = Choice()
        self.control.setAccessibleName(f"Control {number + 1} of stage {stage + 1}")
        self.control.setMinimumContentsLength(5)
        self._controls = (move.control, *_free(plan, stage))
        for control in self._controls:
            self.control.addItem(control.label)
        self.control.activated.connect(self._choose_control)
        self.shape = Choice()
        self.shape.setAccessibleName(f"Shape of {name}")
        self.shape.setMinimumContentsLength(6)
        for shape in Shape:
            self.shape.addItem(shape.label)
        self.shape.setCurrentIndex(list(Shape).index(move.shape))
        self.shape.activated.connect(self._choose_shape)
        self.start = editor.add_field(
            kind, f"Start of {name}", lambda plan: _start(self._move(plan)), self._put_start, f"{key} start",
            optional=not move.points,
        )  # fmt: skip
        self.end = editor.add_field(
            kind, f"End of {name}", lambda plan: _end(self._move(plan)), self._put_end, f"{key} end",
            optional=move.tau is not None,
        )  # fmt: skip
        self.remove = QToolButton()
        self.remove.setText("−")
        self.remove.setAutoRaise(True)
        self.remove.setAccessibleName(f"Leave {name} at rest")
        self.remove.setToolTip(f"Leave {move.control.label} at rest in this stage")
        self.remove.clicked.connect(lambda: editor.edit(self._without, f"controls of stage {stage + 1}"))
        way = QWidget()
        row = QHBoxLayout(way)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(4)
        row.addWidget(self.shape, 1)
        self.exponent: QuantityField | None = None
        if move.exponent is not None:
            self.exponent = editor.add_field(
                EXPONENT, f"Exponent of {name}", lambda plan: self._move(plan).exponent, self._put_exponent,
                f"{key} exponent",
            )  # fmt: skip
            self.exponent.setToolTip("p of a (1 + t/τ)^−p; τ follows from the end")
            self.exponent.setMaximumWidth(52)
            self.exponent.setMinimumWidth(36)
            row.addWidget(self.exponent)
        row.addWidget(self.remove)
        editor.add_fill(self._fill)
        self.places: tuple[tuple[int, QWidget], ...] = ((2, self.control), (3, self.start), (4, self.end), (5, way))
        exponent = [self.exponent] if self.exponent is not None else []
        self.widgets: list[QWidget] = [self.control, self.start, self.end, self.shape, *exponent, self.remove]

    def _move(self, plan: Plan) -> MoveChoice:
        return plan.ramp[self._stage].moves[self._number]

    def _fill(self, plan: Plan) -> None:
        """What a start that is left open means, and the points of a table."""
        move = self._move(plan)
        try:
            here = ramp_edits.standing_at(plan, self._stage).get(move.control, math.nan)
        except ValueError:
            here = math.nan
        text = "not known" if math.isnan(here) else ramp_edits.control_quantity(move.control, here).text
        self.start.setPlaceholderText(text)
        if move.points:
            self.shape.setToolTip("; ".join(f"{time.text}: {value.text}" for time, value in move.points))
        if move.tau is not None:
            duration = plan.ramp[self._stage].duration.value
            there = ramp_edits.end_of(move, here, duration)
            self.end.setPlaceholderText(
                "" if math.isnan(there) else ramp_edits.control_quantity(move.control, there).text
            )

    def _put(self, plan: Plan, **changes: object) -> Plan:
        move = replace(self._move(plan), **changes)  # type: ignore[arg-type]
        return ramp_edits.with_move(plan, self._stage, self._number, move)

    def _put_start(self, plan: Plan, value: Quantity | None) -> Plan:
        points = self._move(plan).points
        if points:
            return self._put(plan, points=((points[0][0], given(value)), *points[1:]))
        return self._put(plan, start=value)

    def _put_end(self, plan: Plan, value: Quantity | None) -> Plan:
        move = self._move(plan)
        if move.points:
            return self._put(plan, points=(*move.points[:-1], (move.points[-1][0], given(value))))
        return plan if value is None else self._put(plan, end=value, tau=None)

    def _put_exponent(self, plan: Plan, value: Quantity | None) -> Plan:
        return self._put(plan, exponent=given(value))

    def _without(self, plan: Plan) -> Plan:
        return ramp_edits.without_move(plan, self._stage, self._number)

    def _choose_control(self, index: int) -> None:
        control = self._controls[index]
        self._editor.edit(
            lambda plan: (
                ramp_edits.with_control(plan, self._stage, self._number, control)
                if control != self._move(plan).control
                else plan
            ),
            f"control of stage {self._stage + 1}",
        )

    def _choose_shape(self, index: int) -> None:
        shape = tuple(Shape)[index]
        self._editor.edit(
            lambda plan: ramp_edits.with_shape(plan, self._stage, self._number, shape),
            f"shape of stage {self._stage + 1}",
        )


class TransferLine(QWidget):
    """Over a stage: that it begins in another trap, which, and how the cloud comes there."""

    def __init__(self, editor: StageEditor, number: int, stage: StageChoice) -> None:
        super().__init__()
        assert stage.trap is not None
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 4, 0, 0)
        row.setSpacing(6)
        text = QLabel("Into another trap")
        text.setObjectName("fieldNote")
        row.addWidget(text)
        self.handing = Choice()
        self.handing.setAccessibleName(f"How the cloud comes into the trap of stage {number + 1}")
        for handing in Handing:
            self.handing.addItem({Handing.SLOW: "slowly", Handing.SUDDEN: "at once"}[handing])
        assert stage.handing is not None
        self.handing.setCurrentIndex(list(Handing).index(stage.handing))
        self.handing.activated.connect(
            lambda index: editor.edit(
                lambda plan: ramp_edits.with_transfer(plan, number, tuple(Handing)[index]),
                f"trap of stage {number + 1}",
            )
        )
        row.addWidget(self.handing)
        if stage.trap.frequencies is None:
            made = QLabel(ramp_edits.trap_text(stage.trap))
            made.setObjectName("fact")
            row.addWidget(made, 1)
            return
        for axis, letter in enumerate("xyz"):
            row.addWidget(
                editor.add_field(
                    FREQUENCY, f"Frequency {letter} of the trap of stage {number + 1}",
                    partial(_frequency, number, axis),
                    partial(_put_frequency, number, axis), f"{number} trap {letter}",
                )
            )  # fmt: skip
        row.addWidget(
            editor.add_field(
                DEPTH, f"Depth of the trap of stage {number + 1}", lambda plan: _trap_depth(plan, number),
                partial(_put_depth, number), f"{number} trap depth", optional=True,
            )
        )  # fmt: skip


def _frequency(number: int, axis: int, plan: Plan) -> Quantity | None:
    trap = plan.ramp[number].trap
    return None if trap is None or trap.frequencies is None else trap.frequencies[axis]


def _trap_depth(plan: Plan, number: int) -> Quantity | None:
    trap = plan.ramp[number].trap
    return None if trap is None else trap.depth


def _put_frequency(number: int, axis: int, plan: Plan, value: Quantity | None) -> Plan:
    stage = plan.ramp[number]
    assert stage.trap is not None
    assert stage.trap.frequencies is not None
    changed = list(stage.trap.frequencies)
    changed[axis] = given(value)
    x, y, z = changed
    return ramp_edits.with_stage(plan, number, replace(stage, trap=replace(stage.trap, frequencies=(x, y, z))))


def _put_depth(number: int, plan: Plan, value: Quantity | None) -> Plan:
    stage = plan.ramp[number]
    assert stage.trap is not None
    return ramp_edits.with_stage(plan, number, replace(stage, trap=replace(stage.trap, depth=value)))


def _free(plan: Plan, stage: int) -> tuple[Control, ...]:
    try:
        return ramp_edits.free_controls(plan, stage)
    except ValueError:
        return ()


def _start(move: MoveChoice) -> Quantity | None:
    return move.points[0][1] if move.points else move.start


def _end(move: MoveChoice) -> Quantity | None:
    return move.points[-1][1] if move.points else move.end


def given(value: Quantity | None) -> Quantity:
    assert value is not None  # the field is not optional
    return value
