"""What a trap of beams and coils does to an answer, in its caveats and their sentences."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from app.__main__ import main
from app.caveat_words import caveat_text
from app.engine import CloudAnswer, cloud_answer
from app.plan import Plan, plan_with, read_plan
from app.units import Quantity
from physics.caveats import CAVEAT_IDS, Caveat, Severity
from physics.traps.notes import NoteKind

TRAPS = Path(__file__).resolve().parents[2] / "presets" / "traps"


def preset(name: str) -> Plan:
    return read_plan(TRAPS / f"{name}.toml")


def caveats(plan: Plan) -> dict[str, tuple[Caveat, str]]:
    answer: CloudAnswer = cloud_answer(plan)
    return {caveat.id: (caveat, caveat_text(caveat, answer)) for caveat in answer.caveats}


def test_every_note_is_a_caveat_or_has_one_in_its_place() -> None:
    names = {kind.name.lower() for kind in NoteKind}
    assert names - set(CAVEAT_IDS) == {"infinite_arms", "field_zero"}  # said by open_trap and spin_flips


def test_a_narrow_way_out_is_told_with_its_share() -> None:
    caveat, sentence = caveats(preset("crossed_beams_rubidium"))["one_way_out"]
    assert caveat.value is not None
    assert 0.02 < caveat.value < 0.1
    assert sentence.startswith(f"Only {100.0 * caveat.value:.1f} % of all directions lead out of this trap.")
    assert "one_way_out" not in caveats(preset("falling_potassium"))


def test_spin_flips_at_a_zero_grow_grave_as_the_cloud_cools() -> None:
    plan = preset("quadrupole_rubidium")
    warm, sentence = caveats(plan_with(plan, {"cloud.temperature": "600 uK", "cloud.atoms": "1e4"}))["spin_flips"]
    cold, _ = caveats(plan)["spin_flips"]
    assert (warm.severity, cold.severity) == (Severity.NOTE, Severity.WARNING)
    assert warm.value is not None
    assert cold.value is not None
    assert cold.value / warm.value == pytest.approx((600.0 / 85.0) ** 2, rel=1e-9)
    assert cold.numbers["largest"] / cold.numbers["least"] == pytest.approx(1.85 / 0.16, rel=1e-9)
    assert "at the zero of the field" in sentence


def test_light_that_heats_is_told_with_what_it_does_to_the_temperature() -> None:
    preset_plan = preset("crossed_beams_rubidium")
    assert "light_heating" not in caveats(preset_plan)  # 18 % of T in half a minute
    plan = plan_with(preset_plan, {"cloud.temperature": "350 nK", "cloud.atoms": "2e4"})
    caveat, sentence = caveats(plan)["light_heating"]
    assert caveat.value == pytest.approx(3.81e-9, rel=1e-2)
    assert caveat.numbers["share"] == pytest.approx(caveat.value * caveat.numbers["time"] / 350e-9, rel=1e-9)
    assert "warms the cloud by 3.8 nK/s" in sentence
    assert "light_heating" not in caveats(plan_with(plan, {"losses.heating": "1 nK/s"}))  # which overrides it
    cold, _ = caveats(plan_with(plan, {"cloud.temperature": "100 nK", "cloud.atoms": "2000"}))["light_heating"]
    assert cold.severity is Severity.WARNING


def test_light_of_a_beam_is_told_by_its_name() -> None:
    caveat, sentence = caveats(preset("plugged_quadrupole_sodium"))["blue_light"]
    assert (caveat.subject, caveat.severity) == ("plug", Severity.NOTE)
    assert sentence.startswith("Beam plug is tuned above the nearest line")
    dysprosium = preset("crossed_beams_dysprosium")
    assert "published_polarizability" not in caveats(dysprosium)  # which is of this very wavelength
    beams = tuple(replace(beam, wavelength=Quantity("1070 nm", 1070e-9)) for beam in dysprosium.trap.beams)
    published = caveats(replace(dysprosium, trap=replace(dysprosium.trap, beams=beams)))["published_polarizability"]
    assert "one published for a wavelength 0.6 % away. A measured frequency can calibrate" in published[1]
    plan = preset("crossed_beams_rubidium")
    beams = tuple(replace(beam, wavelength=Quantity("796 nm", 796e-9)) for beam in plan.trap.beams)
    near, sentence = caveats(replace(plan, trap=replace(plan.trap, beams=beams)))["near_resonance"]
    assert near.severity is Severity.WARNING
    assert "from a line" in sentence


def test_the_json_of_state_has_them_with_number_and_severity(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["state", str(TRAPS / "quadrupole_rubidium.toml"), "--json"]) == 0
    found = {entry["id"]: entry for entry in json.loads(capsys.readouterr().out)["caveats"]}
    assert found["spin_flips"]["severity"] == "warning"
    assert found["spin_flips"]["value"] == pytest.approx(1.0 / 62.8, rel=1e-2)
    assert found["linear_zeeman"]["value"] == pytest.approx(3.6e7, rel=2e-2)
