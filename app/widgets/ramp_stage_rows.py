"""The rows of the table of stages: what a control does in a stage, and the trap that a cloud is handed to."""

from __future__ import annotations

import math
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QToolButton, QWidget

from app import ramp_edits, transfer_edits
from app.control_kinds import CONTROL_KINDS
from app.plan import Plan
from app.ramp_choices import Handing, MoveChoice, StageChoice
from app.units import DEPTH, EXPONENT, FREQUENCY, TIME, Kind, Quantity, read_quantity
from app.widgets.entry_field import EntryField
from app.widgets.form import Choice
from app.widgets.quantity_field import QuantityField
from physics.ramp_shapes import Shape
from physics.ramps import Control

if TYPE_CHECKING:
    from app.widgets.ramp_stages import StageEditor

Points = tuple[tuple[Quantity, Quantity], ...]

_SHAPES = (
    "How it goes from a to b in the duration d, at the time t: linear a + (b − a) t/d, exponential a (b/a)^(t/d), "
    "power law a (1 + t/τ)^−p, or a table of times and values"
)


class MoveLine:
    """One move of a stage: control, from, to, shape. `places` says in which column of the table each widget stands."""

    def __init__(self, editor: StageEditor, stage: int, number: int, move: MoveChoice, plan: Plan) -> None:
        self._editor, self._stage, self._number = editor, stage, number
        kind, key = CONTROL_KINDS[move.control.knob], f"{stage} {number}"
        name = f"{move.control.label}, stage {stage + 1}"
        self.control = Choice()
        self.control.setAccessibleName(f"Control {number + 1} of stage {stage + 1}")
        self.control.setToolTip("What is turned in this stage")
        self.control.setMinimumContentsLength(5)
        self._controls = (move.control, *_free(plan, stage))
        for control in self._controls:
            self.control.addItem(control.label)
        self.control.activated.connect(self._choose_control)
        self.shape = Choice()
        self.shape.setAccessibleName(f"Shape of {name}")
        self.shape.setToolTip(_SHAPES)
        self.shape.setMinimumContentsLength(6)
        for shape in Shape:
            self.shape.addItem(shape.label)
        self.shape.setCurrentIndex(list(Shape).index(move.shape))
        self.shape.activated.connect(self._choose_shape)
        values = self._add_points(kind, name) if move.points else self._add_ends(kind, name, key, move)
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
        span = 2 // len(values)
        self.places: tuple[tuple[int, int, QWidget], ...] = (
            (2, 1, self.control),
            *((3 + place * span, span, value) for place, value in enumerate(values)),
            (5, 1, way),
        )
        exponent = [self.exponent] if self.exponent is not None else []
        self.widgets: list[QWidget] = [self.control, *values, self.shape, *exponent, self.remove]

    def _add_ends(self, kind: Kind, name: str, key: str, move: MoveChoice) -> list[QWidget]:
        """Fields for where it goes from and to."""
        self.start = self._editor.add_field(
            kind, f"Start of {name}", lambda plan: self._move(plan).start, self._put_start, f"{key} start",
            optional=True, tip="Where it begins; left empty, where it stood",
        )  # fmt: skip
        self.end = self._editor.add_field(
            kind, f"End of {name}", lambda plan: self._move(plan).end, self._put_end, f"{key} end",
            optional=move.tau is not None,
        )  # fmt: skip
        return [self.start, self.end]

    def _add_points(self, kind: Kind, name: str) -> list[QWidget]:
        """One line for all points of a table."""
        self.points = EntryField(partial(_read_points, kind), _write_points)
        self.points.setAccessibleName(f"Points of {name}")
        self.points.setToolTip("Time and value of each point, such as 0 s: 30 µK; 2 s: 8 µK; 6 s: 3 µK")
        self.points.entered.connect(self._take_points)
        self.points.error_changed.connect(self._editor.say)
        self._editor.add_fill(self._show_points)
        return [self.points]

    def _show_points(self, plan: Plan) -> None:
        points = self._move(plan).points
        if points != self.points.value:
            self.points.set_value(points)
            self.points.setCursorPosition(0)

    def _take_points(self, points: Points) -> None:
        def change(plan: Plan) -> Plan:
            # The stage lasts as long as the table; tables of its other controls stretch.
            plan = ramp_edits.with_duration(plan, self._stage, points[-1][0])
            return self._put(plan, points=points)

        self._editor.edit(change, f"points of stage {self._stage + 1}")

    def _move(self, plan: Plan) -> MoveChoice:
        return plan.ramp[self._stage].moves[self._number]

    def _fill(self, plan: Plan) -> None:
        """What a start or an end that is left open means."""
        move = self._move(plan)
        try:
            here = ramp_edits.standing_at(plan, self._stage).get(move.control, math.nan)
        except ValueError:
            here = math.nan
        if move.points:
            return
        text = "not known" if math.isnan(here) else ramp_edits.control_quantity(move.control, here).text
        self.start.setPlaceholderText(text)
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
        return self._put(plan, start=value)

    def _put_end(self, plan: Plan, value: Quantity | None) -> Plan:
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
                lambda plan: transfer_edits.with_transfer(plan, number, tuple(Handing)[index]),
                f"trap of stage {number + 1}",
            )
        )
        row.addWidget(self.handing)
        self.more = QPushButton("Trap…")
        self.more.setAccessibleName(f"Trap of stage {number + 1}: beams, coils and gravity")
        self.more.setToolTip("Its beams, coils and gravity, or its frequencies, in a window of their own")
        self.more.clicked.connect(lambda: editor.trap_asked.emit(number))
        self.widgets: list[QWidget] = [self.handing, self.more]
        if stage.trap.frequencies is None:
            made = QLabel(transfer_edits.trap_text(stage.trap))
            made.setObjectName("fact")
            row.addWidget(made, 1)
            row.addWidget(self.more)
            return
        fields = []
        for axis, letter in enumerate("xyz"):
            fields.append(
                editor.add_field(
                    FREQUENCY, f"Frequency {letter} of the trap of stage {number + 1}",
                    partial(_frequency, number, axis),
                    partial(_put_frequency, number, axis), f"{number} trap {letter}",
                )
            )  # fmt: skip
        fields.append(
            editor.add_field(
                DEPTH, f"Depth of the trap of stage {number + 1}", lambda plan: _trap_depth(plan, number),
                partial(_put_depth, number), f"{number} trap depth", optional=True,
            )
        )  # fmt: skip
        for widget in (*fields, self.more):
            row.addWidget(widget)
        self.widgets = [self.handing, *fields, self.more]


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


def _read_points(kind: Kind, text: str) -> Points:
    """The points of a table, from "0 s: 30 µK; 2 s: 8 µK"; ValueError in one sentence."""
    points = []
    for part in text.split(";"):
        time, colon, value = part.partition(":")
        if not colon:
            raise ValueError(
                f'"{part.strip()}" is no point: a time and a value with a colon between, such as 2 s: {kind.example}'
            )
        points.append((read_quantity(time.strip(), TIME), read_quantity(value.strip(), kind)))
    if len(points) < 2:
        raise ValueError("A table needs two points or more, with semicolons between")
    return tuple(points)


def _write_points(points: Points) -> str:
    return "; ".join(f"{time.text}: {value.text}" for time, value in points)


def given(value: Quantity | None) -> Quantity:
    assert value is not None  # the field is not optional
    return value
