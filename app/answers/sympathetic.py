"""The plan's ramp with its passenger: the first species evaporates, the passenger follows, both against time."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from app.answers.passenger import between_of, frequencies_caveat, passenger_of, passenger_plan, vertical_of
from app.answers.ramp_inputs import gas_of, losses_of, path_of, state_of, target_of
from app.choices import TargetChoice
from app.plan_field import PlanError
from physics.caveats import Severity, gravest_first
from physics.constants import boltzmann
from physics.mixture_caveats import (
    MixtureCaveat,
    MixtureCaveatKind,
    between_caveats,
    sympathetic_caveats,
)
from physics.pair_scattering import PairLength
from physics.species import State

if TYPE_CHECKING:
    from app.answers.ramp_start import RampStart
    from app.answers.watched_path import Tick
    from app.plan import Plan
    from physics.passenger import Passenger
    from physics.ramps import Ramp
    from physics.sympathetic import SympatheticCooling
    from physics.trap_path import TrapPath


@dataclass(frozen=True, kw_only=True, eq=False)
class SympatheticAnswer:
    """A simulated ramp with a passenger.

    states : of the first species and of the passenger
    run : columns, budget and end of both; the columns of the passenger may end earlier
    between : the scattering length between the two
    caveats : of the two together; those of the first alone are in the ramp's answer
    """

    plan: Plan
    states: tuple[State, State]
    run: SympatheticCooling
    between: PairLength
    caveats: tuple[MixtureCaveat, ...]

    @property
    def passenger_reduced_temperature(self) -> float:
        """T/Tc or T/TF of the passenger at the end of its columns; NaN where it was never held. [1]"""
        return self.run.passenger.final["reduced_temperature"]


def sympathetic_answer(plan: Plan, tick: Tick | None = None) -> SympatheticAnswer:
    """The plan's ramp with its passenger; a part of `ramp_answer`, which keeps it.

    Raises
    ------
    PlanError
        There is no passenger or no ramp; the scattering length between the two is not known; or no trap of the plan
        can follow the ramp.
    ValueError
        The first species has a scattering length that is needed and not known; or numbers that nothing can follow.
    """
    from app.answers.ramp import ramp_answer

    passenger_of(plan)
    found = ramp_answer(plan, None, tick)
    if found.passenger is None:
        raise PlanError(found.passenger_left_out)
    return found.passenger


def sympathetic_run(plan: Plan, start: RampStart, tick: Tick | None = None) -> SympatheticAnswer:
    """The same from the start of a ramp. A trap of beams and coils is surveyed along it for both species; `tick` is
    told how far that is, and `Cancelled` raised where it says to stop."""
    from physics.sympathetic import evaporate_with_passenger

    passenger, caveats = passenger_at(plan, start, tick)
    assert start.ramp is not None
    ramp, path = start.ramp, start.path
    own_path = passenger.path
    if tick is not None:
        from app.answers.watched_path import Progress, WatchedPath, surveys_along, watched_ramp

        progress = Progress(tick=tick, surveys=surveys_along(ramp, path) + surveys_along(ramp, own_path))
        ramp, path = watched_ramp(ramp, progress), WatchedPath(path=path, progress=progress)
        passenger = replace(passenger, path=WatchedPath(path=own_path, progress=progress))
    run = evaporate_with_passenger(
        gas_of(plan),
        start.atoms,
        start.temperature,
        ramp,
        path,
        passenger,
        losses=losses_of(plan),
        target=target_of(plan),
    )
    between = between_of(plan)
    return SympatheticAnswer(
        plan=plan,
        states=(state_of(plan), state_of(passenger_plan(plan))),
        run=run,
        between=between,
        caveats=gravest_first([*between_caveats(between), *caveats, *sympathetic_caveats(run)]),
    )


def passenger_at(plan: Plan, start: RampStart, tick: Tick | None = None) -> tuple[Passenger, list[MixtureCaveat]]:
    """The passenger at the start of a ramp, and what that leaves out. What was not measured of it at a measured cloud
    is as the ramp up to there is simulated.

    Raises
    ------
    PlanError
        The ramp goes into another trap; the passenger is not held any more at the measured cloud; or as of
        `passenger_in`.
    """
    if start.ramp is None or any(stage.transfer is not None for stage in start.ramp.stages):
        raise PlanError("a ramp that hands the cloud over to another trap is not computed with a second species")
    passenger, caveats = passenger_in(plan, tuple(_values_of_depth(start.ramp)))
    passenger, more = passenger_measured(plan, start, passenger, tick)
    return passenger, [*caveats, *more]


def passenger_or_none(plan: Plan, start: RampStart, tick: Tick | None = None) -> Passenger | None:
    """The same; None without one, and where the simulation of the ramp leaves it out and says why."""
    if plan.passenger is None:
        return None
    try:
        return passenger_at(plan, start, tick)[0]
    except ValueError:
        return None


def passenger_measured(
    plan: Plan, start: RampStart, passenger: Passenger, tick: Tick | None = None
) -> tuple[Passenger, list[MixtureCaveat]]:
    """The passenger with the atoms and the temperature that it has at a start, and what that leaves out."""
    if start.measured is None:
        return passenger, []
    choice = start.measured.choice
    atoms, temperature = choice.passenger_atoms, choice.passenger_temperature
    if atoms is not None and temperature is not None:
        return replace(passenger, atoms=atoms.value, temperature=temperature.value), []
    N, T = _simulated_until(plan, start, tick) or (passenger.atoms, passenger.temperature)
    found = replace(
        passenger,
        atoms=N if atoms is None else atoms.value,
        temperature=T if temperature is None else temperature.value,
    )
    return found, [MixtureCaveat(kind=MixtureCaveatKind.PASSENGER_AS_SIMULATED, severity=Severity.NOTE)]


def _simulated_until(plan: Plan, start: RampStart, tick: Tick | None) -> tuple[float, float] | None:
    """Atoms and temperature of the passenger where the rest of the ramp begins; None at its start."""
    from app.answers.ramp import ramp_answer

    assert start.measured is not None
    if start.begin == 0.0:
        return None
    # Without its target, lest it end before.
    whole = ramp_answer(replace(plan, target=TargetChoice(), measured=()), None, tick)
    if whole.passenger is None:
        raise PlanError(whole.passenger_left_out)
    run = whole.passenger.run.passenger
    if not len(run.time) or run.time[-1] < start.begin * (1.0 - 1e-9):
        label = start.measured.choice.label
        raise PlanError(
            f'by the simulation the passenger is not held any more at the measured cloud "{label}"; '
            "give measured.passenger_atoms and measured.passenger_temperature"
        )
    time = min(start.begin, float(run.time[-1]))
    atoms, temperature = (
        float(np.exp(np.interp(time, run.time, np.log(column)))) for column in (run.atoms, run.temperature)
    )
    return atoms, temperature


def passenger_in(plan: Plan, depths: Sequence[float] = ()) -> tuple[Passenger, list[MixtureCaveat]]:
    """The plan's passenger for the kinetics, and what it leaves out.

    depths : [J] to which a ramp moves the depth by itself

    Raises
    ------
    PlanError
        The scattering length between the two is not known, or as of `passenger_of`.
    """
    from physics.passenger import Passenger

    own, between = passenger_plan(plan), between_of(plan)
    if between.value is None:
        assert between.reason is not None
        raise PlanError(f"{between.reason.value}; give passenger.scattering_length")
    path, caveats = _path_of(own, depths)
    gas, vertical = gas_of(own), vertical_of(plan)
    passenger = Passenger(
        gas=gas,
        path=path,
        atoms=own.cloud.atoms.value,
        temperature=own.cloud.temperature.value,
        scattering_length=between.value,
        losses=losses_of(own),
        vertical=None if vertical is None else vertical[0],
    )
    if gas.scattering_length is None and passenger.colliding is not gas:
        caveats.append(MixtureCaveat(kind=MixtureCaveatKind.PASSENGER_LENGTH_UNKNOWN, severity=Severity.NOTE))
    if plan.trap.harmonic:
        caveats.append(frequencies_caveat(plan))
    return passenger, caveats


def _path_of(own: Plan, depths: Sequence[float]) -> tuple[TrapPath, list[MixtureCaveat]]:
    """The passenger's trap. Of given frequencies the depth is that of the plan, and stays where a ramp moves the depth
    by itself: that cuts the first species."""
    from physics.trap_path import DEPTH, HarmonicPath

    path = path_of(own)
    if not isinstance(path, HarmonicPath):
        return path, []
    if path.trap.depth is None:
        depth = max(depths)  # the ramp gives one, else it could not be followed
        trap = replace(path.trap, depth=depth)
        return replace(path, trap=trap), [_depth_caveat(MixtureCaveatKind.PASSENGER_DEPTH_UNKNOWN, depth)]
    if not math.isnan(path.standing[DEPTH]) and depths:
        return path, [_depth_caveat(MixtureCaveatKind.PASSENGER_DEPTH_STAYS, float(path.trap.depth))]
    return path, []


def _values_of_depth(ramp: Ramp) -> Iterator[float]:
    from physics.trap_path import DEPTH

    for stage in ramp.stages:
        for move in stage.moves:
            if move.control == DEPTH:
                yield move.last
                if move.start is not None:
                    yield move.start
                yield from (value for _, value in move.points)


def _depth_caveat(kind: MixtureCaveatKind, depth: float) -> MixtureCaveat:
    return MixtureCaveat(kind=kind, severity=Severity.NOTE, value=float(np.float64(depth) / boltzmann))
