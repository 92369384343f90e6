"""An answer's quantities as they are read: number, unit, symbol, and why there is none."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from app.engine import CloudAnswer
from app.figures.ticks import raised
from app.quantities import QUANTITIES, Need, Row
from app.units import best_unit
from app.words import range_text, reason_missing, row_tip, shown_unit, symbol_of, written

_RAISED = str.maketrans("123456789", "¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True)
class Reading:
    """A quantity as it is read: its symbol, number and unit as text; `reason` says why there is no number."""

    symbol: str
    value: str
    unit: str = ""
    reason: str = ""

    @property
    def text(self) -> str:
        return f"{self.value} {self.unit}".strip()


def tip_of(row: Row, reading: Reading, interval: str) -> str:
    """What a reader wants to know of a number: how it is worked out, from where, how far it holds, how sure it is."""
    lines = [f"{row.label}, {row.symbol}", row_tip(row)]
    if reading.reason:
        lines.insert(1, f"no value: {reading.reason}")
    if interval:
        lines.insert(1, f"68 % of the draws: {interval}")
    if len(row.units) > 1:
        lines.append("Return or a right click chooses the unit")
    return "\n".join(lines)


_NEVER = frozenset(
    {Need.BOSONS, Need.FERMIONS, Need.ATTRACTIVE, Need.DIPOLES, Need.HARMONIC, Need.REAL_TRAP},
)
"""What this gas in this trap will not have, whatever its temperature and number: such quantities are left out."""


class Readings(Mapping[str, Reading]):
    """What the readouts show of an answer, by name, each worked out when it is first asked for: most are not in view.

    Quantities of other gases are left out, as is the comparison with a harmonic trap where the trap is one; those that
    lack an input say so.
    """

    def __init__(self, answer: CloudAnswer, chosen_units: Mapping[str, str]) -> None:
        self._answer, self._units = answer, dict(chosen_units)
        needs = {name: answer.missing(row) for name, row in QUANTITIES.items()}
        self._needs = {name: need for name, need in needs.items() if need not in _NEVER}
        self._known: dict[str, Reading] = {}

    def __getitem__(self, name: str) -> Reading:
        if name not in self._known:
            self._known[name] = self._read(name, self._needs[name])
        return self._known[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self._needs)

    def __len__(self) -> int:
        return len(self._needs)

    def _read(self, name: str, need: Need | None) -> Reading:
        row, answer = QUANTITIES[name], self._answer
        if need is not None:
            return Reading(symbol_of(row, answer), "–", reason=reason_missing(need))
        unit, value = self._units.get(name, ""), answer.value(name)
        if unit not in row.units:
            unit = unit_for(row, value)
        return Reading(symbol_of(row, answer), written(value, row, unit), shown_unit(unit))


def interval_text(answer: CloudAnswer, name: str) -> str:
    """The interval of a quantity over the stated uncertainties, in the unit that suits it; empty where there is
    none."""
    row = QUANTITIES[name]
    if answer.missing(row):
        return ""
    unit = unit_for(row, answer.value(name))
    between = range_text(answer, row, unit)
    return f"{between} {shown_unit(unit)}".strip() if between else ""


def unit_for(row: Row, value: object) -> str:
    """The unit that suits a value, where the reader chose none."""
    if len(row.units) == 1 or "%" in row.units:
        return row.units[0]
    return best_unit(float(np.max(np.abs(np.asarray(value, dtype=float)))), row.units)


@lru_cache(maxsize=256)
def printed_unit(unit: str) -> str:
    """A unit as it is set in print: "cm⁻³" for "1/cm^3", "cm⁶/s" for "cm^6/s"."""
    found = re.fullmatch(r"1/(\w+?)(?:\^(\d))?", unit)
    return raised(unit) if found is None else f"{found[1]}⁻{(found[2] or '1').translate(_RAISED)}"
