"""The bench: the forms in which the plan is typed, one under the other, scrolling where the window is too small."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget

from app.forms.cloud import CloudForm
from app.forms.losses import LossesForm
from app.forms.passenger import PassengerForm
from app.forms.species import SpeciesForm
from app.forms.target import TargetForm
from app.forms.trap import TrapForm
from app.plan import Plan
from app.widgets.form import Form

WIDTH = 38  # digits of the system's font: larger type gets a wider bench


class Bench(QScrollArea):
    """Signals: plan_edited(Plan, what, merge key); problems_changed() when a field came to be, or no longer is, one
    that cannot be read."""

    plan_edited = Signal(object, str, str)
    problems_changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("bench")
        self.setAccessibleName("Bench")
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.species, self.trap, self.cloud = SpeciesForm(), TrapForm(), CloudForm()
        self.losses, self.target = LossesForm(), TargetForm()
        self.passenger = PassengerForm(
            lambda owner: SpeciesForm(owner=owner),
            lambda owner: CloudForm(owner=owner),
        )
        body = QWidget()
        body.setObjectName("benchBody")
        column = QVBoxLayout(body)
        column.setContentsMargins(16, 12, 14, 12)
        column.setSpacing(14)
        for form in self.forms:
            form.plan_edited.connect(self.plan_edited)
            form.problems_changed.connect(self.problems_changed)
            column.addWidget(form)
        column.addStretch(1)
        self.setWidget(body)

    @property
    def forms(self) -> tuple[Form, ...]:
        return self.species, self.trap, self.cloud, self.losses, self.target, self.passenger

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read, as sentences, from top to bottom."""
        return tuple(problem for form in self.forms for problem in form.problems)

    def set_plan(self, plan: Plan) -> None:
        for form in self.forms:
            form.set_plan(plan)

    def discard_edits(self) -> None:
        """Drop texts that could not be read: another plan is about to be shown."""
        for form in self.forms:
            form.discard_edits()

    def take_focus(self) -> None:
        self.species.take_focus()

    def sizeHint(self) -> QSize:
        return QSize(self.usual_width(), 600)

    def minimumSizeHint(self) -> QSize:
        body = self.widget()
        bar = self.verticalScrollBar().sizeHint().width()
        return QSize(body.minimumSizeHint().width() + bar if body is not None else 230, 120)

    def usual_width(self) -> int:
        """The width that suits the fields."""
        return max(WIDTH * self.fontMetrics().horizontalAdvance("0"), self.minimumSizeHint().width())
