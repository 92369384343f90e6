"""`coldward trap`: what a trap is to the atoms in it."""

from __future__ import annotations

import argparse
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from app.answers.trap_controls import OF_BEAM, Control, ControlKind, Until
from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.answers.trap_until import SolvedControl
    from app.engine import TrapAnswer
    from app.plan import Plan


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    text = "where a trap holds atoms, how stiffly, how deep, and how they leave"
    parser = verbs.add_parser("trap", help=text, description=text[0].upper() + text[1:] + ".")
    add_plan_arguments(parser)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    group = parser.add_argument_group("solving backwards", _BACKWARDS)
    group.add_argument("--vary", choices=[kind.value for kind in ControlKind], help="what is turned")
    group.add_argument("--beam", metavar="NAME", help="whose power or waist; may be left out where there is one beam")
    group.add_argument(
        "--until",
        type=_wish,
        metavar="WISH",
        help='what is wanted: depth="10 uK", mean_frequency="100 Hz", frequency_x="80 Hz" (or _y, _z); holds, for the '
        "least value that still holds atoms; levitates, for the levitation that carries them",
    )
    parser.set_defaults(run=run)


_BACKWARDS = (
    "Turn one control until the trap is what it should be, and print where it stands then and the trap with it: "
    '--vary power --beam A --until depth="10 uK"'
)


@dataclass(frozen=True)
class _Wish:
    """A wish as it was typed: its name, and the text of its value."""

    name: str
    text: str = ""


def _wish(text: str) -> _Wish:
    name, _, value = text.partition("=")
    # Quotes that a shell has left around the value, and capitals, are let pass.
    value = value.strip().strip("\"'").strip()
    until = {until.value: until for until in Until}.get(name.strip().lower().replace("-", "_"))
    if until is None:
        names = ", ".join(f"{known.value}=…" if known.wants_number else known.value for known in Until)
        raise argparse.ArgumentTypeError(f'"{text}" is no wish; use one of {names}')
    if until.wants_number != bool(value):
        raise argparse.ArgumentTypeError(
            f'{until.value} needs a value, such as {until.value}="{_EXAMPLES[until]}"'
            if until.wants_number
            else f"{until.value} takes no value"
        )
    return _Wish(until.value, value)


_EXAMPLES = {until: "10 uK" if until is Until.DEPTH else "100 Hz" for until in Until}


def run(args: argparse.Namespace) -> int:
    """Answer for the plan that file and flags give. That a trap holds nothing is an answer."""
    from app.engine import trap_answer

    if (args.vary is None) != (args.until is None):
        missing, there = ("--until", "--vary") if args.until is None else ("--vary", "--until")
        fail(f"{there} goes with {missing}, which is missing")
        return 2
    try:
        plan = plan_of(args)
        solved = None if args.vary is None else _solved(plan, args)
        answer = trap_answer(plan) if solved is None else solved.answer
        body = (trap_body(answer) | _solution(solved, args)) if args.json else {}
    except (ValueError, OSError) as error:
        return fail(error)
    if args.json:
        typed = {} if solved is None else {"vary": args.vary, "beam": args.beam, "until": args.until.name}
        print(json_answer(args, body, **typed))
    else:
        print("\n\n".join([*([] if solved is None else [solution_text(solved)]), trap_text(answer)]))
    return 0


def _solved(plan: Plan, args: argparse.Namespace) -> SolvedControl:
    from app.answers.trap_until import solve_until
    from app.units import DEPTH, FREQUENCY, read_quantity

    until = Until(args.until.name)
    kind = DEPTH if until is Until.DEPTH else FREQUENCY
    target = read_quantity(args.until.text, kind).value if until.wants_number else None
    return solve_until(plan, _control(plan, args), until, target)


def _control(plan: Plan, args: argparse.Namespace) -> Control:
    from app.plan_field import PlanError

    kind, beams = ControlKind(args.vary), plan.trap.beams
    if kind not in OF_BEAM:
        return Control(kind)
    if args.beam is not None:
        return Control(kind, plan.trap.beam(args.beam).name)
    if len(beams) != 1 and not plan.trap.harmonic:
        names = ", ".join(beam.name for beam in beams) or "none"
        raise PlanError(f"--vary {kind.value} needs --beam with the name of a beam; the trap's beams: {names}")
    return Control(kind, beams[0].name if beams else "")


def _solution(solved: SolvedControl | None, args: argparse.Namespace) -> dict[str, Any]:
    """What solving backwards adds to the JSON object; nothing without it. The trap is that with the solution."""
    if solved is None:
        return {}
    from app.answers.trap_until import control_unit

    return {
        "solution": {
            "vary": solved.control.kind.value,
            "beam": solved.control.beam or None,
            "until": args.until.name,
            "wanted": args.until.text or None,
            "value": solved.value,
            "also": solved.also,
            "unit": control_unit(solved.control) or "1",
            "before": solved.before,
        }
    }


def solution_text(solved: SolvedControl) -> str:
    """Where the control must stand, and where it stood, in one line; and where else it could."""
    from app.solving_words import also_line
    from app.trap_sentences import control_name, control_text

    name = control_name(solved.control)
    stood = "" if solved.before is None else f" (it was {control_text(solved.control, solved.before)})"
    line = f"{name[0].upper()}{name[1:]}: {control_text(solved.control, solved.value)}{stood}"
    return line if solved.also is None else f"{line}\n{also_line(solved.control, solved.also)}"


def trap_body(answer: TrapAnswer) -> dict[str, Any]:
    """The answer as the JSON contract has it, in SI; `reasons` says of each number that is null why."""
    from app.trap_words import (
        NUMBERS,
        named_cautions,
        note_text,
        reason_not_trapped,
        reasons_missing,
        way_out,
    )

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
        "caveats": [
            {"id": name, "severity": "note", "text": text, "value": None}
            for name, text in named_cautions(answer.trap).items()
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
