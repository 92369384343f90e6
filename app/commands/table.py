"""`coldward table`: many clouds at once, one a row of a CSV file."""

from __future__ import annotations

import argparse
import csv
import difflib
import io
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.commands.plan_arguments import add_plan_arguments, given_flags, json_answer, plan_of
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
    parser.add_argument("--json", action="store_true", help="print one JSON object; a FILE is written too")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Answer every row that can be answered; report the others with their line number."""
    from app.engine import cloud_answer
    from app.files import write_atomically

    try:
        header, rows = _read(Path(args.clouds))
        columns = _columns(header, args.clouds)
        base, flags = _base(args)
    except ValueError as error:
        return fail(error)
    answered: list[tuple[int, list[str], CloudAnswer]] = []
    refused: list[tuple[int, str]] = []
    for line, row in rows:
        try:
            if len(row) != len(header):
                raise ValueError(f"{len(header)} cells are needed, as in the header, got {len(row)}")
            answered.append((line, row, cloud_answer(_plan_of_row(base, flags, columns, row))))
        except ValueError as error:
            refused.append((line, str(error)))
            print(f"coldward: {args.clouds}, line {line}: {error}", file=sys.stderr)
    try:
        if args.output is not None:
            write_atomically(Path(args.output), _csv(header, answered).encode())
        elif not args.json:
            sys.stdout.write(_csv(header, answered))
    except OSError as error:
        return fail(error)
    if args.json:
        print(_json(args, answered, refused))
    return 1 if refused else 0


def _csv(header: list[str], answered: list[tuple[int, list[str], CloudAnswer]]) -> str:
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow([*header, *_answer_header()])
    writer.writerows([*row, *_answer_cells(answer)] for _, row, answer in answered)
    return out.getvalue()


def _json(
    args: argparse.Namespace, answered: list[tuple[int, list[str], CloudAnswer]], refused: list[tuple[int, str]]
) -> str:
    from app.commands.state import state_body

    body = {
        "rows": [{"line": line, **state_body(answer)} for line, _, answer in answered],
        "refused": [{"line": line, "reason": reason} for line, reason in refused],
    }
    return json_answer(args, body, clouds=args.clouds)


def _base(args: argparse.Namespace) -> tuple[Plan | None, dict[str, str]]:
    """What holds where a row says nothing: a whole plan, or only flags where these are not enough for one."""
    from app.choices import PLAN_FIELDS

    flags = given_flags(args)
    if args.plan is None and any(field.required and field.path not in flags for field in PLAN_FIELDS.values()):
        return None, flags
    return plan_of(args), {}


def _read(path: Path) -> tuple[list[str], list[tuple[int, list[str]]]]:
    try:
        text = path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise ValueError(f"{path} is not text in UTF-8 (byte {error.start})") from error
    except OSError as error:
        raise ValueError(f"{path} could not be read: {error.strerror or error}") from error
    reader = csv.reader(io.StringIO(text))
    try:
        rows = [(reader.line_num, row) for row in reader if any(cell.strip() for cell in row)]
    except csv.Error as error:
        raise ValueError(f"{path}, line {reader.line_num}: {error}") from error
    if not rows:
        raise ValueError(f"{path} has no header line")
    header = [" ".join(cell.split()) for cell in rows[0][1]]
    if len(header) == 1 and any(mark in header[0] for mark in ";\t"):
        raise ValueError(f"{path} must have commas between its cells, and decimal points within them")
    return header, rows[1:]


@dataclass(frozen=True, kw_only=True)
class _Column:
    """A header cell that says what is in its column: plan key, unit, and which trap axis."""

    name: str
    key: str
    unit: str = ""
    axis: int | None = None


def _columns(header: list[str], file: str) -> list[_Column | None]:
    columns = [_column(name, file) for name in header]
    first: dict[tuple[str, int | None], str] = {}
    for column in columns:
        if column is None:
            continue
        before = first.setdefault((column.key, column.axis), column.name)
        if before is not column.name:
            raise ValueError(f'{file}: columns "{before}" and "{column.name}" say the same')
    return columns


def _column(name: str, file: str) -> _Column | None:
    """What a header cell means; None for a column that is only carried along."""
    word, bracket, rest = name.partition("[")
    word, unit = word.strip().casefold(), rest.strip().removesuffix("]").strip()
    if word in _TEXTS and not bracket:
        return _Column(name=name, key=_TEXTS[word])
    if word in _QUANTITIES:
        return _Column(name=name, key=_QUANTITIES[word], unit=unit)
    if word in _AXES:
        return _Column(name=name, key="trap.frequencies", unit=unit, axis=_AXES.index(word))
    if bracket:
        known = ", ".join([*_QUANTITIES, *_AXES])
        raise ValueError(f'{file}: column "{name}" has a unit but is not one of {known}')
    near = difflib.get_close_matches(word, [*_TEXTS, *_QUANTITIES], n=1, cutoff=0.8)
    if near:
        raise ValueError(f'{file}: column "{name}" is not read; did you mean "{near[0]}"?')
    return None


def _plan_of_row(base: Plan | None, flags: dict[str, str], columns: list[_Column | None], row: list[str]) -> Plan:
    from app.plan import plan_with

    texts, names, axes = dict(flags), {}, {}
    for column, cell in zip(columns, row, strict=True):
        if column is None:
            continue
        if column.axis is None:
            names[column.key] = f'column "{column.name}"'
        if text := f"{cell.strip()} {column.unit}".strip() if cell.strip() else "":
            if column.axis is None:
                texts[column.key] = text
            else:
                axes[column.axis] = _frequency(text, column)
    if axes:
        texts["trap.frequencies"] = ", ".join(_frequencies(base, flags, axes))
    if base is None:
        words = {key: word for word, key in (_TEXTS | _QUANTITIES).items()} | {"trap.frequencies": ", ".join(_AXES)}
        names |= {key: f"column {word}" for key, word in words.items() if key not in texts and key not in names}
    return plan_with(base, texts, where=names)


def _frequency(text: str, column: _Column) -> str:
    from app.units import FREQUENCY, read_quantity

    try:
        return read_quantity(text, FREQUENCY).text
    except ValueError as error:
        raise ValueError(f'column "{column.name}": {error}') from None


def _frequencies(base: Plan | None, flags: dict[str, str], axes: dict[int, str]) -> list[str]:
    """Three texts: those of the row, and for axes that it leaves out those of the plan or of the flag."""
    if base is not None:
        others = [quantity.text for quantity in base.trap.frequencies or ()]
    else:
        others = flags.get("trap.frequencies", "").split(",")
    if len(others) != 3 and len(axes) != 3:
        missing = [name for axis, name in enumerate(_AXES) if axis not in axes]
        raise ValueError(f"{' and '.join(missing)} must be given too, or --frequencies for all rows")
    return [axes[axis] if axis in axes else others[axis] for axis in range(3)]


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
