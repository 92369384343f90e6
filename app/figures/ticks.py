"""Where ticks stand and what they say, in plain text ("10⁴", "100 nK").

Positions are in drawing units: log10 of the data along a logarithmic axis, the data along a linear one.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache
from itertools import pairwise
from typing import overload

import numpy as np

from app.figures.picture import Array, Axis

_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_PREFIXES = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G", 12: "T"}
_SLACK = 1e-9


@dataclass(frozen=True, kw_only=True)
class Ticks:
    """Long ticks with their texts, and short ticks without."""

    places: tuple[float, ...]
    texts: tuple[str, ...]
    minor: tuple[float, ...] = ()


@overload
def to_drawing(axis: Axis, values: float) -> float: ...
@overload
def to_drawing(axis: Axis, values: Array) -> Array: ...
def to_drawing(axis: Axis, values: float | Array) -> float | Array:
    """Drawing units of data. Along a logarithmic axis values that are not positive have no place: NaN."""
    if not axis.log:
        return values
    if isinstance(values, float | int):
        return math.log10(values) if 0.0 < values < math.inf else math.nan
    with np.errstate(divide="ignore", invalid="ignore"):
        logs = np.log10(values)
    logs[np.isinf(logs)] = np.nan
    return logs


def to_data(axis: Axis, place: float) -> float:
    """Data value at a place in drawing units."""
    return float(10.0**place) if axis.log else place


@lru_cache(maxsize=64)
def span(axis: Axis) -> tuple[float, float]:
    """Both ends of the axis in drawing units."""
    return to_drawing(axis, axis.low), to_drawing(axis, axis.high)


def axis_title(axis: Axis) -> str:
    """Label with unit, powers raised; without it where the ticks carry the unit."""
    if (not axis.unit and not axis.power) or axis.prefixed:
        return axis.label
    power = power_text(10.0**axis.power) if axis.power else ""
    return f"{axis.label} [{f'{power} {raised(axis.unit)}'.strip()}]"


def frame_title(axis: Axis) -> str:
    """What stands beside the axis: its title, or nothing."""
    return axis_title(axis) if axis.titled else ""


def raised(unit: str) -> str:
    """A unit as it is printed: "cm⁻³" for "cm^-3"."""
    return re.sub(r"\^(-?\d+)", lambda power: power[1].translate(_RAISED), unit).replace("a0", "a₀")


def ticks_of(axis: Axis, most: int = 8) -> Ticks:
    """At most about `most` labelled ticks between the ends of the axis, at round values."""
    low, high = span(axis)
    if axis.names:
        return _named(axis, low, high, most)
    if axis.log and high - low >= 0.9:
        return _decades(axis, low, high, most)
    values = _round_values(axis.low, axis.high, most)
    places = tuple(to_drawing(axis, value) for value in values)
    return Ticks(places=places, texts=_texts(axis, values))


def _named(axis: Axis, low: float, high: float, most: int) -> Ticks:
    """Every place with a name, or as many at even steps as fit."""
    first, last = max(math.ceil(low), 0), min(math.floor(high), len(axis.names) - 1)
    places = range(first, last + 1)[:: max(1, math.ceil((last - first + 1) / max(most, 1)))]
    return Ticks(places=tuple(float(place) for place in places), texts=tuple(axis.names[place] for place in places))


def _decades(axis: Axis, low: float, high: float, most: int) -> Ticks:
    first, last = math.ceil(low - _SLACK), math.floor(high + _SLACK)
    step = max(1, math.ceil((last - first + 1) / max(most, 1)))
    if axis.prefixed and step > 1:
        step = 3 * math.ceil(step / 3)  # whole prefixes: 1 nK, 1 µK, 1 mK
    exponents = [e for e in range(first, last + 1) if e % step == 0]
    inner = [e + math.log10(k) for e in range(first - 1, last + 1) for k in range(2, 10)]
    labelled = [float(e) for e in exponents]
    if step == 1 and 3 * len(exponents) <= most and len(exponents) <= 3:
        labelled += [e + math.log10(k) for e in range(first - 1, last + 1) for k in (2, 5)]
    if step > 1:
        inner = [float(e) for e in range(first, last + 1) if e % step]
    places = tuple(p for p in sorted(labelled) if low - _SLACK <= p <= high + _SLACK)
    minor = tuple(p for p in inner if low < p < high and p not in places)
    return Ticks(places=places, texts=_texts(axis, [10.0**p for p in places]), minor=minor)


def _round_values(low: float, high: float, most: int) -> list[float]:
    raw = (high - low) / max(most, 1)
    size = 10.0 ** math.floor(math.log10(raw))
    step = size * next(k for k in (1.0, 2.0, 5.0, 10.0) if k * size >= raw * (1.0 - _SLACK))
    first, last = math.ceil(low / step - _SLACK), math.floor(high / step + _SLACK)
    return [i * step for i in range(first, last + 1)]


def _texts(axis: Axis, values: list[float]) -> tuple[str, ...]:
    if not values:
        return ()
    values = [v / 10.0**axis.power for v in values]
    largest = max(abs(v) for v in values)
    if axis.prefixed:
        shared = None if axis.log else _prefix_exponent(largest)
        return tuple(prefixed(v, axis.unit, shared) for v in values)
    if axis.log:
        plain = min(values) > 9.9e-4 and largest < 1.01e4
        return tuple(f"{v:.6g}" if plain else power_text(v) for v in values)
    step = min((b - a for a, b in pairwise(values)), default=largest)
    finest = math.floor(math.log10(step) + _SLACK) if step > 0.0 else 0
    if largest >= 1e5 or 0.0 < largest < 1e-3:
        exponent = math.floor(math.log10(largest) + _SLACK)
        return tuple(power_text(v, exponent, max(0, exponent - finest)) for v in values)
    return tuple(f"{v:.{max(0, -finest)}f}".replace("-", "−") for v in values)


def power_text(value: float, exponent: int | None = None, digits: int = 0) -> str:
    """A number as a power of ten in plain text: "10⁴", "2×10⁵", "0"; `exponent` fixes the power."""
    if value == 0.0:
        return "0"
    if exponent is None:
        exponent = int(f"{abs(value):.{digits}e}".split("e")[1])
    mantissa = f"{abs(value) / 10.0**exponent:.{digits}f}"
    sign = "−" if value < 0.0 else ""
    power = "10" + str(exponent).translate(_RAISED)
    return sign + power if mantissa == "1" else f"{sign}{mantissa}×{power}"


def _prefix_exponent(value: float) -> int:
    if value == 0.0:
        return 0
    return min(max(3 * math.floor((math.log10(abs(value)) + _SLACK) / 3), min(_PREFIXES)), max(_PREFIXES))


def prefixed(value: float, unit: str, exponent: int | None = None) -> str:
    """A number with a prefixed unit: "100 nK"; `exponent` fixes the prefix."""
    if value == 0.0:
        return f"0 {unit}"
    power = _prefix_exponent(value) if exponent is None else exponent
    number = f"{value / 10.0**power:.6g}".replace("-", "−")
    return f"{number} {_PREFIXES[power]}{unit}"
