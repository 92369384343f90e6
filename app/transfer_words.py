"""What a cloud that is handed to another trap, or meets a jump of a control, has left: in words."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.language import translate as _
from app.ramp_choices import Handing
from app.words import number, percent, temperature

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from physics.evaporation_budget import StageSummary


def handed_text(answer: RampAnswer, stage: StageSummary) -> str:
    """How many atoms the trap of a stage has caught, and how hot they are; empty where none were handed to it."""
    if not stage.handed:
        return ""
    rows, row = answer.run.rows, stage.first
    what = {
        Handing.SLOW: _("Slowly into the trap of stage {number}"),
        Handing.SUDDEN: _("At once into the trap of stage {number}"),
        None: _("The jump before stage {number}"),
    }[answer.stages[stage.number + answer.first].handing]
    result = _("{share} of the atoms caught, {atoms} left, {after} after {before}").format(
        share=percent(stage.caught),
        atoms=number(float(rows.atoms[row]), 3),
        before=temperature(float(rows.temperature[max(row - 1, 0)])),
        after=temperature(float(rows.temperature[row])),
    )
    return f"{what.format(number=stage.number + 1 + answer.first)}: {result}"
