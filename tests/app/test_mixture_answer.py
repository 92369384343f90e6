"""A passenger in the plan: at rest and along the ramp, in words, in the objects of the verbs."""

from __future__ import annotations

import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app.__main__ import main
from app.answers.mixture import mixture_answer
from app.answers.passenger import between_of, passenger_plan
from app.answers.ramp import ramp_answer
from app.answers.sympathetic import sympathetic_answer
from app.mixture_quantities import CONTACT_COLUMNS, MIXTURE_QUANTITIES
from app.mixture_words import (
    _SENTENCES,
    mixture_caveat_lines,
    reason_unknown,
    sympathetic_caveat_texts,
    sympathetic_verdict,
)
from app.plan import Plan, PlanError, read_plan, write_plan
from app.plan_file import parse_plan
from app.trap_choices import Gravity
from physics.constants import bohr_radius, boltzmann
from physics.mixture_caveats import MixtureCaveatKind
from physics.mixtures import Mixture

HEAD = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
"""
FREQUENCIES = """
[trap]
frequencies = ["120 Hz", "120 Hz", "20 Hz"]
depth = "60 uK"
"""
BEAMS = """
[[trap.beam]]
wavelength = "1064 nm"
power = "3 W"
waist = "70 um"
direction = [1, 0, 0]
[[trap.beam]]
wavelength = "1064 nm"
power = "3 W"
waist = "70 um"
direction = [0, 1, 0]
"""
REST = """
[cloud]
atoms = "3e6"
temperature = "6 uK"
[losses]
background_lifetime = "60 s"
three_body = "2e-29 cm^6/s"
[target]
efficiency = 2.5
[passenger.species]
key = "41K"
state = "F=2 mF=+2"
[passenger.cloud]
atoms = "1e5"
temperature = "6 uK"
"""
RAMP = """
[[ramp.stage]]
duration = "4 s"
control = "depth"
end = "9 uK"
shape = "exponential"
"""


def plan_of(trap: str = FREQUENCIES, *, ramp: str = "", **replaced: str) -> Plan:
    text = HEAD + trap + REST + ramp
    for old, new in replaced.items():
        assert old in text
        text = text.replace(old, new)
    return parse_plan(text, "a plan")


def kinds(found: tuple[object, ...]) -> set[MixtureCaveatKind]:
    return {caveat.kind for caveat in found}  # type: ignore[attr-defined]


def test_given_frequencies_are_those_of_both() -> None:
    answer = mixture_answer(plan_of())
    assert answer.passenger is not None
    assert not answer.own_trap
    assert answer.passenger.cloud.trap.frequencies.tolist() == [120.0, 120.0, 20.0]
    assert answer.value("distance") == 0.0
    assert answer.value("overlap_share") == 1.0
    assert answer.value("scattering_length_between") == pytest.approx(163.0 * bohr_radius)
    assert MixtureCaveatKind.SAME_FREQUENCIES in kinds(answer.caveats)
    # alpha = (gamma + 1)/3 at fixed frequencies.
    expected = 6e-6 * (1e5 / 3.1e6) ** (3.5 / 3.0)
    assert answer.value("coldest_temperature") == pytest.approx(expected, rel=1e-9)


OWN = '[passenger]\nfrequencies = ["177 Hz", "177 Hz", "29.5 Hz"]\ndepth = "50 uK"\n[passenger.species]'


def test_a_passenger_with_frequencies_of_its_own() -> None:
    plan = plan_of(**{"[passenger.species]": OWN, '"20 Hz"]': '"60 Hz"]'})
    assert parse_plan(write_plan(plan), "again").passenger == plan.passenger
    answer = mixture_answer(plan)
    assert answer.passenger is not None
    assert answer.passenger.cloud.trap.frequencies.tolist() == [177.0, 177.0, 29.5]
    assert answer.coolant.cloud.trap.frequencies.tolist() == [120.0, 120.0, 60.0]
    assert MixtureCaveatKind.OWN_FREQUENCIES in kinds(answer.caveats)
    assert MixtureCaveatKind.SAME_FREQUENCIES not in kinds(answer.caveats)
    # Mudrich et al.: d = g (1/w1^2 - 1/w2^2), S the sum of both mean square radii, the overlap e^(-d^2/2S).
    w1, w2 = 2.0 * math.pi * 60.0, 2.0 * math.pi * 29.5
    d = 9.80665 * (1.0 / w2**2 - 1.0 / w1**2)
    assert answer.value("distance") == pytest.approx(d, rel=1e-6)
    m1, m2 = answer.coolant.cloud.mass, answer.passenger.cloud.mass
    S = boltzmann * 6e-6 * (1.0 / (m1 * w1**2) + 1.0 / (m2 * w2**2))
    # The radii are those of the quantum gases.
    assert answer.value("overlap_share") == pytest.approx(math.exp(-0.5 * d * d / S), rel=0.03)
    level = mixture_answer(replace(plan, trap=replace(plan.trap, gravity=Gravity.OFF)))
    assert level.value("distance") == 0.0
    along = mixture_answer(replace(plan, trap=replace(plan.trap, gravity=(1.0, 0.0, 0.0))))
    w1, w2 = 2.0 * math.pi * 120.0, 2.0 * math.pi * 177.0
    assert along.value("distance") == pytest.approx(9.80665 * (1.0 / w1**2 - 1.0 / w2**2), rel=1e-6)


def test_own_frequencies_along_a_ramp() -> None:
    plan = plan_of(ramp=RAMP, **{"[passenger.species]": OWN})
    run = sympathetic_answer(plan).run
    assert run.passenger.rows.frequencies[0].tolist() == pytest.approx([177.0, 177.0, 29.5])
    assert run.coolant.rows.frequencies[0].tolist() == pytest.approx([120.0, 120.0, 20.0])
    assert run.passenger.rows.depth[-1] / boltzmann == pytest.approx(50e-6)
    d = 9.80665 / (2.0 * math.pi) ** 2 * (1.0 / 20.0**2 - 1.0 / 29.5**2)
    assert run.contact.distance[0] == pytest.approx(d, rel=1e-6)
    assert run.contact.overlap_share[-1] < run.contact.overlap_share[0] < 1.0


def test_own_frequencies_are_refused_beside_beams() -> None:
    with pytest.raises(
        PlanError, match=r"^passenger\.frequencies is for a trap that is given by its frequencies; this"
    ):
        mixture_answer(plan_of(BEAMS, **{"[passenger.species]": OWN}))
    with pytest.raises(PlanError, match=r"passenger\.frequencies: .*three"):
        plan_of(**{"[passenger.species]": OWN.replace('"177 Hz", "177 Hz", ', "")})


def test_in_beams_each_has_its_own_trap() -> None:
    answer = mixture_answer(plan_of(BEAMS, **{'"41K"\nstate = "F=2 mF=+2"': '"40K"\nstate = "F=9/2 mF=+9/2"'}))
    assert answer.passenger is not None
    assert answer.own_trap
    assert MixtureCaveatKind.SAME_FREQUENCIES not in kinds(answer.caveats)
    # In the same light w^2 goes as polarizability over mass: 599.1 and 689.4 a.u. at 1064 nm, by the sums over lines.
    ratio = answer.passenger.cloud.trap.frequencies / answer.coolant.cloud.trap.frequencies
    assert ratio == pytest.approx(np.full(3, math.sqrt(599.1 / 689.4 * 86.909 / 39.964)), rel=5e-3)
    # g (1/w1^2 - 1/w2^2) along z, with the frequencies of the sagged trap to a few percent.
    w = 2.0 * math.pi * answer.coolant.cloud.trap.frequencies[2]
    assert answer.value("distance") == pytest.approx(9.80665 / w**2 * (1.0 - 1.0 / ratio[2] ** 2), rel=0.05)


def test_a_passenger_that_the_trap_does_not_hold() -> None:
    # So weak that only the heavier of the two, of larger polarizability a mass, is held against gravity.
    weak = BEAMS.replace('"3 W"', '"40 mW"').replace("1064 nm", "790.5 nm")
    plan = plan_of(weak, **{"6 uK": "0.1 uK"})
    plan = replace(plan, species=plan.passenger.species, passenger=replace(plan.passenger, species=plan.species))  # type: ignore[union-attr]
    answer = mixture_answer(plan)
    assert not answer.trapped
    assert answer.reason
    assert answer.caveats[0].kind is MixtureCaveatKind.PASSENGER_NOT_HELD
    assert reason_unknown(answer, "distance") == answer.reason
    assert math.isnan(answer.value("distance"))


def test_unknown_scattering_length_is_unknown() -> None:
    plan = plan_of(**{'"87Rb"\nstate = "F=2 mF=+2"': '"87Rb"\nstate = "F=1 mF=-1"'})
    answer = mixture_answer(plan)
    assert math.isnan(answer.value("relaxation_time"))
    assert math.isfinite(answer.value("overlap_share"))
    assert MixtureCaveatKind.BETWEEN_UNKNOWN in kinds(answer.caveats)
    said = " ".join(line.sentence for line in mixture_caveat_lines(answer))
    assert "163 a0 of 41K F=2 mF=+2 with 87Rb F=2 mF=+2" in said
    assert "other states only" in reason_unknown(answer, "relaxation_time")
    ramp = ramp_answer(replace(plan, ramp=plan_of(ramp=RAMP).ramp))
    assert ramp.passenger is None
    assert "give passenger.scattering_length" in ramp.passenger_left_out


def test_what_is_typed_for_the_passenger() -> None:
    plan = plan_of(**{"[passenger.species]": '[passenger]\nscattering_length = "-50 a0"\n[passenger.species]'})
    assert between_of(plan).value == pytest.approx(-50.0 * bohr_radius)
    # Background gas is the same; rate constants that are typed are those of the first species.
    own = passenger_plan(plan)
    assert own.losses.background_lifetime == plan.losses.background_lifetime
    assert own.losses.three_body is None
    field = plan_of(**{'"87Rb"': '"87Rb"\nfield = "100 G"'})
    assert passenger_plan(field).species.field == field.species.field


@pytest.mark.parametrize(
    ("old", "new", "sentence"),
    [
        ('"41K"', '"87Rb"', "passenger.species: 87Rb F=2 mF=\\+2 is the first species too"),
        (
            '"41K"',
            '"41K"\nfield = "10 G"',
            "passenger.species.field is 10 G and species.field 20 G: both are in one trap, give one field",
        ),
    ],
)
def test_a_passenger_that_cannot_be(old: str, new: str, sentence: str) -> None:
    plan = plan_of(**{old: new, '"87Rb"\nstate': '"87Rb"\nfield = "20 G"\nstate'})
    with pytest.raises(PlanError, match=sentence):
        mixture_answer(plan)


def test_without_a_passenger() -> None:
    plan = replace(plan_of(ramp=RAMP), passenger=None)
    with pytest.raises(PlanError, match="the plan has no second species"):
        mixture_answer(plan)
    with pytest.raises(PlanError, match="the plan has no second species"):
        sympathetic_answer(plan)


def test_the_passenger_follows_the_ramp() -> None:
    plan = plan_of(ramp=RAMP)
    answer = sympathetic_answer(plan)
    run = answer.run
    assert run.passenger.temperature[-1] < 0.5 * run.passenger.temperature[0]
    # It keeps the depth of the trap, which is moved for the first species only.
    assert run.passenger.rows.depth == pytest.approx(np.full(len(run.passenger.time), 60e-6 * boltzmann), rel=1e-9)
    assert run.coolant.rows.depth[-1] == pytest.approx(9e-6 * boltzmann)
    assert MixtureCaveatKind.PASSENGER_DEPTH_STAYS in kinds(answer.caveats)
    assert all(text and "{" not in text for text in sympathetic_caveat_texts(answer))
    assert sympathetic_verdict(answer).startswith(f"{run.passenger.atoms[-1]:.2e}".replace("e+0", "e"))
    # The ramp of the plan is that with the heat of the passenger.
    assert ramp_answer(plan).run is run.coolant
    alone = ramp_answer(replace(plan, passenger=None)).run
    assert run.coolant.atoms[-1] < alone.atoms[-1]


def test_a_depth_that_only_the_ramp_gives() -> None:
    plan = plan_of(FREQUENCIES.replace('depth = "60 uK"', ""), ramp=RAMP.replace("end", 'start = "50 uK"\nend'))
    answer = sympathetic_answer(plan)
    assert answer.run.passenger.rows.depth[-1] == pytest.approx(50e-6 * boltzmann)
    assert MixtureCaveatKind.PASSENGER_DEPTH_UNKNOWN in kinds(answer.caveats)


def test_every_caveat_has_a_sentence_and_every_row_a_number() -> None:
    assert set(_SENTENCES) == set(MixtureCaveatKind)
    for name in MIXTURE_QUANTITIES:
        assert name == "scattering_length_between" or hasattr(Mixture, name)
    answer = sympathetic_answer(plan_of(ramp=RAMP))
    for row in CONTACT_COLUMNS:
        assert len(getattr(answer.run.contact, row.name)) == len(answer.run.passenger.time)


def test_state_and_evaporate_tell_of_it(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "plan.toml"
    file.write_text(HEAD + FREQUENCIES + REST + RAMP, encoding="utf-8")
    assert main(["state", str(file), "--json"]) == 0
    found = json.loads(capsys.readouterr().out)["passenger"]
    assert (found["key"], found["state"], found["trapped"]) == ("41K", "F=2 mF=+2", True)
    assert found["quantities"]["peak_phase_space_density"]["value"] > 0.0
    mixture = found["mixture"]
    assert list(mixture["quantities"]) == list(MIXTURE_QUANTITIES)
    assert mixture["mixing"] == "phase separation"
    fermions = mixture["quantities"]["bose_fermi_parameter"]
    assert fermions["value"] is None
    assert fermions["reason"].startswith("needs a Bose gas")
    assert main(["state", str(file)]) == 0
    assert "with the passenger 41K" in capsys.readouterr().out
    assert main(["evaporate", str(file), "--json"]) == 0
    body = json.loads(capsys.readouterr().out)
    columns = body["passenger"]["columns"]
    assert len(columns["time"]) == len(columns["temperature"]) == len(columns["overlap_share"])
    assert body["passenger"]["final"]["reduced_temperature"] == columns["reduced_temperature"][-1]
    heat = body["energy_budget"]["contact"]
    assert heat == pytest.approx(-body["passenger"]["energy_budget"]["contact"])
    assert main(["evaporate", str(file)]) == 0
    assert "41K, F=2 mF=+2, the passenger" in capsys.readouterr().out


def test_the_demo_plan_holds_its_passenger_in_close_contact() -> None:
    plan = read_plan(Path(__file__).parents[2] / "presets" / "plans" / "sympathetic_potassium.toml")
    answer = mixture_answer(plan)
    assert answer.trapped
    assert 1e-4 < answer.value("relaxation_time") < 1e-2
    assert answer.value("overlap_share") > 0.99
    assert answer.passenger is not None
    assert not answer.passenger.bosons
