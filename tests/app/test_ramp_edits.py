"""What a user can do to stages, limits and measured clouds: each edit changes what it says, and nothing else."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app import measured_edits, ramp_edits, transfer_edits
from app.answers.ramp_inputs import ramp_of
from app.answers.trap import trap_answer
from app.measured_edits import By, Where
from app.plan import DEFAULT_PLAN, Plan, PlanError, plan_with, read_plan
from app.ramp_choices import Handing, MoveChoice, StageChoice
from app.ramp_drags import with_end_dragged, with_place_dragged, with_start_dragged
from app.ramp_limits import limits_for, with_bound, with_longest_time
from app.trap_choices import BeamChoice, CoilsChoice, Gravity, TrapChoice
from app.trap_edits import with_beam, without_beam
from app.units import (
    ATOM_NUMBER,
    BEAM_POWER,
    BEAM_WAIST,
    BIAS_FIELD,
    DEPTH,
    DURATION,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    POWER_SPEED,
    RADIO_FREQUENCY,
    TEMPERATURE,
    WAVELENGTH,
    read_quantity,
)
from physics.constants import bohr_magneton, boltzmann, planck
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob

TRAPS = Path(__file__).resolve().parents[2] / "presets" / "traps"
DEPTH_CONTROL, SCALE = Control(Knob.DEPTH), Control(Knob.SCALE)


@pytest.fixture
def plan() -> Plan:
    """Depth from 30 uK to 3 uK in 5 s, then on to half of it."""
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK"})
    return ramp_edits.with_new_stage(replace(plan, ramp=ramp_edits.usual_ramp(plan)), 1)


def beams(power: str = "2 W") -> TrapChoice:
    waist = (read_quantity("60 um", BEAM_WAIST),)
    wavelength = read_quantity("1064 nm", WAVELENGTH)
    return TrapChoice(
        beams=(
            BeamChoice(
                name="A",
                wavelength=wavelength,
                power=read_quantity(power, BEAM_POWER),
                waists=waist,
                direction=(1, 0, 0),
            ),
            BeamChoice(
                name="B",
                wavelength=wavelength,
                power=read_quantity("800 mW", BEAM_POWER),
                waists=waist,
                direction=(0, 1, 0),
            ),
        )
    )


def test_a_usual_ramp_of_a_harmonic_trap_without_depth_starts_at_ten_kt():
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK"})
    (stage,) = ramp_edits.usual_ramp(plan)
    (move,) = stage.moves
    assert move.start.value == pytest.approx(30e-6 * boltzmann)
    assert move.end.value == pytest.approx(3e-6 * boltzmann)
    assert (stage.duration.text, move.shape) == ("5 s", Shape.EXPONENTIAL)


def test_a_usual_ramp_of_light_lowers_every_beam_to_a_tenth():
    weightless = replace(beams(), gravity=Gravity.OFF)
    (stage,) = ramp_edits.usual_ramp(replace(DEFAULT_PLAN, trap=weightless))
    assert [(move.control.label, move.end.value) for move in stage.moves] == [("power A", 0.2), ("power B", 0.08)]


def test_a_usual_ramp_of_light_never_drops_the_atoms():
    plan = read_plan(TRAPS / "crossed_beams_rubidium.toml")  # its sag is a third of a waist
    (stage,) = ramp_edits.usual_ramp(plan)
    assert [(move.control.label, move.shape) for move in stage.moves] == [
        (f"power {beam.name}", Shape.EXPONENTIAL) for beam in plan.trap.beams
    ]
    shares = [move.end.value / beam.power.value for move, beam in zip(stage.moves, plan.trap.beams, strict=True)]
    assert shares == pytest.approx([shares[0]] * len(shares), rel=0.01)
    beams = tuple(
        replace(beam, power=move.end) for move, beam in zip(stage.moves, plan.trap.beams, strict=True)
    )  # fmt: skip
    lowered = trap_answer(replace(plan, trap=replace(plan.trap, beams=beams))).survey
    before = trap_answer(plan).survey.depth
    assert 0.1 * before <= lowered.depth < 0.35 * before
    tenth = tuple(replace(beam, power=ramp_edits.scaled(beam.power, 0.1, Knob.POWER)) for beam in plan.trap.beams)
    assert not trap_answer(replace(plan, trap=replace(plan.trap, beams=tenth))).trapped


def test_a_usual_ramp_of_coils_lowers_the_knife():
    coils = CoilsChoice(
        gradient=read_quantity("150 G/cm", FIELD_GRADIENT), knife=read_quantity("20 MHz", RADIO_FREQUENCY)
    )
    (stage,) = ramp_edits.usual_ramp(replace(DEFAULT_PLAN, trap=TrapChoice(coils=coils)))
    assert [(move.control.label, move.end.value) for move in stage.moves] == [("knife", 2e6)]


def test_a_usual_ramp_of_a_knife_ends_a_tenth_above_the_bottom_of_the_trap():
    coils = CoilsChoice(
        bias=read_quantity("1.5 G", BIAS_FIELD),
        gradient=read_quantity("150 G/cm", FIELD_GRADIENT),
        curvature=read_quantity("150 G/cm^2", FIELD_CURVATURE),
        knife=read_quantity("20 MHz", RADIO_FREQUENCY),
    )
    (stage,) = ramp_edits.usual_ramp(replace(DEFAULT_PLAN, trap=TrapChoice(coils=coils)))
    bottom = 0.5 * bohr_magneton * 1.5e-4 / planck  # |gF| = 1/2 of 87Rb
    assert stage.moves[0].end.value == pytest.approx(bottom + 0.1 * (20e6 - bottom), rel=5e-3)


def test_controls_stand_where_the_stages_before_left_them(plan):
    assert ramp_edits.standing_at(plan, 1)[DEPTH_CONTROL] == plan.ramp[0].moves[0].end.value
    assert ramp_edits.standing_at(plan, 2)[DEPTH_CONTROL] == plan.ramp[1].moves[0].end.value
    assert ramp_edits.standing_at(plan, 2)[SCALE] == 1.0


def test_a_new_stage_goes_on_to_half_and_a_hold_moves_nothing(plan):
    assert plan.ramp[1].moves[0].end.value == pytest.approx(0.5 * plan.ramp[0].moves[0].end.value)
    held = ramp_edits.with_new_stage(plan, 1, hold=True)
    assert [bool(stage.moves) for stage in held.ramp] == [True, False, True]


@given(order=st.lists(st.sampled_from(["copy", "up", "down", "remove", "hold"]), max_size=12), seed=st.integers(0, 99))
def test_any_order_of_edits_leaves_a_ramp_or_none(order, seed):
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK", "trap.depth": "30 uK"})
    plan = replace(plan, ramp=ramp_edits.usual_ramp(plan))
    for k, what in enumerate(order):
        if not plan.ramp:
            break
        place = (seed + k) % len(plan.ramp)
        match what:
            case "copy":
                plan = ramp_edits.with_copy(plan, place)
            case "up":
                plan = ramp_edits.with_stage_moved(plan, place, -1)
            case "down":
                plan = ramp_edits.with_stage_moved(plan, place, 1)
            case "remove":
                plan = ramp_edits.without_stage(plan, place)
            case "hold":
                plan = ramp_edits.with_new_stage(plan, place, hold=True)
    if plan.ramp:
        assert ramp_of(plan).duration == pytest.approx(sum(stage.duration.value for stage in plan.ramp))


def test_a_table_stretches_with_its_stage(plan):
    table = ramp_edits.with_shape(plan, 0, 0, Shape.TABLE)
    longer = ramp_edits.with_duration(table, 0, read_quantity("20 s", DURATION))
    move = longer.ramp[0].moves[0]
    assert [time.value for time, _ in move.points] == [0.0, 20.0]
    assert ramp_of(longer).duration == pytest.approx(25.0)


@pytest.mark.parametrize("shape", list(Shape), ids=lambda shape: shape.value)
def test_another_shape_keeps_both_ends(plan, shape):
    changed = ramp_edits.with_shape(plan, 0, 0, shape)
    before, after = (next(ramp_of(p).placed({DEPTH_CONTROL: float("nan"), SCALE: 1.0})) for p in (plan, changed))
    for time in (0.0, 5.0):
        assert after.courses[DEPTH_CONTROL].value(time) == pytest.approx(before.courses[DEPTH_CONTROL].value(time))


def test_another_control_moves_by_the_same_factor():
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "3 uK", "trap.depth": "30 uK"})
    plan = replace(plan, ramp=ramp_edits.usual_ramp(plan))
    changed = ramp_edits.with_control(plan, 0, 0, SCALE)
    (move,) = changed.ramp[0].moves
    assert (move.control, move.end.value, move.shape) == (SCALE, pytest.approx(0.1), Shape.EXPONENTIAL)


def test_a_dragged_end_changes_duration_and_value_in_the_units_that_were_written(plan):
    plan = ramp_edits.with_duration(plan, 0, read_quantity("4500 ms", DURATION))
    dragged = with_end_dragged(plan, plan, 0, DEPTH_CONTROL, 3.21, 0.5e-6 * boltzmann, 0.01)
    stage = dragged.ramp[0]
    assert stage.duration.text == "3210 ms"
    assert stage.moves[0].end.text == "500 nK"
    assert dragged.ramp[1] == plan.ramp[1]
    started = with_start_dragged(plan, plan, 0, DEPTH_CONTROL, 40e-6 * boltzmann)
    assert started.ramp[0].moves[0].start.value == pytest.approx(40e-6 * boltzmann)


def test_a_place_dragged_upwards_leaves_the_duration_as_it_was_written(plan):
    plan = ramp_edits.with_duration(plan, 0, read_quantity("4.99987 s", DURATION))
    value = 5e-6 * boltzmann
    up = with_place_dragged(plan, plan, 0, DEPTH_CONTROL, start=False, time=4.99987, value=value, end=10.0)
    assert up.ramp[0].duration.text == "4.99987 s"
    assert up.ramp[0].moves[0].end.text == "5.00 µK"
    later = with_place_dragged(plan, plan, 1, DEPTH_CONTROL, start=False, time=8.00001, value=value, end=10.0)
    assert later.ramp[1].duration.text == "3 s"
    back = with_place_dragged(plan, plan, 0, DEPTH_CONTROL, start=False, time=-1.0, value=value, end=10.0)
    assert back.ramp[0].duration.value == 0.01  # a stage keeps a step of the hand


def test_a_drag_of_a_stage_that_moves_nothing_changes_its_duration_only(plan):
    held = ramp_edits.with_new_stage(plan, 2, hold=True)
    dragged = with_end_dragged(held, held, 2, DEPTH_CONTROL, 1.5, 1e-30, 0.01)
    assert dragged.ramp[2].duration.value == 1.5
    assert dragged.ramp[2].moves == ()


def test_a_transfer_goes_into_a_trap_like_the_plan_s_until_it_is_edited(plan):
    changed = transfer_edits.with_transfer(plan, 1, Handing.SUDDEN)
    trap = changed.ramp[1].trap
    assert trap.frequencies == plan.trap.frequencies
    assert trap.depth.value == pytest.approx(30e-6 * boltzmann)
    assert "deep" in transfer_edits.trap_text(trap)
    assert transfer_edits.trap_text(beams()) == "beams A and B"
    back = transfer_edits.with_transfer(changed, 1, None)
    assert back.ramp == plan.ramp


def test_a_ramp_that_cannot_be_followed_is_refused(plan):
    lost = replace(plan, ramp=(StageChoice(duration=read_quantity("1 s", DURATION)),))
    with pytest.raises(PlanError, match="the depth of the trap is not known"):
        ramp_edits.checked(lost)
    power = MoveChoice(control=Control(Knob.POWER, "A"), end=read_quantity("1 W", BEAM_POWER))
    with pytest.raises(PlanError, match="which the trap does not have"):
        ramp_edits.checked(ramp_edits.with_stage(plan, 1, replace(plan.ramp[1], moves=(power,))))


def test_the_depth_to_design_with_is_that_from_which_the_ramp_starts(plan):
    assert ramp_edits.with_known_depth(plan).trap.depth == plan.ramp[0].moves[0].start
    bare = ramp_edits.with_known_depth(replace(plan, ramp=()))
    assert bare.trap.depth.value == pytest.approx(30e-6 * boltzmann)
    deep = replace(plan, trap=replace(plan.trap, depth=read_quantity("7 uK", DEPTH)))
    assert ramp_edits.with_known_depth(deep) == deep


def test_limits_come_and_go(plan):
    control = Control(Knob.POWER, "A")
    limited = with_bound(
        with_longest_time(plan, read_quantity("12 s", DURATION)), control, "low", read_quantity("1 mW", BEAM_POWER)
    )
    limited = with_bound(limited, control, "fastest", read_quantity("2 W/s", POWER_SPEED))
    assert limited.limits.time.value == 12.0
    assert limits_for(limited, control).low.value == 1e-3
    assert limits_for(limited, DEPTH_CONTROL).low is None
    gone = with_bound(with_bound(limited, control, "low", None), control, "fastest", None)
    assert gone.limits.controls == ()
    with pytest.raises(PlanError, match="low of power A must be below its high"):
        with_bound(limited, control, "high", read_quantity("0.5 mW", BEAM_POWER))


def test_measured_clouds_are_added_placed_and_known_otherwise(plan):
    new = read_quantity("1e6", ATOM_NUMBER), read_quantity("300 nK", TEMPERATURE)
    two = measured_edits.with_new_cloud(measured_edits.with_new_cloud(plan, *new), *new)
    assert [cloud.label for cloud in two.measured] == ["cloud 1", "cloud 2"]
    cloud = two.measured[0]
    assert (measured_edits.where_of(cloud), cloud.stage) == (Where.STAGE, 2)
    timed = measured_edits.placed(cloud, Where.TIME, 2)
    assert (timed.stage, timed.time.text) == (None, "1 s")
    assert measured_edits.placed(timed, Where.START, 2).time is None
    wide = measured_edits.known_by(cloud, By.WIDTHS, new[1])
    assert (wide.temperature, len(wide.widths), wide.expansion_time.text) == (None, 1, "15 ms")
    wider = measured_edits.with_width(wide, 1, wide.widths[0])
    assert len(measured_edits.with_width(wider, 1, None).widths) == 1
    assert measured_edits.known_by(wider, By.TEMPERATURE, new[1]).temperature == new[1]
    assert measured_edits.checked(two) == two
    late = replace(cloud, stage=None, time=read_quantity("99 s", DURATION))
    with pytest.raises(PlanError, match='the measured cloud "cloud 1"'):
        measured_edits.checked(measured_edits.with_cloud(two, 0, late))
    assert len(measured_edits.without_cloud(two, 0).measured) == 1


def test_a_transfer_between_beams_starts_from_the_trap_as_it_then_stands():
    plan = replace(DEFAULT_PLAN, trap=beams())
    plan = ramp_edits.with_new_stage(plan, 0)
    plan = ramp_edits.with_new_stage(plan, 1, hold=True)
    handed = transfer_edits.with_transfer(plan, 1, Handing.SUDDEN)
    trap = handed.ramp[1].trap
    standing = ramp_edits.standing_at(plan, 1)
    for beam in trap.beams:
        assert beam.power.value == pytest.approx(standing[Control(Knob.POWER, beam.name)], rel=1e-2)
        assert beam.waists == plan.trap.beam(beam.name).waists
    assert standing[Control(Knob.POWER, "A")] < 0.9 * plan.trap.beam("A").power.value


def test_the_trap_of_a_stage_is_edited_as_the_trap_of_a_plan_of_its_own():
    plan = ramp_edits.with_new_stage(replace(DEFAULT_PLAN, trap=beams()), 0, hold=True)
    plan = ramp_edits.with_new_stage(plan, 1, hold=True)
    plan = transfer_edits.with_transfer(plan, 1, Handing.SLOW)
    plan = ramp_edits.with_new_move(plan, 1, Control(Knob.POWER, "A"))
    piece = transfer_edits.piece_of(plan, 1)
    assert piece.trap == plan.ramp[1].trap
    assert transfer_edits.with_piece(plan, 1, piece) == plan
    renamed = with_beam(piece, "A", replace(piece.trap.beam("A"), name="dimple"))
    changed = transfer_edits.with_piece(plan, 1, renamed)
    assert changed.ramp[1].handing is Handing.SLOW
    assert changed.ramp[1].trap.beam("dimple")
    assert changed.ramp[1].moves[0].control.beam == "dimple"
    assert changed.trap == plan.trap
    with pytest.raises(PlanError, match="the ramp moves the power of beam A"):
        without_beam(piece, "A")
    with pytest.raises(PlanError, match=r"^stage 1 of the ramp does not begin in another trap$"):
        transfer_edits.piece_of(plan, 0)
