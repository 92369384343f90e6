"""What a simulated ramp does not cover, or what it says against itself: which caveat, how grave, and its number.

Kinds, severities and SI numbers, as in `physics.caveats`; the sentences are written where they are shown.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum

from physics.caveats import NARROW, Severity, gravest_first
from physics.evaporation import Evaporation
from physics.evaporation_rates import Process
from physics.ramp_extremes import RampExtremes


class RampCaveatKind(Enum):
    """Every caveat of a ramp; its value says what the number of the caveat is."""

    POLARISED = "no value: fermions of one spin state do not collide, and so do not evaporate"
    SHALLOW = "lowest depth over kT: the cut distribution is an estimate there"
    ESTIMATES = "highest classical peak phase-space density: N and T are estimates there"
    FAST_TRAP = "largest |dw/dt|/w^2: the trap changes within its own period"
    FAST_DEPTH = "largest |dlnU/dt| times the rethermalisation time: the ramp outruns the collisions"
    HYDRODYNAMIC = "largest mean collision rate over the highest angular frequency: atoms do not leave freely"
    FAST_LOSS = "largest share of the atoms lost in one rethermalisation time, evaporation apart"
    ONE_WAY_OUT = "share of all directions that lead out: the rate of evaporation is an upper bound"
    PAULI_BLOCKING = "lowest T/TF: filled levels block collisions, which is left out"
    TRANSFER_APART = "distance of the minima of two traps over the radius of the cloud, whose swing counts as heat"
    LIGHT_HEATING = "energy that scattered light brings in over the energy at the end"
    SPIN_FLIPS = "share of the atoms lost at the zero of the field: an order of magnitude"
    NO_BACKGROUND = "no value: no background lifetime is given"
    THREE_BODY_UNKNOWN = "no value: K3 of bosons is not known"
    THREE_BODY_SCALING = "K3 over the most that a large scattering length allows"
    THREE_BODY_UNITARITY = "K3 over its largest value at the highest temperature"
    LENGTH_RECALLED = "scattering length [m]: recalled from its source, not read there"
    TWO_BODY_RECALLED = "K2 [m^3/s]: recalled from its source, not read there"
    THREE_BODY_RECALLED = "K3 [m^6/s]: recalled from its source, not read there"


@dataclass(frozen=True, kw_only=True)
class RampCaveat:
    """One caveat. value : the number that raised it; None where there is none."""

    kind: RampCaveatKind
    severity: Severity
    value: float | None = None

    @property
    def id(self) -> str:
        return self.kind.name.lower()


# Shown, and warned about.
_TRUNCATION = (5.0, 4.0)
_CLASSICAL_DENSITY = 0.3
_ADIABATICITY = (0.1, 1.0)
_DEPTH_CHANGE = (1.0, 3.0)
_HYDRODYNAMIC = (1.0, 5.0)
_LOSS = (0.1, 1.0)
_FERMI = 0.5
_LIGHT = 0.1
_FLIPS = (0.01, 0.1)
_APART = (0.3, 1.0)


def ramp_caveats(
    run: Evaporation, extremes: RampExtremes, *, open_share: float | None = None
) -> tuple[RampCaveat, ...]:
    """The caveats of a simulated ramp, gravest first.

    Parameters
    ----------
    run : Evaporation
    extremes : RampExtremes. Of that run.
    open_share : float or None. [1] Share of all directions in which hot atoms get out; None where it is not known.
    """
    return gravest_first((*_kinetics(extremes, open_share), *_losses(run, extremes)))


def _kinetics(extremes: RampExtremes, open_share: float | None) -> Iterator[RampCaveat]:
    kinds = RampCaveatKind
    if extremes.polarised:
        yield RampCaveat(kind=kinds.POLARISED, severity=Severity.REFUSAL)
    if extremes.lowest_truncation < _TRUNCATION[0]:
        grave = extremes.lowest_truncation < _TRUNCATION[1]
        yield _caveat(kinds.SHALLOW, extremes.lowest_truncation, grave)
    if extremes.highest_classical_density > _CLASSICAL_DENSITY:
        yield _caveat(kinds.ESTIMATES, extremes.highest_classical_density, False)
    for kind, value, (shown, warned) in (
        (kinds.FAST_TRAP, extremes.fastest_trap, _ADIABATICITY),
        (kinds.FAST_DEPTH, extremes.fastest_depth, _DEPTH_CHANGE),
        (kinds.HYDRODYNAMIC, extremes.most_hydrodynamic, _HYDRODYNAMIC),
        (kinds.FAST_LOSS, extremes.fastest_loss, _LOSS),
    ):
        if value > shown:
            yield _caveat(kind, value, value > warned)
    if extremes.farthest_transfer > _APART[0]:
        yield _caveat(kinds.TRANSFER_APART, extremes.farthest_transfer, extremes.farthest_transfer > _APART[1])
    if open_share is not None and open_share < NARROW and not extremes.polarised:
        yield _caveat(kinds.ONE_WAY_OUT, open_share, False)
    if extremes.lowest_fermi_temperature < _FERMI and not extremes.polarised:
        yield _caveat(kinds.PAULI_BLOCKING, extremes.lowest_fermi_temperature, False)


def _losses(run: Evaporation, extremes: RampExtremes) -> Iterator[RampCaveat]:
    kinds = RampCaveatKind
    budget = run.budget
    light = budget.energy[Process.LIGHT] / budget.energy_after
    if light > _LIGHT:
        yield _caveat(kinds.LIGHT_HEATING, light, light > 1.0)
    flips = budget.atoms[Process.SPIN_FLIPS] / budget.atoms_before
    if flips > _FLIPS[0]:
        yield _caveat(kinds.SPIN_FLIPS, flips, flips > _FLIPS[1])
    if extremes.background_unknown:
        yield RampCaveat(kind=kinds.NO_BACKGROUND, severity=Severity.NOTE)
    if run.gas.bosons and run.losses.three_body is None:
        yield RampCaveat(kind=kinds.THREE_BODY_UNKNOWN, severity=Severity.NOTE)
    if extremes.three_body_scaling > 1.0:
        yield _caveat(kinds.THREE_BODY_SCALING, extremes.three_body_scaling, True)
    if extremes.three_body_unitarity > 1.0:
        yield _caveat(kinds.THREE_BODY_UNITARITY, extremes.three_body_unitarity, True)


def _caveat(kind: RampCaveatKind, value: float, grave: bool) -> RampCaveat:
    return RampCaveat(kind=kind, severity=Severity.WARNING if grave else Severity.NOTE, value=value)
