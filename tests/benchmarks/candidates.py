"""Speed of comparing species: all states of the data, in milliseconds. The same light takes a survey for each."""

from __future__ import annotations

import time
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from app.answers.candidates import candidates_answer, candidates_of
from app.candidate_choices import Basis, CandidatesChoice, Start
from app.candidate_columns import USUAL_COLUMNS
from app.plan import DEFAULT_PLAN, Plan, read_plan

LIGHT = Path(__file__).resolve().parents[2] / "presets" / "traps" / "crossed_beams_rubidium.toml"


def rows() -> Iterator[tuple[str, float, float | None]]:
    light = read_plan(LIGHT)
    for what, plan, choice, goal in (
        ("same frequencies", DEFAULT_PLAN, CandidatesChoice(), 1e3),
        (
            "same start, phase-space density",
            DEFAULT_PLAN,
            CandidatesChoice(basis=Basis.SAME_START, start=Start.PHASE_SPACE_DENSITY),
            1e3,
        ),
        ("same light, two beams", light, CandidatesChoice(basis=Basis.SAME_LIGHT), 1e4),
    ):
        asked = replace(plan, candidates=choice)
        yield f"{len(candidates_of(asked))} states, {what} [ms]", once(asked), goal


def once(plan: Plan) -> float:
    """Milliseconds for all rows with the usual columns, the first time."""
    start = time.perf_counter()
    answer = candidates_answer(plan)
    assert answer is not None
    for row in answer.rows:
        for name in USUAL_COLUMNS:
            row.cell(name)
    return 1e3 * (time.perf_counter() - start)
