"""The arithmetic on show is worked out again, by other means, and must give what is printed beside it."""

from __future__ import annotations

import math
import operator
import re
from collections.abc import Callable
from itertools import pairwise
from typing import Any

import mpmath
import numpy as np
import pytest
from scipy.integrate import quad
from scipy.optimize import brentq, minimize_scalar
from scipy.special import gammaln

from app.engine import CloudAnswer
from app.explanations import Explanation, StepKind, explain
from app.explanations.terms import SYMBOLS, Leaf, Script, Term, exact, root, worked
from app.quantities import QUANTITIES
from physics.statistics import bose, fermi


def test_what_is_left_of_equal_numbers_is_nothing() -> None:
    third, other = Leaf("a", 1.0 / 3.0), Leaf("b", 1.0 / 3.0 * (1.0 + 4e-16))
    line = worked(third - other, other.amount - third.amount)
    assert (line.result, line.agrees) == ("0", True)


@pytest.mark.parametrize("value", [6.001, 6.0001, -6.0, 0.0])
def test_arithmetic_that_does_not_give_the_result_is_told(value: float) -> None:
    line = worked(Leaf("a", 2.0) * Leaf("b", 3.0), value)
    assert not line.agrees
    assert line.numbers == "2 × 3"


def test_a_difference_has_the_digits_that_it_deserves() -> None:
    near, one = Leaf("a", 1.0 + 1.234567e-12), Leaf("b", 1.0)
    line = worked(near - one, 1.23456e-12)
    assert line.agrees
    assert float(line.result) == pytest.approx(1.2345e-12, rel=1e-3)
    assert len(line.result) < len("1.23456e-12")


def test_as_many_digits_are_put_in_as_the_result_needs() -> None:
    near, one = Leaf("a", 1.000123456789), Leaf("b", 1.0)
    line = worked(near - one, near.amount - one.amount)
    assert line.result == "1.23457e-4"
    assert line.numbers == "1.000123457 - 1"


@pytest.mark.parametrize(
    ("formula", "symbols", "numbers"),
    [
        (Leaf("a", 2.0) / (Leaf("b", 3.0) * Leaf("c", 4.0)), "a/(b c)", "2/(3 × 4)"),
        ((Leaf("a", 2.0) / Leaf("b", 3.0)) * Leaf("c", 4.0), "(a/b) c", "2/3 × 4"),
        (Leaf("c", 4.0) * (Leaf("a", 2.0) / Leaf("b", 3.0)), "c (a/b)", "4 × (2/3)"),
        (Leaf("ln z", -0.5) * Leaf("k", 2.0), "(ln z) k", "(-0.5) × 2"),
        (Leaf("a", 2e-9) ** 2, "a²", "(2e-9)^2"),
        (1 - (Leaf("a", 2.0) - Leaf("b", 3.0)), "1 − (a − b)", "1 - (2 - 3)"),
        (1 - Leaf("a", -2.0), "1 − a", "1 - (-2)"),
        (-Leaf("a", -2.0), "−a", "-(-2)"),
        (root(2 * Leaf("a", 2.0)), "(2 a)^(1/2)", "(2 × 2)^(1/2)"),
        ((Leaf("a", 2.0) ** 2) ** 3, "(a²)³", "(2^2)^3"),
    ],
)
def test_formulas_are_written_without_doubt(formula: Term, symbols: str, numbers: str) -> None:
    assert formula.written(SYMBOLS).text == symbols
    assert formula.written(Script(7)).text == numbers
    value = float(eval(numbers.replace("×", "*").replace("^", "**")))
    assert formula.value(exact) == pytest.approx(value, rel=1e-14)


def explanations(answer: CloudAnswer) -> list[Explanation]:
    return [explain(answer, name) for name in QUANTITIES]


# --- a calculator ---


def integral(function: Callable[[float], float], *edges: float) -> float:
    """By scipy, over sqrt(u), in which the integrands are smooth but for kinks at the edges."""
    roots = [math.sqrt(edge) for edge in (0.0, *edges)]
    roots += [roots[-1] + 1.0, roots[-1] + 3.0, roots[-1] + 7.0]
    pieces = ((a, b) for a, b in pairwise(roots) if b > a)
    return float(sum(quad(lambda w: 2 * w * function(w * w), a, b, epsrel=1e-11, limit=200)[0] for a, b in pieces))


def shell(weight: Callable[[float, float, float], float]) -> Callable[[Any], float]:
    """(2/sqrt(pi)) integral of sqrt(u) weight(u, x - u, d(u)) over the trap around a condensate of height x."""

    def function(height: Any) -> float:
        x = float(height)
        return 2 / math.sqrt(math.pi) * integral(
            lambda u: math.sqrt(u) * weight(u, x - u, bose(1.5, abs(u - x))), x
        )  # fmt: skip

    return function


def levels(alpha: Any, spacings: tuple[Any, ...], term: Callable[..., Any]) -> float:
    """Sum over j of exp(-j alpha) term(j b_1, j b_2, j b_3), term by term."""
    b = np.array([float(spacing) for spacing in spacings])
    j = np.arange(1.0, 60.0 / b.min())
    return float(np.sum(np.exp(-j * float(alpha)) * term(*(j * spacing for spacing in b))))


def product(*jb: Any) -> Any:
    return 1.0 / np.prod([-np.expm1(-x) for x in jb], axis=0)


def squared_levels(alpha: Any, *spacings: Any) -> float:
    """The double sum, with what long powers leave, the ground level's share, summed by itself."""
    b = np.array([float(spacing) for spacing in spacings])
    j = np.arange(1.0, 45.0 / b.min())
    powers, ground = np.exp(-j * float(alpha)), 1.0 / math.expm1(float(alpha))
    pairs, mixed, both = np.ones((j.size, j.size)), np.ones_like(j), 8.0**-0.5
    for spacing in b:
        one, tanh = -np.expm1(-2 * j * spacing), np.tanh(j * spacing / 2)
        pairs = pairs / np.sqrt(one[:, None] * one * (tanh[:, None] + tanh))
        mixed = mixed / np.sqrt(one * (tanh + 1.0))
    excited = powers @ (pairs - mixed - mixed[:, None] + both) @ powers
    return float(excited + 2.0 * ground * (powers @ (mixed - both)) + both * ground * ground)


def level_integral(alpha: Any, spacings: tuple[Any, ...], density: Callable[[Any, Any], Any]) -> float:
    """Over space, by Gauss and Legendre in r_i/a_i, of the densities of ground and excited levels in units of n₁."""
    b = np.array([float(spacing) for spacing in spacings])
    j, ground = np.arange(1.0, 45.0 / b.min()), 1.0 / math.expm1(float(alpha))
    tables, widths, grounds = [], [], []
    for spacing in b:
        nodes, weights = np.polynomial.legendre.leggauss(70)
        reach = math.sqrt(40.0 * max(1.0, 2.0 / spacing))
        x, dx = reach * ((nodes + 1) / 2) ** 2, reach * weights * (nodes + 1) / 2  # denser towards the centre
        tables.append(np.exp(-np.outer(x**2, np.tanh(j * spacing / 2))) / np.sqrt(-np.expm1(-2 * j * spacing)))
        widths.append(2.0 / math.sqrt(math.pi) * dx)
        grounds.append(np.exp(-(x**2)))
    first = tables[0] * np.exp(-j * float(alpha))
    shape = np.einsum("a,b,c->abc", *grounds)
    pairs = (first[:, None, :] * tables[1][None, :, :]).reshape(-1, j.size)
    excited = (pairs @ tables[2].T).reshape(shape.shape) - np.exp(-j * float(alpha)).sum() * shape
    return float(np.einsum("abc,a,b,c->", density(ground * shape, excited), *widths))


def fitted(statistics: Callable[[float, float], float]) -> Callable[[Any], float]:
    def image(q: float, log_z: float) -> float:
        return integral(lambda t: statistics(2.0, log_z - t) * math.exp(-q * t), max(log_z, 0.0))

    def ratio(log_z: Any) -> float:
        x = float(log_z)
        best = minimize_scalar(lambda q: -q * image(q, x) ** 2, bracket=(0.5, 1.2), options={"xtol": 1e-9})
        return 1.0 / float(best.x)

    return ratio


def bose_at(s: float, log_z: float) -> float:
    return float(bose(s, -log_z))


def fermi_at(s: float, log_z: float) -> float:
    return float(fermi(s, log_z))


def fermi_function(s: float) -> Callable[[Any], Any]:
    """By its integral, without the polylogarithm's cut."""
    return lambda z: (
        mpmath.quad(
            lambda t: t ** (s - 1) / (mpmath.exp(t) / z + 1), [0, 1, abs(mpmath.log(z)) + 1, abs(mpmath.log(z)) + 60]
        )
        / mpmath.gamma(s)
    )


def interaction_average(K: Any) -> Any:
    return (1 - mpmath.exp(1 / K) * mpmath.e1(1 / K) / K) / K if K else mpmath.mpf(1)


ORDERS = (("1_2", 0.5), ("3_2", 1.5), ("5_2", 2.5), ("2", 2), ("3", 3), ("4", 4))
BOSONS = {f"g_{name}": (lambda z, s=s: mpmath.polylog(s, z)) for name, s in ORDERS}
FERMI = {f"f_{name}": fermi_function(s) for name, s in ORDERS}
SHARED: dict[str, Any] = {
    **BOSONS, **FERMI, "pi": mpmath.pi, "exp": mpmath.exp, "ln": mpmath.log, "c": interaction_average,
    "F": shell(lambda u, v, d: d),
    "F_V": shell(lambda u, v, d: u * d),
    "F_L": shell(lambda u, v, d: abs(v) * d),
    "F_2": shell(lambda u, v, d: d * d),
    "F_C": shell(lambda u, v, d: max(v, 0.0) * d),
    "F_K": lambda x: 3 / math.sqrt(math.pi) * integral(
        lambda u: math.sqrt(u) * bose(2.5, abs(u - float(x))), float(x)),
    "S": lambda alpha, *b: levels(alpha, b, lambda *jb: product(*jb) - 1),
    "Q": lambda alpha, *b: levels(alpha, b, lambda *jb: np.sqrt(product(*(2 * x for x in jb))) - 1),
    "W": lambda alpha, *b: float(b[0]) * levels(
        alpha, b, lambda *jb: (product(*jb) - 1) / 2 + product(*jb) / np.expm1(jb[0])),
    "M": squared_levels,
    "L_2": lambda alpha, *b: level_integral(alpha, b, lambda c, t: c * c / 2 + 2 * c * t + t * t),
    "L_3": lambda alpha, *b: level_integral(
        alpha, b, lambda c, t: c**3 / 6 + 1.5 * c * c * t + 3 * c * t * t + t**3),
    "F_CC": shell(lambda u, v, d: max(v, 0.0) ** 2 * d),
    "F_C2": shell(lambda u, v, d: max(v, 0.0) * d * d),
    "F_3": shell(lambda u, v, d: d**3),
}  # fmt: skip


def overlap(statistics: Callable[[float, float], float], power: int) -> Callable[[Any], float]:
    def mean(log_z: Any) -> float:
        x = float(log_z)
        total = integral(lambda u: math.sqrt(u) * statistics(1.5, x - u) ** power, max(x, 0.0))
        return 2 / math.sqrt(math.pi) * total

    return mean


def lost_energy(statistics: Callable[[float, float], float], atoms: int) -> Callable[[Any], float]:
    def density(log_z: float, u: float) -> float:
        return math.sqrt(u) * statistics(1.5, log_z - u) ** (atoms - 1)

    def energy(log_z: float, u: float) -> float:
        return 1.5 * statistics(2.5, log_z - u) + u * statistics(1.5, log_z - u)

    def mean(log_z: Any) -> float:
        x, edge = float(log_z), max(float(log_z), 0.0)
        above = integral(lambda u: density(x, u) * energy(x, u), edge)
        return above / integral(lambda u: density(x, u) * statistics(1.5, x - u), edge)

    return mean


def each_level(term: Callable[..., Any]) -> Callable[..., float]:
    """Sum of term(filling, b, n) over the levels of a trap, one by one."""

    def total(log_z: Any, *spacings: Any) -> float:
        b = [float(spacing) for spacing in spacings]
        n = np.meshgrid(*(np.arange((max(float(log_z), 0.0) + 40.0) / spacing) for spacing in b), indexing="ij")
        energy = sum(spacing * (level + 0.5) for spacing, level in zip(b, n, strict=True))
        return float(np.sum(term(1.0 / (np.exp(energy - float(log_z)) + 1.0), b, n)))

    return total


def at_centre(n: Any) -> Any:
    """|φ_n(0)|² of an oscillator, in units of the inverse width of its ground level."""
    return np.where(n % 2 == 0, np.exp(gammaln(n + 1) - n * math.log(2) - 2 * gammaln(n // 2 + 1)), 0.0) / math.sqrt(
        math.pi
    )


FERMI_LEVELS = {
    "A": each_level(lambda f, b, n: f),
    "E": each_level(lambda f, b, n: f * b[0] * (n[0] + 0.5)),
    "B": each_level(
        lambda f, b, n: f * math.prod(math.sqrt(2 * math.pi * x) * at_centre(k) for x, k in zip(b, n, strict=True))),
}  # fmt: skip


def gaussian(strength: Any, *levels: Any) -> Any:
    ratios = [strength / level for level in levels]
    return mpmath.sqrt(2 * mpmath.pi) * strength * mpmath.sqrt(mpmath.fprod(x + mpmath.sqrt(1 + x * x) for x in ratios))


class MeanField:
    """The Hartree-Fock densities of a given repulsion, by their definition."""

    def __init__(self, g: Any) -> None:
        self.g = float(g)
        self.inside = brentq(lambda b: 2 * self.g * bose(0.5, b) - 1, 1e-12, 50.0, xtol=1e-18, rtol=1e-14)
        height = self.inside + 2 * self.g * bose(1.5, self.inside)
        self.outside = brentq(
            lambda b: 2 * self.g * bose(1.5, b) - b - height, 0.0, self.inside, xtol=1e-18, rtol=1e-14)  # fmt: skip

    def heart(self, alpha: float, h: Callable[..., float]) -> float:
        length = alpha - self.inside

        def piece(w: float) -> float:
            beta = alpha - length * w * w
            u = length * w * w + 2 * self.g * (bose(1.5, alpha) - bose(1.5, beta))
            fall = 1 - 2 * self.g * bose(0.5, beta)
            return math.sqrt(max(u, 0.0)) * h(u, beta / self.g, bose(1.5, beta), beta) * fall * 2 * length * w

        return self._quad(piece, (0.0, 0.5, 0.9, 0.99, 1.0))

    def around(self, start: float, u_e: float, h: Callable[..., float]) -> float:
        def piece(x: float) -> float:
            beta = start + math.exp(x)
            u = u_e + math.exp(x) + 2 * self.g * (bose(1.5, start) - bose(1.5, beta))
            rise = 1 + 2 * self.g * bose(0.5, beta)
            return math.sqrt(u) * h(u, 0.0, bose(1.5, beta), beta) * rise * math.exp(x)

        return self._quad(piece, (-45.0, -20.0, -10.0, -5.0, -2.0, 0.0, 2.0, 3.8))

    @staticmethod
    def _quad(piece: Callable[[float], float], edges: tuple[float, ...]) -> float:
        total = sum(quad(piece, a, b, epsrel=1e-11, limit=200)[0] for a, b in pairwise(edges))
        return 2 / math.sqrt(math.pi) * float(total)


def hartree_fock(h: Callable[..., float], condensed: bool) -> Callable[[Any, Any], float]:
    def total(alpha: Any, g: Any) -> float:
        field, centre = MeanField(g), float(alpha)
        if not condensed:
            return field.around(centre, 0.0, h)
        edge = centre - field.inside + 2 * field.g * (bose(1.5, centre) - bose(1.5, field.inside))
        return field.heart(centre, h) + field.around(field.outside, edge, h)

    return total


def verge(g: Any) -> float:
    field = MeanField(g)
    return field.around(field.outside, 0.0, lambda u, c, t, beta: t)


MEAN_FIELD: dict[str, Callable[..., float]] = {
    "H": lambda u, c, t, beta: c + t,
    "H_0": lambda u, c, t, beta: c,
    "H_T": lambda u, c, t, beta: t,
    "H_V": lambda u, c, t, beta: u * t,
    "H_U": lambda u, c, t, beta: u * (c + t),
    "H_P": lambda u, c, t, beta: bose(2.5, beta),
    "H_N": lambda u, c, t, beta: (c + t) ** 2,
    "H_2": lambda u, c, t, beta: c * c + 4 * c * t + 2 * t * t,
    "H_3": lambda u, c, t, beta: c**3 + 9 * c * c * t + 18 * c * t * t + 6 * t**3,
}


def calculated(numbers: str, answer: CloudAnswer) -> float:
    """What a pocket calculator with the functions of the definitions makes of a line of numbers."""
    text = re.sub(r"([gf])_(\d)/2\(", r"\1_\2_2(", numbers)
    text = re.sub(r"([gfJL])([₂₃₄])\(", lambda m: f"{m[1]}_{'₀₁₂₃₄'.index(m[2])}(", text)
    text = text.replace("×", "*").replace("^", "**").replace("π", "pi").replace("θ", "theta")
    text = re.sub(r"(?<![\w.])(\d+(?:\.\d+)?(?:e-?\d+)?)", r"mpf('\1')", text)
    statistics = bose_at if answer.bosons else fermi_at
    condensed = bool(answer.bosons and answer.equilibrium.condensate_fraction > 0.0)
    mean_field = {name: hartree_fock(h, condensed) for name, h in MEAN_FIELD.items()}
    integrals = {
        "J": overlap(statistics, 2), "J_3": overlap(statistics, 3), "theta": fitted(statistics),
        "e_2": lost_energy(statistics, 2), "e_3": lost_energy(statistics, 3),
    }  # fmt: skip
    names = {**SHARED, **FERMI_LEVELS, **integrals, **mean_field, "H_e": verge, "V": gaussian, "mpf": mpmath.mpf}
    with mpmath.workdps(25):
        return float(eval(text, {"__builtins__": {}}, names))


COMPARISONS = {">": operator.gt, "<": operator.lt, "≥": operator.ge, "≤": operator.le}


def last_place(text: str) -> float:
    """The value of one unit in the last digit of a number as printed."""
    mantissa, _, exponent = text.partition("e")
    return 10.0 ** (int(exponent or 0) - len(mantissa.partition(".")[2]))


def assert_printed(value: float, text: str, what: object) -> None:
    """The value, rounded to the digits printed, is what is printed."""
    slack = 1e-8 * abs(float(text))  # of the quadratures here
    assert abs(value - float(text)) <= 0.5 * last_place(text) + slack, what


def test_every_line_of_numbers_gives_the_result_beside_it(answer: CloudAnswer) -> None:
    seen: set[tuple[str, str]] = set()
    for explanation in explanations(answer):
        for step in explanation.steps:
            if (step.numbers, step.result) in seen:
                continue
            seen.add((step.numbers, step.result))
            what = (explanation.name, step)
            if step.kind is StepKind.FORMULA:
                assert_printed(calculated(step.numbers, answer), step.result, what)
            elif step.kind is StepKind.EQUATION:
                assert_printed(calculated(step.numbers, answer), step.left, what)
                assert step.left == step.right, what
            elif step.kind is StepKind.CASE:
                left, sign, right = step.numbers.split()
                assert COMPARISONS[sign](float(left), float(right)), what
            assert step.agrees, what
    assert len(seen) > 10


def test_results_have_six_digits_or_are_nothing(answer: CloudAnswer) -> None:
    """Fewer only for a difference that vanishes: the classical formulas of a cloud that is classical."""
    for explanation in explanations(answer):
        for step in explanation.steps:
            digits = re.sub(r"e.*|[-.]", "", step.result).lstrip("0")
            short = step.kind is StepKind.CASE or step.result == "0" or explanation.name.endswith("_error")
            assert short or len(digits) == 6, (explanation.name, step)


def test_numbers_come_from_inputs_or_from_steps_before(answer: CloudAnswer) -> None:
    """Every symbol of a line stands among the inputs or was found in a line above."""
    functions = {"F_V", "F_L", "F_K", "F_2", "F_3", "F_C", "F_CC", "F_C2", "e_2", "e_3", "exp", "ln", "π"}
    functions |= {"H_0", "H_T", "H_V", "H_U", "H_P", "H_N", "H_2", "H_3", "H_e"} | set("fgABEFHJLMQSVWcθ")
    for explanation in explanations(answer):
        known = {entry.symbol for entry in explanation.inputs} | functions
        for step in explanation.steps:
            unknown = step.expression
            for symbol in sorted(known | {step.symbol} - {""}, key=len, reverse=True):
                if step.kind is StepKind.EQUATION or symbol != step.symbol or symbol in known:
                    unknown = unknown.replace(symbol, " ")
            left = re.sub(r"_[135]/2|[₁₂₃₄²³⁴⁵\d\s()+−×/^=<>≤≥,.|]", "", unknown)
            assert step.kind is StepKind.GIVEN or left == "", (explanation.name, step, left)
            known |= {step.symbol} - {""}
