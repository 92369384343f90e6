"""Two clouds in contact along one stretch of a ramp: how far they overlap, how often they collide, what heat flows."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from physics.checks import Floats
from physics.constants import boltzmann
from physics.evaporation_rates import CloudNow
from physics.interspecies import PairCollisions
from physics.overlap import inverse_stiffness, overlap_of, sag
from physics.spline import Spline
from physics.stage_trap import TrapNow
from physics.trap_path import TrapPoint


class ContactNow(NamedTuple):
    """The contact of two clouds at one time. [SI]

    `share` is the overlap over that of the same clouds around one centre; rates are collisions per atom of the first
    and of the second, `power` what an atom of the first gains, and of the second; `relaxation` is the rate at which
    the difference of the temperatures falls by e.
    """

    share: float
    displacement: float
    rates: tuple[float, float]
    powers: tuple[float, float]
    relaxation: float


class Placement:
    """Where the trap of one species is along a stretch, and how stiff: a smooth function of the place on it.

    Parameters
    ----------
    places, points : along the stretch, and the trap there.
    vertical : index of the axis along which atoms sag in a trap that says only its frequencies; None: in none.
    """

    def __init__(self, places: Floats, points: Sequence[TrapPoint], vertical: int | None) -> None:
        if len(places) > 1 and places[1] < places[0]:
            places, points = places[::-1], points[::-1]
        # What the controls do to the mean frequency is known between the points; the rest hardly changes.
        rows = [(*(x * _square(point) for x in _stiffness(point)), *_minimum(point, vertical)) for point in points]
        self._spline = Spline(places, np.array(rows))
        self._low, self._high = float(places[0]), float(places[-1])

    def at(self, now: TrapNow) -> tuple[list[float], list[float]]:
        """1/w^2 as a matrix [s^2], and the minimum [m]."""
        numbers = self._spline.at(min(max(now.place, self._low), self._high))
        square = _angular(now) ** 2
        return [x / square for x in numbers[:6]], numbers[6:]


def _stiffness(point: TrapPoint) -> tuple[Floats, ...]:
    if point.frequencies is None:
        raise ValueError("two species in contact need a trap with frequencies; the one given has none at its bottom")
    return inverse_stiffness(point.frequencies, point.axes)


def _square(point: TrapPoint) -> float:
    """Of the geometric mean of the angular frequencies. [1/s^2]"""
    assert point.frequencies is not None
    return (2.0 * math.pi) ** 2 * math.prod(point.frequencies) ** (2.0 / 3.0)


def _angular(now: TrapNow) -> float:
    """Geometric mean of the angular frequencies. [1/s]"""
    return 2.0 * math.pi * math.exp(sum(now.log_frequencies) / 3.0)


def _minimum(point: TrapPoint, vertical: int | None) -> tuple[float, float, float]:
    if point.minimum is not None:
        return point.minimum
    place = [0.0, 0.0, 0.0]
    if vertical is not None:
        assert point.frequencies is not None
        place[vertical] = -float(sag(point.frequencies[vertical]))
    return place[0], place[1], place[2]


@dataclass(frozen=True, kw_only=True, eq=False)
class Contact:
    """What two clouds do to each other along one stretch.

    Attributes
    ----------
    spin_components : of the first and the second. Atom numbers are those of one of them.
    """

    collisions: PairCollisions
    placements: tuple[Placement, Placement]
    spin_components: tuple[int, int] = (1, 1)

    def now(self, first: CloudNow, second: CloudNow) -> ContactNow:
        """The contact of two clouds: the overlap of uncut Gaussians, times the geometric mean of how much denser each
        cloud is, on average, than its own Gaussian. For two equal clouds in equal traps that is exact, cut or not."""
        pair = self.collisions
        stiff, low = self.placements[0].at(first.trap)
        other_stiff, other_low = self.placements[1].at(second.trap)
        temperatures = (first.temperature, second.temperature)
        apart = [a - b for a, b in zip(low, other_low, strict=True)]
        hot, other_hot = (boltzmann * T / m for T, m in zip(temperatures, pair.masses, strict=True))
        spread = [hot * x + other_hot * y for x, y in zip(stiff, other_stiff, strict=True)]
        denser = (_density_ratio(cloud, mass) for cloud, mass in zip((first, second), pair.masses, strict=True))
        density, share = overlap_of(spread, apart)
        density *= math.sqrt(math.prod(denser))
        rate, exchange = (density * coefficient for coefficient in pair.rate_coefficients(*temperatures))
        power = pair.energy_share * boltzmann * (temperatures[0] - temperatures[1]) * exchange
        atoms = (first.atoms * self.spin_components[0], second.atoms * self.spin_components[1])
        return ContactNow(
            share=share,
            displacement=math.hypot(*apart),
            rates=(atoms[1] * rate, atoms[0] * rate),
            powers=(-atoms[1] * power, atoms[0] * power),
            relaxation=pair.energy_share / 3.0 * sum(atoms) * exchange,
        )

    def joined(self, first: CloudNow, second: CloudNow, now: ContactNow) -> tuple[CloudNow, CloudNow]:
        """The clouds with what their contact does to each."""
        lifting = self.collisions.lifting_share
        a, b = (
            cloud._replace(partner_rate=lifting * rate, partner_power=power)
            for cloud, rate, power in zip((first, second), now.rates, now.powers, strict=True)
        )
        return a, b


def _density_ratio(cloud: CloudNow, mass: float) -> float:
    """Mean density of the cut cloud in its trap, over that of as many atoms in the uncut harmonic trap. [1]"""
    harmonic = cloud.atoms * (mass * _angular(cloud.trap) ** 2 / (4.0 * math.pi * boltzmann * cloud.temperature)) ** 1.5
    return float(cloud.reference_density * math.exp(cloud.averages.log_pair) / harmonic)
