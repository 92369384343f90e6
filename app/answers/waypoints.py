"""Clouds to aim at along a plan's ramp, at chosen phase-space densities; from an assumed efficiency without a ramp."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.answers.ramp import ramp_answer
from app.answers.ramp_design import design_target, usual_control
from app.answers.ramp_inputs import gas_of, limits_of, losses_of, measured_clouds, path_of, ramp_of, target_of
from app.answers.ramp_start import require_collisions, start_of
from app.answers.sympathetic import passenger_or_none
from app.plan_field import PlanError

if TYPE_CHECKING:
    from app.answers.watched_path import Tick
    from app.plan import Plan
    from physics.gas import Gas
    from physics.species import State
    from physics.waypoints import Departure, Waypoint

EXPANSION_TIME = 0.015
"""[s] After which widths are given where nothing else is asked for."""

MOST_WAYPOINTS = 8
_NEARLY = 0.998


@dataclass(frozen=True, kw_only=True, eq=False)
class WaypointsAnswer:
    """Clouds to aim at.

    points : in the order of the densities that were asked for
    missed : densities that are not reached
    expansion_time : [s] of the widths
    efficiency : the assumed one, where there is no ramp; else None
    passenger : the second species along the ramp; None without one
    """

    gas: Gas
    points: tuple[Waypoint, ...]
    missed: tuple[float, ...]
    expansion_time: float
    efficiency: float | None
    passenger: State | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class DeparturesAnswer:
    """What the rest of the ramp makes of a cloud that is off at a waypoint by its relative errors [1].

    source : label of the measured cloud that has these errors; empty: the cloud of the plan
    departures : as planned first; empty for a waypoint at the end of the ramp, or without errors
    """

    waypoint: Waypoint
    atoms_error: float
    temperature_error: float
    source: str
    departures: tuple[Departure, ...]


def waypoints_answer(
    plan: Plan,
    densities: tuple[float, ...] = (),
    expansion_time: float = EXPANSION_TIME,
    *,
    since: str | None = None,
    tick: Tick | None = None,
) -> WaypointsAnswer:
    """N, T, controls, time, collision rate and widths at peak phase-space densities.

    densities : empty: decades between start and end
    since, tick : as of `ramp_answer`

    Raises
    ------
    PlanError
        The plan has neither a ramp nor an efficiency.
    """
    from physics.waypoints import assumed_waypoints, waypoints

    gas, passenger = gas_of(plan), None
    if plan.ramp:
        answer = ramp_answer(plan, since, tick)
        run, together = answer.run, answer.passenger
        densities = densities or usual_densities(run.rows.peak_phase_space_density)
        points = waypoints(run, densities, expansion_time, None if together is None else together.run.passenger)
        passenger = None if together is None else together.states[1]
        efficiency = None
    elif plan.target.efficiency is not None:
        require_collisions(plan)
        efficiency, control = plan.target.efficiency.value, usual_control(plan, since)
        start = start_of(plan, since, ramp=False)
        densities = densities or _decades(_density_now(plan), _density_wanted(plan))
        points = assumed_waypoints(
            gas, start.atoms, start.temperature, start.path, control, densities, efficiency, expansion_time,
            limits=limits_of(plan, control, start.path.standing),
        )  # fmt: skip
    else:
        raise PlanError("waypoints need a ramp, or target.efficiency for a quick estimate")
    found = {point.phase_space_density for point in points}
    return WaypointsAnswer(
        gas=gas,
        points=points,
        missed=tuple(density for density in densities if density not in found),
        expansion_time=expansion_time,
        efficiency=efficiency,
        passenger=passenger,
    )


def usual_densities(column: object) -> tuple[float, ...]:
    """Round phase-space densities between the first and the highest of a ramp, and that one."""
    import numpy as np

    values = np.asarray(column, dtype=float)
    values = values[np.isfinite(values)]
    if not len(values):
        return ()
    return _decades(float(values[0]), float(np.max(values)))


def _decades(low: float, high: float) -> tuple[float, ...]:
    """Powers of ten between, or 1, 2, 5 where these are few; with the highest."""
    if not 0.0 < low < high:
        return (high,) if high > 0.0 else ()
    exponents = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    steps = (1.0,) if math.log10(high / low) > MOST_WAYPOINTS / 3.0 else (1.0, 2.0, 5.0)
    found = [float(f"{step:g}e{k}") for k in exponents for step in steps]
    # A little below the highest: that of bosons saturates, and hardly grows any more for the rest of the ramp.
    return (*(value for value in found if 1.02 * low < value < 0.98 * high), high * _NEARLY)


def _density_now(plan: Plan) -> float:
    from app.answers.cloud import cloud_answer

    return float(cloud_answer(plan).equilibrium.peak_phase_space_density)


def _density_wanted(plan: Plan) -> float:
    target, _ = design_target(plan)
    return target.peak_phase_space_density or (2.6 if gas_of(plan).bosons else 1.0)


def errors_at(plan: Plan, time: float) -> tuple[float, float, str]:
    """Relative errors of N and T to reckon with at a time of the ramp: of the measured cloud nearest to it that states
    them, else of the plan's cloud; 0 where none is stated. With the label of the measured cloud."""
    stated = [c for c in measured_clouds(plan) if c.atoms_sigma or c.temperature_sigma]
    if stated:
        cloud = min(stated, key=lambda c: abs((c.time or 0.0) - time))
        return (
            (cloud.atoms_sigma or 0.0) / cloud.atoms,
            (cloud.temperature_sigma or 0.0) / cloud.temperature,
            cloud.choice.label,
        )
    atoms, temperature = plan.cloud.atoms, plan.cloud.temperature
    return (atoms.sigma or 0.0) / atoms.value, (temperature.sigma or 0.0) / temperature.value, ""


def departures_answer(
    plan: Plan, waypoint: Waypoint, errors: tuple[float, float] | None = None, tick: Tick | None = None
) -> DeparturesAnswer:
    """What follows if N or T at a waypoint of the plan's ramp is off.

    errors : relative ones of N and T; None: `errors_at`
    tick : as of `ramp_answer`; surveys of the rest of a ramp count
    """
    from physics.waypoints import departures

    atoms_error, temperature_error, source = errors_at(plan, waypoint.time)
    if errors is not None:
        (atoms_error, temperature_error), source = errors, ""
    found: tuple[Departure, ...] = ()
    if atoms_error > 0.0 or temperature_error > 0.0:
        ramp, path = ramp_of(plan), path_of(plan)
        passenger, then = None, waypoint.passenger
        if then is not None:
            passenger = passenger_or_none(plan, start_of(plan))
        if passenger is not None and then is not None:
            passenger = replace(passenger, atoms=then.atoms, temperature=then.temperature)
        if tick is not None:
            from app.answers.watched_path import Progress, WatchedPath, surveys_along, watched_ramp

            runs = 1 + 2 * (atoms_error > 0.0) + 2 * (temperature_error > 0.0)
            progress = Progress(tick=tick, surveys=runs * surveys_along(ramp, path), part=1.0)
            ramp, path = watched_ramp(ramp, progress), WatchedPath(path=path, progress=progress)
            if passenger is not None:
                passenger = replace(passenger, path=WatchedPath(path=passenger.path, progress=progress))
        found = departures(
            waypoint, gas_of(plan), ramp, path,
            atoms_error=atoms_error, temperature_error=temperature_error,
            losses=losses_of(plan), target=target_of(plan), passenger=passenger,
        )  # fmt: skip
    return DeparturesAnswer(
        waypoint=waypoint,
        atoms_error=atoms_error,
        temperature_error=temperature_error,
        source=source,
        departures=found,
    )
