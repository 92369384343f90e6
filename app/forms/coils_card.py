"""The coils of the Trap form: a card that folds, with fields, knife, axis and centre."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QWidget

from app.forms.vector_field import DirectionField
from app.plan import COILS_FIELDS, CoilsChoice, Plan, PlanError
from app.units import Quantity
from app.widgets.folding_form import FoldingForm

_NUMBERS = ("bias", "gradient", "curvature", "levitation", "knife")
_LABELS = {"knife": "RF knife"}  # short enough for the column of labels


class CoilsCard(FoldingForm):
    """Shows the coils of the plan, and edits them. removal_wanted() is for the form that holds the card."""

    removal_wanted = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Coils", parent)
        self.owner = " of the coils"
        self.numbers = {
            name: self.add_quantity(COILS_FIELDS[name], "", label=_LABELS.get(name, ""), key=name, put=self._put(name))
            for name in _NUMBERS
        }
        for field in self.numbers.values():
            field.setPlaceholderText("none")
        axis = COILS_FIELDS["axis"]
        self.axis = DirectionField(axis)
        self.add_entry("axis", axis.label, "", self.axis, axis.tip, self._put("axis"))
        x, y, z = (partial(self._put_centre, place) for place in range(3))
        self.centre = self.add_place(COILS_FIELDS["centre"], "centre", (x, y, z))
        self.head.add_action("&Remove", self.removal_wanted.emit, card=self)
        self.set_unfolded(False)

    def summary_text(self) -> str:
        coils = None if self._plan is None else self._plan.trap.coils
        return "" if coils is None else summary(coils)

    def show_plan(self, plan: Plan) -> None:
        coils = plan.trap.coils
        assert coils is not None  # else the card is hidden
        self.refuse("")
        for name, field in self.numbers.items():
            field.set_quantity(getattr(coils, name))
        self.axis.set_value(coils.axis)
        for field, place in zip(self.centre, coils.centre, strict=True):
            field.set_quantity(place)
        self._show_summary()

    def _put(self, name: str) -> Callable[[Plan, object], Plan]:
        return lambda plan, value: _with_coils(plan, **{name: value})

    def _put_centre(self, axis: int, plan: Plan, place: Quantity | None) -> Plan:
        if place is None:
            raise PlanError("a centre needs three places")
        assert plan.trap.coils is not None
        centre = list(plan.trap.coils.centre)
        centre[axis] = place
        return _with_coils(plan, centre=tuple(centre))


def _with_coils(plan: Plan, **changes: object) -> Plan:
    assert plan.trap.coils is not None
    coils = replace(plan.trap.coils, **changes)  # type: ignore[arg-type]
    return replace(plan, trap=replace(plan.trap, coils=coils))


def summary(coils: CoilsChoice) -> str:
    """Coils in a line."""
    told = ((name, getattr(coils, name)) for name in _NUMBERS)
    return ", ".join(f"{name} {quantity.text}" for name, quantity in told if quantity is not None)
