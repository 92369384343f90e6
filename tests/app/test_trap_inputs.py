"""The harmonic trap that a cloud in beams and coils is put in, and how it follows their uncertain numbers."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.answers.trap_inputs import trap_in_use, trap_inputs, trap_slopes
from app.engine import cloud_answer, trap_answer
from app.plan import DEFAULT_PLAN, Plan, parse_plan, plan_with, read_plan
from app.quantities import QUANTITIES, Need

PRESETS = sorted((Path(__file__).parents[2] / "presets" / "traps").glob("*.toml"))
WITHOUT_FREQUENCIES = {"quadrupole_rubidium"}

CROSSED = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[[trap.beam]]
name = "long"
wavelength = "1064 nm"
power = "{power}"
waist = "72 um"
direction = [1, 0, 0]
[[trap.beam]]
wavelength = "1064 nm"
power = "480 mW"
waists = ["85 um", "{vertical}"]
direction = [0, 1, 0]
focus = ["0 um", "0 um", "{height}"]
[cloud]
atoms = "1.4e5"
temperature = "400 nK"
"""
QUADRUPOLE = """coldward = 1
[species]
key = "87Rb"
state = "F=1 mF=-1"
[trap.coils]
gradient = "150 G/cm"
[cloud]
atoms = "1e5"
temperature = "20 uK"
"""


def crossed(power: str = "520 mW", vertical: str = "85 um", height: str = "0 um") -> Plan:
    return parse_plan(CROSSED.format(power=power, vertical=vertical, height=height), "crossed.toml")


def test_what_is_uncertain_of_beams_and_coils_enters_by_name() -> None:
    assert list(trap_inputs(DEFAULT_PLAN)) == ["frequency 0", "frequency 1", "frequency 2"]
    assert trap_inputs(crossed()) == {}
    uncertain = crossed("520(5) mW", "85(1) um", "0(1) um")
    assert list(trap_inputs(uncertain)) == ["power of beam long", "waists 1 of beam A", "focus 2 of beam A"]


def test_a_trap_without_uncertainty_is_that_of_the_survey() -> None:
    plan = crossed()
    trap, found = trap_in_use(plan, {}), trap_answer(plan).survey
    np.testing.assert_array_equal(trap.frequencies, found.frequencies)
    assert trap.depth == found.depth


@pytest.mark.parametrize(
    ("uncertain", "name", "value", "moved"),
    [
        (crossed(power="520(5) mW"), "power of beam long", 0.525, crossed(power="525 mW")),
        (crossed(vertical="85(1) um"), "waists 1 of beam A", 86e-6, crossed(vertical="86 um")),
        (crossed(height="0(2) um"), "focus 2 of beam A", -2e-6, crossed(height="-2 um")),
    ],
    ids=["power", "waist", "focus"],
)
def test_one_deviation_gives_what_a_new_survey_gives(uncertain: Plan, name: str, value: float, moved: Plan) -> None:
    trap, found = trap_in_use(uncertain, {name: value}), trap_answer(moved).survey
    central = trap_answer(uncertain).survey
    np.testing.assert_allclose(trap.frequencies, found.frequencies, rtol=1e-3)
    assert found.depth is not None
    assert central.depth is not None
    # the change of the depth itself, to the second order that is left out
    assert trap.depth - central.depth == pytest.approx(found.depth - central.depth, rel=0.05)


def test_draws_of_a_number_make_as_many_traps() -> None:
    uncertain = crossed(power="520(5) mW")
    trap = trap_in_use(uncertain, {"power of beam long": np.array([0.51, 0.52, 0.53])})
    assert trap.frequencies.shape == (3, 3)
    assert np.shape(trap.depth) == (3,)
    assert np.all(np.diff(trap.depth) > 0.0)
    np.testing.assert_allclose(trap.frequencies[1], trap_answer(uncertain).survey.frequencies, rtol=1e-12)


def test_an_uncertain_power_spreads_what_depends_on_it() -> None:
    answer = cloud_answer(crossed(power="520(26) mW"))
    slope = trap_slopes(answer.plan)["power of beam long"]
    spread = answer.spread("mean_frequency")
    assert spread is not None
    # 16 and 84 percent lie 0.994 deviations to both sides
    expected = np.exp(2.0 * 0.99446 * 0.05 * np.mean(slope.frequencies))
    assert spread.high / spread.low == pytest.approx(expected, rel=1e-3)
    ids = {caveat.id for caveat in answer.caveats}
    assert "harmonic_trap" in ids
    assert "trap_uncertainty" not in ids  # 5 % of a power
    rough = cloud_answer(crossed(power="520(130) mW"))
    (told,) = (caveat for caveat in rough.caveats if caveat.id == "trap_uncertainty")
    steepest = max(*np.abs(slope.frequencies), abs(slope.depth), abs(slope.room))
    assert told.value == pytest.approx(np.log(1.25) * steepest, rel=1e-3)
    assert cloud_answer(crossed()).spread("mean_frequency") is None


@pytest.mark.parametrize(
    ("plan", "sentence"),
    [
        (
            parse_plan(
                CROSSED.format(power="1 mW", vertical="85 um", height="0 um").replace("480 mW", "1 mW"), "a.toml"
            ),
            r"^the trap of this plan, beams long and A, holds no atoms: gravity pulls the atoms out",
        ),
    ],
    ids=["falls"],
)
def test_a_trap_that_holds_nothing_is_one_sentence(plan: Plan, sentence: str) -> None:
    with pytest.raises(ValueError, match=sentence):
        cloud_answer(plan)


@pytest.mark.parametrize(
    "path", [path for path in PRESETS if path.stem not in WITHOUT_FREQUENCIES], ids=lambda p: p.stem
)
def test_every_preset_trap_with_frequencies_holds_a_cloud_that_is_answered(path: Path) -> None:
    answer = cloud_answer(read_plan(path))
    assert answer.value("peak_phase_space_density") > 0.0
    assert answer.value("truncation") > 3.0
    spread = answer.spread("mean_frequency")
    assert spread is not None
    assert spread.low < answer.value("mean_frequency") < spread.high
    told = [caveat for caveat in answer.caveats if caveat.id == "harmonic_trap"]
    real, harmonic = answer.value("reduced_temperature"), answer.value("harmonic_reduced_temperature")
    assert len(told) == 1 or abs(float(harmonic) / float(real) - 1.0) < 0.05
    for caveat in told:
        assert caveat.numbers["real"] == real
        assert caveat.numbers["harmonic"] == harmonic


def test_a_quadrupole_is_answered_and_what_needs_frequencies_is_unknown() -> None:
    (path,) = (path for path in PRESETS if path.stem in WITHOUT_FREQUENCIES)
    answer = cloud_answer(read_plan(path))
    assert answer.value("reduced_temperature") > 5.0
    assert answer.spread("peak_phase_space_density") is not None
    for name in ("mean_frequency", "classical_phase_space_density", "thermal_radii"):
        assert answer.missing(QUANTITIES[name]) is Need.FREQUENCIES
    assert answer.missing(QUANTITIES["critical_temperature_exact_levels"]) is Need.HARMONIC
    assert answer.missing(QUANTITIES["condensate_radii"]) is Need.INTERACTING_CONDENSATE
    ids = {caveat.id for caveat in answer.caveats}
    assert "no_frequencies" in ids
    assert "harmonic_trap" not in ids


def test_the_volume_of_a_quadrupole_follows_its_gradient() -> None:
    uncertain = parse_plan(QUADRUPOLE.replace('"150 G/cm"', '"150(3) G/cm"'), "a.toml")
    slope = trap_slopes(uncertain)["gradient of the coils"]
    # W ~ B'^-3 without gravity, which is a fifth of the force here.
    assert slope.room == pytest.approx(-3.0, abs=0.25)
    spread = cloud_answer(uncertain).spread("peak_density")
    assert spread is not None
    assert spread.high / spread.low == pytest.approx(np.exp(2.0 * 0.99446 * 0.02 * -slope.room), rel=5e-3)


def test_more_atoms_than_the_trap_has_levels_is_an_answer_with_a_reason() -> None:
    plan = read_plan(next(path for path in PRESETS if path.stem == "single_beam_lithium"))
    full = cloud_answer(plan_with(plan, {"cloud.atoms": "1e12"}))
    assert full.overfull
    assert full.missing(QUANTITIES["fermi_temperature"]) is Need.ROOM
    assert full.missing(QUANTITIES["thermal_wavelength"]) is None
    (caveat,) = (caveat for caveat in full.caveats if caveat.id == "overfull")
    assert caveat.value > 1.0
