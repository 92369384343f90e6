"""Rates of change of a cut cloud: evaporation, spilling, losses, heating and work.

The cloud is classical, in equilibrium below the depth, and evaporates in all directions: whatever passes the depth in a
collision leaves [1]. Energies count from the bottom of the trap, moving with it.

References
----------
[1] O. J. Luiten, M. W. Reynolds, J. T. M. Walraven, Phys. Rev. A 53, 381 (1996).
[2] T. Weber, J. Herbig, M. Mark, H.-C. Naegerl, R. Grimm, Phys. Rev. Lett. 91, 123201 (2003): heating by loss.
"""

from __future__ import annotations

import math
from enum import Enum
from typing import NamedTuple, Protocol

from physics.checks import Floats
from physics.constants import boltzmann
from physics.gas import Gas
from physics.kinetic_tables import Averages
from physics.light_heating import pointing_heating_power
from physics.losses import FLIPPED_ENERGY, Losses, noise_heating_rate, usual_spin_flip_rate
from physics.runge_kutta import OutOfRange
from physics.stage_trap import TrapNow

LOWEST_TRUNCATION = 0.1
"""eta below which a cloud counts as no longer trapped."""

FEWEST_ATOMS = 100.0
"""Atom number at which all counts as lost: the kinetics is one of many atoms."""


class Process(Enum):
    """What changes the number of atoms or their energy."""

    EVAPORATED = "evaporated"
    SPILLED = "spilled"
    BACKGROUND = "background"
    TWO_BODY = "two-body"
    THREE_BODY = "three-body"
    SPIN_FLIPS = "spin flips"
    TRANSFER = "transfer"
    RECOMBINATION = "recombination heat"
    WORK = "work"
    HEATING = "heating"
    LIGHT = "light"
    NOISE = "intensity noise"
    POINTING = "pointing noise"
    CONTACT = "contact"

    @property
    def label(self) -> str:
        return self.value


ATOM_PROCESSES = (
    Process.EVAPORATED,
    Process.SPILLED,
    Process.BACKGROUND,
    Process.TWO_BODY,
    Process.THREE_BODY,
    Process.SPIN_FLIPS,
)
"""Processes that take atoms, in the order of `Kinetics`."""

ENERGY_PROCESSES = (
    *ATOM_PROCESSES,
    Process.RECOMBINATION,
    Process.WORK,
    Process.HEATING,
    Process.LIGHT,
    Process.NOISE,
    Process.POINTING,
    Process.CONTACT,
)
"""Processes that change the energy, in the order of `Kinetics`."""


class CloudNow(NamedTuple):
    """The cloud at one time. Rates are per atom. [SI]

    `reference_density` is n_ref, that of the centre of the uncut cloud. Of a second species in the trap: the collisions
    with it, as many as count for evaporation, and the power that they bring; 0 where there is none.
    """

    atoms: float
    energy: float
    thermal_energy: float
    truncation: float
    reference_density: float
    cross_section: float
    speed: float
    trap: TrapNow
    averages: Averages
    partner_rate: float = 0.0
    partner_power: float = 0.0

    @property
    def temperature(self) -> float:
        return self.thermal_energy / boltzmann

    @property
    def collision_rate(self) -> float:
        """Mean elastic collisions per atom and time, <n> sigma sqrt(2) vbar: n(0) sigma vbar/2 of an uncut cloud in a
        harmonic trap. [1/s]"""
        met = self.reference_density * math.exp(self.averages.log_pair)
        return math.sqrt(2.0) * met * self.cross_section * self.speed


class MovingTrap(Protocol):
    """A trap as a function of time."""

    @property
    def bottom_exponent(self) -> float: ...

    def now(self, time: float) -> TrapNow: ...

    def averages(self, now: TrapNow, share: float) -> Averages | None: ...


class Kinetics:
    """The right-hand side of the kinetics: of ln N, ln E and the budgets of atoms and energy by process.

    A budget counts atoms lost, and energy gained, since its start.
    """

    def __init__(self, gas: Gas, losses: Losses, trap: MovingTrap) -> None:
        self.gas, self.trap = gas, trap
        self._background = 0.0 if losses.background_lifetime is None else 1.0 / float(losses.background_lifetime)
        self._two = float(losses.two_body or 0.0)
        self._three = float(losses.three_body or 0.0)
        self._event_heat = float(losses.recombination_heat or 0.0)
        self._noise = float(losses.intensity_noise or 0.0)
        self._pointing = float(losses.pointing_noise or 0.0)
        # A heating rate that is given has that by scattered light in it.
        self._scatters = losses.heating is None
        # The rate is that of a cloud that keeps its atoms, where one holds (d + 3/2) kT.
        self._heating = (trap.bottom_exponent + 1.5) * boltzmann * float(losses.heating or 0.0)

    def cloud(self, time: float, atoms: float, energy: float) -> CloudNow:
        """The cloud of N atoms with the energy E.

        Raises
        ------
        OutOfRange : where the trap cannot hold so much energy, or hardly.
        """
        return self.cloud_in(self.trap.now(time), atoms, energy)

    def cloud_in(self, trap: TrapNow, atoms: float, energy: float) -> CloudNow:
        """The same in the trap as it is at one time."""
        found = self.cloud_or_none(trap, atoms, energy)
        if found is None:
            raise OutOfRange
        return found

    def cloud_or_none(self, trap: TrapNow, atoms: float, energy: float) -> CloudNow | None:
        """The same; None where the trap cannot hold so much energy, or hardly."""
        averages = self.trap.averages(trap, energy / atoms / trap.depth)
        if averages is None:
            return None
        eta = math.exp(averages.log_truncation)
        if not LOWEST_TRUNCATION <= eta < 1e20:
            return None
        kT = trap.depth / eta
        density = atoms / (trap.level_volume * math.exp(averages.log_number))
        temperature = kT / boltzmann
        sigma, speed = self.gas.cross_section(temperature), self.gas.mean_speed(temperature)
        return CloudNow(atoms, energy, kT, eta, density, sigma, speed, trap, averages)

    def rates(self, now: CloudNow) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Loss per atom and time by each of `ATOM_PROCESSES` [1/s], gain of energy per atom and time by each of
        `ENERGY_PROCESSES` [W]."""
        trap, averages, eta, kT, n = now.trap, now.averages, now.truncation, now.thermal_energy, now.reference_density
        mean = now.energy / now.atoms
        escape = math.exp(averages.log_evaporation - eta)
        evaporation = n * now.cross_section * now.speed * escape
        if now.partner_rate:
            # As of as many collisions, <n> sigma sqrt(2) vbar, with atoms of its own kind.
            evaporation += now.partner_rate * escape * math.exp(-averages.log_pair) / math.sqrt(2.0)
        number = math.exp(averages.log_number)
        # Share of the atoms in the levels at the rim, over the relative number of these levels.
        rim = 4.0 / (3.0 * math.sqrt(math.pi)) * eta * math.sqrt(eta) * math.exp(-eta) / number
        levels_rate = trap.levels_rate
        spilling = rim * max(0.0, -levels_rate)
        two = self._two * n * math.exp(averages.log_pair) if self._two else 0.0
        three = self._three * n * n * math.exp(averages.log_triple) if self._three else 0.0
        # d ln V_e/dt at fixed temperature: d ln/d ln eta of the number is 3/2 - E/NkT.
        volume = trap.volume_rate + (1.5 - mean / kT) * trap.depth_rate + averages.number_slope * trap.speed
        work = -kT * (volume - rim * levels_rate)
        flips = usual_spin_flip_rate(self.gas.mass, trap.zero_force, kT) if trap.zero_force > 0.0 else 0.0
        atoms = (evaporation, spilling, self._background, two, three, flips)
        energy = (
            -evaporation * (eta + averages.excess) * kT,
            -spilling * trap.depth,
            -self._background * mean,
            -two * averages.pair_energy * kT,
            -three * averages.triple_energy * kT,
            -flips * min(FLIPPED_ENERGY * kT, mean),
            three / 3.0 * self._event_heat,
            work,
            self._heating,
            trap.light_heating if self._scatters else 0.0,
            mean * self._noise_rate(trap) if self._noise else 0.0,
            self._pointing_power(trap) if self._pointing else 0.0,
            now.partner_power,
        )
        return atoms, energy

    def _noise_rate(self, trap: TrapNow) -> float:
        """Mean over the axes of the rate at which the energy grows; none in a trap without frequencies, of no light."""
        x, y, z = (math.exp(2.0 * log) for log in trap.log_frequencies)
        if math.isnan(x + y + z):
            return 0.0
        return float(noise_heating_rate(1.0, self._noise)) * max(trap.noise_share, 0.0) * (x + y + z) / 3.0

    def _pointing_power(self, trap: TrapNow) -> float:
        """Energy per atom and second by a trap that shakes; none in a trap without frequencies. [W]"""
        fourth = sum(math.exp(4.0 * log) for log in trap.log_frequencies)
        if math.isnan(fourth):
            return 0.0
        return float(pointing_heating_power(self.gas.mass, 1.0, self._pointing)) * fourth

    def derivatives(self, time: float, values: Floats) -> list[float]:
        """Of (ln N, ln E, atoms lost by process, energy gained by process)."""
        log_atoms, log_energy = float(values[0]), float(values[1])
        if not (abs(log_atoms) < 700.0 and abs(log_energy) < 700.0):
            raise OutOfRange
        return self.flows(self.cloud(time, math.exp(log_atoms), math.exp(log_energy)))

    def flows(self, now: CloudNow) -> list[float]:
        """The same of a cloud that is known."""
        lost, gained = self.rates(now)
        N = now.atoms
        mean = now.energy / N
        return [-sum(lost), sum(gained) / mean, *(N * rate for rate in lost), *(N * rate for rate in gained)]
