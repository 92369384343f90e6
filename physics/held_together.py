"""Evaporation at a held truncation parameter with a second gas in the trap, whose heat the first has to carry off.

As `physics.held_truncation`, with number and energy of the passenger as two more variables. Control and truncation
parameter are those of the first gas; the passenger's trap follows the same control, and its heat, and the collisions
that lift atoms of either over their depth, are those of `physics.sympathetic`.

Contact much faster than evaporation counts as only some twenty times as fast: the passenger then lags by a few percent
and hands over the same heat, and steps need not be as short as the contact.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.contact import Contact, Placement
from physics.evaporation_rates import FEWEST_ATOMS, CloudNow, Kinetics
from physics.gas import Gas
from physics.held_truncation import (
    HeldKinetics,
    Law,
    Limits,
    Line,
    Still,
    cloud_at,
    growth,
    held_along,
)
from physics.interspecies import PairCollisions
from physics.losses import Losses
from physics.passenger import Passenger
from physics.stage_trap import TrapCurve
from physics.trap_path import TrapPoint, points_between

FASTEST_CONTACT = 20.0
"""Relaxation of the two temperatures, over the rate at which the first gas by itself turns over its energy, above which
it makes no difference to the heat that is handed over."""

_SECOND = 3  # of the variables: ln N, ln E, place, then ln N and ln E of the passenger


class _Traps(NamedTuple):
    """The passenger's trap along the line, and where both are."""

    second: TrapCurve
    placements: tuple[Placement, Placement]


class HeldTogether(HeldKinetics):
    """The kinetics of both with the place of the control.

    Parameters
    ----------
    line : Line. Of the first gas. The range ends where the passenger is not held any more.
    passenger : Passenger

    Raises
    ------
    ValueError : for a passenger that is not held where the control stands, or a trap without frequencies.
    """

    def __init__(
        self,
        gas: Gas,
        losses: Losses,
        line: Line,
        limits: Limits,
        passenger: Passenger,
        *,
        traps: _Traps | None = None,
    ) -> None:
        super().__init__(gas, losses, line, limits)
        self.passenger, self._traps = passenger, traps or _traps_of(passenger, line)
        self._second = self._traps.second
        self._rider = Kinetics(passenger.colliding, passenger.losses, Still(self._second))
        self.low = max(self.low, self._second.low)
        self._contact = Contact(
            collisions=PairCollisions(
                masses=(gas.mass, passenger.gas.mass), scattering_length=passenger.scattering_length
            ),
            placements=self._traps.placements,
            spin_components=(gas.spin_components, passenger.gas.spin_components),
        )

    def eased(
        self, *, gas: Gas | None = None, losses: Losses | None = None, limits: Limits | None = None
    ) -> HeldTogether:
        """The same along the same line with other atoms, losses or limits of the first gas."""
        return HeldTogether(
            gas or self.gas,
            losses or self.losses,
            self.line,
            limits or self.limits,
            self.passenger,
            traps=self._traps,
        )

    def start(self, atoms: float, temperature: float) -> Floats:
        """ln N, ln E, place, and ln N and ln E of the passenger."""
        place = self.line.place(self.line.start)
        own = cloud_at(self._second, place, self.passenger.atoms, self.passenger.temperature)
        return np.array([*super().start(atoms, temperature), *own])

    def with_lighter_load(self, values: Floats, factor: float) -> Floats:
        """A start with so many times the passengers, as hot."""
        return values + math.log(factor) * np.array([0.0, 0.0, 0.0, 1.0, 1.0])

    def cloud(self, values: Sequence[float]) -> CloudNow:
        """Of the first gas, with what the passenger does to it."""
        return self._both(values)[0]

    def derivatives(self, law: Law, values: Sequence[float]) -> list[float]:
        first, second = self._both(values)
        moved = self.moved(law, first)
        if second is None:
            return [*moved[:3], 0.0, 0.0]
        return [*moved[:3], *growth(self._rider, second._replace(trap=second.trap.moving(moved.speed)))]

    def _both(self, values: Sequence[float]) -> tuple[CloudNow, CloudNow | None]:
        """Both clouds in contact, their place moving at -1; a passenger that is lost, or too hot for its depth, is none
        any more."""
        first = super().cloud(values)
        second = self._passenger(values)
        if second is None:
            return first, None
        now = self._contact.now(first, second)
        _, gained = self.kinetics.rates(first._replace(trap=first.trap.moving(0.0)))
        fastest = FASTEST_CONTACT * sum(map(abs, gained)) * first.atoms / first.energy
        if now.relaxation > fastest:
            share = fastest / now.relaxation
            now = now._replace(powers=(share * now.powers[0], share * now.powers[1]))
        return self._contact.joined(first, second, now)

    def _passenger(self, values: Sequence[float]) -> CloudNow | None:
        place, log_atoms, log_energy = values[2], values[_SECOND], values[_SECOND + 1]
        if not (math.log(FEWEST_ATOMS) < log_atoms < 700.0 and abs(log_energy) < 700.0):
            return None
        return self._rider.cloud_or_none(self._second.at(place, -1.0), math.exp(log_atoms), math.exp(log_energy))


def _traps_of(passenger: Passenger, line: Line) -> _Traps:
    path = passenger.path
    standing = {control: value for control, value in path.standing.items() if not math.isnan(value)}
    moves = line.control in standing and passenger.follows(line.control)

    def point(place: float) -> TrapPoint:
        return path.at({**standing, line.control: line.value(place)} if moves else standing)

    low, high = line.curve.low, line.curve.high
    count = points_between(path.nodes, line.value(low), line.value(high)) if moves else 2
    places, points = held_along(np.linspace(low, high, count), point, line.place(line.start))
    if len(points) < 2:
        raise ValueError("the trap does not hold the passenger where the control stands")
    vertical = passenger.vertical
    return _Traps(
        second=TrapCurve(places, points),
        placements=(Placement(line.places, line.points, vertical), Placement(places, points, vertical)),
    )
