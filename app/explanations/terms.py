"""Formulas that can be written with symbols, written with numbers, and worked out from the numbers as written.

A formula is built once, from `Leaf` values and numbers, with Python's own signs: `h / (2 * PI * m * k * T) ** HALF`.
Both texts come from it, so that they cannot disagree.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Callable
from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from app.units import format_quantity

_RAISED = {2: "²", 3: "³", 4: "⁴", 5: "⁵"}

Read = Callable[["Leaf"], float]


class Binding(IntEnum):
    """How tightly the outermost sign of a text binds; what binds less than its place asks for goes into brackets."""

    SUM = 1
    PRODUCT = 2
    LITERAL = 3  # 1e-7 needs brackets only under a power
    POWER = 4
    ATOM = 5


@dataclass(frozen=True)
class Text:
    """A piece of a formula in writing."""

    text: str
    binding: Binding

    def at(self, binding: Binding) -> str:
        """The text where something that binds so is needed."""
        return self.text if self.binding >= binding else f"({self.text})"


@dataclass(frozen=True)
class Script:
    """A way of writing: with symbols, or with numbers of so many significant digits."""

    digits: int | None = None

    @property
    def numbers(self) -> bool:
        return self.digits is not None

    def leaf(self, leaf: Leaf) -> Text:
        if self.digits is None:
            compound = any(sign in leaf.symbol for sign in " /−+")
            return Text(leaf.symbol, Binding.SUM if compound else Binding.ATOM)
        text = operand_text(leaf.amount, self.digits)
        if text.startswith("-"):
            return Text(text, Binding.SUM)
        return Text(text, Binding.LITERAL if "e" in text else Binding.ATOM)


SYMBOLS = Script()


class Term(ABC):
    """A formula or a part of one."""

    @abstractmethod
    def written(self, script: Script) -> Text:
        """The term in writing."""

    @abstractmethod
    def value(self, read: Read) -> float:
        """What the term comes to, with what `read` says of its leaves."""

    def __add__(self, other: Term | int) -> Term:
        return Sum(self, term(other), 1)

    def __sub__(self, other: Term | int) -> Term:
        return Sum(self, term(other), -1)

    def __rsub__(self, other: int) -> Term:
        return Sum(term(other), self, -1)

    def __radd__(self, other: int) -> Term:
        return Sum(term(other), self, 1)

    def __mul__(self, other: Term | int) -> Term:
        return Product(self, term(other))

    def __rmul__(self, other: int) -> Term:
        return Product(term(other), self)

    def __truediv__(self, other: Term | int) -> Term:
        return Quotient(self, term(other))

    def __rtruediv__(self, other: int) -> Term:
        return Quotient(term(other), self)

    def __pow__(self, exponent: Term | int) -> Term:
        return Power(self, term(exponent))

    def __neg__(self) -> Term:
        return Negative(self)


def term(value: Term | int) -> Term:
    """A whole number as a term; a term as it is."""
    return value if isinstance(value, Term) else Number(float(value), str(value))


@dataclass(frozen=True)
class Number(Term):
    """A number that belongs to the formula; `binding` that of its text."""

    amount: float
    text: str
    binding: Binding = Binding.ATOM

    def written(self, script: Script) -> Text:
        return Text(self.text, self.binding)

    def value(self, read: Read) -> float:
        return self.amount


NOTHING = Number(0.0, "0")
ALL = Number(1.0, "1")
PI = Number(math.pi, "π")
HALF = Number(0.5, "1/2", Binding.PRODUCT)
THIRD = Number(1.0 / 3.0, "1/3", Binding.PRODUCT)
THREE_HALVES = Number(1.5, "3/2", Binding.PRODUCT)
SIXTH = Number(1.0 / 6.0, "1/6", Binding.PRODUCT)
TWO_THIRDS = Number(2.0 / 3.0, "2/3", Binding.PRODUCT)
FIVE_HALVES = Number(2.5, "5/2", Binding.PRODUCT)
SEVEN_HALVES = Number(3.5, "7/2", Binding.PRODUCT)


@dataclass(frozen=True)
class Leaf(Term):
    """A value with its symbol and its SI unit ("1" for pure numbers)."""

    symbol: str
    amount: float
    unit: str = "1"

    def written(self, script: Script) -> Text:
        return script.leaf(self)

    def value(self, read: Read) -> float:
        return read(self)


@dataclass(frozen=True)
class Sum(Term):
    left: Term
    right: Term
    sign: int

    def written(self, script: Script) -> Text:
        plus, minus = " + ", " - " if script.numbers else " − "
        right = self.right.written(script).at(Binding.SUM if self.sign > 0 else Binding.PRODUCT)
        if right.startswith(("-", "−")):
            right = f"({right})"
        return Text(self.left.written(script).text + (plus if self.sign > 0 else minus) + right, Binding.SUM)

    def value(self, read: Read) -> float:
        return self.left.value(read) + self.sign * self.right.value(read)


@dataclass(frozen=True)
class Product(Term):
    left: Term
    right: Term

    def written(self, script: Script) -> Text:
        # Without a sign between, a quotient beside a factor is bracketed, so that nobody has to guess what it is over.
        first = Binding.LITERAL if isinstance(self.left, Quotient) and not script.numbers else Binding.PRODUCT
        second = Binding.LITERAL if isinstance(self.right, Quotient) else Binding.PRODUCT
        left, right = self.left.written(script).at(first), self.right.written(script).at(second)
        return Text(f"{left} × {right}" if script.numbers else f"{left} {right}", Binding.PRODUCT)

    def value(self, read: Read) -> float:
        return self.left.value(read) * self.right.value(read)


@dataclass(frozen=True)
class Quotient(Term):
    over: Term
    under: Term

    def written(self, script: Script) -> Text:
        over, under = self.over.written(script), self.under.written(script)
        return Text(f"{over.at(Binding.PRODUCT)}/{under.at(Binding.LITERAL)}", Binding.PRODUCT)

    def value(self, read: Read) -> float:
        with np.errstate(all="ignore"):
            return float(np.float64(self.over.value(read)) / np.float64(self.under.value(read)))


@dataclass(frozen=True)
class Power(Term):
    base: Term
    exponent: Term

    def written(self, script: Script) -> Text:
        base = self.base.written(script).at(Binding.ATOM)
        exponent = self.exponent.written(script)
        raised = _RAISED.get(int(exponent.text)) if exponent.text.isdigit() else None
        if raised is not None and not script.numbers:
            return Text(base + raised, Binding.POWER)
        return Text(f"{base}^{exponent.at(Binding.ATOM)}", Binding.POWER)

    def value(self, read: Read) -> float:
        with np.errstate(all="ignore"):
            return float(np.float64(self.base.value(read)) ** np.float64(self.exponent.value(read)))


@dataclass(frozen=True)
class Negative(Term):
    inner: Term

    def written(self, script: Script) -> Text:
        inner = self.inner.written(script).at(Binding.PRODUCT)
        return Text(("-" if script.numbers else "−") + inner, Binding.SUM)

    def value(self, read: Read) -> float:
        return -self.inner.value(read)


@dataclass(frozen=True)
class Call(Term):
    """A named function of other terms; `shown` are the arguments as written where they differ."""

    name: str
    function: Callable[..., float]
    arguments: tuple[Term, ...]
    shown: tuple[Term, ...] = ()

    def written(self, script: Script) -> Text:
        inside = ", ".join(argument.written(script).text for argument in self.shown or self.arguments)
        return Text(f"{self.name}({inside})", Binding.ATOM)

    def value(self, read: Read) -> float:
        with np.errstate(all="ignore"):
            return float(self.function(*(np.float64(argument.value(read)) for argument in self.arguments)))


def root(inner: Term | int) -> Term:
    """The square root, written as a power."""
    return term(inner) ** HALF


def cube_root(inner: Term) -> Term:
    return inner**THIRD


def exp(inner: Term) -> Term:
    return Call("exp", np.exp, (inner,))


def ln(inner: Term) -> Term:
    return Call("ln", np.log, (inner,))


# ---------------------------------------------------------------- numbers in writing

RESULT_DIGITS = 6
_OPERAND_DIGITS = (7, 8, 9, 10, 12, 14)
_ALL_DIGITS = 17
_NUDGE, _ROUNDING = 1e-9, 1e-14


def exact(leaf: Leaf) -> float:
    """The value of a leaf as it is known."""
    return leaf.amount


def result_text(value: float, digits: int = RESULT_DIGITS) -> str:
    """A result: so many significant digits, closing zeros included; 0 alone where there is nothing."""
    return "0" if value == 0.0 else format_quantity(value, digits=digits)


def operand_text(value: float, digits: int) -> str:
    """A number as it goes into a formula: closing zeros dropped, so that typed numbers look as typed."""
    if digits >= _ALL_DIGITS:
        mantissa, _, exponent = repr(float(value)).partition("e")
    else:
        mantissa, _, exponent = format_quantity(value, digits=digits).partition("e")
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    return f"{mantissa}e{int(exponent)}" if exponent else mantissa


def as_written(digits: int) -> Read:
    """What a reader reads where leaves are written with so many digits."""

    def read(leaf: Leaf) -> float:
        return float(operand_text(leaf.amount, digits)) if math.isfinite(leaf.amount) else leaf.amount

    return read


@dataclass(frozen=True)
class Worked:
    """A formula in numbers that comes to the result beside it, to the last digit of the result.

    agrees : False where no number of digits makes it so
    """

    numbers: str
    result: str
    agrees: bool = True


def worked(formula: Term, value: float) -> Worked:
    """The formula with just as many digits as reproduce `value` to six.

    Where differences of nearly equal numbers leave no six digits, the result has fewer, or is 0.
    """
    for digits in (*_OPERAND_DIGITS, _ALL_DIGITS):
        if _same(formula.value(as_written(digits)), value, RESULT_DIGITS):
            return Worked(formula.written(Script(digits)).text, result_text(value))
    found = formula.value(exact)
    if abs(found - value) <= _rounding(formula):
        numbers = formula.written(Script(_ALL_DIGITS)).text
        fewer = (kept for kept in range(RESULT_DIGITS - 1, 0, -1) if _same(found, value, kept))
        kept = next(fewer, 0)
        return Worked(numbers, result_text(value, kept) if kept else result_text(0.0))
    return Worked(formula.written(Script(_OPERAND_DIGITS[0])).text, result_text(value), agrees=False)


def _rounding(formula: Term) -> float:
    """How far the rounding of the numbers that go in, and of the parts of a difference, may move what comes out."""
    leaves: dict[Leaf, None] = {}

    def recording(leaf: Leaf) -> float:
        leaves[leaf] = None
        return leaf.amount

    def moved(by: Leaf) -> float:
        return formula.value(lambda leaf: leaf.amount * (1.0 + _NUDGE) if leaf == by else leaf.amount)

    value = formula.value(recording)
    numbers = sum(abs(moved(leaf) - value) for leaf in leaves) * (_ROUNDING / _NUDGE)
    parts = _ROUNDING * abs(formula.right.value(exact)) if isinstance(formula, Sum) else 0.0
    return numbers + parts


def balanced(left: Term, right: Leaf) -> Worked:
    """The left side of an equation, with just as many digits as make it equal to the right side to six."""
    side = worked(left, right.amount)
    return side if side.agrees else replace(side, result=result_text(left.value(exact)))


def _same(one: float, other: float, digits: int) -> bool:
    if math.isnan(one) or math.isnan(other):
        return math.isnan(one) and math.isnan(other)
    return result_text(float(one), digits) == result_text(float(other), digits)
