"""The Passenger form, folded at first: a second species, or spin state, in the same trap."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import Protocol

from PySide6.QtCore import Qt, SignalInstance
from PySide6.QtWidgets import QLabel, QPushButton, QVBoxLayout, QWidget

from app.passenger_edits import (
    own_plan,
    with_length_between,
    with_own_depth,
    with_own_frequency,
    with_own_plan,
    with_usual_passenger,
    without_passenger,
)
from app.passenger_words import WHAT, length_source, length_told, passenger_summary
from app.plan import PASSENGER_FIELDS, Plan, PlanError
from app.units import Quantity
from app.widgets.card import ElidedLabel, bring_into_view
from app.widgets.fold_title import FoldTitle
from app.widgets.form import Form
from app.widgets.quantity_field import QuantityField
from app.widgets.tab_order import lay_tab_order
from physics.scattering import LengthInUse

OWNER = " of the passenger"
_TITLE, _STEP = "Passenger", "passenger"
_LENGTH, _FREQUENCIES, _DEPTH = (PASSENGER_FIELDS[name] for name in ("scattering_length", "frequencies", "depth"))
_TRAP = (*(f"{_FREQUENCIES.path}.{axis}" for axis in "xyz"), _DEPTH.path)


class AtomsForm(Protocol):
    """A form of which atoms, which can be told what the field makes of their scattering length."""

    field: QuantityField
    plan_edited: SignalInstance
    problems_changed: SignalInstance

    def show_length(self, length: LengthInUse) -> None: ...


class PassengerForm(Form):
    """Shows the plan's passenger in forms of species and cloud that it is given, and adds what is between the two.

    make_atoms, make_cloud : make these forms, when there is a first passenger, for the owner that they are given
    """

    def __init__(
        self, make_atoms: Callable[[str], Form], make_cloud: Callable[[str], Form], parent: QWidget | None = None
    ) -> None:
        super().__init__(_TITLE, parent)
        self._make = (make_atoms, make_cloud)
        self.parts: tuple[Form, ...] = ()  # of species and cloud, once there is a passenger
        self.heading.hide()
        self.fold = FoldTitle(_TITLE, "the second species in the trap", self.heading.font())
        self.fold.clicked.connect(lambda: self.set_unfolded(not self.unfolded))
        self.summary = ElidedLabel()
        self.summary.setIndent(self.fontMetrics().horizontalAdvance("00"))
        self.what = QLabel(WHAT)
        self.what.setObjectName("fieldNote")
        self.what.setWordWrap(True)
        self.add = QPushButton("Add a passenger")
        self.add.setToolTip("A second species, or another state of the same atoms, in the same trap")
        self.add.clicked.connect(self._add)
        self.trouble = QLabel()
        self.trouble.setObjectName("fieldError")
        self.trouble.setWordWrap(True)
        self.trouble.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._place = QVBoxLayout()
        self._place.setSpacing(3)
        self.remove = QPushButton("Remove the passenger")
        self.remove.setToolTip("Leave the first species alone in the trap")
        self.remove.clicked.connect(self._remove)
        self._grid.addWidget(self.fold, 0, 0, 1, 2, Qt.AlignmentFlag.AlignLeft)
        for widget in (self.summary, self.what, self.trouble):
            self._grid.addWidget(widget, self._row, 0, 1, 2)
            self._row += 1
        self._grid.addWidget(self.add, self._row, 0, 1, 2, Qt.AlignmentFlag.AlignLeft)
        self._grid.addLayout(self._place, self._row + 1, 0, 1, 2)
        self._row += 2
        self.length = self.add_quantity(
            _LENGTH, "", label="a₁₂ with the first", put=lambda plan, value: with_length_between(plan, value)
        )
        self.length.setAccessibleName(_LENGTH.label)
        self.frequencies = tuple(
            self.add_quantity(
                _FREQUENCIES, "", label=f"Own frequency {axis}", key=key, put=partial(_put_frequency, place)
            )
            for place, (axis, key) in enumerate(zip("xyz", _TRAP, strict=False))
        )
        self.depth_field = self.add_quantity(_DEPTH, "", label="Own depth", put=with_own_depth)
        for axis, line in zip("xyz", self.frequencies, strict=True):
            line.setAccessibleName(f"Frequency {axis}{OWNER}")
        self.depth_field.setAccessibleName(_DEPTH.label)
        self._grid.addWidget(self.remove, self._row, 0, 1, 2, Qt.AlignmentFlag.AlignLeft)
        self._unfolded = self._had = False
        self._arrange()

    # ---------------------------------------------------------------- folding

    @property
    def unfolded(self) -> bool:
        return self._unfolded

    def set_unfolded(self, unfolded: bool) -> None:
        """Show or hide the fields; one with something wrong in it can always be seen."""
        self._unfolded = unfolded or bool(self.problems)
        self._arrange()

    def _arrange(self) -> None:
        there = self._plan is not None and self._plan.passenger is not None
        self.fold.show_unfolded(self._unfolded)
        shown = self._unfolded and there
        self.what.setVisible(self._unfolded and not there)
        self.add.setVisible(self._unfolded and not there)
        self.summary.setVisible(there and not self._unfolded)
        for widget in (*self.parts, self.remove):
            widget.setVisible(shown)
        self.show_row(_LENGTH.path, shown)
        passenger = None if self._plan is None else self._plan.passenger
        own = passenger is not None and (passenger.frequencies is not None or passenger.depth is not None)
        for key in _TRAP:
            self.show_row(key, shown and (own or (self._plan is not None and self._plan.trap.harmonic)))
        self.trouble.setVisible(there and bool(self.trouble.text()))

    # ---------------------------------------------------------------- showing

    def show_plan(self, plan: Plan) -> None:
        came = plan.passenger is not None and not self._had
        self._had = plan.passenger is not None
        if plan.passenger is None:
            self.trouble.clear()
            for part in self.parts:
                part.discard_edits()
            for field in (self.length, *self.frequencies, self.depth_field):
                field.set_quantity(None)
            self._arrange()
            return
        self._build()
        own = own_plan(plan)
        for part in self.parts:
            part.set_plan(own)
        self.length.set_quantity(plan.passenger.scattering_length)
        self._show_trap(plan)
        self._show_between(plan)
        self.summary.setText(passenger_summary(plan.passenger))
        if came:
            self._unfolded = True
        self._arrange()

    def _show_trap(self, plan: Plan) -> None:
        """The trap as the passenger sees it; what it shares with the first stands in the empty fields."""
        assert plan.passenger is not None
        own, both = plan.passenger.frequencies, plan.trap.frequencies
        for place, line in enumerate(self.frequencies):
            line.set_quantity(None if own is None else own[place])
            line.setPlaceholderText("" if both is None else f"{both[place].text}, of both")
        self.depth_field.set_quantity(plan.passenger.depth)
        depth = plan.trap.depth
        self.depth_field.setPlaceholderText("not given" if depth is None else f"{depth.text}, of both")

    def _show_between(self, plan: Plan) -> None:
        """What the data say of the two; where they cannot be in one trap, why."""
        from app.answers.inputs import scattering_in_use
        from app.answers.passenger import between_of, passenger_plan
        from physics.species import load_species

        assert plan.passenger is not None
        typed = plan.passenger.scattering_length is not None
        try:
            between = between_of(replace(plan, passenger=replace(plan.passenger, scattering_length=None)))
            own = passenger_plan(plan)
        except PlanError as error:
            self.trouble.setText(f"{error}.")
            self.length.setPlaceholderText("")
            self.show_note(_LENGTH.path, "")
            return
        self.trouble.clear()
        self.length.setPlaceholderText(length_told(between))
        self.show_note(_LENGTH.path, "" if typed else length_source(between))
        atoms: AtomsForm = self.parts[0]  # type: ignore[assignment]
        field = plan.species.field
        atoms.field.setPlaceholderText("not used" if field is None else f"{field.text}, of both")
        atoms.show_length(scattering_in_use(own, load_species(own.species.key).state(own.species.state)))

    def _build(self) -> None:
        if self.parts:
            return
        self.parts = tuple(make(OWNER) for make in self._make)
        for part in self.parts:
            part.heading.hide()
            part.plan_edited.connect(self._take)
            part.problems_changed.connect(self._problems_changed)
            self._place.addWidget(part)
        lay_tab_order((self.fold, self.add, *self.parts, self.length, *self.frequencies, self.depth_field, self.remove))

    @property
    def problems(self) -> tuple[str, ...]:
        return (*(problem for part in self.parts for problem in part.problems), *super().problems)

    def _problems_changed(self) -> None:
        if self.problems and not self._unfolded:
            self.set_unfolded(True)
        self.problems_changed.emit()

    def show_problem(self, key: str, sentence: str) -> None:
        super().show_problem(key, sentence)
        if sentence and not self._unfolded:
            self.set_unfolded(True)

    def discard_edits(self) -> None:
        super().discard_edits()
        for part in self.parts:
            part.discard_edits()

    def take_focus(self) -> None:
        self.fold.setFocus(Qt.FocusReason.OtherFocusReason)
        bring_into_view(self)

    # ---------------------------------------------------------------- edits

    def _add(self) -> None:
        if self._plan is not None:
            self.plan_edited.emit(with_usual_passenger(self._plan), _STEP, "")
            if self.parts:
                self.parts[0].take_focus()
                bring_into_view(self)

    def _remove(self) -> None:
        if self._plan is not None:
            self.discard_edits()
            self.plan_edited.emit(without_passenger(self._plan), f"removal of the {_STEP}", "")
            self.fold.setFocus(Qt.FocusReason.OtherFocusReason)

    def _take(self, own: Plan, what: str, merge_key: str) -> None:
        """A form of one species has edited the passenger."""
        if self._plan is not None and self._plan.passenger is not None:
            self.plan_edited.emit(with_own_plan(self._plan, own), what, merge_key)


def _put_frequency(place: int, plan: Plan, value: Quantity | None) -> Plan:
    return with_own_frequency(plan, place, value)
