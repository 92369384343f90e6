"""Directions as text, "1, 0, 0", and what they are called."""

from __future__ import annotations

from app.plan import PlanField
from app.plan_entries import read_entry
from app.trap_choices import Direction, Gravity
from app.widgets.entry_field import EntryField


class DirectionField(EntryField):
    """Three numbers, of which only the ratios count; gravity may be off as well."""

    def __init__(self, field: PlanField) -> None:
        super().__init__(self._read_direction, direction_text)
        self._field = field

    def _read_direction(self, text: str) -> object:
        if self.locale().decimalPoint() == "," and ";" in text:
            text = text.replace(",", ".")
        if len(text.split()) == 3 and "," not in text and ";" not in text:
            text = ", ".join(text.split())
        return read_entry(self._field, text, {})


def direction_text(value: Direction | Gravity) -> str:
    """A direction as it is typed."""
    return value.value if isinstance(value, Gravity) else ", ".join(f"{part + 0.0:.10g}" for part in value)


def along_text(direction: Direction) -> str:
    """A direction in a word or two: "along −x" for an axis, else its numbers."""
    largest = max(direction, key=abs)
    if sum(part != 0.0 for part in direction) == 1:
        return f"along {'−' if largest < 0.0 else ''}{'xyz'[direction.index(largest)]}"
    return "along (" + ", ".join(f"{part / abs(largest) + 0.0:.3g}".replace("-", "−") for part in direction) + ")"
