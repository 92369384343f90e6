"""Pictures of a ramp: columns over time, controls with their handles, the trade-off of a design."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from app import ramp_edits
from app.answers.ramp import RampAnswer, ramp_answer
from app.answers.ramp_inputs import path_of, ramp_of
from app.figures.draw import picture_bytes
from app.figures.picture import Role
from app.figures.ramp_columns import (
    ATOMS,
    COLUMNS,
    TEMPERATURE,
    TRUNCATION,
    Course,
    MeasuredPoint,
    column_picture,
    round_end,
    value_at,
)
from app.figures.ramp_controls import control_curves, control_picture, value_axis
from app.figures.ramp_tradeoff import eta_picture, time_picture
from app.plan import DEFAULT_PLAN, Plan, plan_with
from physics.constants import boltzmann
from physics.ramp_design import RampDesign, TradeOff
from physics.ramps import Ramp, Stage


@pytest.fixture(scope="module")
def plan() -> Plan:
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK", "cloud.atoms": "5e6"})
    plan = ramp_edits.with_new_stage(replace(plan, ramp=ramp_edits.usual_ramp(plan)), 1)
    return ramp_edits.with_new_stage(plan, 2, hold=True)


@pytest.fixture(scope="module")
def answer(plan) -> RampAnswer:
    return ramp_answer(plan)


def test_a_column_shows_the_rows_of_the_simulation_in_its_unit(answer):
    picture = column_picture(TEMPERATURE, [Course(name="", run=answer.run)], 16.0, (5.0, 10.0, 15.0))
    curve = next(c for c in picture.curves if c.role is Role.FIRST)
    assert np.array_equal(curve.y, answer.run.temperature)
    assert picture.y.low < curve.y.min() < curve.y.max() < picture.y.high
    assert picture.note.startswith("→ ")
    bounds = next(c for c in picture.curves if c.role is Role.STAGE)
    assert bounds.x[::3].tolist() == [5.0, 10.0, 15.0]


def test_every_column_can_be_drawn_and_names_its_value(answer):
    pictures = [column_picture(c, [Course(name="", run=answer.run)], 16.0, (5.0,), cursor=7.0) for c in COLUMNS]
    assert picture_bytes(pictures, "png", dpi=50.0).startswith(b"\x89PNG")
    for column, picture in zip(COLUMNS, pictures, strict=True):
        (mark,) = [mark for mark in picture.marks if mark.role is Role.CLOUD]
        assert mark.x == 7.0
        assert picture.note == column.text(mark.y)


def test_values_between_rows_follow_their_neighbours(answer):
    course = Course(name="", run=answer.run, begin=2.0)
    middle = 0.5 * (course.times[10] + course.times[11])
    value = value_at(course, answer.run.atoms, middle)
    assert value == pytest.approx(np.sqrt(answer.run.atoms[10] * answer.run.atoms[11]))
    assert np.isnan(value_at(course, answer.run.atoms, 1.9))


def test_the_time_axis_moves_in_coarse_steps():
    assert round_end(4.0) == round_end(4.3) == 4.5
    assert round_end(9.9) == 10.5
    assert round_end(12.0) == round_end(14.0) == 15.0


def test_measured_clouds_have_bars_only_where_they_say_something():
    point = MeasuredPoint(label="m", time=3.0, atoms=1e6, temperature=4e-7, atoms_sigma=1e5)
    atoms = column_picture(ATOMS, [], 10.0, (), measured=[point])
    (bar,) = [c for c in atoms.curves if c.role is Role.MEASURED]
    assert bar.y.tolist() == [9e5, 1.1e6]
    kelvin = column_picture(TEMPERATURE, [], 10.0, (), measured=[point])
    assert not any(c.role is Role.MEASURED for c in kelvin.curves)
    assert kelvin.marks[0].y == 4e-7
    assert column_picture(TRUNCATION, [], 10.0, (), measured=[point]).marks == ()


def test_a_control_has_a_handle_at_its_start_and_at_the_end_of_each_stage(plan):
    (curve,) = control_curves(ramp_of(plan), path_of(plan).standing)
    assert [(handle.stage, handle.start) for handle in curve.handles] == [(0, True), (0, False), (1, False), (2, False)]
    assert [time for time, _value in curve.places] == [0.0, 5.0, 10.0, 15.0]
    assert curve.places[1][1] == pytest.approx(plan.ramp[0].moves[0].end.value / boltzmann)
    assert curve.at(2.5) == pytest.approx(np.sqrt(curve.places[0][1] * curve.places[1][1]), rel=1e-3)
    picture = control_picture(curve, 16.0, (5.0, 10.0, 15.0), ("lower the depth", "", "x" * 60))
    assert [label.text for label in picture.labels] == ["lower the depth", "2", "3"]
    assert all(mark.draggable for mark in picture.marks)
    assert "from 30.0 µK to 1.50 µK" in picture.summary


def test_names_of_stages_stand_clear_of_the_curve(plan):
    (curve,) = control_curves(ramp_of(plan), path_of(plan).standing)
    axis = replace(value_axis(curve), low=1e-6, high=4e-5, log=True)
    start, end = (math.log(curve.at(time) / 1e-6) / math.log(40.0) for time in (0.0, 15.0))
    assert start > 0.65  # shares of the axis: the curve crosses it
    assert end < 0.35
    first, *_, last = control_picture(curve, 16.0, (5.0, 10.0, 15.0), ("a", "b", "c"), axis=axis).labels
    assert math.log(first.y / 1e-6) / math.log(40.0) == pytest.approx(0.08)
    assert math.log(last.y / 1e-6) / math.log(40.0) == pytest.approx(0.92)


def test_a_trade_off_shows_what_reaches_and_what_misses(answer):
    trade = TradeOff(
        truncation=np.array([4.0, 6.0, 8.0]),
        atoms=np.array([1e4, 5e5, 2e5]),
        time=np.array([2.0, 5.0, 20.0]),
        reached=np.array([False, True, True]),
        times=np.array([5.0, 9.0]),
        best_atoms=np.array([5e5, 6.5e5]),
        best_truncation=np.array([6.0, 6.5]),
    )
    design = RampDesign(
        ramp=Ramp(stages=(Stage(duration=1.0),)),
        simulated=answer.run,
        truncation=6.5,
        drift=0.0,
        reached=True,
        trade_off=trade,
    )
    eta = eta_picture(design)
    assert [curve.name for curve in eta.curves] == ["reaches the target", "misses it"]
    assert np.isnan(eta.curves[0].y).tolist() == [True, False, False]
    assert eta.marks[0].x == 6.5
    time = time_picture(design)
    assert time.curves[0].x.tolist() == [5.0, 9.0]
    assert picture_bytes([eta, time], "svg").startswith(b"<?xml")
