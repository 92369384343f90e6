"""`coldward trap`: what a trap is to the atoms in it."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING, Any

from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.engine import TrapAnswer


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    text = "where a trap holds atoms, how stiffly, how deep, and how they leave"
    parser = verbs.add_parser("trap", help=text, description=text[0].upper() + text[1:] + ".")
    add_plan_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Answer for the plan that file and flags give. That a trap holds nothing is an answer."""
    from app.engine import trap_answer

    try:
        answer = trap_answer(plan_of(args))
        body = trap_body(answer) if args.json else {}
    except (ValueError, OSError) as error:
        return fail(error)
    print(json_answer(args, body) if args.json else trap_text(answer))
    return 0


def trap_body(answer: TrapAnswer) -> dict[str, Any]:
    """The answer as the JSON contract has it, in SI; `reasons` says of each number that is null why."""
    from app.trap_words import NUMBERS, note_text, reason_not_trapped, reasons_missing, way_out

    missing = reasons_missing(answer)
    return {
        "trapped": answer.trapped,
        "reason": reason_not_trapped(answer) or None,
        **{name: None if name in missing else _number(answer, name) for name in NUMBERS},
        "way_out": way_out(answer) or None,
        "reasons": missing,
        "notes": [
            {"id": note.kind.name.lower(), "text": note_text(note), "value": note.value, "beam": note.beam or None}
            for note in answer.survey.notes
        ],
    }


def _number(answer: TrapAnswer, name: str) -> Any:
    import numpy as np

    found = answer.survey
    match name:
        case "volume_curve":
            curve = found.volume_curve
            assert curve is not None  # else a reason is given
            return {"energy": curve.energies.tolist(), "volume": curve.volumes.tolist()}
        case "scattering_rate" | "heating_rate":
            return getattr(found.heating, name)
        case "escape":
            assert found.escape is not None
            return np.asarray(found.escape.direction).tolist()
        case _:
            return np.asarray(getattr(found, name), dtype=float).tolist()


def trap_text(answer: TrapAnswer) -> str:
    """The answer as a readable page."""
    from app.tables import columns
    from app.trap_words import cautions, heading, mode_rows, note_text, reason_not_trapped, trap_rows

    lines = [heading(answer), ""]
    if answer.trapped:
        lines += columns(trap_rows(answer))
        modes = mode_rows(answer)
        if modes:
            lines += ["", *columns(modes)]
    else:
        lines.append(f"Not trapped: {reason_not_trapped(answer)}.")
    for note in answer.survey.notes:
        lines += ["", note_text(note)] if note is answer.survey.notes[0] else [note_text(note)]
    for place, caution in enumerate(cautions(answer.trap)):
        lines += ["", caution] if place == 0 else [caution]
    return "\n".join(lines)
