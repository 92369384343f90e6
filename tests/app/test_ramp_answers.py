"""Simulated and designed ramps of plans, waypoints, sensitivities, and the jobs that work them out."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from app.answers.ramp import RampAnswer, kept_ramp, ramp_answer, simulated
from app.answers.ramp_design import controls_of, design_answer, unit_in_use, usual_control
from app.answers.ramp_inputs import gas_of, losses_of, path_of, ramp_of, target_of
from app.answers.ramp_jobs import apart, departures_job, design_job, ramp_job, sensitivity_job
from app.answers.ramp_sensitivity import sensitivity_answer
from app.answers.ramp_start import paths_of, stage_named, start_of
from app.answers.watched_path import Progress, WatchedPath, surveys_along
from app.answers.waypoints import departures_answer, errors_at, usual_densities, waypoints_answer
from app.design_words import design_sentence
from app.newest import Newest, Steps, Watch
from app.plan import Plan, PlanError, parse_plan, write_plan
from app.process import own_process
from physics.evaporation import Cancelled, EndReason, evaporate
from physics.ramp_caveats import RampCaveatKind
from physics.ramps import Control, Knob
from physics.trap_path import DEPTH, SCALE

HEAD = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[trap]
frequencies = ["1500 Hz", "1500 Hz", "1500 Hz"]
depth = "500 uK"
[cloud]
atoms = "2.0(2)e6"
temperature = "50(2) uK"
[losses]
background_lifetime = "20 s"
"""
TARGET = "[target]\npeak_phase_space_density = 2.612\nefficiency = 3.0\n"
STAGES = "".join(
    f'[[ramp.stage]]\nlabel = "{label}"\nduration = "{time}"\ncontrol = "scale"\nend = {end}\nshape = "{shape}"\n'
    for label, time, end, shape in (
        ("first", "60 ms", 0.3, "exponential"),
        ("second", "100 ms", 0.1, "linear"),
        ("third", "150 ms", 0.03, "exponential"),
        ("fourth", "400 ms", 0.005, "exponential"),
    )
)
MEASURED = """[[measured]]
label = "After stage 2"
stage = 2
atoms = "1.1(1)e6"
temperature = "5.0(2) uK"
[[measured]]
label = "half of the third"
time = "235 ms"
atoms = "1.0e6"
temperature = "3.0 uK"
[[measured]]
label = "loaded"
atoms = "1.8e6"
temperature = "52 uK"
[[measured]]
label = "at the end"
stage = 4
atoms = "5e5"
temperature = "400 nK"
"""
BEAM = """coldward = 1
[species]
key = "6Li"
state = "F=1/2 mF=1/2"
spin_components = 2
scattering_length = "-200 a0"
[trap]
gravity = "off"
[[trap.beam]]
name = "A"
wavelength = "1064 nm"
power = "1 W"
waist = "40 um"
direction = [1, 0, 0]
[cloud]
atoms = "2e5"
temperature = "3 uK"
[[ramp.stage]]
duration = "1 s"
control = "power"
beam = "A"
end = "0.8 W"
"""


@pytest.fixture(scope="module")
def plan() -> Plan:
    return parse_plan(HEAD + TARGET + STAGES + MEASURED, "a.toml")


@pytest.fixture(scope="module", autouse=True)
def _no_process_is_left() -> Iterator[None]:
    yield
    own_process.close()
    assert not own_process.running


@pytest.fixture
def quick_designs(monkeypatch: pytest.MonkeyPatch) -> None:
    """A search that looks at few truncation parameters; what it finds is worked out as always."""
    monkeypatch.setattr("physics.ramp_design._SCAN", 5)
    monkeypatch.setattr("physics.ramp_design._REFINE", 4)
    monkeypatch.setattr("physics.ramp_design._DRIFTS", ())


# --- simulated ---


def test_the_answer_is_the_simulation_of_what_the_plan_says(plan: Plan) -> None:
    answer = ramp_answer(plan)
    run = evaporate(
        gas_of(plan), 2e6, 5e-5, ramp_of(plan), path_of(plan), losses=losses_of(plan), target=target_of(plan)
    )
    np.testing.assert_array_equal(answer.run.atoms, run.atoms)
    assert answer.reached
    assert answer.run.rows.peak_phase_space_density[-1] == pytest.approx(2.612, abs=1e-3)
    assert abs(answer.run.budget.atoms_missing) < 1e-6
    assert abs(answer.run.budget.energy_missing) < 1e-6


def test_it_is_kept_for_the_fields_that_it_depends_on(plan: Plan) -> None:
    answer = ramp_answer(plan)
    assert ramp_answer(replace(plan, title="another title")) is answer
    assert kept_ramp(plan) is answer
    assert ramp_answer(replace(plan, ramp=plan.ramp[:2])) is not answer


def test_caveats(plan: Plan) -> None:
    kinds = {caveat.kind for caveat in ramp_answer(plan).caveats}
    assert kinds >= {RampCaveatKind.ESTIMATES, RampCaveatKind.LENGTH_RECALLED, RampCaveatKind.THREE_BODY_RECALLED}
    assert RampCaveatKind.NO_BACKGROUND not in kinds
    bare = parse_plan(HEAD.split("[losses]")[0] + STAGES, "a.toml")
    assert RampCaveatKind.NO_BACKGROUND in {caveat.kind for caveat in ramp_answer(bare).caveats}
    polarised = parse_plan(
        (HEAD + STAGES).replace('"87Rb"', '"40K"').replace('state = "F=1 mF=-1"', "spin_components = 1"), "a.toml"
    )
    assert next(iter(ramp_answer(polarised).caveats)).kind is RampCaveatKind.POLARISED


def test_what_cannot_be_answered_says_so(plan: Plan) -> None:
    with pytest.raises(PlanError, match=r"the plan has no ramp: give it stages \[\[ramp.stage\]\]"):
        ramp_answer(replace(plan, ramp=()))
    with pytest.raises(PlanError, match="nothing is left of the ramp after its last stage"):
        ramp_answer(plan, "at the end")
    with pytest.raises(PlanError, match='no measured cloud is called "tomorrow"; the plan has "After stage 2", "half'):
        ramp_answer(plan, "tomorrow")
    with pytest.raises(PlanError, match=r"the plan has none: give it \[\[measured\]\]"):
        ramp_answer(replace(plan, measured=()), "tomorrow")
    twice = replace(plan, measured=(*plan.measured, plan.measured[0]))
    with pytest.raises(PlanError, match='"after stage 2" may be two measured clouds or more'):
        ramp_answer(twice, "after stage 2")
    unknown = parse_plan((HEAD + STAGES).replace('"87Rb"', '"6Li"').replace('state = "F=1 mF=-1"\n', ""), "a.toml")
    asked = replace(unknown, species=replace(unknown.species, spin_components=2))
    with pytest.raises(PlanError, match=r"species\.scattering_length, or species\.field"):
        ramp_answer(asked)


# --- from a measured cloud ---


def test_a_cloud_is_found_by_the_stage_after_which_it_was_measured(plan: Plan) -> None:
    renamed = replace(plan, measured=(replace(plan.measured[0], label="a good shot"),))
    assert renamed.measured[0].stage == 2
    assert ramp_answer(renamed, "after stage 2").run.final == ramp_answer(renamed, "A good shot").run.final
    with pytest.raises(PlanError, match='no measured cloud is called "after stage 1"'):
        ramp_answer(renamed, "after stage 1")


def test_going_on_from_the_simulated_cloud_is_the_same_ramp(plan: Plan) -> None:
    """A measured cloud that is as simulated ends as planned."""
    whole = ramp_answer(plan).run
    row = whole.stages[1].last
    atoms, temperature = float(whole.atoms[row]), float(whole.temperature[row])
    first = plan.measured[0]
    assert first.temperature is not None
    same = replace(
        first,
        atoms=replace(first.atoms, value=atoms),
        temperature=replace(first.temperature, value=temperature),
    )
    rest = ramp_answer(replace(plan, measured=(same,)), "after  STAGE 2")
    assert (rest.first, rest.begin) == (2, pytest.approx(0.16))
    assert rest.run.final["atoms"] == pytest.approx(whole.final["atoms"], rel=1e-4)
    assert rest.begin + rest.run.final["time"] == pytest.approx(whole.final["time"], rel=1e-4)


def test_measured_within_a_stage_and_before_the_ramp(plan: Plan) -> None:
    start = start_of(plan, "half of the third")
    assert (start.stage, start.begin) == (2, pytest.approx(0.235))
    assert start.path.standing[SCALE] == pytest.approx(np.sqrt(0.1 * 0.03))
    loaded = start_of(plan, "loaded")
    assert (loaded.stage, loaded.begin, loaded.atoms) == (0, 0.0, 1.8e6)
    assert loaded.ramp == ramp_of(plan)
    assert stage_named(" After  stage 12") == 12
    assert stage_named("after the MOT") is None


# --- designed ---


@pytest.mark.usefixtures("quick_designs")
def test_a_designed_ramp_is_one_that_can_be_edited_saved_and_simulated(plan: Plan) -> None:
    found = design_answer(plan)
    assert found.control == SCALE
    assert found.design.reached
    assert not found.assumed
    designed = parse_plan(write_plan(found.plan(plan)), "designed.toml")
    again = ramp_answer(designed)
    assert again.reached
    assert again.run.final["atoms"] == pytest.approx(found.design.simulated.final["atoms"], rel=0.01)
    assert again.run.final["atoms"] == pytest.approx(found.answer.run.final["atoms"], rel=1e-9)
    assert again.run.final["atoms"] > ramp_answer(plan).run.final["atoms"]
    for stage in found.stages:
        digits = stage.duration.text.split()[0].replace(".", "").lstrip("0")
        assert len(digits) <= 4


@pytest.mark.usefixtures("quick_designs")
def test_a_held_truncation_parameter_leaves_no_more_atoms_than_one_that_may_drift(plan: Plan) -> None:
    held, free = design_answer(plan, drift=False), design_answer(plan)
    assert held.design.drift == 0.0
    assert held.design.simulated.final["atoms"] <= free.design.simulated.final["atoms"] * (1.0 + 1e-6)


@pytest.mark.usefixtures("quick_designs")
def test_a_design_keeps_to_the_limits_and_to_the_unit(plan: Plan) -> None:
    limits = '[limits]\ntime = "300 ms"\n[[limits.control]]\ncontrol = "depth"\nlow = "0.5 uK"\nhigh = "0.5 mK"\n'
    limited = parse_plan(HEAD + TARGET + limits, "a.toml")
    assert usual_control(limited) == DEPTH
    assert unit_in_use(limited, DEPTH) == "µK"
    found = design_answer(limited)
    assert sum(stage.duration.value for stage in found.stages) <= 0.3 * (1.0 + 1e-3)
    assert all(stage.moves[0].end is not None and stage.moves[0].end.text.endswith("µK") for stage in found.stages)
    assert (
        found.answer.run.final["atoms"] < design_answer(replace(limited, limits=plan.limits)).answer.run.final["atoms"]
    )


@pytest.mark.usefixtures("quick_designs")
def test_the_rest_can_be_designed_from_a_measured_cloud(plan: Plan) -> None:
    found = design_answer(plan, None, "after stage 2")
    assert found.stages[:2] == plan.ramp[:2]
    assert found.answer.begin == pytest.approx(0.16)
    again = ramp_answer(found.plan(plan), "after stage 2")
    assert again.run.final["atoms"] == pytest.approx(found.answer.run.final["atoms"], rel=1e-6)
    within = design_answer(plan, None, "half of the third")
    assert within.stages[:2] == plan.ramp[:2]
    assert within.stages[2].duration.value == pytest.approx(0.075)
    assert within.stages[2].moves[0].end is not None
    assert within.stages[2].moves[0].end.value == pytest.approx(np.sqrt(0.1 * 0.03), rel=1e-3)


@pytest.mark.usefixtures("quick_designs")
def test_a_design_without_a_target_assumes_one_and_says_so(plan: Plan) -> None:
    found = design_answer(replace(plan, target=replace(plan.target, peak_phase_space_density=None), ramp=()))
    assert found.assumed
    assert found.target.peak_phase_space_density == pytest.approx(2.612)
    assert found.answer.reached


def test_controls_that_can_be_designed(plan: Plan) -> None:
    assert controls_of(plan) == (DEPTH, SCALE)
    unknown = replace(plan, trap=replace(plan.trap, depth=None), ramp=())
    assert controls_of(unknown) == (SCALE,)
    with pytest.raises(ValueError, match="knife cannot be designed: controls with a known start are depth, scale"):
        design_answer(plan, Control(Knob.KNIFE))
    with pytest.raises(ValueError, match="depth of the trap must be known"):
        design_answer(unknown)
    gone = replace(plan, limits=replace(plan.limits, time=replace(plan.ramp[0].duration, value=0.1)))
    with pytest.raises(PlanError, match=r"limits.time, 0.1 s, is over"):
        design_answer(gone, None, "after stage 2")


def test_beams_that_move_together_are_designed_together() -> None:
    second = BEAM.replace(
        "[cloud]",
        """[[trap.beam]]
name = "B"
wavelength = "1064 nm"
power = "2 W"
waist = "60 um"
direction = [0, 1, 0]
[cloud]""",
    )
    limit = '[[limits.control]]\ncontrol = "power"\nbeam = "A"\nlow = "0.1 W"\n'
    both = '[[ramp.stage.move]]\ncontrol = "power"\nbeam = "B"\nend = "1 W"\n'
    A = Control(Knob.POWER, "A")
    assert usual_control(parse_plan(BEAM, "a.toml")) == A
    assert usual_control(parse_plan(second, "a.toml")) == A  # as the ramp does
    assert usual_control(parse_plan(second + both, "a.toml")) == SCALE
    assert usual_control(parse_plan(second + both + limit, "a.toml")) == SCALE
    assert usual_control(parse_plan(second + limit, "a.toml")) == A
    assert usual_control(replace(parse_plan(second + limit, "a.toml"), ramp=())) == SCALE
    assert usual_control(replace(parse_plan(BEAM + limit, "a.toml"), ramp=())) == A


def test_a_beam_that_does_not_reach_the_target_names_those_that_stay(plan: Plan) -> None:
    found = design_answer(plan, SCALE)
    assert found.others == ()
    short = replace(found, control=Control(Knob.POWER, "A"), others=("B",), design=replace(found.design, reached=False))
    assert design_sentence(short).startswith("No ramp of power A reaches ")
    assert design_sentence(short).endswith(
        "The light of B stays as it is: design the scale, which moves all beams together."
    )
    assert "{" not in design_sentence(found)


# --- waypoints and sensitivities ---


def test_waypoints_of_the_ramp(plan: Plan) -> None:
    found = waypoints_answer(plan, (0.05, 0.5, 50.0), 0.02)
    assert [point.phase_space_density for point in found.points] == [0.05, 0.5]
    assert found.missed == (50.0,)
    run = ramp_answer(plan).run
    for point in found.points:
        between = np.interp(point.time, run.time, np.log(run.atoms))
        assert point.atoms == pytest.approx(np.exp(between), rel=1e-3)
    usual = waypoints_answer(plan)
    assert not usual.missed
    assert usual.points[-1].time == pytest.approx(run.time[-1], rel=1e-3)


def test_usual_waypoints_are_round() -> None:
    assert usual_densities([3e-7, 0.1, 2.5])[:3] == (1e-6, 1e-5, 1e-4)
    assert usual_densities([0.15, 2.5])[:4] == (0.2, 0.5, 1.0, 2.0)
    assert usual_densities([np.nan]) == ()


def test_waypoints_without_a_ramp_need_an_efficiency(plan: Plan) -> None:
    quick = replace(plan, ramp=(), measured=())
    found = waypoints_answer(quick, (0.05, 0.5))
    assert found.efficiency == 3.0
    first, second = found.points
    assert np.isnan(first.time)
    # gamma is that of the classical density, which near the threshold is below the quantum one.
    steps = np.log(second.atoms / first.atoms)
    classical = np.log((second.atoms / first.atoms) / (second.temperature / first.temperature) ** 1.5)
    assert classical > 0.0 > steps
    with pytest.raises(PlanError, match=r"waypoints need a ramp, or target.efficiency"):
        waypoints_answer(replace(quick, target=replace(plan.target, efficiency=None)))


def test_departures_use_the_errors_of_the_nearest_measured_cloud(plan: Plan) -> None:
    point = waypoints_answer(plan, (0.2,)).points[0]
    found = departures_answer(plan, point)
    assert found.source == "After stage 2"
    assert (found.atoms_error, found.temperature_error) == (pytest.approx(0.1 / 1.1), pytest.approx(0.04))
    planned, less, more, colder, hotter = (one.run.final["atoms"] for one in found.departures)
    assert planned == pytest.approx(ramp_answer(plan).run.final["atoms"], rel=2e-3)
    assert less < planned < more
    assert colder > planned > hotter
    own = replace(plan, measured=())
    assert errors_at(own, 0.1) == (pytest.approx(0.1), pytest.approx(0.04), "")
    exact = replace(
        own, cloud=replace(plan.cloud, atoms=plan.measured[2].atoms, temperature=plan.measured[1].temperature)
    )
    assert departures_answer(exact, point).departures == ()
    assert len(departures_answer(exact, point, (0.1, 0.0)).departures) == 3


def test_what_counts_most(plan: Plan) -> None:
    found = sensitivity_answer(plan).found
    assert found[0].input.label == "atoms"
    slopes = [abs(one.slope) for one in found if not one.changes_end]
    assert slopes == sorted(slopes, reverse=True)
    assert sensitivity_answer(plan) is sensitivity_answer(replace(plan, title="other"))


# --- progress, stops, the process ---


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
    plan = parse_plan(BEAM, "a.toml")
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
