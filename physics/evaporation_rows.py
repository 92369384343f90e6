"""The rows of a simulated evaporation: all that is shown along a ramp, from number and energy at some times."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from physics.checks import Floats
from physics.collisions import RETHERMALISATION_COLLISIONS
from physics.constants import reduced_planck
from physics.degenerate_cut import Degeneracy, degeneracy
from physics.evaporation_rates import CloudNow, Kinetics
from physics.gas import Gas
from physics.particles import Statistics
from physics.statistics import zeta


@dataclass(frozen=True, kw_only=True, eq=False)
class Rows:
    """Columns of one length, in SI units; NaN where something is not known or does not apply.

    Attributes
    ----------
    atoms : of one spin state. energy : of all of them, from the bottom of the trap. temperature, depth.
    truncation : depth over kT. frequencies : (n, 3).
    classical_phase_space_density : n(0) lambda^3 of the cut classical cloud.
    peak_phase_space_density : of the quantum cloud at that N and T in the cut trap, thermal atoms of one spin state.
    reduced_temperature : T over Tc0 of ideal bosons in the uncut harmonic trap, T/TF of fermions.
    condensate_atoms : of ideal bosons in the cut trap.
    peak_density : of the cut classical cloud.
    elastic_collision_rate : mean per atom, and peak_collision_rate at the centre.
    evaporation_rate, spilling_rate, background_rate, two_body_rate, three_body_rate, spin_flip_rate : loss
        per atom.
    good_to_bad_ratio : mean elastic rate over the known loss rates, evaporation and spilling apart.
    hydrodynamic_ratio : mean elastic rate over the highest angular frequency.
    adiabaticity : largest |dw/dt|/w^2.
    depth_change : |dlnU/dt| times the rethermalisation time.
    evaporated_energy : mean energy of an evaporated atom over kT, eta + kappa.
    """

    atoms: Floats
    energy: Floats
    temperature: Floats
    depth: Floats
    truncation: Floats
    frequencies: Floats
    classical_phase_space_density: Floats
    peak_phase_space_density: Floats
    reduced_temperature: Floats
    condensate_atoms: Floats
    peak_density: Floats
    elastic_collision_rate: Floats
    peak_collision_rate: Floats
    evaporation_rate: Floats
    spilling_rate: Floats
    background_rate: Floats
    two_body_rate: Floats
    three_body_rate: Floats
    spin_flip_rate: Floats
    good_to_bad_ratio: Floats
    hydrodynamic_ratio: Floats
    adiabaticity: Floats
    depth_change: Floats
    evaporated_energy: Floats


def occupation(gas: Gas, cloud: CloudNow) -> float:
    """n_ref lambda^3. [1]"""
    return float(cloud.reference_density * gas.wavelength(cloud.temperature) ** 3)


def reduced_temperature(gas: Gas, cloud: CloudNow) -> float:
    """T/Tc0 or T/TF; NaN without frequencies. [1]"""
    level = reduced_planck * 2.0 * math.pi * math.exp(sum(cloud.trap.log_frequencies) / 3.0) / cloud.thermal_energy
    full = zeta(3.0) if gas.statistics is Statistics.BOSE else 1.0 / 6.0
    return float((full / cloud.atoms) ** (1.0 / 3.0) / level)


def degeneracy_of(gas: Gas, bottom_exponent: float, clouds: list[CloudNow]) -> Degeneracy:
    """Quantum degeneracy of clouds in traps of one kind of bottom."""
    numbers = np.exp([(c.averages.log_number, c.averages.log_number_half, c.averages.log_number_third) for c in clouds])
    return degeneracy(
        gas.statistics,
        bottom_exponent,
        np.array([occupation(gas, cloud) for cloud in clouds]),
        np.array([cloud.truncation for cloud in clouds]),
        (numbers[:, 0], numbers[:, 1], numbers[:, 2]),
    )


def rows_of(kinetics: Kinetics, clouds: list[CloudNow]) -> Rows:
    """The rows of clouds along one stretch of a ramp."""
    gas = kinetics.gas
    solved = degeneracy_of(gas, kinetics.trap.bottom_exponent, clouds)
    lost = np.array([kinetics.rates(cloud)[0] for cloud in clouds])

    def column(name: str) -> Floats:
        return np.array([getattr(cloud, name) for cloud in clouds], dtype=np.float64)

    def of_trap(name: str) -> Floats:
        return np.array([getattr(cloud.trap, name) for cloud in clouds], dtype=np.float64)

    centre = np.array([cloud.averages.centre for cloud in clouds])
    excess = np.array([cloud.averages.excess for cloud in clouds])
    angular = 2.0 * math.pi * np.exp(of_trap("log_frequencies"))
    density, rate = column("reference_density") * centre, column("collision_rate")
    classical = np.array([occupation(gas, cloud) for cloud in clouds]) * centre
    bad = np.sum(lost[:, 2:], axis=1)
    with np.errstate(all="ignore"):
        return Rows(
            atoms=column("atoms"),
            energy=column("energy"),
            temperature=column("temperature"),
            depth=of_trap("depth"),
            truncation=column("truncation"),
            frequencies=angular / (2.0 * math.pi),
            classical_phase_space_density=classical,
            peak_phase_space_density=solved.peak_phase_space_density,
            reduced_temperature=np.array([reduced_temperature(gas, cloud) for cloud in clouds]),
            condensate_atoms=column("atoms") * solved.condensate_fraction,
            peak_density=density,
            elastic_collision_rate=rate,
            peak_collision_rate=math.sqrt(2.0) * density * column("cross_section") * column("speed"),
            evaporation_rate=lost[:, 0],
            spilling_rate=lost[:, 1],
            background_rate=lost[:, 2],
            two_body_rate=lost[:, 3],
            three_body_rate=lost[:, 4],
            spin_flip_rate=lost[:, 5],
            good_to_bad_ratio=np.where(bad > 0.0, rate / bad, np.nan),
            hydrodynamic_ratio=rate / np.max(angular, axis=1),
            adiabaticity=np.max(np.abs(of_trap("frequency_rates")) / angular, axis=1),
            depth_change=np.where(
                rate > 0.0, np.abs(of_trap("depth_rate")) * RETHERMALISATION_COLLISIONS / rate, np.nan
            ),
            evaporated_energy=column("truncation") + excess,
        )


def joined(parts: Sequence[Rows]) -> Rows:
    """The rows of stretches one after another; none where there are no stretches."""
    shapes = {field.name: (0, 3) if field.name == "frequencies" else (0,) for field in fields(Rows)}
    return Rows(
        **{
            name: np.concatenate([np.empty(shape), *(getattr(part, name) for part in parts)])
            for name, shape in shapes.items()
        }
    )
