"""What solving a trap backwards finds, in words: what changes, and what follows."""

from __future__ import annotations

from collections.abc import Callable
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.answers.trap_controls import Control, ControlKind, Until
from app.language import translate as _
from app.trap_sentences import control_text
from app.trap_words import depth_text, frequencies_text, reason_not_trapped, sag_text

if TYPE_CHECKING:
    from app.answers.trap import TrapAnswer
    from app.answers.trap_solving import SolvedTrap
    from app.units import Quantity


UNTIL = MappingProxyType(
    {
        Until.DEPTH: _("the depth is"),
        Until.MEAN_FREQUENCY: _("the mean frequency is"),
        Until.FREQUENCY_X: _("the frequency nearest x is"),
        Until.FREQUENCY_Y: _("the frequency nearest y is"),
        Until.FREQUENCY_Z: _("the frequency nearest z is"),
        Until.HOLDS: _("atoms are just held"),
        Until.LEVITATES: _("it carries the atoms"),
    }
)
"""What a control is turned until, in words that end in front of the number, where there is one."""

_CALIBRATED = MappingProxyType(
    {ControlKind.POWER: _("the power that reaches the atoms"), ControlKind.WAIST: _("the waist at the atoms")}
)


def solving_hint(control: Control, until: Until) -> str:
    """What the answer is good for, where that needs a word."""
    if until in (Until.FREQUENCY_X, Until.FREQUENCY_Y, Until.FREQUENCY_Z) and control.kind in _CALIBRATED:
        return _("With a measured frequency, this calibrates {what}.").format(what=_CALIBRATED[control.kind])
    if until is Until.HOLDS:
        return _("The least value that still holds atoms, against gravity too.")
    return ""


def change_lines(solved: SolvedTrap) -> list[str]:
    """A line for each number that changes: its name, what it was, what it becomes; and one for what does it too."""
    lines = [
        _("{name}: {before} → {after}").format(
            name=_begun(change.name), before=_text(change.before), after=_text(change.after)
        )
        for change in solved.changes
    ]
    if solved.also is not None:
        lines.append(also_line(solved.control, solved.also))
    return lines


def also_line(control: Control, value: float) -> str:
    """That another value of a control [SI] does what is wanted too."""
    return _("{value} does it too; the nearer one is taken.").format(value=control_text(control, value))


def what_changes(solved: SolvedTrap) -> str:
    """The numbers that change, for the list of steps."""
    return _(" and ").join(change.name for change in solved.changes)


def consequence_lines(solved: SolvedTrap) -> list[str]:
    """A line for each of frequencies, depth and sag: before and after."""
    before, after = solved.trap_before, solved.trap_after
    if not after.trapped:
        return [_("then not trapped: {reason}").format(reason=reason_not_trapped(after))]
    rows = (
        (_("frequencies"), frequencies_text),
        (_("depth"), depth_text),
        (_("sag"), sag_text),
    )
    return [
        _("{name}: {before} → {after}").format(name=_begun(name), before=_of(before, text), after=text(after))
        for name, text in rows
    ]


def _of(answer: TrapAnswer, text: Callable[[TrapAnswer], str]) -> str:
    return text(answer) if answer.trapped else _("not trapped")


def _text(quantity: Quantity | None) -> str:
    """A quantity, or that there is none; a line may end before it, and not before its unit."""
    return _("none") if quantity is None else quantity.text.replace(" ", "\N{NO-BREAK SPACE}")


def _begun(name: str) -> str:
    return f"{name[:1].upper()}{name[1:]}"
