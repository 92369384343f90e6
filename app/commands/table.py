"""`coldward table`: many clouds at once, one a row of a CSV file."""

from __future__ import annotations

import argparse
import csv
import io
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.plan_arguments import add_plan_arguments, plan_of
from app.commands.trouble import fail

if TYPE_CHECKING:
    from app.engine import CloudAnswer
    from app.plan import Plan

_AXES = ("fx", "fy", "fz")
_TEXTS = {
    "species": "species.key",
    "state": "species.state",
    "model": "cloud.model",
    "spin_components": "species.spin_components",
}
_QUANTITIES = {
    "atoms": "cloud.atoms",
    "temperature": "cloud.temperature",
    "depth": "trap.depth",
    "scattering_length": "species.scattering_length",
    "field": "species.field",
    "background_lifetime": "losses.background_lifetime",
    "two_body": "losses.two_body",
    "three_body": "losses.three_body",
    "heating": "losses.heating",
    "reduced_temperature": "target.reduced_temperature",
    "efficiency": "target.efficiency",
}
"""Column name -> plan key; quantities may carry their unit in the header, "temperature [uK]"."""


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "table",
        help="one cloud a row of a CSV file",
        description="Read clouds from a CSV file, one a row, and append the columns of the answer. "
        "Columns: "
        + ", ".join([*_TEXTS, *_QUANTITIES, *_AXES])
        + '; with their unit as in "temperature [uK]", "fx [Hz]". '
        "What a row leaves out comes from the plan and the flags.",
    )
    parser.add_argument("clouds", metavar="CLOUDS", help="CSV file with a header line")
    add_plan_arguments(parser, name="--plan")
    parser.add_argument("-o", "--output", metavar="FILE", help="CSV file; stdout without it")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Answer every row that can be answered; report the others with their line number."""
    from app.engine import cloud_answer
    from app.files import write_atomically

    try:
        header, rows = _read(Path(args.clouds))
        base = plan_of(args)
        columns = [_column(name, args.clouds) for name in header]
    except (ValueError, OSError) as error:
        return fail(error)
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow([*header, *_answer_header()])
    bad = 0
    for line, row in rows:
        try:
            if len(row) != len(header):
                raise ValueError(f"{len(header)} cells are needed, as in the header, got {len(row)}")
            answer = cloud_answer(_plan_of_row(base, columns, row))
        except ValueError as error:
            bad += 1
            print(f"coldward: {args.clouds}, line {line}: {error}", file=sys.stderr)
        else:
            writer.writerow([*row, *_answer_cells(answer)])
    try:
        if args.output is None:
            sys.stdout.write(out.getvalue())
        else:
            write_atomically(Path(args.output), out.getvalue().encode())
    except OSError as error:
        return fail(error)
    return 1 if bad else 0


def _read(path: Path) -> tuple[list[str], list[tuple[int, list[str]]]]:
    try:
        text = path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise ValueError(f"{path} is not text in UTF-8 (byte {error.start})") from error
    reader = csv.reader(io.StringIO(text))
    try:
        rows = [(reader.line_num, row) for row in reader if any(cell.strip() for cell in row)]
    except csv.Error as error:
        raise ValueError(f"{path}, line {reader.line_num}: {error}") from error
    if not rows:
        raise ValueError(f"{path} has no header line")
    return [cell.strip() for cell in rows[0][1]], rows[1:]


@dataclass(frozen=True, kw_only=True)
class _Column:
    """A header cell that says what is in its column: plan key, unit, and which trap axis."""

    name: str
    key: str
    unit: str = ""
    axis: int | None = None


def _column(name: str, file: str) -> _Column | None:
    """What a header cell means; None for a column that is only carried along."""
    word, bracket, rest = name.partition("[")
    word, unit = word.strip(), rest.strip().removesuffix("]").strip()
    if word in _TEXTS and not bracket:
        return _Column(name=name, key=_TEXTS[word])
    if word in _QUANTITIES:
        return _Column(name=name, key=_QUANTITIES[word], unit=unit)
    if word in _AXES:
        return _Column(name=name, key="trap.frequencies", unit=unit, axis=_AXES.index(word))
    if bracket:
        known = ", ".join([*_QUANTITIES, *_AXES])
        raise ValueError(f'{file}: column "{name}" has a unit but is not one of {known}')
    return None


def _plan_of_row(base: Plan, columns: list[_Column | None], row: list[str]) -> Plan:
    from app.plan import plan_with

    cells = [(column, cell.strip()) for column, cell in zip(columns, row, strict=True) if column and cell.strip()]
    plan = base
    # A species drops what the plan says of another one's state, so it comes first, whatever the order of the columns.
    for column, text in sorted(cells, key=lambda entry: entry[0].key != "species.key"):
        if column.axis is None:
            texts = f"{text} {column.unit}".strip()
        else:
            axes = [quantity.text for quantity in plan.trap.frequencies]
            axes[column.axis] = f"{text} {column.unit}".strip()
            texts = ", ".join(axes)
        plan = plan_with(plan, {column.key: texts}, where=f'column "{column.name}"')
    return plan


def _answer_header() -> list[str]:
    from app.quantities import QUANTITIES

    names = []
    for row in QUANTITIES.values():
        unit = "" if row.unit == "1" else f" [{row.unit}]"
        names += [f"{row.name}_{axis}{unit}" for axis in "xyz"] if row.axes else [f"{row.name}{unit}"]
    return [*names, "model", "caveats"]


def _answer_cells(answer: CloudAnswer) -> list[str]:
    import numpy as np

    from app.quantities import QUANTITIES

    cells = []
    for row in QUANTITIES.values():
        values = np.asarray(answer.value(row.name), dtype=float).reshape(-1)
        known = answer.missing(row) is None
        cells += [repr(value) if known and np.isfinite(value) else "" for value in values.tolist()]
    return [*cells, answer.model.value, " ".join(caveat.id for caveat in answer.caveats)]
