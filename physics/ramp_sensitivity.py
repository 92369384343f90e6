"""Which input of an evaporation counts most: each changed by a tenth, one after the other."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from enum import Enum

from physics.evaporation import Cancelled, EndReason, Evaporation, evaporate
from physics.evaporation_target import Target
from physics.gas import Gas
from physics.losses import Losses
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
    """

    input: Input
    control: Control | None
    change: float
    atoms_less: float
    atoms_more: float
    reason_less: EndReason
    reason_more: EndReason
    slope: float

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

    def run(self, target: Target | None) -> Evaporation:
        return evaporate(
            self.gas,
            self.atoms,
            self.temperature,
            self.ramp,
            self.path,
            losses=self.losses,
            target=target,
            rows=1,
        )


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
    change: float = 0.1,
    tick: Callable[[float], bool] | None = None,
) -> tuple[RampSensitivity, ...]:
    """How the atom number at the end answers to each input, the strongest first; those not given are left out.

    Those that change why the run ends come before all others. Arguments are those of `evaporate`; transfers keep their
    trap as it is.
    """
    if not 0.0 < change < 1.0:
        raise ValueError(f"relative change of an input must be between 0 and 1, got {change:g}")
    case = _Case(gas=gas, atoms=atoms, temperature=temperature, ramp=ramp, path=path, losses=losses or Losses())
    found = []
    inputs = list(_inputs(case))
    for index, (kind, control, changed) in enumerate(inputs):
        if tick is not None and not tick(index / len(inputs)):
            raise Cancelled
        less, more = (changed(factor).run(target) for factor in (1.0 / (1.0 + change), 1.0 + change))
        ends = [float(run.atoms[-1]) if len(run.atoms) else 0.0 for run in (less, more)]
        slope = math.nan
        if min(ends) > 0.0:
            slope = math.log(ends[1] / ends[0]) / (2.0 * math.log1p(change))
        found.append(
            RampSensitivity(
                input=kind,
                control=control,
                change=change,
                atoms_less=ends[0],
                atoms_more=ends[1],
                reason_less=less.reason,
                reason_more=more.reason,
                slope=slope,
            )
        )
    return tuple(sorted(found, key=lambda one: (not one.changes_end, -abs(one.slope))))


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
        yield Input.FREQUENCIES, None, lambda f: replace(case, path=_Stretched(path=case.path, factor=f))
    yield Input.DURATION, None, lambda f: replace(case, ramp=_longer(case.ramp, f))
    moved = dict.fromkeys(move.control for stage in case.ramp.stages for move in stage.moves)
    for control in moved:
        if control in case.path.standing:
            yield Input.CONTROL, control, _calibration(case, control)


def _first_point(case: _Case) -> TrapPoint:
    """The trap at the start of the ramp."""
    return case.path.at(next(case.ramp.placed(case.path.standing)).values(0.0))


def _loss(case: _Case, name: str) -> Callable[[float], _Case]:
    return lambda f: replace(case, losses=replace(case.losses, **{name: f * getattr(case.losses, name)}))


def _calibration(case: _Case, control: Control) -> Callable[[float], _Case]:
    return lambda f: replace(case, path=_Miscalibrated(path=case.path, control=control, factor=f))


def _longer(ramp: Ramp, factor: float) -> Ramp:
    def stretched(stage: Stage) -> Stage:
        moves = tuple(
            replace(move, points=tuple((factor * t, value) for t, value in move.points)) for move in stage.moves
        )
        return replace(stage, duration=factor * stage.duration, moves=moves)

    return Ramp(stages=tuple(stretched(stage) for stage in ramp.stages))
