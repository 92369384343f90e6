"""The Losses form, folded at first: what takes atoms away and heats them, where more is known than in the data."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget

from app.plan import PLAN_FIELDS, Plan
from app.tuning_words import CERTAINTY
from app.widgets.fold_title import FoldTitle
from app.widgets.form import Form
from physics.species import Sourced, load_species

_TITLE = "Losses"
_ROWS = (
    ("losses.background_lifetime", "u", "Vacuum lifetime"),
    ("losses.two_body", "w", "Two-body K₂"),
    ("losses.three_body", "k", "Three-body K₃"),
    ("losses.heating", "b", "One-body heating"),
    ("losses.intensity_noise", "o", ""),
    ("losses.pointing_noise", "j", "Pointing jitter"),
)


class LossesForm(Form):
    """`unfolded` says whether its fields can be seen; they can whenever one of them is filled in."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(_TITLE, parent)
        self.heading.hide()
        self.fold = FoldTitle(_TITLE, "background lifetime, rate constants and heating", self.heading.font())
        self.fold.clicked.connect(lambda: self.set_unfolded(not self.unfolded))
        self._grid.addWidget(self.fold, 0, 0, 1, 2, Qt.AlignmentFlag.AlignLeft)
        self.background, self.two_body, self.three_body, self.heating, self.noise, self.pointing = (
            self.add_quantity(path, letter, label=label) for path, letter, label in _ROWS
        )
        self.background.setPlaceholderText("not known")
        self.heating.setPlaceholderText("not known")
        self.noise.setPlaceholderText("not known")
        self.pointing.setPlaceholderText("not known")
        self._unfolded = True
        self.set_unfolded(False)

    @property
    def unfolded(self) -> bool:
        return self._unfolded

    def set_unfolded(self, unfolded: bool) -> None:
        """Show or hide the fields."""
        self._unfolded = unfolded
        for path, _letter, _label in _ROWS:
            self.show_row(path, unfolded)
        self.fold.show_unfolded(unfolded)

    def show_plan(self, plan: Plan) -> None:
        state = load_species(plan.species.key).state(plan.species.state)
        self.two_body.setPlaceholderText(_told(state.two_body))
        self.three_body.setPlaceholderText(_told(state.three_body))
        filled = False
        for path, _letter, _label in _ROWS:
            quantity = getattr(plan.losses, PLAN_FIELDS[path].name)
            self._fields[path].set_quantity(quantity)
            filled = filled or quantity is not None
        if filled and not self.unfolded:
            self.set_unfolded(True)

    def take_focus(self) -> None:
        self.fold.setFocus()


def _told(number: Sourced | None) -> str:
    """A rate constant of the data and how sure it is, for the empty field that it stands in for."""
    return "not known" if number is None else f"{number.text} ({CERTAINTY[number.certainty]})"
