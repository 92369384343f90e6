"""Candidates: what the data leave open is said, never taken for a no or for a sure number."""

from __future__ import annotations

import csv
import io
from dataclasses import replace
from pathlib import Path

import pytest

from app.answers.candidate_row import CandidateRow, Failure
from app.answers.candidates import candidates_answer
from app.candidate_choices import CandidatesChoice
from app.candidate_csv import candidates_csv
from app.candidate_order import Trait
from app.candidate_words import row_tip_text, status_text
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan
from app.sureness import Sureness
from app.units import WAVELENGTH, read_quantity

ROOT = Path(__file__).resolve().parents[2]
LIGHT = ROOT / "presets" / "traps" / "crossed_beams_dysprosium.toml"


def rows_of(plan: Plan, *keys: str) -> tuple[CandidateRow, ...]:
    answer = candidates_answer(replace(plan, candidates=CandidatesChoice(keys=keys)))
    assert answer is not None
    return answer.rows


def in_light(wavelength: str) -> Plan:
    plan = read_plan(LIGHT)
    colour = read_quantity(wavelength, WAVELENGTH)
    beams = tuple(replace(beam, wavelength=colour) for beam in plan.trap.beams)
    return replace(plan, trap=replace(plan.trap, beams=beams))


def test_whether_light_holds_a_species_without_data_is_not_known() -> None:
    (row,) = rows_of(in_light("1550 nm"), "164Dy")
    assert row.failure is Failure.NO_DATA
    assert "what beam" in row.reason
    assert "is not known" in row.reason
    assert row.trapped is None
    assert not Trait.TRAPPED.holds(row)
    table = next(csv.DictReader(io.StringIO(candidates_csv([row], ["trap_depth"]))))
    assert (table["trapped"], table["fails"], table["trap_depth [J]"]) == ("", "no data", "")
    # Light above the lines of a species that the data do have pushes it out: that is known.
    (repelled,) = rows_of(in_light("760 nm"), "41K")[:1]
    assert (repelled.failure, repelled.trapped) == (Failure.NOT_TRAPPED, False)


@pytest.mark.parametrize(
    ("wavelength", "depth", "word"),
    [("1064 nm", Sureness.SEEN, ""), ("1075 nm", Sureness.ASSUMED, "published for a wavelength 1.0 % away")],
)
def test_a_polarizability_of_another_wavelength_is_assumed(wavelength: str, depth: Sureness, word: str) -> None:
    (row,) = rows_of(in_light(wavelength), "164Dy")
    cell = row.cell("trap_depth")
    assert (cell.sureness, word in cell.reason) == (depth, True)
    # What is scattered by way of lines nearby is in no polarizability.
    for name in ("light_scattering_rate", "recoil_heating_rate"):
        assert row.cell(name).sureness is Sureness.ASSUMED
        assert "a lower bound" in row.cell(name).reason
    # Species of which the lines are known rest on them.
    assert "published" not in rows_of(in_light(wavelength), "87Rb")[0].cell("trap_depth").reason


def test_a_three_body_constant_of_another_scattering_length_is_assumed() -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.scattering_length": "200 a0"})
    tuned = rows_of(plan, "87Rb")[0]
    # (200/100.4)^4 = 15.7; the length of the data is 100.4 a0.
    assert "by a⁴ it would be 16 times" in tuned.cell("three_body_lifetime").reason
    for name in ("three_body_lifetime", "total_lifetime", "good_to_bad_ratio"):
        assert tuned.cell(name).sureness is Sureness.ASSUMED
    assert rows_of(DEFAULT_PLAN, "87Rb")[0].cell("three_body_lifetime").sureness is Sureness.RECALLED


def test_a_row_carries_the_warnings_of_its_cloud() -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.scattering_length": "200 a0"})
    tuned, other = rows_of(plan, "87Rb")[:2]
    assert "three_body_elsewhere" in [warning.id for warning in tuned.warnings]
    assert status_text(tuned) == f"△ {len(tuned.warnings)}"
    assert "K₃ of the data belongs to another scattering length" in row_tip_text(tuned)
    assert other.warnings == ()
    assert status_text(other) == ""
    table = list(csv.DictReader(io.StringIO(candidates_csv([tuned, other], ["mass"]))))
    assert "three_body_elsewhere" in table[0]["warnings"].split()
    assert table[1]["warnings"] == ""


def test_a_table_has_the_range_of_what_is_uncertain() -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "200(10) nK"})
    row = rows_of(plan, "87Rb")[0]
    table = next(csv.DictReader(io.StringIO(candidates_csv([row], ["thermal_wavelength", "mass"]))))
    spread = row.spread("thermal_wavelength")
    assert spread is not None
    assert float(table["thermal_wavelength low"]) == float(spread.low)
    assert float(table["thermal_wavelength high"]) == float(spread.high)
    # lambda ~ T^(-1/2): 5 % of T are 2.5 % of it.
    assert float(spread.high) / float(spread.low) == pytest.approx(1.05, rel=2e-3)
    assert "mass low" not in table
