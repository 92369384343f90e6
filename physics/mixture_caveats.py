"""What an answer about two species in one trap does not cover: which caveat, how grave, and its number.

Kinds, severities and SI numbers, as in `physics.caveats`; the sentences are written where they are shown.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

import numpy as np

from physics.caveats import Severity
from physics.miscibility import Mixing
from physics.mixtures import Mixture
from physics.pair_scattering import PairLength
from physics.particles import Certainty

if TYPE_CHECKING:
    from physics.sympathetic import SympatheticCooling


class MixtureCaveatKind(Enum):
    """Every caveat of a mixture; its value says what the number of the caveat is."""

    PASSENGER_NOT_HELD = "no value: the passenger has no answer in this trap"
    BETWEEN_UNKNOWN = "no value: the scattering length between the two is not known"
    BETWEEN_RECALLED = "scattering length [m] between the two: recalled from its source, not read there"
    BETWEEN_COMPUTED = "scattering length [m] between the two: worked out from other data"
    BETWEEN_SIGN_UNKNOWN = "scattering length [m] between the two, of which only the magnitude was measured"
    SAME_FREQUENCIES = "no value: frequencies are given, and taken to be those of both species"
    OWN_FREQUENCIES = "no value: frequencies of each species are given, and both sag along gravity"
    APART = "overlap over that of concentric clouds"
    DEGENERATE_MIXTURE = "largest classical phase-space density: overlap and collisions are those of classical clouds"
    PUSHED = "mean-field shift over the energy of the shifted cloud: the clouds change each other's shape"
    NOT_MISCIBLE = "g12^2/(g11 g22): two condensates of these would separate"
    COLLAPSING = "g12^2/(g11 g22): two condensates of these would collapse together"
    UNSTABLE_WITH_FERMIONS = "stability parameter of condensate and Fermi gas"
    SLOW_CONTACT = "relaxation time over the shortest lifetime: atoms are lost before heat is exchanged"
    LOSSES_BETWEEN_UNKNOWN = "no value: losses in collisions of the two species are left out"
    PASSENGER_LEAVES = "time [s] at which the passenger is not held any more, or lost"
    PASSENGER_CUT = "lowest depth of the passenger over kT: it evaporates too"
    PASSENGER_BLOCKED = "lowest T/TF of the passenger: filled levels block collisions, which is left out"
    PASSENGER_LAGS = "temperature of the passenger over that of the coolant at the end"
    PASSENGER_DEPTH_STAYS = "depth [K] that the passenger keeps while that of the first species moves"
    PASSENGER_DEPTH_UNKNOWN = "depth [K] that the passenger is taken to have: the largest of the ramp"
    PASSENGER_AS_SIMULATED = "no value: what was not measured of the passenger is as simulated up to the measured cloud"
    PASSENGER_LENGTH_UNKNOWN = "no value: collisions among the passengers are left out"


@dataclass(frozen=True, kw_only=True)
class MixtureCaveat:
    """One caveat. value : the number that raised it; None where there is none."""

    kind: MixtureCaveatKind
    severity: Severity
    value: float | None = None

    @property
    def id(self) -> str:
        return self.kind.name.lower()


# Shown, and warned about.
_APART = (0.7, 0.2)
_CLASSICAL_DENSITY = 0.3
_PUSHED = (0.1, 0.5)
_SLOW = (0.1, 1.0)
_CUT_SHARE = (0.01, 0.1)
_LAG = (1.1, 1.5)
_FERMI = 0.5

_Found = Iterator[MixtureCaveat]


def between_caveats(between: PairLength) -> _Found:
    """Of the scattering length between the two."""
    kinds = MixtureCaveatKind
    if between.value is None:
        yield _warning(kinds.BETWEEN_UNKNOWN)
        return
    if between.sign_unknown:
        yield _warning(kinds.BETWEEN_SIGN_UNKNOWN, between.value)
    if between.certainty is Certainty.MEMORY:
        yield _note(kinds.BETWEEN_RECALLED, between.value)
    elif between.certainty is Certainty.COMPUTED:
        yield _note(kinds.BETWEEN_COMPUTED, between.value)


def mixture_caveats(mixture: Mixture, *, lifetime: float = math.inf) -> _Found:
    """Of two clouds at rest, one of each.

    Parameters
    ----------
    lifetime : float. [s] The shorter one of both clouds.
    """
    kinds = MixtureCaveatKind
    share, pushed, relaxation, parameter, fermions = (
        float(value)
        for value in (
            mixture.overlap_share,
            mixture.relative_shift,
            mixture.relaxation_time,
            mixture.miscibility_parameter,
            mixture.bose_fermi_parameter,
        )
    )
    if share < _APART[0]:
        yield _either(kinds.APART, share, share < _APART[1])
    densest = max(float(solved.classical_phase_space_density) for solved in (mixture.coolant, mixture.passenger))
    if densest > _CLASSICAL_DENSITY:
        yield _note(kinds.DEGENERATE_MIXTURE, densest)
    if pushed > _PUSHED[0]:
        yield _either(kinds.PUSHED, pushed, pushed > _PUSHED[1])
    condensed = any(float(solved.condensate_fraction) > 0.0 for solved in (mixture.coolant, mixture.passenger))
    if mixture.mixing is Mixing.APART:
        yield _either(kinds.NOT_MISCIBLE, parameter, condensed)
    if mixture.mixing is Mixing.COLLAPSE:
        yield _either(kinds.COLLAPSING, parameter, condensed)
    if fermions > 1.0:
        yield _either(kinds.UNSTABLE_WITH_FERMIONS, fermions, condensed)
    slow = relaxation / lifetime if lifetime > 0.0 else math.inf
    if slow > _SLOW[0] and not math.isinf(relaxation):
        yield _either(kinds.SLOW_CONTACT, slow, slow > _SLOW[1])
    yield _note(kinds.LOSSES_BETWEEN_UNKNOWN)


def sympathetic_caveats(run: SympatheticCooling) -> _Found:
    """Of two clouds along a ramp; those of the coolant alone are `ramp_caveats`."""
    from physics.evaporation_rates import Process
    from physics.evaporation_track import EndReason

    kinds, passenger = MixtureCaveatKind, run.passenger
    yield _note(kinds.LOSSES_BETWEEN_UNKNOWN)
    if not len(passenger.time):
        yield MixtureCaveat(kind=kinds.PASSENGER_NOT_HELD, severity=Severity.REFUSAL)
        return
    early = passenger.time[-1] < run.coolant.time[-1] * (1.0 - 1e-9)
    if early or passenger.reason is EndReason.NOT_TRAPPED:
        yield _warning(kinds.PASSENGER_LEAVES, float(passenger.time[-1]))
    lowest = float(np.min(run.contact.overlap_share))
    if lowest < _APART[0]:
        yield _either(kinds.APART, lowest, lowest < _APART[1])
    cut = (passenger.budget.atoms[Process.EVAPORATED] + passenger.budget.atoms[Process.SPILLED]) / (
        passenger.budget.atoms_before
    )
    if cut > _CUT_SHARE[0]:
        yield _either(kinds.PASSENGER_CUT, float(np.min(passenger.rows.truncation)), cut > _CUT_SHARE[1])
    densest = float(np.max(passenger.rows.classical_phase_space_density))
    if densest > _CLASSICAL_DENSITY:
        yield _note(kinds.DEGENERATE_MIXTURE, densest)
    if not passenger.gas.bosons and float(np.min(passenger.rows.reduced_temperature)) < _FERMI:
        yield _note(kinds.PASSENGER_BLOCKED, float(np.min(passenger.rows.reduced_temperature)))
    lag = float(passenger.temperature[-1] / run.coolant.temperature[len(passenger.time) - 1])
    if lag > _LAG[0]:
        yield _either(kinds.PASSENGER_LAGS, lag, lag > _LAG[1])


def _note(kind: MixtureCaveatKind, value: float | None = None) -> MixtureCaveat:
    return MixtureCaveat(kind=kind, severity=Severity.NOTE, value=value)


def _warning(kind: MixtureCaveatKind, value: float | None = None) -> MixtureCaveat:
    return MixtureCaveat(kind=kind, severity=Severity.WARNING, value=value)


def _either(kind: MixtureCaveatKind, value: float, grave: bool) -> MixtureCaveat:
    return _warning(kind, value) if grave else _note(kind, value)
