"""The sheet on which a number is worked out.

What one quantity needs is asked from the functions that work out the others; each is made once on a sheet, so that
steps follow one another as a person would write them down.
"""

from __future__ import annotations

import operator
from collections.abc import Callable
from enum import Enum
from functools import wraps
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from app.explanations.explanation import Input, Step, StepKind
from app.explanations.terms import NOTHING, SYMBOLS, Leaf, Term, balanced, exact, operand_text, result_text, worked
from app.quantities import QUANTITIES
from physics.cloud import Equilibrium, Model
from physics.particles import Statistics
from physics.statistics import zeta
from physics.traps.harmonic import HarmonicTrap

if TYPE_CHECKING:
    from app.engine import CloudAnswer

T = TypeVar("T")
Axes = tuple[Leaf, Leaf, Leaf]

_COMPARE: dict[str, Callable[[float, float], bool]] = {
    ">": operator.gt, "<": operator.lt, "≤": operator.le, "≥": operator.ge
}  # fmt: skip


class Regime(Enum):
    """Which formulas hold: the model, and on which side of the threshold the cloud is."""

    THERMAL = "ideal bosons above the threshold"
    CONDENSED_IDEAL = "ideal bosons below the threshold"
    CONDENSED_SEMI_IDEAL = "semi-ideal bosons below the threshold"
    EXACT_LEVELS = "bosons in discrete levels"
    HARTREE_FOCK = "bosons in the mean field of all"
    FERMIONS = "ideal fermions"
    EXACT_FERMIONS = "fermions in discrete levels"
    OTHER = "a model whose steps are not written down"


def regime_of(solved: Equilibrium) -> Regime:
    """The formulas behind the equilibrium of a single cloud."""
    condensed = float(solved.classical_phase_space_density) > zeta(3.0)
    if not isinstance(solved.cloud.trap, HarmonicTrap):
        condensed = float(solved.condensate_fraction) > 0.0
    known = {
        (Statistics.BOSE, Model.IDEAL): Regime.CONDENSED_IDEAL if condensed else Regime.THERMAL,
        (Statistics.BOSE, Model.SEMI_IDEAL): Regime.CONDENSED_SEMI_IDEAL if condensed else Regime.THERMAL,
        (Statistics.BOSE, Model.EXACT_LEVELS): Regime.EXACT_LEVELS,
        (Statistics.BOSE, Model.HARTREE_FOCK): Regime.HARTREE_FOCK,
        (Statistics.FERMI, Model.IDEAL): Regime.FERMIONS,
        (Statistics.FERMI, Model.EXACT_LEVELS): Regime.EXACT_FERMIONS,
    }
    return known.get((solved.cloud.statistics, solved.model), Regime.OTHER)


class Sheet:
    """Inputs and steps of one cloud, in the order in which they were asked for."""

    def __init__(self, answer: CloudAnswer) -> None:
        self.answer = answer
        self.solved = answer.equilibrium
        self.statistics = answer.cloud.statistics
        self.bosons = answer.bosons
        self.regime = regime_of(self.solved)
        self.inputs: list[Input] = []
        self.steps: list[Step] = []
        self.made: dict[object, object] = {}
        self._defined: set[str] = set()

    @property
    def in_real_trap(self) -> bool:
        """Whether the cloud is in a surveyed trap, answered through its volume curve."""
        return self.answer.real_trap is not None

    @property
    def condensed(self) -> bool:
        """Whether some of the atoms are condensed."""
        return self.bosons and float(self.solved.condensate_fraction) > 0.0

    def of_solution(self, name: str) -> float:
        """A number that the model keeps besides the quantities, in SI."""
        return float(np.asarray(getattr(self.solved, name)))

    def number(self, name: str) -> float:
        """A quantity of the answer that is a single number, in SI."""
        return float(np.asarray(self.answer.value(name)))

    def values(self, name: str) -> list[float]:
        """A quantity of the answer that has a value along each axis, in SI."""
        return [float(value) for value in np.asarray(self.answer.value(name))]

    def enter(self, entry: Input) -> Leaf:
        """Put an input on the sheet."""
        self.inputs.append(entry)
        return Leaf(entry.symbol, entry.value, entry.unit)

    def step(
        self, symbol: str, meaning: str, formula: Term, unit: str = "1", *, value: float | None = None, where: str = ""
    ) -> Leaf:
        """A value by arithmetic: the answer's own, or where it keeps none what the formula comes to."""
        amount = formula.value(exact) if value is None else value
        line = worked(formula, amount)
        self.steps.append(
            Step(
                kind=StepKind.FORMULA,
                meaning=meaning,
                symbol=symbol,
                expression=formula.written(SYMBOLS).text,
                numbers=line.numbers,
                result=line.result,
                value=amount,
                unit=unit,
                where=self._first(where),
                agrees=line.agrees,
            )
        )
        return Leaf(symbol, amount, unit)

    def solve(self, unknown: Leaf, meaning: str, left: Term, right: Leaf, *, where: str = "") -> Leaf:
        """A value that makes the left side of an equation what its right side is."""
        sides = balanced(left, right)
        self.steps.append(
            Step(
                kind=StepKind.EQUATION,
                meaning=meaning,
                symbol=unknown.symbol,
                expression=f"{left.written(SYMBOLS).text} = {right.symbol}",
                numbers=sides.numbers,
                result=result_text(unknown.amount),
                value=unknown.amount,
                unit=unknown.unit,
                left=sides.result,
                right=result_text(right.amount),
                right_symbol=right.symbol,
                where=self._first(where),
                agrees=sides.agrees,
            )
        )
        return unknown

    def _first(self, definition: str) -> str:
        """A definition where it is met first, and nothing after that."""
        known = definition in self._defined
        self._defined.add(definition)
        return "" if known else definition

    def nothing(self, symbol: str, meaning: str, unit: str = "1") -> Leaf:
        """A value that is 0 by what stands above it."""
        return self.step(symbol, meaning, NOTHING, unit)

    def case(self, meaning: str, left: Leaf, sign: str, right: Leaf) -> None:
        """A comparison that decides which formulas hold; `meaning` says what follows."""
        self.steps.append(
            Step(
                kind=StepKind.CASE,
                meaning=meaning,
                symbol="",
                expression=f"{left.symbol} {sign} {right.symbol}",
                numbers=f"{operand_text(left.amount, 7)} {sign} {operand_text(right.amount, 7)}",
                result="",
                value=None,
                unit="1",
                agrees=_COMPARE[sign](left.amount, right.amount),
            )
        )

    def along(
        self, name: str, symbol: str, meaning: str, formulas: tuple[Term, Term, Term], *, unit: str = "m"
    ) -> Axes:
        """A quantity that has a value along each axis."""
        first, second, third = (
            self.step(f"{symbol}{number}", f"{meaning} along axis {axis}", formula, "m", value=value)
            for axis, (number, formula, value) in enumerate(
                zip("₁₂₃", formulas, self.values(name), strict=True), start=1
            )
        )
        return first, second, third

    def given(self, name: str, symbol: str) -> Leaf:
        """A value whose steps are not written down for this model: only what the quantity is."""
        return self._given(name, symbol, "", self.number(name))

    def given_along(self, name: str, symbol: str) -> Axes:
        """Such a value along each axis."""
        first, second, third = (
            self._given(name, f"{symbol}{number}", f" along axis {axis}", value)
            for axis, (number, value) in enumerate(zip("₁₂₃", self.values(name), strict=True), start=1)
        )
        return first, second, third

    def _given(self, name: str, symbol: str, where: str, amount: float) -> Leaf:
        row = QUANTITIES[name]
        return self.unexplained(symbol, f"{row.label}{where}", amount, row.unit)

    def integral(self, name: str, symbol: str, meaning: str, expression: str, where: str) -> Leaf:
        """A quantity of the answer that is an integral, or the root of one, which the program works out."""
        return self.integral_of(symbol, meaning, expression, where, self.number(name), QUANTITIES[name].unit)

    def integral_of(self, symbol: str, meaning: str, expression: str, where: str, amount: float, unit: str) -> Leaf:
        """Any number that is an integral, or the root of one."""
        self.steps.append(
            Step(
                kind=StepKind.INTEGRAL,
                meaning=meaning,
                symbol=symbol,
                expression=expression,
                numbers="",
                result=result_text(amount),
                value=amount,
                unit=unit,
                where=self._first(where) if where else "",
            )
        )
        return Leaf(symbol, amount, unit)

    def integral_along(self, name: str, symbol: str, meaning: str, expression: str) -> Axes:
        """Such a quantity along each axis."""
        unit = QUANTITIES[name].unit

        def one(axis: int, mark: str, value: float) -> Leaf:
            return self.integral_of(
                f"{symbol}{mark}", f"{meaning}, along axis {axis}", f"{expression}{mark}", "", value, unit
            )

        first, second, third = (
            one(axis, mark, value)
            for axis, (mark, value) in enumerate(zip("₁₂₃", self.values(name), strict=True), start=1)
        )
        return first, second, third

    def unexplained(self, symbol: str, meaning: str, amount: float, unit: str) -> Leaf:
        """A value of the model's numerical solution, of which no steps are written down."""
        self.steps.append(
            Step(
                kind=StepKind.GIVEN,
                meaning=f"{meaning}, from the numerical solution of the model {self.solved.model.value}",
                symbol=symbol,
                expression="",
                numbers="",
                result=result_text(amount),
                value=amount,
                unit=unit,
            )
        )
        return Leaf(symbol, amount, unit)


def _maker(sheet: Sheet, make: Callable[[Sheet], T]) -> Callable[[Sheet], T]:
    if not sheet.in_real_trap:
        return make
    from app.explanations.real_trap import IN_REAL_TRAPS

    return IN_REAL_TRAPS.get(make.__name__, make)  # type: ignore[return-value]  # as the function of that name


def once(make: Callable[[Sheet], T]) -> Callable[[Sheet], T]:
    """A value that stands on a sheet once, however many steps use it; in a real trap the one that holds there."""

    @wraps(make)
    def made(sheet: Sheet) -> T:
        if make not in sheet.made:
            sheet.made[make] = _maker(sheet, make)(sheet)
        return sheet.made[make]  # type: ignore[return-value]

    return made
