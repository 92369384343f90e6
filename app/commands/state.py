"""`coldward state`: where one cloud stands."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.answers.mixture import MixtureAnswer
    from app.engine import CloudAnswer
    from app.explanations import Explanation
    from app.plan import Plan
    from app.quantities import Row


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "state", help="how far one cloud is from degeneracy", description="How far one cloud is from degeneracy."
    )
    add_plan_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.add_argument(
        "--explain",
        action="append",
        default=[],
        metavar="NAME",
        help="show how a quantity, by its NAME in the JSON object, is worked out; may be given several times",
    )
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Answer for the plan that file and flags give."""
    from app.engine import cloud_answer

    try:
        plan = plan_of(args)
        answer, mixture = cloud_answer(plan), _mixture(plan)
        explanations = _explanations(answer, args.explain)
    except (ValueError, OSError) as error:
        return fail(error)
    if args.json:
        print(json_answer(args, state_body(answer) | _passenger(mixture) | _explained(explanations)))
    elif explanations:
        print(_explained_text(answer, explanations))
    else:
        print("\n\n\n".join([state_text(answer), *_passenger_text(mixture)]))
    return 0


def _mixture(plan: Plan) -> MixtureAnswer | None:
    if plan.passenger is None:
        return None
    from app.answers.mixture import mixture_answer

    return mixture_answer(plan)


def _passenger(mixture: MixtureAnswer | None) -> dict[str, Any]:
    """What a passenger adds to the JSON object: nothing without one."""
    if mixture is None:
        return {}
    from app.commands.mixture_report import mixture_body

    own = None if mixture.passenger is None else state_body(mixture.passenger)
    return {"passenger": mixture_body(mixture, own)}


def _passenger_text(mixture: MixtureAnswer | None) -> list[str]:
    if mixture is None:
        return []
    from app.commands.mixture_report import mixture_text

    own = [] if mixture.passenger is None else [state_text(mixture.passenger)]
    return [*own, mixture_text(mixture)]


def _explanations(answer: CloudAnswer, names: Sequence[str]) -> list[Explanation]:
    if not names:
        return []
    from app.explanations import explain

    return [explain(answer, name) for name in names]


def _explained(explanations: Sequence[Explanation]) -> dict[str, Any]:
    """What `--explain` adds to the JSON object: nothing without it."""
    if not explanations:
        return {}
    from app.explanations import explanation_body

    return {"explain": [explanation_body(explanation) for explanation in explanations]}


def _explained_text(answer: CloudAnswer, explanations: Sequence[Explanation]) -> str:
    from app.explanations import explanation_text
    from app.words import heading

    return "\n\n\n".join([heading(answer), *(explanation_text(explanation) for explanation in explanations)])


def state_body(answer: CloudAnswer) -> dict[str, Any]:
    """The answer as the JSON contract has it: model, quantities in SI, caveats."""
    from app.quantities import QUANTITIES

    return {
        "model": answer.model.value,
        "quantities": {name: _quantity(answer, row) for name, row in QUANTITIES.items()},
        "caveats": caveats_body(answer),
    }


def caveats_body(answer: CloudAnswer) -> list[dict[str, Any]]:
    """The caveats of an answer as the JSON contract has them."""
    from app.caveat_words import caveat_text

    return [
        {
            "id": caveat.id,
            "severity": caveat.severity.value,
            "text": caveat_text(caveat, answer),
            "value": _finite(caveat.value),
        }
        for caveat in answer.caveats
    ]


def _quantity(answer: CloudAnswer, row: Row) -> dict[str, Any]:
    import numpy as np

    from app.words import reason_missing

    entry: dict[str, Any] = {"value": None, "unit": row.unit, "low": None, "high": None}
    missing = answer.missing(row)
    value = None if missing is not None else np.asarray(answer.value(row.name), dtype=float).tolist()
    entry["value"] = _finite(value)
    spread = None if missing is not None else answer.spread(row.name)
    if entry["value"] is None:
        entry["reason"] = reason_missing(missing) if missing is not None else "not defined for this cloud"
    elif spread is not None:
        bounds = {"low": spread.low, "high": spread.high, "median": spread.median}
        entry |= {place: _finite(np.asarray(bound).tolist()) for place, bound in bounds.items()}
    return {**entry, "label": row.label, "source": row.source}


def _finite(value: Any) -> Any:
    """The number or list of numbers, or None where any is not finite: the contract has no NaN."""
    import math

    numbers = value if isinstance(value, list) else [value]
    return value if all(number is not None and math.isfinite(number) for number in numbers) else None


def state_text(answer: CloudAnswer) -> str:
    """The answer as a readable page."""
    from app.caveat_words import caveat_lines
    from app.quantities import Group, rows_in
    from app.tables import columns
    from app.words import deciding_figures, heading, shown_unit, value_with_interval, verdict

    lines = [heading(answer), "", verdict(answer), ""]
    lines += columns([(figure.caption, figure.value, figure.detail) for figure in deciding_figures(answer)])
    for group in Group:
        rows = [row for row in rows_in(group) if answer.missing(row) is None]
        table = [(row.label, row.symbol, value_with_interval(answer, row), shown_unit(row.units[0])) for row in rows]
        if table:
            lines += ["", group.value, *columns(table, indent=2)]
    caveats = caveat_lines(answer)
    if caveats:
        lines += ["", "What this answer does not cover"]
        lines += [f"  {line.sign} {line.word}: {line.sentence}" for line in caveats]
    return "\n".join(lines)
