"""The map of thresholds and the ranking of candidates: lines by their kind, unknown numbers apart and never at zero."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from app.answers.candidate_row import CandidateRow
from app.answers.candidate_thresholds import thresholds_of
from app.answers.candidates import candidates_answer
from app.candidate_choices import CandidateChoice, CandidatesChoice
from app.candidate_order import SCORE, read_weight, score_rows
from app.figures.candidates_chart import ranked_picture
from app.figures.candidates_map import line_near, thresholds_picture
from app.figures.draw import picture_bytes
from app.figures.labels import place_labels
from app.figures.picture import Axis, Label, Picture, Role
from app.figures.theme import DARK, LIGHT
from app.plan import DEFAULT_PLAN, plan_with
from app.units import ATOM_NUMBER, TEMPERATURE, read_quantity


@pytest.fixture(scope="module")
def rows() -> tuple[CandidateRow, ...]:
    answer = candidates_answer(DEFAULT_PLAN)
    assert answer is not None
    return answer.rows


def test_in_the_same_frequencies_two_lines_say_all(rows: tuple[CandidateRow, ...]) -> None:
    thresholds = thresholds_of(rows, 1e5)
    assert sum(len(line.rows) for line in thresholds.lines) == len(rows)
    fermions, bosons = thresholds.lines
    assert (fermions.bosons, bosons.bosons) == (False, True)
    # Tc = 0.9405 hbar wbar N^(1/3)/k: the digits by hand for N = 1e5, as in the tests of `coldward state`.
    here = float(np.interp(math.log(1e5), np.log(thresholds.atoms), bosons.temperature))
    assert here == pytest.approx(138.36e-9, rel=2e-3)
    picture = thresholds_picture(thresholds, DEFAULT_PLAN)
    assert {curve.role for curve in picture.curves} == {Role.SECOND, Role.THRESHOLD}
    assert not LIGHT.lines[Role.THRESHOLD].dash
    assert LIGHT.lines[Role.SECOND].dash
    assert len(picture.labels) == 2
    assert [(mark.x, mark.y) for mark in picture.marks] == [(1e5, 2e-7)]
    near = line_near(thresholds, 1e5, 138e-9)
    assert near is bosons
    assert line_near(thresholds, 1e5, 1e-6) is None


def test_labels_stand_off_the_lines_and_crowded_lines_go_without(rows: tuple[CandidateRow, ...]) -> None:
    few = thresholds_of(rows, 1e5)
    for label in thresholds_picture(few, DEFAULT_PLAN).labels:
        assert (label.side, label.lift) in ((-1, 1), (1, -1))  # lines rise to the right
    scaled = [replace(line, temperature=line.temperature * 1.02**k) for k in range(6) for line in few.lines]
    crowded = replace(few, lines=tuple(scaled))
    roomy = thresholds_picture(crowded, DEFAULT_PLAN, text_height=0.002).labels
    tight = thresholds_picture(crowded, DEFAULT_PLAN, text_height=0.2).labels
    assert len(roomy) == 12
    assert 0 < len([label for label in tight if label.role is Role.THRESHOLD]) < 12
    assert not [label for label in tight if label.role is Role.SECOND]


def test_a_lifted_label_touches_its_place_with_one_edge() -> None:
    axis = Axis(label="", unit="", low=0.0, high=1.0)
    picture = Picture(title="", x=axis, y=axis, labels=tuple(
        Label(text=str(lift), role=Role.FIRST, x=0.5, y=0.5, side=-lift, lift=lift) for lift in (1, -1)
    ))  # fmt: skip
    (_, x_over, y_over), (_, x_under, y_under) = place_labels(picture, 200.0, 100.0, lambda text: (40.0, 10.0))
    assert (x_over, x_under) == (80.0, 120.0)
    assert y_over - 5.0 > 50.0 > y_under + 5.0


def test_other_starts_are_marked(rows: tuple[CandidateRow, ...]) -> None:
    own = CandidateChoice(
        key="41K", atoms=read_quantity("3e5", ATOM_NUMBER), temperature=read_quantity("150 nK", TEMPERATURE)
    )
    answer = candidates_answer(replace(DEFAULT_PLAN, candidates=CandidatesChoice(candidates=(own,))))
    assert answer is not None
    picture = thresholds_picture(thresholds_of(answer.rows, 1e5), DEFAULT_PLAN, answer.rows)
    assert [(mark.role, mark.x, mark.y) for mark in picture.marks[1:]] == [(Role.TRACK, 3e5, 1.5e-7)]


def test_unknown_numbers_stand_apart_with_their_reason(rows: tuple[CandidateRow, ...]) -> None:
    picture = ranked_picture(rows, "elastic_collision_rate", "1/s", True)
    assert picture.x.log
    known = [row for row in rows if row.cell("elastic_collision_rate").value > 0.0]
    assert len(picture.marks) == len(known)
    assert len(picture.labels) == len(rows) - len(known)
    values = [mark.x for mark in picture.marks]
    assert values == sorted(values, reverse=True)
    assert min(values) > 0.0
    # Best on top; every row has a name of its own.
    assert picture.marks[0].y == len(rows) - 1
    assert len(picture.y.names) == len(rows)
    texts = [label.text for label in picture.labels]
    assert any(text.startswith("zero: fermions in one spin state") for text in texts)
    assert any(text.startswith("unknown: needs") for text in texts)
    lowest_mark, highest_label = picture.marks[-1].y, max(label.y for label in picture.labels)
    assert lowest_mark == highest_label + 1.0


def test_marks_tell_how_sure_a_number_is(rows: tuple[CandidateRow, ...]) -> None:
    roles = {mark.role for mark in ranked_picture(rows, "scattering_length", "a0", True).marks}
    assert {Role.SEEN, Role.RECALLED} <= roles
    for theme in (LIGHT, DARK):
        assert [theme.lines[role].hollow for role in (Role.SEEN, Role.COMPUTED, Role.RECALLED, Role.ASSUMED)] == [
            False,
            False,
            True,
            True,
        ]


def test_an_unknown_three_body_loss_spans_what_the_ratio_may_be() -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "400(20) nK", "losses.background_lifetime": "30 s"})
    answer = candidates_answer(replace(plan, candidates=CandidatesChoice(keys=("41K", "87Rb", "84Sr"))))
    assert answer is not None
    picture = ranked_picture(answer.rows, "good_to_bad_ratio", "1", True)
    ceiling, spread = (next(c for c in picture.curves if c.role is role) for role in (Role.ASSUMED, Role.UNCERTAINTY))
    unknown = [row for row in answer.rows if row.cloud is not None and row.cloud.losses.losses.three_body is None]
    drawn = [row for row in unknown if row.cell("good_to_bad_at_ceiling").known]
    assert drawn
    bars = ceiling.x.reshape(-1, 3)[:, :2]
    assert sorted(map(tuple, bars)) == sorted(
        (row.cell("good_to_bad_at_ceiling").value, row.cell("good_to_bad_ratio").value) for row in drawn
    )
    assert picture.x.low < bars.min()
    # 5 % of T: the elastic rate goes as 1/T.
    low, high = spread.x.reshape(-1, 3)[0, :2]
    assert 1.0 < high / low < 1.3
    # In other columns there is nothing to span.
    other = ranked_picture(answer.rows, "mean_density", "1/cm^3", True)
    assert {curve.role for curve in other.curves} == {Role.UNCERTAINTY}
    exact = ranked_picture(answer.rows, "mass", "u", True)
    assert exact.curves == ()


def test_labels_keep_clear_of_lines_that_cross(rows: tuple[CandidateRow, ...]) -> None:
    few = thresholds_of(rows, 1e5)
    fermions = few.lines[0]
    rises = (0.0, 0.15, 0.35)
    crossing = [replace(fermions, temperature=fermions.temperature[16] * (few.atoms / 1e5) ** rise) for rise in rises]
    high, wide = 0.06, 0.012
    picture = thresholds_picture(replace(few, lines=tuple(crossing)), DEFAULT_PLAN, text_height=high, character=wide)
    assert len(picture.labels) >= 2
    lines = [np.log(line.temperature / picture.y.low) / math.log(picture.y.high / picture.y.low) for line in crossing]
    across = np.linspace(0.0, 1.0, few.atoms.size)
    for label in picture.labels:
        reach = 0.5 * wide * len(label.text)
        u = math.log(label.x / picture.x.low) / math.log(picture.x.high / picture.x.low) + label.side * reach
        v = math.log(label.y / picture.y.low) / math.log(picture.y.high / picture.y.low) + label.lift * 0.6 * high
        assert 0.5 * high < v < 1.0 - 0.5 * high
        for line in lines:
            along = np.interp(np.linspace(u - reach, u + reach, 25), across, line)
            assert np.min(np.abs(along - v)) > 0.5 * high


def test_a_score_is_ranked_like_a_column_and_an_empty_one_says_so(rows: tuple[CandidateRow, ...]) -> None:
    weights = (read_weight("scattering_length"),)
    scores = score_rows(rows, weights)
    picture = ranked_picture(rows, SCORE, "1", True, scores, weights, room=5)
    assert len(picture.marks) == sum(not math.isnan(score.value) for score in scores)
    assert picture.y.high - picture.y.low == pytest.approx(5.2)
    assert "first 5 of" in picture.note
    nothing = ranked_picture(rows, "evaporated_atoms", "1", True)
    assert nothing.marks == ()
    assert "No candidate has a number" in nothing.summary


def test_they_are_drawn(rows: tuple[CandidateRow, ...]) -> None:
    thresholds = thresholds_picture(thresholds_of(rows, 1e5), DEFAULT_PLAN)
    # The plan names no T/TF as its target, so that one is assumed; Tc rests on nothing but frequencies.
    assert [label.text for label in thresholds.labels] == ["23 species of bosons", "9 species of fermionsᵃ"]
    assert "fermions: T/TF = 0.5, assumed" in picture_bytes((thresholds,), "svg").decode()
    ranked = (ranked_picture(rows, "rethermalisation_time", "s", False), ranked_picture((), "mass", "u", True))
    assert "168Er mJ=-6" in picture_bytes(ranked, "svg").decode()
