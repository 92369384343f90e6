"""How far the harmonic trap of the same frequencies stands in for a real one."""

from __future__ import annotations

from types import MappingProxyType

import numpy as np

from physics.caveats import Caveat, Severity
from physics.constants import boltzmann
from physics.traps.survey import Survey

_NODES = 9
_WARNED, _REFUSED = 0.1, 1.0
"""Relative difference of the volumes from which the harmonic trap is warned about, and does not describe the cloud."""
_ARMS = 8.0
"""Energy over kT below which the arms of crossed beams, once open, are warned about: e^-8 times their large volume."""


def harmonic_trap_caveat(found: Survey, temperature: float) -> Caveat:
    """What it costs to answer in the harmonic trap of a surveyed one. `temperature`: [K]."""
    kT, ratio = boltzmann * temperature, volume_ratio(found, temperature)
    numbers = {name: energy / kT for name, energy in (("truncation", found.depth), ("arms", found.arm_depth)) if energy}
    off = abs(ratio - 1.0)
    near = off < _WARNED and numbers.get("arms", np.inf) > _ARMS
    return Caveat(
        id="harmonic_trap",
        severity=Severity.NOTE if near else Severity.WARNING if off < _REFUSED else Severity.REFUSAL,
        value=ratio,
        numbers=MappingProxyType(numbers),
    )


def volume_ratio(found: Survey, temperature: float) -> float:
    """Volume N/n(0) of a classical cloud cut at the depth, over that in the harmonic trap without end. [1]

    The Boltzmann factor is summed over Gauss-Hermite nodes of the harmonic cloud, to a few percent of the difference
    for depths of several kT; a cloud that reaches far into the arms of a crossed trap is larger than this tells.

    Raises
    ------
    ValueError : for a trap without frequencies or without a potential.
    """
    potential = found.potential
    if potential is None or found.frequencies is None or found.energy_at_minimum is None:
        raise ValueError("a trap must have a potential and frequencies to be compared with its harmonic trap")
    from scipy.special import gammainc

    kT = boltzmann * temperature
    nodes, weights = np.polynomial.hermite_e.hermegauss(_NODES)
    grid = np.stack(np.meshgrid(nodes, nodes, nodes, indexing="ij"), axis=-1).reshape(-1, 3)
    weight = np.prod(np.stack(np.meshgrid(weights, weights, weights, indexing="ij"), axis=-1), axis=-1).ravel()
    radii = np.sqrt(kT / found.mass) / (2.0 * np.pi * np.asarray(found.frequencies))
    energy = potential.energy(found.minimum + (grid * radii) @ found.axes) - found.energy_at_minimum
    with np.errstate(over="ignore"):
        factor = np.exp(0.5 * np.sum(grid**2, axis=-1) - energy / kT)
    if found.depth is not None:
        # Of the momenta at a place of energy U the share P(3/2, (depth - U)/kT) is held.
        held = gammainc(1.5, np.maximum(found.depth - energy, 0.0) / kT)
        factor = np.where(held > 0.0, factor * held, 0.0)
    return float(weight @ factor / np.sum(weight))
