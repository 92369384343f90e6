"""An explanation as plain text, for a terminal or the clipboard, and as data, for JSON."""

from __future__ import annotations

from textwrap import wrap
from typing import Any

from app.explanations.explanation import Explanation, Input, Origin, Step, StepKind
from app.explanations.terms import operand_text
from app.tables import columns

NUMBERS_NOTE = (
    "Numbers are in SI units. Results have six significant digits; numbers that are put in have one or more beyond, "
    "as many as it takes to find the result again."
)


WIDTH = 100
"""Columns of text after which sentences are broken; formulas are never broken."""


def explanation_text(explanation: Explanation) -> str:
    """The explanation as a readable page."""
    return "\n".join(
        [
            headline(explanation),
            "",
            *columns(facts(explanation), indent=2),
            "",
            "From",
            *columns([input_cells(entry) for entry in explanation.inputs], indent=2),
            *_steps(explanation),
        ]
    )


def headline(explanation: Explanation) -> str:
    """The quantity and its value, or why there is none."""
    name = f"{explanation.title}, {explanation.symbol}"
    if explanation.value is None:
        return f"{name}: no value, {explanation.reason}"
    return f"{name} = {explanation.text}"


def facts(explanation: Explanation) -> list[tuple[str, str]]:
    """What holds of the quantity whatever the cloud, and the model that was used, each with its caption."""
    return [
        ("formula", explanation.formula),
        ("model", explanation.model),
        ("holds for", explanation.validity),
        ("source", explanation.source),
    ]


def input_cells(entry: Input) -> tuple[str, str, str, str]:
    """Symbol, SI value, text as typed or found with its meaning, and where it is from."""
    value = f"{operand_text(entry.value, 10)} {_unit(entry.unit)}".strip()
    return (
        f"{entry.symbol} = {value}",
        entry.text if entry.origin is not Origin.CONSTANT else "",
        entry.meaning,
        origin(entry),
    )


def origin(entry: Input) -> str:
    """Where an input is from and, where that says something, how sure it is."""
    parts = [entry.origin.value, entry.source, entry.certainty.value if entry.certainty else ""]
    return "; ".join(part for part in parts if part)


def step_lines(step: Step) -> list[str]:
    """A step as lines: the formula, the numbers put in, the result."""
    result = f"{step.result} {_unit(step.unit)}".strip()
    match step.kind:
        case StepKind.CASE:
            return [f"{step.expression}: {step.numbers}"]
        case StepKind.GIVEN:
            return [f"{step.symbol} = {result}"]
        case StepKind.INTEGRAL:
            return [f"{step.symbol} is {step.expression}", f"= {result}"]
        case StepKind.EQUATION:
            sides = f"check: left side {step.numbers} = {step.left}, right side {step.right_symbol} = {step.right}"
            return [f"solve {step.expression} for {step.symbol}", f"{step.symbol} = {result}", sides]
        case StepKind.FORMULA:
            lines = [f"{step.symbol} = {step.expression}"]
            if step.numbers != step.expression:
                lines.append(f"= {step.numbers}")
            return [*lines, f"= {result}"] if step.result != step.numbers else [*lines[:-1], f"{lines[-1]}"]


def _steps(explanation: Explanation) -> list[str]:
    if not explanation.steps:
        return []
    lines = ["", "Step by step"]
    for number, step in enumerate(explanation.steps, start=1):
        lines.append(f"  {number}. {step.meaning}")
        lines += [f"       {line}" for line in step_lines(step)]
        if step.where:
            lines += wrap(f"where {step.where}", WIDTH, initial_indent=" " * 7, subsequent_indent=" " * 9)
    if explanation.value is not None:
        lines.append(f"  {result_line(explanation)}")
    return [*lines, "", *wrap(NUMBERS_NOTE, WIDTH)]


def result_line(explanation: Explanation) -> str:
    """The value once more, after the steps in SI units, as it is read."""
    return f"So {explanation.symbol} = {explanation.text}."


def _unit(unit: str) -> str:
    return "" if unit == "1" else unit


# ---------------------------------------------------------------- data


def explanation_body(explanation: Explanation) -> dict[str, Any]:
    """The explanation for JSON: numbers in SI, null where there is none."""
    value = explanation.value
    return {
        "name": explanation.name,
        "label": explanation.title,
        "symbol": explanation.symbol,
        "value": list(value) if isinstance(value, tuple) else value,
        "unit": explanation.unit,
        "text": explanation.text,
        **({"reason": explanation.reason} if explanation.reason else {}),
        "formula": explanation.formula,
        "model": explanation.model,
        "validity": explanation.validity,
        "source": explanation.source,
        "complete": explanation.complete,
        "inputs": [_input_body(entry) for entry in explanation.inputs],
        "steps": [_step_body(step) for step in explanation.steps],
    }


def _input_body(entry: Input) -> dict[str, Any]:
    return {
        "symbol": entry.symbol,
        "meaning": entry.meaning,
        "text": entry.text,
        "value": entry.value,
        "unit": entry.unit,
        "origin": entry.origin.value,
        "source": entry.source,
        "certainty": entry.certainty.value if entry.certainty else None,
    }


def _step_body(step: Step) -> dict[str, Any]:
    body = {
        "kind": step.kind.value,
        "meaning": step.meaning,
        "symbol": step.symbol,
        "expression": step.expression,
        "numbers": step.numbers,
        "result": step.result,
        "value": step.value,
        "unit": step.unit,
    }
    if step.kind is StepKind.EQUATION:
        body |= {"left": step.left, "right": step.right, "right_symbol": step.right_symbol}
    return body | ({"where": step.where} if step.where else {})
