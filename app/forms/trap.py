"""The Trap form: three frequencies and, if known, the depth."""

from __future__ import annotations

from dataclasses import replace
from functools import partial

from PySide6.QtWidgets import QWidget

from app.figures.profile import AXES
from app.plan import Plan
from app.units import Quantity
from app.widgets.form import Form

_FREQUENCIES = "trap.frequencies"


class TrapForm(Form):
    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Trap", parent)
        self.frequencies = tuple(
            self.add_quantity(
                _FREQUENCIES, axis, label=f"Frequency {axis}", key=f"{_FREQUENCIES}.{axis}", put=partial(_put, place)
            )
            for place, axis in enumerate(AXES)
        )
        self.depth_field = self.add_quantity("trap.depth", "d")
        self.depth_field.setPlaceholderText("not given")

    def show_plan(self, plan: Plan) -> None:
        trap = plan.trap
        for field, quantity in zip(self.frequencies, trap.frequencies or (None,) * len(AXES), strict=True):
            field.set_quantity(quantity)
            field.setEnabled(trap.harmonic)
            field.setPlaceholderText("" if trap.harmonic else "not given")
        self.depth_field.set_quantity(trap.depth)
        self.depth_field.setEnabled(trap.harmonic)
        self.show_note("trap.depth", "" if trap.harmonic else f"Made of {trap.makers}, as the plan file says.")


def _put(place: int, plan: Plan, quantity: Quantity | None) -> Plan:
    assert plan.trap.frequencies is not None  # else the fields are off
    assert quantity is not None  # the fields are not optional
    frequencies = list(plan.trap.frequencies)
    frequencies[place] = quantity
    x, y, z = frequencies
    return replace(plan, trap=replace(plan.trap, frequencies=(x, y, z)))
