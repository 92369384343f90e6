"""Ramps that are kept to compare with, as texts that outlive the window: their names and their plans.

They are simulated anew when they are taken up again: what was computed is large, and may be computed better meanwhile.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.newest import Watch
from app.plan import Plan, parse_plan, write_plan

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer

_MOST = 8
"""References that are remembered: with more nobody tells the curves apart."""


@dataclass(frozen=True, kw_only=True, eq=False)
class Reference:
    """A ramp that was kept, and the plan that it is the ramp of."""

    name: str
    plan: Plan
    answer: RampAnswer


@dataclass(frozen=True, kw_only=True)
class Remembered:
    """A reference of an earlier session, before it is simulated again."""

    name: str
    plan: Plan


def reference_texts(kept: Iterable[Reference | Remembered]) -> tuple[str, ...]:
    """One text each: the name in the first line, then the plan."""
    texts = []
    for one in kept:
        try:
            texts.append(f"{one.name}\n{write_plan(one.plan)}")
        except ValueError:  # a layout that the plan cannot be put into any more
            continue
    return tuple(texts[-_MOST:])


def remembered_references(texts: Sequence[str]) -> list[Remembered]:
    """What such texts say; those that are no longer readable, or have no ramp, are left out."""
    found = []
    for text in texts:
        name, _newline, rest = text.partition("\n")
        try:
            plan = parse_plan(rest, name)
        except ValueError:
            continue
        if plan.ramp and name:
            found.append(Remembered(name=name, plan=plan))
    return found[-_MOST:]


def simulated_references(remembered: Sequence[Remembered], watch: Watch) -> tuple[Reference, ...] | None:
    """The references with their ramps, those left out that cannot be simulated any more; None where it was stopped."""
    from app.answers.ramp_jobs import ramp_job

    found = []
    for one in remembered:
        try:
            answer = ramp_job(one.plan).run(watch)
        except (ValueError, OSError, ArithmeticError, RuntimeError):
            continue
        if answer is None:
            return None
        found.append(Reference(name=one.name, plan=one.plan, answer=answer))
    return tuple(found)


class KeptRamps:
    """The references of a page. Attributes: references, with their ramps; remembered, those of an earlier session that
    are still to be simulated."""

    def __init__(self) -> None:
        self.references: list[Reference] = []
        self.remembered: list[Remembered] = []

    @property
    def names(self) -> list[str]:
        return [ref.name for ref in self.references]

    def keep(self, plan: Plan, answer: RampAnswer) -> None:
        """One more, by the title of its plan or a number after it."""
        name = plan.title or "ramp"
        name = name if name not in self.names else f"{name} {len(self.references) + 1}"
        self.references.append(Reference(name=name, plan=plan, answer=answer))

    def drop(self) -> None:
        self.references.clear()
        self.remembered.clear()

    def take(self, recalled: Sequence[Reference]) -> None:
        """Those of an earlier session, with their ramps, before those of this one."""
        if self.remembered:
            self.references[:0] = recalled
            self.remembered.clear()

    def texts(self) -> tuple[str, ...]:
        return reference_texts((*self.remembered, *self.references))

    def recall(self, texts: Sequence[str]) -> None:
        self.remembered[:] = remembered_references(texts)
