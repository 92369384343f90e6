"""A trap of beams and coils solved backwards for a form: from a plan to the plan in which a wish is met.

What is put in is rounded to the digits that a person types, in the units in use, and the trap is surveyed with that.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from app.answers.preparation import prepare_trap
from app.answers.trap import TrapAnswer, trap_answer
from app.answers.trap_controls import Control, ControlKind, Until, controls
from app.answers.trap_until import solve_until
from app.trap_choices import BEAM_FIELDS, COILS_FIELDS, TrapChoice
from app.units import Kind, Quantity, quantity, unit_of

if TYPE_CHECKING:
    from app.plan import Plan

_DIGITS = 5


@dataclass(frozen=True, kw_only=True)
class Wish:
    """What is turned, until what. number : wanted or measured depth [J] or frequency [Hz]; None where none is."""

    control: Control
    until: Until
    number: float | None = None


@dataclass(frozen=True, kw_only=True)
class Change:
    """A quantity of the trap that changes, with its name; before is None where there was none."""

    name: str
    before: Quantity | None
    after: Quantity


@dataclass(frozen=True, kw_only=True, eq=False)
class SolvedTrap:
    """What meets a wish: plans before and after, the trap in both, and the quantities that change; and another value
    of the control [SI] that meets it too."""

    control: Control
    before: Plan
    after: Plan
    trap_before: TrapAnswer
    trap_after: TrapAnswer
    changes: tuple[Change, ...]
    also: float | None = None


def solvable(trap: TrapChoice) -> dict[Control, tuple[Until, ...]]:
    """What can be turned on a trap, and what each can be asked for; a gradient that levitates need not be there."""
    others: tuple[Until, ...] = tuple(until for until in Until if until is not Until.LEVITATES)
    found = dict.fromkeys(controls(trap), others)
    if trap.gravity_direction is not None and not trap.harmonic:
        levitation = Control(ControlKind.LEVITATION)
        found[levitation] = (Until.LEVITATES, *found.get(levitation, ()))
    return found


def solve_trap(plan: Plan, wish: Wish) -> SolvedTrap:
    """The plan in which a wish is met.

    Raises ValueError, in one sentence, where there is none, or where the wish is not complete.
    """
    before = trap_answer(plan)
    solved = solve_until(plan, wish.control, wish.until, wish.number)
    exact = solved.answer.trap
    changes, rounded = [], exact
    for change in _changes(plan.trap, exact, up=wish.until is Until.HOLDS):
        changes.append(change.told)
        rounded = change.put(rounded)
    after = replace(plan, trap=rounded)
    prepare_trap(after)
    return SolvedTrap(
        control=wish.control,
        before=plan,
        after=after,
        trap_before=before,
        trap_after=trap_answer(after),
        changes=tuple(changes),
        also=solved.also,
    )


@dataclass(frozen=True)
class _Rounded:
    """A change, rounded, and where in the trap it goes: in a beam, or with no name in the coils."""

    told: Change
    beam: str
    field: str
    place: int | None = None

    def put(self, trap: TrapChoice) -> TrapChoice:
        if not self.beam:
            assert trap.coils is not None  # they hold what changed
            return replace(trap, coils=replace(trap.coils, **self._entry(trap.coils)))
        beam = trap.beam(self.beam)
        return trap.with_beam(self.beam, replace(beam, **self._entry(beam)))

    def _entry(self, item: Any) -> dict[str, Any]:
        if self.place is None:
            return {self.field: self.told.after}
        values = list(getattr(item, self.field))
        values[self.place] = self.told.after
        return {self.field: tuple(values)}


def _changes(old: TrapChoice, new: TrapChoice, *, up: bool) -> Iterator[_Rounded]:
    for before, after in zip(old.beams, new.beams, strict=True):
        power, waist = _kind(BEAM_FIELDS["power"].kind), _kind(BEAM_FIELDS["waist"].kind)
        if after.power != before.power:
            told = _told(f"power of beam {after.name}", before.power, after.power, power, up=up)
            yield _Rounded(told, after.name, "power")
        which = ("",) if len(after.waists) == 1 else ("horizontal ", "vertical ")
        for place, (old_waist, new_waist) in enumerate(zip(before.waists, after.waists, strict=True)):
            if old_waist != new_waist:
                told = _told(f"{which[place]}waist of beam {after.name}", old_waist, new_waist, waist, up=up)
                yield _Rounded(told, after.name, "waists", place)
    for name, field in COILS_FIELDS.items():
        now = None if new.coils is None else getattr(new.coils, name)
        was = None if old.coils is None else getattr(old.coils, name)
        if isinstance(now, Quantity) and now != was:
            yield _Rounded(
                _told(f"{_COILS.get(name, name)} of the coils", was, now, _kind(field.kind), up=up), "", name
            )


_COILS = {"knife": "radio-frequency knife"}


def _told(name: str, before: Quantity | None, after: Quantity, kind: Kind, *, up: bool) -> Change:
    """A change in the unit that is in use; `up`: never below the exact value, where nothing is held."""
    unit = kind.units[0] if before is None else unit_of(before.text, kind)
    found = quantity(after.value, unit, kind=kind, digits=_DIGITS)
    if up and found.value <= after.value:
        step = 10.0 ** (math.floor(math.log10(abs(after.value))) - _DIGITS + 1)
        found = quantity(after.value + step, unit, kind=kind, digits=_DIGITS)
    return Change(name=name, before=before, after=found)


def _kind(kind: Kind | None) -> Kind:
    assert kind is not None  # these fields are quantities
    return kind
