"""What the plots of the page Ramp show together: the ramp, the rest from a measured cloud, and ramps that were kept."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from app.caveat_words import CaveatLine
from app.figures.picture import Role
from app.figures.ramp_columns import Course, MeasuredPoint, round_end
from app.mixture_words import sympathetic_caveat_lines
from app.ramp_caveat_words import SIGNS, WEIGHTS, ramp_caveat_text
from app.widgets.ramp_plots import Scene

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_found import Found
    from app.answers.ramp_inputs import MeasuredCloud
    from app.plan import Plan
    from app.widgets.ramp_references import Reference


def scene_of(plan: Plan, duration: float, references: Sequence[Reference]) -> Scene:
    """The time axis, as long as the longest of the ramps, and the stages of this one.

    duration : of this ramp [s]
    """
    ends = [duration, *(float(ref.answer.run.time[-1]) for ref in references if len(ref.answer.run.time))]
    bounds, time = [], 0.0
    for stage in plan.ramp:
        time += stage.duration.value
        bounds.append(time)
    return Scene(end=round_end(max(ends)), bounds=tuple(bounds), labels=tuple(stage.label for stage in plan.ramp))


def courses_of(found: Found, references: Sequence[Reference]) -> list[Course]:
    """The simulated ramp first, then the rest from a measured cloud, and those that were kept."""
    assert found.ramp is not None
    courses = [Course(name="ramp", run=found.ramp.run, begin=found.ramp.begin)]
    if found.rest is not None:
        courses.append(Course(name="rest", run=found.rest.run, begin=found.rest.begin, role=Role.REST))
    courses += [
        Course(name=ref.name, run=ref.answer.run, begin=ref.answer.begin, role=Role.REFERENCE) for ref in references
    ]
    return courses


def points_of(measured: Sequence[MeasuredCloud]) -> list[MeasuredPoint]:
    """Measured clouds as points of the plots."""
    return [
        MeasuredPoint(
            label=cloud.choice.label,
            time=cloud.time or 0.0,
            atoms=cloud.atoms,
            temperature=cloud.temperature,
            atoms_sigma=cloud.atoms_sigma,
            temperature_sigma=cloud.temperature_sigma,
        )
        for cloud in measured
    ]


def caveat_lines_of(answer: RampAnswer) -> tuple[CaveatLine, ...]:
    """What the simulation does not cover, gravest first."""
    own = tuple(CaveatLine(SIGNS[c.severity], WEIGHTS[c.severity], ramp_caveat_text(c)) for c in answer.caveats)
    return own if answer.passenger is None else (*own, *sympathetic_caveat_lines(answer.passenger))
