"""Sympathetic cooling: one gas evaporates along a ramp, a second in the same trap follows through its collisions with
the first.

Each gas has its own number and temperature, its own trap (frequencies, depth, sag) at the same controls, and its own
losses. Heat flows between two classical Gaussian clouds by the rate of their collisions [1], and what one gains the
other loses. Atoms of either also leave where a collision with the other kind lifts them over their depth: as often as
collisions of their own kind would, less where the masses differ. For equal masses, traps and depths that is as good as
the kinetics of one gas; for others it is an estimate, as is all of it once a cloud is degenerate. Losses in collisions
of the two kinds are not counted: hardly any are known.

Contact may be much faster than the ramp. Steps are linearly implicit, so that it costs no more when it is.

Reference
---------
[1] M. Mudrich, S. Kraft, K. Singer, R. Grimm, A. Mosk, M. Weidemueller, Phys. Rev. Lett. 88, 253001 (2002).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.checks import Floats
from physics.contact import Contact, ContactNow, Placement
from physics.evaporation import ROWS, Limits, Run, Solver, require_start
from physics.evaporation_rates import FEWEST_ATOMS, CloudNow, Kinetics
from physics.evaporation_target import Target
from physics.evaporation_track import VARIABLES, EndReason, Evaporation, Mark, Track
from physics.gas import Gas
from physics.interspecies import PairCollisions
from physics.losses import Losses
from physics.passenger import Passenger
from physics.ramp_shapes import Course
from physics.ramps import Control, Placed, Ramp
from physics.rosenbrock import StiffIntegrator
from physics.runge_kutta import OutOfRange
from physics.stage_trap import StageTrap
from physics.trap_path import TrapPath

TOLERANCE = 1e-6
"""Error of a step, in ln N and ln E of both."""


@dataclass(frozen=True, kw_only=True, eq=False)
class ContactRows:
    """Columns of the contact, beside those of the passenger, in SI units.

    Attributes
    ----------
    overlap_share : overlap over that of the same clouds around one centre. [1]
    distance : of the minima. [m]
    coolant_collision_rate, passenger_collision_rate : collisions with the other kind, per atom of each. [1/s]
    relaxation_time : in which the difference of the temperatures falls by e. [s] NaN without collisions.
    """

    overlap_share: Floats
    distance: Floats
    coolant_collision_rate: Floats
    passenger_collision_rate: Floats
    relaxation_time: Floats


@dataclass(frozen=True, kw_only=True, eq=False)
class SympatheticCooling:
    """Two gases along one ramp.

    Attributes
    ----------
    coolant : Evaporation. As of `evaporate`; its `reason` is that of the whole simulation.
    passenger : Evaporation. Its rows end where it is lost, and its `reason` then says so.
    contact : ContactRows, one for each row of the passenger.
    collisions : PairCollisions
    """

    coolant: Evaporation
    passenger: Evaporation
    contact: ContactRows
    collisions: PairCollisions


def evaporate_with_passenger(
    gas: Gas,
    atoms: float,
    temperature: float,
    ramp: Ramp,
    path: TrapPath,
    passenger: Passenger,
    *,
    losses: Losses | None = None,
    target: Target | None = None,
    fewest_atoms: float = FEWEST_ATOMS,
    rows: int = ROWS,
    tolerance: float = TOLERANCE,
    tick: Callable[[float], bool] | None = None,
) -> SympatheticCooling:
    """Simulate a ramp with a second gas in the trap.

    Parameters
    ----------
    passenger : Passenger. The second gas.
    target : Target or None. Of the first gas.
    The others are those of `physics.evaporation.evaporate`, and describe the first gas.

    Raises
    ------
    ValueError : as `evaporate`; also for a ramp into another trap, or a trap without frequencies.
    """
    require_start(atoms, temperature)
    _ = gas.cold_cross_section
    lead, rider = Track(gas, losses or Losses()), Track(passenger.colliding, passenger.losses)
    collisions = PairCollisions(masses=(gas.mass, passenger.gas.mass), scattering_length=passenger.scattering_length)
    limits = Limits(target=target, fewest_atoms=fewest_atoms, tolerance=tolerance)
    run = _SharedRun(lead, path, limits, rider, passenger, collisions)
    reason = run.follow(ramp, (atoms, temperature), rows, tick)
    return SympatheticCooling(
        coolant=lead.finished(reason),
        passenger=rider.finished(run.lost or reason),
        contact=_contact_rows(run.contacts),
        collisions=collisions,
    )


class _Lost(Enum):
    """An end of its own of the passenger."""

    ATOMS = "atoms of the passenger lost"


class _Together:
    """Two gases in contact along a stretch."""

    def __init__(
        self,
        tracks: tuple[Track, Track],
        kinetics: tuple[Kinetics, Kinetics],
        contact: Contact,
        fewest: float,
        contacts: list[ContactNow],
        courses: Mapping[Control, Course],
    ) -> None:
        self.tracks, self.kinetics, self.contact = tracks, kinetics, contact
        self.fewest, self.contacts, self.courses = fewest, contacts, courses

    def variables(self) -> Floats:
        return np.concatenate([track.variables() for track in self.tracks])

    def solver(self, tolerance: float, smallest: float) -> Solver:
        # Less energy an atom: towards where there is a cloud.
        shift = 1e-6
        return StiffIntegrator(
            derivatives=self.derivatives,
            shifts={0: shift, 1: -shift, VARIABLES: shift, VARIABLES + 1: -shift},
            tolerance=tolerance,
            scales=np.concatenate([track.scales() for track in self.tracks]),
            smallest=smallest,
        )

    def clouds(self, time: float, values: Floats) -> tuple[CloudNow, CloudNow, ContactNow]:
        if not np.all(np.abs(values[[0, 1, VARIABLES, VARIABLES + 1]]) < 700.0):
            raise OutOfRange
        a, b = (
            kinetics.cloud(time, math.exp(values[at]), math.exp(values[at + 1]))
            for kinetics, at in zip(self.kinetics, (0, VARIABLES), strict=True)
        )
        now = self.contact.now(a, b)
        return *self.contact.joined(a, b, now), now

    def derivatives(self, time: float, values: Floats) -> list[float]:
        first, second, _ = self.clouds(time, values)
        return self.kinetics[0].flows(first) + self.kinetics[1].flows(second)

    def lead(self, time: float, values: Floats) -> CloudNow:
        return self.clouds(time, values)[0]

    def ends(self, values: Floats) -> dict[Enum, float]:
        return {_Lost.ATOMS: math.exp(values[VARIABLES]) / self.fewest - 1.0}

    def settle(self, values: Floats) -> None:
        self.tracks[0].settle(values[:VARIABLES])
        self.tracks[1].settle(values[VARIABLES:])

    def keep(self, placed: Placed, rows: Iterator[tuple[float, Floats]]) -> None:
        times: list[float] = []
        clouds: tuple[list[CloudNow], list[CloudNow]] = ([], [])
        for time, values in rows:
            try:
                first, second, now = self.clouds(time, values)
            except OutOfRange:
                continue
            times.append(time)
            clouds[0].append(first)
            clouds[1].append(second)
            self.contacts.append(now)
        for index, courses in enumerate((placed.courses, self.courses)):
            controls = {control: course.values(np.array(times)) for control, course in courses.items()}
            self.tracks[index].keep(placed, self.kinetics[index], times, clouds[index], controls)


class _SharedRun(Run):
    """A simulation with a passenger, as long as there is one."""

    def __init__(
        self,
        track: Track,
        path: TrapPath,
        limits: Limits,
        rider: Track,
        passenger: Passenger,
        collisions: PairCollisions,
    ) -> None:
        super().__init__(track, path, limits)
        self.rider, self.passenger, self.collisions = rider, passenger, collisions
        self.lost: EndReason | None = None
        self.contacts: list[ContactNow] = []
        self._mark: Mark | None = None

    def begin(self, placed: Placed) -> Mark:
        if placed.stage.transfer is not None:
            raise ValueError(
                f"stage {placed.number + 1} goes into another trap, which is not computed with a second species"
            )
        rider, courses = self.rider, self.passenger.courses(placed)
        point = self.passenger.path.at({control: course.value(0.0) for control, course in courses.items()})
        if placed.number == 0:
            rider.start(self.passenger.atoms, self.passenger.temperature, point)
        self._mark = rider.mark()
        if self.lost is None:
            if point.depth is None:
                self._lose(EndReason.NOT_TRAPPED, point.reason)
            elif not rider.hand_over(point, None, self.limits.fewest_atoms):
                self._lose(EndReason.NOT_TRAPPED, rider.explanation)
        return super().begin(placed)

    def end(self, placed: Placed, before: Mark, time: float) -> None:
        super().end(placed, before, time)
        assert self._mark is not None
        self.rider.summarise(placed, self._mark, time)
        courses = self.passenger.courses(placed)
        values = {control: course.value(placed.stage.duration) for control, course in courses.items()}
        self.rider.point = self.passenger.path.at(values) if self.lost is None else None

    def stretch(self, placed: Placed, begin: float, end: float, count: int) -> tuple[float, EndReason | None]:
        if self.lost is not None:
            return super().stretch(placed, begin, end, count)
        track, rider = self.track, self.rider
        courses = self.passenger.courses(placed)
        trap = StageTrap(placed.courses, self.path, begin, end)
        own = StageTrap(courses, self.passenger.path, begin, end)
        finish, reason = begin, None
        until = min(trap.end, own.end)
        if until > begin:
            vertical = self.passenger.vertical
            system = _Together(
                (track, rider),
                (Kinetics(track.gas, track.losses, trap), Kinetics(rider.gas, rider.losses, own)),
                Contact(
                    collisions=self.collisions,
                    placements=(
                        Placement(trap.places, trap.points, vertical),
                        Placement(own.places, own.points, vertical),
                    ),
                    spin_components=(track.gas.spin_components, rider.gas.spin_components),
                ),
                self.limits.fewest_atoms,
                self.contacts,
                courses,
            )
            finish, found = self.advance(placed, system, trap.bottom_exponent, (begin, until), count)
            if isinstance(found, _Lost):
                self._lose(EndReason.ATOMS, "")
            elif isinstance(found, EndReason) and found is not EndReason.NOT_TRAPPED:
                return finish, found
            elif found is None and finish >= end:
                return finish, None
        # One of the two is not held any more: the first goes on if it is not the one.
        left = max(4, round(count * (end - finish) / (end - begin)))
        last, reason = super().stretch(placed, finish, end, left)
        if self.lost is None and last > finish:
            self._lose(EndReason.NOT_TRAPPED, own.reason or "too hot for its depth")
        return last, reason

    def _lose(self, reason: EndReason, explanation: str) -> None:
        self.lost, self.rider.explanation = reason, explanation


def _contact_rows(contacts: list[ContactNow]) -> ContactRows:
    rates = np.array([now.rates for now in contacts]).reshape(-1, 2)
    relaxation = np.array([now.relaxation for now in contacts])
    return ContactRows(
        overlap_share=np.array([now.share for now in contacts]),
        distance=np.array([now.displacement for now in contacts]),
        coolant_collision_rate=rates[:, 0],
        passenger_collision_rate=rates[:, 1],
        relaxation_time=np.divide(1.0, relaxation, out=np.full(len(contacts), np.nan), where=relaxation > 0.0),
    )
