"""`coldward map`: the plane of atom number and temperature, as a table or a picture."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from app.commands.plan_arguments import add_plan_arguments, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.engine import MapLimits
    from app.plan import Plan


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "map",
        help="atom number against temperature, as CSV or a picture",
        description="Peak phase-space density, reduced temperature and condensed fraction over N and T.",
    )
    add_plan_arguments(parser)
    parser.add_argument(
        "-o", "--output", metavar="FILE", help="CSV, PNG, SVG or PDF by its ending; CSV on stdout without it"
    )
    parser.add_argument("--atoms-range", metavar="TEXT", help='such as "1e3 to 1e7"')
    parser.add_argument("--temperature-range", metavar="TEXT", help='such as "10 nK to 10 uK"')
    parser.add_argument("--points", type=int, default=None, metavar="NUMBER", help="grid points along each direction")
    parser.add_argument("--json", action="store_true", help="print one JSON object; a FILE is written too")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Write the map of the plan."""
    from app.answers.csv_text import csv_of, json_of, map_columns
    from app.commands.output import write_answer
    from app.engine import cloud_answer, map_answer, map_points

    if args.points is not None and not 2 <= args.points <= 2000:
        return fail(f"--points must be from 2 to 2000, got {args.points}")
    try:
        plan = plan_of(args)
        points = args.points or 2 * map_points(cloud_answer(plan).model)
        answer = map_answer(plan, _limits(args, plan), points)

        def pictures() -> list[object]:
            from app.figures.map import map_picture

            return [map_picture(answer, cloud_answer(plan))]

        columns = map_columns(answer)
        if args.output or not args.json:
            write_answer(args.output, lambda: csv_of(columns), pictures)
        if args.json:
            print(json_answer(args, {"model": answer.model.value, **json_of(columns)}))
    except (ValueError, OSError) as error:
        return fail(error)
    return 0


def _limits(args: argparse.Namespace, plan: Plan) -> MapLimits:
    from dataclasses import replace

    from app.engine import usual_limits
    from app.units import ATOM_NUMBER, TEMPERATURE, Kind, QuantityError, read_quantity

    def read(flag: str, text: str, kind: Kind) -> tuple[float, float]:
        ends = text.split(" to ")
        if len(ends) != 2:
            raise QuantityError(f'{flag}: a range is written "low to high", got "{text}"')
        low, high = (read_quantity(end, kind).value for end in ends)
        return low, high

    limits = usual_limits(plan)
    if args.atoms_range:
        low, high = read("--atoms-range", args.atoms_range, ATOM_NUMBER)
        limits = replace(limits, atoms_low=low, atoms_high=high)
    if args.temperature_range:
        low, high = read("--temperature-range", args.temperature_range, TEMPERATURE)
        limits = replace(limits, temperature_low=low, temperature_high=high)
    return limits
