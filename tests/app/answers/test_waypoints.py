"""Waypoints along a ramp, departures from them, and which input counts most."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.answers.ramp import ramp_answer
from app.answers.ramp_sensitivity import sensitivity_answer
from app.answers.waypoints import departures_answer, errors_at, usual_densities, waypoints_answer
from app.plan import Plan, PlanError


def test_waypoints_of_the_ramp(plan: Plan) -> None:
    found = waypoints_answer(plan, (0.05, 0.5, 50.0), 0.02)
    assert [point.phase_space_density for point in found.points] == [0.05, 0.5]
    assert found.missed == (50.0,)
    run = ramp_answer(plan).run
    for point in found.points:
        between = np.interp(point.time, run.time, np.log(run.atoms))
        assert point.atoms == pytest.approx(np.exp(between), rel=1e-3)
    usual = waypoints_answer(plan)
    assert not usual.missed
    assert usual.points[-1].time == pytest.approx(run.time[-1], rel=1e-3)


def test_usual_waypoints_are_round() -> None:
    assert usual_densities([3e-7, 0.1, 2.5])[:3] == (1e-6, 1e-5, 1e-4)
    assert usual_densities([0.15, 2.5])[:4] == (0.2, 0.5, 1.0, 2.0)
    assert usual_densities([np.nan]) == ()


def test_waypoints_without_a_ramp_need_an_efficiency(plan: Plan) -> None:
    quick = replace(plan, ramp=(), measured=())
    found = waypoints_answer(quick, (0.05, 0.5))
    assert found.efficiency == 3.0
    first, second = found.points
    assert np.isnan(first.time)
    # gamma is that of the classical density, which near the threshold is below the quantum one.
    steps = np.log(second.atoms / first.atoms)
    classical = np.log((second.atoms / first.atoms) / (second.temperature / first.temperature) ** 1.5)
    assert classical > 0.0 > steps
    with pytest.raises(PlanError, match=r"waypoints need a ramp, or target.efficiency"):
        waypoints_answer(replace(quick, target=replace(plan.target, efficiency=None)))


def test_departures_use_the_errors_of_the_nearest_measured_cloud(plan: Plan) -> None:
    point = waypoints_answer(plan, (0.2,)).points[0]
    found = departures_answer(plan, point)
    assert found.source == "After stage 2"
    assert (found.atoms_error, found.temperature_error) == (pytest.approx(0.1 / 1.1), pytest.approx(0.04))
    planned, less, more, colder, hotter = (one.run.final["atoms"] for one in found.departures)
    assert planned == pytest.approx(ramp_answer(plan).run.final["atoms"], rel=2e-3)
    assert less < planned < more
    assert colder > planned > hotter
    own = replace(plan, measured=())
    assert errors_at(own, 0.1) == (pytest.approx(0.1), pytest.approx(0.04), "")
    exact = replace(
        own, cloud=replace(plan.cloud, atoms=plan.measured[2].atoms, temperature=plan.measured[1].temperature)
    )
    assert departures_answer(exact, point).departures == ()
    assert len(departures_answer(exact, point, (0.1, 0.0)).departures) == 3


def test_what_counts_most(plan: Plan) -> None:
    found = sensitivity_answer(plan).found
    assert found[0].input.label == "atoms"
    slopes = [abs(one.slope) for one in found if not one.changes_end]
    assert slopes == sorted(slopes, reverse=True)
    assert sensitivity_answer(plan) is sensitivity_answer(replace(plan, title="other"))
