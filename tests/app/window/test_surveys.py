"""Surveys of beams and coils: on a worker, kept, and the last good answer stays on show meanwhile."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

import physics.traps.survey
from app.engine import cloud_answer, prepare_trap, surveyed, trap_answer
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan
from app.units import BEAM_POWER, read_quantity
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]
PRESETS = Path(__file__).parents[3] / "presets" / "traps"


def with_power(plan: Plan, text: str) -> Plan:
    beam = replace(plan.trap.beams[0], power=read_quantity(text, BEAM_POWER))
    return replace(plan, trap=plan.trap.with_beam(beam.name, beam))


@pytest.fixture(scope="module")
def plan() -> Plan:
    crossed = read_plan(PRESETS / "crossed_beams_rubidium.toml")
    return plan_with(crossed, {"cloud.atoms": "4e5", "cloud.temperature": "620 nK"})


class Surveys:
    """Counts surveys, notes the threads that make them, and holds each back until `gate` is open."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.threads: list[int] = []
        self.gate, self.curve_gate = threading.Event(), threading.Event()
        self.gate.set()
        self.curve_gate.set()
        self._survey, self._curve = physics.traps.survey.survey, physics.traps.survey.volume_curve_of
        monkeypatch.setattr(physics.traps.survey, "survey", self.survey)
        monkeypatch.setattr(physics.traps.survey, "volume_curve_of", self.curve)

    def survey(self, *args: object) -> object:
        self.threads.append(threading.get_ident())
        assert self.gate.wait(20.0)
        return self._survey(*args)  # type: ignore[arg-type]

    def curve(self, *args: object) -> object:
        self.threads.append(threading.get_ident())
        assert self.curve_gate.wait(20.0)
        return self._curve(*args)  # type: ignore[arg-type]


@pytest.fixture
def surveys(monkeypatch: pytest.MonkeyPatch) -> Surveys:
    return Surveys(monkeypatch)


def test_what_a_cloud_needs_of_a_trap_is_there_once_it_was_prepared(plan: Plan, surveys: Surveys) -> None:
    other = with_power(plan, "2.47(3) W")
    assert surveyed(DEFAULT_PLAN)
    assert not surveyed(other)
    trap_answer(other)
    assert not surveyed(other)  # the volume curve is missing
    prepare_trap(other)
    assert surveyed(other)
    made = len(surveys.threads)
    cloud_answer(plan_with(other, {"cloud.atoms": "3e4"}))
    assert len(surveys.threads) == made
    with pytest.raises(ValueError, match="state"):
        prepare_trap(replace(other, species=replace(other.species, state="F=9")))


def test_the_window_surveys_on_a_worker_and_never_twice(
    window: MainWindow, settle: Settle, plan: Plan, surveys: Surveys
) -> None:
    first, second = with_power(plan, "2.461 W"), with_power(plan, "2.462 W")
    for shown in (first, second):
        window.document.edit(shown, "plan")
        settle(window)
        assert window.answers.cloud is not None
        assert window.answers.cloud.plan == shown
        assert not window.desk.verdict.stale
    made = len(surveys.threads)
    assert made == 4  # a survey and a volume curve each
    assert threading.get_ident() not in surveys.threads
    # back, and another cloud: at once, in the GUI thread, without another survey
    for shown in (first, plan_with(second, {"cloud.temperature": "500 nK"})):
        window.document.edit(shown, "plan")
        window.answers.answer_now()
        assert window.answers.cloud.plan == shown
    assert len(surveys.threads) == made


def test_the_form_tells_of_the_trap_before_the_cloud_is_answered(
    window: MainWindow, settle: Settle, plan: Plan, surveys: Surveys, qtbot: QtBot
) -> None:
    window.document.edit(with_power(plan, "2.4611 W"), "plan")
    settle(window)
    form, before = window.desk.bench.trap, window.answers.cloud
    depth = form.made_depth.text()
    surveys.curve_gate.clear()
    window.document.edit(with_power(plan, "1.9 W"), "plan")
    qtbot.waitUntil(lambda: form.made_depth.text() != depth)
    assert not form.made_depth.property("stale")
    assert form.facts["scattering_rate"].text().endswith("1/s")
    assert window.answers.cloud is before
    shallow = form.made_depth.text()
    surveys.curve_gate.set()
    settle(window)
    assert window.answers.cloud is not before
    assert form.made_depth.text() == shallow


def test_the_last_good_answer_stays_and_says_what_is_waited_for(
    window: MainWindow, settle: Settle, plan: Plan, surveys: Surveys, qtbot: QtBot
) -> None:
    before = window.answers.cloud
    surveys.gate.clear()
    window.document.edit(with_power(plan, "2.463 W"), "plan")
    qtbot.waitUntil(lambda: window.desk.verdict.stale)
    assert window.desk.verdict.sentence == "Not current: the trap is being surveyed"
    assert window.answers.cloud is before
    assert not window.answers.settled
    assert window.desk.map.plot.canvas.stale_text is not None
    # what comes between is not waited for: undo brings the old answer back while the worker is still busy
    window.document.stack.undo()
    qtbot.waitUntil(lambda: window.answers.settled and not window.desk.verdict.stale)
    surveys.gate.set()
    settle(window)
    assert window.answers.cloud.plan == DEFAULT_PLAN
    assert not window.desk.verdict.stale


def test_surveys_on_the_way_are_shown_as_not_current(
    window: MainWindow, settle: Settle, plan: Plan, surveys: Surveys, qtbot: QtBot
) -> None:
    first, last = with_power(plan, "2.464 W"), with_power(plan, "2.465 W")
    shown: list[tuple[Plan, bool]] = []
    window.answers.cloud_ready.connect(lambda answer: shown.append((answer.plan, window.answers.current)))
    surveys.gate.clear()
    window.document.edit(first, "plan")
    window.answers.answer_now()
    qtbot.waitUntil(lambda: len(surveys.threads) == 1)
    window.document.edit(last, "plan")
    window.answers.answer_now()
    surveys.gate.set()
    settle(window)
    assert shown == [(first, False), (last, True)]
    assert not window.desk.verdict.stale


def test_a_survey_that_fails_is_told_and_the_next_plan_is_answered(
    window: MainWindow, settle: Settle, plan: Plan, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_args: object) -> object:
        raise ValueError("the trap cannot be surveyed: it is made of cheese")

    with monkeypatch.context() as patch:
        patch.setattr(physics.traps.survey, "survey", fail)
        window.document.edit(with_power(plan, "2.466 W"), "plan")
        settle(window)
    assert window.desk.verdict.sentence == "Not current: the trap cannot be surveyed: it is made of cheese"
    window.document.edit(with_power(plan, "2.467 W"), "plan")
    settle(window)
    assert not window.desk.verdict.stale


def test_typing_into_a_field_meanwhile_goes_on(
    window: MainWindow, settle: Settle, plan: Plan, surveys: Surveys, qtbot: QtBot
) -> None:
    surveys.gate.clear()
    window.document.edit(with_power(plan, "2.468 W"), "plan")
    window.answers.answer_now()
    atoms = window.desk.bench.cloud.atoms
    atoms.selectAll()
    QTest.keyClicks(atoms, "4e5")
    QTest.keyClick(atoms, Qt.Key.Key_Return)
    assert window.document.plan.cloud.atoms.value == 4e5
    surveys.gate.set()
    settle(window)
    assert window.answers.cloud is not None
    assert window.answers.cloud.plan == window.document.plan
    assert len(surveys.threads) == 2  # one survey, one volume curve for both plans
