"""One key of a plan: where it stands, how it is written, what it means."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from app.kinds import Kind


class PlanError(ValueError):
    """A plan that cannot be read, or a value that no plan can have. The message is one sentence for the user.

    `path` names the field that a part of a plan finds at fault, where it knows.
    """

    def __init__(self, sentence: str, *, path: str = "") -> None:
        super().__init__(sentence)
        self.path = path


class Entry(Enum):
    """How a field is written."""

    TEXT = auto()
    SPECIES = auto()
    STATE = auto()
    WHOLE = auto()
    MODEL = auto()
    QUANTITY = auto()
    FREQUENCIES = auto()
    GRAVITY = auto()
    NAME = auto()
    SWITCH = auto()
    TWO = auto()
    DIRECTION = auto()
    PLACE = auto()
    CHOICE = auto()
    KEYS = auto()
    WIDTHS = auto()
    POINTS = auto()


QUANTITIES = (Entry.QUANTITY, Entry.FREQUENCIES, Entry.TWO, Entry.PLACE, Entry.WIDTHS)
"""Entries made of one quantity or of several, all of one kind."""


@dataclass(frozen=True, kw_only=True)
class PlanField:
    """One key of a plan.

    path : "section.key" in the file
    label : what forms call it
    tip : what it means, for tool tips and help
    flag : command-line option; empty where there is none
    kind : of quantities; None where it follows from another entry, such as the control that moves
    options : of choices, what may be chosen
    excludes : other keys that setting this one clears
    """

    path: str
    label: str
    tip: str
    entry: Entry
    flag: str = ""
    kind: Kind | None = None
    options: tuple[Enum, ...] = ()
    required: bool = False
    excludes: tuple[str, ...] = ()

    @property
    def section(self) -> str:
        return self.path.rpartition(".")[0]

    @property
    def name(self) -> str:
        return self.path.rpartition(".")[2]
