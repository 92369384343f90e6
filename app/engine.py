"""From a plan to the parts of its answer.

Each part is a pure function of the plan fields named in its decorator; these fields (and its other arguments) are
the key under which its newest answers are kept. A visible page asks for its parts, a hidden page for none. The
cloud part is cheap enough for the thread that asks; the others are vectorised and belong on the worker thread of
`app.newest`. What is about ramps stands in `app.answers.ramp`, `ramp_design`, `ramp_sensitivity` and `waypoints`, which
a start does not load; `app.answers.ramp_jobs` has it as jobs.
"""

from __future__ import annotations

from app.answers.cloud import FERMI_THRESHOLD, CloudAnswer, cloud_answer
from app.answers.map import (
    MAP_POINTS,
    MapAnswer,
    MapLimits,
    draft_map,
    is_slow,
    map_answer,
    map_points,
    map_with_progress,
    usual_limits,
)
from app.answers.models import ModelsAnswer, models_answer
from app.answers.preparation import begin_trap, prepare_trap, surveyed
from app.answers.profile import PROFILE_POINTS, ProfileAnswer, profile_answer, round_up
from app.answers.rates import RatesAnswer, RateSet, rates_answer
from app.answers.slices import SLICE_POINTS, Against, SlicesAnswer, slices_answer
from app.answers.trap import TrapAnswer, trap_answer, trap_of
from app.answers.tuning import TuningAnswer, tuning_answer, usual_fields
from app.answers.uncertainty import SAMPLES, Joint, Method, Spread

__all__ = [
    "FERMI_THRESHOLD",
    "MAP_POINTS",
    "PROFILE_POINTS",
    "SAMPLES",
    "SLICE_POINTS",
    "Against",
    "CloudAnswer",
    "Joint",
    "MapAnswer",
    "MapLimits",
    "Method",
    "ModelsAnswer",
    "ProfileAnswer",
    "RateSet",
    "RatesAnswer",
    "SlicesAnswer",
    "Spread",
    "TrapAnswer",
    "TuningAnswer",
    "begin_trap",
    "cloud_answer",
    "draft_map",
    "is_slow",
    "map_answer",
    "map_points",
    "map_with_progress",
    "models_answer",
    "prepare_trap",
    "profile_answer",
    "rates_answer",
    "round_up",
    "slices_answer",
    "surveyed",
    "trap_answer",
    "trap_of",
    "tuning_answer",
    "usual_fields",
    "usual_limits",
]
