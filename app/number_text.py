"""Numbers as people write them: a strict grammar for reading, and the same grammar for writing.

    number       120   1.2   .5   1e5   2.5e-6   2.5×10^-6   2.5x10⁻⁶   10^5
    uncertainty  1.20(5)   1.0(1)e5   12.3(1.2)   1.20 ± 0.05   1.20 +/- 0.05   (1.0 ± 0.1)e5

Nothing is evaluated, and nothing is guessed: a text that two readers could take for two numbers is refused, with a
sentence that says what to type.

The decimal mark. Where the locale has a decimal point, the point is the only mark and every comma is refused. Where
it has a decimal comma (`decimal_comma=True`), the comma is the mark, and a single point is accepted too, unless it
could stand for thousands: one to three digits, not 0 alone, then a point and exactly three digits ("1.500") is
refused, while "1.5", "0.500" and "1234.567" are read. Spaces, apostrophes and underscores between digits, a second
mark, and point and comma together are refused everywhere. So no text is ever read as ten or a thousand times what
its writer meant.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Context, Decimal

LONGEST = 120  # characters; what is longer is no quantity
_EXACT = Context(prec=1200)  # holds every sum and shift of two numbers that the grammar lets through

_SUPERSCRIPTS = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")
_RUN = re.compile(r"[+-]?[0-9.,](?:[0-9.,]|(?:\s(?!1\s*/)|['’ʼ`´_])(?=[0-9.,]))*")
_BRACKET = re.compile(r"\(([0-9]+(?:[.,][0-9]+)?)\)")
_EXPONENT = re.compile(
    r"(?P<mark>[eE])(?P<plain>[+-]?[0-9]{1,3})(?![0-9])"
    r"|\s*(?P<times>[×x*·])\s*10(?:\^|\*\*)(?P<power>[+-]?[0-9]{1,3})(?![0-9])"
    r"|\s*(?P<times_raised>[×x*·])\s*10(?P<raised>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]{1,3})"
)
_BARE_POWER = re.compile(
    r"(?P<sign>[+-]?)10(?:(?:\^|\*\*)(?P<power>[+-]?[0-9]{1,3})(?![0-9])|(?P<raised>[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]{1,3}))"
)
_PLUS_MINUS = re.compile(r"\s*(?:±|\+/-|\+-)\s*")
_GROUPED_POINT = re.compile(r"[+-]?[1-9][0-9]{0,2}\.[0-9]{3}")


class NumberError(ValueError):
    """A text that is not a number, or that could be two. The message is a clause that ends a sentence."""


@dataclass(frozen=True, kw_only=True)
class Number:
    """A number as written: exact decimal value and uncertainty, and how it looked.

    `decimals` counts the digits after the mark of the mantissa, `exponent` is the power of ten as written (None:
    written without one) and `times` is the way of writing it ("e", "E", or "×10^").
    """

    value: Decimal
    sigma: Decimal | None = None
    decimals: int = 0
    exponent: int | None = None
    times: str = "e"


def read_number(text: str, *, decimal_comma: bool = False) -> tuple[Number, str]:
    """The number at the head of `text`, and the rest of it, stripped.

    Raises
    ------
    NumberError
        No number there, or one that could be read in two ways.
    """
    if text.startswith("("):
        return _bracketed(text, decimal_comma)
    number, rest = _single(text, decimal_comma)
    sign = _PLUS_MINUS.match(rest)
    if sign is None:
        return number, rest.strip()
    number, rest = _with_sigma(number, rest[sign.end() :], decimal_comma)
    return number, rest.strip()


def _bracketed(text: str, decimal_comma: bool) -> tuple[Number, str]:
    inside, closed, rest = text[1:].partition(")")
    if not closed:
        raise NumberError(f'"{text}" opens a bracket and does not close it')
    number, left = read_number(inside.strip(), decimal_comma=decimal_comma)
    if left or number.sigma is None:
        raise NumberError(f'brackets hold a number and its uncertainty, such as "(1.0 ± 0.1)e5", not "({inside})"')
    exponent = _EXPONENT.match(rest)
    if exponent is None:
        return number, rest.strip()
    if number.exponent is not None:
        raise NumberError(f'"{text}" has two exponents')
    power, times = _power(exponent)
    shifted = Number(
        value=number.value.scaleb(power, _EXACT),
        sigma=number.sigma.scaleb(power, _EXACT),
        decimals=number.decimals,
        exponent=power,
        times=times,
    )
    return shifted, rest[exponent.end() :].strip()


def _with_sigma(number: Number, rest: str, decimal_comma: bool) -> tuple[Number, str]:
    """The second half of "number ± uncertainty"."""
    if number.sigma is not None:
        raise NumberError('an uncertainty is written once, as "1.20(5)" or as "1.20 ± 0.05"')
    sigma, rest = _single(rest, decimal_comma)
    if sigma.sigma is not None or sigma.value.is_signed():
        raise NumberError('an uncertainty is a plain number above zero, as in "1.20 ± 0.05"')
    if (sigma.exponent is None) != (number.exponent is None):
        raise NumberError('it is open whether the exponent holds for the uncertainty too: type "(1.0 ± 0.1)e5"')
    decimals = max(number.decimals, sigma.decimals)
    joined = Number(
        value=number.value, sigma=sigma.value, decimals=decimals, exponent=number.exponent, times=number.times
    )
    return joined, rest


def _single(text: str, decimal_comma: bool) -> tuple[Number, str]:
    bare = _BARE_POWER.match(text)
    if bare is not None:
        power = int(bare["power"] or bare["raised"].translate(_SUPERSCRIPTS))
        return Number(value=Decimal(f"{bare['sign']}1e{power}"), exponent=power, times="×10^"), text[bare.end() :]
    run = _RUN.match(text)
    if run is None or not re.search("[0-9]", run[0]):
        raise NumberError(f'"{text}" does not begin with a number')
    mantissa = _mantissa(run[0], decimal_comma)
    decimals = len(mantissa.partition(".")[2])
    rest = text[run.end() :]
    sigma: Decimal | None = None
    bracket = _BRACKET.match(rest)
    if bracket is not None:
        sigma = _bracket_sigma(bracket[1], decimals, run[0] + bracket[0], decimal_comma)
        rest = rest[bracket.end() :]
    exponent = _EXPONENT.match(rest)
    if exponent is None:
        return Number(value=Decimal(mantissa), sigma=sigma, decimals=decimals), rest
    power, times = _power(exponent)
    value = Decimal(mantissa).scaleb(power, _EXACT)
    if sigma is not None:
        sigma = sigma.scaleb(power, _EXACT)
    return Number(value=value, sigma=sigma, decimals=decimals, exponent=power, times=times), rest[exponent.end() :]


def _power(exponent: re.Match[str]) -> tuple[int, str]:
    if exponent["mark"]:
        return int(exponent["plain"]), exponent["mark"]
    return int(exponent["power"] or exponent["raised"].translate(_SUPERSCRIPTS)), "×10^"


def _mantissa(run: str, decimal_comma: bool) -> str:
    """The digits with a decimal point, or a refusal."""
    mark = "," if decimal_comma else "."
    if not re.fullmatch(r"[+-]?[0-9.,]+", run):
        raise NumberError(f'"{run}" is grouped: type the digits without spaces or marks between them')
    if run.count(".") + run.count(",") > 1:
        raise NumberError(f'"{run}" has more than one decimal mark: type one "{mark}" at most, and no thousands marks')
    if "," in run and not decimal_comma:
        plain = run.replace(",", ".")
        raise NumberError(f'the comma in "{run}" is not read: type "{plain}" or "{run.replace(",", "")}"')
    if decimal_comma and _GROUPED_POINT.fullmatch(run):
        comma = run.replace(".", ",")
        raise NumberError(f'"{run}" could be two numbers: type "{comma}" or "{run.replace(".", "")}"')
    return run.replace(",", ".")


def _bracket_sigma(digits: str, decimals: int, whole: str, decimal_comma: bool) -> Decimal:
    """A "(5)" counts in the last place of the number; "(1.2)" is the uncertainty itself, to the same place."""
    if digits.isdigit():
        return Decimal(digits).scaleb(-decimals, _EXACT)
    plain = _mantissa(digits, decimal_comma)
    if len(plain.partition(".")[2]) != decimals:
        raise NumberError(f'number and uncertainty in "{whole}" must end at the same decimal place')
    return Decimal(plain)


def write_number(
    value: Decimal, sigma: Decimal | None, decimals: int, exponent: int | None = None, times: str = "e"
) -> str:
    """`value` rounded to `decimals` places of its mantissa (negative: to tens, hundreds), with the uncertainty in
    brackets: "1.20(5)", "200(10)", "1.0(1)e5". What `read_number` reads back is what is printed."""
    shift = exponent or 0
    place = Decimal(1).scaleb(-decimals)
    mantissa = _EXACT.quantize(value.scaleb(-shift, _EXACT), place)
    text = f"{_EXACT.abs(mantissa):f}" if mantissa.is_zero() else f"{mantissa:f}"
    if sigma is not None:
        spread = _EXACT.quantize(sigma.scaleb(-shift, _EXACT), place)
        text += f"({int(spread.scaleb(max(decimals, 0), _EXACT))})"
    if exponent is None:
        return text
    return f"{text}{times}{exponent}"


def leading_place(value: Decimal, digits: int) -> int:
    """Decimals that show `digits` significant digits of `value`, after rounding ("9.996" to three is "10.0")."""
    if value.is_zero():
        return 0
    rounded = Context(prec=digits).plus(value)
    return digits - 1 - rounded.adjusted()


def sigma_place(sigma: Decimal) -> int:
    """Decimals that an uncertainty deserves: one digit from 3 to 9, two from 10 to 29, a closing zero dropped."""
    two = Context(prec=2).plus(sigma)
    leading = int(two.scaleb(1 - two.adjusted(), _EXACT))
    return leading_place(sigma, 1 if leading >= 30 or leading % 10 == 0 else 2)
