"""Unit texts: the one registry of the program, and what a unit is worth in SI.

`app.kinds.EVERYDAY` answers for the usual units; pint is imported, with the definitions of units.txt, when the first
other one is met. Only symbols, whole powers, products and quotients are handed to it, each symbol checked: "cm^6/s",
"G/cm", "1/Hz", "cm⁻³".
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable
from decimal import Context, Decimal
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

from app.kinds import EVERYDAY, STAND_INS

if TYPE_CHECKING:
    import pint

_WIDE = Context(prec=60)
_LETTER = r"[^\W\d_⁰¹²³⁴⁵⁶⁷⁸⁹]"
_SYMBOL = rf"{_LETTER}(?:{_LETTER}|[0-9₀_])*"
_SUPERSCRIPTS = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")
_UNIT_TOKEN = re.compile(
    rf"\s*(?P<join>[*·×/]?)\s*(?P<symbol>{_SYMBOL})(?:(?:\^|\*\*)(?P<power>-?[0-9])|(?P<raised>⁻?[⁰¹²³⁴⁵⁶⁷⁸⁹]))?"
)


class QuantityError(ValueError):
    """A text that is not a quantity of the kind asked for. The message is one sentence for the person who wrote it."""


@lru_cache(maxsize=1)
def _registry() -> pint.UnitRegistry[Decimal]:
    import pint

    return pint.UnitRegistry(str(Path(__file__).with_name("units.txt")), non_int_type=Decimal, cache_folder=None)


def normal_unit(unit: str) -> str:
    """One spelling for each unit text: micro sign U+00B5, no spaces around signs, ^ for powers."""
    unit = unit.strip().replace("μ", "µ").replace("Å", "Å").replace("**", "^")
    if unit in EVERYDAY:
        return unit
    if unit.startswith("u") and "µ" + unit[1:] in EVERYDAY and len(unit) > 1:
        return "µ" + unit[1:]
    return unit


@lru_cache(maxsize=512)
def _resolve(unit: str) -> tuple[Decimal, frozenset[tuple[str, Decimal]]]:
    """SI factor and dimension of any unit text that the registry knows."""
    expression = _pint_text(unit)
    registry = _registry()
    parsed = registry.parse_units(expression)
    size, _ = registry.get_root_units(parsed)
    dimension = frozenset((str(name), Decimal(str(power))) for name, power in parsed.dimensionality.items())
    return Decimal(str(size)), dimension


def _pint_text(unit: str) -> str:
    """The unit text in pint's spelling, each symbol checked; nothing but symbols, powers, products and quotients."""
    if unit in ("", "1"):
        return "dimensionless"
    rest = unit
    words: list[str] = []
    leading = re.match(r"1\s*(?=/)", rest)
    if leading is not None:
        words.append("1")
        rest = rest[leading.end() :]
    while rest:
        token = _UNIT_TOKEN.match(rest)
        if token is None or (token["join"] and not words):
            raise QuantityError(f'"{unit}" is not a unit')
        symbol = token["symbol"]
        if not _registry().parse_unit_name(symbol):
            raise QuantityError(f'"{symbol}" is not a unit that is known here')
        power = token["power"] or (token["raised"] or "").translate(_SUPERSCRIPTS)
        join = "/" if token["join"] == "/" else "*"
        words.append((join if words else "") + symbol + (f"**({power})" if power else ""))
        rest = rest[token.end() :].rstrip()
    return "".join(words)


@lru_cache(maxsize=1024)
def exact_factor(unit: str, si_unit: str | None = None) -> Decimal:
    """How many `si_unit` one `unit` is, stand-ins included (K for J ...); without `si_unit`, the unit's own SI unit.
    QuantityError where it does not fit."""
    unit = normal_unit(unit)
    everyday = EVERYDAY.get(unit)
    if si_unit is None:
        return everyday[0] if everyday is not None else _resolve(unit)[0]
    for meaning, scale in ((si_unit, Decimal(1)), *STAND_INS.get(si_unit, ())):
        if everyday is not None:
            if everyday[1] == meaning:
                return _WIDE.multiply(everyday[0], scale)
        elif (resolved := _resolve(unit))[1] == _resolve(meaning)[1]:
            return _WIDE.multiply(resolved[0], scale)
    raise QuantityError(f'"{unit}" is not a unit of a quantity in "{si_unit}"')


def factor(unit: str, si_unit: str | None = None) -> float:
    """SI factor of a unit text: factor("µK") == 1e-06. With `si_unit`, what the unit stands for in it:
    factor("kHz", "K") is h/k times 1000 Hz. QuantityError for unknown units and those that do not fit."""
    return float(exact_factor(unit, si_unit))


def best_unit(value: float, units: Iterable[str], si_unit: str | None = None) -> str:
    """The unit, among those of the dimension of the first, that reads best: 1.46e-7 K is 146 nK, not 0.146 µK.

    value : in `si_unit`; without one, in the SI unit of the first of `units`. NaN and 0 get the first.
    """
    choices = tuple(units)
    if not math.isfinite(value) or value == 0.0:
        return choices[0]
    by_size = _by_size(choices, si_unit)
    size = abs(value)
    return next((unit for least, unit in reversed(by_size) if size >= least), by_size[0][1])


@lru_cache(maxsize=256)
def _by_size(units: tuple[str, ...], si_unit: str | None) -> tuple[tuple[float, str], ...]:
    """The units that have the dimension of the first, the smallest first, each with the value from which it reads
    well."""
    dimensions = {u: EVERYDAY[normal_unit(u)][1] if normal_unit(u) in EVERYDAY else "" for u in units}
    alike = [u for u in units if dimensions[u] == dimensions[units[0]]]
    return tuple((0.9995 * factor(u, si_unit), u) for u in sorted(alike, key=lambda u: factor(u, si_unit)))
