"""The one place where text becomes SI and SI becomes text.

A quantity is a number (`app.number_text` has the grammar), an optional uncertainty and a unit. The number is read by
our own strict rules; only the unit text goes to pint, with the registry that units.txt defines, and only when it is
not one of the everyday units of `app.kinds`. So neither starting the program nor reading its usual input loads pint.

Frequencies are ordinary ones, in hertz. "2pi x 120 Hz" and "2π×120 Hz" are the trade's way of writing 120 Hz and are
read as that; rad/s is refused. Temperatures may be given as an energy over k or as a frequency times h/k, trap depths
as a temperature or a frequency.
"""

from __future__ import annotations

import difflib
import math
import re
from dataclasses import dataclass
from decimal import ROUND_CEILING, ROUND_FLOOR, Context, Decimal
from functools import lru_cache

from app.kinds import (
    ATOM_NUMBER,
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    BIAS_FIELD_SPEED,
    CLOUD_WIDTH,
    CURVATURE_SPEED,
    DEPTH,
    DEPTH_SPEED,
    DIMENSIONLESS,
    DURATION,
    EFFICIENCY,
    EVERYDAY,
    EXPONENT,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    FREQUENCY,
    GRADIENT_SPEED,
    HEATING_RATE,
    INTENSITY_NOISE,
    LIFETIME,
    MAGNETIC_FIELD,
    PHASE_SPACE_DENSITY,
    POINTING_NOISE,
    POSITION,
    POWER_SPEED,
    RADIO_FREQUENCY,
    RADIO_FREQUENCY_SPEED,
    REDUCED_TEMPERATURE,
    SCALE_SPEED,
    SCATTERING_LENGTH,
    TEMPERATURE,
    THREE_BODY_RATE,
    TIME,
    TWO_BODY_RATE,
    WAVELENGTH,
    Kind,
)
from app.number_text import (
    LONGEST,
    Number,
    NumberError,
    leading_place,
    read_number,
    sigma_place,
    write_number,
)
from app.unit_text import QuantityError, best_unit, exact_factor, factor, normal_unit

__all__ = [
    "ATOM_NUMBER",
    "BEAM_POWER",
    "BEAM_QUALITY",
    "BEAM_WAIST",
    "BIAS_FIELD",
    "BIAS_FIELD_SPEED",
    "CLOUD_WIDTH",
    "CURVATURE_SPEED",
    "DEPTH",
    "DEPTH_SPEED",
    "DIMENSIONLESS",
    "DURATION",
    "EFFICIENCY",
    "EXPONENT",
    "FIELD_CURVATURE",
    "FIELD_GRADIENT",
    "FREQUENCY",
    "GRADIENT_SPEED",
    "HEATING_RATE",
    "INTENSITY_NOISE",
    "LIFETIME",
    "MAGNETIC_FIELD",
    "PHASE_SPACE_DENSITY",
    "POINTING_NOISE",
    "POSITION",
    "POWER_SPEED",
    "RADIO_FREQUENCY",
    "RADIO_FREQUENCY_SPEED",
    "REDUCED_TEMPERATURE",
    "SCALE_SPEED",
    "SCATTERING_LENGTH",
    "TEMPERATURE",
    "THREE_BODY_RATE",
    "TIME",
    "TWO_BODY_RATE",
    "WAVELENGTH",
    "Kind",
    "Quantity",
    "QuantityError",
    "best_unit",
    "exact_text",
    "factor",
    "format_quantity",
    "localised",
    "quantity",
    "read_quantity",
    "step",
    "unit_of",
]

_WIDE = Context(prec=60)
_ODD_SPACES = "\t\u00a0\u2007\u2009\u202f"  # between number and unit they do no harm; between digits they are refused
_TWO_PI = re.compile(r"2\s*(?:pi|π)\s*[x×*·]\s*", re.IGNORECASE)
_PLAIN_FROM, _PLAIN_TO = -4, 5  # powers of ten between which numbers are written without one


@dataclass(frozen=True)
class Quantity:
    """A value with the text it came from. The text has a decimal point, whatever the locale it was typed in.

    text : as written in the plan file and in the fields
    value : in SI units
    sigma : standard uncertainty, in SI units; None where none is given
    """

    text: str
    value: float
    sigma: float | None = None


# --- reading ---------------------------------------------------------------------------------------------------------


@lru_cache(maxsize=4096)
def read_quantity(text: str, kind: Kind, *, decimal_comma: bool = False) -> Quantity:
    """The quantity that `text` says, in SI.

    Parameters
    ----------
    text : number, optional uncertainty, unit: "1.20(5) µK", "200 nK", "1.0(1)e5", "2π×120 Hz"
    kind : what is meant: decides which units fit and which values are possible
    decimal_comma : the writer's locale has a decimal comma. `app.number_text` states which marks are then read.

    Raises
    ------
    QuantityError
        One sentence: what is wrong, what was read, what may be typed.
    """
    number, unit = _parts(text, kind, decimal_comma)
    scale = exact_factor(unit, kind.si_unit)
    value = float(_WIDE.multiply(number.value, scale))
    sigma = None if number.sigma is None else float(_WIDE.multiply(number.sigma, scale))
    vanished = value == 0.0 and not number.value.is_zero()
    if vanished or not math.isfinite(value) or not math.isfinite(sigma or 0.0):
        raise QuantityError(f'"{text.strip()}" is beyond every number that can be computed with')
    _check_range(value, kind, text.strip())
    plain = text.strip().replace(",", ".") if decimal_comma else text.strip()
    return Quantity(plain, value, sigma)


def _parts(text: str, kind: Kind, decimal_comma: bool) -> tuple[Number, str]:
    """Number and unit text of a quantity; the unit is checked only for being there."""
    stripped = text.strip().replace("−", "-")
    example = localised(kind.example, decimal_comma=decimal_comma)
    if not stripped:
        raise QuantityError(f'{kind.name} is missing: type for instance "{example}"')
    if len(stripped) > LONGEST or not all(c.isprintable() or c in _ODD_SPACES for c in stripped):
        raise QuantityError(f'{kind.name} is not readable: type for instance "{example}"')
    turns = _TWO_PI.match(stripped)
    if turns is not None:
        if kind.si_unit != "Hz":
            raise QuantityError(f'"2π×" belongs to trap frequencies: type for instance "{example}"')
        stripped = stripped[turns.end() :]
    try:
        number, unit = read_number(stripped, decimal_comma=decimal_comma)
    except NumberError as error:
        raise QuantityError(f"{kind.name}: {error}") from None
    if not unit and kind.si_unit:
        raise QuantityError(f'{kind.name} needs a unit: type for instance "{example}", not "{stripped}"')
    _check_unit(unit, kind, example)
    return number, unit


def _check_unit(unit: str, kind: Kind, example: str) -> None:
    if unit and not kind.si_unit:
        raise QuantityError(f'{kind.name} is a pure number: type for instance "{example}", without "{unit}"')
    if re.match(r"rad\b|rad/", unit):
        raise QuantityError(f'angular frequencies are not read: divide by 2π and type for instance "{example}"')
    try:
        exact_factor(unit, kind.si_unit)
    except QuantityError:
        allowed = ", ".join(kind.units)
        near = difflib.get_close_matches(unit.casefold(), [u.casefold() for u in kind.units], n=1, cutoff=0.6)
        nearest = next((u for u in kind.units if near and u.casefold() == near[0]), None)
        hint = f"; did you mean {nearest}?" if nearest else ""
        raise QuantityError(f'"{unit}" is not a unit of {kind.name}: {allowed} are read{hint}') from None


def _check_range(value: float, kind: Kind, text: str) -> None:
    if kind.low <= value <= kind.high:
        return
    low, high = (_plain(bound, kind) for bound in (kind.low, kind.high))
    raise QuantityError(f'{kind.name} must be from {low} to {high}, got "{text}"')


def _plain(bound: float, kind: Kind) -> str:
    """A bound of the kind in words: shortest text, plain unit."""
    usual = kind.units[0]
    alike = [unit for unit, (_, si_unit) in EVERYDAY.items() if si_unit == EVERYDAY[usual][1]]
    unit = best_unit(bound, (usual, *alike), kind.si_unit) if usual else usual
    return f"{bound / factor(unit, kind.si_unit):.3g} {unit}".strip()


def localised(text: str, *, decimal_comma: bool) -> str:
    """A quantity's text as it is shown where the decimal mark is a comma: numbers change their mark, nothing else."""
    return re.sub(r"(?<=[0-9])\.(?=[0-9])|\.(?=[0-9])", ",", text) if decimal_comma else text


def unit_of(text: str, kind: Kind, *, decimal_comma: bool = False) -> str:
    """The unit a text is written in, in its usual spelling; QuantityError where the text cannot be read."""
    return normal_unit(_parts(text, kind, decimal_comma)[1])


# --- writing ---------------------------------------------------------------------------------------------------------


def format_quantity(
    value: float, unit: str = "", sigma: float | None = None, *, digits: int = 3, si_unit: str | None = None
) -> str:
    """A text that a person likes to read and `read_quantity` reads back to the digits printed.

    Parameters
    ----------
    value, sigma : SI units
    unit : unit to write it in; "" or "1" for pure numbers
    si_unit : unit of `value` where it is not the SI unit of `unit`: energies [J] are written in µK with si_unit="J"
    digits : significant digits where no uncertainty decides; with one, its own place decides

    format_quantity(1.46e-7, "nK") == "146 nK"; format_quantity(1.2e-6, "µK", 5e-8) == "1.20(5) µK";
    format_quantity(1e5, "", 1e4) == "1.0(1)e5". Not-a-number is written as "–".
    """
    if not math.isfinite(value):
        return "–" if math.isnan(value) else f"{'-' if value < 0 else ''}∞ {unit}".strip()
    number, spread = _in_unit(value, sigma, unit, si_unit)
    place = leading_place(number, digits) if not spread else sigma_place(spread)
    return _written(number, spread, place, unit)


def _in_unit(value: float, sigma: float | None, unit: str, si_unit: str | None) -> tuple[Decimal, Decimal | None]:
    scale = exact_factor(unit, si_unit)
    spread = None if sigma is None or not math.isfinite(sigma) else _WIDE.divide(Decimal(repr(float(sigma))), scale)
    return _WIDE.divide(Decimal(repr(float(value))), scale), spread


def _written(number: Decimal, spread: Decimal | None, place: int, unit: str) -> str:
    """Plain digits where they are few; pure numbers go over to a power of ten one place earlier."""
    unit = "" if unit == "1" else unit
    largest = max(number.copy_abs(), spread or Decimal(0))
    # As it will be written: 9.96e4 to two digits is 1.0e5, not 10e4.
    shown = largest if spread else _WIDE.quantize(largest, Decimal(1).scaleb(-place))
    size = 0 if largest.is_zero() else (largest if shown.is_zero() else shown).adjusted()
    if _PLAIN_FROM < size < (_PLAIN_TO if unit else _PLAIN_TO - 1):
        body = write_number(number, spread, place)
    else:
        body = write_number(number, spread, place + size, exponent=size)
    return f"{body} {unit}".rstrip()


def exact_text(value: float, unit: str, sigma: float | None = None, *, kind: Kind) -> str:
    """The shortest text in `unit` that reads back as this value and sigma.

    It is exact where ten digits are enough, as they are between units of one dimension for all that people type. Else,
    as when a temperature is turned into a frequency, it is rounded to ten digits, and its uncertainty to four.
    """
    number, spread = _in_unit(value, sigma, unit, kind.si_unit)
    for digits in range(1, 11):
        place = leading_place(number, digits)
        if spread:
            place = max(place, leading_place(spread, 1))
        text = _written(number, spread, place, unit)
        if _read_back(text, kind) == (value, sigma):
            return text
    if spread is None:
        return _written(number, None, leading_place(number, 10), unit)
    power = number.adjusted()
    plain = _PLAIN_FROM < power < _PLAIN_TO
    shift = 0 if plain else -power
    number, spread = number.scaleb(shift, _WIDE), spread.scaleb(shift, _WIDE)
    body = " ± ".join(
        write_number(part, None, max(leading_place(part, digits), 0)) for part, digits in ((number, 10), (spread, 4))
    )
    return f"{body} {unit}".rstrip() if plain else f"({body})e{power} {unit}".rstrip()


def _read_back(text: str, kind: Kind) -> tuple[float, float | None]:
    number, unit = read_number(text)
    scale = exact_factor(unit, kind.si_unit)
    sigma = None if number.sigma is None else float(_WIDE.multiply(number.sigma, scale))
    return float(_WIDE.multiply(number.value, scale)), sigma


def quantity(value: float, unit: str, sigma: float | None = None, *, kind: Kind, digits: int = 3) -> Quantity:
    """The quantity that the formatted text says: its value is the rounded one, so that text and value agree, now and
    after the plan was saved and read again."""
    return read_quantity(format_quantity(value, unit, sigma, digits=digits, si_unit=kind.si_unit), kind)


# --- stepping --------------------------------------------------------------------------------------------------------


def step(text: str, steps: int, kind: Kind, *, coarse: bool = False, decimal_comma: bool = False) -> str:
    """The text that many steps further along a logarithmic ladder of round numbers, in the same unit and form.

    A fine step is 1/100 of the leading digit's unit below 2, 2/100 below 5, 5/100 above: 0.4 to 1 per cent. A coarse
    one is ten times that. The number lands on the ladder, whatever it was before; an uncertainty stays as it is.
    Zero has no step; the kind's bounds hold.
    """
    number, unit = _parts(text, kind, decimal_comma)
    if number.value.is_zero() or steps == 0:
        return text
    size = abs(number.value)
    outward = (steps > 0) == (number.value > 0)
    for _ in range(abs(steps)):
        size = _next_rung(size, outward, coarse)
    value = size.copy_sign(number.value)
    if not kind.low <= float(_WIDE.multiply(value, exact_factor(unit, kind.si_unit))) <= kind.high:
        return text
    sigma = number.sigma
    decimals = max(_places(value), _places(sigma) if sigma else -99)
    if number.exponent is not None:
        power = value.adjusted()
        body = write_number(value, sigma, max(decimals + power, 0), exponent=power, times=number.times)
    else:
        body = write_number(value, sigma, max(decimals, 0))
    stepped = f"{body} {unit}".rstrip()
    return localised(stepped, decimal_comma=decimal_comma)


def _places(value: Decimal) -> int:
    """Decimals that show all digits of a number; negative where it ends in zeros before the mark."""
    return -int(value.normalize().as_tuple().exponent)


def _next_rung(size: Decimal, up: bool, coarse: bool) -> Decimal:
    """The next number of the ladder above or below a positive size."""
    decade = Decimal(1).scaleb(size.adjusted())
    mantissa = _WIDE.divide(size, decade)
    if not up and mantissa == 1:
        decade, mantissa = decade / 10, Decimal(10)
    if up:
        rung = 1 if mantissa < 2 else 2 if mantissa < 5 else 5
    else:
        rung = 1 if mantissa <= 2 else 2 if mantissa <= 5 else 5
    stride = Decimal(rung) / (10 if coarse else 100)
    count = _WIDE.divide(mantissa, stride)
    whole = count.to_integral_value(rounding=ROUND_FLOOR if up else ROUND_CEILING)
    return _WIDE.multiply(_WIDE.multiply(whole + (1 if up else -1), stride), decade).normalize()
