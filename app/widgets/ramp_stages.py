"""The stages of a ramp as a table to be typed in: how long, what moves, from where, to where, and how."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from itertools import pairwise

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QGridLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QMenu,
    QPushButton,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app import ramp_edits, transfer_edits
from app.plan import Plan
from app.ramp_choices import LONGEST_LABEL, Handing, StageChoice
from app.units import DURATION
from app.widgets.plan_editor import PlanEditor
from app.widgets.quantity_field import QuantityField
from app.widgets.ramp_stage_rows import MoveLine, TransferLine, given
from app.widgets.scrolled import fill_scrolled
from physics.ramps import Control, Knob

_HEADINGS = ("", "Duration", "Control", "From", "To", "Shape", "Name", "")
_POWER_WORTH_A_WORD = 0.5  # [W]
_CAUTION = (
    "Beams from 0.5 W are typically class 4 and, beyond 700 nm, invisible: follow IEC 60825-1 or ANSI Z136.1, local "
    "rules and the laser safety officer."
)


class StageEditor(PlanEditor):
    """The table, and buttons that add to it. Besides the signals of `PlanEditor`: trap_asked(place) when the trap in
    which a stage begins is to be edited; save_asked() and read_asked() when the ramp is to be written to a file, or
    taken from one."""

    trap_asked = Signal(int)
    save_asked = Signal()
    read_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(ramp_edits.checked, parent)
        self.setAccessibleName("Stages of the ramp")
        self._pattern: object = None
        self.durations: list[QuantityField] = []
        self.moves: list[list[MoveLine]] = []
        self.menus: list[QMenu] = []
        self.labels: list[QLineEdit] = []
        self.transfers: dict[int, TransferLine] = {}
        self.caution = QLabel(_CAUTION)
        self.caution.setObjectName("fieldNote")
        self.caution.setWordWrap(True)
        self.caution.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.caution.hide()
        self.add_button = QPushButton("Add a stage")
        self.add_button.setToolTip("A stage that goes on from the last one, to half of where its controls stand")
        self.add_button.clicked.connect(lambda: self.add_stage())
        self.hold_button = QPushButton("Add a hold")
        self.hold_button.setToolTip("A stage in which nothing moves: free evaporation")
        self.hold_button.clicked.connect(lambda: self.add_stage(hold=True))
        self.buttons = QHBoxLayout()
        self.buttons.setSpacing(8)
        self.buttons.addWidget(self.add_button)
        self.buttons.addWidget(self.hold_button)
        self.buttons.addStretch(1)
        self.save_button, self.read_button = QPushButton("Save as table…"), QPushButton("Read a table…")
        self.save_button.setToolTip("CSV: one row a time step, one column a control")
        self.save_button.clicked.connect(self.save_asked)
        self.read_button.setToolTip("CSV of times and controls, which becomes the ramp")
        self.read_button.clicked.connect(self.read_asked)
        self.buttons.addWidget(self.save_button)
        self.buttons.addWidget(self.read_button)
        self._table = QWidget()
        self._grid = QGridLayout(self._table)
        body = QWidget()
        column = QVBoxLayout(body)
        column.setContentsMargins(14, 4, 10, 4)
        column.setSpacing(6)
        column.addWidget(self._table)
        column.addWidget(self.error)
        column.addLayout(self.buttons)
        column.addWidget(self.caution)
        column.addStretch(1)
        fill_scrolled(self, body)

    # ---------------------------------------------------------------- showing

    def lay_out(self, plan: Plan) -> None:
        """Rows for the stages of a plan."""
        pattern = tuple(_pattern(stage) for stage in plan.ramp), _controls_pattern(plan)
        if pattern != self._pattern:
            self._pattern = pattern
            self._build(plan)
        ends = [move.end for stage in plan.ramp for move in stage.moves if move.control.knob is Knob.POWER]
        highest = max((end.value for end in ends if end is not None), default=0.0)
        standing = max((beam.power.value for beam in plan.trap.beams if beam.on), default=0.0)
        # Said beside the beams already where these are so strong.
        self.caution.setVisible(highest >= _POWER_WORTH_A_WORD > standing)

    def _build(self, plan: Plan) -> None:
        """All rows anew. The keyboard stays in the row and the column where it was, as far as they are there."""
        place = self._place_of_focus()
        old = self._table
        self._table = QWidget()
        self._grid = QGridLayout(self._table)
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setHorizontalSpacing(6)
        self._grid.setVerticalSpacing(4)
        for column, text in enumerate(_HEADINGS):
            heading = QLabel(text)
            heading.setObjectName("paneTitle")
            self._grid.addWidget(heading, 0, column)
        for column, stretch in ((1, 2), (2, 4), (3, 3), (4, 3), (5, 3), (6, 3)):
            self._grid.setColumnStretch(column, stretch)
        self.forget_fields()
        self.durations, self.moves, self.menus, self.labels = [], [], [], []
        self.transfers = {}
        row = 1
        for number, stage in enumerate(plan.ramp):
            row = self._add_stage_rows(row, number, stage, plan)
        parent = old.parentWidget()
        layout = None if parent is None else parent.layout()
        if layout is not None:
            layout.replaceWidget(old, self._table)
        old.hide()
        old.deleteLater()
        self._set_tab_order()
        if place is not None:
            self._focus_on(*place)

    def _add_stage_rows(self, row: int, number: int, stage: StageChoice, plan: Plan) -> int:
        if stage.trap is not None:
            self.transfers[number] = TransferLine(self, number, stage)
            self._grid.addWidget(self.transfers[number], row, 1, 1, 6)
            row += 1
        name = f"stage {number + 1}"
        count = QLabel(f"{number + 1}")
        count.setObjectName("paneTitle")
        count.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        count.setMinimumWidth(count.fontMetrics().horizontalAdvance("00"))
        self._grid.addWidget(count, row, 0)
        duration = self.add_field(
            DURATION,
            f"Duration of {name}",
            lambda plan: plan.ramp[number].duration,
            lambda plan, value: ramp_edits.with_duration(plan, number, given(value)),
            f"{number} duration",
        )
        self.durations.append(duration)
        self._grid.addWidget(duration, row, 1)
        label = QLineEdit()
        label.setMaxLength(LONGEST_LABEL)
        label.setPlaceholderText("–")
        label.setAccessibleName(f"Name of {name}")
        label.setToolTip("A word of your own for the stage")
        label.editingFinished.connect(lambda: self._rename(number, label.text()))
        self.add_fill(lambda plan: _show_text(label, plan.ramp[number].label))
        self.labels.append(label)
        self._grid.addWidget(label, row, 6)
        menu_button = QToolButton()
        menu_button.setText("⋯")
        menu_button.setAutoRaise(True)
        menu_button.setAccessibleName(f"What can be done with {name}")
        menu_button.setToolTip("Add, copy, move or remove")
        menu_button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        menu = QMenu(menu_button)
        menu.aboutToShow.connect(lambda: self._fill_menu(menu, number))
        menu_button.setMenu(menu)
        self.menus.append(menu)
        self._grid.addWidget(menu_button, row, 7)
        lines = [MoveLine(self, number, k, move, plan) for k, move in enumerate(stage.moves)]
        self.moves.append(lines)
        for line in lines:
            for column, span, widget in line.places:
                self._grid.addWidget(widget, row, column, 1, span)
            row += 1
        if not lines:
            hold = QLabel("nothing moves")
            hold.setObjectName("fieldNote")
            self._grid.addWidget(hold, row, 2, 1, 4)
            row += 1
        return row

    # ---------------------------------------------------------------- stages

    def add_stage(self, *, hold: bool = False, before: int | None = None) -> None:
        """A new stage at the end, or before another one."""
        if self._plan is None:
            return
        place = len(self._plan.ramp) if before is None else before
        self.edit(lambda plan: ramp_edits.with_new_stage(plan, place, hold=hold), "number of stages")
        if place < len(self.durations):
            self.durations[place].setFocus()
            self.durations[place].selectAll()

    def _fill_menu(self, menu: QMenu, number: int) -> None:
        menu.clear()
        if self._plan is None:
            return
        plan = self._plan
        try:
            free = ramp_edits.free_controls(plan, number)
        except ValueError:
            free = ()
        if free:
            more = menu.addMenu("Move another &control")
            for control in free:
                more.addAction(control.label).triggered.connect(
                    partial(self._add_move, number, control),
                )
        menu.addSeparator()
        self._action(menu, "&Insert a stage before it", lambda: self.add_stage(before=number))
        self._action(menu, "Insert a &hold before it", lambda: self.add_stage(hold=True, before=number))
        self._action(
            menu, "&Duplicate", lambda: self.edit(lambda p: ramp_edits.with_copy(p, number), "number of stages")
        )
        menu.addSeparator()
        earlier = self._action(menu, "Move &up", lambda: self._move_stage(number, -1))
        earlier.setEnabled(number > 0)
        later = self._action(menu, "Move do&wn", lambda: self._move_stage(number, 1))
        later.setEnabled(number < len(plan.ramp) - 1)
        menu.addSeparator()
        if plan.ramp[number].trap is None:
            for handing, text in (
                (Handing.SLOW, "Into another trap, &slowly"),
                (Handing.SUDDEN, "Into another trap, a&t once"),
            ):
                self._action(menu, text, partial(self._hand_over, number, handing))
        else:
            self._action(menu, "Stay in the &trap before", partial(self._hand_over, number, None))
        menu.addSeparator()
        self._action(
            menu, "&Remove", lambda: self.edit(lambda p: ramp_edits.without_stage(p, number), "number of stages")
        )

    @staticmethod
    def _action(menu: QMenu, text: str, act: Callable[[], object]):  # type: ignore[no-untyped-def]
        action = menu.addAction(text)
        action.triggered.connect(lambda _=False: act())
        return action

    def _add_move(self, number: int, control: Control, _checked: bool = False) -> None:
        self.edit(lambda plan: ramp_edits.with_new_move(plan, number, control), f"controls of stage {number + 1}")

    def _move_stage(self, number: int, by: int) -> None:
        self.edit(lambda plan: ramp_edits.with_stage_moved(plan, number, by), "order of stages")
        if 0 <= number + by < len(self.durations):
            self.durations[number + by].setFocus()

    def _hand_over(self, number: int, handing: Handing | None) -> None:
        self.edit(lambda plan: transfer_edits.with_transfer(plan, number, handing), f"trap of stage {number + 1}")

    def _rename(self, number: int, text: str) -> None:
        if self._plan is not None and number < len(self._plan.ramp):
            self.edit(lambda plan: ramp_edits.with_label(plan, number, text.strip()), f"name of stage {number + 1}")

    # ---------------------------------------------------------------- keyboard

    def _order(self) -> list[list[QWidget]]:
        """What the keyboard walks through, row by row."""
        rows: list[list[QWidget]] = []
        for number, duration in enumerate(self.durations):
            lines = self.moves[number]
            first = lines[0].widgets if lines else []
            if number in self.transfers:
                rows.append(self.transfers[number].widgets)
            rows.append([duration, *first, self.labels[number], self.menus[number].parentWidget()])  # type: ignore[list-item]
            rows += [list(line.widgets) for line in lines[1:]]
        return rows

    def _set_tab_order(self) -> None:
        chain = [widget for row in self._order() for widget in row]
        chain += [self.add_button, self.hold_button, self.save_button, self.read_button]
        for one, other in pairwise(chain):
            QWidget.setTabOrder(one, other)

    def _place_of_focus(self) -> tuple[int, int] | None:
        for row, widgets in enumerate(self._order()):
            for column, widget in enumerate(widgets):
                if widget is not None and widget.hasFocus():
                    return row, column
        return None

    def _focus_on(self, row: int, column: int) -> None:
        rows = self._order()
        if rows:
            widgets = rows[min(row, len(rows) - 1)]
            widgets[min(column, len(widgets) - 1)].setFocus()

    def take_focus(self) -> None:
        """Give the keyboard to the first duration, or to the button that makes one."""
        (self.durations[0] if self.durations else self.add_button).setFocus()


def _show_text(line: QLineEdit, text: str) -> None:
    """Show a text from its beginning, unless another is being typed."""
    if not line.hasFocus() and line.text() != text:
        line.setText(text)
        line.setCursorPosition(0)


def _pattern(stage: StageChoice) -> object:
    """What decides which widgets a stage has."""
    moves = tuple((m.control, m.shape, m.exponent is not None, m.tau is not None) for m in stage.moves)
    trap = None if stage.trap is None else (stage.handing, stage.trap.frequencies is not None, stage.trap.makers)
    return moves, trap


def _controls_pattern(plan: Plan) -> object:
    """What decides which controls can be chosen."""
    trap = plan.trap
    coils = trap.coils
    parts = (
        ()
        if coils is None
        else (coils.bias is None, coils.gradient is None, coils.levitation is None, coils.knife is None)
    )
    return trap.harmonic, tuple((beam.name, beam.on) for beam in trap.beams), parts
