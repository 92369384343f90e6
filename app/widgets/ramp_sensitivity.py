"""Which input of a ramp counts most: what a tenth more or less of each does to the atoms at the end."""

from __future__ import annotations

import math
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from app.answers.ramp_jobs import ramp_depends_on, sensitivity_job
from app.answers.ramp_sensitivity import CHANGE, SensitivityAnswer
from app.figures.theme import LIGHT, Theme
from app.newest import Steps
from app.plan import Plan
from app.sensitivity_words import FIRST_ALONE, change_text, input_text, passenger_sensitivity_sentence
from app.widgets.effect_bar import EffectBar
from app.widgets.fact_table import FactRow, FactTable
from app.widgets.scrolled import fill_scrolled
from app.words import number, percent
from physics.ramp_sensitivity import RampSensitivity

_LEAST_REACH = 0.02  # of the logarithm of the atom number: smaller changes are no story


class SensitivityView(QWidget):
    """A table with a bar in each row, the strongest input first."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Which input counts most")
        self._found_for: object = None
        self._plan: Plan | None = None
        self._theme = LIGHT
        self.sentence = QLabel("Every input is changed by a tenth, one after the other.")
        self.sentence.setObjectName("plotStatus")
        self.sentence.setWordWrap(True)
        self.sentence.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.table = FactTable("What a tenth of each input does to the atoms at the end")
        body = QWidget()
        column = QVBoxLayout(body)
        column.setContentsMargins(14, 4, 10, 6)
        column.setSpacing(8)
        column.addWidget(self.sentence)
        column.addWidget(self.table)
        column.addStretch(1)
        fill_scrolled(self, body)

    def set_plan(self, plan: Plan) -> None:
        self._plan = plan
        if self._found_for is not None and self._found_for != ramp_depends_on(plan):
            self.sentence.setText("These are the numbers of the ramp before; new ones are being worked out.")

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        if not plan.ramp or self._found_for == ramp_depends_on(plan):
            return None, None
        return sensitivity_job(plan), "sensitivity"

    def take_extra(self, plan: Plan, extra: Any) -> None:
        self._found_for = ramp_depends_on(plan)
        if isinstance(extra, Exception):
            self.table.show_rows((), ())
            self.sentence.setText(f"{str(extra)[:1].upper()}{str(extra)[1:]}.")
        elif isinstance(extra, SensitivityAnswer):
            self._show(extra)

    def _show(self, found: SensitivityAnswer) -> None:
        share, planned = percent(CHANGE), found.planned
        rows = []
        for one in found.found:
            less, more = change_text(one, planned)
            rows.append(FactRow(name=input_text(one), cells=(less, more, "", *_of_passenger(found, one))))
        heads = ["input", f"{share} less", f"{share} more", "atoms at the end"]
        if found.passenger_bosons is not None:
            ratio = "T/Tc" if found.passenger_bosons else "T/TF"
            heads.append(f"passenger's {ratio}")
        self.table.show_rows(heads, rows)
        self.table.fill_width()
        effects = [_effects(one, planned) for one in found.found]
        finite = [abs(change) for pair in effects for change in pair if math.isfinite(change)]
        reach = max([_LEAST_REACH, *finite])
        for place, (less_change, more_change) in enumerate(effects):
            bar = self.table.cellWidget(place, 3)
            if not isinstance(bar, EffectBar):
                bar = EffectBar()
                bar.set_theme(self._theme)
                self.table.setCellWidget(place, 3, bar)
            bar.show_effect(less_change, more_change, reach)
        if found.found:
            first = found.found[0]
            how = (
                "it decides how the ramp ends"
                if first.changes_end
                else f"a tenth of it changes the atoms at the end by {percent(abs(math.expm1(CHANGE * first.slope)))}"
            )
            alone = f" Atoms {FIRST_ALONE}." if found.alone else ""
            self.sentence.setText(
                f"What counts most: {input_text(first)}; {how}. Bars: filled for more, outlined for less of it.{alone} "
                f"{passenger_sensitivity_sentence(found)}".rstrip()
            )

    def stopped(self) -> None:
        """Nothing to forget: it is asked for again when the user allows it."""

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        for place in range(self.table.rowCount()):
            bar = self.table.cellWidget(place, 3)
            if isinstance(bar, EffectBar):
                bar.set_theme(theme)

    def take_focus(self) -> None:
        self.table.setFocus()


def _of_passenger(found: SensitivityAnswer, one: RampSensitivity) -> tuple[str, ...]:
    """T/Tc or T/TF of the passenger at the end, by less and by more of an input, in a cell; none without one."""
    if found.passenger_bosons is None:
        return ()
    ends = (one.passenger_less, one.passenger_more)
    return (", ".join(number(value) if math.isfinite(value) else "–" for value in ends),)


def _effects(one: RampSensitivity, planned: float) -> tuple[float, float]:
    """Changes of ln(atoms at the end) by less and by more of an input."""

    def change(atoms: float) -> float:
        return math.log(atoms / planned) if atoms > 0.0 and planned > 0.0 else math.nan

    return change(one.atoms_less), change(one.atoms_more)
