"""The Trap form: a trap by its frequencies, or of beams and coils, of which the frequencies follow.

Changing over keeps what was typed on the other side, so that changing back restores it.
"""

from __future__ import annotations

from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QRadioButton, QVBoxLayout, QWidget

from app.figures.profile import AXES
from app.plan import Plan, TrapChoice
from app.trap_edits import OtherSide, given_by_frequencies, made_of_beams
from app.units import Quantity
from app.widgets.caution import CautionNote
from app.widgets.form import Form
from app.widgets.tab_order import lay_tab_order

if TYPE_CHECKING:
    from app.answers.trap_solving import SolvedTrap
    from app.engine import TrapAnswer
    from app.forms.made_trap import MadeTrap
    from app.forms.trap_solving import SolvingCard

_FREQUENCIES = "trap.frequencies"
_TYPED = (*(f"{_FREQUENCIES}.{axis}" for axis in AXES), "trap.depth")
_FACTS = {
    "frequencies": ("Frequencies", "Ordinary frequencies at the minimum, along the axes nearest to x, y and z."),
    "depth": ("Depth", "Energy over k from the minimum to the lowest way out."),
    "arm_depth": ("Depth to an arm", "Energy over k from the minimum to where atoms get into an arm of a beam."),
    "sag": ("Sag", "How far along gravity the minimum lies from where it is without it."),
    "scattering_rate": ("Photons scattered", "Per atom and second, at the minimum."),
    "heating_rate": ("Recoil heating", "Rise of the temperature of a cloud by the photons that it scatters."),
}
_MADE = "made.frequencies"
_PENDING = "…"
_DIGITS_IN_A_LINE = 3  # of three frequencies beside each other; the Trap page has them with more
_THIN, _FIXED = "\N{NARROW NO-BREAK SPACE}", "\N{NO-BREAK SPACE}"


class TrapForm(Form):
    """Fields for the frequencies; or cards for beams and coils, what follows from them, which `show_trap` fills, and
    solving backwards.

    Signals: solving_wanted(Wish) and solving_dropped(), for who has a worker.
    """

    solving_wanted = Signal(object)
    solving_dropped = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Trap", parent)
        self.by_frequencies, self.by_beams = QRadioButton("Fre&quencies"), QRadioButton("Beams and coils")
        self.by_frequencies.setToolTip("The trap is given by three frequencies and, if known, its depth")
        self.by_beams.setToolTip("The trap is made of laser beams and magnetic coils; frequencies and depth follow")
        self._add_choice()
        self.frequencies = tuple(
            self.add_quantity(
                _FREQUENCIES, axis, label=f"Frequency {axis}", key=f"{_FREQUENCIES}.{axis}", put=partial(_put, place)
            )
            for place, axis in enumerate(AXES)
        )
        self.depth_field = self.add_quantity("trap.depth", "d")
        self.depth_field.setPlaceholderText("not given")
        self._made_place, self._solving_place = QVBoxLayout(), QVBoxLayout()
        self._solving_place.setSpacing(6)
        self._grid.addLayout(self._made_place, self._row, 0, 1, 2)
        self._row += 1
        self.facts = {name: self.add_fact(f"made.{name}", label, tip) for name, (label, tip) in _FACTS.items()}
        self._grid.addLayout(self._solving_place, self._row, 0, 1, 2)
        self._row += 1
        self.caution = CautionNote()
        self._grid.addWidget(self.caution, self._row, 0, 1, 2)
        self.made: MadeTrap | None = None  # built when it is first needed, as is the next one
        self.solving: SolvingCard | None = None
        self._other = OtherSide()
        self._answer: TrapAnswer | None = None  # that the facts tell of

    def _add_choice(self) -> None:
        row = QHBoxLayout()
        row.setSpacing(14)
        row.setContentsMargins(0, 0, 0, 2)
        for button, act in ((self.by_frequencies, self._choose_frequencies), (self.by_beams, self._choose_beams)):
            button.clicked.connect(act)
            row.addWidget(button)
        row.addStretch(1)
        self._grid.addLayout(row, self._row, 0, 1, 2)
        self._row += 1

    @property
    def made_frequencies(self) -> QLabel:
        return self.facts["frequencies"]

    @property
    def made_depth(self) -> QLabel:
        return self.facts["depth"]

    @property
    def sag(self) -> QLabel:
        return self.facts["sag"]

    # ---------------------------------------------------------------- showing

    def show_plan(self, plan: Plan) -> None:
        trap = plan.trap
        self._other = self._other.noting(trap)
        (self.by_frequencies if trap.harmonic else self.by_beams).setChecked(True)
        for field, quantity in zip(self.frequencies, trap.frequencies or (None,) * len(AXES), strict=True):
            field.set_quantity(quantity)
            field.setEnabled(trap.harmonic)
        self.depth_field.set_quantity(trap.depth)
        self.depth_field.setEnabled(trap.harmonic)
        for key in _TYPED:
            self.show_row(key, trap.harmonic)
        if not trap.harmonic:
            self._build()
        self._show_parts(plan)

    def _show_parts(self, plan: Plan) -> None:
        made = not plan.trap.harmonic
        for part in (self.made, self.solving):
            if part is not None:
                part.setVisible(made)
                if made:
                    part.set_plan(plan)
                else:
                    part.discard_edits()
        known = self._answer is not None and (self._answer.trap, self._answer.state.key) == (
            plan.trap,
            plan.species.key,
        )
        self._show_cautions(plan.trap)
        if made and not known and self._answer is None:
            for name in _FACTS:
                self._show_fact(name, _PENDING)
        for name in _FACTS:
            self.show_row(f"made.{name}", made and bool(self.facts[name].text()))
        self._mark_facts(stale=not known)
        self._order_tabs()

    def _show_cautions(self, trap: TrapChoice) -> None:
        if trap.harmonic:
            self.caution.show_cautions("", ())
            return
        from app.trap_words import caution_title, cautions

        self.caution.show_cautions(caution_title(trap), cautions(trap))

    def _build(self) -> None:
        if self.made is not None:
            return
        from app.forms.made_trap import MadeTrap
        from app.forms.trap_solving import SolvingCard

        self.made, self.solving = MadeTrap(), SolvingCard()
        self.made.plan_edited.connect(self.plan_edited)
        self.made.problems_changed.connect(self.problems_changed)
        self.solving.wanted.connect(self.solving_wanted)
        self.solving.dropped.connect(self.solving_dropped)
        self.solving.taken.connect(self._take_solved)
        self._made_place.addWidget(self.made)
        self._solving_place.addWidget(self.solving)

    def _order_tabs(self) -> None:
        """Cards come and go, so the keyboard's way from top to bottom is laid anew."""
        if self.made is None or self.solving is None:
            return
        fields = (self.by_frequencies, self.by_beams, *self.frequencies, self.depth_field)
        lay_tab_order((*fields, *self.made.parts, *self.facts.values(), self.solving, self.caution))

    def show_trap(self, answer: TrapAnswer) -> None:
        """Say what follows from beams and coils; an answer to another trap than the plan's is left alone."""
        if self._plan is None or self._plan.trap.harmonic or self._plan.trap != answer.trap:
            return
        from app.trap_words import fact_texts, frequencies_text, reason_no_frequencies, reason_not_trapped

        self._answer = answer
        reason = reason_not_trapped(answer) or reason_no_frequencies(answer)
        texts = fact_texts(answer)
        brief = {"frequencies": frequencies_text(answer, _DIGITS_IN_A_LINE)} if answer.trapped else {}
        for name in _FACTS:
            in_full = texts.get(name, "")
            self._show_fact(name, brief.get(name, in_full), in_full)
            self.show_row(f"made.{name}", name in texts)
        self.show_note(_MADE, f"{reason[0].upper()}{reason[1:]}." if reason else "")
        self._mark_facts(stale=False)

    def _show_fact(self, name: str, text: str, in_full: str = "") -> None:
        # In a narrow column a line ends after a sign, never before a unit.
        shown = text.replace(" × ", f"{_THIN}×{_THIN}\N{ZERO WIDTH SPACE}").replace(" Hz", f"{_FIXED}Hz")
        self.facts[name].setText(shown)
        self.facts[name].setAccessibleDescription(in_full or text)

    def _mark_facts(self, *, stale: bool) -> None:
        """Facts of another trap than the one that is typed are quiet until those of this one are there."""
        for fact in self.facts.values():
            if bool(fact.property("stale")) != stale:
                fact.setProperty("stale", stale)
                fact.style().polish(fact)

    @property
    def problems(self) -> tuple[str, ...]:
        made = () if self.made is None or self.made.isHidden() else self.made.problems
        return (*super().problems, *made)

    def discard_edits(self) -> None:
        super().discard_edits()
        self._other, self._answer = OtherSide(), None
        for part in (self.made, self.solving):
            if part is not None:
                part.discard_edits()

    # ---------------------------------------------------------------- edits

    def _choose_frequencies(self) -> None:
        if self._plan is not None and not self._plan.trap.harmonic:
            self._change_over(given_by_frequencies(self._plan, self._other, self._answer))

    def _choose_beams(self) -> None:
        if self._plan is not None and self._plan.trap.harmonic:
            self._change_over(made_of_beams(self._plan, self._other))

    def _change_over(self, plan: Plan) -> None:
        super().discard_edits()  # what could not be read on the side that is left
        self.plan_edited.emit(plan, "how the trap is given", "")

    def _take_solved(self, solved: SolvedTrap) -> None:
        from app.solving_words import what_changes

        if self._plan is not None:
            self.plan_edited.emit(replace(self._plan, trap=solved.after.trap), what_changes(solved), "")


def _put(place: int, plan: Plan, quantity: Quantity | None) -> Plan:
    assert plan.trap.frequencies is not None  # else the fields are hidden
    assert quantity is not None  # the fields are not optional
    frequencies = list(plan.trap.frequencies)
    frequencies[place] = quantity
    x, y, z = frequencies
    return replace(plan, trap=replace(plan.trap, frequencies=(x, y, z)))
