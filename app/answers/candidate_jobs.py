"""The answers about candidates as jobs in steps: rows that come one by one, and their best evaporations."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from operator import attrgetter
from typing import TYPE_CHECKING

from app.answers.candidate_evaporation import EvaporationResult, evaporate_rows, evaporation_key
from app.answers.candidates import CandidatesAnswer, candidates_answer
from app.language import translate as _
from app.newest import Steps, Watch

if TYPE_CHECKING:
    from collections.abc import Hashable

    from app.answers.candidate_row import CandidateRow
    from app.plan import Plan


@dataclass(frozen=True, eq=False)
class Found:
    """The candidates of a plan, so far as they are judged; `depends_on` is all that they were made from."""

    depends_on: Hashable
    plan: Plan
    answer: CandidatesAnswer


@dataclass(frozen=True, eq=False)
class Refused:
    """Why candidates cannot be compared in this way."""

    depends_on: Hashable
    sentence: str


@dataclass(frozen=True, eq=False)
class Evaporated:
    """Best evaporations that have come."""

    results: Mapping[object, EvaporationResult]


def candidates_depend_on(plan: Plan) -> Hashable:
    """What the rows of a plan's candidates depend on."""
    return attrgetter("species", "trap", "cloud", "losses", "target", "limits", "candidates")(plan)


def candidates_job(plan: Plan) -> Steps:
    """`Found` with ever more rows, or `Refused`; None where it was stopped."""
    depends_on = candidates_depend_on(plan)

    def run(watch: Watch) -> Found | Refused | None:
        try:
            answer = candidates_answer(plan, lambda part: watch.deliver(Found(depends_on, plan, part)), watch.tell)
        except (ValueError, ArithmeticError) as error:
            return Refused(depends_on, str(error))
        return None if answer is None else Found(depends_on, plan, answer)

    return Steps(what=_("candidates"), depends_on=("candidates", depends_on), run=run)


def evaporations_job(rows: Sequence[CandidateRow]) -> Steps:
    """The best evaporation of each row, as `Evaporated`; None where it was stopped."""
    keys = tuple(evaporation_key(row.plan) for row in rows)

    def run(watch: Watch) -> Evaporated | None:
        def found(place: int, result: EvaporationResult) -> bool:
            return watch.deliver(Evaporated({keys[place]: result}))

        return None if evaporate_rows(rows, found, watch.tell) is None else Evaporated({})

    return Steps(what=_("best evaporations"), depends_on=("candidates", "evaporation", keys), run=run)
