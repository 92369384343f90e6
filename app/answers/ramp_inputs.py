"""What the kinetics of evaporation takes of a plan: gas, losses, trap, ramp, target, limits and measured clouds."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from app.answers.inputs import dipolar_length_of, scattering_in_use
from app.answers.losses import losses_in_use, typed_losses
from app.answers.part import part
from app.answers.trap import trap_answer, trap_of
from app.plan_field import PlanError
from physics.constants import boltzmann
from physics.gas import Gas
from physics.ramp_shapes import Shape
from physics.ramps import Control, Knob, Move, Ramp, Stage
from physics.species import State, load_species
from physics.traps import HarmonicTrap

if TYPE_CHECKING:
    from app.plan import MeasuredChoice, MoveChoice, Plan, StageChoice
    from app.units import Quantity
    from physics.evaporation_target import Target
    from physics.held_truncation import Limits
    from physics.losses import Losses
    from physics.transfer import Transfer
    from physics.trap_path import TrapPath

Standing = Mapping[Control, float]
"""Where each control of a trap stands. [SI]"""


def state_of(plan: Plan) -> State:
    """The state of the plan's atoms."""
    return load_species(plan.species.key).state(plan.species.state)


def gas_of(plan: Plan) -> Gas:
    """The plan's atoms, apart from trap, number and temperature."""
    state = state_of(plan)
    length = scattering_in_use(plan, state).value
    return Gas(
        statistics=state.statistics,
        mass=state.mass,
        spin_components=plan.species.spin_components or state.spin_components,
        scattering_length=None if length is None or math.isnan(length) else float(length),
        dipolar_length=dipolar_length_of(plan, state),
    )


def losses_of(plan: Plan) -> Losses:
    """The losses to reckon with, by single numbers: typed ones, else those of the data."""
    typed = {name: quantity.value for name, quantity in typed_losses(plan).items()}
    return losses_in_use(plan, state_of(plan), typed).losses


def path_of(plan: Plan) -> TrapPath:
    """The plan's trap and how its controls change it. What it computes on the way is kept for the same trap.

    Raises
    ------
    PlanError
        The light or the coils cannot hold these atoms.
    """
    moved = {move.control.knob for stage in plan.ramp for move in stage.moves}
    return _path(plan, Knob.DEPTH in moved and moved <= {Knob.DEPTH, Knob.GRADIENT})


@part("species.key", "species.state", "trap")
def _path(plan: Plan, by_depth: bool) -> TrapPath:
    """by_depth : a quadrupole is moved by its depth, whatever takes the atoms out there."""
    from physics.surveyed_path import SurveyedPath  # loads with the surveys
    from physics.trap_path import HarmonicPath, QuadrupolePath

    state, made = state_of(plan), trap_of(plan)
    if isinstance(made, HarmonicTrap):
        return HarmonicPath(mass=state.mass, trap=made)
    coils = made.coils
    if by_depth and coils is not None and coils.quadrupole and not made.shining and made.gravity is None:
        survey = trap_answer(plan).survey
        moment = 0.0 if survey.potential is None else survey.potential.zeeman_slope
        if survey.depth is not None and moment > 0.0:
            return QuadrupolePath(
                moment=moment,
                gradient=abs(coils.gradient or 0.0),
                depth=survey.depth,
                axis=coils.axis,
                centre=coils.centre,
            )
    return SurveyedPath(trap=made, state=state)


def ramp_of(plan: Plan) -> Ramp:
    """The plan's ramp in SI, with every control where its trap has it.

    Raises
    ------
    PlanError
        There is no stage; or one moves a control that its trap does not have, or in a way that cannot be.
    """
    from physics.trap_path import DEPTH, HarmonicPath

    if not plan.ramp:
        raise PlanError("the plan has no ramp: give it stages [[ramp.stage]]")
    path = path_of(plan)
    standing, stages, key = path.standing, [], "trap.depth"
    for number, choice in enumerate(plan.ramp, start=1):
        transfer = _transfer(plan, choice)
        if transfer is not None:
            path = transfer.path
            standing, key = path.standing, "ramp.stage.trap.depth"
        try:
            stage = _stage(choice, standing, transfer)
            placed = next(Ramp(stages=(replace(stage, transfer=None),)).placed(standing))
        except ValueError as error:
            here = f"stage {number} of the ramp"
            sentence = str(error)
            if sentence.startswith("stage 1"):  # it was placed alone
                raise PlanError(sentence.replace("stage 1", here, 1)) from None
            raise PlanError(f"{here}: {sentence}") from None
        if isinstance(path, HarmonicPath) and DEPTH not in placed.courses:
            raise PlanError(
                f"stage {number} of the ramp: the depth of the trap is not known; give {key}, "
                "or a stage that moves the depth from a start"
            )
        standing = {**standing, **placed.values(stage.duration)}
        stages.append(stage)
    return Ramp(stages=tuple(stages))


def _stage(choice: StageChoice, standing: Standing, transfer: Transfer | None) -> Stage:
    duration = choice.duration.value
    moves = tuple(_move(move, standing, duration) for move in choice.moves)
    return Stage(duration=duration, moves=moves, transfer=transfer, label=choice.label)


def _transfer(plan: Plan, choice: StageChoice) -> Transfer | None:
    from app.plan import Handing
    from physics.transfer import Transfer

    if choice.trap is None:
        return None
    path = path_of(replace(plan, trap=choice.trap))
    return Transfer(path=path, sudden=choice.handing is Handing.SUDDEN)


def _move(choice: MoveChoice, standing: Standing, duration: float) -> Move:
    """Physics finds the tau of a power law from its end: of one that is given by tau, this is its end."""
    exponent, end = _value(choice.exponent), _value(choice.end)
    if choice.shape is Shape.POWER_LAW and choice.tau is not None and exponent is not None:
        start = standing.get(choice.control, math.nan) if choice.start is None else choice.start.value
        if choice.control in standing and math.isnan(start):
            raise ValueError(f"stage 1 needs a start of {choice.control.label}, which is not known")
        end = 0.0 if math.isnan(start) else start * (1.0 + duration / choice.tau.value) ** -exponent
    return Move(
        control=choice.control,
        start=_value(choice.start),
        end=end,
        shape=choice.shape,
        exponent=exponent,
        points=tuple((time.value, value.value) for time, value in choice.points),
    )


def target_of(plan: Plan) -> Target | None:
    """Where an evaporation is to end; None: at the end of its ramp."""
    from app.plan import TARGETS
    from physics.evaporation_target import Target

    given = {name: getattr(plan.target, name) for name in TARGETS}
    named = {name: quantity.value for name, quantity in given.items() if quantity is not None}
    return Target(**named) if named else None


def limits_of(plan: Plan, control: Control, standing: Standing = MappingProxyType({})) -> Limits:
    """What a designed ramp of a control keeps.

    standing : where the controls stand. All light together keeps the limits of each beam's power, whose share of where
        it stands the scale is.
    """
    from physics.held_truncation import Limits

    low: list[float] = []
    high: list[float] = []
    fastest: list[float] = []
    for own in plan.limits.controls:
        unit = 1.0 if own.control == control else math.nan
        if control.knob is Knob.SCALE and own.control.knob is Knob.POWER:
            unit = standing.get(own.control, math.nan)
        if unit > 0.0:
            for found, value in ((low, own.low), (high, own.high), (fastest, own.fastest)):
                found += [] if value is None else [value.value / unit]
    return Limits(
        time=_value(plan.limits.time),
        low=max(low, default=None),
        high=min(high, default=None),
        fastest=min(fastest, default=None),
    )


@dataclass(frozen=True, kw_only=True)
class MeasuredCloud:
    """A measured cloud in the numbers of the kinetics.

    atoms, temperature : [1] [K] of one spin state
    atoms_sigma, temperature_sigma : standard uncertainties; None where none is given
    time : [s] of the ramp; None where the plan has none, and the cloud is in its trap
    reason : why the temperature is NaN; else empty
    """

    choice: MeasuredChoice
    atoms: float
    temperature: float
    atoms_sigma: float | None = None
    temperature_sigma: float | None = None
    time: float | None = None
    reason: str = ""


def measured_clouds(plan: Plan) -> tuple[MeasuredCloud, ...]:
    """The clouds that were measured. Temperatures that are given by widths follow from the trap at that time.

    Raises
    ------
    PlanError
        One was measured after a stage, or at a time, that the ramp does not have.
    """
    return tuple(_measured(plan, choice) for choice in plan.measured)


def _measured(plan: Plan, choice: MeasuredChoice) -> MeasuredCloud:
    from physics.continued_ramp import after_stage, after_time
    from physics.trap_path import DEPTH

    path, time = path_of(plan), None
    if choice.stage is not None or choice.time is not None:
        try:
            ramp = ramp_of(plan)
            if choice.stage is not None:
                rest = after_stage(ramp, path, choice.stage)
            else:
                rest = after_time(ramp, path, choice.time.value if choice.time is not None else 0.0)
        except ValueError as error:
            raise PlanError(f'the measured cloud "{choice.label}": {error}') from None
        path, time = rest.path, rest.begin
    found = MeasuredCloud(
        choice=choice,
        atoms=choice.atoms.value,
        atoms_sigma=choice.atoms.sigma,
        temperature=math.nan,
        time=time,
    )
    if choice.temperature is not None:
        return replace(found, temperature=choice.temperature.value, temperature_sigma=choice.temperature.sigma)
    standing = dict(path.standing)
    if math.isnan(standing.get(DEPTH, 0.0)):
        standing[DEPTH] = boltzmann  # unknown; the frequencies do not depend on it
    point = path.at(standing)
    if point.frequencies is None:
        return replace(found, reason=point.reason or "the trap has no frequencies, and widths say nothing there")
    assert choice.expansion_time is not None
    temperature, sigma = temperature_of_widths(
        state_of(plan).mass, point.frequencies, choice.widths, choice.expansion_time
    )
    return replace(found, temperature=temperature, temperature_sigma=sigma)


def temperature_of_widths(
    mass: float, frequencies: tuple[float, float, float], widths: tuple[Quantity, ...], time: Quantity
) -> tuple[float, float | None]:
    """Temperature of a classical cloud by its rms widths after free expansion, with its uncertainty. [K]

        sigma_i^2 = kT/(m w_i^2) (1 + w_i^2 t^2)

    holds for every time t where the cloud is a thermal gas without collisions while it expands: below about 1.5 Tc or
    TF statistics makes the widths differ, and near the hydrodynamic limit they depend on the order of the frequencies.
    Widths along x, y, z in turn. The mean over the axes is weighted by their uncertainties where all have one, else it
    is a plain mean, and the uncertainty is None.
    """
    omega = 2.0 * np.pi * np.array(frequencies[: len(widths)])
    sigma = np.array([width.value for width in widths])
    scaled = (omega * time.value) ** 2
    temperatures = mass * (sigma * omega) ** 2 / (boltzmann * (1.0 + scaled))
    if any(width.sigma is None for width in widths):
        return float(np.mean(temperatures)), None
    errors = 2.0 * temperatures * np.array([(width.sigma or 0.0) / width.value for width in widths])
    weights = np.ones(len(widths)) if np.any(errors == 0.0) else errors**-2.0
    weights = weights / np.sum(weights)
    # The expansion time is common to all axes: d ln T/d ln t = -2 w^2 t^2/(1 + w^2 t^2).
    common = 2.0 * scaled / (1.0 + scaled) * temperatures * ((time.sigma or 0.0) / time.value if time.value else 0.0)
    spread = math.hypot(float(np.sqrt(np.sum((weights * errors) ** 2))), float(np.sum(weights * common)))
    return float(np.sum(weights * temperatures)), spread


def _value(quantity: Quantity | None) -> float | None:
    return None if quantity is None else quantity.value
