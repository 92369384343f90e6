"""Which input of an evaporation counts most: each changed by a tenth, one after the other."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from enum import Enum
from typing import Any

from physics.evaporation import Cancelled, EndReason, Evaporation, evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
from physics.passenger import Passenger
from physics.ramps import Control, Ramp, Stage
from physics.trap_path import PathAround, TrapPath, TrapPoint


class Input(Enum):
    """What is changed. CONTROL: every value of one control, as by a wrong calibration; FREQUENCIES: of the whole trap,
    its depth kept."""

    ATOMS = "atoms"
    TEMPERATURE = "temperature"
    SCATTERING_LENGTH = "scattering length"
    BACKGROUND_LIFETIME = "background lifetime"
    TWO_BODY = "two-body loss"
    THREE_BODY = "three-body loss"
    HEATING = "heating"
    INTENSITY_NOISE = "intensity noise"
    POINTING_NOISE = "pointing noise"
    FREQUENCIES = "trap frequencies"
    DURATION = "duration of the ramp"
    CONTROL = "control"
    PASSENGER_ATOMS = "atoms of the passenger"
    PASSENGER_TEMPERATURE = "temperature of the passenger"
    LENGTH_BETWEEN = "scattering length between the species"

    @property
    def label(self) -> str:
        return self.value


@dataclass(frozen=True, kw_only=True)
class RampSensitivity:
    """What one input does.

    Attributes
    ----------
    input : Input. control : which one, for CONTROL.
    change : float. [1] Relative change.
    atoms_less, atoms_more : at the end, with the input divided and multiplied by 1 + change. [1]
    reason_less, reason_more : why these runs ended.
    slope : d ln(atoms at the end)/d ln(input), from the two. [1]
    passenger_less, passenger_more : T/Tc or T/TF of the passenger at the end of the same runs. [1] NaN without one.
    passenger_slope : of its logarithm, as `slope`. [1]
    """

    input: Input
    control: Control | None
    change: float
    atoms_less: float
    atoms_more: float
    reason_less: EndReason
    reason_more: EndReason
    slope: float
    passenger_less: float = math.nan
    passenger_more: float = math.nan
    passenger_slope: float = math.nan

    @property
    def changes_end(self) -> bool:
        """Whether the runs end for different reasons, as where one no longer reaches the target."""
        return self.reason_less is not self.reason_more


@dataclass(frozen=True, kw_only=True)
class _Case:
    gas: Gas
    atoms: float
    temperature: float
    ramp: Ramp
    path: TrapPath
    losses: Losses
    passenger: Passenger | None

    def run(self, target: Target | None) -> tuple[Evaporation, float]:
        """The first gas, and T/Tc or T/TF of the passenger at its end."""
        start = (self.gas, self.atoms, self.temperature, self.ramp, self.path)
        if self.passenger is None:
            return evaporate(*start, losses=self.losses, target=target, rows=1), math.nan
        from physics.sympathetic import evaporate_with_passenger

        both = evaporate_with_passenger(*start, self.passenger, losses=self.losses, target=target, rows=1)
        return both.coolant, both.passenger.final["reduced_temperature"]

    def with_passenger(self, **changes: Any) -> _Case:
        """With another passenger, where there is one."""
        return self if self.passenger is None else replace(self, passenger=replace(self.passenger, **changes))


@dataclass(frozen=True, kw_only=True)
class _Stretched(PathAround):
    """A trap whose frequencies are all multiplied, its depth kept."""

    factor: float

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        point = self.path.at(controls)
        if point.depth is None or point.frequencies is None:
            return point
        x, y, z = (self.factor * f for f in point.frequencies)
        return replace(point, volume=point.volume / self.factor**3, frequencies=(x, y, z))


@dataclass(frozen=True, kw_only=True)
class _Miscalibrated(PathAround):
    """A trap of which one control does more than it says."""

    control: Control
    factor: float

    def at(self, controls: Mapping[Control, float]) -> TrapPoint:
        if self.control not in controls:
            return self.path.at(controls)
        return self.path.at({**controls, self.control: self.factor * controls[self.control]})


def ramp_sensitivities(
    gas: Gas,
    atoms: float,
    temperature: float,
    ramp: Ramp,
    path: TrapPath,
    *,
    losses: Losses | None = None,
    target: Target | None = None,
    passenger: Passenger | None = None,
    change: float = 0.1,
    tick: Callable[[float], bool] | None = None,
) -> tuple[RampSensitivity, ...]:
    """How the atom number at the end answers to each input, the strongest first; those not given are left out.

    Those that change why the run ends come before all others. Arguments are those of `evaporate`, and of
    `evaporate_with_passenger` where there is a passenger: what both share is changed for both. Transfers keep their
    trap as it is.
    """
    if not 0.0 < change < 1.0:
        raise ValueError(f"relative change of an input must be between 0 and 1, got {change:g}")
    case = _Case(
        gas=gas,
        atoms=atoms,
        temperature=temperature,
        ramp=ramp,
        path=path,
        losses=losses or Losses(),
        passenger=passenger,
    )
    found = []
    inputs = list(_inputs(case))
    for index, (kind, control, changed) in enumerate(inputs):
        if tick is not None and not tick(index / len(inputs)):
            raise Cancelled
        (less, rider_less), (more, rider_more) = (
            changed(factor).run(target) for factor in (1.0 / (1.0 + change), 1.0 + change)
        )
        ends = [float(run.atoms[-1]) if len(run.atoms) else 0.0 for run in (less, more)]
        found.append(
            RampSensitivity(
                input=kind,
                control=control,
                change=change,
                atoms_less=ends[0],
                atoms_more=ends[1],
                reason_less=less.reason,
                reason_more=more.reason,
                slope=_slope(ends[0], ends[1], change),
                passenger_less=rider_less,
                passenger_more=rider_more,
                passenger_slope=_slope(rider_less, rider_more, change),
            )
        )
    return tuple(sorted(found, key=lambda one: (not one.changes_end, -abs(one.slope))))


def ending(
    gas: Gas,
    atoms: float,
    temperature: float,
    ramp: Ramp,
    path: TrapPath,
    *,
    losses: Losses,
    target: Target | None,
    passenger: Passenger | None,
) -> tuple[Evaporation, float]:
    """How the same ramp ends without any change, and T/Tc or T/TF of the passenger then; NaN without one."""
    case = _Case(
        gas=gas, atoms=atoms, temperature=temperature, ramp=ramp, path=path, losses=losses, passenger=passenger
    )
    return case.run(target)


def _slope(less: float, more: float, change: float) -> float:
    return math.log(more / less) / (2.0 * math.log1p(change)) if min(less, more) > 0.0 else math.nan


def _inputs(case: _Case) -> Iterator[tuple[Input, Control | None, Callable[[float], _Case]]]:
    yield Input.ATOMS, None, lambda f: replace(case, atoms=f * case.atoms)
    yield Input.TEMPERATURE, None, lambda f: replace(case, temperature=f * case.temperature)
    if case.gas.scattering_length and case.gas.cold_cross_section:
        length = case.gas.scattering_length
        yield (
            Input.SCATTERING_LENGTH,
            None,
            lambda f: replace(case, gas=replace(case.gas, scattering_length=f * length)),
        )
    for kind, name in (
        (Input.BACKGROUND_LIFETIME, "background_lifetime"),
        (Input.TWO_BODY, "two_body"),
        (Input.THREE_BODY, "three_body"),
        (Input.HEATING, "heating"),
        (Input.INTENSITY_NOISE, "intensity_noise"),
        (Input.POINTING_NOISE, "pointing_noise"),
    ):
        if getattr(case.losses, name) is not None:
            yield kind, None, _loss(case, name)
    if _first_point(case).frequencies is not None:
        yield Input.FREQUENCIES, None, _stretched(case)
    yield Input.DURATION, None, lambda f: replace(case, ramp=_longer(case.ramp, f))
    moved = dict.fromkeys(move.control for stage in case.ramp.stages for move in stage.moves)
    for control in moved:
        if control in case.path.standing:
            yield Input.CONTROL, control, _calibration(case, control)
    if case.passenger is not None:
        yield from _of_passenger(case, case.passenger)


def _of_passenger(
    case: _Case, passenger: Passenger
) -> Iterator[tuple[Input, Control | None, Callable[[float], _Case]]]:
    yield Input.PASSENGER_ATOMS, None, lambda f: case.with_passenger(atoms=f * passenger.atoms)
    yield Input.PASSENGER_TEMPERATURE, None, lambda f: case.with_passenger(temperature=f * passenger.temperature)
    length = passenger.scattering_length
    if length != 0.0:
        yield Input.LENGTH_BETWEEN, None, lambda f: case.with_passenger(scattering_length=f * length)


def _stretched(case: _Case) -> Callable[[float], _Case]:
    def stretched(factor: float) -> _Case:
        changed = replace(case, path=_Stretched(path=case.path, factor=factor))
        own = case.passenger
        return changed if own is None else changed.with_passenger(path=_Stretched(path=own.path, factor=factor))

    return stretched


def _first_point(case: _Case) -> TrapPoint:
    """The trap at the start of the ramp."""
    return case.path.at(next(case.ramp.placed(case.path.standing)).values(0.0))


def _loss(case: _Case, name: str) -> Callable[[float], _Case]:
    def changed(factor: float) -> _Case:
        one = replace(case, losses=replace(case.losses, **{name: factor * getattr(case.losses, name)}))
        own = None if case.passenger is None or name not in _OF_BOTH else case.passenger.losses
        if own is None or getattr(own, name) is None:
            return one
        return one.with_passenger(losses=replace(own, **{name: factor * getattr(own, name)}))

    return changed


_OF_BOTH = frozenset({"background_lifetime", "intensity_noise", "pointing_noise"})
"""Losses whose cause is the same for both gases."""


def _calibration(case: _Case, control: Control) -> Callable[[float], _Case]:
    def changed(factor: float) -> _Case:
        one = replace(case, path=_Miscalibrated(path=case.path, control=control, factor=factor))
        own = case.passenger
        if own is None or not own.follows(control):
            return one
        return one.with_passenger(path=_Miscalibrated(path=own.path, control=control, factor=factor))

    return changed


def _longer(ramp: Ramp, factor: float) -> Ramp:
    def stretched(stage: Stage) -> Stage:
        moves = tuple(
            replace(move, points=tuple((factor * t, value) for t, value in move.points)) for move in stage.moves
        )
        return replace(stage, duration=factor * stage.duration, moves=moves)

    return Ramp(stages=tuple(stretched(stage) for stage in ramp.stages))
