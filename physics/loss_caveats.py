"""What rates and lifetimes of a cloud do not cover, or what they say against its equilibrium.

Ids, severities and SI numbers, as in `physics.caveats`, whose table has what each value means.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from types import MappingProxyType

import numpy as np

from physics.caveats import Caveat, Severity
from physics.checks import Floats
from physics.constants import boltzmann, reduced_planck
from physics.losses import scaling_ceiling, unitary_ceiling
from physics.models import Model
from physics.particles import Certainty
from physics.rates import Rates

# Share of the atoms, or of the temperature, in one rethermalisation time: worth knowing, and too much.
_SHOWN, _TOO_MUCH = 0.1, 1.0
# a^4 differs by more than that from the length for which K3 was measured.
_ELSEWHERE = 1.5
_DIPOLES_FAST = 0.3
# Share of all known losses below which one of them changes no decision, and a K3 [m^6/s] that is hardly ever exceeded
# away from resonances (common practice, no source): where not even it would count, none need be known.
_COUNTS, _LARGE_THREE_BODY = 0.02, 1e-39


def loss_caveats(
    rates: Rates,
    *,
    certainties: Mapping[str, Certainty] = MappingProxyType({}),
    measured_length: float | None = None,
) -> tuple[Caveat, ...]:
    """The caveats of losses, heating and dipolar collisions of an answer. The worst of its clouds counts.

    Parameters
    ----------
    rates : Rates
    certainties : how the rate constants in use, "two_body" and "three_body", came to be known; without those that the
        user gave.
    measured_length : float or None. [m] Scattering length of the gas in which K3 was measured; None where the user
        gave K3, or where it is not known.
    """
    found = (*_unknown(rates, certainties), *_against_equilibrium(rates), *_three_body(rates, measured_length))
    return (*found, *_condensate(rates), *_dipoles(rates))


def _unknown(rates: Rates, certainties: Mapping[str, Certainty]) -> Iterator[Caveat]:
    losses, bosons = rates.losses, rates.equilibrium.bosons
    if losses.background_lifetime is None:
        yield Caveat(id="no_background", severity=Severity.NOTE)
    total = np.asarray(rates.total_loss_rate)
    if bosons and losses.three_body is None:
        most = _LARGE_THREE_BODY * rates.triple_density
        if not _highest(most / (most + total)) < _COUNTS:
            yield Caveat(id="three_body_unknown", severity=Severity.NOTE)
    for name, value, rate in (
        ("two_body", losses.two_body, rates.two_body_loss_rate),
        ("three_body", losses.three_body, rates.three_body_loss_rate),
    ):
        if certainties.get(name) is Certainty.MEMORY and not _highest(rate / total) < _COUNTS:
            yield Caveat(id=f"{name}_recalled", severity=Severity.NOTE, value=float(np.mean(value)))


def _against_equilibrium(rates: Rates) -> Iterator[Caveat]:
    temperature = rates.equilibrium.cloud.temperature
    heated = rates.heating_rate * rates.rethermalisation_time / temperature
    for name, share in (("loss_fast", _highest(rates.loss_per_rethermalisation)), ("heating_fast", _highest(heated))):
        if share > _SHOWN:
            yield Caveat(id=name, severity=Severity.WARNING if share > _TOO_MUCH else Severity.NOTE, value=share)


def _three_body(rates: Rates, measured_length: float | None) -> Iterator[Caveat]:
    cloud, constant = rates.equilibrium.cloud, rates.losses.three_body
    if constant is None or not rates.equilibrium.bosons:
        return
    with np.errstate(all="ignore"):
        over_scaling = _highest(constant / scaling_ceiling(cloud.mass, cloud.length))
        over_unitary = _highest(constant / unitary_ceiling(cloud.mass, cloud.temperature))
    if over_scaling > 1.0:
        yield Caveat(id="three_body_scaling", severity=Severity.WARNING, value=over_scaling)
    if over_unitary > 1.0:
        yield Caveat(id="three_body_unitarity", severity=Severity.WARNING, value=over_unitary)
    if measured_length:
        ratios = np.ravel((cloud.length / measured_length) ** 4)
        ratios = ratios[~np.isnan(ratios)]
        if ratios.size:
            factor = float(ratios[np.argmax(np.abs(np.log(np.maximum(ratios, 1e-300))))])
            if not 1.0 / _ELSEWHERE < factor < _ELSEWHERE:
                yield Caveat(id="three_body_elsewhere", severity=Severity.WARNING, value=factor)


def _condensate(rates: Rates) -> Iterator[Caveat]:
    solved, losses = rates.equilibrium, rates.losses
    if solved.model not in (Model.IDEAL, Model.EXACT_LEVELS) or (losses.two_body is None and losses.three_body is None):
        return
    if solved.bosons and _lowest(solved.reduced_temperature) < 1.0 and _highest(solved.condensate_atoms) > 1.0:
        yield Caveat(id="loss_ideal_condensate", severity=Severity.WARNING, value=_highest(solved.peak_density))


def _dipoles(rates: Rates) -> Iterator[Caveat]:
    cloud = rates.equilibrium.cloud
    if cloud.dipolar_length is not None:
        # k = m v/(2 hbar) at the mean relative speed v, times a_d = 1.5 a_dd.
        k = 2.0 * np.sqrt(cloud.mass * boltzmann * cloud.temperature / math.pi) / reduced_planck
        fastest = _highest(1.5 * cloud.dipolar_length * k)
        if fastest > _DIPOLES_FAST:
            yield Caveat(id="dipolar_fast", severity=Severity.NOTE, value=fastest)


def _highest(value: Floats) -> float:
    return float(np.fmax.reduce(np.ravel(value)))


def _lowest(value: Floats) -> float:
    return float(np.fmin.reduce(np.ravel(value)))
