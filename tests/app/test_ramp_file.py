"""Ramps, limits, measured clouds, candidates and passengers of plan files: what is read, and what is refused."""

from __future__ import annotations

from pathlib import Path

import pytest

from app.kinds import (
    BEAM_POWER,
    CLOUD_WIDTH,
    DEPTH_SPEED,
    DURATION,
    POWER_SPEED,
    SCATTERING_LENGTH,
    TIME,
    Kind,
)
from app.plan import (
    Basis,
    CandidateChoice,
    ControlLimits,
    Gravity,
    Handing,
    MeasuredChoice,
    MoveChoice,
    Plan,
    PlanError,
    StageChoice,
    parse_plan,
    plan_with,
    read_plan,
)
from app.units import ATOM_NUMBER, DEPTH, EXPONENT, TEMPERATURE, Quantity, read_quantity
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob

FILE = Path(__file__).parent.parent / "data" / "plan_of_a_ramp.toml"
PLAIN = (
    'coldward = 1\n[species]\nkey = "87Rb"\n[trap]\nfrequencies = ["120 Hz", "120 Hz", "20 Hz"]\n'
    '[cloud]\natoms = "1e5"\ntemperature = "1 uK"\n'
)
STAGE = '[[ramp.stage]]\nduration = "2 s"\n'
DEPTH_MOVES = STAGE + 'control = "depth"\n'


@pytest.fixture(scope="module")
def plan() -> Plan:
    return read_plan(FILE)


def quantity(text: str, kind: Kind) -> Quantity:
    return read_quantity(text, kind)


def test_stages_are_read_in_order(plan: Plan) -> None:
    fast, scaled, hold, handed = plan.ramp
    assert fast == StageChoice(
        label="fast",
        duration=quantity("1.5 s", DURATION),
        moves=(MoveChoice(control=Control(Knob.DEPTH), end=quantity("25 uK", DEPTH), shape=Shape.EXPONENTIAL),),
    )
    (move,) = scaled.moves
    assert move.control == Control(Knob.SCALE)
    assert move.start is not None
    assert move.end is not None
    assert (move.start.value, move.end.value, move.exponent) == (1.0, 0.4, quantity("1.5", EXPONENT))
    assert hold == StageChoice(duration=quantity("300 ms", DURATION))
    assert handed.handing is Handing.SLOW
    assert handed.trap is not None
    assert [beam.name for beam in handed.trap.beams] == ["A", "B"]
    assert handed.trap.gravity is Gravity.OFF
    a, b = handed.moves
    assert (a.control.beam, a.shape, a.end) == ("A", Shape.LINEAR, quantity("0.5 W", BEAM_POWER))
    assert (b.control.beam, b.shape, b.end) == ("B", Shape.TABLE, None)
    assert [(t.value, value.text) for t, value in b.points] == [(0.0, "1 W"), (0.4, "0.7 W"), (1.0, "0.3 W")]


def test_limits_are_in_the_unit_of_their_control(plan: Plan) -> None:
    assert plan.limits.time == quantity("12 s", DURATION)
    depth, power = plan.limits.controls
    assert depth == ControlLimits(
        control=Control(Knob.DEPTH),
        low=quantity("1 uK", DEPTH),
        high=quantity("60 uK", DEPTH),
        fastest=quantity("40 uK/s", DEPTH_SPEED),
    )
    assert depth.fastest is not None
    assert depth.fastest.value / 1.380649e-23 == pytest.approx(40e-6, rel=1e-14, abs=0.0)
    assert power == ControlLimits(control=Control(Knob.POWER, "A"), fastest=quantity("2 W/s", POWER_SPEED))


def test_measured_clouds_and_other_species_are_read(plan: Plan) -> None:
    first, second = plan.measured
    assert first == MeasuredChoice(
        label="after the fast part",
        stage=1,
        atoms=quantity("1.1(1)e6", ATOM_NUMBER),
        temperature=quantity("3.0(2) uK", TEMPERATURE),
    )
    assert second.widths == (quantity("95(2) um", CLOUD_WIDTH), quantity("96(2) um", CLOUD_WIDTH))
    assert (second.time, second.expansion_time) == (quantity("3.8 s", TIME), quantity("18 ms", TIME))
    assert plan.candidates.basis is Basis.SAME_START
    assert plan.candidates.keys == ("87Rb", "41K")
    assert plan.candidates.candidates == (
        CandidateChoice(key="87Rb", state="F=2 mF=+2", atoms=quantity("1e6", ATOM_NUMBER)),
    )
    assert plan.passenger is not None
    assert plan.passenger.species.key == "40K"
    assert plan.passenger.cloud.atoms.value == 3e4
    assert plan.passenger.scattering_length == quantity("-185 a0", SCATTERING_LENGTH)
    assert plan.unused == ()


def test_other_parts_go_along_when_a_flag_changes_the_plan(plan: Plan) -> None:
    changed = plan_with(plan, {"cloud.atoms": "3e6"})
    assert changed.ramp == plan.ramp
    assert (changed.limits, changed.measured, changed.candidates) == (plan.limits, plan.measured, plan.candidates)
    assert changed.passenger == plan.passenger


def test_a_move_may_stand_on_its_stage_and_others_beside_it() -> None:
    text = PLAIN + DEPTH_MOVES + 'end = "1 uK"\n[[ramp.stage.move]]\ncontrol = "scale"\nend = 0.5\n'
    (stage,) = parse_plan(text, "a.toml").ramp
    assert [move.control.knob for move in stage.moves] == [Knob.DEPTH, Knob.SCALE]


def test_words_of_choices_are_read_in_any_case() -> None:
    text = PLAIN + STAGE + 'control = "Depth"\nstart = "5 uK"\ntau = "1 s"\nexponent = 2\nshape = "Power-Law"\n'
    (stage,) = parse_plan(text, "a.toml").ramp
    assert stage.moves[0].shape is Shape.POWER_LAW
    assert stage.moves[0].tau == quantity("1 s", DURATION)


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ("[ramp]\nstage = 3\n", r"ramp\.stage must be sections \[\[ramp\.stage\]\], one for each, got 3$"),
        ("[[ramp.stage]]\n", r'ramp\.stage\.duration of stage 1 is missing: give the duration, such as "2 s"$'),
        (STAGE + STAGE + 'end = "3 uK"\n', r"ramp\.stage\.control of stage 2 is missing: give the control, such as"),
        (STAGE + 'control = "dept"\n', r'ramp\.stage\.control of stage 1: "dept" is not a control: .* nearest is "dep'),
        (STAGE + 'control = "power"\nend = "1 W"\n', r"beam of stage 1: control power needs the name of a beam$"),
        (DEPTH_MOVES + 'beam = "A"\n', r"ramp\.stage\.beam of stage 1: control depth has no beam, got A$"),
        (DEPTH_MOVES + 'end = "3 W"\n', r'ramp\.stage\.end of stage 1: "W" is not a unit of trap depth: µK, nK'),
        (DEPTH_MOVES + "end = 3\n", r"ramp\.stage\.end of stage 1: needs a unit: write a text in quotes, .* not 3$"),
        (DEPTH_MOVES, r"ramp\.stage\.end of stage 1: depth moves without an end$"),
        (DEPTH_MOVES + 'end = "1 uK"\nshape = "exponent"\n', r'stage 1: "exponent" is not a shape: .*"exponential"$'),
        (DEPTH_MOVES + 'end = "1 uK"\nshape = "table"\n', r"points of stage 1: the shape table needs points$"),
        (DEPTH_MOVES + 'shape = "table"\npoints = [["0 s", "1 uK"], ["1 s"]]\n', "point 2 is a list of 1$"),
        (DEPTH_MOVES + 'shape = "table"\npoints = [["0 s", "1 uK"], ["1 s", "2"]]\n', "point 2: trap depth needs"),
        (
            DEPTH_MOVES + 'shape = "table"\npoints = [["0 s", "1 uK"], ["1 s", "2 uK"]]\n',
            r"stage\.points of stage 1: the table of depth must end at the duration of its stage, 2 s, got 1 s$",
        ),
        (
            DEPTH_MOVES + 'shape = "table"\npoints = [["0 s", "1 uK"], ["0 s", "2 uK"], ["2 s", "2 uK"]]\n',
            "must be two or more, at times that increase from 0 s$",
        ),
        (
            DEPTH_MOVES + 'end = "1 uK"\n[[ramp.stage.move]]\ncontrol = "depth"\nend = "2 uK"\n',
            r"ramp\.stage\.move\.control of stage 1: a stage moves depth twice$",
        ),
        (
            STAGE + '[[ramp.stage.move]]\ncontrol = "scale"\nend = 1\n[[ramp.stage.move]]\ncontrol = "bias"\nend = 3',
            r"ramp\.stage\.move\.end of move 2 of stage 1: needs a unit",
        ),
        (STAGE + 'transfer = "slow"\n', r"transfer of stage 1: a transfer needs the trap .*, and to be"),
        (STAGE + "[ramp.stage.trap]\n", r"ramp\.stage\.trap\.frequencies of stage 1: a trap needs frequencies, or"),
        (
            STAGE + '[[ramp.stage.trap.beam]]\npower = "1 uK"\n',
            r"ramp\.stage\.trap\.beam\.wavelength of stage 1 of beam A is missing",
        ),
        (STAGE + 'transfr = "slow"\n', r"stage\.transfr is not a key .* nearest is ramp\.stage\.transfer; "),
        (
            '[[limits.control]]\ncontrol = "depth"\nlow = "5 uK"\nhigh = "3 uK"\n',
            r"limits\.control\.low of control 1: low of depth must be below its high$",
        ),
        (
            '[[limits.control]]\ncontrol = "depth"\nfastest = "3 W/s"\n',
            r'fastest of control 1: "W/s" is not a unit of change of the depth per time: µK/s, nK/s',
        ),
        (
            2 * '[[limits.control]]\ncontrol = "power"\nbeam = "A"\n',
            r"limits\.control\.control: power A has limits twice$",
        ),
        ('[[measured]]\natoms = "1e5"\n', r"measured\.label of cloud 1 is missing"),
        (
            '[[measured]]\nlabel = "a"\natoms = "1e5"\n',
            r"measured\.temperature of cloud 1: give a temperature, or else widths and an expansion time$",
        ),
        (
            '[[measured]]\nlabel = "a"\natoms = "1e5"\nwidths = []\nexpansion_time = "1 ms"\n',
            r'widths of cloud 1: must be a list of one to three, such as \["85 um", "85 um"\], got 0 of them$',
        ),
        (
            '[[measured]]\nlabel = "a"\natoms = "1e5"\ntemperature = "1 uK"\nstage = 0\n',
            r"measured\.stage of cloud 1: stages are counted from 1, got 0$",
        ),
        ('[candidates]\nbasis = "same"\n', r'candidates\.basis: "same" is not a basis: "same frequencies", "same'),
        ('[candidates]\nkeys = ["87Rb", "87Rbx"]\n', r'candidates\.keys: no species "87Rbx" in the data; the nearest'),
        ('[candidates]\nkeys = ["87Rb", 3]\n', r"candidates\.keys: must be a list of species, .* got 3 among them$"),
        ('[candidates]\nkeys = ["87Rb", "Rb87"]\n', r"candidates\.keys: names 87Rb twice$"),
        ('[[candidate]]\nkey = "87Rb"\nstate = "F=7"\n', r'candidate\.state of candidate 1: 87Rb has no state "F=7"'),
        ('[passenger.species]\nkey = "40K"\n', r"passenger\.cloud: a passenger needs a section .* it is missing$"),
        (
            '[passenger.species]\nkey = "40K"\nfield = "1 G"\nscattering_length = "1 a0"\n'
            '[passenger.cloud]\natoms = "1e4"\ntemperature = "1 uK"\n',
            r"passenger\.species\.field: give either a scattering length or a magnetic field, not both$",
        ),
    ],
)  # fmt: skip
def test_what_cannot_be_is_refused_in_one_sentence(text: str, sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence) as error:
        parse_plan(PLAIN + text, "a.toml")
    assert str(error.value).startswith("a.toml: ")
    assert "\n" not in str(error.value)
