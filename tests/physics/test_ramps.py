"""Ramps: the shapes of their courses, what follows from stage to stage, and what is refused."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from physics.ramp_shapes import Shape, course
from physics.ramps import Control, Knob, Move, Ramp, Stage

DEPTH, SCALE, GRADIENT = Control(Knob.DEPTH), Control(Knob.SCALE), Control(Knob.GRADIENT)
POWER = Control(Knob.POWER, "A")
STANDING = {DEPTH: math.nan, SCALE: 1.0, POWER: 2.0}


def single(move: Move, duration: float = 4.0) -> Ramp:
    return Ramp(stages=(Stage(duration=duration, moves=(move,)),))


@pytest.mark.parametrize(
    ("shape", "exponent", "half"),
    [
        (Shape.LINEAR, None, 1.04),
        (Shape.EXPONENTIAL, None, 0.4),
        # a (1 + t/tau)^-2 with 1 + T/tau = 5: half way at 3.
        (Shape.POWER_LAW, 2.0, 2.0 / 9.0),
    ],
)
def test_shapes_half_way(shape: Shape, exponent: float | None, half: float) -> None:
    ramp = single(Move(control=POWER, end=0.08, shape=shape, exponent=exponent))
    found = ramp.values(STANDING, np.array([0.0, 2.0, 4.0]))[POWER]
    np.testing.assert_allclose(found, [2.0, half, 0.08], rtol=1e-12)
    assert found[-1] == 0.08


def test_a_table_is_straight_between_its_points_with_corners() -> None:
    ramp = single(Move(control=POWER, shape=Shape.TABLE, points=((0.0, 3.0), (1.0, 1.0), (4.0, 0.4))))
    (placed,) = ramp.placed(STANDING)
    assert placed.breaks == (1.0,)
    assert placed.values(2.5)[POWER] == pytest.approx(0.7)
    left, right = placed.courses[POWER].within(0.0, 1.0), placed.courses[POWER].within(1.0, 4.0)
    assert left.slope(1.0) == pytest.approx(-2.0)
    assert right.slope(1.0) == pytest.approx(-0.2)


@given(
    st.sampled_from([Shape.LINEAR, Shape.EXPONENTIAL, Shape.POWER_LAW]),
    st.floats(0.01, 100.0),
    st.floats(0.01, 100.0),
    st.floats(0.0, 1.0),
)
def test_a_course_stays_between_its_ends_and_its_slope_is_its_derivative(
    shape: Shape, start: float, end: float, x: float
) -> None:
    exponent = 1.3 if shape is Shape.POWER_LAW else None
    (placed,) = single(Move(control=POWER, start=start, end=end, shape=shape, exponent=exponent)).placed(STANDING)
    course = placed.courses[POWER]
    low, high = sorted((start, end))
    value = course.value(4.0 * x)
    assert low * (1.0 - 1e-12) <= value <= high * (1.0 + 1e-12)
    assert course.values(np.array([4.0 * x]))[0] == pytest.approx(value, rel=1e-13)
    time, step = 0.1 + 3.8 * x, 1e-4
    numeric = (course.value(time + step) - course.value(time - step)) / (2.0 * step)
    assert course.slope(time) == pytest.approx(numeric, rel=1e-5, abs=1e-9 * high)


def test_controls_stay_where_a_stage_left_them() -> None:
    ramp = Ramp(
        stages=(
            Stage(duration=1.0, moves=(Move(control=POWER, end=0.5),)),
            Stage(duration=2.0),
            Stage(duration=1.0, moves=(Move(control=SCALE, end=0.25), Move(control=POWER, start=0.7, end=0.1))),
        )
    )
    assert ramp.duration == 4.0
    found = ramp.values(STANDING, np.array([0.5, 1.0, 2.9, 3.0, 3.5, 4.0]))
    np.testing.assert_allclose(found[POWER], [1.25, 0.5, 0.5, 0.7, 0.4, 0.1])
    np.testing.assert_allclose(found[SCALE], [1.0, 1.0, 1.0, 1.0, 0.625, 0.25])
    first, hold, last = ramp.placed(STANDING)
    assert (first.moving, hold.moving, last.moving) == ((POWER,), (), (SCALE, POWER))
    assert (hold.begin, hold.end) == (1.0, 3.0)


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"control": POWER}, r"^power A moves without an end$"),
        ({"control": DEPTH, "end": 0.0}, r"^depth must be positive, got 0 J$"),
        ({"control": SCALE, "end": -1.0}, r"^scale must be positive, got -1$"),
        ({"control": POWER, "end": -1.0}, r"^power A must not be negative, got -1 W$"),
        ({"control": POWER, "start": math.inf, "end": 1.0}, r"^power A must be finite, got inf$"),
        ({"control": POWER, "end": 1.0, "shape": Shape.POWER_LAW}, r"with the shape power law needs an exponent$"),
        ({"control": POWER, "end": 1.0, "exponent": 2.0}, r"with the shape linear takes no exponent, got 2$"),
        ({"control": POWER, "end": 1.0, "points": ((0.0, 1.0),)}, r"has points, which only the shape table takes$"),
        ({"control": POWER, "shape": Shape.TABLE, "points": ((0.0, 1.0),)}, r"needs two points or more"),
        (
            {"control": POWER, "shape": Shape.TABLE, "points": ((0.0, 1.0), (0.0, 2.0))},
            r"^times of the table of power A must increase from 0 s$",
        ),
    ],
)
def test_moves_that_cannot_be_are_refused_in_a_sentence(given: dict[str, Any], sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        Move(**given)


def test_stages_and_ramps_that_cannot_be_are_refused_in_a_sentence() -> None:
    move = Move(control=POWER, end=1.0)
    with pytest.raises(ValueError, match=r"^duration of a stage must be positive and finite, got 0 s$"):
        Stage(duration=0.0)
    with pytest.raises(ValueError, match=r"^a stage moves power A twice$"):
        Stage(duration=1.0, moves=(move, move))
    table = Move(control=POWER, shape=Shape.TABLE, points=((0.0, 1.0), (2.0, 2.0)))
    with pytest.raises(ValueError, match=r"^table of power A must end at the duration of its stage, 1 s, got 2 s$"):
        Stage(duration=1.0, moves=(table,))
    with pytest.raises(ValueError, match=r"^a ramp needs one stage or more$"):
        Ramp()
    with pytest.raises(ValueError, match=r"^control power needs the name of a beam$"):
        Control(Knob.POWER)
    with pytest.raises(ValueError, match=r"^control depth has no beam, got B$"):
        Control(Knob.DEPTH, "B")


@pytest.mark.parametrize(
    ("move", "sentence"),
    [
        (
            Move(control=GRADIENT, end=1.0),
            r"^stage 1 moves gradient, which the trap does not have: depth, scale, power A$",
        ),
        (Move(control=DEPTH, end=1e-29), r"^stage 1 needs a start of depth, which is not known$"),
        (
            Move(control=POWER, end=0.0, shape=Shape.EXPONENTIAL),
            r"^stage 1: power A cannot go exponentially from 2 to 0: one sign, and not zero$",
        ),
    ],
)
def test_a_ramp_that_does_not_fit_the_trap_is_refused_in_a_sentence(move: Move, sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        list(single(move).placed(STANDING))


def test_tables_of_many_points_have_corners_only_where_they_turn() -> None:
    times = np.linspace(0.0, 2.0, 81)
    falling = np.where(times <= 1.0, np.exp(-3.0 * times), np.exp(-3.0))
    points = tuple(zip(times.tolist(), falling.tolist(), strict=True))
    moved = course(Move(control=SCALE, shape=Shape.TABLE, points=points), 1.0, 2.0)
    assert moved.corners == (1.0,)
    first, second = moved.within(0.0, 1.0), moved.within(1.0, 2.0)
    assert (first.start, first.end, len(first.times)) == (1.0, pytest.approx(np.exp(-3.0)), 41)
    assert second.still
    inside = moved.within(0.31, 0.72)  # between corners of another control
    assert (inside.times[0], inside.times[-1]) == (pytest.approx(0.3), pytest.approx(0.725))
    for t in (0.31, 0.5, 0.72):
        assert inside.value(t) == pytest.approx(moved.value(t))
        assert inside.slope(t) == pytest.approx(moved.slope(t))
    sharp = course(Move(control=SCALE, shape=Shape.TABLE, points=((0.0, 1.0), (1.0, 0.9), (2.0, 0.1))), 1.0, 2.0)
    assert sharp.corners == (1.0,)
