"""Flags that every verb about one plan shares: the plan file, and plan keys that override it."""

from __future__ import annotations

import argparse
import json
from collections.abc import Collection
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app import CONTRACT, __version__
from app.choices import PLAN_FIELDS

if TYPE_CHECKING:
    from app.plan import Plan


def add_plan_arguments(parser: argparse.ArgumentParser, *, name: str = "plan", without: Collection[str] = ()) -> None:
    """Add the plan file, as an argument or under an option of that name, and the overriding flags to a verb, but for
    the plan keys of `without`."""
    text = "plan file; without one, flags give the plan"
    if name.startswith("-"):
        parser.add_argument(name, metavar="PLAN", help=text)
    else:
        parser.add_argument(name, nargs="?", metavar="PLAN", help=text)
    group = parser.add_argument_group("plan keys, which override the file")
    for path, field in PLAN_FIELDS.items():
        if path in without:
            continue
        group.add_argument(field.flag, dest=path, metavar="TEXT", help=field.tip.replace("%", "%%"))


def plan_of(args: argparse.Namespace) -> Plan:
    """The plan that file and flags give together.

    Raises `PlanError`, whose text names the file or the flag.
    """
    from app.plan import plan_with, read_plan

    base = None if args.plan is None else read_plan(Path(args.plan))
    return plan_with(base, given_flags(args))


def given_flags(args: argparse.Namespace) -> dict[str, str]:
    """Plan keys that flags have set, with their texts."""
    return {path: text for path in PLAN_FIELDS if (text := getattr(args, path, None)) is not None}


def json_answer(args: argparse.Namespace, body: dict[str, Any], **more: Any) -> str:
    """One JSON object that opens with contract, version and input, as all verbs print it."""
    entry: dict[str, Any] = {"plan": args.plan, **given_flags(args), **more}
    return json.dumps(
        {"coldward": CONTRACT, "version": __version__, "input": entry, **body}, ensure_ascii=False, allow_nan=False
    )
