"""Ramps as tables: a row a time, a column a control, for devices that play them and for tables that come from these.

    time [s],power A [W],knife [MHz]
    0,2.5,2.1
    0.01,2.4875,2.1

The first line names each column, with its unit in brackets; pure numbers have none. Columns of a cloud, such as
"atoms" and "passenger atoms", may stand beside the controls, and are left out where a table is read. Numbers have
decimal points. Semicolons or tabs between columns are read as well as commas.
"""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from app.control_kinds import CONTROL_KINDS, control_named
from app.kinds import TIME, Kind
from app.plan_field import PlanError
from app.ramp_quantities import RAMP_COLUMNS, RampColumn, control_column
from app.units import Quantity, QuantityError, factor, read_quantity
from physics.ramp_shapes import Shape
from physics.ramps import Control

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.plan import Plan, StageChoice
    from physics.evaporation import Evaporation
    from physics.sympathetic import SympatheticCooling

MOST_ROWS = 200_000
"""Of a table; a file of that length is a mistake in the step."""

CLOUD_COLUMNS = (
    "atoms",
    "temperature",
    "peak_phase_space_density",
    "reduced_temperature",
    "truncation",
    "elastic_collision_rate",
    "depth",
)
"""What may stand beside the controls."""

CLOSE = 2e-4
"""Share of its value by which a control may be off between the points that are kept of a table."""

_TRAP_DEPTH = "trap depth"
_PASSENGER = "passenger "
"""Before the names of the columns of a second species."""


@dataclass(frozen=True, kw_only=True)
class RampTable:
    """A table that was read: (time [s], value) of each control, as written."""

    times: tuple[Quantity, ...]
    values: Mapping[Control, tuple[Quantity, ...]]

    @property
    def duration(self) -> Quantity:
        return self.times[-1]

    def stage(self, *, thin: bool = True, label: str = "") -> StageChoice:
        """The table as one stage; thin: without the points that straight lines between the others hit anyway."""
        from app.plan import MoveChoice, StageChoice

        moves = []
        for control, values in self.values.items():
            kept = _corners(self.times, values) if thin else range(len(values))
            points = tuple((self.times[place], values[place]) for place in kept)
            moves.append(MoveChoice(control=control, shape=Shape.TABLE, points=points))
        return StageChoice(duration=self.duration, moves=tuple(moves), label=label)


def _corners(times: Sequence[Quantity], values: Sequence[Quantity]) -> list[int]:
    """Places of the points to keep: from each as far as a straight line stays close to all between."""
    t, v = [time.value for time in times], [value.value for value in values]
    scale = max(abs(value) for value in v)
    kept = [0]
    while kept[-1] < len(v) - 1:
        first = kept[-1]
        # Slopes of lines that pass all points so far within what is allowed.
        low, high, last = -math.inf, math.inf, first + 1
        for place in range(first + 1, len(v)):
            step = t[place] - t[first]
            slope = (v[place] - v[first]) / step
            if not low <= slope <= high:
                break
            last = place
            off = CLOSE * max(abs(v[place]), 1e-6 * scale) / step
            low, high = max(low, slope - off), min(high, slope + off)
        kept.append(last)
    return kept


# --- reading ---------------------------------------------------------------------------------------------------------


def read_ramp_table(text: str, name: str = "the table") -> RampTable:
    """The ramp that a table holds.

    Raises
    ------
    PlanError
        One sentence with the number of the line: a column that is no control, a number that cannot be read or that the
        control cannot have, a time that does not increase from 0.
    """
    lines = [(number, row) for number, row in _rows(text, name) if any(cell.strip() for cell in row)]
    if not lines:
        raise PlanError(f'{name} is empty; its first line names the columns, such as "time [s],power A [W]"')
    place, header = lines[0]
    columns = [_column(cell, f"{name}, line {place}") for cell in header]
    if columns[0] is None or columns[0][0] is not None:
        raise PlanError(f'{name}, line {place}: the first column must be "time [s]", got "{header[0].strip()}"')
    found: dict[Control, list[Quantity]] = {}
    for column in columns[1:]:
        if column is None:
            continue
        if column[0] is None or column[0] in found:
            raise PlanError(f"{name}, line {place}: a column stands there twice")
        found[column[0]] = []
    if not found:
        raise PlanError(f"{name}, line {place}: there is no column of a control")
    times: list[Quantity] = []
    for number, row in lines[1:]:
        where = f"{name}, line {number}"
        if len(row) != len(header):
            raise PlanError(f"{where}: {len(row)} cells under {len(header)} columns")
        for column, title, cell in zip(columns, header, row, strict=True):
            if column is None:
                continue
            control, kind, unit = column
            value = _cell(cell, kind, unit, f'{where}, "{title.strip()}"')
            if control is not None:
                found[control].append(value)
                continue
            before = times[-1].value if times else None
            if (before is None and value.value != 0.0) or (before is not None and value.value <= before):
                rule = "must increase" if times else "must begin at 0"
                raise PlanError(f"{where}: times {rule}, got {value.text}")
            times.append(value)
    if len(times) < 2:
        raise PlanError(f"{name} needs two rows or more under its first line")
    return RampTable(times=tuple(times), values={control: tuple(values) for control, values in found.items()})


def _rows(text: str, name: str) -> list[tuple[int, list[str]]]:
    text = text.removeprefix("\ufeff")
    # As spreadsheets of many places write it; numbers have decimal points all the same.
    first = next((line for line in text.splitlines() if line.strip()), "")
    between = next((sign for sign in ";\t" if sign in first), ",")
    reader = csv.reader(io.StringIO(text), strict=True, delimiter=between)
    found: list[tuple[int, list[str]]] = []
    try:
        for row in reader:
            if len(found) > MOST_ROWS:
                raise PlanError(f"{name} has more than {MOST_ROWS} lines")
            found.append((reader.line_num, row))
    except csv.Error as error:
        raise PlanError(f"{name}, line {reader.line_num}: {error}") from None
    return found


def _column(cell: str, where: str) -> tuple[Control | None, Kind, str] | None:
    """Control, kind and unit of a column, without control for the time; None for one of a cloud."""
    title, bracket, rest = cell.strip().partition("[")
    title, unit = title.strip(), rest.removesuffix("]").strip()
    if bracket and not rest.endswith("]"):
        raise PlanError(f'{where}: a bracket is not closed in "{cell.strip()}"')
    if title == _TRAP_DEPTH or (title in RAMP_COLUMNS and title not in ("time", "depth")):
        return None
    if title.startswith(_PASSENGER):
        return None
    if title == "time":
        control, kind = None, TIME
    else:
        try:
            control = control_named(title)
        except ValueError as error:
            raise PlanError(f"{where}: {error}") from None
        kind = CONTROL_KINDS[control.knob]
    if kind.si_unit and not unit:
        raise PlanError(f'{where}: "{title}" needs a unit, such as "{title} [{kind.units[0]}]"')
    try:
        factor(unit, kind.si_unit)
    except QuantityError as error:
        raise PlanError(f'{where}, "{title}": {error}') from None
    return control, kind, unit


def _cell(cell: str, kind: Kind, unit: str, where: str) -> Quantity:
    if not cell.strip():
        raise PlanError(f"{where}: the cell is empty; a table holds the controls of one trap, in every row")
    try:
        return read_quantity(f"{cell.strip()} {unit}".strip(), kind)
    except QuantityError as error:
        raise PlanError(f"{where}: {error}") from None


# --- writing ---------------------------------------------------------------------------------------------------------


def usual_step(duration: float) -> float:
    """A round step [s] that makes some hundred rows, a thousand at most."""
    least = duration / 1000.0
    power = 10.0 ** math.floor(math.log10(least))
    return float(f"{next(m * power for m in (1.0, 2.0, 5.0, 10.0) if m * power >= least * (1.0 - 1e-9)):.12g}")


def ramp_table(
    plan: Plan,
    step: float | None = None,
    units: Mapping[str, str] | None = None,
    *,
    since: str | None = None,
    answer: RampAnswer | None = None,
) -> str:
    """The plan's ramp as a CSV table, to its end.

    step : [s] None: `usual_step`
    units : of columns by their name, "time" or "power A"; the others have the usual ones
    since : only what follows a measured cloud, as of `app.answers.ramp_answer`
    answer : adds the columns of the cloud, and of a passenger, empty where the simulation is over

    Raises
    ------
    PlanError
        A unit for a column that there is not, or that does not fit; more than `MOST_ROWS` rows.
    """
    import numpy as np

    from app.answers.ramp_start import start_of

    start = start_of(plan, since)
    if start.ramp is None:
        raise PlanError("nothing is left of the ramp after its last stage")
    duration = start.ramp.duration
    step = usual_step(duration) if step is None else step
    if not 0.0 < step <= duration:
        raise PlanError(
            f"the step must be above 0 and at most the duration of the ramp, {duration:g} s, got {step:g} s"
        )
    if duration / step > MOST_ROWS:
        raise PlanError(f"a step of {step:g} s makes more than {MOST_ROWS} rows")
    count = math.ceil(duration / step * (1.0 - 1e-9))
    times = np.append(step * np.arange(count, dtype=np.float64), duration)
    columns: list[tuple[str, RampColumn, Any]] = [("time", RAMP_COLUMNS["time"], times)]
    for control, values in start.ramp.values(start.path.standing, times).items():
        columns.append((control.label, control_column(control), values))
    if answer is not None:
        for name in CLOUD_COLUMNS:
            title = _TRAP_DEPTH if name == "depth" else name
            columns.append((title, RAMP_COLUMNS[name], _at(times, answer.run, name)))
        if answer.passenger is not None:
            columns += _of_passenger(times, answer.passenger.run)
    return _written(columns, dict(units or {}))


def _of_passenger(times: Any, run: SympatheticCooling) -> list[tuple[str, RampColumn, Any]]:
    """The columns of the second species, and how long its temperature takes to follow the first."""
    from app.mixture_quantities import MIXTURE_QUANTITIES

    found = [(f"{_PASSENGER}{n}", RAMP_COLUMNS[n], _at(times, run.passenger, n)) for n in CLOUD_COLUMNS]
    row = MIXTURE_QUANTITIES["relaxation_time"]
    column = RampColumn(
        name=row.name, label=row.label, symbol=row.symbol, unit=row.unit, units=row.units, formula=row.formula
    )
    return [
        *found,
        (f"{_PASSENGER}{row.name}", column, _between(times, run.passenger.time, run.contact.relaxation_time)),
    ]


def _at(times: Any, run: Evaporation, name: str) -> Any:
    """A column of a cloud at other times, NaN after its end."""
    return _between(times, run.time, getattr(run.rows, name))


def _between(times: Any, known: Any, values: Any) -> Any:
    import numpy as np

    if not len(known):
        return np.full(len(times), np.nan)
    with np.errstate(all="ignore"):
        found = np.exp(np.interp(times, known, np.log(values)))
    return np.where(times <= known[-1] * (1.0 + 1e-9), found, np.nan)


def _written(columns: list[tuple[str, RampColumn, Any]], units: dict[str, str]) -> str:
    from app.unit_text import normal_unit

    header, scaled = [], []
    for title, column, values in columns:
        unit = normal_unit(units.pop(title)) if title in units else column.units[0]
        si_unit = "" if column.unit == "1" else column.unit
        try:
            size = factor("" if unit == "1" else unit, si_unit)
        except QuantityError as error:
            raise PlanError(f'unit of "{title}": {error}') from None
        header.append(title if unit in ("1", "") else f"{title} [{unit}]")
        scaled.append([value / size for value in values.tolist()])
    if units:
        known = ", ".join(title for title, *_ in columns)
        raise PlanError(f'a unit is given for "{next(iter(units))}", and the columns are {known}')
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(header)
    for row in zip(*scaled, strict=True):
        writer.writerow(["" if math.isnan(value) else f"{value:.10g}" for value in row])
    return out.getvalue()


def read_units(text: str) -> dict[str, str]:
    """Units by column, from "power A=mW, time=ms".

    Raises
    ------
    PlanError
        A part without "=".
    """
    found = {}
    for part in text.split(","):
        title, equals, unit = part.partition("=")
        if not equals or not title.strip() or not unit.strip():
            raise PlanError(f'units are written "power A=mW, time=ms", got "{text}"')
        found[" ".join(title.split())] = unit.strip()
    return found
