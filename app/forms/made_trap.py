"""What a trap is made of, in the Trap form: a card for each beam, one for the coils, and gravity."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtWidgets import QApplication, QHBoxLayout, QPushButton, QVBoxLayout, QWidget

from app.forms.beam_card import BeamCard
from app.forms.coils_card import CoilsCard
from app.forms.vector_field import DirectionField, along_text
from app.plan import PLAN_FIELDS, BeamChoice, Plan, PlanError
from app.trap_choices import DOWN
from app.trap_edits import (
    with_beam_moved,
    with_coils,
    with_duplicate,
    with_new_beam,
    without_beam,
    without_coils,
)
from app.trap_saving import sources_of
from app.widgets.form import Form, plan_with_entry

_GRAVITY = PLAN_FIELDS["trap.gravity"]


class MadeTrap(Form):
    """Shows the beams and coils of a plan, and edits them."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Beams and coils", parent)
        self.heading.hide()
        self.cards: tuple[BeamCard, ...] = ()
        self._places = QVBoxLayout()
        self._places.setSpacing(2)
        self.add_beam = QPushButton("Add beam")
        self.add_beam.setToolTip("One more beam, like the last one, along another axis")
        self.add_beam.clicked.connect(self._add_beam)
        self.add_coils = QPushButton("Add coils")
        self.add_coils.setToolTip("Coils that make a bias, a gradient, a curvature or a levitation")
        self.add_coils.clicked.connect(self._add_coils)
        buttons = QHBoxLayout()
        buttons.setContentsMargins(0, 4, 0, 4)
        buttons.setSpacing(6)
        buttons.addWidget(self.add_beam)
        buttons.addWidget(self.add_coils)
        buttons.addStretch(1)
        self.coils = CoilsCard()
        self._listen(self.coils)
        self.coils.removal_wanted.connect(self._remove_coils)
        self._grid.addLayout(self._places, 1, 0, 1, 2)
        self._grid.addWidget(self.coils, 2, 0, 1, 2)
        self._grid.addLayout(buttons, 3, 0, 1, 2)
        self._row = 4
        self.gravity = DirectionField(_GRAVITY)
        self.add_entry(_GRAVITY.path, _GRAVITY.label, "", self.gravity, _GRAVITY.tip, _put_gravity)
        self._beams: tuple[BeamChoice, ...] = ()

    def _listen(self, card: Form) -> None:
        card.plan_edited.connect(self.plan_edited)
        card.problems_changed.connect(self.problems_changed)

    # ---------------------------------------------------------------- showing

    def card(self, name: str) -> BeamCard:
        """The card of the beam of that name."""
        return next(card for card in self.cards if card.name == name)

    def show_plan(self, plan: Plan) -> None:
        trap = plan.trap
        self._arrange(trap.beams)
        for card, beam in zip(self.cards, trap.beams, strict=True):
            card.show_beam(plan, beam)
        self._beams = trap.beams
        had_focus = self.coils.isAncestorOf(QApplication.focusWidget() or self)
        self.coils.setVisible(trap.coils is not None)
        self.add_coils.setVisible(trap.coils is None)
        if trap.coils is not None:
            self.coils.set_plan(plan)
        else:
            self.coils.discard_edits()
            if had_focus:
                self.add_coils.setFocus()
        direction = trap.gravity_direction
        self.gravity.set_value(DOWN if trap.gravity is None else trap.gravity)
        self.show_note(_GRAVITY.path, "" if direction in (None, DOWN) else along_text(direction))

    def _arrange(self, beams: tuple[BeamChoice, ...]) -> None:
        """A card for each beam, in their order; one that was there stays with what it shows of its own."""
        sources = sources_of(self._beams, beams)
        cards = tuple(self._new_card() if source is None else self.cards[source] for source in sources)
        if cards == self.cards:
            return
        gone = [card for card in self.cards if card not in cards]
        focus = QApplication.focusWidget()
        lost_focus = focus is not None and any(card.isAncestorOf(focus) for card in gone)
        alone = not self.cards and len(cards) == 1
        self.cards = cards
        for card in gone:
            self._places.removeWidget(card)
            card.hide()
            card.deleteLater()
        for place, card in enumerate(cards):
            self._places.removeWidget(card)
            self._places.insertWidget(place, card)
            card.show()
        if alone:
            cards[0].set_unfolded(True)
        if lost_focus:
            self.add_beam.setFocus()
        if any(card.problems for card in gone):
            self.problems_changed.emit()

    def _new_card(self) -> BeamCard:
        card = BeamCard(self)
        self._listen(card)
        card.duplicate_wanted.connect(self._duplicate)
        card.move_wanted.connect(self._move)
        card.removal_wanted.connect(self._remove)
        return card

    @property
    def problems(self) -> tuple[str, ...]:
        parts = (*self.cards, *((self.coils,) if not self.coils.isHidden() else ()))
        return (*(problem for part in parts for problem in part.problems), *super().problems)

    def discard_edits(self) -> None:
        super().discard_edits()
        for card in (*self.cards, self.coils):
            card.discard_edits()

    @property
    def parts(self) -> tuple[QWidget, ...]:
        """What stands in it, from top to bottom."""
        return (*self.cards, self.coils, self.add_beam, self.add_coils, self.gravity)

    # ---------------------------------------------------------------- edits

    def _add_beam(self) -> None:
        self._new_beam(with_new_beam, "added")

    def _duplicate(self, name: str) -> None:
        self._new_beam(lambda plan: with_duplicate(plan, name), f"a copy of {name}")

    def _new_beam(self, make: Callable[[Plan], tuple[Plan, str]], how: str) -> None:
        if self._plan is None:
            return
        plan, name = make(self._plan)
        self.plan_edited.emit(plan, f"beams: {name}, {how}", "")
        card = next((card for card in self.cards if card.name == name), None)
        if card is not None:
            card.set_unfolded(True)
            card.take_focus()

    def _move(self, name: str, step: int) -> None:
        if self._plan is None:
            return
        focus = QApplication.focusWidget()
        self.plan_edited.emit(with_beam_moved(self._plan, name, step), f"order of beams: {name}", "")
        if focus is not None:
            focus.setFocus()  # taken out of its place and put into another, a card loses it

    def _remove(self, name: str) -> None:
        if self._plan is None:
            return
        try:
            plan = without_beam(self._plan, name)
        except PlanError as error:
            self.card(name).refuse(str(error))
        else:
            self.plan_edited.emit(plan, f"beams: {name}, removed", "")

    def _add_coils(self) -> None:
        if self._plan is not None:
            self.plan_edited.emit(with_coils(self._plan), "coils, added", "")
            self.coils.set_unfolded(True)
            self.coils.take_focus()

    def _remove_coils(self) -> None:
        if self._plan is None:
            return
        try:
            plan = without_coils(self._plan)
        except PlanError as error:
            self.coils.refuse(str(error))
        else:
            self.plan_edited.emit(plan, "coils, removed", "")


def _put_gravity(plan: Plan, value: object) -> Plan:
    return plan_with_entry(plan, _GRAVITY.path, None if value == DOWN else value)
