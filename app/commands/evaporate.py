"""`coldward evaporate`: what a ramp makes of a cloud, which ramp would be best, what to measure on the way."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.commands.plan_arguments import add_plan_arguments, given_flags, json_answer, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_design import DesignAnswer
    from app.answers.ramp_sensitivity import SensitivityAnswer
    from app.answers.waypoints import DeparturesAnswer, WaypointsAnswer
    from app.plan import Plan
    from physics.ramps import Control

USUAL_WAYPOINTS = "usual"


@dataclass(frozen=True, kw_only=True, eq=False)
class Evaporated:
    """All that was asked for; None what was not, or what there is no ramp for. `reference` is the ramp of another plan,
    with the name of its file."""

    plan: Plan
    answer: RampAnswer | None
    design: DesignAnswer | None = None
    waypoints: WaypointsAnswer | None = None
    departures: tuple[DeparturesAnswer, ...] = ()
    sensitivity: SensitivityAnswer | None = None
    reference: tuple[str, RampAnswer] | None = None


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "evaporate",
        help="what a ramp makes of a cloud; which ramp would be best",
        description="Simulate the plan's ramp stage by stage, or design one; say what limits it and what to measure.",
    )
    add_plan_arguments(parser)
    parser.add_argument("--ramp", metavar="FILE", help="CSV table to simulate in the place of the plan's ramp")
    parser.add_argument(
        "--design", action="store_true", help="design the ramp that leaves most atoms at the target, within the limits"
    )
    parser.add_argument("--control", metavar="TEXT", help='what a designed ramp moves, such as scale or "power A"')
    parser.add_argument(
        "--from",
        dest="since",
        metavar="LABEL",
        help='go on from a measured cloud of the plan; with --atoms and --temperature also "after stage 3"',
    )
    parser.add_argument(
        "--waypoints",
        nargs="?",
        const=USUAL_WAYPOINTS,
        metavar="TEXT",
        help='clouds to aim at, at phase-space densities such as "1e-3, 0.1, 2.6"; without a ramp from --efficiency',
    )
    parser.add_argument("--expansion", metavar="TEXT", help="expansion time of the widths of waypoints; default 15 ms")
    parser.add_argument("--reference", metavar="FILE", help="another plan, whose ramp is shown beside this one")
    parser.add_argument("--sensitivity", action="store_true", help="what a tenth more or less of each input changes")
    parser.add_argument(
        "-o", "--output", metavar="FILE", help="write the ramp: CSV, one row a time step; or TOML, the plan with it"
    )
    parser.add_argument("--step", metavar="TEXT", help='time step of a CSV file, such as "10 ms"')
    parser.add_argument("--units", metavar="TEXT", help='units of a CSV file, such as "power A=mW, time=ms"')
    parser.add_argument("--with-cloud", action="store_true", help="atoms, temperature and more beside the controls")
    parser.add_argument("--json", action="store_true", help="print one JSON object; a FILE is written too")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Answer for the plan that file and flags give."""
    try:
        found = _found(args)
        if args.output:
            _write(args, found)
        text = _answer(args, found)
    except (ValueError, OSError) as error:
        _clear()
        return fail(error)
    except KeyboardInterrupt:
        _clear()
        raise
    print(text)
    return 0


def _answer(args: argparse.Namespace, found: Evaporated) -> str:
    if args.json:
        from app.commands.evaporate_json import evaporate_body

        return json_answer(args, evaporate_body(found), **_asked(args))
    from app.commands.evaporate_text import evaporate_text

    return evaporate_text(found)


def _asked(args: argparse.Namespace) -> dict[str, object]:
    """What was asked for besides the plan, for the input of the JSON object."""
    names = {"since": "from"}
    wanted = ("ramp", "design", "control", "since", "waypoints", "expansion", "reference", "sensitivity")
    return {names.get(name, name): value for name in wanted if (value := getattr(args, name))}


def _found(args: argparse.Namespace) -> Evaporated:
    from app.answers.ramp import ramp_answer
    from app.answers.ramp_design import design_answer
    from app.answers.ramp_sensitivity import sensitivity_answer
    from app.answers.waypoints import departures_answer, waypoints_answer
    from app.control_kinds import control_named
    from app.plan import read_plan

    plan = _with_ramp(plan_of(args), args.ramp)
    other = None if args.reference is None else read_plan(args.reference)
    plan, since = _measured(plan, args)
    control: Control | None = None if args.control is None else control_named(args.control)
    densities, expansion = _densities(args.waypoints), _expansion(args.expansion)
    design = None
    if args.design:
        design = design_answer(plan, control, since, progress("designing"))
        answer: RampAnswer | None = design.answer
        plan = design.plan(plan)
    elif plan.ramp or args.waypoints is None:
        answer = ramp_answer(plan, since, progress("simulating"))
    else:
        answer = None
    waypoints, departures = None, []
    if args.waypoints is not None:
        waypoints = waypoints_answer(plan, densities, expansion, since=since, tick=progress("simulating"))
        if plan.ramp and since is None:
            departures = [departures_answer(plan, p, None, progress("waypoints")) for p in waypoints.points]
    sensitivity = None
    if args.sensitivity:
        sensitivity = sensitivity_answer(plan, since, progress("sensitivities"))
    reference = None
    if other is not None:
        reference = args.reference, ramp_answer(other, None, progress("reference"))
    _clear()
    return Evaporated(
        plan=plan,
        answer=answer,
        design=design,
        waypoints=waypoints,
        departures=tuple(one for one in departures if one.departures),
        sensitivity=sensitivity,
        reference=reference,
    )


def _with_ramp(plan: Plan, table: str | None) -> Plan:
    """The plan with the ramp of a table in the place of its own."""
    if table is None:
        return plan
    from dataclasses import replace
    from pathlib import Path

    from app.plan_field import PlanError
    from app.ramp_table import read_ramp_table

    try:
        text = Path(table).read_text(encoding="utf-8")
    except UnicodeDecodeError:
        raise PlanError(f"{table} is not a text in UTF-8") from None
    return replace(plan, ramp=(read_ramp_table(text, table).stage(),))


def _measured(plan: Plan, args: argparse.Namespace) -> tuple[Plan, str | None]:
    """The plan, and the label of the measured cloud to go on from.

    "after stage 3" needs no measured cloud in the plan where the cloud is given by flags.
    """
    since: str | None = args.since
    if since is None:
        return plan, None
    from dataclasses import replace

    from app.answers.ramp_start import measured_cloud, stage_named
    from app.plan import MeasuredChoice
    from app.plan_field import PlanError

    given = given_flags(args)
    stage = stage_named(since)
    if stage is None or not {"cloud.atoms", "cloud.temperature"} <= given.keys():
        try:
            measured_cloud(plan, since)
        except PlanError as error:
            hint = "; or give that cloud by --atoms and --temperature" if stage is not None else ""
            raise PlanError(f"{error}{hint}") from None
        return plan, since
    cloud = MeasuredChoice(label=since, atoms=plan.cloud.atoms, temperature=plan.cloud.temperature, stage=stage or None)
    return replace(plan, measured=(cloud,)), since


def _densities(text: str | None) -> tuple[float, ...]:
    from app.units import PHASE_SPACE_DENSITY, read_quantity

    if text is None or text == USUAL_WAYPOINTS:
        return ()
    return tuple(read_quantity(part.strip(), PHASE_SPACE_DENSITY).value for part in text.split(","))


def _expansion(text: str | None) -> float:
    from app.answers.waypoints import EXPANSION_TIME
    from app.kinds import TIME
    from app.units import read_quantity

    return EXPANSION_TIME if text is None else read_quantity(text, TIME).value


def _write(args: argparse.Namespace, found: Evaporated) -> None:
    from pathlib import Path

    from app.files import write_atomically
    from app.kinds import DURATION
    from app.plan_field import PlanError
    from app.ramp_table import ramp_table, read_units
    from app.units import read_quantity

    path = Path(args.output)
    match path.suffix.lower():
        case ".csv":
            if found.answer is None:
                raise PlanError("there is no ramp to write: the plan has no stages")
            step = None if args.step is None else read_quantity(args.step, DURATION).value
            units = None if args.units is None else read_units(args.units)
            since = None if found.answer.measured is None else args.since
            beside = found.answer if args.with_cloud else None
            write_atomically(path, ramp_table(found.plan, step, units, since=since, answer=beside).encode())
        case ".toml":
            from app.plan_saving import write_plan

            write_atomically(path, write_plan(found.plan).encode())
        case _:
            raise PlanError(f'"{args.output}" must end in .csv or .toml')


# --- progress --------------------------------------------------------------------------------------------------------


def progress(what: str) -> Callable[[float], bool] | None:
    """Tells on stderr how far work is, where that is a terminal."""
    if not sys.stderr.isatty():
        return None

    def tick(share: float) -> bool:
        sys.stderr.write(f"\r\033[K{what} … {100.0 * share:.0f} %")
        sys.stderr.flush()
        return True

    return tick


def _clear() -> None:
    if sys.stderr.isatty():
        sys.stderr.write("\r\033[K")
        sys.stderr.flush()
