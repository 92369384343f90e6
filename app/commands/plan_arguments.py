"""Flags that every verb about one plan shares: the plan file, and plan keys that override it."""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app import CONTRACT, __version__

if TYPE_CHECKING:
    from app.plan import Plan

FLAGS = {
    "--species": ("species.key", "isotope, such as 87Rb"),
    "--state": ("species.state", 'trapped state, such as "F=1 mF=-1"'),
    "--spin-components": ("species.spin_components", "equally filled spin states"),
    "--scattering-length": ("species.scattering_length", "such as 100.4 a0; write --scattering-length=-20a0 for negative ones"),
    "--field": ("species.field", "magnetic field that tunes the scattering length, such as 155.2 G"),
    "--frequencies": ("trap.frequencies", 'three trap frequencies, such as "120 Hz, 120 Hz, 20 Hz"'),
    "--depth": ("trap.depth", 'trap depth, such as "5 uK"'),
    "--atoms": ("cloud.atoms", 'atoms per spin state, such as "1.0(1)e5"'),
    "--temperature": ("cloud.temperature", 'such as "200(10) nK"'),
    "--model": ("cloud.model", "ideal, exact levels or semi-ideal"),
    "--target-reduced-temperature": ("target.reduced_temperature", "T/TF that counts as degenerate for fermions"),
    "--efficiency": ("target.efficiency", "assumed evaporation efficiency, -d ln D/d ln N"),
}
"""Flag -> plan key and help."""


def add_plan_arguments(parser: argparse.ArgumentParser) -> None:
    """Add the plan file and the overriding flags to a verb."""
    parser.add_argument("plan", nargs="?", metavar="PLAN", help="plan file; without one, flags give the plan")
    group = parser.add_argument_group("plan keys, which override the file")
    for flag, (key, text) in FLAGS.items():
        group.add_argument(flag, dest=key, metavar="TEXT", help=text)


def plan_of(args: argparse.Namespace) -> Plan:
    """The plan that file and flags give together.

    Raises `PlanError`, whose text names the file or the flag.
    """
    from app.plan import read_plan, plan_with

    base = None if args.plan is None else read_plan(Path(args.plan))
    given = {key: value for key in (key for key, _help in FLAGS.values()) if (value := getattr(args, key)) is not None}
    return plan_with(base, given)


def json_answer(args: argparse.Namespace, body: dict[str, Any], **more: Any) -> str:
    """One JSON object that opens with contract, version and input, as all verbs print it."""
    given = {key: value for key in (key for key, _help in FLAGS.values()) if (value := getattr(args, key, None)) is not None}
    entry: dict[str, Any] = {"plan": args.plan, **given, **more}
    return json.dumps({"coldward": CONTRACT, "version": __version__, "input": entry, **body}, ensure_ascii=False, allow_nan=False)


def fail(message: object) -> int:
    """Say on stderr, in one line, why there is no answer; exit status 1."""
    print(f"coldward: {message}", file=sys.stderr)
    return 1
