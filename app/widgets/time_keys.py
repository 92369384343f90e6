"""The time along a ramp that is read, moved by the keyboard."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent

_STEP = 0.01
"""Of the whole ramp; ten of them with Shift."""


@dataclass(frozen=True, kw_only=True)
class MovedTime:
    """Where a key moves the time that is read. [s] None: nothing is read any more."""

    time: float | None


def moved_time(event: QEvent, reading: float | None, end: float | None, *, on_plot: bool) -> MovedTime | None:
    """What pressing a key does to the time that is read; None where it does nothing.

    The left and right arrow keys on a plot move it, from either end where none is read; Escape ends the reading.

    reading : the time that is read. [s] None: none
    end : of the ramp. [s] None: there is none
    on_plot : whether the key went to a plot along the ramp
    """
    if not isinstance(event, QKeyEvent):
        return None
    shift = event.modifiers() == Qt.KeyboardModifier.ShiftModifier
    plain = event.modifiers() in (Qt.KeyboardModifier.NoModifier, Qt.KeyboardModifier.KeypadModifier)
    steps = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}.get(Qt.Key(event.key()), 0)
    if steps and on_plot and (plain or shift):
        if end is None:
            return MovedTime(time=reading)
        here = reading if reading is not None else (0.0 if steps > 0 else end)
        return MovedTime(time=min(max(here + (10 if shift else 1) * steps * _STEP * end, 0.0), end))
    if event.key() == Qt.Key.Key_Escape and reading is not None:
        return MovedTime(time=None)
    return None
