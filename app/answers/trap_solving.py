"""A trap of beams and coils solved backwards, from a plan to the plan in which the wish is met.

What is put in is rounded to the digits that a person types, and the trap is surveyed with that.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from enum import Enum
from typing import TYPE_CHECKING

from app.answers.preparation import prepare_trap
from app.answers.trap import TrapAnswer, trap_answer, trap_of
from app.plan_field import PlanError
from app.trap_choices import BEAM_FIELDS, COILS_FIELDS, CoilsChoice
from app.trap_edits import with_beam
from app.units import Kind, Quantity, quantity, unit_of
from physics.checks import as_floats
from physics.traps import Trap

if TYPE_CHECKING:
    from app.plan import Plan
    from physics.species import State

_DIGITS = 5


class Aim(Enum):
    """What is looked for."""

    POWER_FOR_DEPTH = "power for a depth"
    POWER_FOR_MEAN_FREQUENCY = "power for a mean frequency"
    LOWEST_POWER = "lowest power that holds"
    LEVITATION = "gradient that levitates"
    POWER_MEASURED = "power from a measured frequency"
    WAIST_MEASURED = "waist from a measured frequency"

    @property
    def of_beam(self) -> bool:
        """Whether it is asked about one of the beams."""
        return self is not Aim.LEVITATION

    @property
    def measured(self) -> bool:
        """Whether a measured frequency along an axis calibrates the beam."""
        return self in (Aim.POWER_MEASURED, Aim.WAIST_MEASURED)

    @property
    def wants_number(self) -> bool:
        """Whether a value is wanted, or was measured: a depth [J], or a frequency [Hz]."""
        return self not in (Aim.LOWEST_POWER, Aim.LEVITATION)


@dataclass(frozen=True, kw_only=True)
class Wish:
    """What a user wants to know.

    beam : its name, where it is asked about one
    axis : 0, 1, 2: along which a frequency was measured, nearest to x, y, z
    number : wanted depth [J], or wanted or measured frequency [Hz]
    which : 0 for the horizontal and 1 for the vertical waist; None: both, in proportion
    """

    aim: Aim
    beam: str = ""
    axis: int = 0
    number: float | None = None
    which: int | None = None


@dataclass(frozen=True, kw_only=True, eq=False)
class SolvedTrap:
    """What meets a wish: plans before and after, the trap in both, and the quantities that change, with their names."""

    wish: Wish
    before: Plan
    after: Plan
    trap_before: TrapAnswer
    trap_after: TrapAnswer
    changes: tuple[tuple[str, Quantity | None, Quantity], ...]


def solve_trap(plan: Plan, wish: Wish) -> SolvedTrap:
    """The plan in which a wish is met.

    Raises ValueError, in one sentence, where there is none, or where the wish is not complete.
    """
    if plan.trap.harmonic:
        raise PlanError("a trap that is given by its frequencies has no beams or coils to solve for")
    if wish.aim.wants_number and wish.number is None:
        raise PlanError(f"the {'measured frequency' if wish.aim.measured else 'wanted value'} is missing")
    before = trap_answer(plan)
    after, changes = _levitated(plan, before.state) if not wish.aim.of_beam else _with_solved_beam(plan, wish, before)
    prepare_trap(after)
    return SolvedTrap(
        wish=wish, before=plan, after=after, trap_before=before, trap_after=trap_answer(after), changes=changes
    )


Changes = tuple[tuple[str, "Quantity | None", "Quantity"], ...]


def _with_solved_beam(plan: Plan, wish: Wish, before: TrapAnswer) -> tuple[Plan, Changes]:
    beam = plan.trap.beam(wish.beam)
    trap = trap_of(plan)
    assert isinstance(trap, Trap)  # its frequencies are not given
    if wish.aim is Aim.WAIST_MEASURED:
        waists = _calibrated_waists(trap, before.state, wish, beam.waists)
        names = (
            (f"waist of beam {wish.beam}",)
            if len(waists) == 1
            else tuple(f"{which} waist of beam {wish.beam}" for which in ("horizontal", "vertical"))
        )
        changes: Changes = tuple(
            (name, old, new) for name, old, new in zip(names, beam.waists, waists, strict=True) if new != old
        )
        return with_beam(plan, beam.name, replace(beam, waists=waists)), changes
    power = _rounded(_power(trap, before.state, wish), _kind(BEAM_FIELDS["power"].kind), beam.power, wish.aim)
    changed = replace(beam, power=power, on=True)
    return with_beam(plan, beam.name, changed), ((f"power of beam {beam.name}", beam.power, power),)


def _power(trap: Trap, state: State, wish: Wish) -> float:
    from physics.traps import solving

    number = 0.0 if wish.number is None else wish.number
    match wish.aim:
        case Aim.POWER_FOR_DEPTH:
            return solving.power_for_depth(trap, state, wish.beam, number).value
        case Aim.POWER_FOR_MEAN_FREQUENCY:
            return solving.power_for_mean_frequency(trap, state, wish.beam, number).value
        case Aim.POWER_MEASURED:
            return solving.calibrated_power(trap, state, wish.beam, wish.axis, number).value
        case _:
            return solving.lowest_power(trap, state, wish.beam)


def _calibrated_waists(trap: Trap, state: State, wish: Wish, old: tuple[Quantity, ...]) -> tuple[Quantity, ...]:
    from physics.traps.solving import calibrated_waist

    which = wish.which if len(old) == 2 else None
    assert wish.number is not None  # checked with the wish
    solved = calibrated_waist(trap, state, wish.beam, wish.axis, wish.number, which=which)
    kind = _kind(BEAM_FIELDS["waist"].kind)
    values = as_floats(solved.trap.beam(wish.beam).waists).tolist()
    return tuple(
        before if which not in (None, place) else _rounded(value, kind, before, wish.aim)
        for place, (before, value) in enumerate(zip(old, values, strict=False))
    )


def _levitated(plan: Plan, state: State) -> tuple[Plan, Changes]:
    from physics.traps.solving import levitation_gradient

    field = COILS_FIELDS["levitation"]
    old = None if plan.trap.coils is None else plan.trap.coils.levitation
    gradient = _rounded(levitation_gradient(state), _kind(field.kind), old, Aim.LEVITATION)
    coils = plan.trap.coils
    lifted = CoilsChoice(levitation=gradient) if coils is None else replace(coils, levitation=gradient)
    return replace(plan, trap=replace(plan.trap, coils=lifted)), (("levitation of the coils", old, gradient),)


def _rounded(value: float, kind: Kind, before: Quantity | None, aim: Aim) -> Quantity:
    """In the unit that is in use; the lowest power is rounded up, as below it nothing is held."""
    unit = kind.units[0] if before is None else unit_of(before.text, kind)
    found = quantity(value, unit, kind=kind, digits=_DIGITS)
    if aim is Aim.LOWEST_POWER and found.value <= value:
        step = 10.0 ** (math.floor(math.log10(value)) - _DIGITS + 1)
        found = quantity(value + step, unit, kind=kind, digits=_DIGITS)
    return found


def _kind(kind: Kind | None) -> Kind:
    assert kind is not None  # these fields are quantities
    return kind
