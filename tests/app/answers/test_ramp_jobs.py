"""The answers about a ramp as jobs: progress, stops, what is kept, and the process."""

from __future__ import annotations

import threading
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from app.answers.ramp import RampAnswer, kept_ramp, ramp_answer, simulated
from app.answers.ramp_design import design_answer
from app.answers.ramp_inputs import gas_of, path_of, ramp_of
from app.answers.ramp_jobs import apart, departures_job, design_job, ramp_job, sensitivity_job
from app.answers.ramp_sensitivity import sensitivity_answer
from app.answers.ramp_start import paths_of, start_of
from app.answers.watched_path import Progress, WatchedPath, surveys_along
from app.answers.waypoints import waypoints_answer
from app.newest import Newest, Steps, Watch
from app.plan import Plan, PlanError, read_plan
from app.process import own_process
from physics.evaporation import Cancelled, EndReason, evaporate

DATA = Path(__file__).parents[2] / "data"


def test_ticks_stop_each_answer(plan: Plan) -> None:
    fresh = replace(plan, cloud=replace(plan.cloud, atoms=replace(plan.cloud.atoms, value=1.9e6)))
    for answer in (
        lambda tick: ramp_answer(fresh, None, tick),
        lambda tick: design_answer(fresh, None, None, tick),
        lambda tick: sensitivity_answer(fresh, None, tick),
    ):
        with pytest.raises(Cancelled):
            answer(lambda _share: False)
    assert kept_ramp(fresh) is None


def test_shares_of_progress_rise_to_one(plan: Plan, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("app.answers.watched_path._PAUSE", 0.0)
    told: list[float] = []
    answer = simulated(plan, start_of(plan), lambda share: told.append(share) is None)
    assert told == sorted(told)
    assert 0.5 < told[-1] <= 1.0
    np.testing.assert_array_equal(answer.run.atoms, ramp_answer(plan).run.atoms)
    asked = 0

    def count(_share: float) -> bool:
        nonlocal asked
        asked += 1
        return True

    progress = Progress(tick=count, surveys=1)
    evaporate(gas_of(plan), 2e6, 5e-5, ramp_of(plan), WatchedPath(path=path_of(plan), progress=progress))
    assert asked == pytest.approx(surveys_along(ramp_of(plan), path_of(plan)), abs=6)


def work_out(job: Steps) -> Any:
    """What a job gives on the worker thread of a window."""
    newest, done, found = Newest(), threading.Event(), []
    newest.ask(job, lambda result: (found.append(result), done.set()), lambda error: (found.append(error), done.set()))  # type: ignore[func-returns-value]
    assert done.wait(60.0)
    newest.close()
    if isinstance(found[0], Exception):
        raise found[0]
    return found[0]


def test_jobs_give_the_answers_and_keep_them(plan: Plan) -> None:
    fresh = replace(plan, cloud=replace(plan.cloud, atoms=replace(plan.cloud.atoms, value=2.2e6)))
    answer = work_out(ramp_job(fresh))
    assert isinstance(answer, RampAnswer)
    assert not own_process.running  # a harmonic ramp is quick enough for the worker
    assert work_out(ramp_job(fresh)) is answer is kept_ramp(fresh)
    sensitivity = work_out(sensitivity_job(fresh))
    assert own_process.running
    assert sensitivity_answer(fresh) is sensitivity
    point = waypoints_answer(fresh, (0.2,)).points[0]
    assert len(work_out(departures_job(fresh, point)).departures) == 5
    with pytest.raises(PlanError, match="the plan has no ramp"):
        work_out(sensitivity_job(replace(fresh, ramp=())))


@pytest.mark.usefixtures("quick_designs")
def test_a_design_is_a_job_too(plan: Plan, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(own_process, "run", lambda task, arguments, tick: task(*arguments, tick))
    fresh = replace(plan, cloud=replace(plan.cloud, atoms=replace(plan.cloud.atoms, value=2.3e6)))
    design = work_out(design_job(fresh))
    assert design_answer(fresh) is design
    assert design.answer.run.reason is EndReason.TARGET


def test_surveys_come_back_from_the_process() -> None:
    plan = read_plan(DATA / "plan_of_one_beam.toml")
    (path,) = paths_of(plan)
    assert not path.known  # type: ignore[attr-defined]
    shares: list[float] = []
    answer = apart(plan, ramp_answer, (plan, None), Watch(lambda: True, lambda _part: None, shares.append))
    assert isinstance(answer, RampAnswer)
    known = dict(path.known)  # type: ignore[attr-defined]
    assert len(known) >= 5
    here = simulated(plan, start_of(plan))
    assert len(path.known) == len(known)  # type: ignore[attr-defined]  # nothing is surveyed twice
    np.testing.assert_array_equal(here.run.atoms, answer.run.atoms)
    assert shares[-1] > 0.5
    stopped = apart(plan, design_answer, (plan, None, None), Watch(lambda: False, lambda _part: None, shares.append))
    assert stopped is None


def test_a_job_is_the_same_where_its_ramp_is(plan: Plan) -> None:
    assert ramp_job(plan) == ramp_job(replace(plan, title="other"))
    assert ramp_job(plan) != ramp_job(plan, "loaded")
    assert ramp_job(plan) != design_job(plan)
