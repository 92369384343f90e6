"""How far an evaporation strays from what its kinetics describes: the worst of each number along it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from physics.checks import Floats
from physics.collisions import RETHERMALISATION_COLLISIONS
from physics.evaporation import Evaporation
from physics.losses import scaling_ceiling, unitary_ceiling
from physics.particles import Statistics


@dataclass(frozen=True, kw_only=True)
class RampExtremes:
    """Worst numbers; NaN where one does not apply, and their limits. All [1].

    Attributes
    ----------
    lowest_truncation : depth/kT; below 4 to 5 the cut distribution itself is an estimate.
    highest_classical_density : peak phase-space density of the classical cloud; above 0.3 N and T are estimates.
    fastest_trap : |dw/dt|/w^2; should be below 0.1.
    fastest_depth : |dlnU/dt| times the rethermalisation time; should be below 1.
    most_hydrodynamic : mean collision rate over the highest angular frequency; above 1 evaporation is slower.
    fastest_loss : share of the atoms lost in one rethermalisation time, evaporation and spilling apart.
    lowest_fermi_temperature : T/TF of fermions; below 0.5 Pauli blocking, which is left out, slows evaporation.
    three_body_scaling, three_body_unitarity : K3 over its bounds, of bosons whose K3 is given.
    farthest_transfer : distance of the minima of two traps over the radius of the cloud, at a sudden transfer.
    polarised : fermions of one spin state without a moment, which do not collide and so do not evaporate.
    background_unknown : no background lifetime is given.
    """

    lowest_truncation: float
    highest_classical_density: float
    fastest_trap: float
    fastest_depth: float
    most_hydrodynamic: float
    fastest_loss: float
    lowest_fermi_temperature: float
    three_body_scaling: float
    three_body_unitarity: float
    farthest_transfer: float
    polarised: bool
    background_unknown: bool


def ramp_extremes(run: Evaporation) -> RampExtremes:
    """The worst numbers of a simulated ramp."""
    rows, gas, K3 = run.rows, run.gas, run.losses.three_body
    fermions = gas.statistics is Statistics.FERMI
    bad = rows.background_rate + rows.two_body_rate + rows.three_body_rate + rows.spin_flip_rate
    with np.errstate(all="ignore"):
        loss = np.where(
            rows.elastic_collision_rate > 0.0, RETHERMALISATION_COLLISIONS * bad / rows.elastic_collision_rate, np.nan
        )
        scaling = unitarity = np.full(1, np.nan)
        if K3 is not None and not fermions and gas.scattering_length:
            scaling = np.atleast_1d(K3 / scaling_ceiling(gas.mass, gas.scattering_length))
            unitarity = K3 / unitary_ceiling(gas.mass, rows.temperature)
    return RampExtremes(
        lowest_truncation=_least(rows.truncation),
        highest_classical_density=_most(rows.classical_phase_space_density),
        fastest_trap=_most(rows.adiabaticity),
        fastest_depth=_most(rows.depth_change),
        most_hydrodynamic=_most(rows.hydrodynamic_ratio),
        fastest_loss=_most(loss),
        lowest_fermi_temperature=_least(rows.reduced_temperature) if fermions else np.nan,
        three_body_scaling=_most(scaling),
        three_body_unitarity=_most(unitarity),
        farthest_transfer=run.farthest_transfer,
        polarised=fermions and not gas.collides,
        background_unknown=run.losses.background_lifetime is None,
    )


def _most(values: Floats) -> float:
    return float(np.fmax.reduce(values, initial=np.nan))


def _least(values: Floats) -> float:
    return float(np.fmin.reduce(values, initial=np.nan))
