"""A trap of beams and coils solved backwards: a control is turned until the trap is what it should be."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from app.answers.trap import TrapAnswer, trap_of
from app.answers.trap_controls import OF_BEAM, Control, ControlKind, Until
from app.plan_field import PlanError
from app.trap_choices import BEAM_FIELDS, COILS_FIELDS, CoilsChoice, TrapChoice
from app.trap_sentences import control_name, control_text
from app.units import Quantity, best_unit, format_quantity
from app.words import number, temperature
from physics.constants import boltzmann
from physics.species import load_species
from physics.traps import Coils, Trap

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.plan import Plan
    from physics.species import State
    from physics.traps.survey import Survey


_OVER_EDGE = 1e-4
_AXES = {Until.FREQUENCY_X: 0, Until.FREQUENCY_Y: 1, Until.FREQUENCY_Z: 2}


@dataclass(frozen=True, kw_only=True, eq=False)
class SolvedControl:
    """Where a control must stand, in SI, and where it stood (None: it was not there); and the trap with it. `also`:
    where else, on the other side of where it stood."""

    control: Control
    before: float | None
    value: float
    answer: TrapAnswer
    also: float | None = None


def solve_until(plan: Plan, control: Control, until: Until, target: float | None = None) -> SolvedControl:
    """Turn a control of the plan's trap until what is wanted is met.

    Parameters
    ----------
    target : wanted depth [J] or frequency [Hz]; None for the wishes without one.

    Of the least value that still holds atoms the answer has the trap a ten-thousandth above: at the edge there is none.

    Raises ValueError, in one sentence, for a wish that cannot be met, a control that the trap does not have, or a trap
    that is given by its frequencies.
    """
    from physics.traps.solving import NoSolution, lowest_power, lowest_value, solve
    from physics.traps.survey import survey

    trap = trap_of(plan)
    if not isinstance(trap, Trap):
        raise PlanError("a trap that is given by its frequencies has no beams or coils to vary")
    state = load_species(plan.species.key).state(plan.species.state)
    if until is Until.LEVITATES:
        return _levitated(plan, trap, state, control)
    _require(trap, control)
    before, name = control.now(trap), control_name(control)
    also: float | None = None

    def change(value: float) -> Trap:
        return control.turned(trap, value)

    def tell(value: float) -> str:
        return control_text(control, value, digits=3)

    if until is Until.HOLDS:
        if control.kind is ControlKind.POWER:
            value = lowest_power(trap, state, control.beam)
        else:
            value = lowest_value(change, before, state, control=name, tell=tell)
        found = survey(change(value * (1.0 + _OVER_EDGE)), state)
    else:
        if target is None:
            raise PlanError(f"{until.value} needs a value")
        likely = _likely(control, state)
        try:
            solved = solve(change, _reading(until), target, before, state, control=name, tell=tell, likely=likely)
        except NoSolution as none:
            raise PlanError(f"{none}; {_closest(until, tell, none.closest)}") from none
        value, found, also = solved.value, solved.survey, solved.also
    answer = TrapAnswer(state=state, trap=_with(plan.trap, control, before, value), survey=found)
    return SolvedControl(control=control, before=before, value=value, answer=answer, also=also)


def _likely(control: Control, state: State) -> tuple[float, ...]:
    """Where a trap may be deepest within a narrow range: levitated atoms."""
    from physics.traps.solving import levitation_gradient

    if control.kind is not ControlKind.LEVITATION:
        return ()
    try:
        return (levitation_gradient(state),)
    except ValueError:
        return ()


def _closest(until: Until, tell: Callable[[float], str], closest: tuple[float, float] | None) -> str:
    """What comes closest to a wish that cannot be met, as a clause."""
    if closest is None:
        return "nothing is held there" if until is Until.DEPTH else "the trap has no frequencies there"
    value, reading = closest
    return f"the closest is {_reading_text(until, reading)}, with {tell(value)}"


def _reading_text(until: Until, value: float) -> str:
    if until is Until.DEPTH:
        return temperature(value / boltzmann)
    return f"{number(value, 4)} Hz"


def _levitated(plan: Plan, trap: Trap, state: State, control: Control) -> SolvedControl:
    from physics.traps.solving import levitation_gradient
    from physics.traps.survey import survey

    if control.kind is not ControlKind.LEVITATION:
        raise PlanError(f"only the levitation can be varied until it levitates, not the {control.kind.value}")
    value = levitation_gradient(state)
    coils = trap.coils
    lifted = replace(trap, coils=Coils(levitation=value) if coils is None else replace(coils, levitation=value))
    quantity = _quantity(value, ControlKind.LEVITATION)
    made = plan.trap.coils
    choice = CoilsChoice(levitation=quantity) if made is None else replace(made, levitation=quantity)
    answer = TrapAnswer(state=state, trap=replace(plan.trap, coils=choice), survey=survey(lifted, state))
    before = None if coils is None or not coils.levitation else float(coils.levitation)
    return SolvedControl(control=control, before=before, value=value, answer=answer)


def _require(trap: Trap, control: Control) -> None:
    if control.kind in OF_BEAM:
        trap.beam(control.beam)
    elif control.kind is ControlKind.POWERS:
        if not trap.beams:
            raise PlanError("the trap has no beams whose powers could be varied")
    elif trap.coils is None or not control.now(trap):
        raise PlanError(f"the coils of the trap have no {control.kind.value} to vary: give it a value to begin with")


def _reading(until: Until) -> Callable[[Survey], float | None]:
    if until is Until.DEPTH:
        return lambda found: found.depth
    if until is Until.MEAN_FREQUENCY:
        return lambda found: found.mean_frequency
    axis = _AXES[until]
    return lambda found: None if found.frequencies is None else float(found.frequencies[axis])


_FIELDS: dict[ControlKind, Any] = {
    ControlKind.POWER: BEAM_FIELDS["power"],
    ControlKind.POWERS: BEAM_FIELDS["power"],
    ControlKind.WAIST: BEAM_FIELDS["waist"],
    **{kind: COILS_FIELDS[kind.value] for kind in ControlKind if kind.value in COILS_FIELDS},
}


def control_unit(control: Control) -> str:
    """SI unit of a control; empty for a factor."""
    return "" if control.kind is ControlKind.POWERS else str(_FIELDS[control.kind].kind.si_unit)


def _quantity(value: float, kind: ControlKind) -> Quantity:
    """The value itself, and a text of it to read."""
    field = _FIELDS[kind].kind
    return Quantity(format_quantity(value, best_unit(value, field.units, field.si_unit), si_unit=field.si_unit), value)


def _with(choice: TrapChoice, control: Control, before: float, value: float) -> TrapChoice:
    """What is said of the trap, with the control at another value."""
    kind = control.kind
    match kind:
        case ControlKind.POWER:
            beam = choice.beam(control.beam)
            return choice.with_beam(beam.name, replace(beam, power=_quantity(value, kind), on=True))
        case ControlKind.POWERS:
            return replace(
                choice,
                beams=tuple(replace(b, power=_quantity(value * b.power.value, kind)) for b in choice.beams),
            )
        case ControlKind.WAIST:
            beam = choice.beam(control.beam)
            waists = tuple(_quantity(waist.value * value / before, kind) for waist in beam.waists)
            return choice.with_beam(beam.name, replace(beam, waists=waists))
        case _:
            assert choice.coils is not None  # _require has seen them
            changes: dict[str, Any] = {kind.value: _quantity(value, kind)}
            return replace(choice, coils=replace(choice.coils, **changes))
