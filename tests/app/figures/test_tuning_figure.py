"""The picture of magnetic tuning: where its marks stand, what is broken, and what a drag changes."""

from __future__ import annotations

import numpy as np
import pytest

from app.engine import cloud_answer, tuning_answer, usual_fields
from app.figures.picture import Mark, Picture, Role
from app.figures.tuning import length_there, tuning_picture, with_field
from app.plan import DEFAULT_PLAN, Plan, plan_with


def a_plan(key: str, **entries: str) -> Plan:
    return plan_with(DEFAULT_PLAN, {"species.key": key, **{f"species.{name}": text for name, text in entries.items()}})


def picture(plan: Plan) -> Picture:
    return tuning_picture(tuning_answer(plan, usual_fields(plan)), cloud_answer(plan))


def field_mark(shown: Picture) -> Mark:
    (mark,) = (mark for mark in shown.marks if mark.draggable)
    return mark


def test_the_present_field_is_a_mark_on_the_curve_that_can_be_dragged() -> None:
    shown = picture(a_plan("85Rb", field="163 G"))
    mark = field_mark(shown)
    curve = next(c for c in shown.curves if c.role is Role.FIRST)
    assert mark.x == pytest.approx(163)
    assert mark.y == pytest.approx(np.interp(163, curve.x, curve.y), rel=3e-3)
    assert "a = 153.1 a0 at 163 G" in shown.summary


def test_the_length_axis_is_symmetric_and_a_pole_breaks_the_curve() -> None:
    shown = picture(a_plan("39K"))
    assert shown.y.low == -shown.y.high
    curve = next(c for c in shown.curves if c.role is Role.FIRST)
    for pole in (25.85, 402.7, 752.3):
        assert np.isnan(curve.y[np.argmin(np.abs(curve.x - pole))])
    poles = next(c for c in shown.curves if c.role is Role.CLASSICAL)
    assert sorted(set(poles.x[np.isfinite(poles.x)])) == pytest.approx([25.85, 402.7, 752.3])
    zeros = [mark.x for mark in shown.marks if mark.role is Role.THRESHOLD]
    assert any(zero == pytest.approx(350.7, abs=0.1) for zero in zeros)
    assert sum(label.text == "no data" for label in shown.labels) == 2


@pytest.mark.parametrize("key", ["39K", "85Rb", "6Li", "133Cs"])
def test_fields_of_resonances_stand_where_the_curve_does_not_rise(key: str) -> None:
    shown = picture(a_plan(key))
    curve = next(c for c in shown.curves if c.role is Role.FIRST)
    poles = [label for label in shown.labels if label.text.endswith(" G")]
    assert poles
    for label in poles:
        near = curve.x[np.isfinite(curve.y) & ((curve.x - label.x) * label.side > 0.0)]
        if near.size:
            beside = near[np.argmin(np.abs(near - label.x))]
            assert curve.y[curve.x == beside][0] < 0.0, label.text


def test_a_typed_length_is_a_line_across_and_leaves_no_field_to_drag() -> None:
    shown = picture(a_plan("6Li", scattering_length="-290 a0"))
    line = next(c for c in shown.curves if c.role is Role.CLOUD)
    assert line.y == pytest.approx([-290, -290])
    assert (line.x[0], line.x[-1]) == (shown.x.low, shown.x.high)
    assert not any(mark.draggable for mark in shown.marks)
    beyond = picture(a_plan("85Rb", scattering_length="90000 a0"))
    assert beyond.y.high > 90000


def test_where_the_curve_has_left_the_plot_the_mark_stays_at_its_edge() -> None:
    at_pole, near, unknown = (
        field_mark(picture(plan))
        for plan in (a_plan("85Rb", field="155.041 G"), a_plan("85Rb", field="155 G"), a_plan("133Cs", field="300 G"))
    )
    top = picture(a_plan("85Rb")).y.high
    assert 0.9 * top < at_pole.y < top
    assert -top < near.y < -0.9 * top
    assert unknown.y == 0.0


def test_moving_the_field_changes_its_mark_and_nothing_else() -> None:
    ground = picture(a_plan("85Rb", field="163 G"))
    moved = with_field(ground, cloud_answer(a_plan("85Rb", field="170 G")))
    assert field_mark(moved).x == pytest.approx(170)
    assert (moved.x, moved.y, moved.title) == (ground.x, ground.y, ground.title)
    assert all(one is other for one, other in zip(moved.curves, ground.curves, strict=True))
    assert len(moved.marks) == len(ground.marks)


def test_the_pointer_reads_the_length_where_the_data_have_one() -> None:
    answer = tuning_answer(a_plan("133Cs"))
    assert length_there(answer, 21e-4) == "211.3 a0"
    assert length_there(answer, 300e-4) == ""


def test_a_state_that_no_field_tunes_has_no_picture() -> None:
    plan = a_plan("174Yb")
    with pytest.raises(ValueError, match="no field tunes 174Yb"):
        tuning_picture(tuning_answer(plan), cloud_answer(plan))
