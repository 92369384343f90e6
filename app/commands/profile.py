"""`coldward profile`: density along a trap axis, as a table or a picture."""

from __future__ import annotations

import argparse

from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

AXES = ("x", "y", "z")


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "profile",
        help="density along a trap axis, as CSV or a picture",
        description="Density and column density along a trap axis: thermal, condensed, total, and the classical cloud.",
    )
    add_plan_arguments(parser)
    parser.add_argument("--axis", choices=AXES, default="x", help="trap axis, in the order of the frequencies")
    parser.add_argument("--log", action="store_true", help="logarithmic density in a picture")
    parser.add_argument(
        "-o", "--output", metavar="FILE", help="CSV, PNG, SVG or PDF by its ending; CSV on stdout without it"
    )
    parser.add_argument("--json", action="store_true", help="print one JSON object; a FILE is written too")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Write the profiles of the plan's cloud."""
    from app.answers.csv_text import csv_of, json_of, profile_columns
    from app.commands.output import write_answer
    from app.engine import cloud_answer, profile_answer

    try:
        plan = plan_of(args)
        answer = profile_answer(plan, AXES.index(args.axis))

        def pictures() -> list[object]:
            from app.figures.profile import Depth, profile_picture

            return [profile_picture(answer, shows, log=args.log) for shows in Depth]

        columns = profile_columns(answer)
        if args.output or not args.json:
            write_answer(args.output, lambda: csv_of(columns), pictures)
        if args.json:
            body = {"model": cloud_answer(plan).model.value, "summed_along": AXES[answer.line_of_sight]}
            print(json_answer(args, {**body, **json_of(columns)}, axis=args.axis))
    except (ValueError, OSError) as error:
        return fail(error)
    return 0
