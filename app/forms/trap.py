"""The Trap form: three frequencies and, if known, the depth; of beams and coils what follows from them, to read."""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QWidget

from app.figures.profile import AXES
from app.plan import Plan
from app.units import Quantity
from app.widgets.form import Form

if TYPE_CHECKING:
    from app.engine import TrapAnswer

_FREQUENCIES = "trap.frequencies"
_TYPED = (*(f"{_FREQUENCIES}.{axis}" for axis in AXES), "trap.depth")
_MADE, _DEPTH, _SAG = _FACTS = ("made.frequencies", "made.depth", "made.sag")
_PENDING = "…"


class TrapForm(Form):
    """Fields for a trap that is given by its frequencies; for one of beams and coils, texts that `show_trap` fills."""

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
        self.made_frequencies = self.add_fact(
            _MADE, "Frequencies", "Ordinary frequencies at the minimum, along the axes nearest to x, y and z."
        )
        self.made_depth = self.add_fact(_DEPTH, "Depth", "Energy over k from the minimum to the lowest way out.")
        self.sag = self.add_fact(_SAG, "Sag", "How far along gravity the minimum lies from where it is without it.")
        self._facts = (self.made_frequencies, self.made_depth, self.sag)
        self._answered: object = None  # species, state and trap to which the texts belong

    def show_plan(self, plan: Plan) -> None:
        trap = plan.trap
        for field, quantity in zip(self.frequencies, trap.frequencies or (None,) * len(AXES), strict=True):
            field.set_quantity(quantity)
            field.setEnabled(trap.harmonic)
        self.depth_field.set_quantity(trap.depth)
        self.depth_field.setEnabled(trap.harmonic)
        if self._answered != (plan.species.key, plan.species.state, trap):
            self._answered = (plan.species.key, plan.species.state, trap)
            self._show_facts((_PENDING,) * len(self._facts), f"Of {trap.makers}, as the plan file has them.")
        for key in _TYPED:
            self.show_row(key, trap.harmonic)
        for key in _FACTS:
            self.show_row(key, not trap.harmonic)

    def show_trap(self, answer: TrapAnswer) -> None:
        """Say what follows from beams and coils; an answer to another trap than the plan's is left alone."""
        if self._plan is None or self._plan.trap.harmonic or self._plan.trap != answer.trap:
            return
        from app.trap_words import depth_text, frequencies_text, reason_no_frequencies, reason_not_trapped, sag_text

        reason = reason_not_trapped(answer) or reason_no_frequencies(answer)
        note = f"Of {answer.trap.makers}, as the plan file has them."
        texts = frequencies_text(answer), depth_text(answer), sag_text(answer)
        if not answer.trapped:
            texts = ("not trapped", "–", "–")
        self._show_facts(texts, f"{reason[0].upper()}{reason[1:]}. {note}" if reason else note)

    def _show_facts(self, texts: tuple[str, ...], note: str) -> None:
        for fact, text in zip(self._facts, texts, strict=True):
            fact.setText(text)
            fact.setAccessibleDescription(text)
        self.show_note(_MADE, note)


def _put(place: int, plan: Plan, quantity: Quantity | None) -> Plan:
    assert plan.trap.frequencies is not None  # else the fields are hidden
    assert quantity is not None  # the fields are not optional
    frequencies = list(plan.trap.frequencies)
    frequencies[place] = quantity
    x, y, z = frequencies
    return replace(plan, trap=replace(plan.trap, frequencies=(x, y, z)))
