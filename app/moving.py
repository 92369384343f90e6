"""Quantities moved by hand, as by dragging a mark: new values that keep what the user wrote around the old ones."""

from __future__ import annotations

import math

from app.units import Kind, Quantity, best_unit, exact_text, read_quantity, unit_of


def moved_quantity(
    old: Quantity, value: float, kind: Kind, units: tuple[str, ...], *, step: float | None = None, relative: bool = True
) -> Quantity:
    """A quantity moved by hand.

    Parameters
    ----------
    value : SI; kept within what is possible
    units : the unit is chosen among these where the old one is one of them; else the old one stays
    step : [SI] the value is rounded to whole steps; None: to three digits
    relative : whether the uncertainty stays the same share of the value, or the same number of units
    """
    value = min(max(value, kind.low), kind.high)
    value = _rounded(value, 3) if step is None else stepped(value, step)
    unit = unit_of(old.text, kind)
    unit = best_unit(value, units) if unit in units else unit
    sigma = old.sigma
    if relative and sigma is not None:
        sigma = _rounded_error(sigma / old.value * value)
    return read_quantity(exact_text(value, unit, sigma, kind=kind), kind)


def stepped(value: float, step: float) -> float:
    """The whole multiple of a step that is nearest to a value, without the digits that binary fractions add."""
    return float(f"{round(value / step) * step:.12g}")


def fine_step(span: float) -> float:
    """A power of ten that divides a range into a thousand steps or more: finer than a hand can move a mark over it."""
    return float(10.0 ** math.floor(math.log10(span / 1000.0)))


def _rounded_error(sigma: float) -> float:
    """One digit, or two below 30, where one would be too coarse."""
    two = _rounded(sigma, 2)
    return two if f"{two:e}"[0] in "12" else _rounded(sigma, 1)


def _rounded(value: float, digits: int) -> float:
    return round(value, digits - 1 - math.floor(math.log10(abs(value)))) if value else 0.0
