"""Beams and coils of a plan file: what is read, what is refused and how that is said."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app.plan import Plan, PlanError, parse_plan, plan_with, read_plan, write_plan
from app.trap_choices import ALONG_Z, ORIGIN, BeamChoice, CoilsChoice, Gravity, TrapChoice
from app.units import (
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    FIELD_GRADIENT,
    POSITION,
    RADIO_FREQUENCY,
    WAVELENGTH,
    read_quantity,
)

DATA = Path(__file__).parent.parent / "data"
PRESETS = sorted((Path(__file__).parents[2] / "presets" / "traps").glob("*.toml"))
CLOUD = 'coldward = 1\n[species]\nkey = "87Rb"\n[cloud]\natoms = "1e5"\ntemperature = "200 nK"\n'
BEAM = '[[trap.beam]]\nwavelength = "1064 nm"\npower = "2.5 W"\nwaist = "70 um"\ndirection = [1, 0, 0]\n'
COILS = '[trap.coils]\ngradient = "30.5 G/cm"\n'


def trap(text: str) -> TrapChoice:
    return parse_plan(CLOUD + text, "a.toml").trap


def changed(old: str, new: str) -> str:
    assert old in BEAM
    return BEAM.replace(old, new)


# --- what is read ----------------------------------------------------------------------------------------------------


def test_every_key_is_read() -> None:
    read = read_plan(DATA / "plan_of_beams_and_coils.toml").trap
    place = tuple(read_quantity(text, POSITION) for text in ("0 um", "-10 um", "0.2 mm"))
    assert read == TrapChoice(
        gravity=(0.0, -1.0, -1.0),
        beams=(
            BeamChoice(
                name="A",
                on=True,
                wavelength=read_quantity("1064 nm", WAVELENGTH),
                power=read_quantity("2.5(1) W", BEAM_POWER),
                waists=(read_quantity("70 um", BEAM_WAIST),),
                direction=(1.0, 0.0, 0.0),
                focus=(read_quantity("0 um", POSITION),) * 3,
            ),
            BeamChoice(
                name="cross",
                on=False,
                wavelength=read_quantity("1.064 um", WAVELENGTH),
                power=read_quantity("800 mW", BEAM_POWER),
                waists=(read_quantity("60 um", BEAM_WAIST), read_quantity("45 um", BEAM_WAIST)),
                direction=(0.5, 0.8660254, 0.0),
                focus=place,  # type: ignore[arg-type]
                m2=read_quantity("1.1", BEAM_QUALITY),
            ),
        ),
        coils=CoilsChoice(
            axis=(0.0, 0.0, 2.0),
            centre=(read_quantity("0 um", POSITION),) * 3,
            bias=read_quantity("1.5 G", BIAS_FIELD),
            levitation=read_quantity("30.5 G/cm", FIELD_GRADIENT),
            knife=read_quantity("2.1 MHz", RADIO_FREQUENCY),
        ),
    )
    assert read.beams[0].power.sigma == pytest.approx(0.1, rel=1e-15)
    assert read.coils is not None
    assert read.coils.levitation is not None
    assert read.coils.levitation.value == pytest.approx(0.305, rel=1e-15)  # 1 G/cm is 1e-4 T over 1e-2 m


def test_what_is_left_out_is_as_usual() -> None:
    beam = trap(BEAM).beams[0]
    assert (beam.name, beam.on, beam.focus, beam.m2) == ("A", True, ORIGIN, None)
    coils = trap(COILS).coils
    assert coils is not None
    assert (coils.axis, coils.centre, coils.bias, coils.curvature, coils.knife) == (ALONG_Z, ORIGIN, None, None, None)
    assert trap(COILS).gravity is None


def test_gravity_may_be_off() -> None:
    assert trap('[trap]\ngravity = "Off"\n' + BEAM).gravity is Gravity.OFF
    assert trap("[trap]\ngravity = [1, 0, -1.5]\n" + BEAM).gravity == (1.0, 0.0, -1.5)


def test_beams_without_a_name_get_the_first_free_letters() -> None:
    named = changed("[[trap.beam]]\n", '[[trap.beam]]\nname = "A"\n')
    assert [beam.name for beam in trap(BEAM + named + BEAM).beams] == ["B", "A", "C"]
    assert len({beam.name for beam in trap(30 * BEAM).beams}) == 30


def test_beams_may_stand_in_one_line() -> None:
    line = ", ".join(line for line in BEAM.splitlines() if "=" in line)
    assert parse_plan(CLOUD + f"[trap]\nbeam = [{{{line}}}]\n", "a.toml").trap == trap(BEAM)


def test_frequencies_count_before_beams_that_stand_beside_them() -> None:
    """A file of format 1 could hold both; what stands beside the frequencies is kept and not read."""
    plan = read_plan(DATA / "plan_version_1.toml")
    assert plan.trap.harmonic
    assert plan.trap.beams == ()
    assert plan.unused[:2] == ("trap.beam", "trap.coils")
    odd = '[trap]\nfrequencies = ["1 Hz", "2 Hz", "3 Hz"]\nbeam = 7\n'
    assert parse_plan(CLOUD + odd, "a.toml").unused == ("trap.beam",)


def test_a_trap_of_beams_is_in_use() -> None:
    assert parse_plan(CLOUD + BEAM + COILS, "a.toml").unused == ()


# --- the traps that come with the program -----------------------------------------------------------------------------


@pytest.mark.parametrize("path", PRESETS, ids=lambda path: path.stem)
def test_a_preset_trap_is_a_whole_plan(path: Path) -> None:
    plan = read_plan(path)
    assert plan.title
    assert plan.trap.makers
    assert write_plan(plan) == path.read_text(encoding="utf-8")
    assert read_again(plan) == plan


def read_again(plan: Plan) -> Plan:
    """The plan, written without the file that it came from; what no version computes yet is not in it."""
    return replace(parse_plan(write_plan(replace(plan, source="")), "new.toml"), unused=plan.unused)


def test_preset_traps_are_of_light_of_coils_and_of_both_for_many_species() -> None:
    plans = [read_plan(path) for path in PRESETS]
    kinds = [(bool(plan.trap.beams), plan.trap.coils is not None) for plan in plans]
    assert len(plans) >= 8
    assert min(kinds.count(kind) for kind in ((True, False), (False, True), (True, True))) >= 2
    assert len({plan.species.key for plan in plans}) >= 6
    assert len({plan.title for plan in plans}) == len(plans)


# --- what is refused -------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        (
            changed("power", "powr"),
            r"^a\.toml: trap\.beam\.powr is not a key of a plan: the nearest is trap\.beam\.power; allowed in "
            r"\[trap\.beam\] are name, on, wavelength, power, waist, waists, direction, focus, m2$",
        ),
        (
            COILS + 'gradiant = "1 G/cm"\n',
            r"trap\.coils\.gradiant is not a key .* nearest is trap\.coils\.gradient; allowed in \[trap\.coils\]",
        ),
        (
            changed('"2.5 W"', '"2.5"'),
            r'^a\.toml: trap\.beam\.power of beam A: beam power needs a unit: type for instance "2\.5 W", not "2\.5"$',
        ),
        (
            changed('"2.5 W"', "2.5"),
            r'power of beam A: needs a unit: write a text in quotes, such as "2\.5 W", not 2\.5$',
        ),
        (changed('"2.5 W"', '"2.5 G"'), r'power of beam A: "G" is not a unit of beam power: W, mW, µW are read'),
        (changed('"2.5 W"', '"-1 W"'), r'power of beam A: beam power must be from 0 W to .* got "-1 W"$'),
        (
            changed('"1064 nm"', '"1064 um"'),
            r'wavelength of beam A: wavelength must be from 100 nm to 100 µm, got "1064',
        ),
        (
            changed('power = "2.5 W"\n', ""),
            r'trap\.beam\.power of beam A is missing: give the power, such as "2\.5 W"$',
        ),
        (
            changed("direction = [1, 0, 0]\n", ""),
            r"trap\.beam\.direction of beam A is missing: give the direction, such as \[1, 0, 0\]$",
        ),
        (
            changed("[1, 0, 0]", "[1, 0]"),
            r"direction of beam A: must be three numbers, such as \[1, 0, 0\], got a list of 2$",
        ),
        (changed("[1, 0, 0]", '["x", 0, 0]'), r'direction of beam A: must be three numbers, .* got "x"$'),
        (changed("[1, 0, 0]", "[1, nan, 0]"), r"direction of beam A: must be three numbers, .* got nan$"),
        (
            changed("[1, 0, 0]", "[0, 0.0, 0]"),
            r"direction of beam A: a direction must not be zero in all three numbers$",
        ),
        (
            changed("[1, 0, 0]", "[1e7, 0, 0]"),
            r"direction of beam A: a direction must be three numbers from -1e\+06 to",
        ),
        (changed("[1, 0, 0]", "true"), r"direction of beam A: must be three numbers, .* got true$"),
        (
            changed('waist = "70 um"\n', ""),
            r'trap\.beam\.waist of beam A: give waist = "70 um" or waists = \["70 um", "50 um"\]; it is missing$',
        ),
        (BEAM + 'waists = ["70 um", "50 um"]\n', r"waist of beam A: give .*; both waist and waists are given$"),
        (
            changed('waist = "70 um"', 'waists = ["70 um"]'),
            r'waists of beam A: must be two, such as \["70 um", "50 um"\], got 1 of them$',
        ),
        (BEAM + 'focus = ["0 um", "0 um", 0]\n', r"trap\.beam\.focus of beam A: needs a unit"),
        (BEAM + "on = 1\n", r"trap\.beam\.on of beam A: must be true or false, without quotes, got 1$"),
        (BEAM + "m2 = 0.9\n", r'm2 of beam A: beam quality must be from 1 to 1e\+03, got "0\.9"$'),
        (BEAM + "name = 3\n", r"trap\.beam\.name of beam 3: must be a text in quotes, got 3$"),
        (BEAM + 'name = " "\n', r"trap\.beam\.name of beam  : a beam's name must be one line of 1 to 40 .* got \" \"$"),
        (
            2 * (BEAM + 'name = "x"\n'),
            r'^a\.toml: trap\.beam\.name: two beams are named "x": each needs a name of its own$',
        ),
        (
            BEAM + BEAM.replace('"70 um"', '"7"'),
            r"trap\.beam\.waist of beam B: beam waist needs a unit",
        ),
        (
            BEAM.replace("[[trap.beam]]", "[trap.beam]"),
            r"^a\.toml: trap\.beam: beams are sections \[\[trap\.beam\]\], one for each, got a table$",
        ),
        ("[trap]\nbeam = [1]\n", r"trap\.beam: beams are sections .* got a list of 1$"),
        ("[trap]\nbeam = []\n", r"^a\.toml: trap\.frequencies: a trap needs frequencies, or else beams or coils$"),
        (COILS.replace("[trap.coils]", "[[trap.coils]]"), r"trap\.coils: coils are one section \[trap\.coils\], got a"),
        (
            '[trap.coils]\nknife = "2 MHz"\n',
            r"^a\.toml: trap\.coils: coils need at least one of bias, gradient, curvature, levitation$",
        ),
        (COILS + 'bias = "1 G/cm"\n', r'trap\.coils\.bias: "G/cm" is not a unit of bias field: G, mG, mT, T are read'),
        (
            COILS + 'curvature = "1 G/cm"\n',
            r'curvature: "G/cm" is not a unit of field curvature: G/cm\^2, T/m\^2 are read',
        ),
        (COILS + 'knife = "0 Hz"\n', r"trap\.coils\.knife: radio frequency must be from 1 Hz to"),
        (COILS + 'axis = "up"\n', r'trap\.coils\.axis: must be three numbers, such as "1, 0, 0", got "up"$'),
        ('[trap]\ngravity = "up"\n' + BEAM, r'trap\.gravity: must be three numbers, .*, got "up"; or "off"$'),
        ("[trap]\ngravity = false\n" + BEAM, r'trap\.gravity: must be three numbers, .*, got false; or "off"$'),
        (
            '[trap]\ngravity = "off"\n[trap.coils]\nlevitation = "30 G/cm"\n',
            r"^a\.toml: trap\.gravity: the coils levitate along gravity, so it cannot be off$",
        ),
        (
            '[trap]\ndepth = "5 uK"\ngravity = "off"\n' + BEAM,
            r"^a\.toml: trap\.depth: a depth goes with trap frequencies; that of beams and coils follows from them$",
        ),
    ],
)
def test_what_is_wrong_is_said_in_one_sentence(text: str, sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence) as caught:
        trap(text)
    assert "\n" not in str(caught.value)


# --- flags -----------------------------------------------------------------------------------------------------------


def test_frequencies_by_flag_take_the_place_of_beams_and_coils() -> None:
    plan = parse_plan(CLOUD + "[trap]\ngravity = [0, 1, 0]\n" + BEAM + COILS, "a.toml")
    harmonic = plan_with(plan, {"trap.frequencies": "1 Hz, 2 Hz, 3 Hz", "trap.depth": "5 uK"}).trap
    assert harmonic.harmonic
    assert (harmonic.beams, harmonic.coils) == ((), None)
    assert harmonic.gravity == (0.0, 1.0, 0.0)


def test_other_flags_leave_beams_and_coils_alone() -> None:
    plan = parse_plan(CLOUD + BEAM + COILS, "a.toml")
    assert plan_with(plan, {"cloud.atoms": "2e5", "species.key": "133Cs"}).trap == plan.trap
    with pytest.raises(PlanError, match=r"^--depth: a depth goes with trap frequencies"):
        plan_with(plan, {"trap.depth": "5 uK"})


def test_gravity_by_flag() -> None:
    plan = parse_plan(CLOUD + BEAM, "a.toml")
    assert plan_with(plan, {"trap.gravity": "0, 0, 1.5"}).trap.gravity == (0.0, 0.0, 1.5)
    off = plan_with(plan, {"trap.gravity": "off"})
    assert off.trap.gravity is Gravity.OFF
    assert plan_with(off, {"trap.gravity": ""}).trap.gravity is None
    for text in ("down", "0,0", "0,0,x", "0,0,inf", "0,0,٣"):
        with pytest.raises(
            PlanError, match=r'^--gravity: must be three numbers, such as "0, 0, -1", got .*; or "off"$'
        ):
            plan_with(plan, {"trap.gravity": text})
