"""`coldward compare`: which species would do best in this laboratory."""

from __future__ import annotations

import argparse
import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.answers.candidates import CandidatesAnswer
    from app.candidate_order import Score, Weight
    from app.plan import Plan
    from app.units import Quantity

_OWN = ("species.key", "species.state", "species.spin_components", "species.scattering_length")
"""Plan keys that say nothing where many species are compared."""

_SEPARATELY = ("evaporated_atoms", "evaporation_time")


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    text = "species and states side by side in one trap, or from one start"
    parser = verbs.add_parser("compare", help=text, description=text[0].upper() + text[1:] + ".")
    add_plan_arguments(parser, without=_OWN)
    parser.add_argument(
        "--basis",
        metavar="BASIS",
        help='"same frequencies", "same light" or "same start"; the plan\'s without it, usually the light of its beams',
    )
    parser.add_argument(
        "--start",
        metavar="START",
        help='of a same start: "same atoms and temperature" or "same phase-space density"',
    )
    parser.add_argument(
        "--species",
        dest="keys",
        metavar="KEYS",
        help="species, such as 87Rb,41K, each in all of its states; without it those of the plan, or all",
    )
    parser.add_argument(
        "--field-range",
        metavar="LOW,HIGH",
        help='judge each state that a field tunes at its best field of this range, such as "0 G, 600 G", instead of '
        "at --field",
    )
    parser.add_argument(
        "--wanted-length",
        metavar="LENGTH",
        help="look there for the field that makes this scattering length, instead of the best ratio of good to bad "
        "collisions",
    )
    parser.add_argument(
        "--columns", metavar="NAMES", help="columns by the NAME of their quantity, such as mean_density,sag"
    )
    parser.add_argument("--sort", metavar="NAME", help='column to order by, the better end first; or "score"')
    parser.add_argument(
        "--only",
        action="append",
        default=[],
        metavar="FILTER",
        help="show what passes: bosons, fermions, trapped, colliding, without failure, or a column with a limit, such "
        'as "total_lifetime >= 10 s"; may be given several times',
    )
    parser.add_argument(
        "--weight",
        action="append",
        default=[],
        metavar="NAME=NUMBER",
        help='how much a column counts in the score, such as "good_to_bad_ratio=2" or "sag=1 less"; may be given '
        "several times",
    )
    parser.add_argument("--evaporate", action="store_true", help="find the best evaporation of each; takes longer")
    parser.add_argument("-o", "--output", metavar="FILE", help="CSV file")
    parser.add_argument("--json", action="store_true", help="print one JSON object; a FILE is written too")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Judge the candidates; say of those without an answer why."""
    from app.answers.candidates import candidates_answer
    from app.candidate_csv import candidates_csv
    from app.candidate_order import fails, read_sieve, read_weight
    from app.commands.compare_json import compare_body
    from app.commands.compare_text import compare_text
    from app.files import write_atomically

    try:
        plan = _plan(args)
        sieve = read_sieve(args.only)
        weights = tuple(read_weight(text) for text in args.weight)
        answer = candidates_answer(plan)
        assert answer is not None  # nothing stops it
        names = _columns(args, answer)
        if args.evaporate:
            answer = _evaporated(answer)
        rows, scores = _arranged(args, [row for row in answer.rows if sieve.passes(row)], weights)
        if args.output is not None:
            write_atomically(Path(args.output), candidates_csv(rows, names, scores).encode())
    except (ValueError, OSError) as error:
        return fail(error)
    if args.json:
        body = compare_body(answer, rows, names, scores, weights)
        print(json_answer(args, body, species=args.keys, columns=args.columns, only=args.only, weight=args.weight))
    elif args.output is None:
        print(compare_text(answer, plan, rows, names, scores, weights))
    without_answer = [row for row in answer.rows if fails(row)]
    for row in without_answer:
        print(f"coldward: {row.key} {row.state.name}: {row.reason}", file=sys.stderr)
    return 1 if without_answer else 0


def _plan(args: argparse.Namespace) -> Plan:
    from app.candidate_choices import Basis, Start
    from physics.species import load_species

    keys = [load_species(key).key for key in args.keys.split(",")] if args.keys else []
    if args.plan is None:
        # Nothing of the plan's own species enters where flags give the trap by its frequencies.
        setattr(args, "species.key", keys[0] if keys else "87Rb")
    plan = plan_of(args)
    choice = plan.candidates
    if keys:
        choice = replace(choice, keys=tuple(keys), candidates=())
    if args.basis is not None:
        choice = replace(choice, basis=_member(Basis, args.basis, "--basis"))
    if args.start is not None:
        choice = replace(choice, start=_member(Start, args.start, "--start"))
    if args.field_range is not None:
        ends = args.field_range.split(",")
        if len(ends) != 2:
            raise ValueError(f'--field-range must be two fields such as "0 G, 600 G", got "{args.field_range}"')
        low, high = (_read(end, "lowest_field", "--field-range") for end in ends)
        choice = replace(choice, lowest_field=low, highest_field=high, wanted_length=None)
    if args.wanted_length is not None:
        choice = replace(choice, wanted_length=_read(args.wanted_length, "wanted_length", "--wanted-length"))
    return replace(plan, candidates=choice)


def _read(text: str, name: str, flag: str) -> Quantity:
    from app.candidate_fields import CANDIDATES_FIELDS
    from app.units import read_quantity

    kind = CANDIDATES_FIELDS[name].kind
    assert kind is not None
    try:
        return read_quantity(text.strip(), kind)
    except ValueError as error:
        raise ValueError(f"{flag}: {error}") from None


def _member(kind: type[Any], text: str, flag: str) -> Any:
    plain = " ".join(text.casefold().split())
    found = next((member for member in kind if member.value == plain), None)
    if found is None:
        allowed = ", ".join(f'"{member.value}"' for member in kind)
        raise ValueError(f'{flag} must be one of {allowed}, got "{text}"')
    return found


def _columns(args: argparse.Namespace, answer: CandidatesAnswer) -> tuple[str, ...]:
    from app.candidate_columns import BRIEF_COLUMNS, FIELD_COLUMNS, USUAL_COLUMNS, column

    if args.columns:
        return tuple(dict.fromkeys(column(name).name for name in args.columns.split(",")))
    if args.json or args.output is not None:
        return tuple(name for name in USUAL_COLUMNS if args.evaporate or name not in _SEPARATELY)
    if args.evaporate:
        return (*BRIEF_COLUMNS[:3], *_SEPARATELY)
    return FIELD_COLUMNS if any(row.search is not None for row in answer.rows) else BRIEF_COLUMNS


def _arranged(
    args: argparse.Namespace, rows: list[CandidateRow], weights: tuple[Weight, ...]
) -> tuple[list[CandidateRow], list[Score]]:
    """The rows in the order that is asked for, and their scores."""
    from app.candidate_columns import column
    from app.candidate_order import SCORE, order_by, score_rows

    scores = list(score_rows(rows, weights))
    if args.sort is None and not weights:
        return rows, scores
    if args.sort is None or args.sort.strip().casefold() == SCORE:
        if not weights:
            raise ValueError("--sort score needs at least one --weight")
        values, descending = [score.value for score in scores], True
    else:
        by = column(args.sort)
        values, descending = [row.cell(by.name).value for row in rows], by.more_is_better
    places = order_by(values, descending)
    return [rows[place] for place in places], [scores[place] for place in places]


def _evaporated(answer: CandidatesAnswer) -> CandidatesAnswer:
    from app.answers.candidate_evaporation import evaporate_rows

    rows = evaporate_rows(answer.rows)
    assert rows is not None  # nothing stops it
    return replace(answer, rows=rows)
