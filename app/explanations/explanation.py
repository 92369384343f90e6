"""What an explanation is: the number, what went in, and every step between."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from physics.particles import Certainty


class Origin(Enum):
    """Where an input comes from."""

    TYPED = "typed"
    ASSUMED = "assumed"
    DATA = "from the data"
    TRAP = "from beams and coils"
    CONSTANT = "constant"


@dataclass(frozen=True, kw_only=True)
class Input:
    """A number that goes in: `text` as typed or as the data have it, `value` in SI, `unit` its SI unit."""

    symbol: str
    meaning: str
    text: str
    value: float
    unit: str
    origin: Origin
    source: str = ""
    certainty: Certainty | None = None


class StepKind(Enum):
    """How a step gets its result.

    FORMULA: by arithmetic. EQUATION: solved for, and checked by its two sides. GIVEN: by the model's own numerical
    solution, without arithmetic to show. INTEGRAL: by an integral over the trap, or the root of one, which is written
    down and worked out numerically. CASE: a comparison that decides how it goes on; it has no value.
    """

    FORMULA = "formula"
    EQUATION = "equation"
    GIVEN = "given"
    INTEGRAL = "integral"
    CASE = "case"


@dataclass(frozen=True, kw_only=True)
class Step:
    """One line of an explanation. Numbers are in SI.

    Attributes
    ----------
    kind, meaning, symbol : how it is found, and what
    expression : formula, equation or comparison, in symbols
    numbers : the same with numbers put in; of an equation its left side
    result : the value as text, to six significant digits or as many as can be relied on
    value, unit : the value, in SI
    left, right : of an equation, what its sides come to
    right_symbol : of an equation, its right side, which is a value found before
    where : what a function means that is not in every book
    agrees : whether the arithmetic shown gives the result shown
    """

    kind: StepKind
    meaning: str
    symbol: str
    expression: str
    numbers: str
    result: str
    value: float | None
    unit: str
    left: str = ""
    right: str = ""
    right_symbol: str = ""
    where: str = ""
    agrees: bool = True


@dataclass(frozen=True, kw_only=True)
class Explanation:
    """Why a quantity has the value it has.

    Attributes
    ----------
    name, title, symbol : the quantity
    value : in SI, three for a quantity with axes; None where there is none, and then `reason` says why
    unit : SI unit of `value`
    text : the value for reading, with its unit and, where the plan states uncertainties, its interval
    formula, validity, source : of the quantity, whatever the cloud
    model : the model used, in a sentence
    inputs : what was typed, what is assumed, what the data say, and constants
    steps : how the value follows from them, in order
    """

    name: str
    title: str
    symbol: str
    value: float | tuple[float, ...] | None
    unit: str
    text: str
    reason: str
    formula: str
    model: str
    inputs: tuple[Input, ...]
    steps: tuple[Step, ...]
    validity: str
    source: str

    def __post_init__(self) -> None:
        if (self.value is None) != bool(self.reason):
            raise ValueError(f"{self.name} needs either a value or a reason, got {self.value} and {self.reason!r}")

    @property
    def complete(self) -> bool:
        """Whether steps lead all the way from the inputs to the value."""
        return bool(self.steps) and all(step.kind is not StepKind.GIVEN for step in self.steps)
