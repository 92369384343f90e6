"""Filters, weights and order: what the user says and nothing else; the unknown never counts as zero."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.answers.candidate_row import CandidateRow
from app.answers.candidates import candidates_answer
from app.candidate_choices import CandidateChoice, CandidatesChoice
from app.candidate_columns import COLUMNS, USUAL_COLUMNS, column, columns_in
from app.candidate_csv import candidates_csv
from app.candidate_memory import MEMORY_KEYS, CandidateMemory, memory_from
from app.candidate_order import Sieve, Trait, Weight, order_by, read_bound, read_sieve, read_weight, score_rows
from app.candidate_selection import with_candidates, with_conditions, with_species_of
from app.candidate_words import cell_text, short_state, unit_for_column
from app.plan import DEFAULT_PLAN, PlanError
from app.quantity_row import Group
from app.units import MAGNETIC_FIELD, read_quantity
from physics.species import load_species, species_keys


@pytest.fixture(scope="module")
def rows() -> tuple[CandidateRow, ...]:
    answer = candidates_answer(DEFAULT_PLAN)
    assert answer is not None
    return answer.rows


# --- columns ---


def test_every_column_stands_under_one_heading_and_the_usual_ones_are_columns() -> None:
    listed = [found.name for group in Group for found in columns_in(group)]
    assert sorted(listed) == sorted(COLUMNS)
    assert set(USUAL_COLUMNS) <= set(COLUMNS)
    assert column("Elastic collision-rate").name == "elastic_collision_rate"
    with pytest.raises(ValueError, match="the nearest is trap_depth"):
        column("trap_deph")


# --- filters ---


def test_traits_hold_for_what_they_say(rows: tuple[CandidateRow, ...]) -> None:
    passing = {trait: {row.name for row in rows if trait.holds(row)} for trait in Trait}
    assert passing[Trait.BOSONS] | passing[Trait.FERMIONS] == {row.name for row in rows}
    assert not passing[Trait.BOSONS] & passing[Trait.FERMIONS]
    # Where the scattering length is not known, collisions are not known, and so not there.
    assert "85Rb  F=2 mF=-2" not in passing[Trait.COLLIDING]
    assert "87Rb  F=1 mF=-1" in passing[Trait.COLLIDING]
    assert "40K  F=9/2 mF=-9/2" not in passing[Trait.SOUND]


def test_an_unknown_number_passes_no_bound(rows: tuple[CandidateRow, ...]) -> None:
    for text in ("elastic_collision_rate >= -1 1/s", "elastic_collision_rate <= 1e9 1/s"):
        bound = read_bound(text)
        assert {row.name for row in rows if bound.holds(row)} == {
            row.name for row in rows if row.cell("elastic_collision_rate").known
        }


@pytest.mark.parametrize(
    ("text", "written"),
    [
        ("sag<=50um", "sag <= 50um"),
        ("scattering length > -20 a0", "scattering_length >= -20 a0"),
        ("truncation ≥ 8", "truncation >= 8"),
        ("total_lifetime >= 0.5 min", "total_lifetime >= 0.5 min"),
    ],
)
def test_bounds_are_read_as_they_are_written(text: str, written: str) -> None:
    bound = read_bound(text)
    assert bound.written == written
    assert read_bound(bound.written) == bound


def test_a_sieve_of_several_texts_wants_all_of_them(rows: tuple[CandidateRow, ...]) -> None:
    sieve = read_sieve(["Bosons", "mass >= 80 u", "mass <= 90 u"])
    assert {row.key for row in rows if sieve.passes(row)} == {"84Sr", "85Rb", "86Sr", "87Rb", "88Sr"}
    assert Sieve().empty
    assert all(Sieve().passes(row) for row in rows)


# --- weights ---


def test_a_score_runs_from_the_worst_to_the_best_and_shows_its_parts(rows: tuple[CandidateRow, ...]) -> None:
    known = [row for row in rows if row.cell("elastic_collision_rate").value > 0.0]
    weights = (read_weight("elastic_collision_rate=3"), read_weight("mass"))
    scores = score_rows(known, weights)
    for row, score in zip(known, scores, strict=True):
        rates = [other.cell("elastic_collision_rate").value for other in known]
        masses = [other.cell("mass").value for other in known]
        shares = [
            math.log(row.cell(name).value / min(values)) / math.log(max(values) / min(values))
            for name, values in (("elastic_collision_rate", rates), ("mass", masses))
        ]
        assert score.parts == pytest.approx((0.75 * shares[0], 0.25 * shares[1]))
        assert score.value == pytest.approx(sum(score.parts))
    only = score_rows(known, (Weight(name="mass", weight=5.0, more_is_better=False),))
    assert {known[place].key for place, score in enumerate(only) if score.value == 1.0} == {"1H"}


def test_less_may_be_better_and_a_column_of_equals_is_full_marks(rows: tuple[CandidateRow, ...]) -> None:
    more, less = (
        score_rows(rows, (Weight(name="mass", weight=1.0, more_is_better=better),)) for better in (True, False)
    )
    assert [a.value + b.value for a, b in zip(more, less, strict=True)] == pytest.approx([1.0] * len(rows))
    bosons = [row for row in rows if row.bosons]
    assert {s.value for s in score_rows(bosons, (read_weight("mean_frequency"),))} == {1.0}


def test_a_score_with_an_unknown_part_is_unknown(rows: tuple[CandidateRow, ...]) -> None:
    weights = (read_weight("mass=9"), read_weight("scattering_length=1"))
    for row, score in zip(rows, score_rows(rows, weights), strict=True):
        assert math.isnan(score.value) != row.cell("scattering_length").known
        assert score.missing == (() if row.cell("scattering_length").known else ("scattering_length",))


@given(
    st.sampled_from(sorted(COLUMNS)),
    st.floats(min_value=1e-6, max_value=1e6).map(lambda number: float(f"{number:.6g}")),
    st.booleans(),
)
def test_weights_are_read_as_they_are_written(name: str, number: float, better: bool) -> None:
    weight = Weight(name=name, weight=number, more_is_better=better)
    assert read_weight(weight.written) == weight


# --- order ---


@given(st.lists(st.floats(allow_infinity=False)), st.booleans())
def test_known_numbers_come_in_order_and_unknown_ones_last(values: list[float], descending: bool) -> None:
    places = order_by(values, descending)
    assert sorted(places) == list(range(len(values)))
    found = [values[place] for place in places]
    known = [value for value in found if math.isfinite(value)]
    assert found[: len(known)] == known
    assert known == sorted(known, reverse=descending)
    equal = [place for place in places if values[place] == 0.0]
    assert equal == sorted(equal)


# --- texts ---


def test_short_states_are_read_back(rows: tuple[CandidateRow, ...]) -> None:
    for row in rows:
        assert load_species(row.key).state(short_state(row.state)) is row.state


def test_cells_carry_their_marks_and_columns_their_units(rows: tuple[CandidateRow, ...]) -> None:
    cells = [row.cell("threshold_temperature") for row in rows]
    assert unit_for_column("threshold_temperature", cells) == "nK"
    assert unit_for_column("threshold_temperature", cells, "µK") == "µK"
    assert unit_for_column("scattering_length", [row.cell("scattering_length") for row in rows]) == "a0"
    sodium = next(row for row in rows if row.key == "23Na")
    assert cell_text(sodium.cell("scattering_length"), "scattering_length", "a0") == "54.5ʳ"
    potassium = next(row for row in rows if row.name == "39K  F=1 mF=+1")
    assert cell_text(potassium.cell("scattering_length"), "scattering_length", "a0") == "–"


def test_a_table_of_numbers_leaves_the_unknown_empty(rows: tuple[CandidateRow, ...]) -> None:
    lines = candidates_csv(rows, ("elastic_collision_rate",)).splitlines()
    assert "elastic_collision_rate [1/s],elastic_collision_rate certainty," in lines[0]
    assert len(lines) == len(rows) + 1
    for line, row in zip(lines[1:], rows, strict=True):
        cell = row.cell("elastic_collision_rate")
        assert f",{cell.value!r},{cell.sureness.value}," in line if cell.known else line.endswith(",,unknown,,")


# --- what is remembered ---


def test_what_is_remembered_comes_back_and_what_cannot_be_read_is_left_out() -> None:
    memory = CandidateMemory(
        columns=("mass", "sag"),
        ordered_by="sag",
        descending=False,
        sieve=read_sieve(["bosons", "sag <= 50 um"]),
        weights=(read_weight("mass=2 less"),),
    )
    assert tuple(memory.texts()) == MEMORY_KEYS
    assert memory_from(memory.texts()) == memory
    assert memory_from({}) == CandidateMemory()
    damaged = {"columns": ("sagg",), "order": ("sag",), "filters": ("sag <=", "trapped"), "weights": ("=",)}
    assert memory_from(damaged) == CandidateMemory(sieve=Sieve(traits=(Trait.TRAPPED,)))


# --- which candidates ---


def test_chosen_states_are_written_as_briefly_as_can_be() -> None:
    field = read_quantity("850 G", MAGNETIC_FIELD)
    own = CandidateChoice(key="6Li", state="F=1/2 mF=+1/2 and F=1/2 mF=-1/2", field=field)
    plan = replace(DEFAULT_PLAN, candidates=CandidatesChoice(candidates=(own,)))
    every = {(key, state.name) for key in species_keys() for state in load_species(key).states}
    assert with_candidates(DEFAULT_PLAN, every).candidates == CandidatesChoice()
    rubidium = {which for which in every if which[0] == "87Rb"}
    assert with_candidates(plan, rubidium).candidates == CandidatesChoice(keys=("87Rb",))
    one = {("87Rb", "F=2 mF=+2"), (own.key, own.state or "")}
    assert with_candidates(plan, one).candidates.candidates == (
        own,
        CandidateChoice(key="87Rb", state="F=2 mF=+2"),
    )
    with pytest.raises(PlanError, match="at least one species"):
        with_candidates(plan, ())


def test_conditions_of_its_own_leave_the_others_as_they_are() -> None:
    field = read_quantity("850 G", MAGNETIC_FIELD)
    own = CandidateChoice(key="6Li", state="F=1/2 mF=+1/2 and F=1/2 mF=-1/2", field=field)
    plan = with_conditions(DEFAULT_PLAN, own)
    assert plan.candidates == CandidatesChoice(keys=species_keys(), candidates=(own,))
    assert with_conditions(plan, replace(own, field=None)) == DEFAULT_PLAN
    alone = replace(DEFAULT_PLAN, candidates=CandidatesChoice(candidates=(own,)))
    assert with_conditions(alone, replace(own, field=None)).candidates.candidates == (replace(own, field=None),)


def test_a_candidate_becomes_the_plan_s_own_species(rows: tuple[CandidateRow, ...]) -> None:
    row = next(row for row in rows if row.key == "41K")
    plan = with_species_of(DEFAULT_PLAN, row)
    assert (plan.species.key, plan.species.state) == ("41K", row.state.name)
    assert (plan.trap, plan.cloud, plan.target) == (DEFAULT_PLAN.trap, DEFAULT_PLAN.cloud, DEFAULT_PLAN.target)
