"""What solving a trap backwards finds, in words: what changes, and what follows."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from app.language import translate as _
from app.trap_words import depth_text, frequencies_text, reason_not_trapped, sag_text

if TYPE_CHECKING:
    from app.answers.trap import TrapAnswer
    from app.answers.trap_solving import SolvedTrap
    from app.units import Quantity


def change_lines(solved: SolvedTrap) -> list[str]:
    """A line for each number that changes: its name, what it was, what it becomes."""
    return [
        _("{name}: {before} → {after}").format(name=_begun(name), before=_text(before), after=_text(after))
        for name, before, after in solved.changes
    ]


def what_changes(solved: SolvedTrap) -> str:
    """The numbers that change, for the list of steps."""
    return _(" and ").join(name for name, _before, _after in solved.changes)


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
