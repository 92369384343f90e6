"""`coldward profile`: density along a trap axis, as a table or a picture."""

from __future__ import annotations

import argparse
from typing import TYPE_CHECKING

from app.commands.plan_arguments import add_plan_arguments, fail, plan_of

if TYPE_CHECKING:
    from app.engine import ProfileAnswer

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
    parser.add_argument("-o", "--output", metavar="FILE", help="CSV, PNG, SVG or PDF by its ending; CSV on stdout without it")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Write the profiles of the plan's cloud."""
    from app.commands.output import write_answer
    from app.engine import profile_answer

    try:
        answer = profile_answer(plan_of(args), AXES.index(args.axis))

        def pictures() -> list[object]:
            from app.figures.profile import Depth, profile_picture

            return [profile_picture(answer, shows, log=args.log) for shows in Depth]

        write_answer(args.output, lambda: profile_csv(answer), pictures)
    except (ValueError, OSError) as error:
        return fail(error)
    return 0


def profile_csv(answer: ProfileAnswer) -> str:
    """One row a position, SI, full precision."""
    columns = {"position [m]": answer.positions}
    for name, unit, profile in (("density", "1/m^3", answer.density), ("column_density", "1/m^2", answer.column)):
        columns |= {
            f"{name}_total [{unit}]": profile.total,
            f"{name}_thermal [{unit}]": profile.thermal,
            f"{name}_condensate [{unit}]": profile.condensate,
            f"{name}_classical [{unit}]": profile.classical,
        }
    rows = zip(*(column.tolist() for column in columns.values()), strict=True)
    return "\n".join([",".join(columns), *(",".join(map(repr, row)) for row in rows)]) + "\n"
