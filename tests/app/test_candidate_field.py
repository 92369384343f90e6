"""Candidates at their best field: what is found, against the numbers at that field alone and closed forms; and what is
said where nothing is found."""

from __future__ import annotations

import json
import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import minimize_scalar
from scipy.special import exp1

from app.__main__ import main
from app.answers.candidate_field import search_text
from app.answers.candidate_row import CandidateRow, Failure
from app.answers.candidates import candidates_answer
from app.candidate_choices import CandidateChoice, CandidatesChoice
from app.candidate_selection import with_conditions, with_species_of
from app.candidate_words import row_tip_text
from app.plan import DEFAULT_PLAN, Plan, PlanError, parse_plan, plan_with
from app.plan_saving import write_plan
from app.sureness import Sureness
from app.units import MAGNETIC_FIELD, SCATTERING_LENGTH, read_quantity
from physics.constants import atomic_mass, bohr_radius, boltzmann, reduced_planck

HOT = plan_with(DEFAULT_PLAN, {"cloud.temperature": "1 uK", "cloud.atoms": "1e6", "losses.background_lifetime": "30 s"})


def sought(
    plan: Plan, key: str, low: str, high: str, length: str | None = None, state: str | None = None
) -> CandidateRow:
    choice = CandidateChoice(
        key=key,
        state=state,
        lowest_field=read_quantity(low, MAGNETIC_FIELD),
        highest_field=read_quantity(high, MAGNETIC_FIELD),
        wanted_length=None if length is None else read_quantity(length, SCATTERING_LENGTH),
    )
    answer = candidates_answer(replace(plan, candidates=CandidatesChoice(candidates=(choice,))))
    assert answer is not None
    return answer.rows[0]


def at_field(plan: Plan, key: str, state: str, field: str) -> CandidateRow:
    choice = CandidateChoice(key=key, state=state, field=read_quantity(field, MAGNETIC_FIELD))
    answer = candidates_answer(replace(plan, candidates=CandidatesChoice(candidates=(choice,))))
    assert answer is not None
    return answer.rows[0]


def test_at_the_best_field_loss_at_the_ceiling_equals_that_of_the_background() -> None:
    row = sought(HOT, "39K", "350 G", "402 G")
    assert row.cloud is not None
    length, found = row.cell("scattering_length").value, row.search.found
    # a^2 F(K)/(1/tau + c a^4), K = m kT a^2/hbar^2: without F it would be largest where c a^4 = 1/tau.
    mass = 38.96370648482 * atomic_mass
    ceiling = 201.0 * reduced_planck / mass * float(row.cloud.solution.rates.triple_density)

    def inverse_gain(log_length: float) -> float:
        a = math.exp(log_length)
        K = mass * boltzmann * 1e-6 * a**2 / reduced_planck**2
        factor = (1.0 - math.exp(1.0 / K) * float(exp1(1.0 / K)) / K) / K
        return (1.0 / 30.0 + ceiling * a**4) / (a**2 * factor)

    plain = (1.0 / (30.0 * ceiling)) ** 0.25
    best = minimize_scalar(inverse_gain, bounds=(math.log(0.5 * plain), math.log(2.0 * plain)), method="bounded")
    assert length == pytest.approx(math.exp(best.x), rel=1e-4)
    assert length == pytest.approx(plain, rel=5e-2)
    # That ratio is about half of what the background alone would leave.
    ratio, upper = row.cell("good_to_bad_at_ceiling"), row.cell("good_to_bad_ratio")
    assert ratio.value == pytest.approx(upper.value / (1.0 + 30.0 * ceiling * length**4), rel=1e-9)
    assert ratio.value == pytest.approx(0.5 * upper.value, rel=0.1)
    assert ratio.sureness is upper.sureness is Sureness.ASSUMED
    assert "201 ħa⁴/m" in ratio.reason
    # The resonance of the data: a = -29 a0 (1 + 52 G/(B - 402.7 G)).
    field = 1e4 * row.cell("magnetic_field").value
    assert length / bohr_radius == pytest.approx(-29.0 * (1.0 + 52.0 / (field - 402.7)), rel=1e-6)
    assert 1e4 * found.low < field < 1e4 * found.high


def test_no_field_nearby_is_better_and_the_ends_of_the_good_stretch_are_as_good_as_said() -> None:
    row = sought(HOT, "39K", "350 G", "402 G")
    best, found = row.cell("good_to_bad_at_ceiling").value, row.search.found
    for field in np.linspace(351.0, 402.0, 12):
        other = at_field(HOT, "39K", "F=1 mF=+1", f"{field} G").cell("good_to_bad_at_ceiling").value
        assert not other > best * (1.0 + 1e-9)
    for field in (found.low, found.high):
        other = at_field(HOT, "39K", "F=1 mF=+1", f"{1e4 * field!r} G").cell("good_to_bad_at_ceiling").value
        assert other == pytest.approx(0.9 * best, rel=2e-3)


def test_a_row_at_its_best_field_says_what_the_field_alone_says() -> None:
    row = sought(HOT, "85Rb", "155 G", "166 G")
    same = at_field(HOT, "85Rb", "F=2 mF=-2", row.plan.species.field.text)
    for name in ("elastic_collision_rate", "good_to_bad_ratio", "scattering_length"):
        assert row.cell(name).value == pytest.approx(same.cell(name).value, rel=1e-4)
    assert "field sought from 155 G to 166 G" in row_tip_text(row)
    # It can be taken over into the plan.
    taken = with_species_of(HOT, row)
    assert (taken.species.key, taken.species.field) == ("85Rb", row.plan.species.field)


def test_a_wanted_length_is_made_where_a_field_changes_it_least() -> None:
    row = sought(HOT, "40K", "203 G", "300 G", "100 a0")
    # 167 or 174 a0 (1 - 7.8 G/(B - 202.1 G)) = 100 a0: the data have 174.
    assert 1e4 * row.cell("magnetic_field").value == pytest.approx(202.1 + 7.8 / (1.0 - 100.0 / 174.0), abs=1e-3)
    assert row.cell("scattering_length").value == pytest.approx(100.0 * bohr_radius, rel=1e-6)
    assert row.cell("magnetic_field").sureness is Sureness.ASSUMED
    assert math.isnan(row.cell("good_to_bad_at_ceiling").value)


@pytest.mark.parametrize(
    ("plan", "asked", "reason"),
    [
        (HOT, ("6Li", "750 G", "900 G"), "how fast fermions are lost near a resonance is not known"),
        (DEFAULT_PLAN, ("39K", "350 G", "400 G"), "the best ratio needs a background lifetime"),
        (HOT, ("39K", "900 G", "950 G"), r"the data tune this state at 0–60 G or 250–550 G or 700–800 G, not in"),
        (HOT, ("85Rb", "170 G", "200 G"), "no field in the range makes a > 0"),
        (HOT, ("85Rb", "170 G", "200 G", "50 a0"), "no field in the range that the data describe makes a = 50 a0"),
    ],
)
def test_where_no_field_is_found_the_row_has_no_data_and_says_why(
    plan: Plan, asked: tuple[str, ...], reason: str
) -> None:
    row = sought(plan, *asked)
    assert row.search.found is None
    assert row.failure is Failure.NO_DATA
    assert reason in row.reason
    assert reason in search_text(row.search)
    assert not row.cell("magnetic_field").known
    assert reason in row.cell("magnetic_field").reason


def test_a_state_that_no_field_tunes_is_judged_as_it_is() -> None:
    row = sought(HOT, "84Sr", "0 G", "500 G")
    assert row.failure is None
    assert "no magnetic resonance" in row.search.reason


def test_a_range_for_all_leaves_those_with_conditions_of_their_own() -> None:
    own = CandidateChoice(key="133Cs", field=read_quantity("21 G", MAGNETIC_FIELD))
    choice = CandidatesChoice(
        keys=("23Na", "84Sr", "85Rb", "133Cs"),
        candidates=(own,),
        lowest_field=read_quantity("0 G", MAGNETIC_FIELD),
        highest_field=read_quantity("1000 G", MAGNETIC_FIELD),
    )
    answer = candidates_answer(replace(HOT, candidates=choice))
    assert answer is not None
    searched = {row.name: row.search is not None for row in answer.rows}
    assert searched == {
        "23Na  F=1 mF=-1": True,
        "23Na  F=1 mF=+1": True,
        "23Na  F=2 mF=+2": False,
        "84Sr  ground state": False,
        "85Rb  F=2 mF=-2": True,
        "133Cs  F=3 mF=+3": False,
    }
    # Where the range holds nothing, the length that the data state stands.
    assert answer.rows[0].failure is None
    assert answer.rows[0].cell("scattering_length").value == pytest.approx(54.54 * bohr_radius)


# --- in the plan file, and by the command ---

FILE = """coldward = 1
[species]
key = "87Rb"
[trap]
frequencies = ["120 Hz", "120 Hz", "20 Hz"]
[cloud]
atoms = "1e6"
temperature = "1 uK"
[losses]
background_lifetime = "30 s"
"""


def test_a_plan_file_keeps_what_is_sought() -> None:
    text = FILE + (
        '[candidates]\nkeys = ["39K"]\nlowest_field = "0 G"\nhighest_field = "600 G"\nwanted_length = "90 a0"\n'
        '[[candidate]]\nkey = "85Rb"\nlowest_field = "155 G"\nhighest_field = "166 G"  # the blue side\n'
    )
    plan = parse_plan(text, "fields.toml")
    assert plan.candidates.highest_field.value == pytest.approx(0.06)
    assert plan.candidates.candidates[0].lowest_field.text == "155 G"
    written = write_plan(plan, text)
    assert "# the blue side" in written
    assert parse_plan(written, "fields.toml") == plan
    new = parse_plan(write_plan(plan), "new.toml")
    assert new.candidates == plan.candidates
    # Conditions of its own come and go.
    plain = with_conditions(plan, CandidateChoice(key="85Rb", state="F=2 mF=-2"))
    assert plain.candidates.candidates[0].lowest_field is None


@pytest.mark.parametrize(
    ("lines", "sentence"),
    [
        ('[candidates]\nlowest_field = "5 G"', r"candidates\.highest_field: .*give both ends of the range"),
        ('[candidates]\nwanted_length = "5 a0"', r"wanted_length: .*needs the fields between which it is sought"),
        (
            '[[candidate]]\nkey = "39K"\nlowest_field = "5 G"\nhighest_field = "5 G"',
            r"lowest_field of candidate 1: the lowest field must be below the highest, got 5 G and 5 G",
        ),
        (
            '[[candidate]]\nkey = "39K"\nfield = "7 G"\nlowest_field = "5 G"\nhighest_field = "9 G"',
            r"of candidate 1: .*give no magnetic field or scattering length",
        ),
    ],
)
def test_half_a_wish_is_refused_in_one_sentence(lines: str, sentence: str) -> None:
    with pytest.raises(PlanError, match=sentence):
        parse_plan(FILE + lines, "fields.toml")


def test_the_command_seeks_fields(capsys: pytest.CaptureFixture[str]) -> None:
    asked = ["compare", "--species", "39K,84Sr", "--frequencies", "120 Hz,120 Hz,20 Hz", "--atoms", "1e6"]
    asked += ["--temperature", "1 uK", "--background-lifetime", "30 s", "--field-range", "350 G, 402 G"]
    assert main([*asked, "--json"]) == 0
    rows = json.loads(capsys.readouterr().out)["rows"]
    found = next(row for row in rows if row["state"] == "F=1 mF=+1")
    alone = sought(HOT, "39K", "350 G", "402 G")
    assert found["field_search"]["field"] == alone.search.found.field
    assert found["field_search"]["nearly_as_good"] == [alone.search.found.low, alone.search.found.high]
    assert found["quantities"]["magnetic_field"]["value"] == alone.search.found.field
    assert next(row for row in rows if row["key"] == "84Sr")["field_search"] is None
    assert main(asked) == 0
    page = capsys.readouterr().out
    assert "Fields that were sought" in page
    assert "field sought from 350 G to 402 G" in page
    assert max(map(len, page.splitlines())) <= 120
    assert main([*asked[:-1], "350 G"]) == 1
    assert '--field-range must be two fields such as "0 G, 600 G", got "350 G"' in capsys.readouterr().err
    assert main([*asked[:-1], "350 K, 402 G"]) == 1
    assert "--field-range:" in capsys.readouterr().err
