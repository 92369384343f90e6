"""The trap that a later stage of the ramp begins in, edited by the Trap form in a window of its own.

It follows the plan as the bench does: undo, other edits and another plan are seen at once.
"""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QLabel, QPushButton, QScrollArea, QVBoxLayout, QWidget

from app.engine import prepare_trap, surveyed, trap_answer
from app.forms.trap import TrapForm
from app.newest import Newest, brief_turns
from app.transfer_edits import piece_of, with_piece

if TYPE_CHECKING:
    from app.answers.trap_solving import Wish
    from app.plan import Plan
    from app.trap_choices import TrapChoice
    from app.window.answers import Answers
    from app.window.undo import Document

_SIZE = QSize(430, 640)


class StageTrapDialog(QDialog):
    """The Trap form on the trap of one stage. surveyed_trap(Plan, error) is for itself, across threads."""

    surveyed_trap = Signal(object, object)

    def __init__(self, document: Document, answers: Answers, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document, self._answers = document, answers
        self._place = 0
        self._trap: TrapChoice | None = None
        self._piece: Plan | None = None
        self._surveyor = Newest()
        self.surveying = False
        self.title = QLabel()
        self.title.setWordWrap(True)
        self.form = TrapForm()
        self.form.heading.hide()
        self.area = QScrollArea()
        self.area.setWidgetResizable(True)
        self.area.setFrameShape(QScrollArea.Shape.NoFrame)
        self.area.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        inside = QWidget()
        column = QVBoxLayout(inside)
        column.setContentsMargins(0, 0, 10, 0)
        column.addWidget(self.form)
        column.addStretch(1)
        self.area.setWidget(inside)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        rows = QVBoxLayout(self)
        rows.addWidget(self.title)
        rows.addWidget(self.area, 1)
        rows.addWidget(buttons)
        self.resize(_SIZE)
        self.form.plan_edited.connect(self._edit)
        self.form.solving_wanted.connect(self._solve)
        self.form.solving_dropped.connect(answers.drop_solving)
        document.loading.connect(self.reject)
        document.plan_changed.connect(self._plan_changed)
        self.surveyed_trap.connect(self._take, Qt.ConnectionType.QueuedConnection)

    # ---------------------------------------------------------------- showing

    def show_stage(self, place: int) -> None:
        """The trap in which a stage of the present plan begins."""
        if self._piece is not None:
            self.form.discard_edits()
        self._place = place
        self._show(self._document.plan)

    def _plan_changed(self, plan: Plan) -> None:
        if not self.isVisible():
            return
        # A stage may have got another place; without its trap there is nothing to show.
        traps = [stage.trap for stage in plan.ramp]
        if not (self._place < len(traps) and traps[self._place] is not None):
            if self._trap not in traps:
                self.reject()
                return
            self._place = traps.index(self._trap)
        self._show(plan)

    def _show(self, plan: Plan) -> None:
        piece = self._piece = piece_of(plan, self._place)
        stage = plan.ramp[self._place]
        self._trap = stage.trap
        self.setWindowTitle(f"Trap of stage {self._place + 1}")
        name = f" “{stage.label}”" if stage.label else ""
        self.title.setText(f"The trap that the cloud comes into as stage {self._place + 1}{name} begins.")
        self.form.set_plan(piece)
        for button in self.findChildren(QPushButton):
            button.setAutoDefault(False)  # Return in a field takes what was typed, and presses nothing
        self.surveying = not surveyed(piece)
        if not self.surveying:
            self._show_answer(piece)
        else:
            self._surveyor.ask(partial(self._survey, piece), _ignore, _ignore)

    def _show_answer(self, piece: Plan) -> None:
        answer = None if piece.trap.harmonic else trap_answer.kept(piece)
        if answer is not None:
            self.form.show_trap(answer)

    def _survey(self, piece: Plan) -> None:
        """On the worker."""
        try:
            with brief_turns():
                prepare_trap(piece)
        except Exception as error:  # whatever it is, it is the GUI thread's to tell
            self.surveyed_trap.emit(piece, error)
        else:
            self.surveyed_trap.emit(piece, None)

    def _take(self, piece: Plan, error: Exception | None) -> None:
        if piece == self._piece:
            self.surveying = False
        if error is None:
            self._show_answer(piece)
        elif not isinstance(error, ValueError | OSError | ArithmeticError):
            raise error

    # ---------------------------------------------------------------- edits

    def _edit(self, piece: Plan, what: str, merge_key: str) -> None:
        changed = with_piece(self._document.plan, self._place, piece)
        key = f"stage {self._place} {merge_key}" if merge_key else ""
        self._document.edit(changed, f"{what}, trap of stage {self._place + 1}", key)

    def _solve(self, wish: Wish) -> None:
        from app.answers.trap_solving import solve_trap

        card = self.form.solving
        if card is not None and self._piece is not None:
            self._answers.solve(partial(solve_trap, self._piece, wish), card.show_solved, card.show_no_solution)

    def end(self) -> None:
        """The window of the program is going."""
        self.reject()
        self._surveyor.close()


def _ignore(_what: object) -> None:
    pass
