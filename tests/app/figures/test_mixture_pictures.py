"""Pictures of a mixture: heights, names and distances of two clouds; both along a ramp."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from app.answers.mixture_profiles import MixtureProfiles, mixture_profiles
from app.answers.ramp import ramp_answer
from app.answers.sympathetic import SympatheticAnswer
from app.figures.mixture_courses import (
    DEGENERACY,
    MIXTURE_COLUMNS,
    OVERLAP,
    RELAXATION,
    TEMPERATURE,
    Line,
    course_picture,
    lines_of,
)
from app.figures.mixture_profiles import mixture_picture
from app.figures.picture import Picture, Role
from app.plan import Plan
from app.plan_file import parse_plan

PLAN = """
coldward = 1
[species]
key = "87Rb"
state = "F=2 mF=+2"
[trap]
frequencies = ["120 Hz", "120 Hz", "60 Hz"]
depth = "60 uK"
[cloud]
atoms = "3e6"
temperature = "6 uK"
[[ramp.stage]]
duration = "2 s"
control = "scale"
end = 0.3
[passenger.species]
key = "40K"
state = "F=9/2 mF=+9/2"
[passenger.cloud]
atoms = "1e5"
temperature = "8 uK"
"""
NAMES = ("87Rb", "40K")


@pytest.fixture(scope="module")
def plan() -> Plan:
    return parse_plan(PLAN, "test")


@pytest.fixture(scope="module")
def run(plan: Plan) -> SympatheticAnswer:
    found = ramp_answer(plan).passenger
    assert found is not None
    return found


def gaussians(centre: float) -> MixtureProfiles:
    """Two Gaussian clouds of rms radii 3 and 4 µm, the second one higher by `centre` [m]."""
    z = np.linspace(-2e-5, 2e-5, 401)
    first, second = np.exp(-0.5 * (z / 3e-6) ** 2), np.exp(-0.5 * ((z - centre) / 4e-6) ** 2)
    return MixtureProfiles(
        heights=z, centres=(0.0, centre), densities=(4e19 * first, 1e18 * second), peaks=(4e19, math.nan)
    )


def line(picture: Picture, role: Role) -> tuple[np.ndarray, np.ndarray]:
    return next((curve.x, curve.y) for curve in picture.curves if curve.role is role)


def test_both_clouds_reach_one_where_they_are_densest() -> None:
    picture = mixture_picture(gaussians(5e-6), NAMES)
    for role, height in ((Role.FIRST, 0.0), (Role.SECOND, 5.0)):
        x, y = line(picture, role)
        assert np.max(x) == 1.0
        assert y[np.argmax(x)] == pytest.approx(height)


def test_where_both_meet_is_the_product_whose_peak_lies_by_the_widths_between_them() -> None:
    x, y = line(mixture_picture(gaussians(5e-6), NAMES), Role.FRACTION)
    assert y[np.argmax(x)] == pytest.approx(5.0 * 9.0 / 25.0)  # of two Gaussians: weighted by 1/sigma^2
    assert np.max(x) == pytest.approx(math.exp(-0.5 * 25.0 / 25.0))  # exp(-d^2/(2 (s1^2 + s2^2)))


def test_names_stand_outside_the_two_curves_and_an_unknown_peak_is_left_out() -> None:
    labels = {label.role: label for label in mixture_picture(gaussians(5e-6), NAMES).labels}
    assert labels[Role.FIRST].text == "87Rb, peak 4.00e13 cm⁻³"
    assert labels[Role.SECOND].text == "40K"
    assert labels[Role.SECOND].y > 5.0 > 0.0 > labels[Role.FIRST].y
    assert labels[Role.STAGE].text == "minima 5.00 µm apart"
    upside_down = {label.role: label for label in mixture_picture(gaussians(-5e-6), NAMES).labels}
    assert upside_down[Role.SECOND].y < -5.0 < 0.0 < upside_down[Role.FIRST].y


def test_concentric_clouds_have_no_distance(plan: Plan) -> None:
    profiles = mixture_profiles(plan)
    assert profiles is not None
    picture = mixture_picture(profiles, NAMES)
    assert {curve.role for curve in picture.curves} == {Role.FRACTION, Role.FIRST, Role.SECOND}
    assert [label.role for label in picture.labels] == [Role.FIRST, Role.SECOND]


def test_all_quantities_along_the_ramp_start_and_end_as_the_simulation(run: SympatheticAnswer) -> None:
    for column in MIXTURE_COLUMNS:
        lines = lines_of(run, column, NAMES)
        picture = course_picture(column, lines, 2.5, (2.0,))
        drawn = [curve for curve in picture.curves if curve.role in (Role.FIRST, Role.SECOND, Role.TOTAL)]
        assert len(drawn) == len(lines) == (1 if column in (OVERLAP, RELAXATION) else 2)
        for curve, one in zip(drawn, lines, strict=True):
            assert curve.y[[0, -1]] == pytest.approx(one.values[[0, -1]])
            assert picture.y.low <= np.nanmin(curve.y)
            assert np.nanmax(curve.y) <= picture.y.high
        assert [curve.x[0] for curve in picture.curves if curve.role is Role.STAGE] == [2.0]
    temperatures = lines_of(run, TEMPERATURE, NAMES)
    assert temperatures[1].values[0] == pytest.approx(8e-6)
    fermions = lines_of(run, DEGENERACY, NAMES)[1]
    assert fermions.last == pytest.approx(run.passenger_reduced_temperature)


def test_without_collisions_no_time_is_drawn(run: SympatheticAnswer) -> None:
    none = np.full_like(run.run.contact.relaxation_time, np.nan)
    contact = replace(run.run.contact, relaxation_time=none)
    picture = course_picture(
        RELAXATION, lines_of(replace(run, run=replace(run.run, contact=contact)), RELAXATION, NAMES), 2.5, ()
    )
    (curve,) = picture.curves
    assert np.all(np.isnan(curve.y))
    assert picture.note == "→ –"


def test_a_passenger_that_is_lost_ends_earlier_and_has_no_value_after() -> None:
    first = Line(name="87Rb", role=Role.FIRST, time=np.array([0.0, 2.0]), values=np.array([2e-6, 1e-6]))
    lost = Line(name="40K", role=Role.SECOND, time=np.array([0.0, 1.0]), values=np.array([2e-6, 1.5e-6]))
    picture = course_picture(TEMPERATURE, (first, lost), 2.5, (), cursor=1.5)
    assert picture.note == "1.25 µK, –"
    assert len(picture.marks) == 1
    assert all(label.x <= 1.0 for label in picture.labels)
    before = course_picture(TEMPERATURE, (first, lost), 2.5, (), cursor=1.0)
    assert before.note == "1.50, 1.50 µK"


def test_a_time_is_read_in_the_unit_that_suits_it() -> None:
    assert [RELAXATION.text(value) for value in (9.93e-3, 1.2, 2e-6)] == ["9.93 ms", "1.20 s", "2.00 µs"]


def test_a_passenger_that_is_never_held_is_not_named() -> None:
    first = Line(name="87Rb", role=Role.FIRST, time=np.array([0.0, 2.0]), values=np.array([2e-6, 1e-6]))
    none = Line(name="40K", role=Role.SECOND, time=np.empty(0), values=np.empty(0))
    picture = course_picture(TEMPERATURE, (first, none), 2.5, ())
    assert picture.labels == ()
    assert picture.note == "→ 1.00 µK, –"
